"""Frequencies and bare factors as people write them."""

from __future__ import annotations

import re

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.parts import Tolerance
from chooser.quantities import (
    format_factor,
    format_frequency,
    parse_duration,
    parse_factor,
    parse_frequency,
)
from chooser.quantities.decimals import LONGEST


@pytest.mark.parametrize(
    # SI brochure: prefixes u, m, k, M, G before Hz; the spellings are common practice, no source.
    ("text", "hertz"),
    [
        ("440Hz", 440),
        ("440 hz", 440),
        ("440 HZ", 440),
        ("440 hertz", 440),
        ("1.5 kHz", 1500),
        ("1,5kHz", 1500),
        ("1.5 KHz", 1500),
        ("1.5 kilohertz", 1500),
        ("1.5k", 1500),
        ("1k2", 1200),
        ("1k2Hz", 1200),
        ("2M2", 2.2e6),
        ("2.2MHz", 2.2e6),
        ("2.2 MHZ", 2.2e6),
        ("2.2 Mhz", 2.2e6),
        ("1GHz", 1e9),
        ("3.06mHz", 0.00306),
        ("5 millihertz", 0.005),
        ("100 µHz", 1e-4),
        ("1e3 Hz", 1000),
        ("32768 Hz", 32768),
    ],
)
def test_a_frequency_is_read(text, hertz):
    assert parse_frequency(text) == hertz


