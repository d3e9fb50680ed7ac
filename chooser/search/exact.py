"""The exact orders, `error` and `count`: the first k of the whole space, proven.

The search goes up by number of parts.  At each number it asks, for every capacitor network, for
all resistor networks whose error could still enter the list; the list's last place is the bound.
In the order `error` a fit of more parts must be better by a whole part per million, so once k
fits are equal to 0 ppm no more parts can win and the rest is covered by that argument.

What the windows are for one, two or no resistors is in `chooser.search.scenes`.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf

from chooser.search.pairs import Pairs, doubt
from chooser.search.ranking import PPM, Judge, Pairing, order_key
from chooser.search.scenes import Scenes
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Space
from chooser.search.terms import Rank


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
        self._scenes = Scenes(space)
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
                pairs = self._scenes.at(level, slots).best(bound)
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
            tuple(rows.network(runner.row) for rows in runner.pairs.rows),
            runner.slots.rows.network(slot) if runner.slots.rows.size else None,
            float(runner.slots.leak[slot]),
            int(runner.slots.variant[slot]),
        )
