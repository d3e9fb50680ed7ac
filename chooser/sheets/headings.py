"""The heading row of a sheet: which column stands where, and what is wrong with it."""

from __future__ import annotations

from dataclasses import dataclass

from chooser.errors import Finding
from chooser.sheets.columns import COLUMNS, NEEDED, Column, column_headed, nearest_columns
from chooser.sheets.grid import Cell, Row

_ALL = ", ".join(column.name for column in COLUMNS)


@dataclass(frozen=True, slots=True)
class Headings:
    """What the heading row says.

    Attributes
    ----------
    columns : for each cell of the row the column it heads, None where it heads none.
    blanks : positions of blank headings; cells under them are refused.
    findings : what is wrong.
    """

    columns: tuple[Column | None, ...]
    blanks: frozenset[int]
    findings: tuple[Finding, ...]

    @property
    def complete(self) -> bool:
        """Whether rows can be read: all the columns that every row needs are there."""
        return set(NEEDED) <= set(self.columns)


def read_headings(file: str, row: Row) -> Headings:
    """Find the column of each heading; nothing is raised, all findings are handed back."""
    columns: list[Column | None] = []
    findings: list[Finding] = []
    seen: dict[str, str] = {}
    for cell in row.cells:
        column = None if cell.problem else column_headed(cell.text)
        if column is not None and column.name in seen:
            findings.append(_twice(file, row, cell, column, seen[column.name]))
            column = None
        elif column is not None:
            seen[column.name] = cell.text
        elif cell.text or cell.problem:
            findings.append(_unknown(file, row, cell))
        columns.append(column)
    if not seen:
        findings = [_no_headings(file, row)]
    else:
        findings.extend(_missing(file, row, seen))
    blanks = frozenset(at for at, cell in enumerate(row.cells) if not (cell.text or cell.problem))
    return Headings(tuple(columns), blanks, tuple(findings))


def _twice(file: str, row: Row, cell: Cell, column: Column, first: str) -> Finding:
    return Finding(
        file,
        row.number,
        column.name,
        cell.text,
        "is a second heading for this column"
        + ("" if cell.text == first else f", after {first!r}"),
        "keep one of the two",
    )


def _unknown(file: str, row: Row, cell: Cell) -> Finding:
    if cell.problem:
        return Finding(file, row.number, None, cell.text, cell.problem, cell.advice)
    near = " or ".join(repr(column.name) for column in nearest_columns(cell.text))
    advice = f"did you mean {near}" if near else f"remove it or use one of {_ALL}"
    return Finding(file, row.number, None, cell.text, "is no heading of a stock sheet", advice)


def _no_headings(file: str, row: Row) -> Finding:
    return Finding(
        file,
        row.number,
        None,
        row.cells[0].text,
        "begins the sheet, which has no known heading in its first row",
        "put the headings " + ", ".join(column.name for column in NEEDED) + " there",
    )


def _missing(file: str, row: Row, seen: dict[str, str]) -> list[Finding]:
    return [
        Finding(
            file,
            row.number,
            column.name,
            "",
            "is missing, and every sheet needs it",
            f"add a column headed {column.name!r}: {column.holds}",
        )
        for column in NEEDED
        if column.name not in seen
    ]
