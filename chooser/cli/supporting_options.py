"""The options that ask for the parts beside the timing parts, and what they ask for."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated

import typer

from chooser.cli.composing import Parameter
from chooser.cli.families import Family
from chooser.cli.wishes import Options
from chooser.errors import BadRequestError, UnreadableValueError

if TYPE_CHECKING:
    from chooser.circuits.circuit import Circuit
    from chooser.parts import Holding
    from chooser.search.request import Answer
    from chooser.supporting.led import Led
    from chooser.supporting.picking import Supporting

WithParts = Annotated[
    bool,
    typer.Option(
        "--with-parts",
        help="Pick what the circuit needs beside its timing parts, for the first fit.",
    ),
]
LedText = Annotated[
    str | None,
    typer.Option(
        "--led",
        metavar="'VOLT AMPERE'",
        help="An LED on the output, by its forward voltage and current, such as '2V 10mA'; with "
        "what --with-parts picks.",
        show_default=False,
    ),
]
LedTo = Annotated[
    str | None,
    typer.Option(
        "--led-to",
        metavar="ground|supply",
        help="Where the LED's other end goes: to ground (if not given), lit while the output is "
        "high, or to the supply, lit while it is low.",
        show_default=False,
    ),
]
TriggerHeld = Annotated[
    str,
    typer.Option(
        "--trigger-held",
        metavar="TIME",
        help="With --with-parts: how long a trigger is held at most; shorter intervals have it "
        "coupled by a capacitor.",
    ),
]

SUPPORTING = (
    Parameter("with_parts", WithParts, default=False),
    Parameter("led", LedText),
    Parameter("led_to", LedTo),
)
TRIGGERED = (Parameter("trigger_held", TriggerHeld, "1s"),)


@dataclass(frozen=True, slots=True)
class Wish:
    """What is wanted beside the timing parts: an LED or none, a trigger held so long (second)."""

    led: Led | None
    held: float

    def picked(self, answer: Answer, stock: Sequence[Holding]) -> Supporting | None:
        """Return the parts that go with the first fit, if there is one."""
        from chooser.supporting.needs import needs_of
        from chooser.supporting.picking import pick

        if not answer.fits:
            return None
        fit, request = answer.fits[0], answer.request
        needs = needs_of(request.circuit, fit, self.led, self.held)
        return pick(needs, fit, stock, request.boards)


def supporting_parameters(family: Family) -> tuple[Parameter, ...]:
    """Return the options for a family; none where it has no device."""
    names = {parameter.name for parameter in family.device}
    if not names & {"timer", "chip"}:
        return ()
    return (*SUPPORTING, *(TRIGGERED if family.argument and "timer" in names else ()))


def wish_of(options: Options, circuit: Circuit) -> Wish | None:
    """Return what is wanted beside the timing parts, None where nothing was asked.

    Raises
    ------
    BadRequestError
        An LED that cannot be read, or that the output of the circuit cannot drive.
    """
    from chooser.quantities import parse_duration
    from chooser.supporting.led import drive_of

    if not circuit.device or not (
        options["with_parts"] or options["led"] is not None or options["led_to"] is not None
    ):
        return None
    led = _led(options["led"], options["led_to"])
    if led is not None:
        drive_of(circuit, led)
    return Wish(led, parse_duration(options.get("trigger_held", "1s")))


def _led(text: str | None, end: str | None) -> Led | None:
    from chooser.supporting.led import Led

    if end not in (None, "ground", "supply"):
        raise BadRequestError(f"--led-to {end}: there is no such choice; write ground or supply.")
    if text is None:
        if end is None:
            return None
        raise BadRequestError("--led-to without an LED; add --led '2V 10mA'.")
    volt, ampere = _volt_and_ampere(text)
    return Led(volt, ampere, to_supply=end == "supply")


def _volt_and_ampere(text: str) -> tuple[float, float]:
    """Read a voltage and a current, in either order; each may have a space before its unit."""
    from chooser.quantities import parse_current, parse_voltage

    words = [word.rstrip(",;") for word in text.split(maxsplit=4)]
    for cut in range(1, len(words)):
        pair = " ".join(words[:cut]), " ".join(words[cut:])
        for volt, ampere in (pair, pair[::-1]):
            try:
                return parse_voltage(volt), parse_current(ampere)
            except UnreadableValueError:
                continue
    raise BadRequestError(
        f"--led {text[:60]!r} is no voltage and current; write those of the LED, such as '2V 10mA'."
    )
