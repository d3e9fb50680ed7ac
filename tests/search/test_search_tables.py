"""Tables of networks: nothing twice, nothing missing, each value right."""

from __future__ import annotations

import random
from fractions import Fraction
from itertools import product

import numpy as np
import oracle
import pytest
from stocks import plain

from chooser.networks import Join, Leaf, shares_of, value_of
from chooser.search.tables import Rows, Tables, every_network

# OEIS, as in the tests of the formulas.
ALIKE = (1, 2, 4, 10, 24, 66, 180, 522)
DIFFERENT = (1, 2, 8, 52, 472, 5504, 78416, 1320064)
# OEIS A048211: different resistances of exactly n equal resistors.
DISTINCT = (1, 2, 4, 9, 22, 53, 131, 337)
# OEIS A153588: different resistances of n or fewer equal resistors.
DISTINCT_SO_FAR = (1, 3, 7, 15, 35, 77, 179, 429)

E12 = (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82)  # IEC 60063


def tables(values, uses=None):
    uses = [1] * len(values) if uses is None else uses
    return Tables(
        np.array(values, dtype=np.float64), np.array(uses, dtype=np.int64), most_rows=10**9
    )


def networks(made, size):
    return [rows.network(row) for rows in every_network(made, size) for row in range(len(rows))]


def exact_values(made, values, size, adds=Join.SERIES):
    worth = [Fraction(value) for value in values]
    return [value_of(network, adds, worth.__getitem__) for network in networks(made, size)]


def test_parts_all_alike():
    made = tables([1.0], [8])
    assert tuple(len(networks(made, n)) for n in range(1, 9)) == ALIKE


def different(n):
    made = tables([float(value) for value in range(1, n + 1)])
    rows = every_network(made, n)
    assert sum(map(len, rows)) == made.count(n) == DIFFERENT[n - 1]
    return rows


@pytest.mark.parametrize("n", range(1, 8))
def test_parts_all_different(n):
    for rows in different(n):
        if n > 1:
            text = np.concatenate([rows.leaves, rows.shape[:, None]], axis=1)
            assert len(np.unique(text, axis=0)) == len(rows)


@pytest.mark.slow
def test_eight_parts_all_different():
    for rows in different(8):
        assert (np.sort(rows.leaves, axis=1) == np.arange(8)).all()


@pytest.mark.parametrize("adds", list(Join))
def test_values_of_equal_parts(adds):
    """For capacitors side by side adds; by duality the counts are the same."""
    made = tables([1.0], [8])
    seen = set()
    for n in range(1, 9):
        exactly = set(exact_values(made, [1], n, adds))
        seen |= exactly
        assert (len(exactly), len(seen)) == (DISTINCT[n - 1], DISTINCT_SO_FAR[n - 1])


def test_values_of_four_equal_parts():
    """Given with OEIS A048211: 1/4, 2/5, 3/5, 3/4, 1, 4/3, 5/3, 5/2, 4."""
    made = tables([1.0], [4])
    expected = {Fraction(p, q) for p, q in ((1, 4), (2, 5), (3, 5), (3, 4), (1, 1))}
    assert set(exact_values(made, [1], 4)) == expected | {1 / value for value in expected}


@pytest.mark.parametrize(
    ("parts", "networks_in_all"),
    [("aab", 6), ("aaa", 4), ("aabc", 34), ("aabb", 24), ("aaab", 18), ("aaaa", 10), ("aaaaa", 24)],
)
def test_multisets(parts, networks_in_all):
    names = sorted(set(parts))
    uses = [parts.count(name) for name in names]
    made = tables([float(10 + place) for place in range(len(names))], uses)
    assert len(networks(made, len(parts))) == networks_in_all


@pytest.mark.parametrize(("n", "total"), list(enumerate((1, 4, 17, 100, 837, 9312), start=1)))
def test_all_subsets(n, total):
    made = tables([float(value) for value in range(1, n + 1)])
    assert sum(len(networks(made, size)) for size in range(1, n + 1)) == total


@pytest.mark.parametrize(
    ("parts", "all_used", "any_used"),
    [
        # Worked out once by listing in fractions; coincidences are normal.
        ((1, 2, 3), 8, 16),
        ((1, 2, 3, 4), 48, 82),
        ((1, 2, 3, 6), 46, 80),
        ((100, 220, 470), 8, 17),
    ],
)
def test_distinct_values_of_different_parts(parts, all_used, any_used):
    made = tables(parts)
    values = [set(exact_values(made, parts, size)) for size in range(1, len(parts) + 1)]
    assert len(values[-1]) == all_used
    assert len(set().union(*values)) == any_used


def test_values_of_three_by_hand():
    """100, 220 and 470 ohm: a few by hand from Kirchhoff's laws."""
    made = tables((100, 220, 470))
    values = set(exact_values(made, (100, 220, 470), 3))
    assert {Fraction(790), Fraction(25850, 431), Fraction(6900, 79), Fraction(17240, 69)} <= values


