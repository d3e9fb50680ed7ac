"""`chooser fit`: ranked fits for a wanted interval, a command for each circuit family."""

from __future__ import annotations

from functools import partial
from typing import Annotated, Any

import typer

from chooser.cli.composing import REQUIRED, Parameter, composed
from chooser.cli.families import FAMILIES, Family
from chooser.cli.options import Db, Json, Stock
from chooser.cli.supporting_options import supporting_parameters, wish_of
from chooser.search.terms import NEAREST, REASONS, Rank, Rule

app = typer.Typer(
    rich_markup_mode=None,
    help="Find the parts for an interval in your stock.",
    no_args_is_help=True,
)

Within = Annotated[
    str, typer.Option("--within", metavar="PERCENT", help="Accepted band to either side.")
]
RankBy = Annotated[
    Rank,
    typer.Option(
        "--rank",
        help="error: smallest error first, exact over the whole space. count: fewest parts first, "
        "exact. balanced: inside the band first, then the likely miss, where each extra part must "
        f"cut it by a tenth; it weighs the {NEAREST} nearest resistor networks for every capacitor "
        "network and every number of resistors; of two slots so many RB, and beside each so many "
        "RA.",
    ),
]
Top = Annotated[
    int, typer.Option("--top", metavar="N", min=1, max=1000, help="How many fits to show.")
]
Boards = Annotated[
    int,
    typer.Option(
        "--boards", metavar="N", min=1, max=100_000, help="Boards to build alike, from one stock."
    ),
]
MostResistors = Annotated[
    int,
    typer.Option("--most-resistors", metavar="N", min=1, max=6, help="Resistors joined at most."),
]
MostCapacitors = Annotated[
    int,
    typer.Option("--most-capacitors", metavar="N", min=1, max=6, help="Capacitors joined at most."),
]
Allow = Annotated[
    list[Rule] | None,
    typer.Option(
        "--allow",
        metavar="RULE",
        help="Lift a house rule; repeatable. "
        + " ".join(f"{rule}: {reason}." for rule, reason in REASONS.items()),
        show_default=False,
    ),
]
Why = Annotated[
    bool,
    typer.Option("--why", help="Say of each fit all cautions, and why it ranks before the next."),
]


@app.callback()
def fit() -> None:
    """Find the parts for an interval in your stock."""


SEARCH = (
    Parameter("within", Within, "2%"),
    Parameter("rank", RankBy, Rank.BALANCED),
    Parameter("boards", Boards, 1),
    Parameter("most_resistors", MostResistors, 3),
    Parameter("most_capacitors", MostCapacitors, 2),
    Parameter("allow", Allow),
    Parameter("top", Top, 10),
    Parameter("why", Why, default=False),
    Parameter("stock", Stock),
    Parameter("db", Db),
    Parameter("as_json", Json, default=False),
)


def _parameters(family: Family) -> tuple[Parameter, ...]:
    target: tuple[Parameter, ...] = ()
    if family.argument:
        argument = typer.Argument(metavar="TARGET", help=family.argument)
        target = (Parameter("target", Annotated[str, argument], REQUIRED),)
    supporting = supporting_parameters(family)
    return (*target, *family.wishes, *family.device, *supporting, *SEARCH)


def _run(family: Family, options: dict[str, Any]) -> None:
    """Answer one command."""
    from chooser.cli.fit_view import finish, print_answer
    from chooser.cli.stock_source import holdings_from
    from chooser.cli.wishes import read_option
    from chooser.quantities import parse_percent
    from chooser.search.find import find_fits
    from chooser.search.request import Request

    options = {**options, "fits": True}
    circuit = family.circuit(options)
    wish = wish_of(options, circuit)
    request = Request(
        circuit,
        family.targets(options, circuit),
        within=read_option(options, "within", parse_percent),
        rank=options["rank"],
        top=options["top"],
        boards=options["boards"],
        most_resistors=options["most_resistors"],
        most_capacitors=options["most_capacitors"],
        lifted=frozenset(options["allow"] or ()),
    )
    stock = holdings_from(options["stock"], options["db"])
    answer = find_fits(stock, request)
    supporting = wish.picked(answer, stock) if wish else None
    print_answer(answer, supporting, as_json=options["as_json"], with_reasons=options["why"])
    finish(answer, supporting)


for _family in FAMILIES:
    _text = f"Fit {_family.summary}.\n\n\b\nExample: chooser fit {_family.fit}"
    app.command(_family.name, short_help=_family.summary)(
        composed(partial(_run, _family), _parameters(_family), _text)
    )
