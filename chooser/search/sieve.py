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
"""Buckets per octave as a power of two; with 15 the map of a table still stays in the cache."""

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
        self._values = np.sort(values, kind="stable")  # a merge, for values of a few rising runs
        buckets = self._values.view(np.int64) >> _SHIFT
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

    def hold(self, starts: Floats, ends: Floats) -> NDArray[np.bool_]:
        """Tell which windows do hold a value; both ends (n,) are included."""
        first = np.searchsorted(self._values, starts, "left")
        value = np.take(self._values, first, mode="clip")
        return np.asarray((value >= starts) & (value <= ends))


NARROW = 2.0 ** -(BITS + 1)
"""Greatest relative width of a window for which the sieve's answer holds."""


def sieved_pairs(
    sieve: Sieve,
    windows: tuple[Floats, Floats],
    shifts: Floats,
    ends: tuple[Ints, Ints],
) -> Iterator[tuple[Ints, Ints]]:
    """Yield the pairs of a window and a shift whose shifted window holds a value.

    Parameters
    ----------
    sieve : of the table searched.
    windows : (w,) lower ends and widths of the windows; near ones should stand together.
    shifts : (h,) amounts to take off their ends.
    ends : (w,) range of the shifts to look at for each window, last excluded. A shifted window
        must start at its width / NARROW or above.

    Yields
    ------
    Numbers of windows and of shifts, in batches.
    """
    bases, (first, last) = windows[0], ends
    found: list[tuple[Ints, Ints]] = []
    for start in range(0, len(bases), _WINDOWS):
        chunk = slice(start, start + _WINDOWS)
        left, right = int(first[chunk].min()), int(last[chunk].max())
        if left >= right:
            continue
        hits = sieve.may_hold(bases[chunk, None] - shifts[None, left:right])
        window, shift = np.nonzero(hits)
        window, shift = window + start, shift + left
        inside = (shift >= first[window]) & (shift < last[window])
        found.append((window[inside], shift[inside]))
        if sum(len(window) for window, _ in found) > _BATCH:
            yield _held(sieve, windows, shifts, found)
            found = []
    if found:
        yield _held(sieve, windows, shifts, found)


def _held(
    sieve: Sieve, windows: tuple[Floats, Floats], shifts: Floats, found: list[tuple[Ints, Ints]]
) -> tuple[Ints, Ints]:
    """Keep the pairs that do hold a value."""
    window = np.concatenate([pair[0] for pair in found])
    shift = np.concatenate([pair[1] for pair in found])
    starts = windows[0][window] - shifts[shift]
    kept = sieve.hold(starts, starts + windows[1][window])
    return window[kept], shift[kept]
