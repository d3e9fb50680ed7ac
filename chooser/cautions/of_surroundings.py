"""Rules on what hangs on the circuit: the trigger, a meter, mains, people."""

from __future__ import annotations

from math import isfinite, isinf, log

from chooser.cautions.record import Caution, Code, FitFacts, surely_below
from chooser.quantities import format_duration, format_resistance

METER_OHM = 10e6
"""Input resistance of the usual digital meter (common practice, no source)."""

METER_STRETCH = 0.02
"""Lengthening by a meter from which it is worth a word: the usual band."""

HELD_SHORT = 1.0
"""Second; a trigger is rarely held longer than that (our limit)."""

COUPLED = 10e3 * 100e-9 * log(1.5)
"""Second for which 100 nF with 10 kohm to the supply hold a trigger below a third of it."""

STANDING = (
    Caution(
        Code.MAINS,
        "Switch mains loads only over a rated, enclosed and fused relay; have it wired by a "
        "qualified person under your local codes.",
    ),
    Caution(
        Code.NOT_FOR_SAFETY,
        "Do not use it where a wrong interval can hurt (life support, gas, fire, lifts); "
        "a qualified person and your local codes say what such a timer needs.",
    ),
)
"""What goes for every circuit: said once under an answer, last of all, not with each fit."""


def meter_on_node(facts: FitFacts) -> str | None:
    """Speak of what a meter on the timing node does to the time in which it is charged."""
    before = facts.charged.nominal
    if not facts.is_timed or facts.circuit.alternating or not isfinite(before):
        return None
    leak = facts.c.leak_typical
    law, watched = facts.circuit.typical, leak + 1.0 / METER_OHM
    if surely_below(METER_STRETCH, law.trip_ratio(facts.charging, watched)):
        return None
    stretch = facts.stretch(law, watched, over=leak)
    if stretch <= METER_STRETCH:
        return None
    meter = f"a {format_resistance(METER_OHM)} meter on the timing node"
    watch = "measure at the output instead"
    if isinf(stretch):
        return f"With {meter} the {facts.charged_name} never ends; {watch}."
    times = [format_duration(time, digits=4) for time in (before, before * (1.0 + stretch))]
    return f"With {meter} the {facts.charged_name} goes from {times[0]} to {times[1]}; {watch}."


def trigger_length(facts: FitFacts) -> str | None:
    """Speak of triggers that may outlast a short interval."""
    interval = facts.outlook.chief.nominal
    if facts.circuit.timer is None or facts.oscillates or not 0.0 < interval < HELD_SHORT:
        return None
    way = "keep the trigger pulse shorter"
    if interval > 2.0 * COUPLED:
        coupled = format_duration(COUPLED, digits=2)
        way = f"couple a longer one through 100n, with 10k to the supply ({coupled})"
    return (
        f"The trigger must be high again before the {format_duration(interval, digits=3)} are "
        f"over, else the output stays on; {way}."
    )
