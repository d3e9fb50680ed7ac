"""`chooser stock`: what lies in the drawers."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated, Any

import typer

from chooser.cli.options import Db, Json
from chooser.parts import Entry, Kind

app = typer.Typer(
    rich_markup_mode=None,
    help="Load, add to and list the parts in your drawers.",
    no_args_is_help=True,
)

Files = Annotated[
    list[Path],
    typer.Argument(metavar="FILE|FOLDER...", help="Stock sheets (CSV, XLSX), or folders of them."),
]
Preview = Annotated[
    bool, typer.Option("--preview", help="Show what would change, and change nothing.")
]
Words = Annotated[
    str,
    typer.Argument(metavar="PART", help='The part in words, such as "10k 1% metal film".'),
]
Drawer = Annotated[str, typer.Option("--drawer", metavar="NAME", help="The drawer it lies in.")]
OnlyDrawer = Annotated[
    str | None, typer.Option("--drawer", metavar="NAME", help="Only what lies in this drawer.")
]
Pieces = Annotated[
    str, typer.Option("--count", metavar="COUNT", help="How many come in: 20, ~50 or plenty.")
]
KindOf = Annotated[Kind | None, typer.Option("--kind", help="What it is.", show_default=False)]


def _trait(flag: str, example: str, text: str) -> Any:
    """Declare the option of one trait of a part."""
    return typer.Option(flag, metavar=example, help=text, show_default=False)


@app.command()
def load(files: Files, preview: Preview = False, db: Db = None, as_json: Json = False) -> None:
    """Bring the stock in line with sheets: all of them, or nothing where a row is wrong.

    A row states what lies in a drawer: loading it twice changes nothing, another count is
    written down as a correction, an empty cell keeps what is known. A row that differs from the
    only holding of its value in a drawer by a tolerance, a voltage or the like corrects it.

    \b
    Example: chooser stock load workshop.csv
    Example: chooser stock load sheets/ --preview
    """
    from chooser.cli.stock_source import entries_from
    from chooser.cli.stock_view import plan_json, print_json, print_plan
    from chooser.stock import loading
    from chooser.stock.location import database_path

    path, entries = database_path(db), entries_from(files)
    if preview:
        plan, change = loading.compare(path, entries), None
    else:
        names = ", ".join(file.name or str(file) for file in files)
        report = loading.apply(path, entries, f"load {names}")
        plan, change = report.plan, report.change
    if as_json:
        print_json(plan_json(plan, preview=preview, change=change))
    else:
        print_plan(plan, preview=preview)


@app.command()
def add(
    words: Words,
    drawer: Drawer,
    count: Pieces,
    *,
    kind: KindOf = None,
    tolerance: Annotated[str | None, _trait("--tolerance", "5%", "Printed tolerance.")] = None,
    technology: Annotated[str | None, _trait("--technology", "NAME", "What it is made of.")] = None,
    voltage: Annotated[str | None, _trait("--voltage", "63V", "Rated voltage.")] = None,
    power: Annotated[str | None, _trait("--power", "1/4W", "Rated power.")] = None,
    tempco: Annotated[str | None, _trait("--tempco", "50ppm", "Temperature coefficient.")] = None,
    measured: Annotated[str | None, _trait("--measured", "9.97k", "Measured value.")] = None,
    meter: Annotated[str | None, _trait("--meter", "0.5%", "Accuracy of that meter.")] = None,
    leakage: Annotated[str | None, _trait("--leakage", "2uA", "Leakage current.")] = None,
    taper: Annotated[str | None, _trait("--taper", "NAME", "linear, log, reverse-log.")] = None,
    turns: Annotated[str | None, _trait("--turns", "25", "Turns of its travel.")] = None,
    end_resistance: Annotated[
        str | None, _trait("--end-resistance", "2", "Ohms left at the stop.")
    ] = None,
    note: Annotated[str | None, _trait("--note", "TEXT", "A note.")] = None,
    db: Db = None,
    as_json: Json = False,
) -> None:
    """Put parts into a drawer: onto the same part if it lies there, else as a new holding.

    \b
    Example: chooser stock add "10k 1% metal film" --count 50 --drawer A4
    Example: chooser stock add "100u 25V electrolytic" --count 3 --drawer F2 --measured 94u
    """
    from chooser.cli.quick_entry import read_entry

    texts = {
        "tolerance": tolerance,
        "technology": technology,
        "voltage": voltage,
        "power": power,
        "tempco": tempco,
        "measured": measured,
        "meter": meter,
        "leakage": leakage,
        "taper": taper,
        "turns": turns,
        "end_resistance": end_resistance,
        "note": note,
    }
    said = {name: text for name, text in texts.items() if text is not None}
    entry = read_entry(words, kind, said, drawer, count)
    _add(entry, db, as_json=as_json)


def _add(entry: Entry, db: str | None, *, as_json: bool) -> None:
    from chooser.cli import stock_view
    from chooser.stock import ledger
    from chooser.stock.location import database_path

    what = f"add {stock_view.count_text(entry.count)} of {stock_view.describe(entry.part)}"
    added = ledger.add(database_path(db), entry, f"{what} to {entry.drawer}")
    if as_json:
        holding = stock_view.holding_json(added.holding)
        amended = list(added.amended)
        stock_view.print_json({"holding": holding, "created": added.created, "amended": amended})
    else:
        stock_view.print_holdings([added.holding])
        stock_view.say_amended(added)


@app.command("list")
def list_(
    kind: KindOf = None, drawer: OnlyDrawer = None, db: Db = None, as_json: Json = False
) -> None:
    """List the holdings with their counts, what is claimed and what is free.

    \b
    Example: chooser stock list --kind capacitor
    Example: chooser stock list --drawer A4 --json
    """
    from chooser.cli import stock_view
    from chooser.cli.boundary import say
    from chooser.stock.location import database_path
    from chooser.stock.selecting import select_holdings
    from chooser.stock.snapshot import read_stock

    stock = read_stock(database_path(db))
    holdings = select_holdings(stock, kind, drawer)
    if as_json:
        found = [stock_view.holding_json(holding) for holding in holdings]
        stock_view.print_json({"holdings": found})
    elif holdings:
        stock_view.print_holdings(holdings)
    elif stock:
        say("No such holding in the stock.")
    else:
        say("The stock holds no parts yet; load some with `chooser stock load FILE`.")
