"""From a request and a stock to a ranked, re-checked answer."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Sequence
from dataclasses import replace
from operator import attrgetter
from time import perf_counter

from chooser.parts import Holding
from chooser.search.advice import advice_for
from chooser.search.balanced import BalancedSearch
from chooser.search.choosing import Choice, Drawers, best_choice, choices
from chooser.search.exact import ExactSearch
from chooser.search.fits import explained, fit_of
from chooser.search.house_rules import Usable, check_request, usable_parts
from chooser.search.ranking import Judge
from chooser.search.recheck import recheck
from chooser.search.request import Answer, Fit, Request, Searched
from chooser.search.shortage import shortage
from chooser.search.space import Space, combinations
from chooser.search.terms import NEAREST, Rank
from chooser.search.way_out import way_out


def find_fits(holdings: Iterable[Holding], request: Request) -> Answer:
    """Find the best fits of a request in a stock.

    Parameters
    ----------
    holdings : the whole stock. request : what is wanted.

    Returns
    -------
    The ranked fits, each re-checked; none where the stock has no resistor or no capacitor that
    the house rules let through, or nothing that can make an interval at all.

    Raises
    ------
    BadRequestError
        A band of nothing, or a slot of too many parts was asked for.
    SelfCheckError
        A fit failed its own check.
    """
    start = perf_counter()
    check_request(request)
    stock = tuple(sorted(holdings, key=attrgetter("id")))
    usable = usable_parts(stock, request)
    found, not_listed = search_choices(usable, request)
    fits = _fits(found, stock, request)
    limit = _limit_of(not_listed, request)
    searched = Searched(
        combinations=combinations(usable.resistors, usable.capacitors, request, not_listed),
        complete=not limit,
        limit=limit,
        seconds=0.0,
    )
    advice = advice_for(stock, usable, fits, request)
    if advice and request.boards > 1:
        advice = (*shortage(request, lambda fewer: _first_fit(stock, fewer)), *advice)
    ways_out = way_out(fits, request, lambda other: _first_fit(stock, other))
    return Answer(
        request=request,
        fits=explained(fits, request.rank),
        searched=replace(searched, seconds=perf_counter() - start),
        refusals=usable.refusals,
        advice=advice,
        ways_out=ways_out,
    )


def _fits(found: Sequence[Choice], stock: Sequence[Holding], request: Request) -> list[Fit]:
    """Work out what each choice will do, and check it."""
    by_id = {holding.id: holding for holding in stock}
    fits = [fit_of(choice, by_id, request) for choice in found]
    for fit in fits:
        recheck(fit, request)
    return fits


def _first_fit(stock: Sequence[Holding], request: Request) -> Fit | None:
    found, _ = search_choices(usable_parts(stock, request), request)
    return next(iter(_fits(found[:1], stock, request)), None)


def _limit_of(not_listed: Collection[int], request: Request) -> str:
    """Say what the search did not cover."""
    said = []
    if request.rank is Rank.BALANCED:
        near = f"the {NEAREST} nearest resistor networks to each capacitor network"
        if not request.circuit.capacitor:
            near = f"the {NEAREST} nearest networks of every number of resistors"
        if len(request.circuit.resistors) == 2:  # noqa: PLR2004 - RA and RB
            near = (
                f"the {NEAREST} nearest RB to each capacitor network and {NEAREST} RA beside each"
            )
        if request.circuit.resistors:
            said.append(f"only {near}")
    if not_listed:
        sizes = " and ".join(str(size) for size in sorted(not_listed))
        said.append(f"networks of {sizes} capacitors, too many to list, were not covered")
    return "; ".join(said)


def search_choices(usable: Usable, request: Request) -> tuple[list[Choice], frozenset[int]]:
    """Search alone, without working out what each choice will do.

    Parameters
    ----------
    usable : what the house rules left. request : what is wanted.

    Returns
    -------
    The choices that get a place, best first, and the numbers of capacitors whose networks were
    too many to list.
    """
    found, not_listed = _searched(usable, request)
    if not found and request.ranges_hold and any(target.is_range for target in request.targets):
        return _searched(usable, replace(request, ranges_hold=False))
    return found, not_listed


def _searched(usable: Usable, request: Request) -> tuple[list[Choice], frozenset[int]]:
    space = Space(usable.resistors, usable.capacitors, request)
    circuit = request.circuit
    if (circuit.resistors and not space.resistors.lots) or (
        circuit.capacitor and not space.capacitors.lots
    ):
        return [], frozenset()
    judge = Judge(request, space.resistors, space.capacitors)
    drawers = Drawers.of(space.resistors), Drawers.of(space.capacitors)
    if request.rank is Rank.BALANCED:
        pairings = BalancedSearch(space, judge).pairings()
        return [best_choice(pairing, *drawers) for pairing in pairings], space.not_listed
    found = choices(ExactSearch(space, judge).pairings(), *drawers, request)
    return found[: request.top], space.not_listed
