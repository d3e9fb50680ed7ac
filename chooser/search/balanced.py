"""The balanced order: inside the band first, then likely miss x 1.10 ** parts, few alike.

For every capacitor network and every number of resistors the NEAREST resistor networks are
weighed.  Most need not even be looked at: a circuit's spread is at least that of its capacitors
and its best resistor, so where that alone, weighted by the parts, is no better than the last
place, nothing is lost by skipping it.

The list is kept various: each further fit on the same main capacitor (the one with the greatest
share of the capacitance) counts as half as bad again as it is when places are given away.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.monostable import Drive, interval, sensitivity, typical
from chooser.interval import likely_miss, mean_of, spread_of
from chooser.networks import Join
from chooser.search.exact import SAME
from chooser.search.nearest import Near, Wish, nearest, reach
from chooser.search.pools import Floats, Ints
from chooser.search.ranking import Judge, Pairing
from chooser.search.slots import CapacitorSlots, lot_tolerances
from chooser.search.space import Level, Space
from chooser.search.tables import Rows
from chooser.search.terms import NEAREST

PER_PART = 1.10
"""Each extra part must cut the likely miss by this factor to earn its place."""

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
    rows : the n resistor networks.
    space : whose lots the networks are made of.
    """

    slots: CapacitorSlots
    score: Floats
    slot: Ints
    rows: Rows
    space: Space

    def only(self, kept: NDArray[np.bool_] | Ints) -> Weighed:
        """Return some of them."""
        rows = self.rows.take(kept)
        return Weighed(self.slots, self.score[kept], self.slot[kept], rows, self.space)

    def values_of(self, rows: Ints) -> list[tuple[tuple[float, ...], tuple[float, ...]]]:
        """Return the values of some circuits' parts, in ohm and farad, each sorted."""
        ohm = np.sort(self.space.resistors.value[self.rows.leaves[rows]], axis=1)
        leaves = self.slots.rows.leaves[self.slot[rows]]
        farad = np.sort(self.space.capacitors.value[leaves], axis=1)
        pairs = zip(ohm.tolist(), farad.tolist(), strict=True)
        return [(tuple(ohms), tuple(farads)) for ohms, farads in pairs]


class BalancedSearch:
    """One run; `pairings` gives the places.

    Parameters
    ----------
    space : what there is to choose from. judge : weighs pairings exactly.
    """

    def __init__(self, space: Space, judge: Judge) -> None:
        self._space = space
        self._judge = judge
        self._top = space.request.top
        self._weigher = _Weigher(space)
        self._weighed: list[Weighed] = []

    def pairings(self) -> list[Pairing]:
        """Return the pairings of lots that get the places, best first."""
        front = _Front.none()
        for level in self._space.levels():
            slots = self._space.slots(level.capacitors)
            if slots is not None and len(slots):
                self._weigh(level, slots, front)
                front = self._trimmed()
        return [
            self._pairing(self._weighed[front.level[place]], int(front.row[place]))
            for place in front.places(self._top)
        ]

    def _weigh(self, level: Level, slots: CapacitorSlots, front: _Front) -> None:
        """Weigh one level, but only where it could still get a place."""
        last = front.last(self._top)
        floor = self._weigher.least_score(slots, level)
        chosen = np.flatnonzero(front.beside(slots.main, floor) < last)
        wish = Wish(slots.wanted[chosen], slots.least[chosen], slots.most[chosen])
        near = nearest(self._space.resistor_tables, level.resistors, wish, NEAREST)
        near = Near(chosen[near.owner], near.rows)
        score = self._weigher.score(near, slots, level.parts)
        weighed = Weighed(slots, score, near.owner, near.rows, self._space)
        self._weighed.append(weighed.only(score <= last))

    def _trimmed(self) -> _Front:
        """Return the front, and drop what can no longer get a place."""
        front = _front(self._weighed, self._top)
        last = front.last(self._top)
        if last < inf:
            kept = [each.score <= last for each in self._weighed]
            self._weighed = [
                each.only(mask) for each, mask in zip(self._weighed, kept, strict=True)
            ]
            # Rows keep their order when others are dropped, so the front counts anew.
            front = front.renumbered([np.cumsum(mask) - 1 for mask in kept])
        return front

    def _pairing(self, weighed: Weighed, row: int) -> Pairing:
        slot = int(weighed.slot[row])
        return self._judge.pairing(
            weighed.rows.network(row),
            weighed.slots.rows.network(slot),
            float(weighed.slots.leak[slot]),
        )


