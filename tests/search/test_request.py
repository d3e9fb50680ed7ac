"""What is asked: targets, their bands, and how far a value is from them."""

from __future__ import annotations

from dataclasses import FrozenInstanceError
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st
from stocks import asked

from chooser.circuits.astable import astable
from chooser.circuits.timers import timer_named
from chooser.search.request import Request, Target

values = st.floats(1e-6, 1e6)


def test_one_value_has_a_band_to_either_side():
    target = Target("interval", 90.0, 90.0)
    assert not target.is_range
    assert target.band(0.02) == pytest.approx((88.2, 91.8))
    assert target.error(90.0) == 0.0
    assert target.error(91.8) == pytest.approx(0.02)
    assert target.error(45.0) == -0.5


def test_a_range_is_meant_as_it_is_written():
    target = Target("duty", 0.5, 0.55)
    assert target.is_range
    assert target.band(0.02) == (0.5, 0.55)
    assert [target.error(value) for value in (0.5, 0.52, 0.55)] == [0.0, 0.0, 0.0]
    assert target.error(0.25) == -0.5
    assert target.error(0.66) == pytest.approx(0.2)


@given(values, values, values)
def test_errors_in_fractions_are_those_in_floats(one, other, value):
    target = Target("period", *sorted((one, other)))
    exact = target.error(Fraction(value))
    assert isinstance(exact, Fraction)
    assert float(exact) == pytest.approx(target.error(value), rel=1e-9, abs=1e-12)
    inside = target.low <= value <= target.high
    assert (target.error(value) == 0.0) is inside
    assert inside or (target.error(value) > 0.0) is (value > target.high)


def test_every_band_counts_and_its_ends_belong_to_it():
    circuit = astable(timer_named("ideal"), 9.0)
    targets = Target("period", 0.01, 0.01), Target("duty", 0.5, 0.6)
    request = Request(circuit, targets, within=0.1)
    assert request.bands == {"period": pytest.approx((0.009, 0.011)), "duty": (0.5, 0.6)}
    assert request.accepts({"period": 0.009, "duty": 0.6, "high": 7.0})
    assert not request.accepts({"period": 0.00899, "duty": 0.55})
    assert not request.accepts({"period": 0.01, "duty": 0.61})


def test_the_target_of_one_output():
    request = asked(90.0)
    assert request.target == 90.0
    assert request.bands == {"interval": pytest.approx((88.2, 91.8))}
    with pytest.raises(FrozenInstanceError):
        request.top = 3
