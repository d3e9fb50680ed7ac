"""The exact orders, `error` and `count`: the first k of the whole space, proven.

The search goes up by number of parts.  At each number it asks, for every capacitor network, for
all resistor networks whose error could still enter the list; the list's last place is the bound.
In the order `error` a fit of more parts must be better by a whole part per million, so once k
fits are equal to 0 ppm no more parts can win and the rest is covered by that argument.

That the windows miss nothing rests on one property of the circuit: the interval grows at least
in proportion to R (`chooser.circuits.monostable.sensitivity` >= 1), so an error within e needs
an R within e of the wanted one.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import inf

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.monostable import interval, resistance, typical
from chooser.search.pools import Floats, Ints
from chooser.search.ranking import PPM, Judge, Pairing, order_key
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Space
from chooser.search.tables import Rows
from chooser.search.terms import Rank
from chooser.search.windows import ROUNDING, Found, find_in_windows

SAME = 1e-12
"""Interval ratios nearer to each other than this, relative, are left to the exact comparison."""

LARGE = 0.02
"""Errors from here on have their windows from the inverse instead of from the growth."""


def doubt(error: float) -> float:
    """Return how far rounding may have moved an error."""
    return SAME * (1 + error)


@dataclass(frozen=True, slots=True)
class Pairs:
    """Pairs of networks found at one number of resistors and capacitors.

    Attributes
    ----------
    error : (n,) size of the error. slot : (n,) number of the capacitor network.
    rows : the n resistor networks.
    """

    error: Floats
    slot: Ints
    rows: Rows

    def __len__(self) -> int:
        return len(self.error)

    def only(self, kept: Ints | NDArray[np.bool_]) -> Pairs:
        """Return some of the pairs."""
        return Pairs(self.error[kept], self.slot[kept], self.rows.take(kept))

    def best(self, wanted: int) -> Pairs:
        """Return the best `wanted` and all that equal the last of them."""
        if len(self) <= wanted:
            return self
        last = np.partition(self.error, wanted - 1)[wanted - 1]
        return self.only(self.error <= last + doubt(last))


@dataclass(frozen=True, slots=True)
class _Runner:
    """A pair in the running, weighed by float only; exact fractions come at the end.

    Attributes
    ----------
    error : size of the error. parts : parts in all.
    pairs, row, slots : where its networks are written.
    """

    error: float
    parts: int
    pairs: Pairs
    row: int
    slots: CapacitorSlots

    def key(self, rank: Rank, sign: int) -> tuple[float, ...]:
        """Return the sort key at the worst (+1) or best (-1) that rounding may hide."""
        error = self.error + sign * doubt(self.error)
        if rank is Rank.COUNT:
            return (self.parts, error)
        return (int(error / PPM + 0.5), self.parts, error)


class ExactSearch:
    """One run; `pairings` gives the shortlist.

    Parameters
    ----------
    space : what there is to choose from. judge : weighs pairings exactly.
    """

    def __init__(self, space: Space, judge: Judge) -> None:
        self._space = space
        self._judge = judge
        self._top = space.request.top
        self._rank = space.request.rank
        self._running: list[_Runner] = []

    def pairings(self) -> list[Pairing]:
        """Return the pairings of lots that hold the first places and all ties at the last one."""
        for level in self._space.levels():
            bound = self._bound(level.parts)
            if bound < 0:
                break
            slots = self._space.slots(level.capacitors)
            if slots is not None and len(slots):
                pairs = _Scene(self._space, level.resistors, slots).best(bound)
                self._enter(pairs, level.parts, slots)
        return self._weighed()

    def _bound(self, parts: int) -> float:
        """Return the largest error with which a fit of so many parts could enter; < 0 if none."""
        if len(self._running) < self._top:
            return inf
        last = self._running[self._top - 1]
        if last.parts == parts:
            return last.error + doubt(last.error)
        if self._rank is Rank.COUNT:
            return -1.0
        bound = (last.key(self._rank, +1)[0] - 0.5) * PPM
        return bound + doubt(bound)

    def _enter(self, pairs: Pairs, parts: int, slots: CapacitorSlots) -> None:
        """Let pairs run; drop those that surely stand behind the last place."""
        errors = pairs.error.tolist()
        running = self._running + [
            _Runner(error, parts, pairs, row, slots) for row, error in enumerate(errors)
        ]
        running.sort(key=lambda runner: runner.key(self._rank, +1))
        if len(running) > self._top:
            last = running[self._top - 1].key(self._rank, +1)
            running = [runner for runner in running if runner.key(self._rank, -1) <= last]
        self._running = running

    def _weighed(self) -> list[Pairing]:
        """Weigh the pairs in the running exactly; keep the first places and their ties."""
        key = order_key(self._rank)
        pairings = sorted((self._pairing(runner) for runner in self._running), key=key)
        if len(pairings) > self._top:
            last = key(pairings[self._top - 1])
            pairings = [pairing for pairing in pairings if key(pairing) <= last]
        return pairings

    def _pairing(self, runner: _Runner) -> Pairing:
        slot = int(runner.pairs.slot[runner.row])
        return self._judge.pairing(
            runner.pairs.rows.network(runner.row),
            runner.slots.rows.network(slot),
            float(runner.slots.leak[slot]),
        )


class _Scene:
    """One level: the resistor tables, the capacitor networks, and how to look between them."""

    def __init__(self, space: Space, size: int, slots: CapacitorSlots) -> None:
        request, ohm = space.request, space.resistors.value
        self._tables = space.resistor_tables
        self._size = size
        self._slots = slots
        self._target = request.target
        self._top = request.top
        self._drive = typical(request.timer, request.supply)
        # No network of so many resistors is below the first or above the second, in ohm.
        self._least = np.maximum(slots.least, ohm[0] / size)
        self._most = np.minimum(slots.most, ohm[-1] * size)

    def best(self, bound: float) -> Pairs:
        """Return the best pairs with an error of at most `bound`, ties at the last place included.

        It looks ever wider, because a first few good pairs spare it most of the window.
        """
        pairs = Pairs(np.empty(0), np.empty(0, dtype=np.int64), Rows.none(self._size))
        for error in self._steps(bound):
            pairs = self._within(error)
            if len(pairs) >= self._top:
                break
        return pairs

    def _within(self, error: float) -> Pairs:
        """Return the best pairs of those with an error of at most `error`."""
        low, high = self._window(error)
        low, high = np.maximum(low, self._least), np.minimum(high, self._most)
        chosen = np.flatnonzero(low <= high)
        pairs = Pairs(np.empty(0), np.empty(0, dtype=np.int64), Rows.none(self._size))
        for found in find_in_windows(self._tables, self._size, low[chosen], high[chosen]):
            new = self._weighed(found, chosen[found.window])
            pairs = _merged(pairs, new.only(new.error <= error)).best(self._top)
        return pairs

    def _window(self, error: float) -> tuple[Floats, Floats]:
        """Return ends in ohm between which every R lies whose error is at most `error`.

        For small errors they follow from the growth in proportion; for large ones that would be
        far too wide near the end of what the losses allow, and the circuit's inverse gives them.
        """
        slots = self._slots
        if error < LARGE:
            return slots.wanted * (1 - error), slots.wanted * (1 + error)
        high = resistance(self._target * (1 + error), slots.farad, slots.leak, self._drive)
        if error >= 1:
            return np.zeros(len(slots)), high
        return resistance(self._target * (1 - error), slots.farad, slots.leak, self._drive), high

    def _weighed(self, found: Found, slot: Ints) -> Pairs:
        farad, leak = self._slots.farad[slot], self._slots.leak[slot]
        times = interval(found.rows.value, farad, leak, self._drive)
        return Pairs(np.abs(times / self._target - 1), slot, found.rows)

    def _error_at(self, ohm: Floats) -> Floats:
        """Return the error, with its sign, that each capacitor network makes with a resistance."""
        times = interval(ohm, self._slots.farad, self._slots.leak, self._drive)
        return np.asarray(times / self._target - 1)

    def _steps(self, bound: float) -> Iterator[float]:
        """Yield rising errors to try; the last one is the bound, or covers everything.

        The first is what the nearest network in reach needs, and a little more: as much as would
        do if the pairs were spread evenly over the octaves between the ends.
        """
        open_ = self._least <= self._most
        if not open_.any():
            return
        need = np.maximum(self._error_at(self._least), -self._error_at(self._most))[open_]
        nearest = max(float(need.min()), 0.0) * (1 + ROUNDING)
        octaves = float(np.log(self._most[open_] / self._least[open_]).max()) + 1
        pairs = self._tables.count(self._size) * len(open_)
        step = 4 * self._top * octaves / max(pairs, 1) * (1 - nearest if nearest < 1 else nearest)
        last = min(bound, max(1.0, float(self._error_at(self._most)[open_].max()) * (1 + ROUNDING)))
        while nearest + step < last:
            yield nearest + step
            step *= 8
        yield last


def _merged(one: Pairs, other: Pairs) -> Pairs:
    if not len(one):
        return other
    if not len(other):
        return one
    return Pairs(
        np.concatenate([one.error, other.error]),
        np.concatenate([one.slot, other.slot]),
        Rows.concatenated([one.rows, other.rows]),
    )
