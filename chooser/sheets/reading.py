"""Sheet files into entries: all of them read, or nothing read and every fault named."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from chooser.errors import Finding, SheetError
from chooser.parts import Entry
from chooser.sheets.files import members_of, read_file
from chooser.sheets.grid import Grid, Row, refuse
from chooser.sheets.headings import Headings, read_headings
from chooser.sheets.rows import read_row

MAX_ENTRIES = 200_000
"""Most holdings read in one go, kits counted out."""


Rows = Callable[[Sequence[Row]], Iterable[Row]]
"""What the rows of a sheet are passed through while they are read, as to show how far it is."""


def read_sheets(
    paths: Sequence[Path], notes: list[str] | None = None, through: Rows = iter
) -> tuple[Entry, ...]:
    """Read stock sheets, all or nothing.

    Parameters
    ----------
    paths : CSV and XLSX files, and folders of them. Of a folder every `.csv` and `.xlsx` file is
        read in order of name; hidden files and lock files (`~$...`) are passed over. A file that
        is named twice is read once.
    notes : sentences about worksheets that were passed over are put here.
    through : is handed the rows of each sheet and hands them back one by one.

    Returns
    -------
    tuple of Entry
        In the order of files and rows; a kit gives one entry a value. SI units.

    Raises
    ------
    SheetError
        Something is wrong in any of them; it carries every finding in all of them.
    """
    stated = _Stated(through)
    seen: set[Path] = set()
    for path in paths:
        try:
            members = members_of(path)
        except SheetError as error:
            stated.findings.extend(error.findings)
            continue
        for member in members:
            if member.absolute() not in seen:
                seen.add(member.absolute())
                _read_member(member, stated)
    if stated.findings:
        raise SheetError(stated.findings)
    if notes is not None:
        notes.extend(stated.notes)
    return tuple(stated.entries)


@dataclass(slots=True)
class _Stated:
    """What the sheets have stated so far.

    Attributes
    ----------
    through : as in `read_sheets`.
    entries, findings, notes : in order of files and rows.
    first : the entry that stated a holding first, by its identity.
    """

    through: Rows
    entries: list[Entry] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    first: dict[tuple[object, ...], Entry] = field(default_factory=dict)


def _read_member(path: Path, stated: _Stated) -> None:
    try:
        for grid in read_file(path):
            _read_grid(grid, stated)
    except SheetError as error:
        stated.findings.extend(error.findings)


def _read_grid(grid: Grid, stated: _Stated) -> None:
    stated.notes.extend(grid.notes)
    headings = read_headings(grid.file, grid.rows[0])
    stated.findings.extend(headings.findings)
    if not headings.complete:
        return
    if len(grid.rows) == 1:
        refuse(grid.file, "has headings but no rows", "add a row for each holding")
    for row in stated.through(grid.rows[1:]):
        _read_one(grid.file, row, headings, stated)
        if len(stated.entries) > MAX_ENTRIES:
            refuse(
                grid.file,
                f"makes it more than {MAX_ENTRIES} holdings in one go",
                "load fewer sheets at a time, or narrow the kits",
                row=row.number,
            )


def _read_one(file: str, row: Row, headings: Headings, stated: _Stated) -> None:
    """Read one row, and find whether an earlier one states the same holdings."""
    entries, faults = read_row(file, row, headings)
    stated.findings.extend(faults)
    repeats: dict[str, int] = {}
    for entry in entries:
        first = stated.first.setdefault(entry.identity, entry)
        if first is not entry:
            repeats[first.place] = repeats.get(first.place, 0) + 1
    stated.entries.extend(entries)
    for place, times in repeats.items():
        again = f"states {times} holdings" if times > 1 else "states a holding"
        problem = f"{again} of drawer {entries[0].drawer!r} that {place} states already"
        advice = "make it one row with the counts added, or tell them apart by a trait or a drawer"
        stated.findings.append(Finding(file, row.number, None, "", problem, advice))
