"""Tolerances and percentages, against the letters of IEC 60062."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.parts import Tolerance
from chooser.quantities import format_percent, format_tolerance, parse_percent, parse_tolerance

# Source: IEC 60062, tolerance letters (E and Q from memory).
LETTERS = [
    ("B", 0.001, 0.001),
    ("C", 0.0025, 0.0025),
    ("D", 0.005, 0.005),
    ("F", 0.01, 0.01),
    ("G", 0.02, 0.02),
    ("J", 0.05, 0.05),
    ("K", 0.10, 0.10),
    ("M", 0.20, 0.20),
    ("N", 0.30, 0.30),
    ("S", 0.20, 0.50),
    ("T", 0.10, 0.50),
    ("Z", 0.20, 0.80),
    ("E", 0.00005, 0.00005),
    ("Q", 0.10, 0.30),
]

WRITTEN = [
    ("5%", 0.05, 0.05),
    ("5 %", 0.05, 0.05),
    ("5", 0.05, 0.05),
    ("1", 0.01, 0.01),
    ("±5%", 0.05, 0.05),
    ("± 5 %", 0.05, 0.05),
    ("+-5%", 0.05, 0.05),
    ("+/-5%", 0.05, 0.05),
    ("-/+ 5%", 0.05, 0.05),
    ("0,5%", 0.005, 0.005),
    ("2.5 percent", 0.025, 0.025),
    ("-20/+80%", 0.2, 0.8),
    ("-20% / +80%", 0.2, 0.8),
    ("+80/-20%", 0.2, 0.8),
    ("-20%+80%", 0.2, 0.8),
    ("-20 +80", 0.2, 0.8),
    ("-20..+80%", 0.2, 0.8),
    ("-20% to +80%", 0.2, 0.8),
    ("\N{MINUS SIGN}20/+80 %", 0.2, 0.8),
    ("0/+100%", 0.0, 1.0),
    ("-0/+100%", 0.0, 1.0),
    ("+50/-10", 0.1, 0.5),
    ("+0/-10%", 0.1, 0.0),
    ("j", 0.05, 0.05),
]


@pytest.mark.parametrize(("text", "minus", "plus"), LETTERS + WRITTEN)
def test_a_tolerance_is_read(text, minus, plus):
    assert parse_tolerance(text) == Tolerance(minus, plus)


@pytest.mark.parametrize(
    ("text", "readings"),
    [
        ("0.05", ("0.05%", "5%")),
        ("0.5", ("0.5%", "50%")),
        ("+5%", ("5%", "-0/+5%")),
        ("-5%", ("5%", "-5/+0%")),
        ("1,000%", ("1.000%",)),
        ("H", ("3%", "2.5%")),
        ("P", ("0.02%", "-0/+100%")),
        ("W", ("0.05%", "-0/+200%")),
        ("L", ("0.01%", "15%")),
    ],
)
def test_a_doubtful_tolerance_is_refused_with_its_readings(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_tolerance(text)
    assert caught.value.readings == readings


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("0", "is zero"),
        ("0%", "is zero"),
        ("100%", "no believable tolerance"),
        ("-100/+5%", "no believable tolerance"),
        ("5000%", "no believable tolerance"),
        ("20/80", "not a tolerance"),
        ("-20/-10%", "which end is below"),
        ("+20/+10%", "which end is below"),
        ("-20/+80%/5", "not a tolerance"),
        ("-289", "no believable"),
        ("X", "no tolerance letter"),
        ("5ppm", "not a tolerance"),
        ("±0.25pF", "not a tolerance"),
        ("JK", "not a tolerance"),
        ("five", "not a tolerance"),
    ],
)
def test_what_is_no_tolerance_is_refused_with_what_to_do(text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse_tolerance(text)
    assert caught.value.advice
    assert not isinstance(caught.value, AmbiguousValueError)


@pytest.mark.parametrize(
    ("text", "fraction"),
    [
        ("2%", 0.02),
        ("0.5 %", 0.005),
        ("±2%", 0.02),
        ("0%", 0.0),
        ("500ppm", 0.0005),
        ("50 pct", 0.5),
    ],
)
def test_a_percentage_is_read(text, fraction):
    assert parse_percent(text) == fraction


@pytest.mark.parametrize(
    ("text", "readings"), [("2", ("2%", "200%")), ("0.02", ("0.02%", "2%")), (".1", (".1%", "10%"))]
)
def test_a_number_without_its_sign_is_no_percentage(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_percent(text)
    assert caught.value.readings == readings


@pytest.mark.parametrize("text", ["", "-2%", "%", "2%%", "two %", "5 % ppm", "1e9%", "J"])
def test_what_is_no_percentage_is_refused(text):
    with pytest.raises(UnreadableValueError):
        parse_percent(text)


@pytest.mark.parametrize(
    ("tolerance", "text"),
    [
        (Tolerance(0.05, 0.05), "5%"),
        (Tolerance(0.2, 0.8), "-20/+80%"),
        (Tolerance(0.0, 1.0), "-0/+100%"),
        (Tolerance(0.0005, 0.0005), "0.05%"),
    ],
)
def test_a_tolerance_is_written(tolerance, text):
    assert format_tolerance(tolerance) == text


def test_a_percentage_is_written_signed_and_rounded():
    assert format_percent(0.000958, signed=True, digits=2) == "+0.096%"
    assert format_percent(-0.035, signed=True) == "-3.5%"
    assert format_percent(0.0, signed=True) == "0%"
    assert format_percent(0.02) == "2%"


FRACTIONS = st.floats(1e-9, 0.99) | st.integers(1, 9999).map(lambda n: float(f"{n}e-4"))


@given(FRACTIONS | st.floats(0, 9.9))
def test_a_written_percentage_is_read_as_the_same_float(fraction):
    assert parse_percent(format_percent(fraction)) == fraction


@given(FRACTIONS.filter(lambda fraction: fraction < 1), FRACTIONS)
def test_a_written_tolerance_is_read_as_the_same(minus, plus):
    for tolerance in (Tolerance(minus, minus), Tolerance(minus, plus), Tolerance(0.0, plus)):
        assert parse_tolerance(format_tolerance(tolerance)) == tolerance


@given(
    st.text() | st.from_regex(r"[-+±]{0,2}[0-9.,]{1,4} ?%?( ?[/,.]{0,2} ?[-+]?[0-9.,]{1,4} ?%?)?")
)
def test_any_text_is_a_tolerance_or_refused(text):
    try:
        tolerance = parse_tolerance(text)
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
    else:
        assert 0 <= tolerance.minus < 1
        assert tolerance.minus + tolerance.plus > 0
    try:
        assert parse_percent(text) >= 0
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - as above
