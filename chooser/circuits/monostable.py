"""The monostable: one capacitor charged through one resistor until a timer trips.

The timing node is charged through R from the supply V. It starts at the voltage V0 that the
timer's discharge switch r leaves there, loses a constant current I (threshold input and
discharge pin) and a current G v through the capacitor's own leak, and the interval ends at
the fraction a of the supply. With the source replaced by its Thevenin equivalent,

    t = R' C ln((Vinf - V0) / (Vinf - a V)),  R' = R / (1 + R G),
    Vinf = (V - R I) / (1 + R G),  V0 = V r / (R + r),

which is first-year network theory; data sheets print the case without losses, R C ln 3,
rounded to 1.1 R C. The interval runs from 0 to infinity while R runs from r (1 - a) / a,
where the node already rests at the trip point, to (1 - a) / (I / V + a G), where the losses
take all the current that R can supply.

Arrays are float64 and broadcast against each other; scalars are accepted anywhere.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, log, log1p

import numpy as np
from numpy.typing import ArrayLike, NDArray

from chooser.circuits.timers import Timer

Array = NDArray[np.float64]

LN3 = log(3.0)
"""Interval over R C of the textbook monostable, which trips at two thirds of the supply."""

LEAST_OHM = 1e3
"""Smallest timing resistor of the fixtures that data sheets give their timing error for."""

MOST_OHM = 10e6
"""Common practice, no source: above it the surface of the board is part of the circuit."""

TRIP_RATIO = 10.0
"""Charging current at the trip point over the timer's own currents that must remain."""

_BLOCK = 8192  # elements solved together: the dozen temporaries of a step stay in the cache
_STEPS = 60  # four are usual; this many are never needed (tests sweep the whole domain)
_SETTLED = 1e-15  # step in R (relative) times step in R or w: what the next step would change
_NEAR_END = 0.01  # counts for w where R is within rounding of Rmax and steps in w are noise
_SHORT = 0.25  # steps in w below which three terms of a series do
_FAR = 40.0  # exp(-40) is below rounding


@dataclass(frozen=True, slots=True)
class Drive:
    """One state of a timer: what it does to the timing node.

    Attributes
    ----------
    supply : supply voltage in volt, > 0.
    threshold : trip point as a fraction of the supply, between 0 and 1.
    leak_current : constant current out of the node in ampere, >= 0.
    discharge_resistance : of the switch that empties the capacitor, in ohm, >= 0.
    ideal : True for the textbook formula; capacitor leakage is then ignored as well.
    """

    supply: float
    threshold: float
    leak_current: float = 0.0
    discharge_resistance: float = 0.0
    ideal: bool = False


def typical(timer: Timer, supply: float) -> Drive:
    """Return the timer as its typical figures describe it; supply in volt."""
    return Drive(
        supply,
        timer.threshold,
        timer.threshold_current_typical + timer.discharge_leakage_typical,
        timer.discharge_resistance_typical,
        timer.ideal,
    )


def earliest(timer: Timer, supply: float) -> Drive:
    """Return the corner of shortest intervals: no currents, poorest discharge; supply in volt."""
    return Drive(supply, timer.threshold, 0.0, timer.discharge_resistance_limit, timer.ideal)


def latest(timer: Timer, supply: float) -> Drive:
    """Return the corner of longest intervals: limit currents, full discharge; supply in volt."""
    current = timer.threshold_current_limit + timer.discharge_leakage_limit
    return Drive(supply, timer.threshold, current, 0.0, timer.ideal)


def interval(r: ArrayLike, c: ArrayLike, g: ArrayLike, drive: Drive) -> Array:
    """Return how long the output stays on.

    Parameters
    ----------
    r : timing resistance in ohm, > 0; any shape.
    c : timing capacitance in farad, > 0; broadcasts with r.
    g : leak conductance across the capacitor in siemens, >= 0; broadcasts with r.
    drive : state of the timer.

    Returns
    -------
    Interval in second, of the broadcast shape: infinity where it never ends, 0 where the
    discharge switch cannot bring the node below the trip point. Exactly R C ln 3 if ideal.

    See Also
    --------
    resistance : the inverse.
    """
    r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
    if drive.ideal:
        return np.asarray(r * c * LN3 + 0.0 * g)
    spread = 1.0 + r * g
    left = _left(r, g, drive)
    rise = (drive.threshold - _start(r, drive)) * spread
    with np.errstate(divide="ignore", invalid="ignore"):
        time = r / spread * c * np.log1p(rise / left)
    return np.asarray(np.where(left > 0.0, np.where(rise > 0.0, time, 0.0), inf))


