"""Durations and ranges as people write them."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.quantities import (
    Span,
    format_duration,
    is_range,
    parse_capacitance_range,
    parse_duration,
    parse_duration_range,
    parse_percent_range,
    parse_resistance_range,
)


@pytest.mark.parametrize(
    # Common practice, no source; 60 s a minute, 60 min an hour, 24 h a day.
    ("text", "seconds"),
    [
        ("90s", 90),
        ("90 S", 90),
        ("90 sec", 90),
        ("90 seconds", 90),
        ("1.5min", 90),
        ("1,5 min", 90),
        ("2h", 7200),
        ("1 hour", 3600),
        ("1d", 86400),
        ("12ms", 0.012),
        ("500us", 500e-6),
        ("500 µs", 500e-6),
        ("10ns", 10e-9),
        ("0.1 ms", 0.0001),
        ("1:30", 90),
        ("0:05", 5),
        ("90:00", 5400),
        ("1:02:03", 3723),
        ("1:30.5", 90.5),
        ("1:30,5", 90.5),
        ("2h30min", 9000),
        ("2 h 05 min", 7500),
        ("1h 30m", 5400),
        ("1m30s", 90),
        ("1h30m15s", 5415),
        ("1 s 500 ms", 1.5),
        ("1e-3 s", 0.001),
    ],
)
def test_a_duration_is_read(text, seconds):
    assert parse_duration(text) == seconds


@pytest.mark.parametrize(
    ("text", "readings"),
    [
        ("90", ("90s", "90min")),
        ("1.5", ("1.5s", "1.5min")),
        ("5m", ("5min", "5ms")),
        ("5 M", ("5min", "5ms")),
        ("1,500 s", ("1.500s", "1500s")),
        ("1,500", ("1.500s", "1.500min", "1500s", "1500min")),
    ],
)
def test_a_doubtful_duration_is_refused_with_readings_that_can_be_typed(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_duration(text)
    assert caught.value.readings == readings
    assert len({parse_duration(reading) for reading in readings}) == len(readings)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("0s", "is zero"),
        ("0:00", "is zero"),
        ("-5s", "is below zero"),
        ("2h30", "perhaps 2h30min was meant"),
        ("1min30", "perhaps 1min30s was meant"),
        ("1:5", "perhaps 1:05 was meant"),
        ("1:75", "60 or more after a colon"),
        ("1:60:00", "60 or more after a colon"),
        ("30s 1min", "from large to small"),
        ("1min 1min", "from large to small"),
        ("1min 90s", "beside a larger unit"),
        ("1min -5s", "beside a larger unit"),
        ("half an hour", "not a duration"),
        ("90 parsec", "not a duration"),
        ("1.000.000s", "write 1000000 without"),
        ("90 h 90", "not a duration"),
        ("-5", "is below zero"),
        ("1e99s", "no believable duration"),
        ("1e-99s", "no believable duration"),
        ("9999999999999:00", "no believable duration"),
        ("inf s", "not a duration"),
    ],
)
def test_what_is_no_duration_is_refused_with_what_to_do(text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse_duration(text)
    assert caught.value.advice
    assert not isinstance(caught.value, AmbiguousValueError)


@pytest.mark.parametrize(
    ("seconds", "exact", "rounded"),
    [
        (0.012, "12 ms", "12 ms"),
        (5e-7, "500 ns", "500 ns"),
        (5e-4, "500 us", "500 us"),
        (0.9999, "999.9 ms", "1 s"),
        (90.0862, "90.0862 s", "90.1 s"),
        (119.999, "119.999 s", "2 min"),
        (120.0, "2 min", "2 min"),
        (754.321, "12 min 34.321 s", "12 min 34 s"),
        (3600.0, "1 h", "1 h"),
        (3605.5, "1 h 00 min 05.5 s", "1 h 00 min 10 s"),
        (7500.0, "2 h 05 min", "2 h 05 min"),
        (45_296.2, "12 h 34 min 56.2 s", "12 h 35 min"),
        (0.0, "0 s", "0 s"),
        (-90.0, "-90 s", "-90 s"),
        (float("inf"), "never", "never"),
        (float("nan"), "nan", "nan"),
    ],
)
def test_a_duration_is_written_in_the_clearest_units(seconds, exact, rounded):
    assert format_duration(seconds) == exact
    assert format_duration(seconds, digits=3) == rounded


@given(st.floats(1e-9, 1e10) | st.integers(1, 10**9).map(lambda n: n / 1000))
def test_reading_what_was_written_gives_the_same_float(seconds):
    assert parse_duration(format_duration(seconds)) == seconds


@pytest.mark.parametrize("text", ["5s..60s", "5..60s", "1 to 5 min", "1:30..5:00"])
def test_ranges_of_durations_look_like_ranges(text):
    assert is_range(text)


@pytest.mark.parametrize(
    # SI: M is mega and m is milli, so a large M before the second says neither without doubt.
    "text",
    ["1Ms", "1 MS", "1Msec", "2h 1Ms"],
)
def test_a_unit_whose_case_changes_its_meaning_is_refused(text):
    with pytest.raises(UnreadableValueError, match="capital M, which is mega"):
        parse_duration(text)


@given(st.text() | st.from_regex(r"[0-9.,:]{1,5} ?(h|m|min|s|ms)?( ?[0-9]{1,3} ?(min|m|s|ms))?"))
def test_any_text_is_a_duration_or_refused(text):
    try:
        seconds = parse_duration(text)
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
    else:
        assert 1e-9 <= seconds <= 1e10


@pytest.mark.parametrize(
    ("parse", "text", "low", "high"),
    [
        (parse_resistance_range, "10..1M", 10, 1e6),
        (parse_resistance_range, "1k..10k", 1e3, 1e4),
        (parse_resistance_range, "1k to 4k7", 1e3, 4700),
        (parse_capacitance_range, "1n..1u", 1e-9, 1e-6),
        (parse_capacitance_range, "4n7 .. 0,1 uF", 4.7e-9, 1e-7),
        (parse_resistance_range, "10 \N{EN DASH} 100", 10, 100),
        (parse_resistance_range, "1k-10k", 1e3, 1e4),
        (parse_resistance_range, "10…100", 10, 100),
        (parse_resistance_range, "1e3..1M", 1e3, 1e6),
        (parse_duration_range, "5s..60s", 5, 60),
        (parse_duration_range, "5..60s", 5, 60),
        (parse_duration_range, "5-60 s", 5, 60),
        (parse_duration_range, "5 - 60 s", 5, 60),
        (parse_duration_range, "1 to 5 min", 60, 300),
        (parse_duration_range, "30s..5min", 30, 300),
        (parse_duration_range, "1:30..5:00", 90, 300),
        (parse_duration_range, "90s..2h30min", 90, 9000),
        (parse_percent_range, "50..55%", 0.5, 0.55),
        (parse_percent_range, "50%..55%", 0.5, 0.55),
        (parse_percent_range, "50%-55%", 0.5, 0.55),
        (parse_percent_range, "33,3 to 66,7 percent", 0.333, 0.667),
        (parse_percent_range, "0..5%", 0, 0.05),
    ],
)
def test_a_range_is_read(parse, text, low, high):
    assert parse(text) == Span(low, high)
    assert is_range(text)


@pytest.mark.parametrize(
    ("parse", "text", "words"),
    [
        (parse_resistance_range, "10..100n", "has an end, 100n"),
        (parse_resistance_range, "10k..1k", "runs backwards"),
        (parse_resistance_range, "1k..1k", "is empty"),
        (parse_resistance_range, "1k", "write low..high"),
        (parse_resistance_range, "1k..", "write low..high"),
        (parse_resistance_range, "..1k", "write low..high"),
        (parse_resistance_range, "1..2..3", "write low..high"),
        (parse_resistance_range, "1...5", "write low..high"),
        (parse_resistance_range, "0..5", "is zero"),
        (parse_duration_range, "60..5s", "runs backwards, as its low end is read as 60s"),
        (parse_duration_range, "90..2min", "runs backwards, as its low end is read as 90min"),
        (parse_duration_range, "60s..60s", "is empty"),
        (parse_duration_range, "60s", "write low..high"),
        (parse_duration_range, "5..60", "has an end, 5, that has no unit; write 5s or 5min"),
        (parse_duration_range, "5s..60", "has an end, 60, that has no unit; write 60s or 60min"),
        (parse_duration_range, "5..2h30min", "has an end, 5, that has no unit"),
        (parse_duration_range, "1..1:30", "has an end, 1, that has no unit"),
        (parse_duration_range, "5..60 furlongs", "has an end, 60 furlongs, that is not a"),
        (parse_percent_range, "55..50%", "runs backwards"),
        (parse_percent_range, "50%", "write low..high"),
        (parse_percent_range, "50..55", "has an end, 50, that has no % sign; write 50%"),
        (parse_percent_range, "0.5..0.55", "write 0.5% or 50%"),
        (parse_percent_range, "-5..5%", "is below zero"),
    ],
)
def test_what_is_no_range_is_refused_with_what_to_do(parse, text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse(text)
    assert caught.value.text == text


@pytest.mark.parametrize(
    ("parse", "text"),
    [
        (parse_resistance_range, "10m..1M"),
        (parse_capacitance_range, "1..100n"),
        (parse_duration_range, "5..10m"),
        (parse_duration_range, "1s..1,500s"),
        (parse_percent_range, "1..1,500%"),
    ],
)
def test_a_range_with_a_doubtful_end_is_refused_naming_it(parse, text):
    with pytest.raises(AmbiguousValueError, match="has an end"):
        parse(text)


@pytest.mark.parametrize("text", ["90s", "1:30", "1.5min", "", "4n7", "-5s", "1e-3s", "1...5"])
def test_single_values_do_not_look_like_ranges(text):
    assert not is_range(text)


@given(st.text() | st.from_regex(r"[0-9.,:]{1,4}[a-zµ]{0,3}(\.\.|-| to |…)[0-9.,:]{1,4}[a-z]{0,3}"))
def test_any_text_is_a_range_or_refused(text):
    for parse in (parse_resistance_range, parse_capacitance_range, parse_duration_range):
        try:
            span = parse(text)
        except UnreadableValueError as error:
            assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
        else:
            assert 0 < span.low < span.high
    is_range(text)


@given(st.text() | st.from_regex(r"[0-9.,]{1,4} ?%?(\.\.|-| to |…)[0-9.,]{1,4} ?%?"))
def test_any_text_is_a_range_of_percentages_or_refused(text):
    try:
        span = parse_percent_range(text)
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
    else:
        assert 0 <= span.low < span.high


@given(st.floats(1e-9, 1e9), st.floats(1e-9, 1e9))
def test_a_range_that_was_written_is_read_with_the_same_ends(one, other):
    low, high = sorted((one, other))
    text = f"{format_duration(low)}..{format_duration(high)}"
    if len(text) <= 60 and low < high:
        assert parse_duration_range(text) == Span(low, high)
