"""What to look out for before building a fit: stable codes, each with one sentence of advice.

Conventions: rules stand in order of importance, so the first caution of a fit is the one that
matters most: what is dangerous, then what fails in kind, then what is off by much, then what
is worth knowing. Every sentence says what to do.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from enum import StrEnum
from math import isfinite

from chooser.circuits.leakage import taken_for
from chooser.circuits.monostable import Drive, interval, latest, trip_ratio, typical
from chooser.circuits.timers import Timer
from chooser.interval import Outlook, SlotFacts
from chooser.parts import Holding, Kind, Sureness
from chooser.quantities import (
    format_capacitance,
    format_duration,
    format_percent,
    format_resistance,
    format_voltage,
)
from chooser.technologies import is_polarised, technology_of, tolerance_of

LEAK_STRETCH = 0.02
"""Lengthening by leakage at its limit from which it is worth a word: the usual band."""

STRAY_FARAD = 1e-9
"""Below it strays count: a breadboard and its wires add some 10 pF, 1 % of 1 nF."""

CLEAN_BOARD_OHM = 1e6
"""Common practice, no source: above it moisture and flux conduct measurably."""

METER_OHM = 10e6
"""Input resistance of the usual digital meter (common practice, no source)."""

BIG_FARAD = 1e-3
"""Common practice, no source: from 1000 uF a capacitor is emptied before it is touched."""

BIG_CHARGE = 0.01
"""Coulomb; what 1000 uF hold at 10 V."""

COARSE = 0.05
"""Tolerance of a capacitor from which its errors hide everything else."""

SMALL_CURRENT = 10e-9
"""Threshold current (ampere) above which a timer is a bipolar one: CMOS inputs take picoamperes."""

NOISE = 1e-6
"""Errors below a part per million are not told apart."""


class Code(StrEnum):
    """The codes, stable for programs that read them."""

    RATING_MARGIN = "rating-margin"
    POLARISED_SERIES = "polarised-series"
    MAY_NEVER_END = "may-never-end"
    CLASS_2 = "class-2"
    STRAY = "stray"
    SHORT_INTERVAL = "short-interval"
    LEAKAGE = "leakage"
    CAPACITOR_TOLERANCE = "capacitor-tolerance"
    ASSUMED_TOLERANCE = "assumed-tolerance"
    ROUGH_COUNT = "rough-count"
    RATING_UNKNOWN = "rating-unknown"
    HIGH_RESISTANCE = "high-resistance"
    STORED_CHARGE = "stored-charge"
    POLARITY = "polarity"


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
    """What the rules look at: one monostable of parts from the stock.

    Attributes
    ----------
    r, c : the slots, as they went into the outlook (ohm, farad, siemens).
    resistors, capacitors : the holdings picked for each slot; repeats are harmless.
    timer : the timer. supply : supply voltage in volt.
    outlook : what the circuit will do, in second.
    target : wanted interval in second, or None where there is none.
    capacitors_in_series : True where any capacitors of the network stand in series.
    """

    r: SlotFacts
    c: SlotFacts
    resistors: tuple[Holding, ...]
    capacitors: tuple[Holding, ...]
    timer: Timer
    supply: float
    outlook: Outlook
    target: float | None = None
    capacitors_in_series: bool = False

    @property
    def typical(self) -> Drive:
        """The timer at its typical figures."""
        return typical(self.timer, self.supply)

    @property
    def latest(self) -> Drive:
        """The timer with every loss at its limit."""
        return latest(self.timer, self.supply)


def cautions_of(facts: FitFacts) -> tuple[Caution, ...]:
    """Return the cautions of a fit, the most important first; at most one of a rule.

    Parameters
    ----------
    facts : the fit; see `FitFacts` for the units.
    """
    said = ((code, rule(facts)) for code, rule in _RULES)
    return tuple(Caution(code, text) for code, text in said if text is not None)


def needed_rating(holding: Holding, supply: float) -> float:
    """Return the rated voltage (volt) that a capacitor should have at a supply (volt).

    Twice the supply for tantalum, 1.5 times for other electrolytics, the supply itself for
    the rest (common practice, from memory).
    """
    technology = taken_for(holding.part)
    if technology == "tantalum":
        return 2.0 * supply
    return 1.5 * supply if technology.startswith("electrolytic") else supply


def _over_voltage(facts: FitFacts) -> str | None:
    weak = [
        holding
        for holding in facts.capacitors
        if holding.part.voltage is not None and holding.part.voltage < facts.supply
    ]
    if not weak:
        return None
    return (
        f"The supply of {_volt(facts.supply)} exceeds the rated voltage of {_names(weak)}, which "
        f"may burst; take one for {_volt(needed_rating(weak[0], facts.supply))} or more."
    )


def _thin_margin(facts: FitFacts) -> str | None:
    thin = [
        holding
        for holding in facts.capacitors
        if holding.part.voltage is not None
        and facts.supply <= holding.part.voltage < needed_rating(holding, facts.supply)
    ]
    if not thin:
        return None
    return (
        f"At {_volt(facts.supply)} the rated voltage of {_names(thin)} leaves little in reserve; "
        f"prefer one for {_volt(needed_rating(thin[0], facts.supply))} or more."
    )


def _rating_unknown(facts: FitFacts) -> str | None:
    unknown = [holding for holding in facts.capacitors if holding.part.voltage is None]
    if not unknown:
        return None
    needed = max(needed_rating(holding, facts.supply) for holding in unknown)
    return (
        f"No rated voltage is written down for {_names(unknown)}; "
        f"check that it stands {_volt(needed)} or more."
    )


def _polarised_series(facts: FitFacts) -> str | None:
    if not (facts.capacitors_in_series and _polarised(facts)):
        return None
    return (
        "Polarised capacitors in series share the voltage by their leakage, not by their value, "
        "and one of them may burst; use a single capacitor or non-polar ones."
    )


def _polarity(facts: FitFacts) -> str | None:
    polarised = _polarised(facts)
    if not polarised:
        return None
    return (
        f"Put the plus of {_names(polarised)} to the timing node and the minus to ground: "
        "reversed, it leaks and may burst."
    )


def _may_never_end(facts: FitFacts) -> str | None:
    if facts.outlook.high is not None:
        return None
    surely = not isfinite(facts.outlook.nominal)
    state = "Already with typical losses" if surely else "With leakage at its limit"
    ends = "never ends" if surely else "may never end"
    if _capacitor_leaks_most(facts):
        way = (
            "measure the capacitor's leakage, take a low-leakage or film capacitor, "
            "or use an oscillator with a counter"
        )
    else:
        way = f"{_way_out(facts)}, or an oscillator with a counter"
    return f"{state} this interval {ends}; {way}."


def _leakage(facts: FitFacts) -> str | None:
    nominal = facts.outlook.nominal
    if facts.timer.ideal or not isfinite(nominal) or nominal == 0.0:
        return None
    lossless = float(interval(facts.r.value, facts.c.value, 0.0, _without_currents(facts.typical)))
    longest = float(interval(facts.r.value, facts.c.value, facts.c.leak_limit, facts.latest))
    usual, most = nominal / lossless - 1.0, longest / lossless - 1.0
    if most < LEAK_STRETCH or not isfinite(most):  # for ever is said by another rule
        return None
    ratio = trip_ratio(facts.r.value, facts.c.leak_limit, facts.latest)
    way = "through the capacitor"
    if not _capacitor_leaks_most(facts):
        way = f"to the {facts.timer.name} timer itself"
    span = format_percent(usual, digits=2)
    if most - usual >= LEAK_STRETCH / 2:
        span += f", at the limit by {format_percent(most, digits=2)}"
    return (
        f"At the trip point the charging current may be only {ratio:.2g} times what is lost, "
        f"mostly {way}; that lengthens the interval by {span}: {_way_out(facts)}."
    )


def _without_currents(drive: Drive) -> Drive:
    return replace(drive, leak_current=0.0)


def _way_out(facts: FitFacts) -> str:
    if not _capacitor_leaks_most(facts):
        hungry = facts.timer.threshold_current_limit > SMALL_CURRENT
        return "take a smaller resistor with a larger capacitor" + (
            ", or a CMOS timer" if hungry else ""
        )
    if all(holding.part.leakage is not None for holding in facts.capacitors):
        return "the figure is the one written down, so see that it is true and time the circuit"
    return "measure the leakage, or take a film or low-leakage capacitor"


def _capacitor_tolerance(facts: FitFacts) -> str | None:
    down, up = facts.c.low / facts.c.value - 1.0, facts.c.high / facts.c.value - 1.0
    wide = max(-down, up)
    resistor = max(1.0 - facts.r.low / facts.r.value, facts.r.high / facts.r.value - 1.0)
    if wide < COARSE or wide < 2.0 * max(resistor, facts.timer.timing_error_limit):
        return None
    if all(holding.part.measured is not None for holding in facts.capacitors):
        return None
    paper = "an exact figure on paper"
    if facts.target is not None and isfinite(facts.outlook.nominal):
        error = abs(facts.outlook.nominal / facts.target - 1.0)
        if error >= wide:
            return None
        paper = f"the error of {_small(error)} on paper"
    return (
        f"The capacitor alone moves the interval by {format_percent(down, digits=2)} to "
        f"{format_percent(up, digits=2, signed=True)}, so {paper} is decoration; "
        "measure the capacitor and ask again."
    )


def _assumed_tolerance(facts: FitFacts) -> str | None:
    assumed = [
        holding
        for holding in (*facts.resistors, *facts.capacitors)
        if holding.part.measured is None and tolerance_of(holding.part)[1]
    ]
    if not assumed:
        return None
    return (
        f"No tolerance is written down for {_names(assumed)}, so the usual one is assumed; "
        "measure it or write its tolerance into the stock."
    )


def _rough_count(facts: FitFacts) -> str | None:
    rough = [
        holding
        for holding in (*facts.resistors, *facts.capacitors)
        if holding.count.sureness is Sureness.ROUGH
    ]
    if not rough:
        return None
    return f"The count of {_names(rough)} is only rough; look into the drawer first."


def _class_2(facts: FitFacts) -> str | None:
    poor = [
        holding
        for holding in facts.capacitors
        if (technology := technology_of(holding.part)) is not None and technology.ceramic_class > 1
    ]
    if not poor:
        return None
    return (
        "Class 2 and 3 ceramics move by tens of percent with voltage, warmth and age; "
        f"take a film or C0G capacitor instead of {_names(poor)}."
    )


def _stray(facts: FitFacts) -> str | None:
    if facts.c.value >= STRAY_FARAD:
        return None
    return (
        f"With only {format_capacitance(facts.c.value, digits=3)} the strays of board and fingers "
        "(some 10 pF) count; use 1 nF or more, or time the built circuit."
    )


def _short_interval(facts: FitFacts) -> str | None:
    shortest = facts.timer.shortest_interval
    if facts.outlook.nominal >= shortest:
        return None
    return (
        f"The {facts.timer.name} timer's own delays rule below {format_duration(shortest)}; "
        "use a faster timer or expect a longer interval."
    )


def _high_resistance(facts: FitFacts) -> str | None:
    if facts.r.value <= CLEAN_BOARD_OHM:
        return None
    return (
        f"At {format_resistance(facts.r.value, digits=3)} keep the board clean and dry, "
        f"and do not probe the timing node with a {format_resistance(METER_OHM)} meter."
    )


def _stored_charge(facts: FitFacts) -> str | None:
    if facts.c.value < BIG_FARAD and facts.c.value * facts.supply < BIG_CHARGE:
        return None
    return (
        f"The capacitor ({format_capacitance(facts.c.value, digits=3)}) holds its charge after "
        "switching off; discharge it through a resistor before touching or measuring it."
    )


_RULES: tuple[tuple[Code, Callable[[FitFacts], str | None]], ...] = (
    (Code.RATING_MARGIN, _over_voltage),
    (Code.POLARISED_SERIES, _polarised_series),
    (Code.MAY_NEVER_END, _may_never_end),
    (Code.CLASS_2, _class_2),
    (Code.STRAY, _stray),
    (Code.SHORT_INTERVAL, _short_interval),
    (Code.LEAKAGE, _leakage),
    (Code.RATING_MARGIN, _thin_margin),
    (Code.CAPACITOR_TOLERANCE, _capacitor_tolerance),
    (Code.ASSUMED_TOLERANCE, _assumed_tolerance),
    (Code.ROUGH_COUNT, _rough_count),
    (Code.RATING_UNKNOWN, _rating_unknown),
    (Code.HIGH_RESISTANCE, _high_resistance),
    (Code.STORED_CHARGE, _stored_charge),
    (Code.POLARITY, _polarity),
)
"""The rules, the most important first."""


def _capacitor_leaks_most(facts: FitFacts) -> bool:
    """Tell whether the capacitor, not the timer, is the greater leak with all at the limit."""
    drive = facts.latest
    return facts.c.leak_limit * drive.threshold * drive.supply >= drive.leak_current


def _polarised(facts: FitFacts) -> list[Holding]:
    """Return the picked capacitors that reverse voltage destroys."""
    return [holding for holding in facts.capacitors if is_polarised(holding.part)]


def _names(holdings: list[Holding]) -> str:
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


def _volt(volt: float) -> str:
    """Return a voltage rounded for reading."""
    return format_voltage(volt, digits=3)


def _small(error: float) -> str:
    """Return an error as a percentage; what is below the search's resolution as such."""
    return "less than 0.0001%" if error < NOISE else format_percent(error, digits=2)
