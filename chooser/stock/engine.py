"""Transactions: the only place that begins and ends one.

A writer takes the write lock before it reads (BEGIN IMMEDIATE), so that what it decides upon is
still true when it writes; with a deferred transaction two claims of the last part could both win
or fail for no reason.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from sqlalchemy import Connection, Engine, NullPool, create_engine, event
from sqlalchemy.exc import DBAPIError

from chooser.stock.connection import connect
from chooser.stock.faults import stock_error


@contextmanager
def immediate(
    path: Path, *, create: bool = False, foreign_keys: bool = True
) -> Iterator[Connection]:
    """Hold one write transaction: committed at the end, rolled back by any exception.

    Parameters
    ----------
    path : the database file. create : True where it may be created.
    foreign_keys : False only while tables are rebuilt; check them before the end.

    Raises
    ------
    StockError : SQLite refused (locked, read-only, full, damaged); the file is as before.
    """
    engine = _engine(path, create=create, foreign_keys=foreign_keys)
    try:
        with engine.begin() as connection:
            yield connection
    except DBAPIError as error:
        raise stock_error(error.orig or error, path) from error
    except sqlite3.Error as error:
        raise stock_error(error, path) from error
    finally:
        engine.dispose()


def _engine(path: Path, *, create: bool, foreign_keys: bool) -> Engine:
    """Make an engine on our own connections; a path never becomes a URL that could misread it."""
    engine = create_engine(
        "sqlite://",
        creator=lambda: connect(path, "rwc" if create else "rw", foreign_keys=foreign_keys),
        poolclass=NullPool,
    )

    @event.listens_for(engine, "begin")
    def _take_the_write_lock(connection: Connection) -> None:
        connection.exec_driver_sql("BEGIN IMMEDIATE")

    return engine
