"""How long the search takes, beside a plain way to the same answer in the same run.

pytest tests/benchmarks --benchmark-only -m ''
"""

from __future__ import annotations

import sys
from functools import partial
from pathlib import Path

import numpy as np
import pytest

from chooser.circuits.monostable import monostable
from chooser.circuits.timers import timer_named
from chooser.networks import members
from chooser.parts import Kind
from chooser.search.find import find_fits, search_choices
from chooser.search.house_rules import usable_parts
from chooser.search.request import Request, Target
from chooser.search.terms import Rank

sys.path.insert(0, str(Path(__file__).parent))

from all_networks import ten_best
from workshops import measured_stock, preferred_stock

TARGETS = (90.0, 3.7, 1.0, 0.0123)
STOCKS = {"preferred values": preferred_stock, "measured values": partial(measured_stock, 1)}


def request(target: float, rank: Rank, timer: str = "ideal") -> Request:
    circuit = monostable(timer_named(timer), 9.0)
    return Request(circuit, (Target("interval", target, target),), rank=rank)


def chosen(stock, wish):
    """The search alone: house rules, space, ranking, holdings."""
    return search_choices(usable_parts(stock, wish), wish)[0]


def values(stock, kind):
    return np.array([holding.part.value for holding in stock if holding.part.kind is kind])


@pytest.mark.parametrize("target", TARGETS)
@pytest.mark.parametrize("name", STOCKS)
def test_exact_search(benchmark, name, target):
    benchmark.group = f"168 x 42 {name}, error, {target} s"
    stock, wish = STOCKS[name](), request(target, Rank.ERROR)
    found = benchmark.pedantic(chosen, (stock, wish), rounds=15, warmup_rounds=1)
    plain = ten_best(values(stock, Kind.RESISTOR), values(stock, Kind.CAPACITOR), target)
    told = [(c.pairing.ppm, c.pairing.parts, float(c.pairing.size)) for c in found]
    benchmark.extra_info["parts of the ten"] = [row[1] for row in told]
    assert [row[:2] for row in told] == [row[:2] for row in plain]
    assert np.allclose([row[2] for row in told], [row[2] for row in plain], atol=1e-12)


@pytest.mark.parametrize("target", TARGETS)
@pytest.mark.parametrize("name", STOCKS)
def test_all_three_resistor_networks_sorted(benchmark, name, target):
    benchmark.group = f"168 x 42 {name}, error, {target} s"
    stock = STOCKS[name]()
    sides = values(stock, Kind.RESISTOR), values(stock, Kind.CAPACITOR)
    assert len(benchmark.pedantic(ten_best, (*sides, target), rounds=3)) == 10


@pytest.mark.parametrize("rank", list(Rank))
def test_whole_answer(benchmark, rank):
    """With corners, chances, cautions and the re-check of every fit."""
    benchmark.group = f"168 x 42, whole answer, {rank}"
    stock, wish = preferred_stock(), request(90.0, rank)
    answer = benchmark.pedantic(find_fits, (stock, wish), rounds=7, warmup_rounds=1)
    assert len(answer.fits) == 10


@pytest.mark.parametrize("timer", ["ideal", "bipolar"])
@pytest.mark.parametrize("rank", list(Rank))
def test_ten_times_the_stock(benchmark, rank, timer):
    benchmark.group = f"1680 x 420 measured, {rank}, {timer}"
    stock, wish = measured_stock(), request(90.0, rank, timer)
    answer = benchmark.pedantic(find_fits, (stock, wish), rounds=3, warmup_rounds=1)
    assert all(len(list(members(fit.slot("C").network))) >= 1 for fit in answer.fits)
