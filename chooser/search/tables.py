"""All networks of a size, listed once each as arrays.

Conventions
-----------
Values here add under `+` (ohm; for capacitors the elastance 1/C), so that one rule serves both.

A network of two or more parts is a group; its children for a series group are single parts and
parallel groups, and the other way round.  Children are ranked by (size, rank in the table of
that size).  A group is listed as its lowest child, its head, joined to the rest: the rest is
either one child that ranks no lower, or a group of the same join whose head ranks no lower.
Each network has exactly one such form, so nothing is listed twice and nothing is missed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from chooser.networks import Group, Join, Leaf, Network, replace
from chooser.search.counting import networks_from
from chooser.search.pools import Floats, Ints
from chooser.search.sieve import Sieve

Shape = Network[int]
"""An arrangement; its leaves are the columns of `Rows.leaves`."""


@dataclass(frozen=True, slots=True)
class Rows:
    """Networks of one size, one a row.

    Attributes
    ----------
    size : parts in each network.
    shapes : the arrangements that occur.
    value : (n,) value; in a table rising, and there a row's number is the network's rank.
    leaves : (n, size) number of each part in the pool, in the leaf order of the row's shape.
    shape : (n,) number of the row's arrangement in `shapes`.
    head_size, head : (n,) size and rank of the lowest child of the row's group.
    """

    size: int
    shapes: tuple[Shape, ...]
    value: Floats
    leaves: NDArray[np.int32]
    shape: NDArray[np.int16]
    head_size: NDArray[np.int8]
    head: NDArray[np.int32]

    def __len__(self) -> int:
        return len(self.value)

    def take(self, index: Ints | NDArray[np.bool_]) -> Rows:
        """Return some of the rows."""
        return Rows(
            self.size,
            self.shapes,
            self.value[index],
            self.leaves[index],
            self.shape[index],
            self.head_size[index],
            self.head[index],
        )

    @staticmethod
    def none(size: int) -> Rows:
        """Return no rows of a size."""
        return Rows(
            size,
            (),
            np.empty(0),
            np.empty((0, size), dtype=np.int32),
            np.empty(0, dtype=np.int16),
            np.empty(0, dtype=np.int8),
            np.empty(0, dtype=np.int32),
        )

    @staticmethod
    def blank(count: int) -> Rows:
        """Return so many rows of no parts, for a slot that a circuit does not have."""
        return Rows(
            0,
            (),
            np.ones(count),
            np.empty((count, 0), dtype=np.int32),
            np.zeros(count, dtype=np.int16),
            np.zeros(count, dtype=np.int8),
            np.zeros(count, dtype=np.int32),
        )

    @staticmethod
    def concatenated(pieces: Sequence[Rows]) -> Rows:
        """Put one or more pieces of one size behind each other."""
        shapes = tuple(dict.fromkeys(shape for piece in pieces for shape in piece.shapes))
        number = {shape: index for index, shape in enumerate(shapes)}
        renumbered = [
            np.array([number[shape] for shape in piece.shapes], dtype=np.int16)[piece.shape]
            for piece in pieces
        ]
        return Rows(
            pieces[0].size,
            shapes,
            np.concatenate([piece.value for piece in pieces]),
            np.concatenate([piece.leaves for piece in pieces]),
            np.concatenate(renumbered),
            np.concatenate([piece.head_size for piece in pieces]),
            np.concatenate([piece.head for piece in pieces]),
        )

    def network(self, row: int) -> Network[int]:
        """Return one row as a tree whose leaves are part numbers of the pool."""
        return replace(self.shapes[self.shape[row]], self.leaves[row].tolist().__getitem__)

    def evaluate(self, of: Floats, adds: Join) -> Floats:
        """Fold a figure of the parts over every network.

        Parameters
        ----------
        of : (parts,) the figure of each part, >= 0.
        adds : the join under which the figure adds; under the other one reciprocals add.

        Returns
        -------
        (n,) the figure of each network.
        """
        result = np.empty(len(self))
        for number, shape in enumerate(self.shapes):
            chosen = np.flatnonzero(self.shape == number)
            if len(chosen):
                result[chosen] = _fold(shape, of[self.leaves[chosen]], adds)
        return result

    def shares(self, of: Floats, adds: Join) -> Floats:
        """Tell how much of a small relative change of each part reaches its network's value.

        Parameters
        ----------
        of : (parts,) the value of each part, > 0. adds : the join under which the values add.

        Returns
        -------
        (n, size) shares in the order of `leaves`; see `chooser.networks.shares_of`.
        """
        result = np.empty(self.leaves.shape)
        for number, shape in enumerate(self.shapes):
            chosen = np.flatnonzero(self.shape == number)
            if len(chosen):
                columns = _fold_shares(shape, of[self.leaves[chosen]], adds)[1]
                for column, share in columns.items():
                    result[chosen, column] = share
        return result

    def evaluate_shares(self, of: Floats, relative: Floats, adds: Join) -> Floats:
        """Add up relative figures of the parts, each weighted by the part's share of the value.

        Parameters
        ----------
        of : (parts,) the value of each part, > 0. relative : (parts,) the figure of each part.
        adds : the join under which the values add.

        Returns
        -------
        (n,) sums of share x figure.
        """
        return np.asarray(np.sum(self.shares(of, adds) * relative[self.leaves], axis=1))


def _fold_shares(
    shape: Shape, values: Floats, adds: Join
) -> tuple[Floats, dict[int, Floats | float]]:
    """Return the value of every row, and the shares by leaf column."""
    if isinstance(shape, Leaf):
        return values[:, shape.member], {shape.member: 1.0}
    children = [_fold_shares(child, values, adds) for child in shape.children]
    if shape.join is adds:
        whole = np.sum([value for value, _ in children], axis=0)
        weights = [value / whole for value, _ in children]
    else:
        whole = 1 / np.sum([1 / value for value, _ in children], axis=0)
        weights = [whole / value for value, _ in children]
    return whole, {
        column: weight * share
        for weight, (_, shares) in zip(weights, children, strict=True)
        for column, share in shares.items()
    }


def _fold(shape: Shape, figures: Floats, adds: Join) -> Floats:
    if isinstance(shape, Leaf):
        return figures[:, shape.member]
    children = [_fold(child, figures, adds) for child in shape.children]
    if shape.join is adds:
        return np.asarray(np.sum(children, axis=0))
    with np.errstate(divide="ignore"):
        return np.asarray(1 / np.sum([1 / child for child in children], axis=0))


@cache
def joined_shape(join: Join, left: Shape, right: Shape, shift: int) -> Shape:
    """Join two arrangements, the right one with its columns moved up; like joins dissolve."""
    moved = replace(right, lambda column: column + shift)
    rest = moved.children if isinstance(moved, Group) and moved.join is join else (moved,)
    return Group(join, (left, *rest))


def joined(
    join: Join, left: tuple[Rows, Ints], right: tuple[Rows, Ints], uses: Ints
) -> tuple[Ints, Rows]:
    """Join rows pairwise and drop those that use more pieces than there are.

    Parameters
    ----------
    join : how.
    left, right : a table, or found rows, and (n,) row numbers in it; `left` is the head's.
    uses : (parts,) pieces of each part that a network may use.

    Returns
    -------
    (m,) which of the n pairs remained, and the joined rows, unsorted.
    """
    (heads, lefts), (rests, rights) = left, right
    leaves = np.concatenate([heads.leaves[lefts], rests.leaves[rights]], axis=1)
    kept = np.flatnonzero(allowed(leaves, uses))
    lefts, rights, leaves = lefts[kept], rights[kept], leaves[kept]
    a, b = heads.value[lefts], rests.value[rights]
    shapes = tuple(
        joined_shape(join, one, other, heads.size) for one in heads.shapes for other in rests.shapes
    )
    rows = Rows(
        size=heads.size + rests.size,
        shapes=shapes,
        value=a + b if join is Join.SERIES else 1 / (1 / a + 1 / b),
        leaves=leaves,
        shape=(heads.shape[lefts] * len(rests.shapes) + rests.shape[rights]).astype(np.int16),
        head_size=np.full(len(kept), heads.size, dtype=np.int8),
        head=lefts.astype(np.int32),
    )
    return kept, rows


def allowed(leaves: NDArray[np.int32], uses: Ints) -> NDArray[np.bool_]:
    """Tell which rows use no part more often than there are pieces."""
    size = leaves.shape[1]
    scarce = uses < size
    if not scarce.any():
        return np.ones(len(leaves), dtype=np.bool_)
    if size == 2:  # noqa: PLR2004  (a pair needs two pieces only where both are the same part)
        return np.asarray((leaves[:, 0] != leaves[:, 1]) | ~scarce[leaves[:, 0]])
    ordered = np.sort(leaves, axis=1)
    allowed = np.ones(len(leaves), dtype=np.bool_)
    for run in range(1, size):
        repeated = ordered[:, run:] == ordered[:, :-run]
        allowed &= ~(repeated & (uses[ordered[:, run:]] <= run)).any(axis=1)
    return allowed


class Tables:
    """The tables of one pool, each made when first asked for.

    Parameters
    ----------
    value : (parts,) rising values that add under `+`.
    uses : (parts,) pieces of each part that a network may use.
    most_rows : a size whose series or parallel groups number more is not listed.
    """

    def __init__(self, value: Floats, uses: Ints, most_rows: int) -> None:
        count = len(value)
        self.uses = uses
        self.most_rows = most_rows
        self.singles = Rows(
            1,
            (Leaf(0),),
            value,
            np.arange(count, dtype=np.int32)[:, None],
            np.zeros(count, dtype=np.int16),
            np.ones(count, dtype=np.int8),
            np.arange(count, dtype=np.int32),
        )
        self._made: dict[tuple[int, Join], Rows] = {}
        self._sieves: dict[tuple[int, Join], Sieve] = {}
        self._pairs_made: tuple[Ints, Ints] | None = None
        self._counts: dict[int, int] = {}
        self._uses_list = uses.tolist()

    def count(self, size: int) -> int:
        """Tell how many networks of this size there are."""
        if size not in self._counts:
            self._counts[size] = networks_from(self._uses_list, size)
        return self._counts[size]

    def listed(self, size: int) -> bool:
        """Tell whether the groups of this size may be listed as a table."""
        return size == 1 or self.count(size) <= 2 * self.most_rows

    def children(self, size: int, join: Join) -> Rows:
        """Return the networks of a size that may stand as a child in a group of this join."""
        return self.singles if size == 1 else self.groups(size, join.dual)

    def groups(self, size: int, join: Join) -> Rows:
        """Return all groups of this join with `size` >= 2 parts, rising in value."""
        key = (size, join)
        if key not in self._made:
            self._made[key] = self._list(size, join)
        return self._made[key]

    def sieve(self, size: int, adds: Join) -> Sieve:
        """Return the sieve of all groups of a size, in the unit that adds under a join."""
        key = (size, adds)
        if key not in self._sieves:
            value = np.concatenate([self.groups(size, join).value for join in Join])
            self._sieves[key] = Sieve(value if adds is Join.SERIES else 1 / value[::-1])
        return self._sieves[key]

    def _pairs(self) -> tuple[Ints, Ints]:
        """Return the numbers of all pairs of single parts that the counts allow."""
        if self._pairs_made is None:
            left, right = np.triu_indices(len(self.singles))
            kept = (left != right) | (self.uses[left] > 1)
            self._pairs_made = left[kept], right[kept]
        return self._pairs_made

    def _list_pairs(self, join: Join) -> Rows:
        """List the groups of two, the bulk of all listing, without intermediate rows."""
        left, right = self._pairs()
        a, b = self.singles.value[left], self.singles.value[right]
        value = a + b if join is Join.SERIES else 1 / (1 / a + 1 / b)
        order = np.argsort(value, kind="stable")
        heads = left[order].astype(np.int32)
        return Rows(
            2,
            (joined_shape(join, Leaf(0), Leaf(0), 1),),
            value[order],
            np.stack([heads, right[order].astype(np.int32)], axis=1),
            np.zeros(len(order), dtype=np.int16),
            np.ones(len(order), dtype=np.int8),
            heads,
        )

    def _list(self, size: int, join: Join) -> Rows:
        if size == 2:  # noqa: PLR2004 - a pair
            return self._list_pairs(join)
        pieces: list[Rows] = []
        for head_size in range(1, size // 2 + 1):
            heads = self.children(head_size, join)
            rest = self.children(size - head_size, join)
            if head_size == size - head_size:
                lefts, rights = np.triu_indices(len(heads))
            else:
                lefts, rights = _all_pairs(len(heads), len(rest))
            pieces.append(joined(join, (heads, lefts), (rest, rights), self.uses)[1])
            if size - head_size >= 2 * head_size and size - head_size > 1:
                rest = self.groups(size - head_size, join)
                lefts, rights = _all_pairs(len(heads), len(rest))
                fitting = ranks_no_lower(rest, rights, head_size, lefts)
                pieces.append(
                    joined(join, (heads, lefts[fitting]), (rest, rights[fitting]), self.uses)[1]
                )
        together = Rows.concatenated(pieces)
        return together.take(np.argsort(together.value, kind="stable"))


def ranks_no_lower(rest: Rows, rights: Ints, head_size: int, heads: Ints) -> NDArray[np.bool_]:
    """Tell where the head of a rest group ranks no lower than the head it is to be joined to."""
    sizes = rest.head_size[rights]
    return np.asarray((sizes > head_size) | ((sizes == head_size) & (rest.head[rights] >= heads)))


def _all_pairs(lefts: int, rights: int) -> tuple[Ints, Ints]:
    left, right = np.divmod(np.arange(lefts * rights, dtype=np.int64), max(rights, 1))
    return left, right


def every_network(tables: Tables, size: int) -> list[Rows]:
    """Return every network of a size, as one or two tables."""
    if size == 1:
        return [tables.singles]
    return [tables.groups(size, join) for join in Join]
