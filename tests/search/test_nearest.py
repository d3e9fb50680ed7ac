"""The nearest networks: the same distances as sorting the full list, listed or split."""

from __future__ import annotations

import random

import numpy as np
import pytest

from chooser.search.nearest import Wish, nearest
from chooser.search.tables import Tables, every_network


def distances(values, wanted, least, most, count):
    inside = values[(values >= least) & (values <= most)]
    return np.sort(np.abs(inside / wanted - 1))[:count]


def check(rnd, size, most_rows, count):
    parts = rnd.randint(1, 5)
    ohm = np.sort([float(f"{10 ** rnd.uniform(3, 5):.4g}") for _ in range(parts)])
    uses = np.array([rnd.choice((1, 2, 3)) for _ in range(parts)], dtype=np.int64)
    full = Tables(ohm, uses, most_rows=10**9)
    values = np.concatenate([rows.value for rows in every_network(full, size)])
    wanted = 10 ** np.array([rnd.uniform(2, 6) for _ in range(20)])
    least = np.array([rnd.choice((0.0, 2e3, 2e4)) for _ in wanted])
    most = np.array([rnd.choice((np.inf, 5e4, 1e4)) for _ in wanted])
    near = nearest(Tables(ohm, uses, most_rows=most_rows), size, Wish(wanted, least, most), count)
    assert near.rows.size == size
    for owner in range(len(wanted)):
        found = near.rows.value[near.owner == owner]
        ends = least[owner], most[owner]
        assert ((found >= ends[0]) & (found <= ends[1])).all()
        expected = distances(values, wanted[owner], *ends, count)
        np.testing.assert_allclose(
            np.sort(np.abs(found / wanted[owner] - 1)), expected, rtol=1e-9, atol=1e-12
        )


@pytest.mark.parametrize("most_rows", [10**9, 0, 3, 12, 60])
@pytest.mark.parametrize("size", [1, 2, 3, 4])
def test_same_as_sorting_the_full_list(size, most_rows):
    rnd = random.Random(f"{size} {most_rows}")
    for _ in range(5):
        check(rnd, size, most_rows, rnd.choice((1, 3, 8)))


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(10))
def test_same_as_sorting_on_many_pools(seed):
    rnd = random.Random(seed)
    for _ in range(60):
        check(rnd, rnd.choice((2, 3, 4)), rnd.choice((10**9, 0, 3, 12, 60)), rnd.choice((1, 3, 8)))
