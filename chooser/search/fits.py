"""From a choice of holdings to a fit: what it will really do, and why it ranks where it does."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace as changed
from itertools import pairwise

from chooser.cautions import FitFacts, cautions_of
from chooser.circuits.leakage import leak_conductance
from chooser.interval import SlotFacts, likely_miss, outlook
from chooser.networks import (
    Group,
    Join,
    Network,
    adding_join,
    members,
    replace,
    slot_tolerance,
    value_of,
)
from chooser.parts import Holding, Kind
from chooser.quantities import format_percent
from chooser.search.balanced import PER_PART
from chooser.search.choosing import Choice
from chooser.search.ranking import whole_ppm
from chooser.search.request import Fit, Request
from chooser.search.terms import Rank
from chooser.uncertainty import limits_of


def fit_of(choice: Choice, holdings: Mapping[int, Holding], request: Request) -> Fit:
    """Work out what a choice will really do.

    Parameters
    ----------
    choice : networks of holding ids. holdings : the stock by id. request : what was asked.
    """
    resistor = replace(choice.resistor, holdings.__getitem__)
    capacitor = replace(choice.capacitor, holdings.__getitem__)
    r, c = _slot(resistor, Kind.RESISTOR, request), _slot(capacitor, Kind.CAPACITOR, request)
    out = outlook(r, c, request.timer, request.supply, request.band)
    error = out.nominal / request.target - 1
    facts = FitFacts(
        r,
        c,
        tuple(members(resistor)),
        tuple(members(capacitor)),
        request.timer,
        request.supply,
        out,
        request.target,
        _has_series(capacitor),
    )
    return Fit(
        resistor=resistor,
        capacitor=capacitor,
        resistance=r.value,
        capacitance=c.value,
        error=error,
        outlook=out,
        likely_miss=float(likely_miss(out.mean / request.target - 1, out.spread)),
        in_band=abs(error) <= request.within + 1e-12,
        cautions=cautions_of(facts),
    )


def _slot(network: Network[Holding], kind: Kind, request: Request) -> SlotFacts:
    adds = adding_join(kind)
    found = slot_tolerance(
        network,
        adds,
        lambda holding: holding.part.effective,
        lambda holding: limits_of(holding.part),
    )
    leaks = (0.0, 0.0)
    if kind is Kind.CAPACITOR and not request.timer.ideal:
        # Leaks combine as conductances do, whatever the parts' values.
        leaks = (
            value_of(
                network, Join.PARALLEL, lambda h: leak_conductance(h.part, request.supply).typical
            ),
            value_of(
                network, Join.PARALLEL, lambda h: leak_conductance(h.part, request.supply).limit
            ),
        )
    return SlotFacts(found.value, found.low, found.high, found.spread, found.shift, *leaks)


def _has_series(network: Network[Holding]) -> bool:
    if not isinstance(network, Group):
        return False
    return network.join is Join.SERIES or any(_has_series(child) for child in network.children)


def parts_in(fit: Fit) -> int:
    """Count the parts of a fit."""
    return sum(1 for _ in members(fit.resistor)) + sum(1 for _ in members(fit.capacitor))


def explained(fits: Sequence[Fit], rank: Rank) -> tuple[Fit, ...]:
    """Say of every fit but the last why it ranks before the next."""
    reason = _balanced_reason if rank is Rank.BALANCED else _exact_reason(rank)
    said = (changed(fit, why=reason(fit, after)) for fit, after in pairwise(fits))
    return (*said, *fits[-1:])


def _exact_reason(rank: Rank) -> Callable[[Fit, Fit], str]:
    def reason(fit: Fit, after: Fit) -> str:
        ppm, ppm_after = whole_ppm(abs(fit.error)), whole_ppm(abs(after.error))
        parts, parts_after = parts_in(fit), parts_in(after)
        if rank is Rank.ERROR and ppm != ppm_after:
            return f"nearer: {ppm:,} ppm against {ppm_after:,} ppm"
        if parts != parts_after:
            return f"fewer parts: {parts} against {parts_after}"
        if ppm != ppm_after:
            return f"as many parts, nearer: {ppm:,} ppm against {ppm_after:,} ppm"
        if abs(abs(fit.error) - abs(after.error)) > 1e-15:  # noqa: PLR2004 - float rounding
            return "as many parts, nearer by less than a part per million"
        return "equally near with as many parts; its drawers hold more, or come first"

    return reason


def _balanced_reason(fit: Fit, after: Fit) -> str:
    if fit.in_band != after.in_band:
        return "inside the accepted band"
    parts, parts_after = parts_in(fit), parts_in(after)
    miss, miss_after = (format_percent(each.likely_miss, digits=3) for each in (fit, after))
    if parts == parts_after:
        return f"likely miss {miss} against {miss_after} with as many parts"
    if parts < parts_after:
        return (
            f"likely miss {miss} with {parts} parts; {miss_after} with {parts_after} does not earn "
            f"{format_percent(PER_PART - 1, digits=2)} for each more"
        )
    return f"likely miss {miss} with {parts} parts against {miss_after} with {parts_after}"
