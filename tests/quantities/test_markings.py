"""What is printed on capacitors, against IEC 60062 and common practice."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, BadRequestError, UnreadableValueError
from chooser.parts import Tolerance
from chooser.preferred import series
from chooser.quantities.markings import format_capacitor_marking, parse_capacitor_marking
from chooser.quantities.tolerances import TOLERANCE_LETTERS

# Source: the three-digit code and its letters as capacitor makers' tables give them
# (104 is 100 nF, 103 is 10 nF, 105K is 1 uF +-10 %); letters IEC 60062.
READ = [
    ("104", 100e-9, None),
    ("103", 10e-9, None),
    ("473K", 47e-9, Tolerance(0.1, 0.1)),
    ("105K", 1e-6, Tolerance(0.1, 0.1)),
    ("474J", 470e-9, Tolerance(0.05, 0.05)),
    ("221", 220e-12, None),
    ("107", 100e-6, None),
    ("104M", 100e-9, Tolerance(0.2, 0.2)),
    ("104Z", 100e-9, Tolerance(0.2, 0.8)),
    ("104F", 100e-9, Tolerance(0.01, 0.01)),
    ("473k", 47e-9, Tolerance(0.1, 0.1)),
    ("473 K", 47e-9, Tolerance(0.1, 0.1)),
    # A trailing K is 10 %, not kilo: 47K on a small ceramic is 47 pF (same tables).
    ("47K", 47e-12, Tolerance(0.1, 0.1)),
    # IEC 60062 letter codes, alone and with a tolerance letter.
    ("4n7", 4.7e-9, None),
    ("4n7K", 4.7e-9, Tolerance(0.1, 0.1)),
    ("100nJ", 100e-9, Tolerance(0.05, 0.05)),
    ("22uM", 22e-6, Tolerance(0.2, 0.2)),
    ("u47 K", 470e-9, Tolerance(0.1, 0.1)),
    # Values with their unit pass; an F there is farad, never 1 %.
    ("100nF", 100e-9, None),
    ("4n7F", 4.7e-9, None),
    ("104n", 104e-9, None),
    ("0,1 µF", 100e-9, None),
    # R as decimal mark, in pF (common practice, no source).
    ("4R7", 4.7e-12, None),
    ("R47", 0.47e-12, None),
    ("4R7J", 4.7e-12, Tolerance(0.05, 0.05)),
    # Third digit 8 and 9 (from memory).
    ("479", 4.7e-12, None),
    ("828", 0.82e-12, None),
]


@pytest.mark.parametrize(("text", "value", "tolerance"), READ)
def test_a_marking_is_read(text, value, tolerance):
    reading = parse_capacitor_marking(text)
    assert reading.value == pytest.approx(value, rel=1e-15)
    assert reading.tolerance == tolerance
    assert reading.text == text
    assert reading.rule


@pytest.mark.parametrize(
    ("text", "readings"),
    [
        ("100", ("10p", "100p")),
        ("470K", ("47p", "470p")),
        ("47", ("47p", "47n", "47u")),
        ("10M", ("10p", "10u", "10000u")),
        ("47F", ("47p", "47 farad")),
        ("104N", ("100n", "104n")),
        ("104P", ("100n", "104p")),
        ("104m", ("100n", "104u", "104000u")),
        ("104H", ("100n with 3%", "100n with 2.5%")),
        ("1m", ("1u", "1000u")),
        ("047", ("047p", "047n", "047u")),
        # Large, K is the tolerance letter; small, everybody else means kilohm.
        ("10k", ("10K", "10p")),
        ("47 k", ("47K", "47p")),
        # From a number cell of a spreadsheet; no capacitor has 0.1 aF (common practice, no source).
        ("0.0000001", ("100n",)),
        ("1e-7", ("100n",)),
        ("0.00001", ("10p", "10u")),
        ("0.1", ("0.1n", "0.1u")),
    ],
)
def test_a_doubtful_marking_is_refused_with_its_readings(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_capacitor_marking(text)
    assert caught.value.readings == readings


@pytest.mark.parametrize("text", ["", "104X", "4n7x", "1O4Q", "K", "4k7", "4n7KK", "0R2C", "pF"])
def test_what_is_no_marking_is_refused(text):
    with pytest.raises(UnreadableValueError) as caught:
        parse_capacitor_marking(text)
    assert not isinstance(caught.value, AmbiguousValueError)


def test_a_small_tolerance_letter_is_suggested_large():
    with pytest.raises(UnreadableValueError, match="perhaps 4n7K was meant"):
        parse_capacitor_marking("4n7k")


@pytest.mark.parametrize(
    # Below 10 pF the letters are absolute: B 0.1, C 0.25, D 0.5 pF (IEC 60062);
    # F 1 and G 2 pF from memory.
    ("text", "picofarad"),
    [("4R7B", 0.1), ("4R7C", 0.25), ("8R2D", 0.5), ("8R2F", 1.0), ("8R2G", 2.0), ("479C", 0.25)],
)
def test_below_ten_picofarad_the_letters_are_absolute(text, picofarad):
    reading = parse_capacitor_marking(text)
    assert reading.tolerance is not None
    assert reading.tolerance.plus * reading.value == pytest.approx(picofarad * 1e-12)
    assert reading.tolerance.minus == reading.tolerance.plus


def test_from_ten_picofarad_on_the_letters_are_relative():
    assert parse_capacitor_marking("10pD").tolerance == Tolerance(0.005, 0.005)
    assert parse_capacitor_marking("9p1D").tolerance == pytest.approx(
        Tolerance(0.5 / 9.1, 0.5 / 9.1)
    )


@pytest.mark.parametrize(
    ("farad", "letter", "marking"),
    [
        (100e-9, "", "104"),
        (47e-9, "K", "473K"),
        (220e-12, "J", "221J"),
        (4.7e-12, "", "4p7"),
        (47e-12, "K", "47pK"),
        (47e-9, "N", "47nN"),
        (100e-6, "M", "107M"),
        (1.234e-9, "", "1n234"),
    ],
)
def test_the_usual_marking_is_written(farad, letter, marking):
    assert format_capacitor_marking(farad, TOLERANCE_LETTERS.get(letter)) == marking


@pytest.mark.parametrize(
    ("farad", "tolerance"),
    [(47e-12, Tolerance(0.01, 0.01)), (1e-7, Tolerance(0.07, 0.07)), (0.0, None), (1e9, None)],
)
def test_what_no_marking_says_is_not_written(farad, tolerance):
    with pytest.raises(BadRequestError, match="No marking says"):
        format_capacitor_marking(farad, tolerance)


@pytest.mark.parametrize("letter", ["", *"JKMZ"])
def test_every_e24_value_of_every_decade_survives_the_trip(letter):
    tolerance = TOLERANCE_LETTERS.get(letter)
    for number in series("E24"):
        for power in range(-13, -4):
            farad = float(f"{number}e{power}")
            reading = parse_capacitor_marking(format_capacitor_marking(farad, tolerance))
            assert (reading.value, reading.tolerance) == (farad, tolerance)


CHARACTERS = "0123456789RKMJZpnuµmF .,-"


@given(st.text() | st.text(CHARACTERS, max_size=8))
def test_any_text_is_read_or_refused(text):
    try:
        reading = parse_capacitor_marking(text)
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
    else:
        assert 1e-15 <= reading.value <= 10
