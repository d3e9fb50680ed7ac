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
from dataclasses import dataclass, replace
from math import inf, log, sqrt

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.circuit import outputs_of
from chooser.circuits.laws import TwinLaw, solved
from chooser.search.pairs import SAME, Pairs
from chooser.search.pools import Floats, Ints
from chooser.search.request import Request, Target
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Level, Space
from chooser.search.tables import Rows, Tables, allowed
from chooser.search.terms import Rule
from chooser.search.windows import find_in_windows

MARGIN = 1e-9
"""Windows are widened by this, relative: far more than the inverses are off."""

WIDER = 4.0
"""Factor from one try's error to the next."""

_ROUNDS = 4  # of interval arithmetic; the circuits couple weakly, so the first two do nearly all
_FARTHEST = 1e6  # errors beyond are not told apart by windows


@dataclass(frozen=True, slots=True)
class Box:
    """Times that an error leaves open: ends of each, in second; of the duty as fractions."""

    high: tuple[float, float] = (0.0, inf)
    low: tuple[float, float] = (0.0, inf)
    period: tuple[float, float] = (0.0, inf)
    duty: tuple[float, float] = (0.0, 1.0)


def box_of(targets: tuple[Target, ...], error: float, *, ranges_hold: bool = False) -> Box:
    """Return what the targets leave open within an error; ranges that hold are not widened."""
    box = Box()
    for target in targets:
        slack = MARGIN if ranges_hold and target.is_range else error
        ends = max(target.low * (1 - slack), 0.0), target.high * (1 + slack)
        if target.output == "duty":
            ends = ends[0], min(ends[1], 1.0)
        box = replace(box, **{target.output: ends})
    (p0, p1), (d0, d1) = box.period, box.duty
    high = max(box.high[0], p0 * d0), min(box.high[1], p1 * d1 if d1 else 0.0)
    low = max(box.low[0], p0 * (1 - d1)), min(box.low[1], p1 * (1 - d0) if d0 < 1 else 0.0)
    return replace(box, high=high, low=low)


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


@dataclass(frozen=True, slots=True)
class Windows:
    """Ends of RA and RB in ohm, (n,) each; empty where an upper end is below its lower one."""

    ra: tuple[Floats, Floats]
    rb: tuple[Floats, Floats]

    @property
    def open(self) -> Ints:
        """Numbers of the windows that are not empty."""
        return np.flatnonzero((self.ra[0] <= self.ra[1]) & (self.rb[0] <= self.rb[1]))

    def only(self, kept: Ints) -> Windows:
        """Return some of the windows."""
        (a, b), (c, d) = self.ra, self.rb
        return Windows((a[kept], b[kept]), (c[kept], d[kept]))

    def changed(self, kept: Ints, others: Windows) -> Windows:
        """Return the windows with some of them replaced."""
        ends = [end.copy() for end in (*self.ra, *self.rb)]
        for end, new in zip(ends, (*others.ra, *others.rb), strict=True):
            end[kept] = new
        return Windows((ends[0], ends[1]), (ends[2], ends[3]))

    def within(self, other: Windows) -> Windows:
        """Return what these windows and others have in common."""
        (a, b), (c, d) = self.ra, self.rb
        (e, f), (g, h) = other.ra, other.rb
        return Windows((np.maximum(a, e), np.minimum(b, f)), (np.maximum(c, g), np.minimum(d, h)))

    def moved_from(self, before: Windows) -> float:
        """Return how far any end has moved, relative."""
        pairs = zip((*self.ra, *self.rb), (*before.ra, *before.rb), strict=True)
        with np.errstate(invalid="ignore"):
            moved = [np.abs(new / old - 1) for new, old in pairs]
        return float(np.max(np.nan_to_num(moved, nan=0.0), initial=0.0))


