"""Plain tables: aligned columns where they fit, a block a row where they do not.

Nothing is coloured and nothing is cut off: what is piped is what is read. Text that came from a
person is printed as it is, except control characters, which could drive the terminal.
"""

from __future__ import annotations

import shutil
import sys
import unicodedata
from collections.abc import Collection, Sequence

GAP = "  "


def print_table(
    headings: Sequence[str], rows: Sequence[Sequence[str]], right_aligned: Collection[str] = ()
) -> None:
    """Print rows under headings on stdout.

    Parameters
    ----------
    headings : one a column. rows : the cells, already written as text, one a heading.
    right_aligned : the headings whose columns are numbers.
    """
    width = shutil.get_terminal_size().columns if sys.stdout.isatty() else None
    for line in table_lines(headings, rows, right_aligned, width):
        print_line(line)


def table_lines(
    headings: Sequence[str],
    rows: Sequence[Sequence[str]],
    right_aligned: Collection[str] = (),
    width: int | None = None,
) -> list[str]:
    """Lay out a table.

    Parameters
    ----------
    headings, rows, right_aligned : as `print_table`.
    width : columns of the terminal, or None where lines may be as long as they need.

    Returns
    -------
    The lines, without line ends.
    """
    cells = [[visible(cell) for cell in row] for row in rows]
    widths = [max(map(_columns, column)) for column in zip(headings, *cells, strict=True)]
    if width is not None and sum(widths) + len(GAP) * (len(widths) - 1) > width:
        return _blocks(headings, cells)
    right = [heading in right_aligned for heading in headings]
    return [_aligned(row, widths, right) for row in (headings, *cells)]


def print_line(text: str) -> None:
    """Print one line on stdout, replacing what its encoding lacks."""
    encoding = sys.stdout.encoding or "utf-8"
    print(text.encode(encoding, "replace").decode(encoding))  # noqa: T201


def visible(text: str) -> str:
    """Replace control characters (line ends, escapes) by spaces or a mark."""
    if text.isprintable():
        return text
    return "".join(
        char if char.isprintable() else " " if char.isspace() else "\N{REPLACEMENT CHARACTER}"
        for char in text
    )


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
