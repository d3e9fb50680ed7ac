"""The honest interval of a circuit: nominal, worst corners, spread, and the chance to fit.

Conventions: the parts of one slot err together (one bag, one maker, one meter), so a slot
arrives here as one value with its ends; the slots and the device err independently. A value
between its ends counts as equally likely everywhere. The device's own factor is normal to
either side with a third of its limit as one sigma, cut at that limit: devices beyond it are not
sold, and sheets that print both figures print 1 % typical beside 3 % at most. Figures of the
device that change the form of its times (thresholds, output levels) scatter in the same way, as
`chooser.circuits.scattering` has it.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import hypot, inf, isfinite

import numpy as np
from numpy.typing import ArrayLike, NDArray

from chooser.chance import Band, DeviceLaw, chance_of, device_law, scatter_of
from chooser.circuits.circuit import TIMED, Circuit, outputs_of
from chooser.parts import Tolerance
from chooser.slot_facts import SlotFacts

Array = NDArray[np.float64]

_LEAKS = np.concatenate([[0.0], 2.0 ** (-np.arange(20) / 2.0)])
"""Shares of the leakage limit at which an oscillator is looked at.

A leak lengthens the charging and shortens the discharging; with low trip points a period first
falls with it and then rises without end.
"""

_STILL = DeviceLaw(0.0, 0.0)

_STEP = 1e-5  # relative change of a part that tells how an output follows it


@dataclass(frozen=True, slots=True)
class Reading:
    """What a circuit will really do with one of its outputs.

    Attributes
    ----------
    output : its name.
    nominal : with typical currents and leakage; a time that never ends is infinite.
    low, high : least and most of any corner; `high` is None for a time that may never end.
    mean : expected, asymmetric tolerances counted.
    spread : one sigma, relative.
    follows : d ln output / d ln value for each slot, the capacitor last.
    device : the part of the spread that the device alone makes, one sigma, relative.
    """

    output: str
    nominal: float
    low: float
    high: float | None
    mean: float
    spread: float
    follows: tuple[float, ...]
    device: float


@dataclass(frozen=True, slots=True)
class Outlook:
    """What a circuit will really do.

    Attributes
    ----------
    readings : of every output, the chief one first.
    chance : probability, 0 to 1, that a build lands in every accepted band.
    """

    readings: tuple[Reading, ...]
    chance: float

    def of(self, output: str) -> Reading:
        """Return the reading of an output."""
        return next(reading for reading in self.readings if reading.output == output)

    @property
    def chief(self) -> Reading:
        """The reading of the chief output."""
        return self.readings[0]


def outlook(
    circuit: Circuit,
    rs: Sequence[SlotFacts],
    c: SlotFacts,
    bands: Mapping[str, Band],
    scale: float = 1.0,
) -> Outlook:
    """Return what a circuit of given slots will really do.

    Parameters
    ----------
    circuit : the circuit; a lossless one only knows the tolerances of the parts.
    rs : the resistor slots in order. c : the capacitor slot, or `NOTHING`.
    bands : lowest and highest accepted value by output.
    scale : of all times, as the variant of the circuit has it.

    Returns
    -------
    The corners are all combinations of low and high ends of the slots, no leakage and its
    limit, and the corners of the device, its own error on top. Outputs are monotone in the
    slots, and of an oscillator's leakage, which may first shorten a period, steps between are
    looked at as well, good to about a percent of that period. The ends hold for parts and
    devices within their limits and for what the circuit's file counts in: strays, noise and
    temperature are not in them.
    Mean and spread are to first order in the parts; a frequency's mean has the second order.
    """
    nominal = _outputs(circuit, [r.value for r in rs], c.value, c.leak_typical, scale)
    ends = _corners(circuit, rs, c, scale)
    slots = (*rs, *((c,) if circuit.capacitor else ()))
    follows = _follows(circuit, rs, c, scale)
    scatter = scatter_of(circuit, [r.value for r in rs], c.value, c.leak_typical)
    found: dict[str, Reading] = {}
    for output in circuit.outputs:
        value = float(nominal[output])
        steep = tuple(float(each[output]) for each in follows)
        if not isfinite(value) or value == 0.0 or not all(map(isfinite, steep)):
            found[output] = _hopeless(output, value, ends[output], len(slots))
            continue
        device = _device(output, circuit, scatter.get(output, _STILL))
        mean = float(mean_of(value, steep, [s.shift for s in slots], device.shift))
        spread = float(spread_of(steep, [s.spread for s in slots], device.spread))
        if output == "frequency":
            mean = _mean_frequency(found["period"], mean)
        low, high = ends[output]
        most = high if isfinite(high) else None
        found[output] = Reading(output, value, low, most, mean, spread, steep, device.spread)
    return Outlook(tuple(found.values()), chance_of(circuit, rs, c, bands, scale))


def _device(output: str, circuit: Circuit, scatter: DeviceLaw) -> DeviceLaw:
    """Return what the device does to an output, by its own factor and by its figures' scatter."""
    own, through = device_law(circuit.error), weight_of(output)
    return DeviceLaw(
        hypot(through * own.spread, scatter.spread),
        (1.0 + through * own.shift) * (1.0 + scatter.shift) - 1.0,
    )


def _mean_frequency(period: Reading, first_order: float) -> float:
    """Return the mean of 1 / T: to second order it is (1 + sigma^2) / mean of T."""
    if not isfinite(period.mean):
        return first_order
    sigma = period.spread * period.nominal / period.mean
    return (1.0 + sigma**2) / period.mean


