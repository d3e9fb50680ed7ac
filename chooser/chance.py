"""The chance that a build lands in every accepted band, by deterministic sums.

The times of a circuit are linear in C and in the device's own factor, so a build is the product
of one common factor, C times device, and of what the resistors make of one farad. Where there
is one resistor and one band, the factor that reaches furthest is integrated through its
distribution function and the other two are summed over (good to a few 1e-4); else the
resistors are summed over and the common factor is integrated (good to about 2e-3).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import erf, exp, inf, isfinite, log, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.circuit import TIMED, Circuit, outputs_of
from chooser.parts import Tolerance
from chooser.slot_facts import SlotFacts

Array = NDArray[np.float64]
Band = tuple[float, float]

SIGMAS = 3.0
"""The data-sheet limit of a device's error, counted in its sigmas."""

_CELLS = 64  # nodes of a factor that is summed over; the error of the sum is some 1/cells^2
_GRIDS = (1, 4096, 128)  # cells of each of so many resistors that are summed over
_ROUNDING = 1e-12  # relative; less is no difference
_EDGES = 257  # corners of the table of the factor that is integrated exactly between them
_FINE_EDGES = 2049  # the same where two factors have been put together


@dataclass(frozen=True, slots=True)
class DeviceLaw:
    """How a device's own factor scatters. spread : one sigma. shift : mean error."""

    spread: float
    shift: float


@lru_cache(maxsize=64)
def device_law(error: Tolerance) -> DeviceLaw:
    """Return spread and shift of a device's factor with given limits.

    Symmetric limits count a third as one sigma (the cut at the limit is not taken off it).
    With unequal ones the law is a normal one to either side of the usual value, half of the
    devices on each; its moments are those of two half normal laws.
    """
    down, up = error.minus / SIGMAS, error.plus / SIGMAS
    shift = (up - down) / sqrt(2.0 * pi)
    return DeviceLaw(sqrt((up**2 + down**2) / 2.0 - shift**2), shift)


@dataclass(frozen=True, slots=True)
class _Factor:
    """One independent factor of a time, as a law over its values.

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


def chance_of(
    circuit: Circuit,
    rs: Sequence[SlotFacts],
    c: SlotFacts,
    bands: Mapping[str, Band],
    scale: float,
) -> float:
    """Return the probability, 0 to 1, of outputs inside all bands.

    Parameters
    ----------
    circuit, rs, c, bands, scale : as for `chooser.interval.outlook`.
    """
    if not bands:
        return 1.0
    chief = circuit.outputs[0]
    if len(rs) == 1 and set(bands) == {chief}:
        low, high = bands[chief]
        return _of_three(circuit, rs[0], c, (low / scale, high / scale))
    return _of_grid(circuit, rs, c, bands, scale)


def _of_three(circuit: Circuit, r: SlotFacts, c: SlotFacts, band: Band) -> float:
    """Return the chance of one time of R, C and the device: the widest is integrated exactly."""
    factors = [_of_resistor(r, c, circuit), _uniform(c.low, c.high), _of_device(circuit.error)]
    factors.sort(key=lambda factor: factor.width)
    narrow, middle, wide = factors
    if wide.width < _ROUNDING:
        time = float(narrow.nodes[0] * middle.nodes[0] * wide.nodes[0])
        return float(band[0] * (1.0 - _ROUNDING) <= time <= band[1] * (1.0 + _ROUNDING))
    others = np.multiply.outer(narrow.nodes, middle.nodes)
    weights = np.multiply.outer(narrow.weights, middle.weights)
    # Both ends belong to the band, and a device that is never fast has half its law in one point.
    share = _below(band[1] * (1.0 + _ROUNDING), others, wide)
    share -= _below(band[0] * (1.0 - _ROUNDING), others, wide)
    return _probability(float(np.sum(share * weights)))


def _below(time: float, others: Array, wide: _Factor) -> Array:
    """Return the probability of ending before a time (second), given the other factors."""
    ends = np.isfinite(wide.edges)
    if not ends.any():
        return np.zeros_like(others)
    with np.errstate(divide="ignore"):
        wanted = time / others
    return np.asarray(np.interp(wanted, wide.edges[ends], wide.below[ends], left=0.0))


def _of_resistor(r: SlotFacts, c: SlotFacts, circuit: Circuit) -> _Factor:
    """Return the law of the chief time for one farad (ohm), R being anywhere between its ends."""
    plain = _uniform(r.low, r.high)
    edges, nodes = (
        # The formula is linear in C; the slot's leak stays what it is.
        np.asarray(np.sum(circuit.typical.times((values,), 1.0, c.leak_typical), axis=0))
        for values in (plain.edges, plain.nodes)
    )
    return _Factor(edges, plain.below, nodes, plain.weights)


def _of_grid(
    circuit: Circuit,
    rs: Sequence[SlotFacts],
    c: SlotFacts,
    bands: Mapping[str, Band],
    scale: float,
) -> float:
    """Return the chance by summing over equal cells of all resistors."""
    cells = _GRIDS[len(rs)]
    axes = [r.low + (r.high - r.low) * (np.arange(cells) + 0.5) / cells for r in rs]
    values = [axis.ravel() for axis in np.meshgrid(*axes, indexing="ij")]
    with np.errstate(invalid="ignore", divide="ignore"):
        times = circuit.typical.times(values, 1.0, c.leak_typical)
        made = outputs_of(circuit, [scale * np.atleast_1d(time) for time in times])
    least, most = np.zeros(len(made[circuit.outputs[0]])), np.full(1, inf)
    fine = np.isfinite(made[circuit.outputs[0]])
    for output, (low, high) in _by_times(bands):
        with np.errstate(invalid="ignore", divide="ignore"):
            if output not in (*TIMED, "capacitance"):
                fine &= made[output] >= low * (1.0 - _ROUNDING)
                fine &= made[output] <= high * (1.0 + _ROUNDING)
                continue
            least = np.fmax(least, low / made[output])
            most = np.fmin(most, high / made[output])
    common = _product(_uniform(c.low, c.high), _of_device(circuit.error))
    share = np.maximum(
        _cumulated(most * (1 + _ROUNDING), common) - _cumulated(least * (1 - _ROUNDING), common),
        0.0,
    )
    return _probability(float(np.mean(np.where(fine, share, 0.0))))


def _by_times(bands: Mapping[str, Band]) -> Iterator[tuple[str, Band]]:
    """Yield the bands with that of a frequency as the period's: only times grow with C."""
    for output, (low, high) in bands.items():
        if output == "frequency":
            yield "period", (1.0 / high, 1.0 / low if low > 0.0 else inf)
        else:
            yield output, (low, high)


