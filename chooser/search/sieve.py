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

BITS = 14
"""Buckets per octave as a power of two; with 14 the map of a table stays in the cache."""

WORTH = 50_000
"""Fewer windows than this are searched faster than sieved."""

_SHIFT = 52 - BITS
_BATCH = 1 << 18  # pairs handed on together: a few large batches cost less than many small ones
_WINDOWS = 128  # mapped at once: their floats stay in the cache, and near windows share shifts


class Sieve:
    """The map of one table.

    Parameters
    ----------
    values : (n,) values > 0, in any order.
    """

    def __init__(self, values: Floats) -> None:
        buckets = values.view(np.int64) >> _SHIFT
        self._base = int(buckets.min(initial=np.iinfo(np.int64).max)) - 2
        last = int(buckets.max(initial=self._base))
        self._occupied = np.zeros(last - self._base + 2, dtype=np.bool_)
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


def sieved_pairs(
    sieve: Sieve, bases: Floats, shifts: Floats, first: Ints, last: Ints
) -> Iterator[tuple[Ints, Ints]]:
    """Yield the pairs of a window and a shift whose shifted window may hold a value.

    Parameters
    ----------
    sieve : of the table searched.
    bases : (w,) lower ends of the windows; windows near in value should stand together.
    shifts : (h,) amounts to take off them.
    first, last : (w,) range of the shifts to look at for each window, last excluded.

    Yields
    ------
    Numbers of windows and of shifts, in batches. The answer holds for the pairs whose shifted
    window starts at its absolute width / NARROW or above.
    """
    windows: list[Ints] = []
    found: list[Ints] = []
    for start in range(0, len(bases), _WINDOWS):
        chunk = slice(start, start + _WINDOWS)
        left, right = int(first[chunk].min()), int(last[chunk].max())
        if left >= right:
            continue
        hits = sieve.may_hold(bases[chunk, None] - shifts[None, left:right])
        window, shift = np.nonzero(hits)
        window, shift = window + start, shift + left
        inside = (shift >= first[window]) & (shift < last[window])
        windows.append(window[inside])
        found.append(shift[inside])
        if sum(map(len, windows)) > _BATCH:
            yield np.concatenate(windows), np.concatenate(found)
            windows, found = [], []
    if windows:
        yield np.concatenate(windows), np.concatenate(found)
