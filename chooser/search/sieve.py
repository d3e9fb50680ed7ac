"""A coarse map of a table that rules out most narrow windows at a tenth of a search's cost.

A float's leading bits number its bucket: an octave has 2**BITS of them, and a byte says whether
a value of the table lies in the bucket or the next.  A window narrower than a bucket that starts
in an empty one holds nothing.  Most windows of a few parts per million are settled that way.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from chooser.search.pools import Floats, Ints

BITS = 15
"""Buckets per octave as a power of two; 15 makes a map of a megabyte, which caches like."""

WORTH = 50_000
"""Fewer windows than this are searched faster than sieved."""

_SHIFT = 52 - BITS
_CHUNK = 1 << 16  # windows mapped at once: their floats stay in the cache


class Sieve:
    """The map of one table.

    Parameters
    ----------
    values : (n,) values > 0, in any order, n >= 1.
    """

    def __init__(self, values: Floats) -> None:
        buckets = values.view(np.int64) >> _SHIFT
        self._base = int(buckets.min()) - 2
        self._occupied = np.zeros(int(buckets.max()) - self._base + 2, dtype=np.bool_)
        self._occupied[buckets - self._base] = True
        self._occupied[buckets - self._base - 1] = True

    def may_hold(self, starts: Floats) -> NDArray[np.bool_]:
        """Tell which windows may hold a value.

        Parameters
        ----------
        starts : lower ends, any shape, overwritten; a window may be `narrowest` wide, relative.
            Zero and negative starts count as empty.

        Returns
        -------
        False only where there is nothing.
        """
        buckets = starts.view(np.int64)
        np.right_shift(buckets, _SHIFT, out=buckets)
        np.subtract(buckets, self._base, out=buckets)
        # Out-of-range buckets are clipped to the first and last, which are always empty.
        return np.asarray(np.take(self._occupied, buckets, mode="clip"))


NARROW = 2.0 ** -(BITS + 1)
"""Greatest relative width of a window for which the sieve's answer holds."""


def sieved_pairs(sieve: Sieve, bases: Floats, shifts: Floats) -> Iterator[tuple[Ints, Ints]]:
    """Yield the pairs of a window and a shift whose shifted window may hold a value.

    Parameters
    ----------
    sieve : of the table searched.
    bases : (w,) lower ends of the windows. shifts : (h,) amounts to take off them.

    Yields
    ------
    Numbers of windows and of shifts, in batches. The answer holds for the pairs whose shifted
    window starts at its absolute width / NARROW or above.
    """
    step = max(_CHUNK // max(len(shifts), 1), 1)
    for start in range(0, len(bases), step):
        hits = sieve.may_hold(bases[start : start + step, None] - shifts[None, :])
        window, shift = np.nonzero(hits)
        if len(window):
            yield window + start, shift
