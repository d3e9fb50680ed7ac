"""`chooser db`: the database file itself."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from chooser.cli.options import Db, Json

app = typer.Typer(
    rich_markup_mode=None,
    help="Find, copy and bring up to date the stock database.",
    no_args_is_help=True,
)

Copy = Annotated[
    Path | None,
    typer.Argument(
        metavar="FILE",
        help="The copy to make; without it, one with the time in its name, beside the database.",
        show_default=False,
    ),
]


@app.command()
def where(db: Db = None, as_json: Json = False) -> None:
    """Print the path of the stock database.

    \b
    Example: chooser db where
    """
    from chooser.cli.stock_view import print_json
    from chooser.cli.tables import print_line
    from chooser.stock.location import database_path
    from chooser.stock.revision import revision_of, state_of

    path = database_path(db).absolute()
    if as_json:
        state = state_of(path)
        print_json({"path": str(path), "state": state.value, "form": revision_of(path)})
    else:
        print_line(str(path))


@app.command()
def backup(to: Copy = None, db: Db = None, as_json: Json = False) -> None:
    """Copy the stock database, also while another program uses it.

    \b
    Example: chooser db backup
    Example: chooser db backup before-spring-clean.db
    """
    from chooser.cli.stock_view import print_json
    from chooser.cli.tables import print_line
    from chooser.stock import upgrade as upgrading
    from chooser.stock.location import database_path

    copy = upgrading.backup(database_path(db), to)
    if as_json:
        print_json({"copy": str(copy)})
    else:
        print_line(f"The stock was copied to {copy}.")


@app.command()
def upgrade(db: Db = None, as_json: Json = False) -> None:
    """Bring the database to this program's form, after a copy; make an empty one if there is none.

    \b
    Example: chooser db upgrade
    """
    from chooser.cli.stock_view import print_json
    from chooser.cli.tables import print_line
    from chooser.stock import upgrade as upgrading
    from chooser.stock.location import database_path

    path = database_path(db)
    done = upgrading.upgrade(path)
    if as_json:
        copy = None if done.backup is None else str(done.backup)
        print_json({"before": done.before, "after": done.after, "copy": copy})
    else:
        print_line(done.sentence(path))
