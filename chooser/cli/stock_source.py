"""Where a command takes its stock from: sheets, or the database."""

from __future__ import annotations

import sys
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import typer

from chooser.parts import Entry, Holding

if TYPE_CHECKING:
    from chooser.sheets.grid import Row

MANY_ROWS = 2000
"""A sheet of more rows takes long enough to wonder whether anything happens."""


def holdings_from(stock: Sequence[Path] | None, db: str | None) -> tuple[Holding, ...]:
    """Return the stock.

    Parameters
    ----------
    stock : sheets or folders of them; their rows are numbered in reading order.
    db : the database, where no sheets are given; None for the default one.
    """
    if stock:
        return tuple(
            Holding(number, entry.part, entry.drawer, entry.count)
            for number, entry in enumerate(entries_from(stock), start=1)
        )
    from chooser.stock.location import database_path
    from chooser.stock.snapshot import read_stock

    return read_stock(database_path(db))


def entries_from(files: Sequence[Path]) -> tuple[Entry, ...]:
    """Read sheets, saying on stderr what was passed over and, of a long one, how far it is."""
    from chooser.cli.boundary import say
    from chooser.sheets.reading import read_sheets

    notes: list[str] = []
    entries = read_sheets(files, notes, _showing_how_far)
    for note in notes:
        say(note)
    return entries


def _showing_how_far(rows: Sequence[Row]) -> Iterator[Row]:
    if len(rows) <= MANY_ROWS or not sys.stderr.isatty():
        yield from rows
        return
    with typer.progressbar(rows, label=f"{len(rows)} rows", file=sys.stderr) as bar:
        yield from bar
