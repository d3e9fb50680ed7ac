from __future__ import annotations

from pathlib import Path

import pytest

from chooser.parts import Kind, Sureness
from chooser.sheets.reading import read_sheets
from chooser.technologies import technology_of

_FOLDER = Path(__file__).parents[2] / "sample_inventory"


@pytest.fixture(scope="module")
def entries():
    return read_sheets([_FOLDER])


def _of(entries, *kinds):
    return [entry for entry in entries if entry.part.kind in kinds]


def test_it_holds_as_many_as_promised(entries):
    assert len(_of(entries, Kind.RESISTOR)) >= 150
    assert len(_of(entries, Kind.POT, Kind.TRIMMER)) >= 12
    assert len(_of(entries, Kind.CAPACITOR)) >= 45
    assert len(_of(entries, Kind.POT)) >= 5
    assert len(_of(entries, Kind.TRIMMER)) >= 5


def test_its_resistors_have_about_168_different_values_at_hand(entries):
    at_hand = {
        entry.part.effective
        for entry in _of(entries, Kind.RESISTOR)
        if entry.count.number > 0 or entry.count.sureness is Sureness.PLENTY
    }
    assert len(at_hand) == 168


def test_it_has_the_quirks_of_real_drawers(entries):
    parts = [entry.part for entry in entries]
    assert sum(part.measured is not None for part in parts) >= 10
    assert sum(entry.count.sureness is Sureness.ROUGH for entry in entries) >= 8
    assert sum(entry.count.sureness is Sureness.PLENTY for entry in entries) >= 2
    assert sum(entry.count.number == 0 for entry in entries) >= 4
    assert {"104", "103Z", "473Z", "105K"} <= {part.marking for part in parts}
    assert any(part.tolerance and part.tolerance.minus != part.tolerance.plus for part in parts)
    tens = [entry.part.value for entry in entries if entry.drawer == "T1"]
    assert tens == [1e3, 1e4, 1e5]


def test_one_value_comes_in_several_tolerances_from_different_drawers(entries):
    places = {
        (entry.part.tolerance, entry.drawer)
        for entry in _of(entries, Kind.RESISTOR)
        if entry.part.value == 100e3
    }
    assert len({tolerance for tolerance, _ in places}) >= 3
    assert len({drawer for _, drawer in places}) >= 3


def test_its_capacitors_are_of_every_family(entries):
    parts = [entry.part for entry in _of(entries, Kind.CAPACITOR)]
    names = {part.technology for part in parts}
    assert {"c0g", "x7r", "ceramic", "polyester", "polypropylene"} <= names
    assert {"electrolytic", "electrolytic-low-leakage", "tantalum"} <= names
    assert all(technology_of(part) is not None for part in parts)
    voltages = {part.voltage for part in parts if part.technology == "electrolytic"}
    assert len(voltages) >= 4
    films = {part.value for part in parts if part.technology == "polyester"}
    assert {1e-6, 2.2e-6, 4.7e-6} <= films


def test_it_comes_as_csv_with_both_separators_and_as_a_workbook():
    names = {path.name for path in _FOLDER.iterdir()}
    assert {"resistors.csv", "capacitors.csv", "pots.xlsx"} <= names
    assert (_FOLDER / "resistors.csv").read_text("utf-8").startswith("kind,")
    assert (_FOLDER / "capacitors.csv").read_text("utf-8").startswith("kind;")
    assert sum(path.stat().st_size for path in _FOLDER.iterdir()) < 50_000
