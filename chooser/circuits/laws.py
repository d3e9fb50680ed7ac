"""What the search asks of a circuit's formula: times from parts, and parts from times.

Two kinds: a `Law` makes its times from one resistor (and a capacitor); a `TwinLaw` makes a high
and a low time from two that share the capacitor. Times are linear in the capacitance while the
leak conductance stays what it is.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import inf
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike

from chooser.circuits.charging import Array, Phase

_STEPS = 80
_CLOSE = 1e-9  # of the last step; the error that is left is about its square
_ENDLESS, _NOTHING = 1e15, 1e-9  # ohm; beyond them nobody asks for more digits
_FACTOR = 8.0  # the most by which one step of the solver changes a resistance


class TimesLaw(Protocol):
    """Anything that makes times from resistors, a capacitor and its leak."""

    def times(self, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike) -> tuple[Array, ...]:
        """Return the times in second: one, or high and low.

        Parameters
        ----------
        rs : the resistance of each resistor slot in ohm. c : farad. g : siemens; all broadcast.
        """
        ...

    def exactly(self, rs: Sequence[Fraction], c: Fraction) -> tuple[Fraction, ...] | None:
        """Return the times in fractions, where they are plain products of parts; else None."""
        ...

    def lossless(self) -> TimesLaw:
        """Return the same law with a device that draws no current at all."""
        ...

    def trip_ratio(self, r: float, g: float) -> float:
        """Return the charging current through r ohm over all losses, at the worst trip point."""
        ...


class Law(TimesLaw, Protocol):
    """One resistor and one capacitor; see `chooser.circuits.charging.Phase` for each method."""

    def interval(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the sum of the times in second."""
        ...

    def resistance(self, t: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the resistance in ohm whose times add up to t second."""
        ...

    def sensitivity(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return d ln interval / d ln R."""
        ...

    def endless_from(self, g: ArrayLike) -> Array:
        """Return the resistance in ohm from which on some time never ends."""
        ...

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:
        """Return the resistance in ohm that still moves `ratio` times the capacitor's leak."""
        ...

    @property
    def proportional(self) -> bool:
        """Whether the interval surely grows at least in proportion to R."""
        ...

    @property
    def starts_from(self) -> float:
        """The resistance in ohm up to which there is no interval at all."""
        ...


class TwinLaw(TimesLaw, Protocol):
    """Two resistors and one capacitor that make a high and a low time.

    The high time grows with both resistors; the low time grows with RB and falls, if anything,
    with RA. Whatever leaks, either resistance for a time follows from the other one.
    """

    def ra_for(self, high: ArrayLike, rb: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the RA in ohm that makes a high time beside RB; 0 or less where RB is too much."""
        ...

    def rb_for(self, low: ArrayLike, ra: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the RB in ohm that makes a low time beside RA."""
        ...

    def endless_from(self, g: ArrayLike) -> Array:
        """Return the charging resistance in ohm from which on the high time never ends."""
        ...

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:
        """Return the charging resistance in ohm that still moves `ratio` times the leak."""
        ...

    @property
    def least_duty(self) -> float:
        """The duty that no choice of parts can be at or below, 0 where there is none."""
        ...

    @property
    def through_both(self) -> bool:
        """Whether the capacitor charges through both resistors, or through RA alone."""
        ...


@dataclass(frozen=True, slots=True)
class Train:
    """Phases one after the other through the same resistor, counted `scale` times.

    Attributes
    ----------
    phases : one, or the high and the low one. scale : what each of their times is multiplied by.
    """

    phases: tuple[Phase, ...]
    scale: float = 1.0

    def times(self, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike) -> tuple[Array, ...]:
        """Return the time of each phase in second."""
        return tuple(np.asarray(self.scale * each.interval(rs[0], c, g)) for each in self.phases)

    def exactly(self, rs: Sequence[Fraction], c: Fraction) -> tuple[Fraction, ...] | None:
        """Return the same in fractions, where every phase is a plain product."""
        found: list[Fraction] = []
        for phase in self.phases:
            times = phase.exactly(rs, c)
            if times is None:
                return None
            found.append(times[0] * Fraction(self.scale))
        return tuple(found)

    def lossless(self) -> Train:
        """Return the same train through a device that draws no current."""
        return Train(tuple(phase.lossless() for phase in self.phases), self.scale)

    def interval(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the sum of the times in second."""
        return np.asarray(np.sum(self.times((r,), c, g), axis=0))

    def sensitivity(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return d ln interval / d ln R: that of each phase, weighted by its time."""
        times = self.times((r,), c, g)
        whole = np.sum(times, axis=0)
        with np.errstate(invalid="ignore"):
            grown = sum(
                time * phase.sensitivity(r, c, g)
                for time, phase in zip(times, self.phases, strict=True)
            )
            return np.asarray(np.where(np.isfinite(whole) & (whole > 0.0), grown / whole, inf))

    def resistance(self, t: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the resistance in ohm whose times add up to t second; infinity if there is none.

        A single phase has its own inverse; several are solved together, from the middle of what
        each would need if it took its share of a lossless circuit.
        """
        t, c, g = np.broadcast_arrays(*(np.asarray(x, dtype=np.float64) / 1.0 for x in (t, c, g)))
        t = t / self.scale
        if len(self.phases) == 1:
            return self.phases[0].resistance(t, c, g)
        factors = [self._lossless(phase) for phase in self.phases]
        if all(phase.factor is not None for phase in self.phases):
            return np.asarray(t / (c * sum(factors)))
        guess = t / (c * sum(factors))
        most = self.endless_from(g)
        single = Train(self.phases)
        return solved(lambda r: single.interval(r, c, g), t, np.minimum(guess, 0.9 * most), most)

    @staticmethod
    def _lossless(phase: Phase) -> float:
        """Return the time of a phase over R C without any losses."""
        return phase.factor if phase.factor is not None else -float(np.log1p(-phase.threshold))

    def endless_from(self, g: ArrayLike) -> Array:
        """Return the resistance in ohm from which on some phase never ends."""
        return np.asarray(np.min([phase.endless_from(g) for phase in self.phases], axis=0))

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:
        """Return the resistance in ohm that in every phase moves `ratio` times the leak."""
        return np.asarray(np.min([phase.leak_bound(g, ratio) for phase in self.phases], axis=0))

    def trip_ratio(self, r: float, g: float) -> float:
        """Return the current through R over all losses, at the worst trip point."""
        return min(phase.trip_ratio(r, g) for phase in self.phases)

    @property
    def proportional(self) -> bool:
        """Whether every phase surely grows at least in proportion to R."""
        return all(phase.proportional for phase in self.phases)

    @property
    def starts_from(self) -> float:
        """The resistance in ohm up to which some phase does not happen."""
        return max(phase.starts_from for phase in self.phases)


def solved(
    time: Callable[[Array], Array], wanted: ArrayLike, guess: ArrayLike, most: ArrayLike = inf
) -> Array:
    """Return the resistance at which a rising function of it takes the wanted value.

    Parameters
    ----------
    time : rising, elementwise; may be infinite from `most` on. wanted : values > 0.
    guess : where to start, > 0. most : ohm that the answer stays below.

    Returns
    -------
    Ohm, of the broadcast shape of wanted and guess, to about 1e-12; infinity where even the
    largest resistances do not reach the wanted value.

    Notes
    -----
    Newton's method on the logarithms, kept between the nearest points known to be below and
    above, and halving that interval (on a logarithmic scale) where Newton leaves it.
    """
    wanted, r, most = np.broadcast_arrays(
        np.asarray(wanted, dtype=np.float64), np.asarray(guess, dtype=np.float64), most
    )
    r = np.where(np.isfinite(r) & (r > 0.0), r, 1.0)
    low, high = np.zeros(r.shape), np.array(most, dtype=np.float64)
    for _ in range(_STEPS):
        with np.errstate(all="ignore"):
            now = time(r)
            slope = (np.log(time(r * (1.0 + 1e-6))) - np.log(now)) / 1e-6
            step = (np.log(wanted) - np.log(now)) / slope
        low, high = np.where(now < wanted, r, low), np.where(now >= wanted, r, high)
        with np.errstate(all="ignore"):
            newton = r * np.exp(np.clip(step, -np.log(_FACTOR), np.log(_FACTOR)))
            middle = np.where(
                low > 0.0,
                np.where(np.isfinite(high), np.sqrt(low * high), r * _FACTOR),
                np.minimum(r, high) / _FACTOR,
            )
        # At the end the step is rounding and may point past either side by a hair.
        inside = (newton > low * (1.0 - _CLOSE)) & (newton < high * (1.0 + _CLOSE))
        inside &= slope < np.inf  # within 1e-6 of `most` the slope is endless and the step 0
        following = np.where(inside, newton, middle)
        moved = np.abs(following / r - 1.0)
        r = following
        if np.all((moved < _CLOSE) | (r > _ENDLESS) | (r < _NOTHING)):
            break
    return np.where(r > _ENDLESS, inf, r)
