"""An LED on the output: what drives it, and which resistors suit.

    R = (V - Voh loss - Vled) / I - Ro   lit while the output is high, from output to ground
    R = (V - Vol - Vled) / I - Ro        lit while it is low, from supply to output

with the output's level at a small load and its resistance Ro, which makes the level that it has
at this current.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf

from chooser.circuits.circuit import Circuit
from chooser.circuits.output import check_output
from chooser.errors import BadRequestError
from chooser.quantities import format_current, format_voltage

OVER = 1.1
"""Current over the one that was asked at most: what makes an LED brighter than was meant."""

LEAST, MOST = 0.8, 1.5
"""Resistance over the one worked out; an eye hardly tells half the current (common practice)."""


@dataclass(frozen=True, slots=True)
class Led:
    """An LED that is wanted on the output.

    Attributes
    ----------
    volt : its forward voltage. ampere : current it is to have.
    to_supply : whether it hangs between supply and output, lit while the output is low.
    """

    volt: float
    ampere: float
    to_supply: bool = False


@dataclass(frozen=True, slots=True)
class Drive:
    """What stands across the LED's resistor.

    Attributes
    ----------
    volt : across the resistor and the output's own resistance. series : the latter, in ohm.
    most : ampere that the output may carry.
    """

    volt: float
    series: float
    most: float = inf

    def current(self, ohm: float) -> float:
        """Return the current in ampere with a resistor."""
        return self.volt / (ohm + self.series)

    def watt(self, ohm: float) -> float:
        """Return what a resistor dissipates."""
        return self.current(ohm) ** 2 * ohm

    def ohm(self, ampere: float) -> float:
        """Return the resistor that makes a current; 0 or less if none does."""
        return self.volt / ampere - self.series

    def window(self, ampere: float) -> tuple[float, float]:
        """Return the least and the most resistance (ohm) that will do for a current."""
        wanted = self.ohm(ampere)
        least = self.ohm(min(OVER * ampere, self.most))
        return max(LEAST * wanted, least), MOST * wanted


def drive_of(circuit: Circuit, led: Led) -> Drive:
    """Return what stands across an LED's resistor on the output of a circuit.

    Parameters
    ----------
    circuit : one with a device. Where no figures of its output are on file, the output is taken
        to reach the rail.

    Raises
    ------
    BadRequestError
        The output may not carry that much, or nothing is left for a resistor.
    """
    level, series, most = _output(circuit, to_supply=led.to_supply)
    _check_current(circuit, led, most)
    drive = Drive(circuit.supply - level - led.volt, series, most)
    if drive.ohm(led.ampere) <= 0.0:
        _refuse_voltage(circuit, led, circuit.supply - level - series * led.ampere)
    return drive


def output_note(circuit: Circuit, led: Led) -> str:
    """Say what is not known of the output, or what the LED does to the times; "" if nothing."""
    current = format_current(led.ampere, digits=3)
    timer = circuit.timer
    if timer is None:
        return _unknown_output(circuit, current)
    if timer.ideal or not _charges(circuit):
        return ""
    if led.to_supply:
        return (
            "The LED loads the low output, which discharges the capacitor, and the times do not "
            "count with it; hang it between output and ground instead (--led-to ground)."
        )
    return (
        "The LED loads the high output, which charges the capacitor: the times are only true "
        f"with --load {current.replace(' ', '')}."
    )


def _unknown_output(circuit: Circuit, current: str) -> str:
    """Say that no limit of the output is on file, and what else is not."""
    level = "" if circuit.output_resistance else ", and it is taken to reach the rail"
    other = "; use another gate of the chip, for this one charges the capacitor"
    return (
        f"How much the output of the {circuit.device} may carry is not on file{level}: see that "
        f"its data sheet allows {current}, else drive the LED by a transistor"
        f"{other if _charges(circuit) else ''}."
    )


def _charges(circuit: Circuit) -> bool:
    """Tell whether the output that drives the LED also charges the capacitor."""
    return "period" in circuit.outputs and circuit.resistors == ("R",)


def _output(circuit: Circuit, *, to_supply: bool) -> tuple[float, float, float]:
    """Return how far the output stays from the rail (volt), its ohm and its most ampere."""
    timer = circuit.timer
    if timer is None:
        return 0.0, circuit.output_resistance or 0.0, inf
    if to_supply:
        return timer.output_low_typical, timer.output_low_resistance, timer.sink_current_limit
    return timer.output_high_drop_typical, timer.output_high_resistance, timer.source_current_limit


def _check_current(circuit: Circuit, led: Led, most: float) -> None:
    _, _, other = _output(circuit, to_supply=not led.to_supply)
    way = ""
    if other >= led.ampere:
        to, does = ("ground", "source") if led.to_supply else ("supply", "sink")
        way = f", or turn it round (--led-to {to}): it can {does} {format_current(other, digits=3)}"
    verb = "sink" if led.to_supply else "source"
    check_output(circuit.device, most, led.ampere, "the LED is to have", verb=verb, way=way)


def _refuse_voltage(circuit: Circuit, led: Led, left: float) -> None:
    state = "low" if led.to_supply else "high"
    leaves = format_voltage(left, digits=3) if left > 0.0 else "nothing"
    level, series, most = _output(circuit, to_supply=not led.to_supply)
    other = Drive(circuit.supply - level - led.volt, series)
    way = ""
    if led.ampere <= most and other.ohm(led.ampere) > 0.0:
        way = f", or turn it round (--led-to {'ground' if led.to_supply else 'supply'})"
    raise BadRequestError(
        f"At {format_voltage(circuit.supply)} and {format_current(led.ampere, digits=3)} the "
        f"{state} output of the {circuit.device} leaves {leaves}, too little for an LED of "
        f"{format_voltage(led.volt)} and its resistor; take less current or a higher supply{way}."
    )
