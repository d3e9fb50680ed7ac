"""The few resistor networks nearest to each wanted resistance."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chooser.search.pools import Floats, Ints
from chooser.search.tables import Rows, Tables, every_network
from chooser.search.windows import ROUNDING, find_in_windows, ragged

WISHES_AT_ONCE = 2048
"""Wishes worked on together where a size is not listed: bounds the memory."""


@dataclass(frozen=True, slots=True)
class Wish:
    """Resistances that are wanted.

    Attributes
    ----------
    wanted : (w,) values in ohm. least, most : (w,) limits in ohm, both included.
    """

    wanted: Floats
    least: Floats
    most: Floats


@dataclass(frozen=True, slots=True)
class Near:
    """Networks near to what was wanted.

    Attributes
    ----------
    owner : (n,) number of the wish. rows : the n networks.
    """

    owner: Ints
    rows: Rows


def nearest(tables: Tables, size: int, wish: Wish, count: int) -> Near:
    """Find the networks of exactly `size` parts that lie nearest to each wanted value.

    Parameters
    ----------
    tables : of the pool, in ohm.
    size : parts in the network.
    wish : what is wanted. count : how many for each wish.

    Returns
    -------
    Up to `count` for each wish; fewer where no more lie within its limits.
    """
    # A wish outside its limits is nearest to whatever is nearest to the limit.
    smallest, largest = reach(tables, size)
    least, most = np.maximum(wish.least, smallest), np.minimum(wish.most, largest)
    open_ = np.flatnonzero(least <= most)
    least, most = least[open_], most[open_]
    inside = Wish(np.clip(wish.wanted[open_], least, most), least, most)
    if tables.listed(size):
        near = _from_tables(every_network(tables, size), inside.wanted, count)
    else:
        near = _shared(tables, size, inside, count)
    value, owner = near.rows.value, near.owner
    kept = np.flatnonzero((value >= least[owner]) & (value <= most[owner]))
    return _cut(Near(open_[owner[kept]], near.rows.take(kept)), wish.wanted, count)


def reach(tables: Tables, size: int) -> tuple[float, float]:
    """Return values that no network of so many parts is below and above, in ohm."""
    value = tables.singles.value
    rounding = 1 + ROUNDING
    return float(value[0]) / size / rounding, float(value[-1]) * size * rounding


def _from_tables(listed: list[Rows], wanted: Floats, count: int) -> Near:
    """Take `count` to either side of the wanted value from every table."""
    owners: list[Ints] = []
    pieces: list[Rows] = []
    for table in listed:
        place = np.searchsorted(table.value, wanted)
        index = place[:, None] + np.arange(-count, count)[None, :]
        owner, column = np.nonzero((index >= 0) & (index < len(table)))
        owners.append(owner)
        pieces.append(table.take(index[owner, column]))
    return Near(np.concatenate(owners), Rows.concatenated(pieces))


def _shared(tables: Tables, size: int, wish: Wish, count: int) -> Near:
    """Look once for all wishes that are alike: out of reach, thousands end at the same limit."""
    wishes, alike = np.unique(
        np.stack([wish.wanted, wish.least, wish.most]), axis=1, return_inverse=True
    )
    alike = alike.reshape(-1)
    near = _cut(_from_windows(tables, size, Wish(*wishes), count), wishes[0], count)
    order = np.argsort(near.owner, kind="stable")
    owner = near.owner[order]
    first = np.searchsorted(owner, alike, "left")
    last = np.searchsorted(owner, alike, "right")
    owners, rows = [np.empty(0, dtype=np.int64)], [np.empty(0, dtype=np.int64)]
    for number, place in ragged(first, last):
        owners.append(number)
        rows.append(order[place])
    return Near(np.concatenate(owners), near.rows.take(np.concatenate(rows)))


def _from_windows(tables: Tables, size: int, wish: Wish, count: int) -> Near:
    """Widen each wish's window until enough lie in it, or it is as wide as the limits."""
    smallest, largest = reach(tables, size)
    wanted, least, most = wish.wanted, wish.least, wish.most
    owners: list[Ints] = [np.empty(0, dtype=np.int64)]
    pieces: list[Rows] = [Rows.none(size)]
    # A quarter of the width that would do if the networks were spread evenly over the octaves.
    first = count * float(np.log(largest / smallest)) / tables.count(size) / 4
    for start in range(0, len(wanted), WISHES_AT_ONCE):
        open_ = np.arange(start, min(start + WISHES_AT_ONCE, len(wanted)))
        width = first
        while len(open_):
            low = np.maximum(wanted[open_] * (1 - width), least[open_])
            high = np.minimum(wanted[open_] * (1 + width), most[open_])
            found = list(find_in_windows(tables, size, low, high))
            held = np.zeros(len(open_), dtype=np.int64)
            for batch in found:
                held += np.bincount(batch.window, minlength=len(open_))
            done = (held >= count) | ((low <= least[open_]) & (high >= most[open_]))
            for batch in found:
                kept = np.flatnonzero(done[batch.window])
                owners.append(open_[batch.window[kept]])
                pieces.append(batch.rows.take(kept))
            open_ = open_[~done]
            width *= 4
    return Near(np.concatenate(owners), Rows.concatenated(pieces))


def _cut(near: Near, wanted: Floats, count: int) -> Near:
    """Keep the `count` nearest of each owner; of equally near ones the first found."""
    distance = np.abs(near.rows.value / wanted[near.owner] - 1)
    order = np.lexsort((distance, near.owner))
    owner = near.owner[order]
    starts = np.searchsorted(owner, owner, "left")
    kept = order[np.arange(len(owner)) - starts < count]
    return Near(near.owner[kept], near.rows.take(kept))
