"""The program: all command groups under one boundary."""

from __future__ import annotations

import typer

from chooser.cli import check, db, fit, stock
from chooser.cli.boundary import Boundary, say

app = typer.Typer(
    cls=Boundary,
    name="chooser",
    rich_markup_mode=None,
    add_completion=False,
    help="Timing circuits that keep their interval, from the parts already in your drawers.",
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    context_settings={"help_option_names": ["-h", "--help"]},
)
app.add_typer(fit.app, name="fit")
app.add_typer(check.app, name="check")
app.add_typer(stock.app, name="stock")
app.add_typer(db.app, name="db")


def main() -> None:
    """Run the command line."""
    try:
        app()
    except KeyboardInterrupt:  # before or after what the boundary covers
        say("Stopped.")
        raise SystemExit(130) from None
