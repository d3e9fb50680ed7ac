"""From a request and a stock to a ranked, re-checked answer."""

from __future__ import annotations

from collections.abc import Iterable
from operator import attrgetter
from time import perf_counter

from chooser.circuits.timers import check_supply
from chooser.parts import Holding
from chooser.search.advice import advice_for
from chooser.search.balanced import BalancedSearch
from chooser.search.choosing import Choice, Drawers, best_choice, choices
from chooser.search.exact import ExactSearch
from chooser.search.fits import explained, fit_of
from chooser.search.house_rules import Usable, check_part_numbers, usable_parts
from chooser.search.ranking import Judge
from chooser.search.recheck import recheck
from chooser.search.request import Answer, Request, Searched
from chooser.search.space import Space, combinations
from chooser.search.terms import Rank


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
        The supply does not suit the timer, or a slot of too many parts was asked for.
    SelfCheckError
        A fit failed its own check.
    """
    start = perf_counter()
    check_part_numbers(request)
    check_supply(request.timer, request.supply)
    stock = tuple(sorted(holdings, key=attrgetter("id")))
    usable = usable_parts(stock, request)
    found, limit = search_choices(usable, request)
    by_id = {holding.id: holding for holding in stock}
    fits = [fit_of(choice, by_id, request) for choice in found]
    for fit in fits:
        recheck(fit, request)
    searched = Searched(
        combinations=combinations(usable.resistors, usable.capacitors, request),
        complete=not limit and request.rank is not Rank.BALANCED,
        limit=limit,
        seconds=perf_counter() - start,
    )
    return Answer(
        request=request,
        fits=explained(fits, request.rank),
        searched=searched,
        refusals=usable.refusals,
        advice=advice_for(stock, usable, fits, request),
    )


def search_choices(usable: Usable, request: Request) -> tuple[list[Choice], str]:
    """Search alone, without working out what each choice will do.

    Parameters
    ----------
    usable : what the house rules left. request : what is wanted.

    Returns
    -------
    The choices that get a place, best first, and what could not be covered, or "".
    """
    space = Space(usable.resistors, usable.capacitors, request)
    if not space.resistors.lots or not space.capacitors.lots:
        return [], ""
    judge = Judge(request, space.resistors, space.capacitors)
    drawers = Drawers.of(space.resistors), Drawers.of(space.capacitors)
    if request.rank is Rank.BALANCED:
        pairings = BalancedSearch(space, judge).pairings()
        return [best_choice(pairing, *drawers) for pairing in pairings], space.limit
    found = choices(ExactSearch(space, judge).pairings(), *drawers, request)
    return found[: request.top], space.limit
