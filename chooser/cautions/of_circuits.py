"""Rules on what the circuit makes of its parts: losses, stalls, delays, high resistance."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from math import inf, isfinite, isinf, log

from chooser.cautions.record import FitFacts, ohm_text, surely_below, volt_text
from chooser.circuits.laws import TimesLaw
from chooser.circuits.steered import SteeredLaw
from chooser.quantities import format_duration, format_frequency, format_percent

LEAK_STRETCH = 0.02
"""Lengthening by leakage at its limit from which it is worth a word: the usual band."""

CLEAN_BOARD_OHM = 1e6
"""Common practice, no source: above it moisture and flux conduct measurably."""

SMALL_CURRENT = 10e-9
"""Threshold current (ampere) above which a timer is a bipolar one: CMOS inputs take picoamperes."""

SUPPLY_SLOPE = 5e-3
"""Change of the high time a volt from which a diode's drop is worth a word: a timer's own."""

WORTH_DIVIDING = 1.0
"""Second from which an oscillator with a counter is a way out (our limit)."""

COUNTER = "counter"
"""The family that is itself the way to long intervals."""

_STEP = 1e-3  # relative change of the supply that tells how the high time follows it


def stall(facts: FitFacts) -> str | None:
    """Speak of an oscillator that may stop with nothing leaking at all."""
    if not facts.oscillates or facts.outlook.chief.high is not None:
        return None
    place = _stuck(facts, _laws(facts))
    if place is None:
        return None
    surely = _stuck(facts, (facts.circuit.typical,)) is not None
    reaches, stalls = ("does not", "stalls") if surely else ("may not", "may stall")
    if len(facts.ohms) > 1:
        ra = facts.circuit.resistors[0]
        return (
            f"Against {ra} the discharge pin {reaches} get below the lower trip point, so the "
            f"circuit {stalls}; take a larger {ra}."
        )
    level, trip = ("high", "upper") if place == 0 else ("low", "lower")
    return (
        f"The output's {level} level {reaches} pass the {trip} trip point, so the circuit {stalls};"
        " take a CMOS timer with nothing else on its output, or the plain astable."
    )


def may_never_end(facts: FitFacts) -> str | None:
    """Speak of losses that take all the charging current."""
    chief = facts.outlook.chief
    if not facts.is_timed or chief.high is not None or _stuck(facts, _laws(facts)) is not None:
        return None
    surely = not isfinite(chief.nominal)
    state = "Already with typical losses" if surely else "With leakage at its limit"
    ends = "interval never ends" if surely else "interval may never end"
    if facts.oscillates:
        ends = "oscillator stops" if surely else "oscillator may stop"
    way = _way_out(facts)
    if _is_written_down(facts):
        way = "take a film or low-leakage capacitor"
    intended = _intended(facts)
    if facts.circuit.family != COUNTER and intended >= WORTH_DIVIDING:
        typed = format_duration(intended, digits=3).replace(" ", "")
        way += f", or divide down with `chooser fit counter {typed}`"
        if facts.circuit.outputs[0] not in facts.wanted:
            way += f" (about the {facts.circuit.outputs[0]} without losses)"
    return f"{state} this {ends}; {way}."


def leakage(facts: FitFacts) -> str | None:
    """Speak of losses that lengthen the time in which the capacitor is charged."""
    circuit = facts.circuit
    if not facts.is_timed or circuit.lossless or not isfinite(facts.outlook.chief.nominal):
        return None
    ratio = min(law.trip_ratio(facts.charging, facts.c.leak_limit) for law in circuit.corners)
    if surely_below(LEAK_STRETCH, ratio):
        return None
    usual = facts.stretch(circuit.typical, facts.c.leak_typical)
    most = max(facts.stretch(law, facts.c.leak_limit) for law in circuit.corners)
    if most < LEAK_STRETCH or isinf(most):  # for ever is said by another rule
        return None
    way = "through the capacitor"
    if not _capacitor_leaks_most(facts):
        way = f"to the {circuit.device or 'input'} itself"
    span = f"by up to {format_percent(most, digits=2)}"
    if most - usual >= LEAK_STRETCH / 2:
        span += f" ({format_percent(usual, digits=2)} typically)"
    return (
        f"At the trip point the charging current may be only {ratio:.2g} times what is lost, "
        f"mostly {way}; that lengthens the {facts.charged_name} {span}: {_way_out(facts)}."
    )


def short_interval(facts: FitFacts) -> str | None:
    """Speak of one-shots below the device's own delays."""
    shortest = facts.circuit.shortest
    if facts.oscillates or facts.outlook.chief.nominal >= shortest:
        return None
    return (
        f"The {facts.circuit.device}'s own delays rule below {format_duration(shortest)}; "
        "use a faster one or expect a longer interval."
    )


