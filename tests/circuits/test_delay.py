"""The RC delay against the circuit step by step, and where its threshold is too near."""

from math import inf, log

import pytest
from hypothesis import given
from hypothesis import strategies as st
from turning import Turn, follow

from chooser.circuits.delay import delay
from chooser.errors import BadRequestError
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
    usual = float(circuit.law.interval(r, c, 0.0))
    (early,), (late,) = (stepped(5.0, threshold * by, (r, c, 0.0)) for by in (0.9, 1.04))
    assert usual * (1.0 - circuit.error.minus) == pytest.approx(early, rel=1e-7)
    assert usual * (1.0 + circuit.error.plus) == pytest.approx(late, rel=1e-7)


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
