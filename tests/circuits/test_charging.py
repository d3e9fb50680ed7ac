"""One charging movement: against step-by-step integration, against itself, and its own laws."""

from dataclasses import replace
from itertools import product
from math import inf, log

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from chooser.circuits.charging import Phase, falling, rising, swing_time

LN3 = log(3.0)
PLAIN = Phase(5.0, 2.0 / 3.0)


def test_a_leak_of_three_times_r_makes_exactly_half_as_long_again():
    # Worked out: R' = 3/4 R, and ln((3/4) / (3/4 - 2/3)) = ln 9 = 2 ln 3.
    assert float(PLAIN.interval(1e6, 1e-6, 1.0 / 3e6)) == pytest.approx(1.5 * LN3, rel=1e-14)


@pytest.mark.parametrize("ratio", [2.0, 1.9, 1.0, 0.01])
def test_a_leak_of_twice_r_or_less_never_ends(ratio):
    # Worked out: the node settles at Rp / (R + Rp), at or below two thirds.
    assert PLAIN.interval(1e6, 1e-6, 1.0 / (ratio * 1e6) * (1.0 + 1e-12)) == inf


# Against numerical integration -------------------------------------------------------------------


def by_integration(r, c, g, *, source, start, stop, current, seconds):
    """Move the node step by step, in volt; the event is the trip point."""

    def slope(_time, node):
        return [((source - node[0]) / r - current - g * node[0]) / c]

    def tripped(_time, node):
        return node[0] - stop

    tripped.terminal = True
    run = solve_ivp(slope, (0.0, seconds), [start], "LSODA", events=tripped, rtol=1e-10, atol=1e-12)
    return float(run.t_events[0][0]) if len(run.t_events[0]) else inf


@pytest.mark.parametrize("supply", [5.0, 15.0])
@pytest.mark.parametrize("r", [1e3, 47e3, 2.2e6])
@pytest.mark.parametrize("switch", [0.0, 44.4])
@pytest.mark.parametrize("current", [0.0, 3e-8, 3.5e-7])
@pytest.mark.parametrize("share", [0.0, 0.02, 0.3])
def test_from_a_switch_that_holds_the_node_down(supply, r, switch, current, share):
    # `share` is the leak in siemens, counted in 1/R.
    phase = Phase(supply, 2.0 / 3.0, current, switch)
    time = float(phase.interval(r, 22e-6, share / r))
    expected = by_integration(
        r, 22e-6, share / r,
        source=supply, start=supply * switch / (r + switch), stop=supply * 2.0 / 3.0,
        current=current, seconds=200.0 * r * 22e-6,
    )  # fmt: skip
    assert expected == pytest.approx(time, rel=1e-7)


SWINGS = [
    # (source, start, stop) as fractions of the supply; the first half rises, the second falls.
    (1.0, 1.0 / 3.0, 2.0 / 3.0),
    (1.0, 0.31, 0.65),
    (0.9, 0.0, 0.5),
    (0.97, 0.38, 0.58),
    (0.0, 2.0 / 3.0, 1.0 / 3.0),
    (0.0, 0.65, 0.31),
    (0.03, 1.0, 0.4),
    (0.1, 0.58, 0.38),
]


def phase_of(supply, source, start, stop, **more):
    make = rising if start < stop else falling
    return make(supply, source, start, stop, **more)


@pytest.mark.parametrize("swing", SWINGS)
@pytest.mark.parametrize("series", [0.0, 180.0])
def test_rising_and_falling_with_all_losses(swing, series):
    source, start, stop = swing
    r, c = 3.3e3, 1e-6
    # Currents both ways and leaks, each counted in what R carries or conducts.
    for supply, part, share in product((4.5, 12.0), (-0.2, 0.0, 0.1, 0.9), (0.0, 0.1, 3.0)):
        current, g = part * supply / r, share / r
        phase = phase_of(supply, source, start, stop, current=current, series=series)
        expected = by_integration(
            r + series, c, g,
            source=source * supply, start=start * supply, stop=stop * supply,
            current=current, seconds=60.0 * (r + series) * c,
        )  # fmt: skip
        assert float(phase.interval(r, c, g)) == pytest.approx(expected, rel=1e-7)


