"""One capacitor charged or discharged through one resistor until a comparator trips.

The timing node is fed from a source through R, loses a constant current I (inputs, switches
that are off) and a current G v through the capacitor's own leak, and moves from one voltage to
another. With the source replaced by its Thevenin equivalent,

    t = R' C ln((Vinf - V0) / (Vinf - V1)),  R' = R / (1 + R G),  Vinf = (Vs - R I) / (1 + R G),

which is first-year network theory and the root of every formula in the families' files.

`swing_time` is that line, on arrays. `Phase` is one such movement with the device's figures
fixed, written as seen from where it starts: it rises by a fraction `threshold` of the `swing`
between start and source. A falling node is the same thing upside down, with losses that help:
`rising` and `falling` make both. In these terms

    t = R' C ln((Vinf - V0) / (Vinf - a S)),  V0 = S r / (R + r),

with S the swing, a the threshold and r a switch that holds the node down before the start. The
time runs from 0 to infinity while R runs from r (1 - a) / a, where the node already rests at
the trip point, to the resistance at which the losses take all that R can supply.

Arrays are float64 and broadcast against each other; scalars are accepted anywhere.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import inf, log1p

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]

_BLOCK = 8192  # elements solved together: the dozen temporaries of a step stay in the cache
_STEPS = 60  # four are usual; this many are never needed (tests sweep the whole domain)
_SETTLED = 1e-15  # step in R (relative) times step in R or w: what the next step would change
_NEAR_END = 0.01  # counts for w where R is within rounding of Rmax and steps in w are noise
_SHORT = 0.25  # steps in w below which three terms of a series do
_FAR = 40.0  # exp(-40) is below rounding


def swing_time(
    r: ArrayLike,
    c: ArrayLike,
    g: ArrayLike,
    *,
    source: ArrayLike,
    start: ArrayLike,
    stop: ArrayLike,
    loss: ArrayLike = 0.0,
) -> Array:
    """Return how long a node takes from one voltage to another; voltages in any common unit.

    Parameters
    ----------
    r : resistance to the source in ohm, > 0. c : capacitance in farad.
    g : leak conductance across the capacitor in siemens.
    source, start, stop : voltages, all as fractions of the supply, say.
    loss : constant current out of the node, in ampere per unit of voltage (siemens).

    Returns
    -------
    Second, of the broadcast shape; infinity where the source does not pull the node past `stop`.
    """
    r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
    source, start, stop = (np.asarray(x, dtype=np.float64) for x in (source, start, stop))
    widened = 1.0 + r * g
    left = source - r * np.asarray(loss, dtype=np.float64) - stop * widened
    move = (stop - start) * widened
    with np.errstate(divide="ignore", invalid="ignore"):
        time = r / widened * c * np.log1p(move / left)
    time = np.where(np.sign(left) == np.sign(move), time, inf)
    return np.asarray(np.where(move == 0.0, 0.0, time))


@dataclass(frozen=True, slots=True)
class Phase:
    """One movement of the timing node, with the figures of the device fixed.

    Attributes
    ----------
    swing : voltage between the node's start and its source in volt, > 0.
    threshold : where the movement ends, as a fraction of the swing, between 0 and 1.
    leak_current : constant current against the movement in ampere; below zero it helps.
    discharge_resistance : of the switch that holds the node down before the start, in ohm.
    floor : voltage across the capacitor at the start in volt, below zero where it falls: what
        its leak already loses (or helps with) there.
    series : resistance of the source itself in ohm, in series with R.
    factor : the time over R C where it is a plain product, or None; all the other figures but
        the threshold are then nothing, and the capacitor's leak is ignored.
    """

    swing: float
    threshold: float
    leak_current: float = 0.0
    discharge_resistance: float = 0.0
    floor: float = 0.0
    series: float = 0.0
    factor: float | None = None

    def times(self, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike) -> tuple[Array, ...]:
        """Return the one time that one resistor makes; see `interval`."""
        return (self.interval(rs[0], c, g),)

    def exactly(self, rs: Sequence[Fraction], c: Fraction) -> tuple[Fraction, ...] | None:
        """Return the same in fractions where the formula is a plain product, else None."""
        return None if self.factor is None else (Fraction(self.factor) * rs[0] * c,)

    def lossless(self) -> Phase:
        """Return the same phase with a device that draws no current."""
        return replace(self, leak_current=0.0)

    def interval(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return how long the movement takes.

        Parameters
        ----------
        r : timing resistance in ohm, > 0; any shape.
        c : timing capacitance in farad, > 0; broadcasts with r.
        g : leak conductance across the capacitor in siemens, >= 0; broadcasts with r.

        Returns
        -------
        Second, of the broadcast shape: infinity where it never ends, 0 where the switch cannot
        bring the node below the trip point.

        See Also
        --------
        resistance : the inverse.
        """
        r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
        if self.factor is not None:
            return np.asarray(r * c * self.factor + 0.0 * g)
        r = r + self.series
        widened = 1.0 + r * g
        left = self._left(r, g)
        rise = (self.threshold - self._start(r)) * widened
        with np.errstate(divide="ignore", invalid="ignore"):
            time = r / widened * c * np.log1p(rise / left)
        return np.asarray(np.where(left > 0.0, np.where(rise > 0.0, time, 0.0), inf))

    def sensitivity(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return d ln t / d ln R: by how many percent the time grows with one percent of R.

        Parameters
        ----------
        r, c, g : as for `interval`; the capacitance only lends its shape.

        Returns
        -------
        Dimensionless, of the broadcast shape. Exactly 1 for a plain product; never below 1 where
        the node rises from 0 V and the source has no resistance of its own; infinity where the
        time is 0 or endless. It is the derivative of the formula of the module.
        """
        r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
        flat = np.zeros(np.broadcast_shapes(r.shape, c.shape, g.shape))
        if self.factor is not None:
            return flat + 1.0
        share = r / (r + self.series)
        r = r + self.series
        widened = 1.0 + r * g
        left = self._left(r, g)
        rise = (self.threshold - self._start(r)) * widened
        with np.errstate(divide="ignore", invalid="ignore"):
            grown = 1.0 / widened + r * self._log_slope(r, g, widened, left) / np.log1p(rise / left)
        if self.proportional:
            # The exact value is never below 1; the last bit of a quotient may be.
            grown = np.maximum(grown, 1.0)
        return np.asarray(np.where((left > 0.0) & (rise > 0.0), grown * share, inf) + flat)

    def resistance(self, t: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the timing resistance that makes a time: the inverse of `interval`.

        Parameters
        ----------
        t : wanted time in second, > 0; any shape.
        c : timing capacitance in farad, > 0; broadcasts with t.
        g : leak conductance across the capacitor in siemens, >= 0; broadcasts with t.

        Returns
        -------
        Ohm, of the broadcast shape, to a relative accuracy of 1e-12; not above zero where the
        source's own resistance is too much already; infinity where no resistance is enough
        (losses beat the switch, or a leak that helps ends the time sooner). Where the wanted
        time is dozens of time constants long it comes so close to the resistance at which the
        time never ends that the time computed back from it is only as accurate as
        `sensitivity` allows.

        See Also
        --------
        interval : the inverse.
        """
        t, c, g = (np.asarray(values, dtype=np.float64) for values in (t, c, g))
        if self.factor is not None:
            return np.asarray(t / (c * self.factor) + 0.0 * g)
        ratio, leak = np.broadcast_arrays(t / c, g)
        flat_ratio, flat_leak = ratio.ravel(), leak.ravel()
        found = np.empty(flat_ratio.size)
        for start in range(0, found.size, _BLOCK):
            block = slice(start, start + _BLOCK)
            found[block] = self._solved(flat_ratio[block], flat_leak[block])
        return found.reshape(ratio.shape) - self.series

    @property
    def proportional(self) -> bool:
        """Whether the time surely grows at least in proportion to R, whatever leaks."""
        return self.floor >= 0.0 and self.leak_current >= 0.0 and self.series == 0.0

    @property
    def starts_from(self) -> float:
        """The resistance in ohm up to which the node rests at the trip point or above."""
        held = self.discharge_resistance * (1.0 - self.threshold) / self.threshold
        return max(held - self.series, 0.0)

    def endless_from(self, g: ArrayLike) -> Array:
        """Return the resistance in ohm from which on the time never ends, for leaks in siemens.

        It is (1 - a) / (losses at the trip point over the swing), infinity without losses.
        """
        g = np.asarray(g, dtype=np.float64)
        if self.factor is not None:
            return np.full(g.shape, inf)
        loss = self._loss(g)
        with np.errstate(divide="ignore"):
            most = np.where(loss > 0.0, (1.0 - self.threshold) / np.abs(loss), inf)
        return np.asarray(most - self.series)

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:
        """Return the resistance that still moves `ratio` times what the capacitor leaks.

        Parameters
        ----------
        g : leak conductance in siemens, any shape. ratio : of the currents at the trip point.

        Returns
        -------
        Ohm, of the same shape; infinity where nothing leaks.
        """
        trip = abs(self.floor + self.threshold * self.swing)
        with np.errstate(divide="ignore"):
            lost = ratio * trip * np.asarray(g, dtype=np.float64)
            return np.asarray((1.0 - self.threshold) * self.swing / lost)

    def trip_ratio(self, r: float, g: float) -> float:
        """Return the current through R at the trip point over all losses there.

        Infinity where nothing is lost or losses help, 0 where the trip point lies at or beyond
        the source; at 1 or below the time never ends. R in ohm, the leak conductance in siemens.
        """
        if self.factor is not None:
            return inf
        if self.threshold >= 1.0:
            return 0.0
        loss = float(self._loss(np.asarray(g)))
        if loss <= 0.0:
            return inf
        return (1.0 - self.threshold) / (r + self.series) / loss

    def _start(self, r: Array) -> Array:
        """Return how far up the node starts, as a fraction of the swing."""
        return np.asarray(self.discharge_resistance / (r + self.discharge_resistance))

    def _loss(self, g: Array) -> Array:
        """Return all losses at the trip point in ampere per volt of swing (siemens)."""
        at_trip = self.threshold + self.floor / self.swing
        return np.asarray(self.leak_current / self.swing + at_trip * g)

    def _left(self, r: Array, g: Array) -> Array:
        """Return (Vinf - a S) (1 + R G) / S: what drives the node on at the trip point."""
        return np.asarray((1.0 - self.threshold) - r * self._loss(g))

    def _log_slope(self, r: Array, g: Array, widened: Array, left: Array) -> Array:
        """Return d/dR of ln((Vinf - V0) / (Vinf - a S)) in 1/ohm."""
        start = self._start(r)
        above = left + (self.threshold - start) * widened
        grows = start / (r + self.discharge_resistance) * widened
        falls = (self.leak_current + g * self.floor) / self.swing + start * g
        return np.asarray((grows - falls) / above + self._loss(g) / left)

    def _solved(self, ratio: Array, g: Array) -> Array:
        """Solve R / (1 + R G) x ln(...) = T / C for one block of T / C in ohm.

        Newton's method, with steps measured in w = -ln(1 - R / Rmax): in w the left side is
        nearly a straight line from end to end (its slope only changes from -ln(1 - a) to about
        a), so it converges from the first guess, and a step in w can never pass Rmax.
        """
        a = self.threshold
        loss = self._loss(g)
        least = self.discharge_resistance * (1.0 - a) / a
        hopeless = (least * loss >= 1.0 - a) | (ratio >= self._longest(g))
        if hopeless.any():
            r = np.full_like(ratio, inf)
            rest = ~hopeless
            if rest.any():
                r[rest] = self._solved(ratio[rest], g[rest])
            return r
        nearest = (1.0 - a) * 2.0**-52
        r = (ratio + self.discharge_resistance) / -log1p(-a)
        w = np.maximum(r * loss / (1.0 - a), 1e-300)
        r *= -np.expm1(-w) / w
        for _ in range(_STEPS):
            widened = 1.0 + r * g
            left = np.maximum((1.0 - a) - r * loss, nearest)
            rise = (a - self._start(r)) * widened
            logarithm = np.log(1.0 + rise / left)
            bent = r / widened * self._log_slope(r, g, widened, left)
            step = (ratio - r / widened * logarithm) / (logarithm / (widened * widened) + bent)
            w = step * loss / left
            step *= _bend(w)
            r = np.maximum(r + step, np.maximum(least, 0.125 * r))
            part = np.abs(step) / r
            if np.max(part * np.minimum(part + np.abs(w), _NEAR_END)) < _SETTLED:
                break
        return r

    def _longest(self, g: Array) -> Array:
        """Return T / C in ohm that no resistance reaches, because a leak that helps ends it.

        Without any R the leak alone moves a falling node from V0 to V1 in C / G ln(V0 / V1).
        """
        if self.floor >= 0.0 and self.leak_current >= 0.0:
            return np.full(g.shape, inf)
        helps = -(self.leak_current + g * self.floor)
        slower = -(self.leak_current + g * (self.floor + self.threshold * self.swing))
        with np.errstate(divide="ignore", invalid="ignore"):
            by_leak = np.log(helps / slower) / g
            by_current = self.threshold * self.swing / helps
        longest = np.where(g > 0.0, by_leak, by_current)
        return np.where((helps > 0.0) & (slower > 0.0), longest * (1.0 - 1e-9), inf)


def rising(
    supply: float,
    source: float,
    start: float,
    stop: float,
    *,
    current: float = 0.0,
    switch: float = 0.0,
    series: float = 0.0,
) -> Phase:
    """Return the phase of a node that rises.

    Parameters
    ----------
    supply : in volt. source, start, stop : fractions of the supply, start < stop < source.
    current : out of the node in ampere. switch : that holds it at `start` before, in ohm.
    series : resistance of the source in ohm.
    """
    swing = (source - start) * supply
    threshold = (stop - start) / (source - start)
    return Phase(swing, threshold, current, switch, start * supply, series)


def falling(
    supply: float,
    source: float,
    start: float,
    stop: float,
    *,
    current: float = 0.0,
    series: float = 0.0,
) -> Phase:
    """Return the phase of a node that falls, source < stop < start; see `rising`."""
    swing = (start - source) * supply
    threshold = (start - stop) / (start - source)
    return Phase(swing, threshold, -current, 0.0, -start * supply, series)


def _bend(w: Array) -> Array:
    """Return (1 - exp(-w)) / w, which takes a step in w back to a step in R."""
    if np.max(np.abs(w)) < _SHORT:
        return np.asarray(1.0 / (1.0 + w * (0.5 + w / 12.0)))
    w = np.clip(w, -_FAR, None)
    w[w == 0.0] = 1e-300
    return np.asarray(-np.expm1(-w) / w)
