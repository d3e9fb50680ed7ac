"""What every kind of sheet file becomes first: rows of cleaned cells, and the limits on them."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache
from typing import NamedTuple, NoReturn

from chooser.errors import Finding, SheetError

MAX_FILE_BYTES = 16 * 2**20
"""Largest sheet file; ten thousand full rows take about one of these sixteen MiB."""
MAX_UNPACKED_BYTES = 32 * 2**20
"""Largest content of an XLSX file, which is a packed archive: a packed bomb stays packed."""
MAX_ROWS = 50_000
"""Most rows of one sheet, blank ones counted."""
MAX_COLUMNS = 256
"""Most columns of one sheet."""
FEWER_COLUMNS = "keep the columns of the stock and remove the others"
MAX_CELL = 500
"""Longest text of a cell."""

_INVISIBLE = re.compile("[\u00ad\u200b\u200e\u200f\u2060\ufeff]")
_UNPRINTABLE = re.compile("[\x00-\x1f\x7f-\x9f\ud800-\udfff]")


class Cell(NamedTuple):
    """One cell as text, or why it cannot be taken as text.

    Attributes
    ----------
    text : what it holds, cleaned; "" where blank.
    problem, advice : of a finding, both "" where the cell is fine.
    """

    text: str
    problem: str = ""
    advice: str = ""


BLANK = Cell("")


class Row(NamedTuple):
    """One row: its number as a spreadsheet shows it (from 1), and its cells."""

    number: int
    cells: tuple[Cell, ...]


@dataclass(frozen=True, slots=True)
class Grid:
    """The rows of one sheet that are not blank.

    Attributes
    ----------
    file : the file as the user gave it, with the sheet's name where it holds several.
    rows : in order; the first one holds the headings.
    notes : sentences about what beside it was passed over.
    """

    file: str
    rows: tuple[Row, ...]
    notes: tuple[str, ...] = ()


def refuse(
    file: str, problem: str, advice: str = "", *, row: int | None = None, seen: str = ""
) -> NoReturn:
    """Refuse a whole file.

    Raises
    ------
    SheetError
        Always, with the one finding.
    """
    raise SheetError([Finding(file, row, None, seen, problem, advice)])


@lru_cache(maxsize=8192)
def text_cell(text: str) -> Cell:
    """Clean the text of a cell: white space made single, invisible marks dropped.

    Text that is too long or cannot be printed gives a cell with a problem.
    """
    if len(text) > MAX_CELL:
        return Cell(
            text[:20] + "…", f"is {len(text)} characters long", f"keep it to {MAX_CELL} at most"
        )
    cleaned = " ".join(_INVISIBLE.sub("", text).split())
    if _UNPRINTABLE.search(cleaned):
        return Cell(cleaned, "holds characters that cannot be printed", "type it again")
    return Cell(cleaned)


def trimmed(cells: list[Cell]) -> tuple[Cell, ...]:
    """Drop the blank cells at the end of a row."""
    end = len(cells)
    while end and cells[end - 1] == BLANK:
        end -= 1
    return tuple(cells[:end])
