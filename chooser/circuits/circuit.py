"""What every family hands to the search and to the honest interval: one record.

A family's file turns devices and options into a `Circuit`; nothing further in asks which family
it is. Its times are the one interval, or the high and the low time of an oscillator.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import inf
from typing import Any, cast

from chooser.circuits.laws import Law, TimesLaw, TwinLaw
from chooser.circuits.scattering import Scatter
from chooser.circuits.timers import Timer
from chooser.parts import Tolerance
from chooser.quantities import format_tolerance

EXACT = Tolerance(0.0, 0.0)

TIMED = ("interval", "high", "low", "period")
"""Outputs that are times in second; a device that runs slow stretches them all alike."""


@dataclass(frozen=True, slots=True)
class Bounds:
    """Between which resistances the device is happy.

    Attributes
    ----------
    least, most : ohm. For two resistors, `least` holds for each and `most` for what the capacitor
        charges through.
    least_why, most_why : the reasons, as a clause.
    """

    least: float = 0.0
    most: float = inf
    least_why: str = ""
    most_why: str = ""


@dataclass(frozen=True, slots=True)
class Variant:
    """One of several ways to take the output, such as the pin of a counter.

    Attributes
    ----------
    name : what it is called, "" where there is no choice. scale : its time over the law's.
    """

    name: str = ""
    scale: float = 1.0


@dataclass(frozen=True, slots=True)
class Companion:
    """A resistor that a device needs beside its timing parts, but that sets no time.

    Attributes
    ----------
    name : what it is called. least, most : between which multiples of R it may lie.
    why : what it is for, as a clause.
    """

    name: str
    least: float
    most: float
    why: str


@dataclass(frozen=True, slots=True)
class Circuit:
    """A timing circuit with everything fixed but its timing parts.

    Attributes
    ----------
    family : the name under which it is asked for. title : what it is called in a sentence.
    device : what does the timing, as people name it; "" where nothing does.
    supply : in volt.
    resistors : names of the resistor slots. capacitor : whether there is a capacitor slot.
    outputs : names of what it puts out, the chief one first.
    typical : its formula with the device at its typical figures.
    corners : the same at the corners of the device's figures.
    error : limits of the device's own factor on all times; a third of each counts as one sigma.
    scatter : laws of pieces that stand for how the device's own figures scatter, each with its
        probability, all of them 1; besides `error`. Empty where nothing else scatters.
    bounds : resistances that the house rule allows.
    least_farad, most_farad : capacitances likewise.
    lossless : whether capacitor leakage is left out, as the textbook does.
    alternating : whether the capacitor is charged both ways round.
    shortest : chief time in second below which the device's own delays rule.
    timer : the timer, where it is one. variants : ways to take the output.
    taps : all outputs of a counter with their scales, for timing it by an earlier one.
    first : the formula of the first time after power-up, where it differs.
    setting : what else was decided that the figures rest on, as people say it, such as
        "control pin at 4 V"; "" for the usual.
    temperature_drift, supply_drift : of the times by the device, in 1/K and 1/V, the greatest
        usual size.
    control : voltage in volt forced on the timer's control pin; None where it is open.
    output_resistance : of the device's output in ohm, where it is known and no `timer` says it.
    companions : resistors that the device needs besides.
    reset_on_power : whether the device must be reset as the supply comes up.
    """

    family: str
    title: str
    device: str
    supply: float
    resistors: tuple[str, ...]
    capacitor: bool
    outputs: tuple[str, ...]
    typical: TimesLaw
    corners: tuple[TimesLaw, ...]
    error: Tolerance = EXACT
    scatter: Scatter = ()
    bounds: Bounds = Bounds()
    least_farad: float = 0.0
    most_farad: float = inf
    lossless: bool = False
    alternating: bool = False
    shortest: float = 0.0
    timer: Timer | None = None
    variants: tuple[Variant, ...] = (Variant(),)
    taps: tuple[Variant, ...] = ()
    first: TimesLaw | None = None
    setting: str = ""
    temperature_drift: float = 0.0
    supply_drift: float = 0.0
    control: float | None = None
    output_resistance: float | None = None
    companions: tuple[Companion, ...] = ()
    reset_on_power: bool = False

    @property
    def law(self) -> Law:
        """The typical formula of a circuit of one resistor."""
        return cast("Law", self.typical)

    @property
    def twin(self) -> TwinLaw:
        """The typical formula of a circuit of two resistors."""
        return cast("TwinLaw", self.typical)

    @property
    def slots(self) -> tuple[str, ...]:
        """Names of all slots, the capacitor's last."""
        return (*self.resistors, *(("C",) if self.capacitor else ()))


def limits_text(error: Tolerance) -> str:
    """Write how far something may be off: " +/-2%", " -1/+3%", or nothing where it is exact."""
    if error == EXACT:
        return ""
    text = format_tolerance(error)
    return f" +/-{text}" if error.minus == error.plus else f" {text}"


def sheet_bounds(least: float, most: float) -> Bounds:
    """Return the resistances (ohm) that a data sheet allows for a timing resistor."""
    return Bounds(
        least, most, "least resistor of its data sheet", "largest resistor of its data sheet"
    )


def charging_resistance(circuit: Circuit, values: Sequence[Any]) -> Any:
    """Return the resistance that the capacitor is charged through.

    Parameters
    ----------
    circuit : which one. values : of its resistor slots in order, in ohm: numbers or arrays.

    Returns
    -------
    Ohm, a number or an array as the values are.
    """
    through_one = len(values) > 1 and not circuit.twin.through_both
    return values[0] if through_one else sum(values[1:], values[0])


def outputs_of(circuit: Circuit, times: Sequence[Any]) -> Mapping[str, Any]:
    """Return the outputs that times make, by name.

    Parameters
    ----------
    circuit : which one. times : numbers, arrays or fractions, in second; for a plain network
        its value.

    Returns
    -------
    Second, hertz for the frequency, a fraction for the duty.
    """
    if len(times) == 1:
        return {circuit.outputs[0]: times[0]}
    high, low = times
    period = high + low
    return {
        "high": high,
        "low": low,
        "period": period,
        "frequency": 1 / period,
        "duty": high / period,
    }