def sensitivity(r: ArrayLike, c: ArrayLike, g: ArrayLike, drive: Drive) -> Array:
    """Return d ln t / d ln R: by how many percent the interval grows with one percent of R.

    Parameters
    ----------
    r, c, g, drive : as for `interval`; the capacitance only lends its shape.

    Returns
    -------
    Dimensionless, of the broadcast shape, never below 1: exactly 1 if ideal, infinity where
    the interval is 0 or never ends. It is the derivative of the formula of the module.
    """
    r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
    flat = np.zeros(np.broadcast_shapes(r.shape, c.shape, g.shape))
    if drive.ideal:
        return flat + 1.0
    spread = 1.0 + r * g
    left = _left(r, g, drive)
    rise = (drive.threshold - _start(r, drive)) * spread
    with np.errstate(divide="ignore", invalid="ignore"):
        grown = 1.0 / spread + r * _log_slope(r, g, spread, left, drive) / np.log1p(rise / left)
    # The exact value is never below 1; the last bit of a quotient may be.
    grown = np.maximum(grown, 1.0)
    return np.asarray(np.where((left > 0.0) & (rise > 0.0), grown, inf) + flat)


def resistance(t: ArrayLike, c: ArrayLike, g: ArrayLike, drive: Drive) -> Array:
    """Return the timing resistance that makes an interval: the inverse of `interval`.

    Parameters
    ----------
    t : wanted interval in second, > 0; any shape.
    c : timing capacitance in farad, > 0; broadcasts with t.
    g : leak conductance across the capacitor in siemens, >= 0; broadcasts with t.
    drive : state of the timer.

    Returns
    -------
    Resistance in ohm, of the broadcast shape, to a relative accuracy of 1e-12. There is always
    one, save where losses beat the discharge switch itself (infinity is returned). Where the
    wanted interval is dozens of time constants long it comes so close to the resistance at
    which the interval never ends that the interval computed back from it is only as accurate
    as `sensitivity` allows.

    See Also
    --------
    interval : the inverse.
    """
    t, c, g = (np.asarray(values, dtype=np.float64) for values in (t, c, g))
    if drive.ideal:
        return np.asarray(t / (c * LN3) + 0.0 * g)
    ratio, leak = np.broadcast_arrays(t / c, g)
    flat_ratio, flat_leak = ratio.ravel(), leak.ravel()
    found = np.empty(flat_ratio.size)
    for start in range(0, found.size, _BLOCK):
        block = slice(start, start + _BLOCK)
        found[block] = _solved(flat_ratio[block], flat_leak[block], drive)
    return found.reshape(ratio.shape)


def limits(timer: Timer, supply: float) -> tuple[float, float]:
    """Return the least and the most resistance that the house rule allows for a timing resistor.

    While the timer rests its discharge switch carries supply / R, so R must keep that below
    the current the switch is specified for, and it must not be below the 1 kohm at which the
    data sheets' timing-error fixtures start. At the trip point only supply x (1 - a) / R is
    left for charging; where that equals the timer's own currents the interval never ends
    (15 V and 250 nA make 20 Mohm, as LM555 and HA17555 sheets print), and a tenth of that
    resistance keeps the currents' part of the interval below 7 %. Above 10 Mohm ordinary
    boards leak as much as the parts do (common practice, no source).

    Parameters
    ----------
    timer : the timer. supply : supply voltage in volt, > 0.

    Returns
    -------
    Two resistances in ohm; (0, infinity) for the ideal timer.
    """
    if timer.ideal:
        return 0.0, inf
    least = max(LEAST_OHM, supply / timer.discharge_current_limit)
    current = timer.threshold_current_limit + timer.discharge_leakage_limit
    if current == 0.0:
        return least, MOST_OHM
    most = supply * (1.0 - timer.threshold) / (TRIP_RATIO * current)
    return least, min(most, MOST_OHM)


def starts_from(drive: Drive) -> float:
    """Return the resistance in ohm up to which the node rests at the trip point or above.

    There the discharge switch r cannot bring it below: r (1 - a) / a; 0 if ideal.
    """
    if drive.ideal:
        return 0.0
    return drive.discharge_resistance * (1.0 - drive.threshold) / drive.threshold


