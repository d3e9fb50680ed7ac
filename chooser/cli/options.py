"""Options that more than one command takes, declared once."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

Db = Annotated[
    str | None,
    typer.Option(
        "--db",
        envvar="CHOOSER_DB",
        metavar="PATH",
        help="The stock database; without it, the one in your user data folder.",
        show_default=False,
    ),
]
Json = Annotated[bool, typer.Option("--json", help="Print one JSON object instead of a table.")]
Stock = Annotated[
    list[Path] | None,
    typer.Option(
        "--stock",
        metavar="FILE|FOLDER",
        help="Answer straight from these sheets (CSV, XLSX), without a database. Repeatable.",
        show_default=False,
    ),
]
