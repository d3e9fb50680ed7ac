"""Pairs of networks in the running at one level of the space."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from chooser.search.pools import Floats, Ints
from chooser.search.tables import Rows

SAME = 1e-12
"""Ratios of times nearer to each other than this, relative, are left to the exact comparison."""


def doubt(error: float) -> float:
    """Return how far rounding may have moved an error."""
    return SAME * (1 + error)


@dataclass(frozen=True, slots=True)
class Pairs:
    """Pairs of networks found at one number of resistors and capacitors.

    Attributes
    ----------
    error : (n,) size of the error. slot : (n,) number of the capacitor network.
    rows : the n resistor networks, for each resistor slot.
    """

    error: Floats
    slot: Ints
    rows: tuple[Rows, ...]

    def __len__(self) -> int:
        return len(self.error)

    @staticmethod
    def none(sizes: Sequence[int]) -> Pairs:
        """Return no pairs of networks of given sizes."""
        rows = tuple(Rows.none(size) for size in sizes)
        return Pairs(np.empty(0), np.empty(0, dtype=np.int64), rows)

    def only(self, kept: Ints | NDArray[np.bool_]) -> Pairs:
        """Return some of the pairs."""
        rows = tuple(each.take(kept) for each in self.rows)
        return Pairs(self.error[kept], self.slot[kept], rows)

    def and_(self, other: Pairs) -> Pairs:
        """Return these pairs and others of the same sizes."""
        if not len(self) or not len(other):
            return self if len(self) else other
        return Pairs(
            np.concatenate([self.error, other.error]),
            np.concatenate([self.slot, other.slot]),
            tuple(Rows.concatenated(both) for both in zip(self.rows, other.rows, strict=True)),
        )

    def best(self, wanted: int) -> Pairs:
        """Return the best `wanted` and all that equal the last of them."""
        if len(self) <= wanted:
            return self
        last = np.partition(self.error, wanted - 1)[wanted - 1]
        return self.only(self.error <= last + doubt(last))
