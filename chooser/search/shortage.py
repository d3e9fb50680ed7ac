"""How many boards the stock can make, where it cannot make all of them, and what runs out."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from dataclasses import replace

from chooser.parts import Holding, Kind
from chooser.quantities import format_capacitance, format_resistance
from chooser.search.request import Fit, Request
from chooser.search.terms import Rank

Search = Callable[[Request], Fit | None]
"""Finds the first fit of a request, if any."""


def shortage(request: Request, search: Search) -> tuple[str, ...]:
    """Say for how many boards the stock is enough, and what is short for the rest.

    Parameters
    ----------
    request : what was asked, for more than one board. search : asked again for fewer boards.

    Returns
    -------
    One sentence, or none where not even one board can be built inside the band.
    """
    # The order of errors answers fastest whether anything lies in the band at all; but a little
    # outside a range may be nearer, by error, than what lies inside, and is not accepted.
    ranges = any(target.is_range for target in request.targets)
    rank = Rank.BALANCED if ranges else Rank.ERROR

    def can_make(boards: int) -> bool:
        fit = search(replace(request, boards=boards, rank=rank, top=1))
        return fit is not None and fit.in_band

    if not can_make(1):
        return ()
    enough, too_many = 1, request.boards
    while too_many - enough > 1:
        boards = (enough + too_many) // 2
        if can_make(boards):
            enough = boards
        else:
            too_many = boards
    best = search(replace(request, boards=enough, rank=Rank.BALANCED, top=1))
    if best is None:
        return ()
    noun = "board" if enough == 1 else "boards"
    short = _short_of(best, request.boards)
    said = f"The stock is enough for {enough} {noun}; the best way, for all {request.boards} is "
    return (f"{said}short of {short}.",)


def _short_of(fit: Fit, boards: int) -> str:
    """Name what so many boards need beyond what is free."""
    holdings = list(fit.holdings())
    taken = Counter(holding.id for holding in holdings)
    by_id = {holding.id: holding for holding in holdings}
    short = [
        f"{pieces * boards - free} x {_name(by_id[number])}"
        for number, pieces in taken.items()
        if (free := by_id[number].free) is not None and free < pieces * boards
    ]
    return " and ".join(short)


def _name(holding: Holding) -> str:
    write = format_capacitance if holding.part.kind is Kind.CAPACITOR else format_resistance
    return f"{write(holding.part.effective)} (drawer {holding.drawer})"
