"""Windows: the same networks as filtering the full list, listed, split or sieved."""

from __future__ import annotations

import random
from collections import Counter

import numpy as np
import oracle
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from stocks import plain

from chooser.search import windows
from chooser.search.tables import Tables, every_network
from chooser.search.windows import find_in_windows, ragged


def random_pool(rnd, parts):
    values = sorted(float(f"{10 ** rnd.uniform(0, 3):.3g}") for _ in range(parts))
    return values, [rnd.choice((1, 1, 2, 3, 1 << 20)) for _ in range(parts)]


def random_windows(rnd, values, number):
    """Wide ones, narrow ones, empty ones, and some that just hold one value."""
    lows, highs = [], []
    for _ in range(number):
        middle = 10 ** rnd.uniform(-0.7, 3.7)
        width = rnd.choice((1e-7, 1e-6, 5e-6, 1e-3, 0.1, 0.5))
        low, high = middle * (1 - width), middle * (1 + width)
        if rnd.random() < 0.4:
            low = high = rnd.choice(values)
        if rnd.random() < 0.1:
            low, high = high * 1.01, low
        lows.append(low)
        highs.append(high)
    return np.array(lows), np.array(highs)


def held(tables, size, low, high):
    """The networks in each window, by filtering the list of all of them."""
    return Counter(
        (number, plain(rows.network(row)))
        for rows in every_network(tables, size)
        for row in range(len(rows))
        for number in np.flatnonzero((low <= rows.value[row]) & (rows.value[row] <= high))
    )


def found(tables, size, low, high):
    batches = list(find_in_windows(tables, size, low, high))
    for batch in batches:
        assert batch.rows.size == size
        edges = low[batch.window], high[batch.window]
        assert (batch.rows.value >= edges[0] * (1 - 1e-11)).all()
        assert (batch.rows.value <= edges[1] * (1 + 1e-11)).all()
    return Counter(
        (int(batch.window[row]), plain(batch.rows.network(row)))
        for batch in batches
        for row in range(len(batch.rows))
    )


def check(rnd, size, most_rows, parts):
    values, uses = random_pool(rnd, parts)
    pool = np.array(values), np.array(uses, dtype=np.int64)
    full = Tables(*pool, most_rows=10**9)
    made = [value for rows in every_network(full, size) for value in rows.value.tolist()]
    low, high = random_windows(rnd, made or values, 30)
    expected = held(full, size, low, high)
    got = found(Tables(*pool, most_rows=most_rows), size, low, high)
    assert max(expected.values(), default=1) == max(got.values(), default=1) == 1
    assert set(expected) <= set(got)
    # What `found` let through beside them lies on an edge, where the last bit may go either way.
    assert len(got) <= len(expected) * 1.05 + 2
    return len(expected)


@pytest.mark.parametrize("size", [1, 2, 3, 4, 5])
@pytest.mark.parametrize("way", ["listed", "split", "sieved", "batches"])
def test_same_as_filtering_the_full_list(monkeypatch, size, way):
    rnd = random.Random(f"{size} {way}")
    total = 0
    for _ in range(8 if size < 5 else 3):
        with monkeypatch.context() as patch:
            if way == "sieved":
                patch.setattr(windows, "WORTH", 0)
            if way == "batches":
                patch.setattr(windows, "MOST_PAIRS", rnd.randint(1, 5))
            most_rows = 10**9 if way == "listed" else rnd.choice((0, 3, 12, 60, 200))
            parts = rnd.randint(1, 5 if size < 5 else 3)
            total += check(rnd, size, most_rows, parts)
    assert total > 20


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(20))
def test_same_as_filtering_on_many_pools(monkeypatch, seed):
    rnd = random.Random(seed)
    for _ in range(20):
        with monkeypatch.context() as patch:
            patch.setattr(windows, "WORTH", rnd.choice((0, 50_000)))
            patch.setattr(windows, "MOST_PAIRS", rnd.choice((1, 3, 100, 1 << 20)))
            size = rnd.choice((2, 3, 3, 4, 4, 5))
            check(rnd, size, rnd.choice((0, 3, 12, 60, 200, 1000)), rnd.randint(1, 9 - size))


@pytest.mark.parametrize("most_rows", [0, 10**9])
@pytest.mark.parametrize("size", [1, 2, 3, 4])
def test_a_window_without_width_holds_the_value_at_its_ends(size, most_rows):
    """Each value in turn is both ends of a window; rounding must not push it out."""
    pool = np.array([4.7, 10.0, 33.0, 68.0]), np.array([2, 1, 3, 1], dtype=np.int64)
    full = Tables(*pool, most_rows=10**9)
    for rows in every_network(full, size):
        got = found(Tables(*pool, most_rows=most_rows), size, rows.value, rows.value)
        assert {(row, plain(rows.network(row))) for row in range(len(rows))} <= set(got)


def test_one_window_over_everything():
    pool = np.array([1.0, 2.0, 5.0]), np.array([1, 2, 1], dtype=np.int64)
    expected = oracle.all_networks({0: 1, 1: 2, 2: 1}, 4)
    for size in (1, 2, 3, 4):
        tables = Tables(*pool, most_rows=0)
        got = found(tables, size, np.array([0.0]), np.array([np.inf]))
        of_size = [each for each in expected if len(oracle.parts_of(each)) == size]
        assert got == Counter((0, each) for each in of_size)


def test_no_windows_and_empty_windows():
    tables = Tables(np.array([1.0, 2.0]), np.array([1, 1], dtype=np.int64), most_rows=0)
    assert not found(tables, 2, np.empty(0), np.empty(0))
    assert not found(tables, 2, np.array([5.0]), np.array([4.0]))
    assert not found(tables, 3, np.array([0.1]), np.array([100.0]))


@pytest.mark.parametrize("most", [1, 3, 1000])
@settings(max_examples=50, deadline=None)
@given(ranges=st.lists(st.tuples(st.integers(0, 9), st.integers(0, 9)), max_size=8))
def test_ragged_lays_out_every_range(most, ranges):
    kept, windows.MOST_PAIRS = windows.MOST_PAIRS, most
    try:
        first, last = (np.array([pair[end] for pair in ranges], dtype=np.int64) for end in (0, 1))
        pieces = list(ragged(first, last))
    finally:
        windows.MOST_PAIRS = kept
    laid = [(int(owner), int(item)) for piece in pieces for owner, item in zip(*piece, strict=True)]
    assert laid == [
        (number, item) for number, pair in enumerate(ranges) for item in range(pair[0], pair[1])
    ]
