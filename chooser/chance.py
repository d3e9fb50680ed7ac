"""The chance that a build lands in every accepted band, by deterministic sums.

The times of a circuit are linear in C and in the device's own factor, so a build is the product
of one common factor, C times device, and of what the resistors make of one farad. Where there
is one resistor and one band, the factor that reaches furthest is integrated through its
distribution function and the other two are summed over (good to a few 1e-4); else the
resistors are summed over and the common factor is integrated (good to about 2e-3). Where the
device's own figures scatter, that is done for each of the pieces that stand for them (good to
about 1e-2, the share of one piece).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import erf, exp, inf, isfinite, log, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.circuit import TIMED, Circuit, outputs_of
from chooser.circuits.laws import TimesLaw
from chooser.circuits.scattering import SIGMAS
from chooser.parts import Tolerance
from chooser.slot_facts import SlotFacts

Array = NDArray[np.float64]
Band = tuple[float, float]

USUAL_OHM, USUAL_FARAD = 100e3, 100e-9
"""Parts at which the scatter of a device is looked at for all parts alike."""

_CELLS = 64  # nodes of a factor that is summed over; the error of the sum is some 1/cells^2
_GRID = (1, 4096, 16384)  # cells of no, one and two resistors that are summed over
_LEAST_CELLS = 16  # of each resistor
_ROUNDING = 1e-12  # relative; less is no difference
_EDGES = 257  # corners of the table of the factor that is integrated exactly between them
_FINE_EDGES = 2049  # the same where two factors have been put together


@dataclass(frozen=True, slots=True)
class DeviceLaw:
    """How a device makes an output scatter, relative. spread : one sigma. shift : mean error."""

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


def scatter_of(
    circuit: Circuit, rs: Sequence[float], c: float, g: float
) -> Mapping[str, DeviceLaw]:
    """Return how the scatter of the device's own figures moves each output; `error` is not in it.

    Parameters
    ----------
    circuit : the circuit. rs, c, g : its parts, in ohm, farad and siemens.

    Returns
    -------
    Relative to the output with the device at its typical figures, over the pieces with which
    the output is finite. Empty where no figure scatters.
    """
    if not circuit.scatter:
        return {}
    weights = np.array([weight for weight, _ in circuit.scatter])
    with np.errstate(all="ignore"):
        made = [law.times(rs, c, g) for law in (circuit.typical, *(x for _, x in circuit.scatter))]
        times = np.array([[float(time) for time in each] for each in made]).T
        outputs = outputs_of(circuit, list(times))
        runs = np.isfinite(times).all(axis=0)
        return {
            name: _law_over(
                values / values[0] - 1.0, weights, np.isfinite(values) if name in TIMED else runs
            )
            for name, values in outputs.items()
        }


def _law_over(errors: Array, weights: Array, fine: NDArray[np.bool_]) -> DeviceLaw:
    """Return spread and shift of errors, the first of which is that of the usual device."""
    kept = fine[1:]
    if not (fine[0] and kept.any()):
        return DeviceLaw(0.0, 0.0)
    errors, weights = errors[1:][kept], weights[kept] / weights[kept].sum()
    shift = float(weights @ errors)
    return DeviceLaw(sqrt(max(float(weights @ errors**2) - shift**2, 0.0)), shift)


@lru_cache(maxsize=64)
def device_of(circuit: Circuit, output: str | None = None) -> DeviceLaw:
    """Return how the device makes a time of a circuit, or the chief one, scatter by itself.

    Its own factor and the scatter of its figures together, the latter with 100 kohm in each
    resistor slot and 100 nF that does not leak: losses hardly change it where the house rules
    leave them.
    """
    own = device_law(circuit.error)
    rs = [USUAL_OHM] * len(circuit.resistors)
    scatter = scatter_of(circuit, rs, USUAL_FARAD, 0.0).get(output or circuit.outputs[0])
    if scatter is None:
        return own
    spread = sqrt(own.spread**2 + scatter.spread**2)
    return DeviceLaw(spread, (1.0 + own.shift) * (1.0 + scatter.shift) - 1.0)


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

    Returns
    -------
    Of all builds, those that never end are inside no band.
    """
    if not bands:
        return 1.0
    chief = circuit.outputs[0]
    if not circuit.scatter and len(rs) == 1 and set(bands) == {chief}:
        low, high = bands[chief]
        return _of_three(circuit, rs[0], c, (low / scale, high / scale))
    laws = circuit.scatter or ((1.0, circuit.typical),)
    values = _grid_of(rs, _GRID[len(rs)] // len(laws))
    common = _product(_uniform(c.low, c.high), _of_device(circuit.error))
    return _probability(
        sum(
            weight * _of_law(circuit, _OneFarad(law, values, c.leak_typical, scale), bands, common)
            for weight, law in laws
        )
    )


def _grid_of(rs: Sequence[SlotFacts], cells: int) -> list[Array]:
    """Return the values of all resistors in the middle of about so many equal cells."""
    if not rs:
        return []
    each = max(int(cells ** (1.0 / len(rs)) + 0.5), _LEAST_CELLS)
    axes = [r.low + (r.high - r.low) * (np.arange(each) + 0.5) / each for r in rs]
    return [axis.ravel() for axis in np.meshgrid(*axes, indexing="ij")]


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


@dataclass(frozen=True, slots=True)
class _OneFarad:
    """A law with its resistors everywhere in their cells, and one farad that leaks g siemens."""

    law: TimesLaw
    values: Sequence[Array]
    g: float
    scale: float

    def times(self) -> list[Array]:
        """Return the times in second; the formula is linear in C."""
        made = self.law.times(self.values, 1.0, self.g)
        return [self.scale * np.atleast_1d(time) for time in made]


def _of_law(
    circuit: Circuit, build: _OneFarad, bands: Mapping[str, Band], common: _Factor
) -> float:
    """Return the chance with one law: summed over the resistors, C and the device integrated."""
    with np.errstate(invalid="ignore", divide="ignore"):
        made = outputs_of(circuit, build.times())
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
    share = np.maximum(
        _cumulated(most * (1 + _ROUNDING), common) - _cumulated(least * (1 - _ROUNDING), common),
        0.0,
    )
    return float(np.mean(np.where(fine, share, 0.0)))


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
