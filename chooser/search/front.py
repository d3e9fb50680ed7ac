"""The circuits that may get a place in the balanced order, kept various.

Each further fit on the same main capacitor (the one with the greatest share of the capacitance)
counts as half as bad again as it is when places are given away, and no two have the same values.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf

import numpy as np
from numpy.typing import NDArray

from chooser.search.pools import Floats, Ints
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Space
from chooser.search.tables import Rows

PER_VARIATION = 1.50
"""Each further fit on the same main capacitor must be better by this factor to get a place."""

MOST_VARIATIONS = 30
"""Variations after which the handicap grows no more: it is beyond any difference long before."""

OUTSIDE = 1e6
"""Added to the score outside the band: every fit inside comes first; scores stay far below."""


@dataclass(frozen=True, slots=True)
class Weighed:
    """Circuits of one number of resistors and one of capacitors, weighed.

    Attributes
    ----------
    slots : the capacitor networks.
    score : (n,) lower is better. slot : (n,) number of the capacitor network.
    rows : the n resistor networks, for each resistor slot.
    space : whose lots the networks are made of.
    """

    slots: CapacitorSlots
    score: Floats
    slot: Ints
    rows: tuple[Rows, ...]
    space: Space

    def only(self, kept: NDArray[np.bool_] | Ints) -> Weighed:
        """Return some of them."""
        rows = tuple(each.take(kept) for each in self.rows)
        return Weighed(self.slots, self.score[kept], self.slot[kept], rows, self.space)

    def values_of(self, rows: Ints) -> list[tuple[tuple[float, ...], ...]]:
        """Return the values of some circuits' parts, in ohm and farad, sorted in each slot."""
        leaves = self.slots.rows.leaves[self.slot[rows]]
        slots = [
            *(np.sort(self.space.resistors.value[each.leaves[rows]], axis=1) for each in self.rows),
            np.sort(self.space.capacitors.value[leaves], axis=1),
        ]
        return list(zip(*(map(tuple, slot.tolist()) for slot in slots), strict=True))


@dataclass(frozen=True, slots=True)
class Front:
    """The circuits that may get a place, best score first, no two with the same values.

    Attributes
    ----------
    level, row : where each is written. main : its main capacitor.
    score, handicapped : its score, and the same with the handicap of its variations.
    """

    level: Ints
    row: Ints
    main: Ints
    score: Floats
    handicapped: Floats

    @staticmethod
    def none() -> Front:
        """Return a front of nothing."""
        nothing = np.empty(0, dtype=np.int64)
        return Front(nothing, nothing, nothing, np.empty(0), np.empty(0))

    def last(self, wanted: int) -> float:
        """Return the handicapped score of the last place; infinity while places are free."""
        if len(self.score) < wanted:
            return inf
        return float(np.partition(self.handicapped, wanted - 1)[wanted - 1])

    def places(self, wanted: int) -> Ints:
        """Return the numbers of those that get a place, in rank order."""
        return np.sort(np.argsort(self.handicapped, kind="stable")[:wanted])

    def beside(self, main: NDArray[np.int32], score: Floats) -> Floats:
        """Return the handicapped scores that further circuits would have beside the front."""
        times = np.zeros(len(score), dtype=np.int64)
        for capacitor in np.unique(self.main):
            mine = np.flatnonzero(main == capacitor)
            held = self.score[self.main == capacitor]
            times[mine] = np.searchsorted(held, score[mine], "right")
        return _handicapped(score, times)

    def renumbered(self, rows: list[Ints]) -> Front:
        """Return the front after rows were dropped; `rows` gives the new numbers by level."""
        row = self.row.copy()
        for number, renumbering in enumerate(rows):
            mine = self.level == number
            row[mine] = renumbering[self.row[mine]]
        return Front(self.level, row, self.main, self.score, self.handicapped)


def front_of(weighed: list[Weighed], wanted: int) -> Front:
    """Gather the best scores of all levels, and handicap them."""
    level = np.repeat(np.arange(len(weighed)), [len(each.score) for each in weighed])
    row = np.concatenate([np.arange(len(each.score)) for each in weighed])
    score = np.concatenate([each.score for each in weighed])
    main = np.concatenate([each.slots.main[each.slot] for each in weighed])
    keep = 16 * wanted
    while True:
        best = np.argsort(score, kind="stable")[:keep]
        best = best[_first_of_values(weighed, level[best], row[best])]
        handicapped = _handicapped(score[best], _times(main[best]))
        enough = len(best) >= wanted and np.sort(handicapped)[wanted - 1] <= score[best[-1]]
        if enough or keep >= len(score):
            last = np.sort(handicapped)[wanted - 1] if len(best) >= wanted else inf
            best, handicapped = best[score[best] <= last], handicapped[score[best] <= last]
            return Front(level[best], row[best], main[best], score[best], handicapped)
        keep *= 4


def _times(main: Ints) -> Ints:
    """Count, for each circuit of a front, the better ones on the same main capacitor."""
    order = np.argsort(main, kind="stable")
    ranked = main[order]
    times = np.empty(len(main), dtype=np.int64)
    times[order] = np.arange(len(main)) - np.searchsorted(ranked, ranked, "left")
    return times


def _handicapped(score: Floats, times: Ints) -> Floats:
    """Return scores as they count when so many better ones have the same main capacitor."""
    with np.errstate(invalid="ignore"):
        whole = np.where(np.isfinite(score), np.floor(score / OUTSIDE) * OUTSIDE, 0.0)
    factor = PER_VARIATION ** np.minimum(times, MOST_VARIATIONS)
    return np.asarray((score - whole) * factor + whole)


def _first_of_values(weighed: list[Weighed], level: Ints, row: Ints) -> Ints:
    """Return the places of the first circuit of each set of part values.

    Other arrangements of the same parts, and equal values from other drawers, are no other answer.
    """
    values: dict[int, tuple[object, ...]] = {}
    for number, each in enumerate(weighed):
        places = np.flatnonzero(level == number)
        found = each.values_of(row[places])
        values.update(zip(places.tolist(), found, strict=True))
    seen: dict[tuple[object, ...], int] = {}
    for place in range(len(level)):
        seen.setdefault(values[place], place)
    return np.array(list(seen.values()), dtype=np.int64)
