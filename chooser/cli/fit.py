"""`chooser fit`: ranked fits for a wanted interval."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from chooser.cli.options import Db, Json, Stock
from chooser.search.terms import NEAREST, REASONS, Rank, Rule

app = typer.Typer(
    rich_markup_mode=None,
    help="Find the parts for an interval in your stock.",
    no_args_is_help=True,
)

Target = Annotated[
    str, typer.Argument(metavar="TARGET", help="The interval wanted: 90s, 1.5min, 12ms, 1:30.")
]
Supply = Annotated[str, typer.Option("--supply", metavar="VOLT", help="Supply of the timer.")]
TimerName = Annotated[
    str,
    typer.Option(
        "--timer",
        metavar="ideal|bipolar|cmos|TYPE",
        help="The timer: a generic one, a type number such as NE555 or TLC555, or ideal, which "
        "is the textbook formula and nothing else.",
    ),
]
TimerFile = Annotated[
    Path | None,
    typer.Option(
        "--timer-file",
        metavar="FILE",
        help="A TOML file with timer types of your own.",
        show_default=False,
    ),
]
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
        "network and every number of resistors.",
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


@app.command()
def monostable(
    target: Target,
    *,
    supply: Supply = "9V",
    timer: TimerName = "bipolar",
    within: Within = "2%",
    rank: RankBy = Rank.BALANCED,
    boards: Boards = 1,
    most_resistors: MostResistors = 3,
    most_capacitors: MostCapacitors = 2,
    allow: Allow = None,
    top: Top = 10,
    why: Why = False,
    stock: Stock = None,
    db: Db = None,
    timer_file: TimerFile = None,
    as_json: Json = False,
) -> None:
    """Fit a one-shot: one interval after a trigger, made by one R and one C.

    \b
    Example: chooser fit monostable 90s --stock sample_inventory
    Example: chooser fit monostable 12ms --timer TLC555 --supply 5V --boards 4 --rank error
    """
    from chooser.circuits.timers import timer_named
    from chooser.cli.fit_view import finish, print_answer
    from chooser.cli.stock_source import holdings_from
    from chooser.errors import BadRequestError
    from chooser.quantities import is_range, parse_duration, parse_percent, parse_voltage
    from chooser.search.find import find_fits
    from chooser.search.request import Request

    if is_range(target):
        raise BadRequestError(
            f"{target!r} is a range; name the one interval that is wanted, such as 30s."
        )
    request = Request(
        target=parse_duration(target),
        timer=timer_named(timer, timer_file),
        supply=parse_voltage(supply),
        within=parse_percent(within),
        rank=rank,
        top=top,
        boards=boards,
        most_resistors=most_resistors,
        most_capacitors=most_capacitors,
        lifted=frozenset(allow or ()),
    )
    answer = find_fits(holdings_from(stock, db), request)
    print_answer(answer, as_json=as_json, with_reasons=why)
    finish(answer)
