"""What the rules look at and what they say, and the words they share.

A rule is a function from `FitFacts` to a sentence, or to None where it does not apply. Every
sentence says what to do.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from enum import StrEnum
from math import inf, isfinite, isinf

from chooser.circuits.circuit import TIMED, Circuit, charging_resistance
from chooser.circuits.laws import TimesLaw
from chooser.interval import Outlook, Reading
from chooser.networks import Network, members
from chooser.parts import Holding, Kind
from chooser.quantities import format_capacitance, format_resistance, format_voltage
from chooser.slot_facts import NOTHING, SlotFacts


class Code(StrEnum):
    """The codes, stable for programs that read them."""

    RATING_MARGIN = "rating-margin"
    REVERSED_SWING = "reversed-swing"
    POLARISED_SERIES = "polarised-series"
    DISCHARGE_PIN = "discharge-pin"
    STALL = "stall"
    MAY_NEVER_END = "may-never-end"
    CLASS_2 = "class-2"
    STRAY = "stray"
    SHORT_INTERVAL = "short-interval"
    FREQUENCY_LIMIT = "frequency-limit"
    LEAKAGE = "leakage"
    CAPACITOR_TOLERANCE = "capacitor-tolerance"
    DEVICE_SCATTER = "device-scatter"
    DIODE_SUPPLY = "diode-supply"
    THRESHOLD_EXACT = "threshold-exact"
    OUTSIDE_RATING = "outside-rating"
    ASSUMED_TOLERANCE = "assumed-tolerance"
    ASSUMED_KIND = "assumed-kind"
    ROUGH_COUNT = "rough-count"
    RATING_UNKNOWN = "rating-unknown"
    DISCHARGE_SURGE = "discharge-surge"
    RECOVERY = "recovery"
    HIGH_RESISTANCE = "high-resistance"
    METER_ON_NODE = "meter-on-node"
    STORED_CHARGE = "stored-charge"
    POLARITY = "polarity"
    TRIGGER_LENGTH = "trigger-length"
    MAINS = "mains"
    NOT_FOR_SAFETY = "not-for-safety"


@dataclass(frozen=True, slots=True)
class Caution:
    """One thing to look out for.

    Attributes
    ----------
    code : stable name of the rule. text : one sentence that says what to do.
    """

    code: Code
    text: str


@dataclass(frozen=True, slots=True)
class FitFacts:
    """What the rules look at: a circuit of parts from the stock.

    Attributes
    ----------
    circuit : the circuit.
    networks, slots : of each slot by name: its parts as joined, and what went into the outlook
        (ohm, farad, siemens).
    outlook : what the circuit will do.
    wanted : least and most wanted of each output that has a target.
    """

    circuit: Circuit
    networks: Mapping[str, Network[Holding]]
    slots: Mapping[str, SlotFacts]
    outlook: Outlook
    wanted: Mapping[str, tuple[float, float]]

    @property
    def supply(self) -> float:
        """Supply voltage in volt."""
        return self.circuit.supply

    @property
    def c(self) -> SlotFacts:
        """The capacitor slot."""
        return self.slots.get("C", NOTHING)

    @property
    def ohms(self) -> tuple[float, ...]:
        """Value of every resistor slot in ohm, in order."""
        return tuple(self.slots[name].value for name in self.circuit.resistors)

    @property
    def charging(self) -> float:
        """Resistance in ohm that the capacitor is charged through."""
        return float(charging_resistance(self.circuit, self.ohms)) if self.ohms else 0.0

    @property
    def capacitors(self) -> tuple[Holding, ...]:
        """The holdings picked for the capacitor slot; repeats are harmless."""
        return tuple(members(self.networks["C"])) if "C" in self.networks else ()

    @property
    def holdings(self) -> tuple[Holding, ...]:
        """All holdings picked."""
        return tuple(each for network in self.networks.values() for each in members(network))

    @property
    def is_timed(self) -> bool:
        """Whether a capacitor is charged through resistors, not just a value made up of parts."""
        return self.circuit.capacitor and bool(self.ohms) and self.circuit.outputs[0] in TIMED

    @property
    def oscillates(self) -> bool:
        """Whether it runs by itself, again and again."""
        return "period" in self.circuit.outputs

    @property
    def charged(self) -> Reading:
        """The time in which the capacitor is charged."""
        return self.outlook.of("high") if "high" in self.circuit.outputs else self.outlook.chief

    @property
    def charged_name(self) -> str:
        """What that time is called."""
        return "high time" if self.charged.output == "high" else self.charged.output

    def stretch(self, law: TimesLaw, leak: float, over: float | None = None) -> float:
        """Return by how much losses lengthen the time in which the capacitor is charged.

        Parameters
        ----------
        law : of the circuit with its device in some state. leak : across the capacitor in siemens.
        over : leak of the state compared with; None compares with a circuit that loses nothing.

        Returns
        -------
        Relative to the shorter time; infinity where the longer one never ends, 0 where the
        shorter one does not start.
        """
        less, least_leak = (law.lossless(), 0.0) if over is None else (law, over)
        lossy = float(law.times(self.ohms, self.c.value, leak)[0])
        plain = float(less.times(self.ohms, self.c.value, least_leak)[0])
        if isinf(lossy):
            return inf
        return lossy / plain - 1.0 if isfinite(plain) and plain > 0.0 else 0.0


Rule = Callable[[FitFacts], str | None]


def surely_below(stretch: float, ratio: float) -> bool:
    """Tell by the ratio of currents at the trip point alone that losses lengthen a time by less.

    Before the trip point the charging current is larger and what is lost is no larger, so the
    node loses at most 1 / ratio of its current, and the time grows by 1 / (ratio - 1) at most.
    """
    return ratio > 1.0 + 1.0 / stretch


def names(holdings: Sequence[Holding]) -> str:
    """Return what the holdings are called on the bench: value and drawer, each once."""
    called = (
        f"{_value(holding)} in drawer {holding.drawer}" if holding.drawer else _value(holding)
        for holding in holdings
    )
    return " and ".join(dict.fromkeys(called))


def _value(holding: Holding) -> str:
    """Return the nominal value as people write it."""
    write = format_capacitance if holding.part.kind is Kind.CAPACITOR else format_resistance
    return write(holding.part.value)


def ohm_text(ohm: float) -> str:
    """Return a resistance rounded for reading."""
    return format_resistance(ohm, digits=3)


def farad_text(farad: float) -> str:
    """Return a capacitance rounded for reading."""
    return format_capacitance(farad, digits=3)


def volt_text(volt: float) -> str:
    """Return a voltage rounded for reading."""
    return format_voltage(volt, digits=3)
