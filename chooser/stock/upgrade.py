"""Building a database, bringing an old one up to date, and copying one."""

from __future__ import annotations

import logging
import os
import sqlite3
import sys
from contextlib import closing, suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

import chooser
from chooser.errors import StockError
from chooser.stock.connection import connect, looking
from chooser.stock.faults import no_stock_yet, stock_error
from chooser.stock.revision import HEAD, State, look_at, newer_error, revision_of, state_of

if TYPE_CHECKING:
    from alembic.config import Config

_log = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True)
class Upgrade:
    """What an upgrade did.

    Attributes
    ----------
    before : revision it had, None where it did not exist. after : revision it has now.
    backup : the copy made before, None where nothing had to be changed.
    """

    before: str | None
    after: str
    backup: Path | None

    def sentence(self, path: Path) -> str:
        """Say what was done to the database at the path."""
        if self.before is None:
            return f"An empty stock was made at {path}."
        if self.backup is None:
            return f"The stock at {path} is up to date (form {self.after})."
        return (
            f"The stock at {path} was brought from form {self.before} to {self.after}; "
            f"a copy of it as it was is at {self.backup}."
        )


def make_ready(path: Path, *, create: bool = False) -> None:
    """See to it that the database can be used: build it, upgrade it, or refuse it.

    Parameters
    ----------
    path : the database file. create : True where a missing one is built.

    Raises
    ------
    StockError : there is none, it is newer than this program, or it cannot be used.
    """
    state = state_of(path)
    if state is State.CURRENT:
        return
    if state is State.MISSING and not create:
        raise no_stock_yet(path)
    done = upgrade(path)
    if done.backup is not None:
        _log.warning("%s", done.sentence(path))


def upgrade(path: Path) -> Upgrade:
    """Bring the database to this program's form, after a copy; build it where there is none.

    Either all of it happens or nothing: the revisions run in one transaction.

    Raises
    ------
    StockError : it is newer than this program, or it cannot be written.
    """
    before = revision_of(path)
    state = state_of(path)
    if state is State.NEWER:
        raise newer_error(path)
    if state is State.CURRENT:
        return Upgrade(before, HEAD, None)
    if state is State.MISSING:
        _make_folder(path)
        _run_revisions(path)
        return Upgrade(None, HEAD, None)
    copy = backup(path, _copy_name(path, f"before-{HEAD}"))
    _run_revisions(path)
    return Upgrade(before, HEAD, copy)


def backup(path: Path, to: Path | None = None) -> Path:
    """Copy the database while others may be using it.

    Parameters
    ----------
    path : the database. to : the copy to make; a name with the time beside it when None.

    Returns
    -------
    The path of the copy.

    Raises
    ------
    StockError : there is no stock, the copy exists already, or it cannot be written.
    """
    if state_of(path) is State.MISSING:
        raise no_stock_yet(path)
    target = to or _copy_name(path, "backup")
    if look_at(target) is not None:
        raise StockError(f"{target} exists already; name another file for the copy.")
    # Under its own name only once it is whole: a killed copy must not pass for a good one.
    part = target.with_name(f".copy-{os.getpid()}.part")
    with looking(path) as source:
        try:
            part.unlink(missing_ok=True)
            with closing(connect(part, "rwc")) as copy:
                source.backup(copy)
            part.replace(target)
        except sqlite3.Error as error:
            raise stock_error(error, target) from error
        except OSError as error:
            raise StockError(
                f"The copy {target} cannot be written ({(error.strerror or str(error)).lower()}); "
                "name another file for it."
            ) from error
        finally:
            _clear(part)
    return target


def _clear(part: Path) -> None:
    """Take an unfinished copy away; where that fails, the reason was told already."""
    with suppress(OSError):
        part.unlink(missing_ok=True)


def migrations_folder() -> Path:
    """Find the revisions: inside the installed package, or beside it in a checkout.

    Raises
    ------
    StockError : the installation lacks them.
    """
    package = Path(chooser.__file__).parent
    for folder in (package / "migrations", package.parent / "migrations"):
        if (folder / "env.py").is_file():
            return folder
    raise StockError(
        f"The migrations are missing beside {package}; install chooser again with `pip install`."
    )


def alembic_config() -> Config:
    """Build Alembic's settings in code; no settings file is needed at run time."""
    from alembic.config import Config

    config = Config(stdout=sys.stderr)  # stdout is for answers only
    # Alembic interpolates %, which a folder may well have in its name.
    config.set_main_option("script_location", str(migrations_folder()).replace("%", "%%"))
    return config


def _run_revisions(path: Path) -> None:
    """Run all pending revisions in one transaction, foreign keys off while tables are rebuilt."""
    from alembic import command

    from chooser.stock.engine import immediate

    config = alembic_config()
    with immediate(path, create=True, foreign_keys=False) as connection:
        config.attributes["connection"] = connection
        command.upgrade(config, "head")
        orphans = connection.exec_driver_sql("PRAGMA foreign_key_check").fetchall()
        if orphans:
            raise StockError(
                f"The upgrade of {path} would leave {len(orphans)} rows without their parents; "
                "nothing was changed, please report it."
            )


def _make_folder(path: Path) -> None:
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise StockError(
            f"The folder {path.parent} for the stock cannot be made ({error.strerror}); "
            "name another place with --db."
        ) from error


def _copy_name(path: Path, label: str) -> Path:
    """Choose a free name beside the database, with the time in it."""
    stamp = datetime.now(UTC).strftime("%Y%m%d-%H%M%S")
    target = path.with_name(f"{path.stem}-{label}-{stamp}{path.suffix}")
    number = 1
    while target.exists():
        number += 1
        target = path.with_name(f"{path.stem}-{label}-{stamp}-{number}{path.suffix}")
    return target
