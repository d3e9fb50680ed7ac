from __future__ import annotations

from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.cli.quick_entry import read_entry, read_part
from chooser.errors import ChooserError
from chooser.parts import Count, Entry, Kind, Part, Sureness, Taper, Tolerance


def sym(fraction: float) -> Tolerance:
    return Tolerance(fraction, fraction)


R, C = Kind.RESISTOR, Kind.CAPACITOR


@pytest.mark.parametrize(
    ("text", "part"),
    [
        ("10k", Part(R, 10e3, "10k")),
        ("10k 1% metal film", Part(R, 10e3, "10k", sym(0.01), "metal-film")),
        ("metal film 1% 10k", Part(R, 10e3, "10k", sym(0.01), "metal-film")),
        ("10 k ohm 1 % 1/4W", Part(R, 10e3, "10kohm", sym(0.01), power=0.25)),
        ("2R2 wirewound 5W 5% 50ppm", Part(R, 2.2, "2R2", sym(0.05), "wirewound", 5.0, None, 5e-5)),
        ("100 metal film", Part(R, 100.0, "100", None, "metal-film")),
        ("100n", Part(C, 1e-7, "100n")),
        ("4.7 uF 63 V polyester", Part(C, 4.7e-6, "4.7uF", None, "polyester", None, 63.0)),
        (
            "100u 25V electrolytic -20/+80%",
            Part(C, 1e-4, "100u", Tolerance(0.2, 0.8), "electrolytic", None, 25.0),
        ),
        ("104 polyester", Part(C, 1e-7, "104", None, "polyester")),
        ("473K capacitor", Part(C, 47e-9, "473K", sym(0.1))),
        ("NP0 100p", Part(C, 1e-10, "100p", None, "c0g")),
        ("470 pot linear", Part(Kind.POT, 470.0, "470", taper=Taper.LINEAR)),
        ("25-turn 10k trimmer", Part(Kind.TRIMMER, 10e3, "10k", turns=25.0)),
        ("100n 10% measured 96n", Part(C, 1e-7, "100n", sym(0.1), measured=96e-9)),
        ("100n measured 96 n 2 %", Part(C, 1e-7, "100n", measured=96e-9, meter=0.02)),
        ("measured: 9k9 ±1% 10k 5%", Part(R, 10e3, "10k", sym(0.05), measured=9.9e3, meter=0.01)),
        ("polyester measured 96n", Part(C, 96e-9, "96n", None, "polyester", measured=96e-9)),
        (
            "100u low leakage 25V leakage 2 uA",
            Part(C, 1e-4, "100u", None, "electrolytic-low-leakage", voltage=25.0, leakage=2e-6),
        ),
        ("100u leaks 1,5uA 16V", Part(C, 1e-4, "100u", voltage=16.0, leakage=1.5e-6)),
        ("10k +/- 5%", Part(R, 10e3, "10k", sym(0.05))),
    ],
)
def test_a_part_in_words(text, part):
    assert read_part(text) == part


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("100", ["'100'", "--kind resistor or --kind capacitor"]),
        ("473K", ["'473K'", "--kind resistor or --kind capacitor"]),
        ("metal film", ["holds no value", "10k"]),
        ("", ["holds no value"]),
        ("10k 22k", ["10k and 22k"]),
        ("lk5 5%", ["'lk5'", "perhaps 1k5"]),
        ("10k measured", ["'measured'", "without a figure"]),
        ("10k measured 9k9 measured 9k8", ["measured", "9k9 and 9k8"]),
        ("10k measured wrongly", ["'wrongly'"]),
        ("10k leaks 2uA", ["a resistor, which has no leakage"]),
        ("10k 1% 5%", ["tolerance", "1% and 5%"]),
        ("10k trimmer capacitor", ["trimmer and a capacitor"]),
        ("10k bakelite", ["'bakelite'", "resistor"]),
        ("4n7 polypropilene", ["'polypropilene'", "did you mean polypropylene"]),
        ("10k linear", ["a resistor, which has no taper"]),
        ("1m", ["'1m'", "1M or R001"]),
        ("10kk", ["'10kk'"]),
        ("473K 5% polyester", ["'5%'", "the letter of the marking 473K"]),
        ("100n 1/4W", ["'1/4W'", "a capacitor, which has no power"]),
    ],
)
def test_what_is_not_clear_is_refused_with_what_to_do(text, words):
    with pytest.raises(ChooserError) as refused:
        read_part(text)
    assert all(word in str(refused.value) for word in words), str(refused.value)
    assert "\n" not in str(refused.value)


def test_options_win_over_words_and_a_kind_said_decides():
    part = read_part("100u 20%", Kind.CAPACITOR, {"tolerance": "10%", "measured": "94u"})
    assert (part.tolerance, part.measured) == (sym(0.1), 94e-6)
    assert read_part("473K", Kind.RESISTOR).value == 473e3
    assert read_part("473K", Kind.CAPACITOR).value == 47e-9


@pytest.mark.parametrize(
    ("text", "said", "message"),
    [
        ("10k", {"measured": "9.9"}, "far from the value 10k"),
        ("10k", {"leakage": "3uA"}, "a resistor, which has no leakage"),
        ("100n", {"turns": "10"}, "a capacitor, which has no turns"),
        ("10k", {"voltage": "high"}, "'high'"),
        ("10k pot", {"end_resistance": "20k"}, "'20k' is not below the value 10k"),
        ("10k", {"note": "\x1b[31mred"}, "cannot be printed"),
        ("10k", {"note": "x" * 501}, "501 characters"),
    ],
)
def test_options_that_cannot_be_are_refused(text, said, message):
    with pytest.raises(ChooserError, match=message):
        read_part(text, None, said)


def test_an_entry_has_a_drawer_and_a_count():
    entry = read_entry("10k", None, {}, " top   shelf ", "~50")
    expected = Part(R, 10e3, "10k")
    assert entry == Entry(expected, "top shelf", Count(50, Sureness.ROUGH), "the command line")


@pytest.mark.parametrize(
    ("drawer", "words"),
    [("  ", "no name"), ("A\x1b[2J", "cannot be printed"), ("x" * 61, "61 characters")],
)
def test_a_drawer_has_a_name_that_can_be_printed(drawer, words):
    with pytest.raises(ChooserError, match=words):
        read_entry("10k", None, {}, drawer, "5")


def test_10k_said_to_be_a_capacitor_is_not_taken_for_ten_picofarad():
    with pytest.raises(ChooserError, match="10K or 10p"):
        read_part("10k", Kind.CAPACITOR)


@given(st.text() | st.text("0123456789.,kMRnupFVW% +-/±ohm"))
def test_any_text_is_read_or_refused(text):
    with suppress(ChooserError):  # any other error fails
        assert read_part(text).value > 0
