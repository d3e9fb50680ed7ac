"""A law for tests of the search alone: exact in fractions, and with an offset beside R."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import inf

import numpy as np
from numpy.typing import ArrayLike

from chooser.circuits.charging import Array


@dataclass(frozen=True, slots=True)
class Straight:
    """A published rule: t = K C (R + R0), and nothing said of losses.

    Attributes
    ----------
    factor : K, dimensionless. extra_ohm : R0 in ohm, 0 for the usual K R C.
    """

    factor: float
    extra_ohm: float = 0.0

    def times(self, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike) -> tuple[Array, ...]:
        """Return the one time in second."""
        return (self.interval(rs[0], c, g),)

    def exactly(self, rs: Sequence[Fraction], c: Fraction) -> tuple[Fraction, ...] | None:
        """Return the same in fractions."""
        return (Fraction(self.factor) * (rs[0] + Fraction(self.extra_ohm)) * c,)

    def lossless(self) -> Straight:
        """Return itself."""
        return self

    def interval(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return K C (R + R0) in second; the leak only lends its shape."""
        r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
        return np.asarray(self.factor * (r + self.extra_ohm) * c + 0.0 * g)

    def sensitivity(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return d ln t / d ln R = R / (R + R0)."""
        r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
        return np.asarray(r / (r + self.extra_ohm) + 0.0 * c + 0.0 * g)

    def resistance(self, t: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return t / (K C) - R0 in ohm; not above zero where R0 is too much already."""
        t, c, g = (np.asarray(values, dtype=np.float64) for values in (t, c, g))
        return np.asarray(t / (self.factor * c) - self.extra_ohm + 0.0 * g)

    def endless_from(self, g: ArrayLike) -> Array:
        """Return infinity: the rule knows no such resistance."""
        return np.full(np.shape(g), inf)

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:  # noqa: ARG002 - as the others
        """Return infinity: the rule knows no such resistance."""
        return np.full(np.shape(g), inf)

    def trip_ratio(self, r: float, g: float) -> float:  # noqa: ARG002 - as the others
        """Return infinity: the rule knows no losses."""
        return inf

    @property
    def proportional(self) -> bool:
        """Whether the interval grows in proportion to R."""
        return self.extra_ohm == 0.0

    @property
    def starts_from(self) -> float:
        """0 ohm: the rule holds from there on."""
        return 0.0
