"""From boxes of high and low times to windows of RA and RB, by interval arithmetic.

The high time grows with both resistors; the low time grows with RB and falls, if anything, with
RA. So the ends of a box of times, put through the circuit's inverses with the right ends of the
other resistor, are ends of windows that miss nothing.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import inf

import numpy as np

from chooser.circuits.laws import TwinLaw, solved
from chooser.search.pools import Floats, Ints
from chooser.search.request import Target
from chooser.search.slots import CapacitorSlots

MARGIN = 1e-9
"""Windows are widened by this, relative: far more than the inverses are off."""

_ROUNDS = 4  # of interval arithmetic; the circuits couple weakly, so the first two do nearly all


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
