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

from chooser.circuits.monostable import interval, typical
from chooser.networks import Network
from chooser.search.pools import Floats, Ints
from chooser.search.ranking import PPM, Judge, Pairing, order_key
from chooser.search.request import Rank
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Level, Space
from chooser.search.tables import Rows
from chooser.search.windows import ROUNDING, Found, find_in_windows

SAME = 1e-12
"""Errors nearer to each other than this are left to the exact comparison."""


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
        return self.only(self.error <= last + SAME)


class ExactSearch:
    """One run; `pairings` gives the shortlist.

    Parameters
    ----------
    space : what there is to choose from. judge : weighs pairings exactly.
    """

    def __init__(self, space: Space, judge: Judge) -> None:
        self._space = space
        self._judge = judge
        self._request = space.request
        self._key = order_key(space.request.rank)
        self._kept: list[Pairing] = []

    def pairings(self) -> list[Pairing]:
        """Return the pairings of lots that hold the first places and all ties at the last one."""
        for level in self._space.levels():
            if self._bound(level.parts) < 0:
                break
            slots = self._space.slots(level.capacitors)
            if slots is not None and len(slots):
                self._search(level, slots)
        return self._kept

    def _bound(self, parts: int) -> float:
        """Return the largest error with which a fit of so many parts could enter; < 0 if none."""
        if len(self._kept) < self._request.top:
            return inf
        last = self._kept[self._request.top - 1]
        if last.parts == parts:
            return float(last.size)
        if self._request.rank is Rank.COUNT:
            return -1.0
        return (last.ppm - 0.5) * PPM

    def _search(self, level: Level, slots: CapacitorSlots) -> None:
        bound = self._bound(level.parts)
        scene = _Scene(self._space, level.resistors, slots)
        pairs = scene.within(bound + SAME) if bound < inf else scene.widened()
        self._keep(pairs.best(self._request.top), slots)

    def _keep(self, pairs: Pairs, slots: CapacitorSlots) -> None:
        networks: dict[int, Network[int]] = {}
        for row in range(len(pairs)):
            slot = int(pairs.slot[row])
            if slot not in networks:
                networks[slot] = slots.rows.network(slot)
            self._kept.append(
                self._judge.pairing(pairs.rows.network(row), networks[slot], float(slots.leak[slot]))
            )
        self._kept.sort(key=self._key)
        if len(self._kept) > self._request.top:
            last = self._key(self._kept[self._request.top - 1])
            self._kept = [pairing for pairing in self._kept if self._key(pairing) <= last]


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

    def within(self, error: float) -> Pairs:
        """Return the best pairs whose error is at most `error`; all of them if they are few."""
        slots = self._slots
        low = np.maximum(slots.wanted * (1 - error), self._least)
        high = np.minimum(slots.wanted * (1 + error), self._most)
        chosen = np.flatnonzero(low <= high)
        pairs = Pairs(np.empty(0), np.empty(0, dtype=np.int64), Rows.none(self._size))
        for found in find_in_windows(self._tables, self._size, low[chosen], high[chosen]):
            new = self._weighed(found, chosen[found.window])
            pairs = _merged(pairs, new.only(new.error <= error)).best(self._top)
        return pairs

    def widened(self) -> Pairs:
        """Return the best pairs whatever their error, looking ever wider until there are enough."""
        pairs = Pairs(np.empty(0), np.empty(0, dtype=np.int64), Rows.none(self._size))
        for error in self._steps():
            pairs = self.within(error)
            if len(pairs) >= self._top:
                break
        return pairs

    def _weighed(self, found: Found, slot: Ints) -> Pairs:
        farad, leak = self._slots.farad[slot], self._slots.leak[slot]
        times = interval(found.rows.value, farad, leak, self._drive)
        return Pairs(np.abs(times / self._target - 1), slot, found.rows)

    def _steps(self) -> Iterator[float]:
        """Yield rising errors to try; the last one covers everything.

        The first is guessed from how densely the pairs would lie if they were spread evenly over
        the octaves between the ends, but is at least what the nearest network in reach needs.
        """
        wanted = self._slots.wanted
        need = np.maximum(self._least / wanted - 1, 1 - self._most / wanted)
        open_ = self._least <= self._most
        if not open_.any():
            return
        octaves = float(np.log(self._most[open_] / self._least[open_]).max()) + 1
        pairs = self._tables.count(self._size) * len(wanted)
        error = min(4 * self._top * octaves / max(pairs, 1), 0.5)
        error = max(error, float(need[open_].min()) * (1 + ROUNDING))
        everything = max(1.0, float((self._most / wanted)[open_].max()))
        while error < everything:
            yield error
            error = min(error * 8, 0.5) if error < 0.5 else _further(error)  # noqa: PLR2004
        yield everything


def _further(error: float) -> float:
    """Step an error of a half or more: halve what remains to 1, then double."""
    if error >= 1:
        return 2 * error
    return (1 + error) / 2 if error < 1 - 1e-6 else 1.0


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