@pytest.mark.parametrize("swing", SWINGS[:4])
def test_a_switch_below_any_start(swing):
    """The source pulls the node up through the switch before the movement starts."""
    source, start, stop = swing
    r, c, switch, series = 2.2e3, 1e-6, 200.0, 50.0
    phase = rising(9.0, source, start, stop, switch=switch, series=series, current=1e-5)
    held = start + (source - start) * switch / (r + series + switch)
    expected = by_integration(
        r + series, c, 1e-5,
        source=source * 9.0, start=held * 9.0, stop=stop * 9.0, current=1e-5, seconds=1.0,
    )  # fmt: skip
    assert float(phase.interval(r, c, 1e-5)) == pytest.approx(expected, rel=1e-7)


# Laws of a node that rises from 0 V --------------------------------------------------------------


@st.composite
def phases(draw):
    return Phase(
        swing=draw(st.floats(1.0, 20.0)),
        threshold=draw(st.floats(0.05, 0.95)),
        leak_current=draw(st.one_of(st.just(0.0), st.floats(-13, -5).map(lambda x: 10**x))),
        discharge_resistance=draw(st.one_of(st.just(0.0), st.floats(0.1, 500.0))),
    )


leaks = st.one_of(st.just(0.0), st.floats(-13, -4).map(lambda x: 10.0**x))
farads = st.floats(-11, -2).map(lambda x: 10.0**x)


def ends(g, phase):
    """The resistances between which there is a time that ends, worked out anew."""
    loss = phase.leak_current / phase.swing + phase.threshold * g
    most = (1.0 - phase.threshold) / loss if loss else 1e12
    return phase.discharge_resistance * (1.0 - phase.threshold) / phase.threshold, most


@given(phases(), leaks)
def test_ends_of_the_domain(phase, g):
    least, most = ends(g, phase)
    assert phase.starts_from == pytest.approx(least)
    lossy = phase.leak_current > 0.0 or g > 0.0
    assert float(phase.endless_from(g)) == (pytest.approx(most) if lossy else inf)
    assert phase.proportional
    if lossy and least < most:
        assert phase.interval(most * (1 + 1e-9), 1e-6, g) == inf
        assert np.isfinite(phase.interval(most * (1 - 1e-9), 1e-6, g))
        # At the end the current through R at the trip point is all lost.
        assert phase.trip_ratio(most, g) == pytest.approx(1.0)


@settings(max_examples=300)
@given(phases(), leaks, farads, st.floats(-9, -1e-9), st.booleans())
def test_resistance_is_the_inverse_of_interval(phase, g, c, power, near_the_end):
    least, most = ends(g, phase)
    part = 10.0**power
    r = least + (most - least) * ((1.0 - part) if near_the_end else part)
    time = float(phase.interval(r, c, g))
    assume(0.0 < time < inf)
    assert float(phase.resistance(time, c, g)) == pytest.approx(r, rel=1e-12)


@given(phases(), leaks, farads, st.floats(-6, 6))
def test_interval_is_the_inverse_of_resistance(phase, g, c, power):
    time = 10.0**power
    r = phase.resistance(time, c, g)
    steep = float(phase.sensitivity(r, c, g))
    assume(steep < 1e6)  # nearer to the end one bit of R is more than the tolerance
    assert float(phase.interval(r, c, g)) == pytest.approx(time, rel=1e-13 * (10.0 + steep))


@given(phases(), leaks, farads, st.floats(0.001, 0.98))
def test_sensitivity_is_the_slope_and_never_below_one(phase, g, c, part):
    least, most = ends(g, phase)
    r = least + (most - least) * part
    steep = float(phase.sensitivity(r, c, g))
    assert steep >= 1.0
    assume(steep < 50.0)
    assert slope_of(phase, r, c, g) == pytest.approx(steep, rel=1e-4)


