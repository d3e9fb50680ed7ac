"""Plain tables: aligned columns where they fit, a block a row where they do not.

One column may be let wrap, so that a table of long texts stays a table on a terminal.

Nothing is coloured and nothing is cut off: what is piped is what is read. Text that came from a
person is printed as it is, except control characters, which could drive the terminal.
"""

from __future__ import annotations

import shutil
import sys
import textwrap
import unicodedata
from collections.abc import Collection, Sequence

GAP = "  "
LEAST_WRAPPED = 24
"""Columns below which a wrapped text is harder to read than a block a row."""


def print_table(
    headings: Sequence[str],
    rows: Sequence[Sequence[str]],
    right_aligned: Collection[str] = (),
    wrapping: str | None = None,
) -> None:
    """Print rows under headings on stdout.

    Parameters
    ----------
    headings : one a column. rows : the cells, already written as text, one a heading.
    right_aligned : the headings whose columns are numbers.
    wrapping : the heading of the column that may go on below itself, or None.
    """
    width = shutil.get_terminal_size().columns if sys.stdout.isatty() else None
    for line in table_lines(headings, rows, right_aligned, width, wrapping):
        print_line(line)


def table_lines(
    headings: Sequence[str],
    rows: Sequence[Sequence[str]],
    right_aligned: Collection[str] = (),
    width: int | None = None,
    wrapping: str | None = None,
) -> list[str]:
    """Lay out a table.

    Parameters
    ----------
    headings, rows, right_aligned, wrapping : as `print_table`.
    width : columns of the terminal, or None where lines may be as long as they need.

    Returns
    -------
    The lines, without line ends.
    """
    cells = [[visible(cell) for cell in row] for row in rows]
    widths = [max(map(_columns, column)) for column in zip(headings, *cells, strict=True)]
    right = [heading in right_aligned for heading in headings]
    needed = sum(widths) + len(GAP) * (len(widths) - 1)
    if width is not None and needed > width:
        if wrapping not in headings:
            return _blocks(headings, cells)
        at = headings.index(wrapping)
        widths[at] -= needed - width
        if widths[at] < LEAST_WRAPPED:
            return _blocks(headings, cells)
        cells = [piece for row in cells for piece in _wrapped(row, at, widths[at])]
    return [_aligned(row, widths, right) for row in (headings, *cells)]


def print_line(text: str) -> None:
    """Print one line on stdout, replacing control characters and what its encoding lacks."""
    encoding = sys.stdout.encoding or "utf-8"
    print(visible(text).encode(encoding, "replace").decode(encoding))  # noqa: T201


def visible(text: str) -> str:
    """Replace control characters (line ends, escapes) by spaces or a mark."""
    if text.isprintable():
        return text
    return "".join(
        char if char.isprintable() else " " if char.isspace() else "\N{REPLACEMENT CHARACTER}"
        for char in text
    )


def _wrapped(row: Sequence[str], at: int, width: int) -> list[list[str]]:
    """Break a row whose cell is too long for its column into as many as it takes."""
    pieces = textwrap.wrap(row[at], width, break_on_hyphens=False) or [""]
    while any(_columns(piece) > width for piece in pieces):  # wide characters take two columns
        pieces = [half for piece in pieces for half in textwrap.wrap(piece, width // 2)]
    first = [*row[:at], pieces[0], *row[at + 1 :]]
    return [first, *([""] * at + [piece] + [""] * (len(row) - at - 1) for piece in pieces[1:])]


def _aligned(row: Sequence[str], widths: Sequence[int], right: Sequence[bool]) -> str:
    padded = []
    for cell, width, to_the_right in zip(row, widths, right, strict=True):
        space = " " * (width - _columns(cell))
        padded.append(space + cell if to_the_right else cell + space)
    return GAP.join(padded).rstrip()


def _blocks(headings: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Fold each row into lines of heading and cell, empty cells left out."""
    widest = max(map(_columns, headings))
    lines: list[str] = []
    for row in rows:
        if lines:
            lines.append("")
        for heading, cell in zip(headings, row, strict=True):
            if cell:
                lines.append(heading + " " * (widest - _columns(heading)) + GAP + cell)
    return lines


def _columns(text: str) -> int:
    """Count the columns a terminal needs: wide characters take two, combining ones none."""
    if text.isascii():
        return len(text)
    return sum(
        0 if unicodedata.combining(char) else 2 if unicodedata.east_asian_width(char) in "WF" else 1
        for char in text
    )
