"""What cannot be true of a part, whichever way it comes in."""

from __future__ import annotations

import pytest

from chooser.cli.quick_entry import read_part
from chooser.errors import ChooserError, SheetError, UnreadableValueError
from chooser.parts import Kind, Part, Tolerance
from chooser.plausible import complaints_of, drawer_name, free_text
from chooser.sheets.reading import read_sheets

TEN, FIVE = Tolerance(0.1, 0.1), Tolerance(0.05, 0.05)


@pytest.mark.parametrize(
    ("part", "marked", "traits"),
    [
        (Part(Kind.RESISTOR, 1e4, "10k", FIVE, measured=9.9e3, power=0.25), None, []),
        (Part(Kind.POT, 1e4, "10k", turns=1.0, end_resistance=2.0), None, []),
        (Part(Kind.CAPACITOR, 47e-9, "473K", TEN, leakage=1e-9), TEN, []),
        (Part(Kind.CAPACITOR, 47e-9, "473K", FIVE), TEN, ["tolerance"]),
        (Part(Kind.CAPACITOR, 1e-7, power=0.25), None, ["power"]),
        (Part(Kind.RESISTOR, 1e4, leakage=1e-9, turns=1.0), None, ["leakage", "turns"]),
        (Part(Kind.RESISTOR, 1e4, measured=9.9), None, ["measured"]),
        (Part(Kind.POT, 1e4, end_resistance=1e4), None, ["end_resistance"]),
    ],
)
def test_traits_that_cannot_be_true_together(part, marked, traits):
    found = complaints_of(part, marked)
    assert [each.trait for each in found] == traits
    assert all(each.problem and each.advice for each in found)


@pytest.mark.parametrize("measured", [3334.0, 10e3, 29.9e3])
def test_a_drifted_part_may_be_measured(measured):
    assert complaints_of(Part(Kind.RESISTOR, 1e4, measured=measured)) == ()


@pytest.mark.parametrize(
    ("kind", "value", "trait", "text"),
    [
        ("capacitor", "473K", "tolerance", "5%"),
        ("capacitor", "100n", "power", "1/4W"),
        ("pot", "10k", "end_resistance", "20k"),
        ("resistor", "10k", "measured", "9.9"),
        ("resistor", "10k", "leakage", "3uA"),
        ("resistor", "10k", "note", "\u202eback"),
        ("resistor", "10k", "note", "fine"),
        ("capacitor", "473K", "tolerance", "10%"),
    ],
)
def test_a_sheet_and_a_command_refuse_the_same(tmp_path, kind, value, trait, text):
    sheet = tmp_path / "parts.csv"
    sheet.write_text(
        f"kind,value,count,drawer,{trait}\n{kind},{value},1,A1,{text}\n", encoding="utf-8"
    )
    try:
        (entry,) = read_sheets([sheet])
    except SheetError as refused:
        problem = refused.findings[0].problem
        with pytest.raises(ChooserError) as also:
            read_part(value, Kind(kind), {trait: text})
        assert problem in str(also.value)
    else:
        assert read_part(value, Kind(kind), {trait: text}) == entry.part


@pytest.mark.parametrize("read", [drawer_name, free_text])
@pytest.mark.parametrize("text", ["\x1b[2J", "a\u202eb", "a\0", "\ud800"], ids=ascii)
def test_what_could_drive_a_terminal_is_refused(read, text):
    with pytest.raises(UnreadableValueError, match="cannot be printed"):
        read(text)


def test_white_space_is_made_single_and_lengths_are_held():
    assert drawer_name("  top\t shelf\u00a0 2 ") == "top shelf 2"
    assert drawer_name("x" * 60) == "x" * 60
    assert free_text("") == ""
    assert free_text("x" * 500) == "x" * 500
    for read, text in ((drawer_name, "x" * 61), (drawer_name, " "), (free_text, "x" * 501)):
        with pytest.raises(UnreadableValueError):
            read(text)