def slope_of(law, r, c, g):
    """The relative slope in R, from two points; none where one of them is no time."""
    step = 1e-5
    around = law.interval(r * np.array([1.0 - step, 1.0 + step]), c, g)
    assume(around[0] > 0.0 and around[1] < inf)
    return np.log(around[1] / around[0]) / np.log((1.0 + step) / (1.0 - step))


@given(phases(), leaks, st.floats(3, 7), st.floats(0.0, 0.5))
def test_losses_and_values_lengthen_and_start_voltage_shortens(phase, g, power, more):
    r, c = 10.0**power, 1e-6
    grown = 1.0 + more
    base = float(phase.interval(r, c, g))
    room = base * (1.0 - 1e-12)
    assert float(phase.interval(r * grown, c, g)) >= room
    assert float(phase.interval(r, c * grown, g)) >= room
    assert float(phase.interval(r, c, g * grown)) >= room
    current = replace(phase, leak_current=phase.leak_current * grown)
    assert float(current.interval(r, c, g)) >= room
    switch = replace(phase, discharge_resistance=phase.discharge_resistance * grown)
    assert float(switch.interval(r, c, g)) <= base * (1.0 + 1e-12)
    assert float(phase.lossless().interval(r, c, g)) <= base * (1.0 + 1e-12)


def test_a_switch_that_cannot_empty_the_capacitor_makes_no_interval():
    phase = Phase(5.0, 2.0 / 3.0, 0.0, 100.0)
    assert phase.interval(49.9, 1e-6, 0.0) == 0.0
    assert phase.interval(50.1, 1e-6, 0.0) > 0.0
    assert phase.sensitivity(49.9, 1e-6, 0.0) == inf
    # Losses beyond what the switch itself carries leave no resistor at all.
    np.testing.assert_array_equal(
        np.isfinite(phase.resistance(1.0, 1e-6, [1.0, 1e-6])), [False, True]
    )


# Laws of any movement ----------------------------------------------------------------------------


@st.composite
def movements(draw, *, series=True):
    """A supply, a swing, a current and what of it `swing_time` takes."""
    supply = draw(st.floats(2.0, 18.0))
    low, high = sorted((draw(st.floats(0.05, 0.45)), draw(st.floats(0.5, 0.9))))
    upwards = draw(st.booleans())
    source = draw(st.floats(0.93, 1.0)) if upwards else draw(st.floats(0.0, 0.02))
    start, stop = (low, high) if upwards else (high, low)
    current = draw(st.one_of(st.just(0.0), st.floats(-12, -5).map(lambda x: 10.0**x)))
    if draw(st.booleans()):
        current = -current
    more = draw(st.one_of(st.just(0.0), st.floats(1.0, 1e3))) if series else 0.0
    phase = phase_of(supply, source, start, stop, current=current, series=more)
    figures = {"source": source, "start": start, "stop": stop, "loss": current / supply}
    return phase, figures


@settings(max_examples=300)
@given(movements(), leaks, farads, st.floats(1, 8))
def test_round_trip_of_any_movement(movement, g, c, power):
    phase, _ = movement
    r = 10.0**power
    time = float(phase.interval(r, c, g))
    steep = float(phase.sensitivity(r, c, g))
    # A leak that helps makes the time depend less and less on R.
    assume(0.0 < time < inf and steep > 1e-4)
    again = float(phase.resistance(time, c, g))
    assert again == pytest.approx(r, rel=1e-12 * max(1.0, 1.0 / steep))


@given(movements(), leaks, st.floats(1, 8))
def test_sensitivity_of_any_movement(movement, g, power):
    phase, _ = movement
    r = 10.0**power
    steep = float(phase.sensitivity(r, 1e-6, g))
    numeric = slope_of(phase, r, 1e-6, g)
    assume(steep < 50.0)
    assert numeric == pytest.approx(steep, rel=1e-4, abs=1e-5)
    if phase.proportional:
        assert steep >= 1.0


