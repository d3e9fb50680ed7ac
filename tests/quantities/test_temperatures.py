"""Temperatures as people write them, alone and as ranges."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.quantities import (
    Span,
    format_temperature,
    parse_temperature,
    parse_temperature_range,
)


@pytest.mark.parametrize(
    # Common practice, no source.
    ("text", "celsius"),
    [
        ("25C", 25.0),
        ("25 c", 25.0),
        ("25 °C", 25.0),
        ("25\N{DEGREE CELSIUS}", 25.0),
        ("25 \N{MASCULINE ORDINAL INDICATOR}C", 25.0),
        ("25 deg C", 25.0),
        ("25degC", 25.0),
        ("25 degrees Celsius", 25.0),
        ("+50C", 50.0),
        ("-10 °C", -10.0),
        ("\N{MINUS SIGN}10C", -10.0),
        ("-0C", 0.0),
        ("36,6C", 36.6),
        ("-273.15 C", -273.15),
    ],
)
def test_a_temperature_is_read(text, celsius):
    assert parse_temperature(text) == celsius
    assert parse_temperature_range(text) == Span(celsius, celsius)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("warm", "not a temperature"),
        # Worked out: 273.15 K is 0 C; 32 F is 0 C and 212 F is 100 C.
        ("300K", "is in kelvin; write 26.85C"),
        ("300 \N{KELVIN SIGN}", "is in kelvin; write 26.85C"),
        ("104F", "is in degree Fahrenheit; write 40C"),
        ("-40 °F", "is in degree Fahrenheit; write -40C"),
        ("1e9 K", "is in kelvin; write degree Celsius"),
        ("-300C", "is below absolute zero"),
        ("2000C", "no believable temperature"),
        ("20±5C", "not a temperature"),
        ("25 coulomb", "not a temperature"),
        ("1.2.3C", "more than one decimal mark"),
    ],
)
def test_what_is_no_temperature_is_refused_with_what_to_do(text, words):
    for parse in (parse_temperature, parse_temperature_range):
        with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
            parse(text)
        assert caught.value.advice
        assert not isinstance(caught.value, AmbiguousValueError)


@pytest.mark.parametrize(
    ("text", "readings"),
    [("25", ("25C",)), ("25°", ("25C",)), ("-10", ("-10C",)), ("1,500 C", ("1.500C",))],
)
def test_a_doubtful_temperature_is_refused_with_readings_that_can_be_typed(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_temperature(text)
    assert caught.value.readings == readings
    assert [parse_temperature(reading) for reading in readings]


@pytest.mark.parametrize(
    ("text", "low", "high"),
    [
        ("0..40C", 0.0, 40.0),
        ("0C..40C", 0.0, 40.0),
        ("-10..+50 °C", -10.0, 50.0),
        ("-10 °C..+50 °C", -10.0, 50.0),
        ("-20 to -5 C", -20.0, -5.0),
        ("0-40C", 0.0, 40.0),
        ("0 \N{EN DASH} 40 C", 0.0, 40.0),
        ("0\N{DEGREE CELSIUS}-40\N{DEGREE CELSIUS}", 0.0, 40.0),
        ("0…40 deg C", 0.0, 40.0),
    ],
)
def test_a_range_of_temperatures_is_read(text, low, high):
    assert parse_temperature_range(text) == Span(low, high)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("40..0C", "runs backwards, as its low end is read as 40C"),
        ("40C..0C", "runs backwards"),
        ("20C..20C", "is empty"),
        ("0..40", "has an end, 0, that has no unit; write 0C"),
        ("0C..40", "has an end, 40, that has no unit; write 40C"),
        ("32..104F", "has an end, 104F, that is in degree Fahrenheit; write 40C"),
        ("280..310K", "has an end, 310K, that is in kelvin"),
        ("0..10..20C", "not a temperature"),
        ("..40C", "not a temperature"),
    ],
)
def test_what_is_no_range_of_temperatures_is_refused_with_what_to_do(text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse_temperature_range(text)
    assert caught.value.text == text


_CELSIUS = st.floats(-273.15, 1000.0) | st.integers(-550, 1250).map(lambda n: n / 10)


@given(_CELSIUS)
def test_reading_what_was_written_gives_the_same_temperature(celsius):
    assert parse_temperature(format_temperature(celsius)) == celsius


@given(_CELSIUS, _CELSIUS)
def test_reading_a_range_that_was_written_gives_the_same_ends(one, other):
    low, high = sorted((one, other))
    text = f"{format_temperature(low)}..{format_temperature(high)}"
    if len(text) <= 60 and low < high:
        assert parse_temperature_range(text) == Span(low, high)


def test_a_temperature_is_written_in_the_digits_asked_for():
    assert format_temperature(36.642) == "36.642 C"
    assert format_temperature(36.642, digits=3) == "36.6 C"
    assert format_temperature(-10.0) == "-10 C"


@given(st.text() | st.from_regex(r"[-+]?[0-9.,]{1,5} ?(°|deg )?[CFKcfk]?", fullmatch=True))
def test_any_text_is_a_temperature_or_refused(text):
    for parse in (parse_temperature, parse_temperature_range):
        try:
            parse(text)
        except AmbiguousValueError as error:
            assert [parse(reading) for reading in error.readings]  # noqa: PT017
        except UnreadableValueError as error:
            assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
            assert error.advice  # noqa: PT017


@given(
    st.from_regex(
        r"[-+]?[0-9.,]{1,4} ?(°?C)?( ?\.\. ?|-| to |…)[-+]?[0-9.,]{1,4} ?(°?[CFK])?",
        fullmatch=True,
    )
)
def test_any_range_of_temperatures_is_read_or_refused(text):
    try:
        span = parse_temperature_range(text)
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
    else:
        assert -273.15 <= span.low <= span.high <= 1000.0
