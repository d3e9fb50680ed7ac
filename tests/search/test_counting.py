"""Numbers of networks against the published sequences and tables worked out by hand."""

from __future__ import annotations

import random
from collections import Counter
from math import comb

import oracle
import pytest

from chooser.search.counting import (
    multisets_with,
    networks_from,
    networks_from_polarised,
    networks_of,
    partitions,
)

# OEIS A000084: series-parallel networks with n unlabeled edges.
ALIKE = (1, 2, 4, 10, 24, 66, 180, 522, 1532, 4624, 14136, 43930)
# OEIS A006351: series-parallel networks with n labeled edges.
DIFFERENT = (1, 2, 8, 52, 472, 5504, 78416, 1320064)
# Networks that use every part of a multiset, found by listing them all with the oracle as well.
MULTISETS = {
    "ab": 2,
    "aa": 2,
    "abc": 8,
    "aab": 6,
    "aaa": 4,
    "abcd": 52,
    "aabc": 34,
    "aabb": 24,
    "aaab": 18,
    "aaaa": 10,
    "abcde": 472,
    "aaaaa": 24,
}
# Networks of any of n different parts: sums of C(n, k) A006351(k).
SUBSETS = (1, 4, 17, 100, 837, 9312, 129005, 2132088)


def pattern_of(parts):
    return tuple(sorted(Counter(parts).values(), reverse=True))


def test_parts_all_alike():
    assert tuple(networks_of((n,)) for n in range(1, len(ALIKE) + 1)) == ALIKE


def test_parts_all_different():
    assert tuple(networks_of((1,) * n) for n in range(1, len(DIFFERENT) + 1)) == DIFFERENT


def test_parts_all_different_by_their_recurrence():
    """OEIS A006351: a(n) = a(n-1) + sum over k from 1 to n-1 of C(n-1, k) a(k) a(n-k)."""
    a = [0, 1]
    for n in range(2, 9):
        a.append(a[n - 1] + sum(comb(n - 1, k) * a[k] * a[n - k] for k in range(1, n)))
    assert [networks_of((1,) * n) for n in range(1, 9)] == a[1:]


@pytest.mark.parametrize(("parts", "networks"), list(MULTISETS.items()))
def test_multisets(parts, networks):
    assert networks_of(pattern_of(parts)) == networks
    assert len(oracle.networks(tuple(sorted(parts)))) == networks


@pytest.mark.parametrize("size", range(1, 7))
def test_every_pattern_against_listing(size):
    for pattern in partitions(size):
        parts = tuple(part for part, times in enumerate(pattern) for _ in range(times))
        assert networks_of(pattern) == len(oracle.networks(parts)), pattern


def test_a_pattern_counts_the_same_in_any_order():
    assert networks_of((1, 3, 2)) == networks_of((3, 2, 1))
    assert networks_of(()) == 0


@pytest.mark.parametrize("n", range(1, 9))
def test_all_subsets_of_different_parts(n):
    total = sum(networks_from([1] * n, size) for size in range(1, n + 1))
    assert total == SUBSETS[n - 1]
    assert total == sum(comb(n, k) * DIFFERENT[k - 1] for k in range(1, n + 1))


@pytest.mark.parametrize(
    ("parts", "totals"),
    [
        # Sums of C(n, k) A006351(k) for k up to m = 1, 2, 3, ...
        (5, (5, 25, 105, 365, 837)),
        (10, (10, 100, 1060, 11980, 130924)),
        (20, (20, 400, 9520, 261460, 7579348)),
        (50, (50, 2500, 159300, 12134900, 1012189620)),
    ],
)
def test_the_space_of_different_parts(parts, totals):
    counts = [networks_from([1] * parts, size) for size in range(1, len(totals) + 1)]
    assert tuple(sum(counts[: m + 1]) for m in range(len(counts))) == totals


# OEIS A000041.
@pytest.mark.parametrize(("n", "ways"), list(enumerate((1, 1, 2, 3, 5, 7, 11, 15, 22, 30))))
def test_partitions(n, ways):
    found = list(partitions(n))
    assert len(found) == len(set(found)) == ways
    assert all(sum(each) == n and list(each) == sorted(each, reverse=True) for each in found)


@pytest.mark.parametrize(
    ("pattern", "uses", "ways"),
    [
        # By hand: which holdings have at least two, then which others have at least one.
        ((2, 1), [1, 1, 1], 0),
        ((2, 1), [2, 1, 1], 2),
        ((2, 1), [2, 2, 1], 4),
        ((1, 1), [5, 5, 5, 0], 3),
        ((2, 2), [2, 2, 3], 3),
        ((3,), [2, 2], 0),
    ],
)
def test_multisets_with_a_pattern(pattern, uses, ways):
    assert multisets_with(pattern, uses) == ways


@pytest.mark.parametrize("seed", range(30))
def test_random_counts_against_listing(seed):
    rnd = random.Random(seed)
    uses = {part: rnd.choice((0, 1, 1, 2, 3, 9)) for part in range(rnd.randint(1, 4))}
    for size in range(1, 5):
        listed = oracle.all_networks(uses, size)
        exactly = [each for each in listed if len(oracle.parts_of(each)) == size]
        assert networks_from(list(uses.values()), size) == len(exactly)


@pytest.mark.parametrize("seed", range(30))
def test_polarised_parts_never_in_series_against_listing(seed):
    rnd = random.Random(seed)
    uses = {part: rnd.choice((1, 1, 2, 3)) for part in range(rnd.randint(1, 4))}
    polar = {part for part in uses if rnd.random() < 0.5}
    for size in range(1, 5):
        exactly = [
            each
            for each in oracle.all_networks(uses, size)
            if len(oracle.parts_of(each)) == size and not oracle.polar_in_series(each, polar)
        ]
        free = [most for part, most in uses.items() if part not in polar]
        assert networks_from_polarised(free, [uses[part] for part in polar], size) == len(exactly)
