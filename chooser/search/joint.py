"""Two resistors that share one capacitor and one stock: every pair within an error, exactly.

An error within e leaves a box of high and low times open. For each capacitor network the box
becomes a window for RA and one for RB, by the circuit's inverses and interval arithmetic: the
high time grows with both, the low time grows with RB and falls, if anything, with RA. The slot
that has fewer networks in its windows goes first; for each of its networks the other one's window
shrinks to what completes it. Pairs that take more pieces than there are drop out.

The windows only have to miss nothing; whatever is found is weighed by the formula itself.
"""

from __future__ import annotations

from collections.abc import Iterator
from math import inf, log, sqrt

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.circuit import outputs_of
from chooser.search.boxes import Box, Inverse, Windows, box_of
from chooser.search.pairs import SAME, Pairs
from chooser.search.pools import Floats, Ints
from chooser.search.request import Request
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Level, Space
from chooser.search.tables import Rows, Tables, allowed
from chooser.search.terms import Rule
from chooser.search.windows import find_in_windows

WIDER = 4.0
"""Factor from one try's error to the next."""

_FARTHEST = 1e6  # errors beyond are not told apart by windows


def errors_of(request: Request, times: tuple[Floats, ...]) -> Floats:
    """Return the largest |error| of any target for arrays of high and low times in second.

    A time that never ends is no answer to anything: its error is infinite.
    """
    with np.errstate(invalid="ignore"):
        made = outputs_of(request.circuit, times)
    worst = np.zeros(len(times[0]))
    for target in request.targets:
        value = made[target.output]
        below, above = 1 - value / target.low, value / target.high - 1
        worst = np.maximum(worst, np.maximum(below, above))
    fine = np.isfinite(sum(times))
    if request.ranges_hold:
        fine &= in_ranges(request, times)
    return np.asarray(np.where(fine, worst, inf))


def in_ranges(request: Request, times: tuple[Floats, ...]) -> NDArray[np.bool_]:
    """Tell where every output with a range lies in it: a range is meant as it is written."""
    with np.errstate(invalid="ignore"):
        made = outputs_of(request.circuit, times)
    inside = np.ones(len(times[0]), dtype=np.bool_)
    for target in request.targets:
        if target.is_range:
            value = made[target.output]
            inside &= value >= target.low * (1 - SAME)
            inside &= value <= target.high * (1 + SAME)
    return inside