@pytest.mark.parametrize(
    ("uses", "pairs", "with_singles", "listed"), [(1, 119, 126, 144), (2, 135, 142, 168)]
)
def test_pairs_of_the_e12_decade(uses, pairs, with_singles, listed):
    """Worked out once by listing in fractions."""
    made = tables(E12, [uses] * 12)
    found = exact_values(made, E12, 2)
    assert len(set(found)) == pairs
    assert len(set(found) | set(E12)) == with_singles
    assert len(found) + 12 == listed


# Against the oracle ----------------------------------------------------------------------------


def random_pool(rnd, parts):
    values = sorted(float(f"{10 ** rnd.uniform(0, 4):.3g}") for _ in range(parts))
    return values, [rnd.choice((1, 1, 2, 3, 1 << 20)) for _ in range(parts)]


def check_all(values, uses, most):
    made = tables(values, uses)
    worth = {part: oracle.fraction(value) for part, value in enumerate(values)}
    everything = oracle.all_networks(dict(enumerate(uses)), most)
    for size in range(1, most + 1):
        expected = [each for each in everything if len(oracle.parts_of(each)) == size]
        listed = [plain(network) for network in networks(made, size)]
        assert len(listed) == len(set(listed)) == made.count(size)
        assert set(listed) == set(expected)
        for rows in every_network(made, size):
            exact = [
                float(oracle.value(plain(rows.network(i)), worth, "+")) for i in range(len(rows))
            ]
            np.testing.assert_allclose(rows.value, exact, rtol=1e-14)
            assert (np.diff(rows.value) >= 0).all()


@pytest.mark.parametrize("seed", range(12))
def test_random_pools_against_the_oracle(seed):
    rnd = random.Random(seed)
    check_all(*random_pool(rnd, rnd.randint(1, 5)), most=4)


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(20))
def test_five_parts_against_the_oracle(seed):
    rnd = random.Random(seed)
    check_all(*random_pool(rnd, rnd.randint(1, 6)), most=5)


def test_equal_values_are_still_different_parts():
    """Two drawers may be kept apart for other reasons: tolerance, leakage."""
    check_all([10.0, 10.0, 20.0], [1, 2, 1], most=4)


# Figures folded over the networks ----------------------------------------------------------------


@pytest.mark.parametrize("adds", list(Join))
@pytest.mark.parametrize("size", [1, 2, 3, 4])
def test_figures_and_shares_against_the_trees(size, adds):
    rnd = np.random.default_rng(size)
    figure, worth, relative = rnd.uniform(1, 10, (3, 4))
    made = tables(sorted(worth), [2, 1, 1, 2])
    for rows in every_network(made, size):
        folded = rows.evaluate(figure, adds)
        shared = rows.evaluate_shares(worth, relative, adds)
        for row in range(len(rows)):
            network = rows.network(row)
            assert folded[row] == pytest.approx(value_of(network, adds, figure.__getitem__))
            shares = shares_of(network, adds, worth.__getitem__)
            expected = sum(share * relative[part] for part, share in shares)
            assert shared[row] == pytest.approx(expected)


def test_a_part_that_does_not_leak_stops_the_leak_of_a_chain():
    made = tables([1.0, 2.0])
    leak = np.array([0.0, 1e-6])
    for rows, expected in zip(every_network(made, 2), (0.0, 1e-6), strict=True):
        assert rows.evaluate(leak, Join.PARALLEL) == pytest.approx([expected])


# The rows as a container -------------------------------------------------------------------------


def test_pieces_put_together_keep_their_networks():
    made = tables([1.0, 2.0, 5.0], [2, 2, 2])
    for size, (first, last) in product((2, 3, 4), ((0, None), (1, -1))):
        pieces = [rows.take(np.arange(len(rows))[first:last]) for rows in every_network(made, size)]
        pieces.append(Rows.none(size))
        together = Rows.concatenated(pieces)
        apart = [rows.network(row) for rows in pieces for row in range(len(rows))]
        assert [together.network(row) for row in range(len(together))] == apart


def test_nothing_to_list():
    made = tables([1.0, 2.0], [1, 1])
    assert networks(made, 3) == []
    assert made.count(3) == 0
    assert networks(tables([1.0], [1]), 2) == []


def test_single_parts():
    made = tables([1.0, 2.0])
    assert networks(made, 1) == [Leaf(0), Leaf(1)]


def test_what_is_too_many_is_not_listed():
    made = Tables(np.array([1.0, 2.0, 3.0]), np.array([1, 1, 1], dtype=np.int64), most_rows=3)
    # 3 pairs each way fit; of 8 triples half are more than 3.
    assert [made.listed(size) for size in (1, 2, 3)] == [True, True, False]
