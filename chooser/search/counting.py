"""How many networks there are, by closed formulas instead of by listing them.

The number of networks that use all of a multiset of parts depends only on how often each part
repeats (its pattern), and the number of multisets of each pattern only on how many holdings
have at least one, two, three … pieces.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import cache
from itertools import product
from math import comb

Pattern = tuple[int, ...]


@cache
def networks_of(pattern: Pattern) -> int:
    """Count the series/parallel networks that use every part of a multiset.

    Parameters
    ----------
    pattern : how often each different part occurs, for instance (2, 1) for a, a, b.

    Returns
    -------
    The number of networks; a network is the same whatever the order inside its groups.

    References
    ----------
    OEIS A000084 (all parts alike), A006351 (all different).
    """
    size = sum(pattern)
    if size == 0:
        return 0
    return 1 if size == 1 else 2 * _groups_of(tuple(sorted(pattern, reverse=True)))


@cache
def _groups_of(pattern: Pattern) -> int:
    """Count the series groups (by duality: the parallel groups) that use the whole pattern.

    A group is a multiset of two or more smaller children, so the count is the coefficient of
    x^pattern in the product over all smaller u of (1 - x^u)^(-children of u).
    """
    whole = pattern
    vectors = list(product(*(range(top + 1) for top in whole)))
    ways = dict.fromkeys(vectors, 0)
    ways[tuple(0 for _ in whole)] = 1
    for part in vectors:
        if not any(part) or part == whole:
            continue
        children = _children_of(part)
        most = min(top // step for top, step in zip(whole, part, strict=True) if step)
        for vector in reversed(vectors):
            for times in range(1, most + 1):
                rest = tuple(v - times * p for v, p in zip(vector, part, strict=True))
                if min(rest) < 0:
                    break
                ways[vector] += ways[rest] * comb(children + times - 1, times)
    return ways[whole]


def _children_of(vector: Pattern) -> int:
    pattern = tuple(sorted((count for count in vector if count), reverse=True))
    return 1 if sum(pattern) == 1 else _groups_of(pattern)


def partitions(number: int, largest: int | None = None) -> Iterator[Pattern]:
    """Yield the ways to write a number as a sum of falling whole numbers."""
    if number == 0:
        yield ()
        return
    for first in range(min(number, largest or number), 0, -1):
        for rest in partitions(number - first, first):
            yield (first, *rest)


def multisets_with(pattern: Pattern, uses: Sequence[int]) -> int:
    """Count the multisets of holdings with a pattern.

    Parameters
    ----------
    pattern : falling repeats, for instance (2, 1).
    uses : how often each holding may be used in one network, >= 0.
    """
    ways, taken = 1, 0
    for repeats in sorted(set(pattern), reverse=True):
        holdings = sum(1 for most in uses if most >= repeats) - taken
        wanted = pattern.count(repeats)
        ways *= comb(max(holdings, 0), wanted)
        taken += wanted
    return ways


def networks_from(uses: Sequence[int], size: int) -> int:
    """Count the networks of exactly `size` parts that the counts allow.

    Parameters
    ----------
    uses : how often each holding may be used in one network.
    size : parts in the network, >= 1.
    """
    return sum(multisets_with(pattern, uses) * networks_of(pattern) for pattern in partitions(size))


def pairs_from(uses: Sequence[int], most: int) -> int:
    """Count the ordered pairs of networks of 1 to `most` parts each that share the pieces.

    Parameters
    ----------
    uses : how often each holding may be used in both networks together.
    most : largest number of parts in either network.
    """
    return sum(
        multisets_with(pattern, uses) * _splits_of(pattern, first)
        for first in range(1, most + 1)
        for second in range(1, most + 1)
        for pattern in partitions(first + second)
    )


@cache
def _splits_of(pattern: Pattern, first: int) -> int:
    """Count the pairs of networks that use a multiset, `first` pieces of it in the first one."""
    total = 0
    for taken in product(*(range(top + 1) for top in pattern)):
        if sum(taken) == first:
            rest = tuple(top - own for top, own in zip(pattern, taken, strict=True))
            total += networks_of(_falling(taken)) * networks_of(_falling(rest))
    return total


def _falling(vector: Pattern) -> Pattern:
    return tuple(sorted((count for count in vector if count), reverse=True))


def networks_from_polarised(free: Sequence[int], polar: Sequence[int], size: int) -> int:
    """Count the capacitor networks of exactly `size` parts with no polarised part in series.

    Polarised parts then stand only side by side at the root, next to any network of others.

    Parameters
    ----------
    free, polar : uses of the unpolarised and of the polarised holdings.
    size : parts in the network, >= 1.
    """
    total = networks_from(free, size)
    for together in range(1, size + 1):
        groups = sum(multisets_with(pattern, polar) for pattern in partitions(together))
        total += groups * (networks_from(free, size - together) if size > together else 1)
    return total
