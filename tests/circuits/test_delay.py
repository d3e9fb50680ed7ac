"""The RC delay against the circuit step by step, and where its threshold is too near."""

from math import inf, log
from statistics import NormalDist

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from sample_slots import slot
from turning import Turn, follow

from chooser.circuits.delay import delay
from chooser.errors import BadRequestError
from chooser.interval import outlook
from chooser.parts import Tolerance

SURE = Tolerance(0.0, 0.0)


def stepped(supply, threshold, parts):
    """Switch the supply on and follow the node to the threshold."""
    r, c, g = parts
    turn = Turn(lambda v: ((supply - v) / r - g * v) / c, threshold * supply)
    return follow([turn], 0.0, 100.0 * r * c)


@pytest.mark.parametrize("supply", [3.3, 12.0])
@pytest.mark.parametrize("threshold", [0.1, 0.5, 0.7, 0.9, 0.95])
def test_a_step_of_the_supply(supply, threshold):
    law = delay(supply, threshold, SURE).law
    r, c = 220e3, 1e-6
    for share in (0.0, 0.01, 0.05):
        (time,) = stepped(supply, threshold, (r, c, share / r))
        assert float(law.interval(r, c, share / r)) == pytest.approx(time, rel=1e-7)


@pytest.mark.parametrize("threshold", [0.1, 0.5, 0.7, 0.9])
def test_an_input_that_turns_early_or_late(threshold):
    circuit = delay(5.0, threshold, Tolerance(0.1, 0.04))
    r, c = 220e3, 1e-6
    (early,), (late,) = (stepped(5.0, threshold * by, (r, c, 0.0)) for by in (0.9, 1.04))
    ends = sorted(float(law.interval(r, c, 0.0)) for law in circuit.corners)
    assert ends == pytest.approx([early, late], rel=1e-7)
    times = [float(law.interval(r, c, 0.0)) for _, law in circuit.scatter]
    assert early < min(times) < float(circuit.law.interval(r, c, 0.0)) < max(times) < late


@pytest.mark.parametrize("margin", [0.99, 1.01])
def test_a_leak_that_holds_the_node_below_the_threshold(margin):
    # Worked out: R and leak divide the supply; 0.7 is never reached from R G = 3 / 7 on.
    law, r, c = delay(5.0, 0.7, SURE).law, 1e5, 1e-6
    g = margin * 3.0 / 7.0 / r
    endless = margin > 1.0
    assert (stepped(5.0, 0.7, (r, c, g)) == [inf]) is endless
    assert (float(law.interval(r, c, g)) == inf) is endless
    assert (r >= float(law.endless_from(g))) is endless
    assert (law.trip_ratio(r, g) <= 1.0) is endless
    assert float(law.leak_bound(g, 1.0)) == pytest.approx(float(law.endless_from(g)))


def test_a_leak_and_a_high_threshold_together_may_keep_it_from_ending():
    """80 % give or take 15 %: at 90 % of the supply, say, a leak that 80 % do not mind wins.

    Worked out: R and leak divide the supply to 1 / (1 + R G); at R G = 0.15 that is 87 %, which
    a threshold of 92 % never sees and one of 80 % does.
    """
    circuit = delay(5.0, 0.8, Tolerance(0.15, 0.15))
    r, c = slot(100e3, 0.01, 0.01), slot(10e-6, 0.2, 0.2, 0.03e-5, 0.15e-5)
    found = outlook(circuit, (r,), c, {"interval": (0.0, 1e9)})
    assert found.chief.high is None
    assert found.chief.nominal < inf
    # With typical leakage 97 % are reached, so every piece ends.
    assert found.chance == pytest.approx(1.0)
    # At 15 % every time thresholds above 87 % never end: (87 / 80 - 1) / 5 % sigmas up.
    worn = slot(10e-6, 0.2, 0.2, 0.15e-5, 0.15e-5)
    found = outlook(circuit, (slot(100e3, 0.0, 0.0),), worn, {"interval": (0.0, 1e9)})
    assert found.chance == pytest.approx(NormalDist().cdf((1 / 1.15 / 0.8 - 1) / 0.05), abs=0.03)
    # Without a leak the threshold alone: ln 5 to ln(1 / (1 - 0.92)).
    tight = slot(10e-6, 0.0, 0.0)
    found = outlook(circuit, (slot(100e3, 0.0, 0.0),), tight, {}).chief
    assert (found.low, found.high) == pytest.approx((-log(1 - 0.68), -log(1 - 0.92)))


def test_a_scattering_threshold_against_monte_carlo():
    circuit = delay(5.0, 0.6, Tolerance(0.2, 0.1))
    r, c = slot(100e3, 0.01, 0.01), slot(1e-6, 0.05, 0.05)
    found = outlook(circuit, (r,), c, {"interval": (0.085, 0.095)})
    rng, runs = np.random.default_rng(11), 400_000
    z = rng.standard_normal(runs)
    trips = 0.6 * (1.0 + z / 3.0 * np.where(z < 0.0, 0.2, 0.1))
    times = (
        rng.uniform(r.low, r.high, runs) * rng.uniform(c.low, c.high, runs) * -np.log(1.0 - trips)
    )
    assert found.chief.mean == pytest.approx(float(times.mean()), rel=3e-3)
    assert found.chief.spread == pytest.approx(float(times.std()) / found.chief.nominal, rel=0.03)
    hits = float(np.mean((times >= 0.085) & (times <= 0.095)))
    assert found.chance == pytest.approx(hits, abs=0.01)


def test_what_was_decided_is_said():
    assert delay(5.0, 0.5, SURE).setting == "until 50% of the supply"
    assert delay(5.0, 0.5, Tolerance(0.1, 0.1)).setting == "until 50% of the supply +/-10%"


@given(st.floats(0.01, 0.95), st.floats(1.0, 8.0), st.floats(-11, -2))
def test_resistance_is_the_inverse(threshold, r, c):
    law = delay(5.0, threshold, SURE).law
    time = float(law.interval(10.0**r, 10.0**c, 0.0))
    assert time == pytest.approx(10.0 ** (r + c) * -log(1.0 - threshold))
    assert float(law.resistance(time, 10.0**c, 0.0)) == pytest.approx(10.0**r, rel=1e-11)
    assert law.endless_from(0.0) == inf


@pytest.mark.parametrize("threshold", [0.951, 0.99, 1.0, 1.4, 0.0, -0.5, float("nan")])
def test_a_threshold_that_is_not_reached_in_good_time_is_refused(threshold):
    with pytest.raises(BadRequestError, match=r"is not reached.*below 95%|reached at once"):
        delay(5.0, threshold, SURE)


def test_the_circuit():
    circuit = delay(5.0, 0.5, SURE)
    assert (circuit.slots, circuit.outputs) == (("R", "C"), ("interval",))
    assert set(circuit.corners) == {circuit.law}
    assert (circuit.bounds.least, circuit.bounds.most) == (0.0, 10e6)
    assert not circuit.lossless
