"""What to do where the stock has nothing for the band: the reason, and the next step."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import replace

import numpy as np

from chooser.cautions import SMALL_CURRENT
from chooser.circuits.circuit import charging_resistance
from chooser.parts import Holding, Kind
from chooser.search.house_rules import Usable, resistor_bounds
from chooser.search.purchase import one_purchase
from chooser.search.request import Fit, Request
from chooser.search.slots import charging_bounds, leak_of
from chooser.search.terms import USUAL_PARTS, Rule
from chooser.search.wanted import wanted_resistances
from chooser.technologies import taken_for

FURTHER = "divide a shorter interval with an oscillator and a counter"
"""What is left where neither parts nor timer reach so far."""

ALL_SMALL = (
    "All the capacitors that may be used come to less than 1n together, where strays count; add "
    f"larger ones, or --allow {Rule.STRAYS} and time the built circuit."
)


LARGE_ENOUGH = 100e-6
"""Farad up to which a larger capacitor is the plain way to a longer interval."""

SMALL_ENOUGH = 10e-9
"""Farad from which on down a smaller capacitor is no longer the plain way to a shorter interval."""

LEAKY = ("electrolytic", "electrolytic-non-polar", "tantalum", "ceramic")


def advice_for(
    stock: Sequence[Holding], usable: Usable, fits: Collection[Fit], request: Request
) -> tuple[str, ...]:
    """Say what is wrong and what to do next, where no fit lies in the band; else nothing.

    Parameters
    ----------
    stock : all holdings. usable : what the rules left. fits : the answer. request : what was asked.

    Returns
    -------
    Whole sentences, the reason first.
    """
    if any(fit.in_band for fit in fits):
        return ()
    if not stock:
        return ("The stock is empty; load a sheet with `chooser stock load FILE`.",)
    missing = _missing(stock, usable, request)
    if missing:
        return missing
    if (
        request.circuit.capacitor
        and Rule.STRAYS not in request.lifted
        and (_most_farad(usable, request) < request.circuit.least_farad)
    ):
        return (ALL_SMALL,)
    reason = _out_of_reach(usable, request)
    bought = one_purchase(usable.resistors, usable.capacitors, request)
    if bought is not None:
        return (*reason, str(bought))
    return reason or (_no_purchase(request),)


def _no_purchase(request: Request) -> str:
    ways = ["accept a wider band (--within)"]
    if request.circuit.resistors and request.most_resistors < USUAL_PARTS:
        ways.append("allow more parts (--most-resistors)")
    if not request.circuit.resistors and request.most_capacitors < USUAL_PARTS:
        ways.append("allow more parts (--most-capacitors)")
    if request.boards > 1:
        ways.append("build fewer boards")
    return (
        "One part of the usual series beside one of yours would not get there either; "
        f"{' or '.join(ways)}."
    )


def _missing(stock: Sequence[Holding], usable: Usable, request: Request) -> tuple[str, ...]:
    """Say which kind of part is not there at all, not free, or kept out by the rules."""
    said = []
    needed = (
        (Kind.RESISTOR, usable.resistors, bool(request.circuit.resistors)),
        (Kind.CAPACITOR, usable.capacitors, request.circuit.capacitor),
    )
    for kind, left, wanted in needed:
        if left or not wanted:
            continue
        there = [holding for holding in stock if holding.part.kind is kind]
        free = [holding for holding in there if holding.free is None or holding.free > 0]
        if not there:
            said.append(
                f"The stock has no {kind}s; add some with `chooser stock add` or `stock load`."
            )
        elif not free:
            said.append(f"No {kind} is free: every drawer is empty or claimed.")
        else:
            said.append(f"The house rules keep out every {kind}; see what was left out, and why.")
    return tuple(said)


def _most_farad(usable: Usable, request: Request) -> float:
    """Return a capacitance in farad that no network of the usable capacitors exceeds."""
    largest = max(holding.part.effective for holding in usable.capacitors)
    return largest * request.most_capacitors * (1 + 1e-9)


def _out_of_reach(usable: Usable, request: Request) -> tuple[str, ...]:
    """Say so where every capacitor wants a resistance outside the rules' limits."""
    circuit = request.circuit
    parts = [holding.part for holding in usable.capacitors]
    if Rule.STRAYS not in request.lifted:
        parts = [part for part in parts if part.effective >= circuit.least_farad]
    if not parts or not circuit.resistors:
        return ()
    farad = np.array([part.effective for part in parts])
    leak = np.array([leak_of(part, request) for part in parts])
    least, most = charging_bounds(leak, request)
    too_long, too_short = [], []
    for variant in circuit.variants:
        alone = replace(request, circuit=replace(circuit, variants=(variant,)))
        rs = wanted_resistances(alone, farad, leak)
        too_long.append(bool(np.all(charging_resistance(circuit, rs) > most)))
        too_short.append(bool(np.all(np.min(rs, axis=0) < least)))
    if all(too_long):
        return (_too_long(usable, request),)
    return (_too_short(usable, request),) if all(too_short) else ()


def _too_short(usable: Usable, request: Request) -> str:
    """Name the way out of an interval that is too short."""
    smallest = min(holding.part.effective for holding in usable.capacitors)
    way = "take a smaller capacitor"
    if smallest <= SMALL_ENOUGH:
        way = "so short an interval needs a faster timer or a logic one-shot"
    return (
        f"Every capacitor here would need a resistor below what the {request.circuit.device} "
        f"allows ({resistor_bounds(request).least_why}); {way}."
    )


def _too_long(usable: Usable, request: Request) -> str:
    """Name the ways out of an interval that is too long, the likely one first."""
    ways = []
    best = max(usable.capacitors, key=lambda holding: holding.part.effective)
    if best.part.effective < LARGE_ENOUGH:
        ways.append("a larger capacitor")
    elif taken_for(best.part) in LEAKY:
        ways.append("a capacitor that leaks less (film, low-leakage)")
    timer = request.circuit.timer
    if timer is not None and timer.threshold_current_limit > SMALL_CURRENT:
        ways.append("a CMOS timer")
    further = FURTHER
    if request.circuit.family == "counter":
        further = "let a second counter divide what this one gives"
    return (
        "Every capacitor here would need a resistor beyond what the device and the leakage allow: "
        "such a time drifts or never ends. Ways out: "
        f"{', '.join([*ways, 'or to ' + further])}."
    )
