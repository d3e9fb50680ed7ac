"""The bytes of a CSV file into a grid: encoding, separator, quotes."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from functools import lru_cache

from chooser.sheets.columns import column_headed
from chooser.sheets.grid import (
    FEWER_COLUMNS,
    MAX_COLUMNS,
    MAX_ROWS,
    Cell,
    Grid,
    Row,
    refuse,
    text_cell,
    trimmed,
)

_SEPARATORS = (",", ";", "\t")
_WIDE_MARKS = (b"\xff\xfe", b"\xfe\xff")
_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")
_SAVE_AS = "save the sheet as 'CSV UTF-8'"


def read_csv(file: str, data: bytes) -> Grid:
    """Read a CSV file: UTF-8, separated by commas, semicolons or tabs.

    Parameters
    ----------
    file : how to name it in messages. data : its whole content.

    Raises
    ------
    SheetError
        It is not such a file; one finding says why.
    """
    text = _decoded(file, data)
    lines = io.StringIO(text, newline="")
    skipped, separator = _separator(text)
    for _ in range(skipped):
        lines.readline()
    rows: list[Row] = []
    lengths: list[int] = []
    for number, fields in _records(file, lines, separator, skipped):
        cells = trimmed([_cell(field) for field in fields])
        if cells:
            rows.append(Row(number, cells))
            lengths.append(len(fields))
    if not rows:
        refuse(file, "is empty", "its first row must hold the headings kind, value, count, drawer")
    if not text.endswith(("\n", "\r")):
        _refuse_half_row(file, rows, lengths)
    return Grid(file, tuple(rows))


def _decoded(file: str, data: bytes) -> str:
    if data.startswith(b"PK\x03\x04"):
        refuse(file, "is not a CSV file but a packed one", "give a spreadsheet the ending .xlsx")
    if data.startswith(_WIDE_MARKS):
        refuse(file, "is UTF-16 text", _SAVE_AS)
    if b"\0" in data:
        refuse(file, "is not text", _SAVE_AS)
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        byte = data[error.start]
        refuse(file, f"holds a byte (0x{byte:02X}) that is not UTF-8 text", _SAVE_AS, row=line)


def _separator(text: str) -> tuple[int, str]:
    """Find how many lines to pass over, and what separates the fields.

    Some spreadsheet programs begin the file with a line `sep=;`; otherwise the separator is
    the one under which most headings are known.
    """
    head = text[: 2**16].lstrip("\r\n \t")
    first = head.split("\n", 1)[0].strip("\r ")
    if first.lower().startswith("sep=") and len(first) == len("sep=;"):
        return text[: text.index(first)].count("\n") + 1, first[-1]
    return 0, max(_SEPARATORS, key=lambda separator: _known_headings(head, separator))


def _known_headings(head: str, separator: str) -> int:
    try:
        fields = next(csv.reader(io.StringIO(head, newline=""), delimiter=separator), [])
    except csv.Error:
        return 0
    return sum(column_headed(field) is not None for field in fields)


def _records(
    file: str, lines: io.StringIO, separator: str, skipped: int
) -> Iterator[tuple[int, list[str]]]:
    """Give each record with its row number; a record over several lines is one row."""
    number = skipped
    try:
        for number, fields in enumerate(
            csv.reader(lines, delimiter=separator, strict=True), skipped + 1
        ):
            if number > MAX_ROWS:
                refuse(file, f"has more than {MAX_ROWS} rows", "split it into several sheets")
            if len(fields) > MAX_COLUMNS:
                refuse(file, f"has more than {MAX_COLUMNS} columns", FEWER_COLUMNS, row=number)
            yield number, fields
    except csv.Error as error:
        refuse(
            file,
            f"does not continue as CSV ({error})",
            "close every quote that was opened; the file may be half-written",
            row=number + 1,
        )


@lru_cache(maxsize=8192)
def _cell(field: str) -> Cell:
    """Read one field; an apostrophe guards text that a spreadsheet would take for a formula."""
    if field.startswith("="):
        return Cell(
            field[:40], "is a formula", "put its result there, or an apostrophe before a text"
        )
    if field.startswith("'") and field[1:].startswith((*_FORMULA_STARTS, "'")):
        field = field[1:]
    return text_cell(field)


def _refuse_half_row(file: str, rows: list[Row], lengths: list[int]) -> None:
    """Refuse a file that stops within its last row, where all the others are longer."""
    if len(rows) > 1 and lengths[-1] < min(lengths[:-1]):
        refuse(
            file,
            f"stops after {lengths[-1]} of {lengths[0]} cells, without a line end",
            "the file may be half-written; save it again, or end its last line",
            row=rows[-1].number,
        )
