"""A plain resistance or capacitance: the network itself is what is wanted."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import inf

import numpy as np
from numpy.typing import ArrayLike

from chooser.circuits.charging import Array
from chooser.circuits.circuit import Circuit


@dataclass(frozen=True, slots=True)
class ValueLaw:
    """The value of the only slot, in place of a time. of : "resistance" or "capacitance"."""

    of: str

    def times(self, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike) -> tuple[Array, ...]:  # noqa: ARG002
        """Return the value in ohm or farad."""
        return (np.asarray(rs[0] if rs else c, dtype=np.float64),)

    def exactly(self, rs: Sequence[Fraction], c: Fraction) -> tuple[Fraction, ...]:
        """Return the same in fractions."""
        return (rs[0] if rs else c,)

    def interval(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the value in ohm or farad."""
        r, c, g = (np.asarray(values, dtype=np.float64) for values in (r, c, g))
        chosen, other = (r, c) if self.of == "resistance" else (c, r)
        return np.asarray(chosen + 0.0 * other + 0.0 * g)

    def resistance(self, t: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the resistance wanted, in ohm."""
        t, c, g = (np.asarray(values, dtype=np.float64) for values in (t, c, g))
        return np.asarray(t + 0.0 * c + 0.0 * g)

    def sensitivity(self, r: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return d ln value / d ln R: 1 of a resistance, 0 of a capacitance."""
        own = 1.0 if self.of == "resistance" else 0.0
        return np.full(np.broadcast_shapes(np.shape(r), np.shape(c), np.shape(g)), own)

    def endless_from(self, g: ArrayLike) -> Array:
        """Return infinity."""
        return np.full(np.shape(g), inf)

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:  # noqa: ARG002 - as the others
        """Return infinity."""
        return np.full(np.shape(g), inf)

    @property
    def proportional(self) -> bool:
        """A resistance is in proportion to itself."""
        return self.of == "resistance"

    @property
    def starts_from(self) -> float:
        """0 ohm."""
        return 0.0

    def lossless(self) -> ValueLaw:
        """Return itself."""
        return self

    def trip_ratio(self, r: float, g: float) -> float:  # noqa: ARG002 - as the others
        """Return infinity: nothing is lost."""
        return inf


def resistance() -> Circuit:
    """Return the circuit that is a resistor network and nothing else."""
    law = ValueLaw("resistance")
    return Circuit(
        "resistance",
        "Resistance",
        "",
        0.0,
        ("R",),
        capacitor=False,
        outputs=("resistance",),
        typical=law,
        corners=(law,),
        lossless=True,
    )


def capacitance(supply: float = 0.0) -> Circuit:
    """Return the circuit that is a capacitor network; it must stand `supply` volt."""
    law = ValueLaw("capacitance")
    return Circuit(
        "capacitance",
        "Capacitance",
        "",
        supply,
        (),
        capacitor=True,
        outputs=("capacitance",),
        typical=law,
        corners=(law,),
        lossless=True,
    )
