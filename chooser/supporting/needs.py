"""What a circuit needs beside its timing parts: a row each, with its window and its reason.

Values are what is usual on the bench, in windows that anything sensible lies in; where a data
sheet or a derivation stands behind one, its source says so.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from math import sqrt

from chooser.cautions.of_surroundings import HELD_SHORT
from chooser.circuits.circuit import Circuit, Companion
from chooser.parts import Kind
from chooser.quantities import (
    format_capacitance,
    format_current,
    format_duration,
    format_resistance,
    format_voltage,
)
from chooser.search.request import Fit
from chooser.supporting.led import Drive, Led, drive_of, output_note

PRACTICE = "common practice, no source"

SHARE = 0.1
"""Of the interval: the most that trigger coupling and pull-up may have as time constant."""

ELECTROLYTIC_MARGIN = 1.5
"""Rating over the supply that an electrolytic should have (common practice, no source)."""


@dataclass(frozen=True, slots=True)
class Need:
    """One part that is needed on every board.

    Attributes
    ----------
    use : what for, the name it is known by. kind : resistor or capacitor.
    least, preferred, most : its value in ohm or farad.
    why : where it goes and what it does there, as a clause. source : of the window.
    volt : rating in volt that a capacitor must have. volt_preferred : that it had better have.
    electrolytic : whether a capacitor is to be one; else ceramic or film.
    drive : what stands across the resistor of an LED.
    caution : a sentence to go with it, or "".
    """

    use: str
    kind: Kind
    least: float
    preferred: float
    most: float
    why: str
    source: str = PRACTICE
    volt: float = 0.0
    volt_preferred: float = 0.0
    electrolytic: bool = False
    drive: Drive | None = None
    caution: str = ""

    @property
    def window(self) -> str:
        """What will do, in words: "4n7 to 100n, ceramic or film, rated 9 V or more"."""
        if self.kind is Kind.RESISTOR:
            low, high = (format_resistance(ohm, digits=3) for ohm in (self.least, self.most))
            return f"{low} to {high}"
        low, high = (format_capacitance(farad, digits=3) for farad in (self.least, self.most))
        sort = "electrolytic" if self.electrolytic else "ceramic or film"
        return f"{low} to {high}, {sort}, rated {format_voltage(self.volt)} or more"


SUPPLY_BYPASS = Need(
    "supply bypass",
    Kind.CAPACITOR,
    47e-9,
    100e-9,
    220e-9,
    "across the chip's supply pins, close by: takes its switching spikes",
)
RESERVOIR = Need(
    "supply reservoir",
    Kind.CAPACITOR,
    10e-6,
    47e-6,
    100e-6,
    "across the supply: what the output switches comes from it",
    electrolytic=True,
)
CONTROL_BYPASS = Need(
    "control bypass",
    Kind.CAPACITOR,
    4.7e-9,
    10e-9,
    100e-9,
    "control pin to ground: keeps noise off the trip point",
    f"{PRACTICE}; no more than needed: SLFS043C p. 11 has 100 nF there shorten a period by 10 %",
)
PULL_UP = Need(
    "trigger pull-up",
    Kind.RESISTOR,
    4.7e3,
    10e3,
    22e3,
    "trigger pin to the supply: keeps it from triggering by itself",
)
COUPLING = Need(
    "trigger coupling",
    Kind.CAPACITOR,
    1e-9,
    10e-9,
    100e-9,
    "between switch and trigger pin: a long press becomes a short pulse",
    f"{PRACTICE}; SLFS022 p. 9: the trigger must be high again before the interval ends",
    caution="As the switch opens, the coupled trigger pin is lifted above the supply; a diode "
    "from the pin to the supply keeps it down.",
)
SWITCH_PULL_UP = Need(
    "switch pull-up",
    Kind.RESISTOR,
    4.7e3,
    10e3,
    100e3,
    "switch side of the coupling to the supply: makes it ready for the next press",
)
RESET_CAPACITOR = Need(
    "reset capacitor",
    Kind.CAPACITOR,
    47e-9,
    100e-9,
    470e-9,
    "supply to the reset pin: lets the count start at zero",
)
RESET_RESISTOR = Need(
    "reset resistor",
    Kind.RESISTOR,
    47e3,
    100e3,
    470e3,
    "reset pin to ground: ends the reset some 10 ms after the supply is up",
)


def needs_of(
    circuit: Circuit, fit: Fit, led: Led | None = None, held: float = HELD_SHORT
) -> tuple[Need, ...]:
    """Return what a circuit needs beside its timing parts.

    Parameters
    ----------
    circuit : which one; nothing is needed where it has no device.
    fit : its timing parts. led : an LED that is wanted on its output.
    held : how long a trigger may be held, in second; an interval that is no longer has its
        trigger coupled through a capacitor.

    Raises
    ------
    BadRequestError
        An LED that the output cannot drive.
    """
    if not circuit.device:
        return ()
    rows = [*_chip(circuit, fit, held)]
    rows += (_companion(each, fit.slot("R").value) for each in circuit.companions)
    if circuit.reset_on_power:
        rows += (RESET_CAPACITOR, RESET_RESISTOR)
    if led is not None:
        rows.append(_led_resistor(circuit, led))
    return tuple(_rated(row, circuit.supply) for row in rows)


def _chip(circuit: Circuit, fit: Fit, held: float) -> Iterator[Need]:
    """Return what the chip itself needs."""
    yield SUPPLY_BYPASS
    if circuit.timer is None:
        return
    yield RESERVOIR
    if circuit.control is None:
        yield CONTROL_BYPASS
    if "interval" in circuit.outputs:
        yield from _trigger(fit.outlook.of("interval").low, held)


def _trigger(interval: float, held: float) -> tuple[Need, ...]:
    """Return what the trigger pin needs for an interval of at least so many seconds."""
    if not 0.0 < interval <= held:
        return (PULL_UP,)
    # Whichever of the two is picked, their product must not exceed its share of the interval.
    product = SHARE * interval
    ohm = min(PULL_UP.most, product / COUPLING.least)
    if ohm < PULL_UP.least:
        caution = (
            f"Keep the trigger shorter than {format_duration(interval, digits=2)}, by logic: so "
            "short an interval is not to be had from a switch through a capacitor."
        )
        return (replace(PULL_UP, caution=caution),)
    farad = min(COUPLING.most, product / ohm)
    return (
        replace(PULL_UP, preferred=min(PULL_UP.preferred, ohm), most=ohm),
        replace(COUPLING, preferred=min(COUPLING.preferred, farad), most=farad),
        SWITCH_PULL_UP,
    )


def _companion(companion: Companion, ohm: float) -> Need:
    """Return a resistor that is to be some multiple of R (ohm)."""
    least, most = companion.least * ohm, companion.most * ohm
    source = "the chip's row in counters.toml"
    return Need(
        companion.name, Kind.RESISTOR, least, sqrt(least * most), most, companion.why, source
    )


def _led_resistor(circuit: Circuit, led: Led) -> Need:
    drive = drive_of(circuit, led)
    least, most = drive.window(led.ampere)
    state, end = ("low", "the supply") if led.to_supply else ("high", "ground")
    why = f"output over an LED to {end}, lit while the output is {state}"
    return Need(
        "LED resistor",
        Kind.RESISTOR,
        least,
        drive.ohm(led.ampere),
        most,
        f"{why}: {format_current(led.ampere, digits=3)} at {format_voltage(led.volt, digits=3)}",
        "what the supply leaves beside LED and output",
        drive=drive,
        caution=output_note(circuit, led),
    )


def _rated(need: Need, supply: float) -> Need:
    """Say what rating a capacitor must have at a supply."""
    if need.kind is Kind.RESISTOR:
        return need
    better = ELECTROLYTIC_MARGIN if need.electrolytic else 1.0
    return replace(need, volt=supply, volt_preferred=better * supply)
