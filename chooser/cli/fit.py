"""`chooser fit`: ranked fits for a wanted interval."""

from __future__ import annotations

import typer

app = typer.Typer(help="Find the parts for an interval.", no_args_is_help=True)
