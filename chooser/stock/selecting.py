"""Choosing holdings out of the stock by what a person names."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches

from chooser.errors import UnknownNameError
from chooser.parts import Holding, Kind


def select_holdings(
    holdings: Iterable[Holding], kind: Kind | None = None, drawer: str | None = None
) -> tuple[Holding, ...]:
    """Keep the holdings of a kind and a drawer, in their order.

    Parameters
    ----------
    holdings : the stock. kind : None keeps all. drawer : its name in any case; None keeps all.

    Raises
    ------
    UnknownNameError : the stock has no drawer of that name; the nearest names are told.
    """
    every = tuple(holdings)
    if drawer is not None:
        _require_drawer(drawer, {holding.drawer for holding in every})
    return tuple(
        holding
        for holding in every
        if (kind is None or holding.part.kind is kind)
        and (drawer is None or holding.drawer.casefold() == drawer.strip().casefold())
    )


def _require_drawer(drawer: str, names: set[str]) -> None:
    spelled = {name.casefold(): name for name in sorted(names)}
    wanted = drawer.strip().casefold()
    if wanted in spelled:
        return
    near = [spelled[name] for name in get_close_matches(wanted, list(spelled), n=3, cutoff=0.5)]
    advice = (
        f"did you mean {' or '.join(near)}?" if near else "`chooser stock list` shows them all."
    )
    raise UnknownNameError(f"There is no drawer {drawer!r} in the stock; {advice}")