def weight_of(output: str) -> int:
    """Tell how an output follows a device that is slow: 1 for times, -1, or 0 where it does not."""
    if output in TIMED:
        return 1
    return -1 if output == "frequency" else 0


def mean_of(
    nominal: ArrayLike,
    steep: Sequence[ArrayLike],
    shifts: Sequence[ArrayLike],
    device_shift: float = 0.0,
) -> Array:
    """Return the expected output, to first order in the shift of each slot.

    Parameters
    ----------
    nominal : the output. steep : d ln output / d ln value of each slot. shifts : mean errors of
        the slots, relative. device_shift : that of the device. All broadcast.

    Returns
    -------
    In the unit of `nominal`, of the broadcast shape.
    """
    mean = np.asarray(nominal, dtype=np.float64) * (1.0 + device_shift)
    for follows, shift in zip(steep, shifts, strict=True):
        mean = mean * (1.0 + np.asarray(follows) * np.asarray(shift))
    return np.asarray(mean)


def spread_of(
    steep: Sequence[ArrayLike], spreads: Sequence[ArrayLike], device_spread: float
) -> Array:
    """Return one sigma of the relative output: slots and device add in squares.

    Parameters
    ----------
    steep : d ln output / d ln value of each slot. spreads : one sigma of each slot, relative.
        All broadcast.
    device_spread : one sigma of the device's own factor.

    Returns
    -------
    Dimensionless, of the broadcast shape.
    """
    squares: ArrayLike = device_spread**2
    for follows, spread in zip(steep, spreads, strict=True):
        squares = squares + (np.asarray(follows) * np.asarray(spread)) ** 2
    return np.asarray(np.sqrt(squares), dtype=np.float64)


def likely_miss(mean_error: ArrayLike, spread: ArrayLike) -> Array:
    """Return the root of the mean square error: sqrt(mean_error^2 + spread^2).

    Parameters
    ----------
    mean_error : error of the expected output against the target, relative.
    spread : one sigma of the relative output; broadcasts with mean_error.

    Returns
    -------
    Dimensionless, of the broadcast shape.
    """
    return np.asarray(np.hypot(mean_error, spread), dtype=np.float64)


def _outputs(
    circuit: Circuit, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike, scale: float
) -> Mapping[str, Array]:
    with np.errstate(invalid="ignore", divide="ignore"):
        times = [scale * each for each in circuit.typical.times(rs, c, g)]
        return outputs_of(circuit, times)


def _corners(
    circuit: Circuit, rs: Sequence[SlotFacts], c: SlotFacts, scale: float
) -> Mapping[str, tuple[float, float]]:
    """Return the least and the most of every output over all corners."""
    ends = [(slot.low, slot.high) for slot in (*rs, c)]
    leaks = c.leak_limit * (_LEAKS if len(circuit.outputs) > 1 else _LEAKS[:2])
    leaks = leaks if c.leak_limit else leaks[:1]
    corners = [axis.ravel() for axis in np.meshgrid(*ends, leaks, indexing="ij")]
    values, farad, leak = corners[:-2], corners[-2], corners[-1]
    found: dict[str, tuple[float, float]] = {}
    for law in circuit.corners:
        with np.errstate(invalid="ignore", divide="ignore"):
            outputs = outputs_of(circuit, [scale * t for t in law.times(values, farad, leak)])
        for output in circuit.outputs:
            # A high time without end keeps the output on for ever.
            column = np.nan_to_num(outputs[output], nan=1.0, posinf=inf)
            low, high = found.get(output, (inf, -inf))
            found[output] = min(low, float(column.min())), max(high, float(column.max()))
    return {output: _by_device(output, pair, circuit.error) for output, pair in found.items()}


def _by_device(output: str, ends: tuple[float, float], error: Tolerance) -> tuple[float, float]:
    """Widen the ends of an output by the device's own error."""
    weight = weight_of(output)
    if weight == 0:
        return ends
    slow, fast = 1.0 + error.plus, 1.0 - error.minus
    if weight > 0:
        return ends[0] * fast, ends[1] * slow
    return ends[0] / slow, ends[1] / fast


def _follows(
    circuit: Circuit, rs: Sequence[SlotFacts], c: SlotFacts, scale: float
) -> list[Mapping[str, Array]]:
    """Return d ln output / d ln value for every slot, by central differences."""
    values = [slot.value for slot in (*rs, c)]
    found: list[Mapping[str, Array]] = []
    for place in range(len(values) if circuit.capacitor else len(rs)):
        moved = [
            [v * (1.0 + sign * _STEP * (n == place)) for n, v in enumerate(values)]
            for sign in (1.0, -1.0)
        ]
        up, down = (_outputs(circuit, each[:-1], each[-1], c.leak_typical, scale) for each in moved)
        with np.errstate(all="ignore"):
            found.append(
                {name: np.log(up[name] / down[name]) / (2.0 * _STEP) for name in circuit.outputs}
            )
    return found


def _hopeless(output: str, value: float, ends: tuple[float, float], slots: int) -> Reading:
    """Return the reading of a time that never ends, hardly ends, or never starts."""
    high = ends[1] if isfinite(ends[1]) and isfinite(value) else None
    return Reading(output, value, ends[0], high, inf, inf, (1.0,) * slots, 0.0)
