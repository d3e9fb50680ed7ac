"""Rules on the discharge pin of a timer: what it carries at rest, and how it empties C."""

from __future__ import annotations

from chooser.cautions.record import FitFacts, farad_text, ohm_text
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

_ROUNDING = 1e-9


def discharge_pin(facts: FitFacts) -> str | None:
    """Speak of resistors that let too much current into the discharge pin.

    While it is on the pin carries supply / R of the resistor that feeds it, and of an astable
    at first also what the charged capacitor drives through RB.
    """
    timer = _discharging(facts)
    if timer is None:
        return None
    least = facts.circuit.bounds.least
    currents = [facts.supply / facts.ohms[0]]
    currents += [timer.threshold * facts.supply / ohm for ohm in facts.ohms[1:]]
    worst = max(range(len(currents)), key=currents.__getitem__)
    first_is_low = facts.ohms[0] < least * (1.0 - _ROUNDING)
    if not first_is_low and currents[worst] <= timer.discharge_current_limit * (1.0 + _ROUNDING):
        return None
    limit = f"it is specified for {format_current(timer.discharge_current_limit, digits=2)}"
    if currents[worst] <= timer.discharge_current_limit:
        worst, limit = 0, f"timing is only specified from {ohm_text(least)} on"
    return (
        f"With {facts.circuit.resistors[worst]} at {ohm_text(facts.ohms[worst])} the discharge "
        f"pin carries {format_current(currents[worst], digits=2)}, and {limit}; "
        f"take {ohm_text(least)} or more."
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
    if rest <= LONG_RECOVERY * facts.outlook.chief.nominal:
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