def frequency_limit(facts: FitFacts) -> str | None:
    """Speak of oscillators beyond what the device's own delays allow."""
    shortest = facts.circuit.shortest
    if not facts.oscillates or facts.outlook.of("period").nominal >= shortest:
        return None
    most = format_frequency(1.0 / shortest, digits=3)
    return (
        f"The {facts.circuit.device}'s own delays rule above {most}; "
        "use a faster one or expect a lower frequency."
    )


def high_resistance(facts: FitFacts) -> str | None:
    """Speak of resistors that a dirty board bridges."""
    most = max(facts.ohms, default=0.0)
    if not facts.is_timed or most <= CLEAN_BOARD_OHM:
        return None
    return f"At {ohm_text(most)} flux and moisture leak measurably; keep the board clean and dry."


def diode_supply(facts: FitFacts) -> str | None:
    """Speak of a diode drop that makes a time depend on the supply."""
    law = facts.circuit.typical
    if not isinstance(law, SteeredLaw):
        return None
    timer, times = law.timer, []
    for supply in (facts.supply * (1.0 - _STEP), facts.supply * (1.0 + _STEP)):
        moved = replace(law, timer=replace(timer, supply=supply))
        times.append(float(moved.times(facts.ohms, facts.c.value, facts.c.leak_typical)[0]))
    if not (0.0 < times[0] < inf and 0.0 < times[1] < inf):
        return None
    slope = log(times[1] / times[0]) / (2.0 * _STEP * facts.supply)
    if abs(slope) < SUPPLY_SLOPE:
        return None
    return (
        f"The diode's drop makes the high time move by {format_percent(slope, digits=2)} "
        f"per volt of supply around {volt_text(facts.supply)}; regulate the supply, or time the "
        "circuit at the voltage it will run at."
    )


def _laws(facts: FitFacts) -> tuple[TimesLaw, ...]:
    return facts.circuit.typical, *facts.circuit.corners


def _stuck(facts: FitFacts, laws: Iterable[TimesLaw]) -> int | None:
    """Return which time (0 high, 1 low) never ends even where nothing is lost, or None."""
    slots = [facts.slots[name] for name in facts.circuit.resistors]
    for law in laws:
        for ohms in ([slot.low for slot in slots], [slot.high for slot in slots]):
            times = law.lossless().times(ohms, facts.c.value, 0.0)
            for place, time in enumerate(times):
                if isinf(float(time)):
                    return place
    return None


def _intended(facts: FitFacts) -> float:
    """Return the chief time in second: what is wanted, else what it is without losses."""
    chief = facts.outlook.chief
    low, high = facts.wanted.get(chief.output, (0.0, 0.0))
    if high:
        return (low + high) / 2.0
    times = facts.circuit.typical.lossless().times(facts.ohms, facts.c.value, 0.0)
    return float(sum(float(time) for time in times))


def _way_out(facts: FitFacts) -> str:
    if not _capacitor_leaks_most(facts):
        timer = facts.circuit.timer
        hungry = timer is not None and timer.threshold_current_limit > SMALL_CURRENT
        return "take a smaller resistor with a larger capacitor" + (
            ", or a CMOS timer" if hungry else ""
        )
    if _is_written_down(facts):
        return "the figure is the one written down, so see that it is true and time the circuit"
    return "measure the leakage, or take a film or low-leakage capacitor"


def _is_written_down(facts: FitFacts) -> bool:
    """Tell whether the capacitor is to blame and its leakage is known."""
    known = all(holding.part.leakage is not None for holding in facts.capacitors)
    return known and _capacitor_leaks_most(facts)


def _capacitor_leaks_most(facts: FitFacts) -> bool:
    """Tell whether the capacitor, not the device, is the greater leak with all at the limit."""

    def lost(leak: float) -> float:
        ratio = min(law.trip_ratio(facts.charging, leak) for law in facts.circuit.corners)
        return 1.0 / ratio if ratio > 0.0 else inf

    return lost(facts.c.leak_limit) >= 2.0 * lost(0.0)
