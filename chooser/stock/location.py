"""Where the stock database lives."""

from __future__ import annotations

from pathlib import Path

from chooser.errors import StockError


def database_path(db: str | None) -> Path:
    """Tell which file holds the stock.

    Parameters
    ----------
    db : the path the user gave, or None for the stock in the platform's user data folder.

    Returns
    -------
    The path; the file need not exist yet.

    Raises
    ------
    StockError : no file can have that name.
    """
    if db is not None:
        return _expanded(db)
    from platformdirs import user_data_path

    return user_data_path("chooser", appauthor=False) / "stock.db"


def _expanded(db: str) -> Path:
    if "\0" in db:
        raise StockError(f"{db!r} is no name of a file; name the database with --db.")
    try:
        return Path(db).expanduser()
    except RuntimeError:
        user = Path(db).parts[0]
        raise StockError(
            f"{db!r} begins with a home folder, {user}, that is not known here; "
            "write the whole path behind --db."
        ) from None
