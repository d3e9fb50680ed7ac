"""Rules on the discharge pin of a timer: what it carries at rest, and how it empties C."""

from __future__ import annotations

from chooser.cautions.record import FitFacts, farad_text, ohm_text
from chooser.circuits.astable import trip_points
from chooser.circuits.timers import Timer
from chooser.quantities import format_current, format_duration

DISCHARGE_WHY = "discharge-pin current"
"""Reason of the least resistance in circuits whose first resistor feeds the discharge pin."""

SURGE_FARAD = 100e-6
"""Common practice, from memory: from it on a small resistor eases the discharge switch."""

SERIES_OHM = (47.0, 100.0)
"""Common practice, from memory: of that resistor."""

HARMLESS = 100.0
"""Timing resistor over that resistor from which on its start voltage costs below 1 %."""

TIME_CONSTANTS = 5.0
"""That empty a capacitor to 0.7 % (exp(-5))."""

LONG_RECOVERY = 0.02
"""Share of the interval from which recovery is worth a word: the usual band."""

SHORTEST_REST = 1e-6
"""Second; nobody triggers again sooner than that (our limit)."""

_ROUNDING = 1e-9
_SHARE = 0.1  # of the pin's current from which a resistor is named


def discharge_pin(facts: FitFacts) -> str | None:
    """Speak of resistors that let too much current into the discharge pin.

    While it is on the pin carries supply / R of the resistor that feeds it, and of an astable
    at first also what the capacitor, charged to the upper trip point, drives through RB.
    """
    timer = _discharging(facts)
    if timer is None:
        return None
    least, circuit = facts.circuit.bounds.least, facts.circuit
    upper, _ = trip_points(timer, facts.supply, circuit.control)
    currents = [facts.supply / facts.ohms[0]]
    currents += [upper * facts.supply / ohm for ohm in facts.ohms[1:]]
    carried, first = sum(currents), facts.ohms[0] < least * (1.0 - _ROUNDING)
    over = carried > timer.discharge_current_limit * (1.0 + _ROUNDING)
    if not (first or over):
        return None
    limit = f"it is specified for {format_current(timer.discharge_current_limit, digits=2)}"
    who = [place for place, current in enumerate(currents) if current > _SHARE * carried]
    if not over:
        who, limit = [0], f"timing is only specified from {ohm_text(least)} on"
    fed = " and ".join(f"{circuit.resistors[n]} at {ohm_text(facts.ohms[n])}" for n in who)
    way = f"{ohm_text(least)} or more" if first or len(who) == 1 else "larger ones"
    return (
        f"With {fed} the discharge pin carries {format_current(carried, digits=2)}"
        f"{' at first' if len(currents) > 1 else ''}, and {limit}; take {way}."
    )


def discharge_surge(facts: FitFacts) -> str | None:
    """Speak of large capacitors that nothing but the discharge switch empties."""
    timer = _discharging(facts)
    if timer is None or facts.oscillates or facts.c.value < SURGE_FARAD:
        return None
    what = f"The discharge pin empties {farad_text(facts.c.value)} in one surge"
    low, high = SERIES_OHM
    if facts.ohms[0] < HARMLESS * high:
        return f"{what}; take a smaller capacitor with a larger resistor."
    return (
        f"{what}; put {low:.0f} to {high:.0f} ohm in series with the pin, and leave "
        f"{_emptied(facts, timer, high)} before the next trigger."
    )


def recovery(facts: FitFacts) -> str | None:
    """Speak of one-shots that need a rest before the next trigger."""
    timer = _discharging(facts)
    if timer is None or facts.oscillates:
        return None
    rest = TIME_CONSTANTS * timer.discharge_resistance_limit * facts.c.value
    if rest <= max(LONG_RECOVERY * facts.outlook.chief.nominal, SHORTEST_REST):
        return None
    return (
        f"Emptying the capacitor takes up to {_emptied(facts, timer)}; leave that long after an "
        "interval, for the next one is short if it is triggered sooner."
    )


def _discharging(facts: FitFacts) -> Timer | None:
    """Return the timer if its discharge pin empties the capacitor."""
    return facts.circuit.timer if facts.circuit.bounds.least_why == DISCHARGE_WHY else None


def _emptied(facts: FitFacts, timer: Timer, series: float = 0.0) -> str:
    """Say how long the discharge takes through the poorest switch and a resistor (ohm)."""
    ohm = timer.discharge_resistance_limit + series
    return format_duration(TIME_CONSTANTS * ohm * facts.c.value, digits=2)