def endless_from(g: ArrayLike, drive: Drive) -> Array:
    """Return the resistance from which on the interval never ends.

    Parameters
    ----------
    g : leak conductance in siemens, any shape. drive : state of the timer.

    Returns
    -------
    Ohm, of the same shape: (1 - a) / (I / V + a G), infinity without losses.
    """
    g = np.asarray(g, dtype=np.float64)
    if drive.ideal:
        return np.full(g.shape, inf)
    with np.errstate(divide="ignore"):
        return np.asarray((1.0 - drive.threshold) / _loss(g, drive))


def trip_ratio(r: float, g: float, drive: Drive) -> float:
    """Return the charging current at the trip point over all losses there (dimensionless).

    Parameters
    ----------
    r : timing resistance in ohm, > 0. g : leak conductance in siemens. drive : the timer.

    Returns
    -------
    Infinity without losses; at 1 or below the interval never ends.
    """
    if drive.ideal:
        return inf
    loss = drive.leak_current + g * drive.threshold * drive.supply
    charging = drive.supply * (1.0 - drive.threshold) / r
    return inf if loss == 0.0 else charging / loss


def _start(r: Array, drive: Drive) -> Array:
    """Return the voltage the node starts from, as a fraction of the supply."""
    return np.asarray(drive.discharge_resistance / (r + drive.discharge_resistance))


def _loss(g: Array, drive: Drive) -> Array:
    """Return all losses at the trip point in ampere per volt of supply (siemens)."""
    return np.asarray(drive.leak_current / drive.supply + drive.threshold * g)


def _left(r: Array, g: Array, drive: Drive) -> Array:
    """Return (Vinf - a V) (1 + R G) / V: what drives the charging at the trip point."""
    return np.asarray((1.0 - drive.threshold) - r * _loss(g, drive))


def _log_slope(r: Array, g: Array, spread: Array, left: Array, drive: Drive) -> Array:
    """Return d/dR of ln((Vinf - V0) / (Vinf - a V)) in 1/ohm."""
    start = _start(r, drive)
    above = left + (drive.threshold - start) * spread
    grows = start / (r + drive.discharge_resistance) * spread
    falls = drive.leak_current / drive.supply + start * g
    return np.asarray((grows - falls) / above + _loss(g, drive) / left)


def _solved(ratio: Array, g: Array, drive: Drive) -> Array:
    """Solve R / (1 + R G) x ln(...) = T / C for one block of T / C in ohm.

    Newton's method, with steps measured in w = -ln(1 - R / Rmax): in w the left side is nearly
    a straight line from end to end (its slope only changes from -ln(1 - a) to about a), so it
    converges from the first guess, and a step in w can never pass Rmax.
    """
    a = drive.threshold
    loss = _loss(g, drive)
    least = drive.discharge_resistance * (1.0 - a) / a
    hopeless = least * loss >= 1.0 - a
    if hopeless.any():
        r = np.full_like(ratio, inf)
        rest = ~hopeless
        if rest.any():
            r[rest] = _solved(ratio[rest], g[rest], drive)
        return r
    nearest = (1.0 - a) * 2.0**-52
    r = (ratio + drive.discharge_resistance) / -log1p(-a)
    w = np.maximum(r * loss / (1.0 - a), 1e-300)
    r *= -np.expm1(-w) / w
    for _ in range(_STEPS):
        spread = 1.0 + r * g
        left = np.maximum((1.0 - a) - r * loss, nearest)
        rise = (a - _start(r, drive)) * spread
        logarithm = np.log(1.0 + rise / left)
        slope = logarithm / (spread * spread) + r / spread * _log_slope(r, g, spread, left, drive)
        step = (ratio - r / spread * logarithm) / slope
        w = step * loss / left
        step *= _bend(w)
        r = np.maximum(r + step, np.maximum(least, 0.125 * r))
        part = np.abs(step) / r
        if np.max(part * np.minimum(part + np.abs(w), _NEAR_END)) < _SETTLED:
            break
    return r


def _bend(w: Array) -> Array:
    """Return (1 - exp(-w)) / w, which takes a step in w back to a step in R."""
    if np.max(np.abs(w)) < _SHORT:
        return np.asarray(1.0 / (1.0 + w * (0.5 + w / 12.0)))
    w = np.clip(w, -_FAR, None)
    w[w == 0.0] = 1e-300
    return np.asarray(-np.expm1(-w) / w)
