"""The session of one command that changes the stock."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path

from sqlalchemy.orm import Session

from chooser.stock import models
from chooser.stock.engine import immediate
from chooser.stock.upgrade import make_ready


@contextmanager
def writing(path: Path, *, create: bool = False) -> Iterator[Session]:
    """Hold the write lock of a ready database for one command.

    Parameters
    ----------
    path : the database file. create : True where a missing one is built first.

    Raises
    ------
    StockError : the database cannot be used; everything is as before.
    """
    make_ready(path, create=create)
    with immediate(path) as connection, Session(connection) as session:
        yield session
        session.flush()


def note_change(session: Session, what: str) -> int:
    """Write down that a command changes the stock; return the number of the change."""
    change = models.Change(at=datetime.now(UTC).isoformat(timespec="seconds"), what=what)
    session.add(change)
    session.flush()
    return change.id