@pytest.mark.parametrize(
    ("text", "readings"),
    [
        ("440", ("440Hz", "440kHz")),
        ("1.5", ("1.5Hz", "1.5kHz")),
        ("3.06 mhz", ("3.06 MHz", "3.06 mHz")),
        ("5m", ("5 MHz", "5 mHz")),
        ("3m06", ("3.06 MHz", "3.06 mHz")),
        ("1,500 Hz", ("1.5 Hz", "1.5 kHz")),
        ("0.0001", ("0.1 mHz", "100 mHz")),
    ],
)
def test_a_doubtful_frequency_is_refused_with_readings_that_can_be_typed(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_frequency(text)
    assert caught.value.readings == readings
    assert len({parse_frequency(reading) for reading in readings}) == len(readings)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("Hz", "not a frequency"),
        ("0Hz", "is zero"),
        ("-5 Hz", "is below zero"),
        ("1e20Hz", "no believable frequency"),
        ("1e-20Hz", "no believable frequency"),
        ("inf Hz", "not a frequency"),
        ("100n", "not a frequency"),
        ("1k5k", "not a frequency"),
        ("44O Hz", "perhaps 440Hz was meant"),
        ("1.000.000 Hz", "write 1000000 without"),
        # Worked out: a period of 2 s is half a hertz, of 10 minutes a 600th.
        ("2s", "write 500 mHz if it is the period"),
        ("10 min", "write 1.66667 mHz if it is the period"),
    ],
)
def test_what_is_no_frequency_is_refused_with_what_to_do(text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse_frequency(text)
    assert caught.value.advice
    assert not isinstance(caught.value, AmbiguousValueError)


@pytest.mark.parametrize(
    ("hertz", "exact", "rounded"),
    [
        (440.0, "440 Hz", "440 Hz"),
        (1500.0, "1.5 kHz", "1.5 kHz"),
        (0.00306, "3.06 mHz", "3.06 mHz"),
        (2.2e6, "2.2 MHz", "2.2 MHz"),
        (999.96, "999.96 Hz", "1 kHz"),
        (0.0, "0 Hz", "0 Hz"),
    ],
)
def test_a_frequency_is_written_with_the_usual_prefix(hertz, exact, rounded):
    assert format_frequency(hertz) == exact
    assert format_frequency(hertz, digits=3) == rounded


@given(st.floats(1e-9, 1e11) | st.integers(1, 10**9).map(lambda n: n / 1000))
def test_reading_what_was_written_gives_the_same_frequency(hertz):
    assert parse_frequency(format_frequency(hertz)) == hertz


_ALMOST = st.from_regex(
    r"-?[0-9.,]{1,6} ?(u|m|k|K|M|G|milli)?[0-9]{0,2}(Hz|hz|HZ|hertz|s|min)?", fullmatch=True
)


@given(st.text() | _ALMOST)
def test_any_text_is_a_frequency_or_refused(text):
    try:
        hertz = parse_frequency(text)
    except AmbiguousValueError as error:
        assert {parse_frequency(reading) for reading in error.readings}  # noqa: PT017
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
        assert error.advice  # noqa: PT017
    else:
        assert 1e-9 <= hertz <= 1e11


@given(st.floats(1e-3, 1e6))
def test_no_text_is_both_a_frequency_and_a_duration(hertz):
    with pytest.raises(UnreadableValueError):
        parse_duration(format_frequency(hertz))


@pytest.mark.parametrize(
    # Common practice, no source.
    ("text", "factor", "tolerance"),
    [
        ("0.83", 0.83, None),
        ("0,83", 0.83, None),
        (".7", 0.7, None),
        ("1", 1.0, None),
        ("4.5e-1", 0.45, None),
        ("0.83 2%", 0.83, Tolerance(0.02, 0.02)),
        ("0,83 ±2 %", 0.83, Tolerance(0.02, 0.02)),
        ("0.83±2%", 0.83, Tolerance(0.02, 0.02)),
        ("0.83 +-2%", 0.83, Tolerance(0.02, 0.02)),
        ("0.83 -5/+10%", 0.83, Tolerance(0.05, 0.1)),
    ],
)
def test_a_factor_is_read(text, factor, tolerance):
    assert parse_factor(text) == (factor, tolerance)


@pytest.mark.parametrize(
    ("text", "readings"),
    [
        ("1,234", ("1.234", "1234")),
        ("1,234 2%", ("1.234 2%", "1234 2%")),
        ("83%", ("0.83",)),
        ("0.83 +5%", ("0.83 5%", "0.83 -0/+5%")),
    ],
)
def test_a_doubtful_factor_is_refused_with_readings_that_can_be_typed(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_factor(text)
    assert caught.value.readings == readings
    assert len({parse_factor(reading) for reading in readings}) == len(readings)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("0", "is zero as a factor"),
        ("-1", "is below zero as a factor"),
        ("1e9", "not believable as a factor"),
        ("0.83 5", "is not a factor"),
        ("0.83 J", "is not a factor"),
        ("1 000", "is not a factor"),
        ("0.83 100%", "has a tolerance, 100%, that is no believable tolerance"),
        ("0.83k", "is not a factor"),
        ("1.5.2", "more than one decimal mark"),
        ("nan", "is not a factor"),
    ],
)
def test_what_is_no_factor_is_refused_with_what_to_do(text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse_factor(text)
    assert caught.value.advice
    assert not isinstance(caught.value, AmbiguousValueError)


_TOLERANCES = st.none() | st.builds(Tolerance, st.floats(1e-4, 0.9), st.floats(1e-4, 9.0))


@given(st.floats(1e-6, 1e6), _TOLERANCES)
def test_reading_what_was_written_gives_the_same_factor(factor, tolerance):
    text = format_factor(factor, tolerance)
    assume(len(text) <= LONGEST)  # nobody types sixteen digits three times
    assert parse_factor(text) == (factor, tolerance)


@given(st.text() | st.from_regex(r"[0-9.,]{1,6}[ ±+-]{0,3}[0-9.,/+]{0,6} ?%?", fullmatch=True))
def test_any_text_is_a_factor_or_refused(text):
    try:
        factor, _ = parse_factor(text)
    except AmbiguousValueError as error:
        assert {parse_factor(reading) for reading in error.readings}  # noqa: PT017
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
        assert error.advice  # noqa: PT017
    else:
        assert 1e-6 <= factor <= 1e6
