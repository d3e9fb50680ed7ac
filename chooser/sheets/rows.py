"""One row of a sheet into entries: every cell is read, and every fault of the row is found."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import TypeVar

from chooser.errors import Finding, UnreadableValueError
from chooser.parts import Count, Entry, Kind, Part
from chooser.plausible import complaints_of, drawer_name, free_text, unfitting
from chooser.quantities import (
    parse_count,
    parse_current,
    parse_pack,
    parse_power,
    parse_price,
    parse_resistance,
    parse_tempco,
    parse_tolerance,
    parse_turns,
    parse_voltage,
)
from chooser.sheets.columns import COLUMNS, NEEDED, Column
from chooser.sheets.grid import BLANK, Cell, Row
from chooser.sheets.headings import Headings
from chooser.sheets.traits import (
    ValueCell,
    read_kind,
    read_measured,
    read_meter,
    read_taper,
    read_technology,
    read_value,
)

_T = TypeVar("_T")
_NOTHING = re.compile(r"[-\u2013\u2014?]|n/a", re.IGNORECASE)

_remembering = lru_cache(maxsize=4096)
"""A long sheet says the same few things over and over; reading each once halves the time."""
_READ_VALUE = _remembering(read_value)
_READ_TECHNOLOGY = _remembering(read_technology)
_READ_COUNT = _remembering(parse_count)
_READ_TOLERANCE = _remembering(parse_tolerance)
_READ_POWER = _remembering(parse_power)
_READ_VOLTAGE = _remembering(parse_voltage)
_READ_TEMPCO = _remembering(parse_tempco)
_READ_METER = _remembering(read_meter)
_READ_TURNS = _remembering(parse_turns)
_READ_PRICE = _remembering(parse_price)
_READ_PACK = _remembering(parse_pack)


@dataclass(slots=True)
class RowReader:
    """The cells of one row, read column by column; faults gather in `findings`.

    Attributes
    ----------
    file, number : where the row is. cells : by the name of their column; blank ones left out.
    findings : what was wrong so far.
    """

    file: str
    number: int
    cells: dict[str, Cell]
    findings: list[Finding] = field(default_factory=list)

    def read(self, column: str, reader: Callable[..., _T], *of: Kind) -> _T | None:
        """Read a cell, None where it is blank or was refused (which is then a finding)."""
        cell = self.cells.get(column)
        if cell is None:
            return None
        if cell.problem:
            self.find(column, cell.text, cell.problem, cell.advice)
            return None
        try:
            return reader(cell.text, *of)
        except UnreadableValueError as error:
            self.find(column, cell.text, error.problem, error.advice)
            return None

    def text(self, column: str) -> str:
        """Read a cell of free text, "" where it is blank or was refused."""
        return self.read(column, free_text) or ""

    def find(self, column: str | None, seen: str, problem: str, advice: str = "") -> None:
        """Note a fault."""
        self.findings.append(Finding(self.file, self.number, column, seen, problem, advice))


def read_row(file: str, row: Row, headings: Headings) -> tuple[tuple[Entry, ...], list[Finding]]:
    """Read one row: the entries it states (a kit states many), or what is wrong with it."""
    reader = RowReader(file, row.number, _cells_by_column(row, headings))
    _find_strays(reader, row, headings)
    for column in NEEDED:
        if column.name not in reader.cells:
            reader.find(column.name, "", "is blank, and every row needs it", f"give {column.holds}")
    kind = reader.read("kind", read_kind)
    count = reader.read("count", _READ_COUNT)
    drawer = reader.read("drawer", drawer_name) or ""
    if kind is None:
        return (), reader.findings
    parts = _parts(reader, kind)
    if reader.findings or count is None:
        return (), reader.findings
    return _entries(reader, parts, drawer, count), []


def _entries(
    reader: RowReader, parts: tuple[Part, ...], drawer: str, count: Count
) -> tuple[Entry, ...]:
    place = f"{reader.file} row {reader.number}"
    return tuple(Entry(part, drawer, count, place) for part in parts)


def _cells_by_column(row: Row, headings: Headings) -> dict[str, Cell]:
    """Pair the cells with their columns; a dash in an optional column says nothing."""
    return {
        column.name: cell
        for column, cell in zip(headings.columns, row.cells, strict=False)
        if column is not None and cell != BLANK and not _says_nothing(column, cell)
    }


def _says_nothing(column: Column, cell: Cell) -> bool:
    if column.needed or column.free_text or cell.problem:
        return False
    return _NOTHING.fullmatch(cell.text) is not None


def _find_strays(reader: RowReader, row: Row, headings: Headings) -> None:
    """Find cells that no heading stands over."""
    for at, cell in enumerate(row.cells):
        if cell != BLANK and (at in headings.blanks or at >= len(headings.columns)):
            reader.find(
                None,
                cell.text,
                "stands under no heading",
                "give its column a heading; where commas separate the cells, put quotes around "
                "a value with a decimal comma",
            )
            return


def _parts(reader: RowReader, kind: Kind) -> tuple[Part, ...]:
    """Read all the traits; without findings, one part, or those of a kit."""
    _find_unfitting(reader, kind)
    value = reader.read("value", _READ_VALUE, kind)
    traits = _traits(reader, kind)
    if value is None or reader.findings:
        return ()
    _find_contradictions(reader, traits, value)
    kit = len(value.values) > 1
    return tuple(
        replace(
            traits,
            value=each,
            marking="" if kit else traits.marking,
            tolerance=traits.tolerance or value.tolerance,
        )
        for each in value.values
    )


def _find_unfitting(reader: RowReader, kind: Kind) -> None:
    """Find cells in columns that mean nothing for this kind of part, and take them out."""
    for column in COLUMNS:
        if kind not in column.kinds and column.name in reader.cells:
            found = unfitting(column.name, kind)
            seen = reader.cells.pop(column.name).text
            reader.find(column.name, seen, found.problem, found.advice)


def _traits(reader: RowReader, kind: Kind) -> Part:
    """Read every trait but the value, which stands as 1 until it is known."""
    return Part(
        kind=kind,
        value=1.0,
        marking=reader.cells.get("value", BLANK).text,
        tolerance=reader.read("tolerance", _READ_TOLERANCE),
        technology=reader.read("technology", _READ_TECHNOLOGY, kind),
        power=reader.read("power", _READ_POWER),
        voltage=reader.read("voltage", _READ_VOLTAGE),
        tempco=reader.read("tempco", _READ_TEMPCO),
        measured=reader.read("measured", read_measured, kind),
        meter=reader.read("meter", _READ_METER),
        leakage=reader.read("leakage", parse_current),
        taper=reader.read("taper", read_taper),
        turns=reader.read("turns", _READ_TURNS),
        end_resistance=reader.read("end_resistance", parse_resistance),
        price=reader.read("price", _READ_PRICE),
        pack=reader.read("pack", _READ_PACK),
        supplier=reader.text("supplier"),
        order_code=reader.text("order_code"),
        note=reader.text("note"),
    )


def _find_contradictions(reader: RowReader, traits: Part, value: ValueCell) -> None:
    """Find cells that are fine alone and cannot be true together."""
    kit = len(value.values) > 1
    if kit and traits.measured is not None:
        reader.find(
            "measured",
            reader.cells["measured"].text,
            "is one measured value for a whole kit",
            "give the measured piece a row of its own",
        )
        traits = replace(traits, measured=None)
    # What holds for the least value of a kit holds for all of them.
    for found in complaints_of(replace(traits, value=min(value.values)), value.tolerance):
        seen = reader.cells[found.trait].text
        reader.find(found.trait, seen, found.problem, found.advice)
