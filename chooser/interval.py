"""The honest interval of one circuit: nominal, worst corners, spread, and the chance to fit.

Conventions: the parts of one slot err together (one bag, one maker, one meter), so a slot
arrives here as one value with its ends; the two slots and the timer err independently. A
value between its ends counts as equally likely everywhere. The timer's error is normal with
a third of the data-sheet limit as one sigma, cut at that limit: parts beyond it are not sold,
and sheets that print both figures print 1 % typical beside 3 % at most.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import erf, exp, inf, isfinite, log, sqrt

import numpy as np
from numpy.typing import ArrayLike, NDArray

from chooser.circuits.monostable import Drive, earliest, interval, latest, sensitivity, typical
from chooser.circuits.timers import Timer

Array = NDArray[np.float64]

SIGMAS = 3.0
"""The data-sheet limit of the timing error, counted in its sigmas."""

_CELLS = 64  # nodes of a factor that is summed over; the error of the sum is some 1/cells^2
_ROUNDING = 1e-12  # relative; less is no difference
_EDGES = 257  # corners of the table of the factor that is integrated exactly between them


@dataclass(frozen=True, slots=True)
class SlotFacts:
    """What is known of the network in one slot.

    Attributes
    ----------
    value : network value, ohm or farad, > 0.
    low, high : worst-case ends in the same unit, low <= value <= high.
    spread : one sigma relative to the value. shift : mean error relative to the value.
    leak_typical, leak_limit : leak conductance of a capacitor slot in siemens.
    """

    value: float
    low: float
    high: float
    spread: float
    shift: float
    leak_typical: float = 0.0
    leak_limit: float = 0.0


@dataclass(frozen=True, slots=True)
class Outlook:
    """What a circuit will really do.

    Attributes
    ----------
    nominal : interval in second with typical currents and leakage; infinity if it never ends.
    low : shortest interval of any corner in second.
    high : longest interval of any corner in second; None if it may never end.
    mean : expected interval in second, asymmetric tolerances counted.
    spread : one sigma of the relative interval.
    chance : probability, 0 to 1, that a build lands in the accepted band.
    """

    nominal: float
    low: float
    high: float | None
    mean: float
    spread: float
    chance: float


def outlook(
    r: SlotFacts, c: SlotFacts, timer: Timer, supply: float, band: tuple[float, float]
) -> Outlook:
    """Return what the monostable of two slots and a timer will really do.

    Parameters
    ----------
    r, c : the timing resistor and the timing capacitor.
    timer : the timer; with the ideal one only the tolerances of the parts count.
    supply : supply voltage in volt.
    band : lowest and highest accepted interval in second.

    Returns
    -------
    The low corner has R and C at their low ends, no losses, the poorest discharge and the
    fastest timer; the high corner the opposite, with every loss at its limit. The interval
    is monotone in each of them, so no other corner lies outside.
    """
    drive = typical(timer, supply)
    error = timer.timing_error_limit
    nominal = float(interval(r.value, c.value, c.leak_typical, drive))
    low = float(interval(r.low, c.low, 0.0, earliest(timer, supply))) * (1.0 - error)
    high = float(interval(r.high, c.high, c.leak_limit, latest(timer, supply))) * (1.0 + error)
    chance = _chance(r, c, drive, error, band)
    if not isfinite(nominal):
        return Outlook(inf, low, None, inf, inf, chance)
    steep = float(sensitivity(r.value, c.value, c.leak_typical, drive))
    mean = float(mean_of(nominal, steep, r.shift, c.shift))
    spread = float(spread_of(steep, r.spread, c.spread, error))
    return Outlook(nominal, low, high if isfinite(high) else None, mean, spread, chance)


def mean_of(nominal: ArrayLike, steep: ArrayLike, r_shift: ArrayLike, c_shift: ArrayLike) -> Array:
    """Return the expected interval, to first order in the shift of R.

    Parameters
    ----------
    nominal : interval in second. steep : d ln t / d ln R, dimensionless.
    r_shift, c_shift : mean errors of the slots, relative. All broadcast.

    Returns
    -------
    Interval in second, of the broadcast shape.
    """
    nominal, steep, r_shift, c_shift = _arrays(nominal, steep, r_shift, c_shift)
    return np.asarray(nominal * (1.0 + steep * r_shift) * (1.0 + c_shift))


def spread_of(
    steep: ArrayLike, r_spread: ArrayLike, c_spread: ArrayLike, timing_error_limit: float
) -> Array:
    """Return one sigma of the relative interval: slots and timer add in squares.

    Parameters
    ----------
    steep : d ln t / d ln R, dimensionless. r_spread, c_spread : one sigma of each slot,
        relative. All three broadcast.
    timing_error_limit : of the timer, a fraction.

    Returns
    -------
    Dimensionless, of the broadcast shape.
    """
    steep, r_spread, c_spread = _arrays(steep, r_spread, c_spread)
    timer = timing_error_limit / SIGMAS
    return np.asarray(np.sqrt((steep * r_spread) ** 2 + c_spread**2 + timer**2))


def likely_miss(mean_error: ArrayLike, spread: ArrayLike) -> Array:
    """Return the root of the mean square error: sqrt(mean_error^2 + spread^2).

    Parameters
    ----------
    mean_error : error of the expected interval against the target, relative.
    spread : one sigma of the relative interval; broadcasts with mean_error.

    Returns
    -------
    Dimensionless, of the broadcast shape.
    """
    mean_error, spread = _arrays(mean_error, spread)
    return np.asarray(np.sqrt(mean_error**2 + spread**2))


def _arrays(*values: ArrayLike) -> tuple[Array, ...]:
    """Return the values as float64 arrays."""
    return tuple(np.asarray(value, dtype=np.float64) for value in values)


@dataclass(frozen=True, slots=True)
class _Factor:
    """One independent factor of the interval, as a law over its values.

    Attributes
    ----------
    edges : rising values; below: probability of staying below each of them.
    nodes : values to sum over; weights: their probabilities.
    """

    edges: Array
    below: Array
    nodes: Array
    weights: Array

    @property
    def width(self) -> float:
        """How far the factor reaches, on a logarithmic scale."""
        first, last = float(self.edges[0]), float(self.edges[-1])
        if first == last:
            return 0.0
        return inf if first <= 0.0 or not isfinite(last) else log(last / first)


def _chance(
    r: SlotFacts, c: SlotFacts, drive: Drive, error: float, band: tuple[float, float]
) -> float:
    """Return the probability of an interval inside the band.

    The interval is a product: C, times a rising function of R, times the timer's error. The
    factor that reaches furthest is integrated through its distribution function, the other
    two are summed over equal cells: deterministic, good to a few 1e-4, and exact where only
    one of them varies.
    """
    factors = [_of_resistor(r, c, drive), _uniform(c.low, c.high), _of_timer(error)]
    factors.sort(key=lambda factor: factor.width)
    narrow, middle, wide = factors
    if wide.width < _ROUNDING:
        time = float(narrow.nodes[0] * middle.nodes[0] * wide.nodes[0])
        return float(band[0] * (1.0 - _ROUNDING) <= time <= band[1] * (1.0 + _ROUNDING))
    others = np.multiply.outer(narrow.nodes, middle.nodes)
    weights = np.multiply.outer(narrow.weights, middle.weights)
    share = _below(band[1], others, wide) - _below(band[0], others, wide)
    return float(min(max(np.sum(share * weights), 0.0), 1.0))


def _below(time: float, others: Array, wide: _Factor) -> Array:
    """Return the probability of ending before a time (second), given the other factors."""
    ends = np.isfinite(wide.edges)
    if not ends.any():
        return np.zeros_like(others)
    with np.errstate(divide="ignore"):
        wanted = time / others
    return np.asarray(np.interp(wanted, wide.edges[ends], wide.below[ends], left=0.0))


def _of_resistor(r: SlotFacts, c: SlotFacts, drive: Drive) -> _Factor:
    """Return the law of the interval for one farad (ohm), R being anywhere between its ends."""
    plain = _uniform(r.low, r.high)
    edges, nodes = (
        # The formula is linear in C; the slot's leak stays what it is.
        interval(values, 1.0, c.leak_typical, drive)
        for values in (plain.edges, plain.nodes)
    )
    return _Factor(edges, plain.below, nodes, plain.weights)


def _uniform(low: float, high: float) -> _Factor:
    """Return the law of a value that may be anywhere between two ends."""
    edges = np.linspace(low, high, _EDGES)
    below = np.linspace(0.0, 1.0, _EDGES)
    if low == high:
        return _Factor(edges, below, np.array([low]), np.array([1.0]))
    nodes = low + (high - low) * (np.arange(_CELLS) + 0.5) / _CELLS
    return _Factor(edges, below, nodes, np.full(_CELLS, 1.0 / _CELLS))


@lru_cache(maxsize=32)
def _of_timer(limit: float) -> _Factor:
    """Return the law of the timer's own factor around 1."""
    if limit == 0.0:
        return _uniform(1.0, 1.0)
    steps = np.linspace(-SIGMAS, SIGMAS, _EDGES)
    below = np.array([0.5 + 0.5 * erf(z / sqrt(2.0)) / erf(SIGMAS / sqrt(2.0)) for z in steps])
    middles = SIGMAS * ((2.0 * np.arange(_CELLS) + 1.0) / _CELLS - 1.0)
    weights = np.array([exp(-z * z / 2.0) for z in middles])
    sigma = limit / SIGMAS
    return _Factor(1.0 + sigma * steps, below, 1.0 + sigma * middles, weights / weights.sum())
