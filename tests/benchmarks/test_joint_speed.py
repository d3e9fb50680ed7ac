"""How long two resistors and a capacitor take together, beside the plain way for few parts.

pytest tests/benchmarks --benchmark-only -m ''
"""

from __future__ import annotations

import sys
from functools import partial
from pathlib import Path

import numpy as np
import pytest

from chooser.circuits.astable import LN2, astable
from chooser.circuits.diodes import diode_named
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.parts import Kind
from chooser.search.find import find_fits
from chooser.search.request import Request, Target
from chooser.search.terms import Rank

sys.path.insert(0, str(Path(__file__).parent))

from workshops import measured_stock, preferred_stock

STOCKS = {"preferred values": preferred_stock, "measured values": partial(measured_stock, 1)}
BOTH_TIMES = (Target("high", 2.0, 2.0), Target("low", 1.0, 1.0))
FREQUENCY = (Target("period", 1 / 440, 1 / 440), Target("duty", 0.5, 0.6))


def plain_astable(timer: str):
    return astable(timer_named(timer), 9.0)


def steered_astable(timer: str):
    return steered(timer_named(timer), 9.0, diode_named("silicon"))


@pytest.mark.parametrize("timer", ["ideal", "bipolar"])
@pytest.mark.parametrize("name", STOCKS)
@pytest.mark.parametrize("targets", [BOTH_TIMES, FREQUENCY], ids=["both times", "duty range"])
def test_astable_exact(benchmark, name, targets, timer):
    """At most 3 + 3 resistors and 2 capacitors, about 1e18 circuits: the whole answer."""
    benchmark.group = f"168 x 42 {name}, astable"
    wish = Request(plain_astable(timer), targets, rank=Rank.ERROR)
    answer = benchmark.pedantic(find_fits, (STOCKS[name](), wish), rounds=3, warmup_rounds=1)
    benchmark.extra_info["circuits"] = answer.searched.combinations
    assert answer.searched.complete
    assert len(answer.fits) == 10


@pytest.mark.parametrize("circuit", [plain_astable, steered_astable])
@pytest.mark.parametrize("rank", list(Rank))
def test_ten_times_the_stock(benchmark, rank, circuit):
    benchmark.group = f"1680 x 420 measured, two resistors, {rank}"
    wish = Request(circuit("bipolar"), BOTH_TIMES, rank=rank)
    answer = benchmark.pedantic(find_fits, (measured_stock(), wish), rounds=1)
    assert len(answer.fits) == 10


def test_astable_of_three_parts(benchmark):
    benchmark.group = "168 x 42 preferred values, one part in each slot"
    wish = Request(
        plain_astable("ideal"),
        BOTH_TIMES,
        rank=Rank.ERROR,
        most_resistors=1,
        most_capacitors=1,
    )
    answer = benchmark.pedantic(find_fits, (preferred_stock(), wish), rounds=5)
    assert round(abs(answer.fits[0].error), 9) == round(every_triple(preferred_stock())[0], 9)


def test_every_triple_sorted(benchmark):
    benchmark.group = "168 x 42 preferred values, one part in each slot"
    assert len(benchmark.pedantic(every_triple, (preferred_stock(),), rounds=3)) == 10


def every_triple(stock) -> list[float]:
    """The ten smallest errors of all RA, RB and C, by listing every one of them."""
    ohm, farad = (
        np.array([holding.part.value for holding in stock if holding.part.kind is kind])
        for kind in (Kind.RESISTOR, Kind.CAPACITOR)
    )
    ra, rb, c = ohm[:, None, None], ohm[None, :, None], farad[None, None, :]
    worst = np.maximum(np.abs((ra + rb) * c * LN2 / 2.0 - 1), np.abs(rb * c * LN2 / 1.0 - 1))
    return np.sort(worst.ravel())[:10].tolist()
