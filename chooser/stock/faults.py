"""What SQLite complains about, said as one plain sentence."""

from __future__ import annotations

import sqlite3
from pathlib import Path

from chooser.errors import StockError

_SENTENCES = {
    sqlite3.SQLITE_BUSY: (
        "Another program is writing to the stock at {path}; nothing was changed, "
        "try again in a moment."
    ),
    sqlite3.SQLITE_READONLY: (
        "The stock at {path} cannot be written, its file or folder is read-only; "
        "make it writable, or work on a copy with --db."
    ),
    sqlite3.SQLITE_FULL: (
        "There is no room left on the disk of {path}; nothing was changed, "
        "make room and run the command again."
    ),
    sqlite3.SQLITE_IOERR: (
        "The disk of {path} failed while it was read or written ({text}); nothing was changed, "
        "check the disk and run the command again."
    ),
    sqlite3.SQLITE_NOTADB: (
        "{path} is not a stock database, it is some other kind of file; "
        "name another file with --db."
    ),
    sqlite3.SQLITE_CORRUPT: (
        "The stock at {path} is damaged ({text}); put back the last copy made by "
        "`chooser db backup`."
    ),
    sqlite3.SQLITE_CANTOPEN: (
        "The stock at {path} cannot be opened or created; check that its folder exists and that "
        "you may write there, or name another file with --db."
    ),
}
_SAME = {
    sqlite3.SQLITE_LOCKED: sqlite3.SQLITE_BUSY,
    sqlite3.SQLITE_PERM: sqlite3.SQLITE_CANTOPEN,
    sqlite3.SQLITE_AUTH: sqlite3.SQLITE_CANTOPEN,
}


def stock_error(error: BaseException, path: Path) -> StockError:
    """Turn a complaint of SQLite into the sentence for the user.

    Parameters
    ----------
    error : what the driver raised. path : the database it was raised about.

    Returns
    -------
    The error to raise; it says what to do where something can be done.
    """
    # The low byte is the primary code; the rest says more than a person at a bench can use.
    code = getattr(error, "sqlite_errorcode", 0) & 0xFF
    sentence = _SENTENCES.get(_SAME.get(code, code))
    if sentence is None:
        sentence = "The stock at {path} refused ({text}); nothing was changed."
    return StockError(sentence.format(path=path, text=error))


def no_stock_yet(path: Path) -> StockError:
    """Say that there is nothing to read, and the two ways on."""
    return StockError(
        f"There is no stock yet at {path}; load one with `chooser stock load FILE`, "
        "or answer from sheets with --stock."
    )
