"""Which form the database file has, found without importing Alembic."""

from __future__ import annotations

import os
import sqlite3
import stat
from enum import Enum
from pathlib import Path

from chooser.errors import StockError
from chooser.stock.connection import looking

REVISIONS = ("0001",)
"""Every revision of migrations/versions, oldest first (a test holds them equal)."""

HEAD = REVISIONS[-1]
"""The form this program reads and writes."""

APPLICATION_ID = 0x43484F4F
"""Written into the header of the file ("CHOO"), so that foreign databases are told apart."""


class State(Enum):
    """What was found at the path of the stock."""

    MISSING = "missing"
    CURRENT = "current"
    OLD = "old"
    NEWER = "newer"


def state_of(path: Path) -> State:
    """Tell what is at the path; one opening and a few reads, about a millisecond.

    An empty file counts as missing: it is what a killed first load leaves behind.

    Raises
    ------
    StockError : a folder, another program's database, or a file that cannot be read.
    """
    revision = revision_of(path)
    if revision is None:
        return State.MISSING
    if revision == HEAD:
        return State.CURRENT
    return State.OLD if revision in REVISIONS else State.NEWER


def revision_of(path: Path) -> str | None:
    """Read the revision of the database, or None where there is no stock yet.

    Raises
    ------
    StockError : as `state_of`.
    """
    found = look_at(path)
    if found is not None and stat.S_ISDIR(found.st_mode):
        raise StockError(f"{path} is a folder; name the database file in it, such as stock.db.")
    if found is None or found.st_size == 0:
        return None
    with looking(path) as connection:
        (tables,) = connection.execute("SELECT count(*) FROM sqlite_master").fetchone()
        if tables == 0:
            return None
        return _stamped(connection, path)


def look_at(path: Path) -> os.stat_result | None:
    """Tell what lies at a path, None where nothing does.

    Raises
    ------
    StockError : it cannot be told: a name too long, a folder that may not be entered.
    """
    try:
        return path.stat()
    except (FileNotFoundError, NotADirectoryError):
        return None
    except (OSError, ValueError) as error:
        reason = (error.strerror if isinstance(error, OSError) else None) or str(error)
        raise StockError(
            f"{path} cannot be reached ({reason.lower()}); look at its name and at the rights of "
            "its folders, or name another file."
        ) from None


def _stamped(connection: sqlite3.Connection, path: Path) -> str:
    """Read the stamp of a database that has tables; refuse one that is not ours."""
    (application,) = connection.execute("PRAGMA application_id").fetchone()
    known = connection.execute(
        "SELECT count(*) FROM sqlite_master WHERE name = 'alembic_version'"
    ).fetchone()
    row = (
        connection.execute("SELECT version_num FROM alembic_version").fetchone()
        if known[0]
        else None
    )
    if application != APPLICATION_ID or row is None:
        raise StockError(
            f"{path} is a database of another program, not a stock; name another file with --db."
        )
    return str(row[0])


def newer_error(path: Path) -> StockError:
    """Say that a newer chooser wrote the file."""
    return StockError(
        f"The stock at {path} was written by a newer chooser (form {revision_of(path)}, this one "
        f"knows up to {HEAD}); install the newer chooser, nothing was changed."
    )
