"""Where an answering command takes its stock from: sheets, or the database."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from chooser.parts import Holding


def holdings_from(stock: Sequence[Path] | None, db: str | None) -> tuple[Holding, ...]:
    """Return the stock.

    Parameters
    ----------
    stock : sheets or folders of them; their rows are numbered in reading order.
    db : the database, where no sheets are given; None for the default one.
    """
    if stock:
        from chooser.sheets.reading import read_sheets

        return tuple(
            Holding(number, entry.part, entry.drawer, entry.count)
            for number, entry in enumerate(read_sheets(stock), start=1)
        )
    from chooser.stock.location import database_path
    from chooser.stock.snapshot import read_stock

    return read_stock(database_path(db))
