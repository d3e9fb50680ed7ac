"""The balanced order: inside the band first, then likely miss x 1.10 ** parts, few alike.

For every capacitor network and every number of resistors the NEAREST resistor networks are
weighed.  Most need not even be looked at: a circuit's spread is at least that of its capacitors
and its best resistor, so where that alone, weighted by the parts, is no better than the last
place, nothing is lost by skipping it.
"""

from __future__ import annotations

from math import inf

import numpy as np

from chooser.search.front import Front, Weighed, front_of
from chooser.search.ranking import Judge, Pairing
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Level, Space
from chooser.search.weighing import weigher_of


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
        self._weigher = weigher_of(space)
        self._weighed: list[Weighed] = []

    def pairings(self) -> list[Pairing]:
        """Return the pairings of lots that get the places, best first."""
        front = Front.none()
        for level in self._space.levels():
            slots = self._space.slots(level.capacitors)
            if slots is not None and len(slots):
                self._weigh(level, slots, front)
                front = self._trimmed()
        return [
            self._pairing(self._weighed[front.level[place]], int(front.row[place]))
            for place in front.places(self._top)
        ]

    def _weigh(self, level: Level, slots: CapacitorSlots, front: Front) -> None:
        """Weigh one level, but only where it could still get a place."""
        last = front.last(self._top)
        floor = self._weigher.least_score(slots, level)
        chosen = np.flatnonzero(front.beside(slots.main, floor) < last)
        owner, rows = self._weigher.near(slots, chosen, level, last)
        score = self._weigher.score(owner, rows, slots, level.parts)
        weighed = Weighed(slots, score, owner, rows, self._space)
        # A time that never ends has no score; it is no answer even while places are free.
        self._weighed.append(weighed.only((score <= last) & (score < inf)))

    def _trimmed(self) -> Front:
        """Return the front, and drop what can no longer get a place."""
        front = front_of(self._weighed, self._top)
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
            tuple(each.network(row) for each in weighed.rows if each.size),
            weighed.slots.rows.network(slot) if weighed.slots.rows.size else None,
            float(weighed.slots.leak[slot]),
            int(weighed.slots.variant[slot]),
        )
