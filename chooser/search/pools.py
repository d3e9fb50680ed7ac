"""Holdings that the search need not tell apart, gathered into lots and laid out as arrays."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable
from dataclasses import dataclass
from operator import attrgetter

import numpy as np
from numpy.typing import NDArray

from chooser.parts import Holding, Kind

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

PLENTY = 1 << 20
"""Uses of a holding that never limits: more than any network has parts."""


@dataclass(frozen=True, slots=True)
class Lot:
    """Holdings that are equal for the question asked.

    Attributes
    ----------
    holdings : the members, in the order of their ids.
    uses : pieces of each that one board may use, >= 1.
    """

    holdings: tuple[Holding, ...]
    uses: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Pool:
    """Lots as arrays.

    Attributes
    ----------
    lots : the lots, rising in what adds under `+`.
    value : (n,) effective value of each, ohm or farad.
    adding : (n,) what adds under `+`: the resistance in ohm, or 1/C in 1/farad; rising.
    uses : (n,) pieces that one board may use of each lot, all its holdings together.
    """

    lots: tuple[Lot, ...]
    value: Floats
    adding: Floats
    uses: Ints


def uses_of(holding: Holding, boards: int) -> int:
    """Tell how many pieces of a holding each of a number of boards may use."""
    return PLENTY if holding.free is None else max(holding.free, 0) // boards


def gather(
    holdings: Iterable[Holding], boards: int, likeness: Callable[[Holding], Hashable]
) -> Pool:
    """Gather holdings into lots.

    Parameters
    ----------
    holdings : the usable holdings, all of one kind.
    boards : boards that share the stock, >= 1.
    likeness : holdings with an equal likeness fall into one lot; it must include the value.

    Returns
    -------
    The pool, in an order that is always the same: by what adds, then by the smallest id.
    """
    grouped: dict[Hashable, list[tuple[Holding, int]]] = {}
    for holding in sorted(holdings, key=attrgetter("id")):
        uses = uses_of(holding, boards)
        if uses > 0:
            grouped.setdefault(likeness(holding), []).append((holding, uses))
    # Ids rise in every lot and from lot to lot, so equal values stay in the order of their ids.
    lots = sorted(
        (_lot_of(members) for members in grouped.values()),
        key=lambda lot: _adding(lot.holdings[0]),
    )
    return Pool(
        lots=tuple(lots),
        value=np.array([lot.holdings[0].part.effective for lot in lots], dtype=np.float64),
        adding=np.array([_adding(lot.holdings[0]) for lot in lots], dtype=np.float64),
        uses=np.array([min(sum(lot.uses), PLENTY) for lot in lots], dtype=np.int64),
    )


def _lot_of(members: list[tuple[Holding, int]]) -> Lot:
    return Lot(tuple(holding for holding, _ in members), tuple(uses for _, uses in members))


def _adding(holding: Holding) -> float:
    value = holding.part.effective
    return 1 / value if holding.part.kind is Kind.CAPACITOR else value
