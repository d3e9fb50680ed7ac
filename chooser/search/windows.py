"""Every network whose value lies in a window, for many windows at once, without listing the rest.

A table answers by binary search.  A size too large to list is split at its root instead: for
each head (one part, or a small group) the partner's value must lie in the window less the head,
which is again a window, in the table or the split of the smaller size.  In a series group the
window moves in ohms, in a parallel group in siemens.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial

import numpy as np

from chooser.networks import Join
from chooser.search.pools import Floats, Ints
from chooser.search.sieve import NARROW, WORTH, Sieve, sieved_pairs
from chooser.search.tables import Rows, Tables, every_network, joined, ranks_no_lower

MOST_PAIRS = 1 << 20
"""Head-and-window pairs worked on at once: bounds the memory, about 100 bytes each."""

ROUNDING = 1e-12
"""Windows are widened by this, relative: a thousand times the rounding of a few float sums."""


@dataclass(frozen=True, slots=True)
class Found:
    """Networks found, each with the window it lies in.

    Attributes
    ----------
    window : (n,) number of the window.
    rows : the n networks.
    """

    window: Ints
    rows: Rows


def find_in_windows(tables: Tables, size: int, low: Floats, high: Floats) -> Iterator[Found]:
    """Find all networks of exactly `size` parts in each window.

    Parameters
    ----------
    tables : tables of the pool; values add under `+`.
    size : parts in the network.
    low, high : (w,) ends of the windows, both included, in the pool's unit; low > high is empty.

    Yields
    ------
    Batches; every network of every window is in exactly one of them.  Values within ROUNDING
    outside a window may be found too.

    Notes
    -----
    For w windows and n parts: O(w log n) where the size is listed, O(w n log n) one size above.
    """
    order = np.argsort(low, kind="stable")
    low, high = low[order] * (1 - ROUNDING), high[order] * (1 + ROUNDING)
    for found in _in_any(tables, size, low, high):
        yield Found(order[found.window], found.rows)


def _in_any(tables: Tables, size: int, low: Floats, high: Floats) -> Iterator[Found]:
    if tables.listed(size):
        for table in every_network(tables, size):
            yield from _in_table(table, low, high)
        return
    for join in Join:
        yield from _in_groups(tables, size, join, low, high)


def _in_table(table: Rows, low: Floats, high: Floats) -> Iterator[Found]:
    if not len(table):
        return
    first = np.searchsorted(table.value, low, "left")
    # Most windows are empty, which one comparison tells; only the others need their end found.
    held = np.flatnonzero(np.take(table.value, first, mode="clip") <= high)
    held = held[first[held] < len(table)]
    last = np.searchsorted(table.value, high[held], "right")
    for window, row in ragged(first[held], last):
        if len(window):
            yield Found(held[window], table.take(row))


def _in_groups(tables: Tables, size: int, join: Join, low: Floats, high: Floats) -> Iterator[Found]:
    """Find the groups of one join in each window, listed or split at the root."""
    if tables.listed(size):
        yield from _in_table(tables.groups(size, join), low, high)
        return
    for head_size in range(1, size // 2 + 1):
        rest_size = size - head_size
        heads = tables.children(head_size, join)
        if head_size == rest_size:
            yield from _same_table(tables, join, heads, low, high)
            continue
        # Beside the head stands another child, or a group of two or more that rank no lower.
        rests = [join.dual, join] if rest_size >= 2 * head_size else [join.dual]
        sieve = partial(tables.sieve, rest_size) if tables.listed(rest_size) else None
        for window, head in _promising(heads, join, low, high, sieve):
            bounds = _partner_windows(join, heads.value[head], low[window], high[window])
            for rest_join in rests:
                partners = _in_groups(tables, rest_size, rest_join, *bounds)
                ranked = rest_join is join
                for found in _completed(tables, join, (heads, head), partners, ranked=ranked):
                    yield Found(window[found.window], found.rows)


def _completed(
    tables: Tables,
    join: Join,
    heads: tuple[Rows, Ints],
    partners: Iterator[Found],
    *,
    ranked: bool,
) -> Iterator[Found]:
    """Join heads to the partners found for them.

    Parameters
    ----------
    heads : their table, and (n,) the row whose partners window n of `partners` is for.
    ranked : True where the partners are groups of the same join, which must rank no lower.
    """
    table, head = heads
    for found in partners:
        rights = np.arange(len(found.rows), dtype=np.int64)
        lefts = head[found.window]
        if ranked:
            fitting = ranks_no_lower(found.rows, rights, table.size, lefts)
            rights, lefts = rights[fitting], lefts[fitting]
        kept, rows = joined(join, (table, lefts), (found.rows, rights), tables.uses)
        if len(kept):
            yield Found(found.window[rights[kept]], rows)


def _same_table(
    tables: Tables, join: Join, table: Rows, low: Floats, high: Floats
) -> Iterator[Found]:
    """Join two children of one table; only the one that rules the value is looped over.

    In series the larger child is at least half the whole, in parallel the smaller one at most
    twice the whole, so the loop runs over one octave of the table instead of over all of it.
    """
    if join is Join.SERIES:
        first = np.searchsorted(table.value, low / 2, "left")
        last = np.searchsorted(table.value, high, "right")
    else:
        first = np.searchsorted(table.value, low, "left")
        last = np.searchsorted(table.value, 2 * high, "right")
    for window, ruling in ragged(first, last):
        bounds = _partner_windows(join, table.value[ruling], low[window], high[window])
        start = np.searchsorted(table.value, bounds[0], "left")
        stop = np.searchsorted(table.value, bounds[1], "right")
        if join is Join.SERIES:
            stop = np.minimum(stop, ruling + 1)
        else:
            start = np.maximum(start, ruling)
        for owner, other in ragged(start, stop):
            lower, upper = np.minimum(ruling[owner], other), np.maximum(ruling[owner], other)
            kept, rows = joined(join, (table, lower), (table, upper), tables.uses)
            if len(kept):
                yield Found(window[owner[kept]], rows)


def _promising(
    heads: Rows, join: Join, low: Floats, high: Floats, sieve: Callable[[Join], Sieve] | None
) -> Iterator[tuple[Ints, Ints]]:
    """Pair each window with the heads that leave room for a partner, maybe with one there.

    Parameters
    ----------
    sieve : makes the sieve of the tables that the partner must come from, in what adds under a
        join; None where they are not listed.
    """
    if join is Join.SERIES:
        first = np.zeros(len(high), dtype=np.int64)
        last = np.searchsorted(heads.value, high, "left")
    else:
        first = np.searchsorted(heads.value, low, "right")
        last = np.full(len(low), len(heads), dtype=np.int64)
    if join is Join.SERIES:
        bases, shifts, widths = low, heads.value, high - low
    else:
        with np.errstate(divide="ignore", invalid="ignore"):
            bases, shifts, widths = 1 / high, 1 / heads.value, 1 / low - 1 / high
    # What a head leaves must be wide enough of zero for the sieve; `least` is in what adds.
    with np.errstate(invalid="ignore"):
        least = widths / NARROW
        narrow = least < bases / 2
    if sieve is None or int(np.count_nonzero(narrow)) * len(heads) < WORTH:
        yield from ragged(first, last)
        return
    room = np.where(narrow, bases - least, -1.0)
    if join is Join.SERIES:
        middle = np.clip(np.searchsorted(heads.value, room, "right"), first, last)
        yield from ragged(middle, last)
        yield from sieved_pairs(sieve(join), (bases, widths), shifts, (first, middle))
    else:
        far = np.where(narrow, 1 / np.where(narrow, room, 1.0), np.inf)
        middle = np.clip(np.searchsorted(heads.value, far, "left"), first, last)
        yield from ragged(first, middle)
        yield from sieved_pairs(sieve(join), (bases, widths), shifts, (middle, last))


def _partner_windows(join: Join, head: Floats, low: Floats, high: Floats) -> tuple[Floats, Floats]:
    """Take the heads out of their windows: in ohms for a series, else in siemens."""
    if join is Join.SERIES:
        return np.maximum(low - head, 0.0), high - head
    with np.errstate(divide="ignore"):
        most = 1 / high - 1 / head
        least = 1 / low - 1 / head
        return (
            np.where(least > 0, 1 / np.where(least > 0, least, 1), np.inf),
            np.where(most > 0, 1 / np.where(most > 0, most, 1), np.inf),
        )


def ragged(first: Ints, last: Ints) -> Iterator[tuple[Ints, Ints]]:
    """Lay out ranges of unequal length, in batches of about MOST_PAIRS.

    Parameters
    ----------
    first, last : (w,) ends of each range, last excluded; last <= first is empty.

    Yields
    ------
    The number of the range and the item, for every item of every range, in order.
    """
    lengths = np.maximum(last - first, 0)
    ends = np.cumsum(lengths)
    start = 0
    while start < len(lengths):
        done = int(ends[start - 1]) if start else 0
        stop = max(int(np.searchsorted(ends, done + MOST_PAIRS, "right")), start + 1)
        part = lengths[start:stop]
        owner = np.repeat(np.arange(start, stop, dtype=np.int64), part)
        begins = np.repeat(ends[start:stop] - part - done, part)
        offset = np.arange(len(owner), dtype=np.int64) - begins
        yield owner, first[owner] + offset
        start = stop