class _Weigher:
    """The spreads and shifts of the lots as arrays, and the score made from them."""

    def __init__(self, space: Space) -> None:
        self._request = space.request
        self._drive: Drive = typical(space.request.timer, space.request.supply)
        self._tables = space.resistor_tables
        self._ohm, self._farad = space.resistors.value, space.capacitors.value
        of_r, of_c = lot_tolerances(space.resistors), lot_tolerances(space.capacitors)
        self._r_spread = np.array([tolerance.spread for tolerance in of_r])
        self._r_shift = np.array([tolerance.shift for tolerance in of_r])
        self._c_spread = np.array([tolerance.spread for tolerance in of_c])
        self._c_shift = np.array([tolerance.shift for tolerance in of_c])

    def least_score(self, slots: CapacitorSlots, level: Level) -> Floats:
        """Return a score that no circuit of a level on a capacitor network can be below.

        The spread is at least that of the capacitors and the best resistor. Where the wanted
        resistance lies outside what may be or can be, the interval misses by at least as much as
        it does, because the interval grows at least in proportion to R.
        """
        request = self._request
        c_spread = slots.rows.evaluate_shares(self._farad, self._c_spread, Join.PARALLEL)
        spread = spread_of(1.0, self._r_spread.min(), c_spread, request.timer.timing_error_limit)
        lowest, highest = reach(self._tables, level.resistors)
        short = np.minimum(slots.most, highest) / slots.wanted
        long = np.maximum(slots.least, lowest) / slots.wanted
        outside = (short < 1 - request.within - SAME) | (long > 1 + request.within + SAME)
        if self._r_shift.any() or self._c_shift.any():
            miss: Floats = spread  # the mean may be nearer than the nominal interval
        else:
            miss = likely_miss(np.maximum(np.maximum(1 - short, long - 1), 0.0), spread)
        floor = np.minimum(miss * PER_PART**level.parts, OUTSIDE / 2) * (1 - SAME)
        return np.where(long > short, inf, floor + OUTSIDE * outside)

    def score(self, near: Near, slots: CapacitorSlots, parts: int) -> Floats:
        """Return the scores of some circuits of so many parts."""
        rows, slot = near.rows, near.owner
        farad, leak = slots.farad[slot], slots.leak[slot]
        nominal = interval(rows.value, farad, leak, self._drive)
        steep = sensitivity(rows.value, farad, leak, self._drive)
        r_spread = rows.evaluate_shares(self._ohm, self._r_spread, Join.SERIES)
        r_shift = rows.evaluate_shares(self._ohm, self._r_shift, Join.SERIES)
        c_spread = slots.rows.evaluate_shares(self._farad, self._c_spread, Join.PARALLEL)[slot]
        c_shift = slots.rows.evaluate_shares(self._farad, self._c_shift, Join.PARALLEL)[slot]
        target = self._request.target
        with np.errstate(invalid="ignore"):
            mean = mean_of(nominal, steep, r_shift, c_shift)
            spread = spread_of(steep, r_spread, c_spread, self._request.timer.timing_error_limit)
            score = likely_miss(mean / target - 1, spread) * PER_PART**parts
        outside = np.abs(nominal / target - 1) > self._request.within + SAME
        # Scores are told apart to twelve digits, so that rounding cannot order equal circuits.
        score = np.where(np.isfinite(score), np.minimum(score, OUTSIDE / 2), OUTSIDE / 2)
        return np.asarray(np.round(score, 12) + OUTSIDE * outside)


@dataclass(frozen=True, slots=True)
class _Front:
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
    def none() -> _Front:
        """Return a front of nothing."""
        nothing = np.empty(0, dtype=np.int64)
        return _Front(nothing, nothing, nothing, np.empty(0), np.empty(0))

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

    def renumbered(self, rows: list[Ints]) -> _Front:
        """Return the front after rows were dropped; `rows` gives the new numbers by level."""
        row = self.row.copy()
        for number, renumbering in enumerate(rows):
            mine = self.level == number
            row[mine] = renumbering[self.row[mine]]
        return _Front(self.level, row, self.main, self.score, self.handicapped)


def _front(weighed: list[Weighed], wanted: int) -> _Front:
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
            return _Front(level[best], row[best], main[best], score[best], handicapped)
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