class Inverse:
    """The circuit backwards, for intervals: from boxes of times to windows of resistance.

    Parameters
    ----------
    law : the circuit's. slots : the capacitor networks. reach : the widest windows of any level.
    """

    def __init__(self, law: TwinLaw, slots: CapacitorSlots, reach: Windows) -> None:
        self._law = law
        self._slots = slots
        self._known: list[tuple[float, Windows]] = [(inf, reach)]

    def windows(self, box: Box, error: float) -> Windows:
        """Return the windows that hold every RA and RB whose times lie in a box.

        Parameters
        ----------
        box : of times, what an error leaves open. error : that error; the windows of a larger
            one hold those of a smaller one, so each time only starts from the last.

        Returns
        -------
        One for each capacitor network.
        """
        whole = min((each for each in self._known if each[0] >= error), key=lambda each: each[0])[1]
        for _ in range(_ROUNDS):
            slot = whole.open
            before = whole.only(slot)
            after = self._narrowed(box, before, slot)
            whole = whole.changed(slot, after)
            if after.moved_from(before) < 0.1 * min(error, 1.0):
                break
        self._known.append((error, whole))
        return whole

    def _narrowed(self, box: Box, ends: Windows, slot: Ints) -> Windows:
        (a0, a1), (b0, b1) = ends.ra, ends.rb
        c, g = self._parts(slot)
        high, low = self._times_left(box, ends, slot)
        b1 = np.minimum(b1, self._rb_for(low[1], np.maximum(a1, a0), c, g) * (1 + MARGIN))
        b0 = np.maximum(b0, self._rb_for(low[0], a0, c, g) * (1 - MARGIN))
        most = self._ra_for(high[1], np.minimum(b0, b1), c, g)
        a1 = np.minimum(a1, most + MARGIN * np.abs(most) + MARGIN * b0)
        least = self._ra_for(high[0], np.maximum(b1, b0), c, g)
        a0 = np.maximum(a0, least - MARGIN * np.abs(least) - MARGIN * b1)
        if self._law.through_both:
            whole = self._slots.most[slot] * (1 + MARGIN)
            a1, b1 = np.minimum(a1, whole - b0), np.minimum(b1, whole - a0)
        return Windows((a0, a1), (b0, b1))

    def _times_left(
        self, box: Box, ends: Windows, slot: Ints
    ) -> tuple[tuple[Floats, Floats], tuple[Floats, Floats]]:
        """Return the ends of the high and low times that a box and the windows leave together."""
        full = np.ones(len(slot))
        high, low = ((full * least, full * most) for least, most in (box.high, box.low))
        if box.period == (0.0, inf):
            return high, low
        least, most = self._extremes(ends, slot)
        p0, p1 = box.period
        with np.errstate(invalid="ignore"):
            return (
                np.fmax(high[0], (p0 - most[1]) * (1 - MARGIN)),
                np.fmin(high[1], (p1 - least[1]) * (1 + MARGIN)),
            ), (
                np.fmax(low[0], (p0 - most[0]) * (1 - MARGIN)),
                np.fmin(low[1], (p1 - least[0]) * (1 + MARGIN)),
            )

    def _extremes(
        self, ends: Windows, slot: Ints
    ) -> tuple[tuple[Floats, Floats], tuple[Floats, Floats]]:
        """Return the least and the most that the high and the low time can be in the windows."""
        (a0, a1), (b0, b1) = ends.ra, ends.rb
        c, g = self._parts(slot)
        high0, low1 = self._law.times((a0, b0), c, g)[0], self._law.times((a0, b1), c, g)[1]
        high1, low0 = self._law.times((a1, b1), c, g)[0], self._law.times((a1, b0), c, g)[1]
        if self._law.through_both:
            # All that both may come to, RA taking as much of it as it could.
            bounded = np.isfinite(self._slots.most[slot])
            rest = np.where(bounded, np.maximum(self._slots.most[slot] - b0, a0), a1)
            whole = self._law.times((rest, b0), c, g)[0]
            high1 = np.where(bounded, np.minimum(high1, whole), high1)
        return (high0, low0), (high1, low1)

    def _rb_for(self, low: Floats, ra: Floats, c: Floats, g: Floats) -> Floats:
        """Return the RB for each low time; nothing for none, no end for an endless one."""
        known = np.isfinite(low) & (low > 0)
        found = np.where(low > 0, inf, 0.0)
        if known.any():
            found[known] = self._law.rb_for(low[known], ra[known], c[known], g[known])
        return found

    def _ra_for(self, high: Floats, rb: Floats, c: Floats, g: Floats) -> Floats:
        """Return the RA for each high time; less than nothing for none, no end for endless."""
        known = np.isfinite(high) & (high > 0)
        found = np.where(high > 0, inf, -rb)
        if known.any():
            found[known] = self._law.ra_for(high[known], rb[known], c[known], g[known])
        return found

    def least_errors(self, targets: tuple[Target, ...], reach: Windows) -> Floats:
        """Return, for each capacitor network, an error that no circuit in reach can be below."""
        slot = reach.open
        found = np.full(len(self._slots), inf)
        if not len(slot):
            return found
        least, most = self._extremes(reach.only(slot), slot)
        ends = {
            "high": (least[0], most[0]),
            "low": (least[1], most[1]),
            "period": (least[0] + least[1], most[0] + most[1]),
        }
        need = np.zeros(len(slot))
        for target in targets:
            if target.output in ends:
                shortest, longest = ends[target.output]
                with np.errstate(over="ignore"):
                    need = np.maximum(need, 1 - longest / target.low)
                    need = np.maximum(need, shortest / target.high - 1)
        found[slot] = need * (1 - MARGIN)
        return found

    def ra_beside(self, box: Box, rb: Floats, ra: tuple[Floats, Floats], slot: Ints) -> Windows:
        """Return the RA that completes each RB, within its window."""
        c, g = self._parts(slot)
        a0, a1 = ra
        if self._law.through_both:
            a1 = np.minimum(a1, self._slots.most[slot] * (1 + MARGIN) - rb)
        for _ in range(_ROUNDS if box.period[1] < inf else 1):
            low0 = self._law.times((np.maximum(a1, a0), rb), c, g)[1]
            low1 = self._law.times((a0, rb), c, g)[1]
            high0, high1 = self._high_beside(box, low0, low1)
            most = self._law.ra_for(high1, rb, c, g)
            a1 = np.minimum(a1, most + MARGIN * (np.abs(most) + rb))
            least = self._law.ra_for(high0, rb, c, g)
            a0 = np.maximum(a0, least - MARGIN * (np.abs(least) + rb))
        return Windows((a0, a1), (rb, rb))

    def _high_beside(self, box: Box, low0: Floats, low1: Floats) -> tuple[Floats, Floats]:
        """Return the high times that a low time between two ends leaves open."""
        d0, d1 = box.duty
        high0 = np.maximum(box.high[0], box.period[0] - low1)
        high1 = np.minimum(box.high[1], box.period[1] - low0)
        high0 = np.maximum(high0, d0 / (1 - d0) * low0)
        if d1 < 1:
            high1 = np.minimum(high1, d1 / (1 - d1) * low1)
        tiny = 1e-12 * np.maximum(low1, 1e-12)
        return np.maximum(high0, tiny), np.maximum(high1, tiny)

    def rb_beside(self, box: Box, ra: Floats, rb: tuple[Floats, Floats], slot: Ints) -> Windows:
        """Return the RB that completes each RA, within its window."""
        c, g = self._parts(slot)
        b0, b1 = rb
        if box.period[1] < inf:
            guess = np.sqrt(np.maximum(b0, 1e-3) * np.maximum(b1, 1e-3))

            def period(r: Floats) -> Floats:
                return np.asarray(np.sum(self._law.times((ra, r), c, g), axis=0))

            b1 = np.minimum(b1, solved(period, box.period[1], guess) * (1 + MARGIN))
            if box.period[0] > 0:
                b0 = np.maximum(b0, solved(period, box.period[0], guess) * (1 - MARGIN))
        if self._law.through_both:
            b1 = np.minimum(b1, self._slots.most[slot] * (1 + MARGIN) - ra)
            b1 = np.minimum(b1, self._rb_for_high(box.high[1], ra, c, g) * (1 + MARGIN))
            b0 = np.maximum(b0, self._rb_for_high(box.high[0], ra, c, g) * (1 - MARGIN))
        if box.low[1] < inf:
            b1 = np.minimum(b1, self._law.rb_for(box.low[1], ra, c, g) * (1 + MARGIN))
        if box.low[0] > 0:
            b0 = np.maximum(b0, self._law.rb_for(box.low[0], ra, c, g) * (1 - MARGIN))
        return Windows((ra, ra), (b0, b1))

    def _rb_for_high(self, high: float, ra: Floats, c: Floats, g: Floats) -> Floats:
        """Return the RB that makes a high time beside each RA; 0 where RA is too much already."""
        if not 0.0 < high < inf:
            return np.full(len(ra), inf if high > 0 else 0.0)
        # Either resistor does nearly the same for the high time.
        guess = self._law.ra_for(high, ra, c, g)

        def time(rb: Floats) -> Floats:
            return self._law.times((ra, rb), c, g)[0]

        found = solved(time, high, np.where(guess > 0, guess, 1.0))
        return np.asarray(np.where(time(np.zeros(len(ra))) < high, found, 0.0))

    def _parts(self, slot: Ints) -> tuple[Floats, Floats]:
        return self._slots.farad[slot], self._slots.leak[slot]


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
