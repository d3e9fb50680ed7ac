"""Plain connections to the database file, with the settings every one of them needs.

Only the standard library is used here, so that reading the stock costs milliseconds; the
engine of the writers opens its connections here too.

The journal stays in SQLite's rollback mode: the stock is then a single file, which can be read
from a read-only folder and copied while nobody writes, and one writer at a time is plenty.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Literal

from chooser.stock.faults import stock_error

BUSY_SECONDS = 5.0
"""How long a writer waits for another one before it gives up."""

PRAGMAS: tuple[str, ...] = ("PRAGMA synchronous = FULL",)
"""Settings of every connection; they hold for the connection, not for the file."""


def connect(
    path: Path, mode: Literal["rw", "rwc"] = "rw", *, foreign_keys: bool = True
) -> sqlite3.Connection:
    """Open the file in autocommit; transactions are begun explicitly by `engine`.

    Parameters
    ----------
    path : the database file.
    mode : "rw" never creates it (and falls back to reading where it may not be written);
        "rwc" does.
    foreign_keys : False only while tables are rebuilt.

    Raises
    ------
    sqlite3.Error : the file cannot be opened.
    """
    # A URI, since only that form can forbid creation; as_uri() escapes ?, # and %.
    uri = f"{path.absolute().as_uri()}?mode={mode}"
    connection = sqlite3.connect(uri, uri=True, timeout=BUSY_SECONDS, isolation_level=None)
    try:
        # foreign_keys is ignored inside a transaction: it has to be set here, right after opening.
        connection.execute(f"PRAGMA foreign_keys = {'ON' if foreign_keys else 'OFF'}")
        for pragma in PRAGMAS:
            connection.execute(pragma)
    except sqlite3.Error:
        connection.close()
        raise
    return connection


@contextmanager
def looking(path: Path) -> Iterator[sqlite3.Connection]:
    """Open the file for reading only; complaints of SQLite leave as sentences.

    Raises
    ------
    StockError : the file is locked, damaged, no database or cannot be opened.
    """
    try:
        connection = connect(path)
        try:
            connection.execute("PRAGMA query_only = ON")
            yield connection
        finally:
            connection.close()
    except sqlite3.Error as error:
        raise stock_error(error, path) from error
