"""Where to look at one level: the windows that an error leaves open, and the best in them.

One resistor: where the time surely grows at least in proportion to R (`Law.proportional`), an
error within e needs an R within e of the wanted one; else the circuit's inverse gives the windows.
No resistor: every capacitor network is an answer by itself. Two: see `chooser.search.joint`.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Protocol

import numpy as np

from chooser.search.boxes import MARGIN, Inverse
from chooser.search.joint import TwoResistors, widest
from chooser.search.pairs import Pairs
from chooser.search.pools import Floats, Ints
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Level, Space
from chooser.search.windows import ROUNDING, Found, find_in_windows

LARGE = 0.02
"""Errors from here on have their windows from the inverse instead of from the growth."""


class Scene(Protocol):
    """One level of the space."""

    def best(self, bound: float) -> Pairs:
        """Return the best with an error of at most `bound`, ties at the last place included."""
        ...


class Scenes:
    """The levels of one space, and what they share.

    Parameters
    ----------
    space : what there is to choose from.
    """

    def __init__(self, space: Space) -> None:
        self._space = space
        self._inverses: dict[int, Inverse] = {}

    def at(self, level: Level, slots: CapacitorSlots) -> Scene:
        """Return how to look for circuits of a level on its capacitor networks."""
        if not level.resistors:
            return CapacitorAlone(self._space, slots)
        if len(level.resistors) == 1:
            return OneResistor(self._space, level, slots)
        return TwoResistors(self._space, level, slots, self._inverse(level.capacitors, slots))

    def _inverse(self, capacitors: int, slots: CapacitorSlots) -> Inverse:
        if capacitors not in self._inverses:
            law = self._space.request.circuit.twin
            self._inverses[capacitors] = Inverse(law, slots, widest(self._space, slots))
        return self._inverses[capacitors]


class OneResistor:
    """One level: the resistor tables, the capacitor networks, and how to look between them."""

    def __init__(self, space: Space, level: Level, slots: CapacitorSlots) -> None:
        (size,) = level.resistors
        request, ohm = space.request, space.resistors.value
        self._tables = space.resistor_tables
        self._size = size
        self._slots = slots
        self._times = request.target / slots.scale
        self._top = request.top
        self._law = request.circuit.law
        # No network of so many resistors is below the first or above the second, in ohm.
        self._least = np.maximum(slots.least, ohm[0] / size)
        self._most = np.minimum(slots.most, ohm[-1] * size)

    def best(self, bound: float) -> Pairs:
        """Return the best pairs with an error of at most `bound`, ties at the last place included.

        It looks ever wider, because a first few good pairs spare it most of the window.
        """
        pairs = Pairs.none((self._size,))
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
        pairs = Pairs.none((self._size,))
        for found in find_in_windows(self._tables, self._size, low[chosen], high[chosen]):
            new = self._weighed(found, chosen[found.window])
            pairs = pairs.and_(new.only(new.error <= error)).best(self._top)
        return pairs

    def _window(self, error: float) -> tuple[Floats, Floats]:
        """Return ends in ohm between which every R lies whose error is at most `error`.

        For small errors they follow from the growth in proportion; for large ones that would be
        far too wide near the end of what the losses allow, and the circuit's inverse gives them.
        """
        slots = self._slots
        if error < LARGE and self._law.proportional:
            return slots.wanted * (1 - error), slots.wanted * (1 + error)
        high = self._law.resistance(self._times * (1 + error), slots.farad, slots.leak)
        low = np.zeros(len(slots))
        if error < 1:
            low = self._law.resistance(self._times * (1 - error), slots.farad, slots.leak)
        return low - MARGIN * np.abs(low), high + MARGIN * np.abs(high)

    def _weighed(self, found: Found, slot: Ints) -> Pairs:
        farad, leak = self._slots.farad[slot], self._slots.leak[slot]
        times = self._law.interval(found.rows.value, farad, leak)
        return Pairs(np.abs(times / self._times[slot] - 1), slot, (found.rows,))

    def _error_at(self, ohm: Floats) -> Floats:
        """Return the error, with its sign, that each capacitor network makes with a resistance."""
        times = self._law.interval(ohm, self._slots.farad, self._slots.leak)
        return np.asarray(times / self._times - 1)

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


class CapacitorAlone:
    """A level without resistors: every capacitor network is an answer by itself."""

    def __init__(self, space: Space, slots: CapacitorSlots) -> None:
        self._target, self._top, self._slots = space.request.target, space.request.top, slots

    def best(self, bound: float) -> Pairs:
        """Return the best with an error of at most `bound`, ties at the last place included."""
        error = np.abs(self._slots.farad / self._target - 1)
        near = np.flatnonzero(error <= bound)
        return Pairs(error[near], near, ()).best(self._top)