def _cumulated(value: Array, common: _Factor) -> Array:
    """Return the probability of a common factor of at most `value`."""
    if common.width < _ROUNDING:
        # A jump; `least` is just below it and `most` just above where it is on the edge.
        return np.asarray(value >= common.nodes[0], dtype=np.float64)
    return np.asarray(np.interp(value, common.edges, common.below, left=0.0, right=1.0))


def _product(one: _Factor, other: _Factor) -> _Factor:
    """Return the law of the product of two factors."""
    narrow, wide = sorted((one, other), key=lambda factor: factor.width)
    if narrow.width < _ROUNDING:
        scale = float(narrow.nodes[0])
        return _Factor(wide.edges * scale, wide.below, wide.nodes * scale, wide.weights)
    first, last = wide.edges[0] * narrow.edges[0], wide.edges[-1] * narrow.edges[-1]
    edges = np.linspace(first, last, _FINE_EDGES)
    split = np.interp(np.divide.outer(edges, narrow.nodes), wide.edges, wide.below)
    nodes = np.multiply.outer(narrow.nodes, wide.nodes).ravel()
    weights = np.multiply.outer(narrow.weights, wide.weights).ravel()
    return _Factor(edges, split @ narrow.weights, nodes, weights)


def _probability(value: float) -> float:
    return float(min(max(float(value), 0.0), 1.0))


def _uniform(low: float, high: float) -> _Factor:
    """Return the law of a value that may be anywhere between two ends."""
    edges = np.linspace(low, high, _EDGES)
    below = np.linspace(0.0, 1.0, _EDGES)
    if low == high:
        return _Factor(edges, below, np.array([low]), np.array([1.0]))
    nodes = low + (high - low) * (np.arange(_CELLS) + 0.5) / _CELLS
    return _Factor(edges, below, nodes, np.full(_CELLS, 1.0 / _CELLS))


@lru_cache(maxsize=32)
def _of_device(error: Tolerance) -> _Factor:
    """Return the law of the device's own factor around 1: half a normal law to either side."""
    if error.minus == 0.0 and error.plus == 0.0:
        return _uniform(1.0, 1.0)
    steps = np.linspace(-SIGMAS, SIGMAS, _EDGES)
    below = np.array([0.5 + 0.5 * erf(z / sqrt(2.0)) / erf(SIGMAS / sqrt(2.0)) for z in steps])
    middles = SIGMAS * ((2.0 * np.arange(_CELLS) + 1.0) / _CELLS - 1.0)
    weights = np.array([exp(-z * z / 2.0) for z in middles])
    down, up = error.minus / SIGMAS, error.plus / SIGMAS
    edges, nodes = (1.0 + z * np.where(z < 0.0, down, up) for z in (steps, middles))
    return _Factor(edges, below, nodes, weights / weights.sum())
