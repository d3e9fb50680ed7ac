"""Where the stock database lives."""

from __future__ import annotations

from pathlib import Path


def database_path(db: str | None) -> Path:
    """Tell which file holds the stock.

    Parameters
    ----------
    db : the path the user gave, or None for the stock in the platform's user data folder.

    Returns
    -------
    The path; the file need not exist yet.
    """
    if db is not None:
        return Path(db).expanduser()
    from platformdirs import user_data_path

    return user_data_path("chooser", appauthor=False) / "stock.db"
