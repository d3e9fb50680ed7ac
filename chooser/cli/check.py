"""`chooser check`: what a circuit of given parts will really do, a command for each family."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache, partial
from typing import TYPE_CHECKING, Annotated, Any

import typer

from chooser.cli.composing import Parameter, composed
from chooser.cli.families import FAMILIES, Family
from chooser.cli.options import Db, Json, Stock
from chooser.errors import BadRequestError

if TYPE_CHECKING:
    from chooser.circuits.circuit import Circuit, Variant

app = typer.Typer(
    rich_markup_mode=None,
    help="Say what a circuit of given parts will really do.",
    no_args_is_help=True,
)

PARTS = {
    "R": "'820k', '820k 1%', '10k + (22k || 47k)', or a holding of the stock: '#17'.",
    "C": "'100n 5% polyester', '100u 20% electrolytic 25V', '100n measured 96n 2%', or '#61'.",
}


def _slot(name: str) -> Parameter:
    help_text = f"The part or network in {name}: {PARTS[name[0]]}"
    option = typer.Option(f"--{name}", metavar="PARTS", help=help_text, show_default=False)
    return Parameter(f"slot_{name}", Annotated[str | None, option])


_TARGET = typer.Option(
    "--target", metavar="VALUE", help="What it is said to make, to be compared.", show_default=False
)
_TEMPERATURE = typer.Option(
    "--temperature",
    metavar="RANGE",
    help="Where it is to work: 0..40C.",
    show_default=False,
)
_WITHIN = typer.Option("--within", metavar="PERCENT", help="Accepted band to either side.")

COMMON = (
    Parameter("temperature", Annotated[str | None, _TEMPERATURE]),
    Parameter("within", Annotated[str, _WITHIN], "2%"),
    Parameter("stock", Stock),
    Parameter("db", Db),
    Parameter("as_json", Json, default=False),
)


@app.callback()
def check() -> None:
    """Say what a circuit of given parts will really do."""


def _parameters(family: Family) -> tuple[Parameter, ...]:
    slots = tuple(_slot(name) for name in family.slots)
    target: tuple[Parameter, ...] = ()
    if family.argument:
        target = (Parameter("target", Annotated[str | None, _TARGET]),)
    return (*slots, *target, *family.wishes, *family.device, *COMMON)


def _run(family: Family, options: dict[str, Any]) -> None:
    """Answer one command."""
    from chooser.cli.check_view import print_verdict
    from chooser.cli.stock_source import holdings_from
    from chooser.cli.typed_parts import read_slot
    from chooser.cli.wishes import read_option
    from chooser.quantities import parse_percent
    from chooser.verdict import judged

    options = {**options, "fits": False}
    circuit = family.circuit(options)
    targets = family.targets(options, circuit)
    stock = cache(lambda: holdings_from(options["stock"], options["db"]))
    networks = {
        name: read_slot(_text_of(options, name), name, circuit, stock) for name in family.slots
    }
    verdict = judged(
        circuit,
        networks,
        targets,
        read_option(options, "within", parse_percent),
        _warmth(options),
        variant=_variant(circuit),
        at_supply=_at_supply(family, circuit, options),
    )
    print_verdict(verdict, as_json=options["as_json"])


def _text_of(options: dict[str, Any], name: str) -> str:
    text: str | None = options[f"slot_{name}"]
    if text is None:
        raise BadRequestError(
            f"--{name} is missing; write the part in it, such as {PARTS[name[0]]}"
        )
    return text


def _warmth(options: dict[str, Any]) -> Any:
    from chooser.cli.wishes import read_option
    from chooser.quantities import parse_temperature_range
    from chooser.temperature import Warmth

    if options["temperature"] is None:
        return None
    span = read_option(options, "temperature", parse_temperature_range)
    return Warmth(span.low, span.high)


def _variant(circuit: Circuit) -> Variant:
    """Return the one way to take the output, or ask for it."""
    if len(circuit.variants) == 1:
        return circuit.variants[0]
    raise BadRequestError(
        "Which output is it taken from? Add --ratio with what that output divides by, such as "
        "--ratio 16384."
    )


def _at_supply(
    family: Family, circuit: Circuit, options: dict[str, Any]
) -> Callable[[float], Circuit] | None:
    """Return how to build the same circuit at another supply, where it has one."""
    if not circuit.supply:
        return None
    return lambda volt: family.circuit({**options, "supply": f"{volt}V"})


for _family in FAMILIES:
    _text = f"Check {_family.summary}.\n\n\b\nExample: chooser check {_family.check}"
    app.command(_family.name, short_help=_family.summary)(
        composed(partial(_run, _family), _parameters(_family), _text)
    )
