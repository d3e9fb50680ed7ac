"""The sieve: what it rules out is really empty, whatever bits the floats have."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chooser.search import sieve
from chooser.search.sieve import NARROW, Sieve, sieved_pairs

POSITIVE = st.floats(min_value=1e-12, max_value=1e15)


@settings(max_examples=200, deadline=None)
@given(
    st.lists(POSITIVE, min_size=1, max_size=20),
    st.data(),
    st.floats(0, 1),
    st.floats(0, 1),
)
def test_a_narrow_window_around_a_value_is_never_ruled_out(values, data, place, width):
    value = data.draw(st.sampled_from(values))
    start = value / (1 + NARROW * width * place)
    assert start <= value <= start * (1 + NARROW)
    assert Sieve(np.array(values)).may_hold(np.array([start])).all()


def test_the_widest_window_at_every_edge_of_a_bucket():
    """Values on, just below and just above the powers of two and the buckets between them."""
    edges = np.outer([0.5, 1.0, 2.0, 1024.0], 1 + np.arange(64) / 64).ravel()
    values = np.concatenate([np.nextafter(edges, 0), edges, np.nextafter(edges, np.inf)])
    for value in values:
        made = Sieve(np.array([value]))
        starts = value * (1 - NARROW * np.linspace(0, 1, 33) * (1 - 2**-16))
        assert made.may_hold(starts.copy()).all()


def test_most_empty_windows_are_ruled_out():
    rng = np.random.default_rng(1)
    values = 10 ** rng.uniform(0, 4, 1000)
    starts = 10 ** rng.uniform(-1, 5, 10_000)
    hits = Sieve(values).may_hold(starts.copy())
    # 1000 values mark at most 2000 of some 440 000 buckets between 1 and 10 000.
    assert np.count_nonzero(hits) < 200


@pytest.mark.parametrize(
    "start", [0.0, -1.0, -1e300, 5e-324, 1e-300, 1e300, np.inf, -np.inf, -5e-324]
)
def test_far_out_starts_hold_nothing(start):
    made = Sieve(np.array([1.0, 2.0, 1e3]))
    assert not made.may_hold(np.array([start])).any()


def test_an_empty_table_holds_nothing():
    starts = np.array([0.0, -1.0, 1.0, 1e9, np.inf])
    assert not Sieve(np.empty(0)).may_hold(starts).any()


def in_order(batches):
    pairs = [pair for window, shift in batches for pair in zip(window, shift, strict=True)]
    assert len(set(pairs)) == len(pairs)
    return {(int(window), int(shift)) for window, shift in pairs}


@pytest.mark.parametrize("batch", [1, 1 << 18])
@pytest.mark.parametrize("seed", range(4))
def test_every_pair_that_holds_a_value_comes_through(monkeypatch, seed, batch):
    monkeypatch.setattr(sieve, "_BATCH", batch)
    rng = np.random.default_rng(seed)
    values = np.sort(10 ** rng.uniform(0, 3, 50))
    shifts = np.sort(10 ** rng.uniform(0, 3, 40))
    # Half the windows hold a value plus a shift, so there is something to find.
    hits = rng.choice(values, 150) + rng.choice(shifts, 150)
    bases = np.sort(np.concatenate([hits, 10 ** rng.uniform(1, 3, 150)]) * (1 - 1e-9))
    widths = bases * 1e-7
    first = rng.integers(0, 20, len(bases))
    last = rng.integers(15, 41, len(bases))
    start = bases[:, None] - shifts[None, :]
    end = start + widths[:, None]
    inside = (np.arange(40) >= first[:, None]) & (np.arange(40) < last[:, None])
    inside &= start * NARROW >= widths[:, None]
    count = np.searchsorted(values, end, "right") - np.searchsorted(values, start, "left")
    expected = set(zip(*(axis.tolist() for axis in np.nonzero(inside & (count > 0))), strict=True))
    got = in_order(sieved_pairs(Sieve(values), (bases, widths), shifts, (first, last)))
    assert len(expected) > 20
    assert expected <= got
    assert all(first[window] <= shift < last[window] for window, shift in got)
    # Pairs whose window starts too near to zero for the map are not promised, all others exact.
    assert {pair for pair in got if inside[pair]} == expected