@settings(max_examples=300)
@given(movements(series=False), leaks, farads, st.floats(1, 8))
def test_swing_time_agrees_with_the_phase(movement, g, c, power):
    phase, figures = movement
    r = 10.0**power
    end = float(phase.endless_from(g))
    assume(abs(r / end - 1.0) > 1e-6)  # at the end the last bit decides
    near = max(1.0, 1.0 / abs(1.0 - r / end))
    time = float(phase.interval(r, c, g))
    assert float(swing_time(r, c, g, **figures)) == pytest.approx(time, rel=1e-13 * near)
    assert (time == inf) == (r > end)


def test_swing_time_where_the_source_does_not_pull_past_the_stop():
    # Away from it, on the way up and on the way down.
    assert swing_time(1e3, 1e-6, 0.0, source=1.0, start=0.7, stop=0.6) == inf
    assert swing_time(1e3, 1e-6, 0.0, source=0.0, start=0.3, stop=0.4) == inf
    # Towards it, but not as far.
    assert swing_time(1e3, 1e-6, 0.0, source=0.5, start=0.1, stop=0.6) == inf
    assert swing_time(1e3, 1e-6, 0.0, source=0.5, start=0.1, stop=0.5) == inf
    assert swing_time(1e3, 1e-6, 0.0, source=0.4, start=0.9, stop=0.3) == inf
    # Far enough, but for what is lost: 1 V of 5 V across R, or a leak of R.
    assert swing_time(1e3, 1e-6, 0.0, source=1.0, start=0.0, stop=0.81, loss=2e-4) == inf
    assert swing_time(1e3, 1e-6, 1e-3, source=1.0, start=0.0, stop=0.51) == inf
    found = swing_time([[1e3], [1e6]], 1e-6, [0.0, 1e-7, 1e-6], source=1.0, start=0.0, stop=0.6)
    assert found.shape == (2, 3)


# A leak that helps -------------------------------------------------------------------------------


@given(
    st.floats(0.5, 1.0), st.floats(0.05, 0.45), farads,
    st.floats(-9, -4).map(lambda x: 10.0**x), st.floats(1.001, 100.0),
)  # fmt: skip
def test_no_resistance_is_slower_than_the_leak_alone(start, stop, c, g, slower):
    # Worked out: without any R the leak moves the node from V0 to V1 in C / G ln(V0 / V1).
    phase = falling(9.0, 0.0, start, stop)
    alone = c / g * log(start / stop)
    assert phase.resistance(alone * slower, c, g) == inf
    r = float(phase.resistance(alone / slower, c, g))
    assert 0.0 < r < inf
    assert float(phase.interval(r, c, g)) == pytest.approx(alone / slower, rel=1e-10)
    assert phase.endless_from(g) == inf
    assert phase.trip_ratio(r, g) == inf
    assert not phase.proportional


def test_no_resistance_is_slower_than_the_current_alone():
    # Worked out: 1 uA takes 1 uF from 6 V to 3 V in 3 s.
    phase = falling(9.0, 0.0, 2.0 / 3.0, 1.0 / 3.0, current=1e-6)
    assert phase.resistance(3.0 * 1.001, 1e-6, 0.0) == inf
    r = float(phase.resistance(3.0 / 1.001, 1e-6, 0.0))
    assert float(phase.interval(r, 1e-6, 0.0)) == pytest.approx(3.0 / 1.001, rel=1e-10)


def test_both_together_and_only_where_they_are_too_fast():
    # Worked out: with I and G together it takes C / G ln((I + G V0) / (I + G V1)).
    phase = falling(9.0, 0.0, 2.0 / 3.0, 1.0 / 3.0, current=1e-6)
    g = np.array([0.0, 1e-7, 1e-6, 1e-5])
    with np.errstate(divide="ignore", invalid="ignore"):
        alone = np.where(g > 0.0, 1e-6 / g * np.log((1e-6 + 6.0 * g) / (1e-6 + 3.0 * g)), 3.0)
    np.testing.assert_array_equal(np.isfinite(phase.resistance(1.0, 1e-6, g)), alone > 1.0)