class TwoResistors:
    """One level of a circuit with two resistors: the tables, the capacitors, the windows."""

    def __init__(self, space: Space, level: Level, slots: CapacitorSlots, inverse: Inverse) -> None:
        self._tables: Tables = space.resistor_tables
        self._sizes = level.resistors
        self._slots = slots
        self._request = space.request
        self._law = space.request.circuit.twin
        self._inverse = inverse
        self._reach = reach_windows(space, level.resistors, slots)

    def best(self, bound: float) -> Pairs:
        """Return the best with an error of at most `bound`, ties at the last place included.

        It looks ever wider, because a first few good pairs spare it most of the windows.
        """
        pairs = Pairs.none(self._sizes)
        for error in self._steps(bound):
            pairs = self._within(error)
            if len(pairs) >= self._request.top:
                break
        return pairs

    def _steps(self, bound: float) -> Iterator[float]:
        """Yield rising errors to try; the last one is the bound.

        The first is what the nearest circuit in reach needs, and a little more: as much as would
        do if the networks were spread evenly over the octaves.
        """
        need = float(np.min(self._inverse.least_errors(self._request.targets, self._reach)))
        value = self._tables.singles.value
        octaves = log(float(value[-1] / value[0])) + 1
        size_a, size_b = self._sizes
        pairs = self._tables.count(size_a) * self._tables.count(size_b) * len(self._slots)
        area = 4 * self._request.top * octaves**2 / max(pairs, 1)
        free = [target for target in self._request.targets if target.is_range]
        error = sqrt(area) / 2
        if free:
            error = min(error, area / log((1 - free[0].low) / (1 - free[0].high)) / 2)
        while need + error < min(bound, _FARTHEST):
            yield need + error
            error *= WIDER
        if need <= bound:
            yield bound

    def _within(self, error: float) -> Pairs:
        """Return the best pairs of those with an error of at most `error`."""
        request = self._request
        box = box_of(request.targets, error, ranges_hold=request.ranges_hold)
        windows = self._inverse.windows(box, error).within(self._reach)
        slot = windows.open
        windows = windows.only(slot)
        pairs = Pairs.none(self._sizes)
        a_first = self._count(0, windows.ra) <= self._count(1, windows.rb)
        first = windows.ra if a_first else windows.rb
        for found in find_in_windows(self._tables, self._sizes[0 if a_first else 1], *first):
            new = self._completed(box, windows, slot, (found.window, found.rows), a_first=a_first)
            for piece in new:
                kept = (piece.error <= error) & np.isfinite(piece.error)
                pairs = pairs.and_(piece.only(kept)).best(self._request.top)
        return pairs

    def _count(self, place: int, ends: tuple[Floats, Floats]) -> float:
        """Estimate how many networks lie in the windows of a slot."""
        if not len(ends[0]):
            return 0.0
        widths = np.log(np.maximum(ends[1], 1e-3) / np.maximum(ends[0], 1e-3)) + 1e-6
        return self._tables.count(self._sizes[place]) * float(np.sum(widths))

    def _completed(
        self,
        box: Box,
        windows: Windows,
        slot: Ints,
        first: tuple[Ints, Rows],
        *,
        a_first: bool,
    ) -> Iterator[Pairs]:
        """Complete networks of the first slot by all of the second that keep the box.

        Parameters
        ----------
        windows, slot : of both slots, and the capacitor network each is for.
        first : number of the window, and the network, of each found for the first slot.
        """
        window, rows = first
        owner = slot[window]
        if a_first:
            ends = windows.rb[0][window], windows.rb[1][window]
            low, high = self._inverse.rb_beside(box, rows.value, ends, owner).rb
        else:
            ends = windows.ra[0][window], windows.ra[1][window]
            low, high = self._inverse.ra_beside(box, rows.value, ends, owner).ra
        chosen = np.flatnonzero(low <= high)
        size = self._sizes[1 if a_first else 0]
        for found in find_in_windows(self._tables, size, low[chosen], high[chosen]):
            mine = chosen[found.window]
            both = (rows.take(mine), found.rows) if a_first else (found.rows, rows.take(mine))
            yield self._weighed(owner[mine], both)

    def _weighed(self, slot: Ints, rows: tuple[Rows, Rows]) -> Pairs:
        """Weigh pairs by the formula, less those that need more pieces than there are."""
        leaves = np.concatenate([each.leaves for each in rows], axis=1)
        kept = allowed(leaves, self._tables.uses)
        if self._law.through_both:
            kept &= rows[0].value + rows[1].value <= self._slots.most[slot] * (1 + 1e-12)
        kept_rows = tuple(each.take(kept) for each in rows)
        slot = slot[kept]
        values = [each.value for each in kept_rows]
        times = self._law.times(values, self._slots.farad[slot], self._slots.leak[slot])
        return Pairs(errors_of(self._request, times), slot, kept_rows)


def widest(space: Space, slots: CapacitorSlots) -> Windows:
    """Return windows that hold those of every level."""
    most = space.request.most_resistors
    return reach_windows(space, (most, most), slots)


def reach_windows(space: Space, sizes: tuple[int, ...], slots: CapacitorSlots) -> Windows:
    """Return the windows that the rules and the parts leave to RA and RB, before any target."""
    ohm = space.resistors.value
    size_a, size_b = sizes
    least_a = np.maximum(slots.least, ohm[0] / size_a)
    least_b = np.maximum(slots.least, ohm[0] / size_b)
    most_a, most_b = slots.most, slots.most
    if space.request.circuit.twin.through_both:
        most_a, most_b = most_a - least_b, most_b - least_a
    elif Rule.RESISTOR_LIMITS in space.request.lifted:
        most_b = np.full(len(slots), inf)  # nothing charges through it, so no time is endless
    return Windows(
        (least_a, np.minimum(most_a, ohm[-1] * size_a)),
        (least_b, np.minimum(most_b, ohm[-1] * size_b)),
    )
