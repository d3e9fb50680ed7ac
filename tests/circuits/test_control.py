"""A voltage forced on the control pin: what is allowed, and what is said of the rest."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.circuits.astable import astable, trip_points
from chooser.circuits.control import HIGHEST, LOWEST_VOLT, check_control
from chooser.circuits.diodes import diode_named
from chooser.circuits.monostable import monostable
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.errors import BadRequestError

NE555 = timer_named("NE555")


@pytest.mark.parametrize("control", [1.0, 2.5, 6.0, 8.1])
def test_what_is_allowed_comes_back(control):
    assert check_control(NE555, 9.0, control) == control
    assert trip_points(NE555, 9.0, control) == (control / 9.0, control / 18.0)


def test_the_lower_trip_point_follows_by_the_timers_own_divider():
    """ICM7555 product specification p. 339: 0.65 and 0.31 of the supply, when left alone."""
    timer = timer_named("ICM7555")
    assert trip_points(timer, 10.0, None) == (0.65, 0.31)
    assert trip_points(timer, 10.0, 6.5) == pytest.approx((0.65, 0.31))
    assert trip_points(timer, 10.0, 5.0) == pytest.approx((0.5, 0.5 * 0.31 / 0.65))
    free, forced = astable(timer, 10.0), astable(timer, 10.0, 6.5)
    for law, other in zip(free.corners, forced.corners, strict=True):
        times = [float(t) for t in law.times((1e4, 2e4), 1e-6, 0.0)]
        assert [float(t) for t in other.times((1e4, 2e4), 1e-6, 0.0)] == pytest.approx(times)


def test_it_is_said_that_the_pin_is_forced():
    assert monostable(NE555, 9.0).setting == astable(NE555, 9.0).setting == ""
    assert monostable(NE555, 9.0, 4.0).setting == "control pin at 4 V"
    silicon = diode_named("silicon")
    assert steered(NE555, 9.0, silicon).setting == "silicon diode past RB"
    assert (
        steered(NE555, 9.0, silicon, both=True, control=4.0).setting
        == "a silicon diode in each path, control pin at 4 V"
    )
    assert steered(NE555, 9.0, diode_named("0.6V")).setting == "diode of 600 mV past RB"


@pytest.mark.parametrize("control", [0.999, 8.101, 9.0, 12.0, 0.0, -3.0, float("nan")])
def test_what_is_not_is_refused_with_what_would_be(control):
    assert (LOWEST_VOLT, HIGHEST) == (1.0, 0.9)
    with pytest.raises(BadRequestError, match=r"between 1 V and 8\.1 V\.$"):
        check_control(NE555, 9.0, control)


def test_the_sentence_names_timer_control_and_supply():
    said = "The NE555 timer cannot trip at 4.6 V with a supply of 5 V; choose a control voltage"
    with pytest.raises(BadRequestError, match=said.replace(".", r"\.")):
        check_control(NE555, 5.0, 4.6)


@given(st.floats(4.5, 16.0), st.floats(0.0, 1.0))
def test_the_low_time_stays_and_the_high_time_grows(supply, part):
    # Worked out: the trip points stay at 2 : 1, so the discharge always halves the voltage.
    control = 1.0 + part * (0.9 * supply - 1.0)
    ideal = timer_named("ideal")
    high, low = astable(ideal, supply, control).typical.times((1e5, 1e5), 1e-6, 0.0)
    more, same = astable(ideal, supply, control * 0.99 + 0.01).typical.times((1e5, 1e5), 1e-6, 0.0)
    assert float(low) == pytest.approx(float(same), rel=1e-12)
    assert float(more) <= float(high) * (1.0 + 1e-12)
    once = float(monostable(ideal, supply, control).law.interval(1e5, 1e-6, 0.0))
    assert once > float(high) / 2.0  # the one-shot starts from 0 V, the astable from half of it


def test_each_mode_of_a_timer_refuses_the_same():
    for build in (
        lambda: monostable(NE555, 5.0, 4.6),
        lambda: astable(NE555, 5.0, 4.6),
        lambda: steered(NE555, 5.0, diode_named("schottky"), control=4.6),
    ):
        with pytest.raises(BadRequestError, match="choose a control voltage between"):
            build()