def test_a_source_with_too_much_resistance_of_its_own():
    """10k in series already makes 10.99 ms with 1 uF, so 5 ms would need less than nothing."""
    phase = rising(9.0, 1.0, 0.0, 2.0 / 3.0, series=1e4)
    assert float(phase.resistance(5e-3, 1e-6, 0.0)) == pytest.approx(5e-3 / 1e-6 / LN3 - 1e4)
    assert float(phase.resistance(5e-3, 1e-6, 0.0)) < 0.0
    assert float(phase.resistance(0.1, 1e-6, 0.0)) == pytest.approx(0.1 / 1e-6 / LN3 - 1e4)


@pytest.mark.parametrize("start", [0.0, 1.0 / 3.0])
def test_leak_bound_is_a_ratio_of_currents_at_the_trip_point(start):
    # Worked out: (V - a V) / R against G a V, at a = 2/3: R = 1 / (2 x ratio x G).
    phase = rising(9.0, 1.0, start, 2.0 / 3.0)
    np.testing.assert_allclose(phase.leak_bound([1e-7, 0.0], 3.0), [1e7 / 6.0, inf])
    assert phase.trip_ratio(1e7 / 6.0, 1e-7) == pytest.approx(3.0)
    # A falling node ends at its lower trip point: at 1/3 both currents are V / 3 times 1/R or G.
    down = falling(9.0, 0.0, 2.0 / 3.0, 1.0 / 3.0)
    assert float(down.leak_bound(1e-7, 3.0)) == pytest.approx(1e7 / 3.0)


# Products and shapes -----------------------------------------------------------------------------


def test_a_plain_product_is_nothing_else():
    phase = Phase(9.0, 2.0 / 3.0, factor=0.7)
    r, c = np.array([1e3, 820e3, 4.7e6]), np.array([1e-9, 1e-4, 2.2e-3])
    np.testing.assert_array_equal(phase.interval(r, c, 1e-3), r * c * 0.7)
    np.testing.assert_array_equal(phase.sensitivity(r, c, 1e-3), np.ones(3))
    np.testing.assert_allclose(phase.resistance(90.0, c, 1e-3), 90.0 / (c * 0.7), rtol=1e-15)
    assert phase.trip_ratio(1e6, 1.0) == inf
    assert phase.endless_from(1.0) == inf


def test_shapes_broadcast_and_blocks_do_not_show():
    phase = Phase(9.0, 2.0 / 3.0, 3.5e-7)
    c = np.geomspace(1e-9, 1e-3, 20_000)
    whole = phase.resistance(1.0, c, c / 3000.0)
    pieces = [phase.resistance(1.0, farad, farad / 3000.0) for farad in c[::1999]]
    np.testing.assert_allclose(whole[::1999], pieces, rtol=1e-13)
    times = np.array([[0.1], [1.0], [10.0]])
    found = phase.resistance(times, c[:5], 0.0)
    assert found.shape == (3, 5)
    assert phase.interval(found, c[:5], 0.0).shape == (3, 5)
    assert phase.sensitivity(1e4, c[:5], np.zeros((3, 1))).shape == (3, 5)
    assert phase.resistance(1.0, 1e-6, 0.0).shape == ()
    assert phase.resistance(1.0, np.array([]), 0.0).shape == (0,)
    assert phase.times((1e4,), c[:5], 0.0)[0].shape == (5,)


@pytest.mark.parametrize("threshold", [1.0, 1.2, 5.0])
@pytest.mark.parametrize("loss", [0.0, 1e-6, -1e-6])
def test_a_trip_point_beyond_the_source_has_no_current_left(threshold, loss):
    phase = Phase(5.0, threshold, loss)
    assert phase.trip_ratio(1e5, 1e-9) == 0.0
    if loss >= 0.0:
        assert phase.interval(1e5, 1e-6, 1e-9) == inf
