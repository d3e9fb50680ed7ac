"""What to do where the stock has nothing for the band: the reason, and the next step."""

from __future__ import annotations

from collections.abc import Collection, Sequence

from chooser.circuits.leakage import leak_conductance
from chooser.circuits.monostable import resistance, typical
from chooser.parts import Holding, Kind
from chooser.search.house_rules import LEAST_FARAD, Usable, leak_bound, resistor_limits
from chooser.search.purchase import one_purchase
from chooser.search.request import Fit, Request
from chooser.search.terms import Rule

TOO_LONG = (
    "Every capacitor here would need a resistor beyond what the timer's currents and the leakage "
    "allow: such an interval drifts or never ends. Ways out: a better capacitor (film, "
    "low-leakage), a CMOS timer, or an oscillator with a counter that divides a shorter interval."
)

TOO_SHORT = (
    "Every capacitor here would need a resistor below what the discharge pin can carry. "
    "Way out: a smaller capacitor, 1 nF or more."
)


NO_PURCHASE = (
    "No single resistor or capacitor of the usual series would get there either; accept a wider "
    "band, allow more parts, or build fewer boards."
)


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
    missing = _missing(stock, usable)
    if missing:
        return missing
    if Rule.STRAYS not in request.lifted and _most_farad(usable, request) < LEAST_FARAD:
        return (ALL_SMALL,)
    bought = one_purchase(usable.resistors, usable.capacitors, request)
    reason = _out_of_reach(usable, request)
    if bought is None and not reason:
        return (NO_PURCHASE,)
    return (*reason, *([str(bought)] if bought else []))


ALL_SMALL = (
    "All the capacitors that may be used come to less than 1n together, where strays count; add "
    f"larger ones, or --allow {Rule.STRAYS} and time the built circuit."
)


def _missing(stock: Sequence[Holding], usable: Usable) -> tuple[str, ...]:
    """Say which kind of part is not there at all, not free, or kept out by the rules."""
    said = []
    for kind, left in ((Kind.RESISTOR, usable.resistors), (Kind.CAPACITOR, usable.capacitors)):
        if left:
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
    """Say so where every single capacitor wants a resistance outside the rules' limits."""
    drive = typical(request.timer, request.supply)
    least, most = resistor_limits(request)
    high = low = 0
    for holding in usable.capacitors:
        leak = 0.0
        if not request.timer.ideal:
            leak = leak_conductance(holding.part, request.supply).typical
        wanted = float(resistance(request.target, holding.part.effective, leak, drive))
        high += wanted > min(most, float(leak_bound(leak, drive)))
        low += wanted < least
    if high == len(usable.capacitors):
        return (TOO_LONG,)
    return (TOO_SHORT,) if low == len(usable.capacitors) else ()
