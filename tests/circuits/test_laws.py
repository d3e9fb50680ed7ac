"""The formulas that circuits are made of: sums of movements, published rules, and the solver."""

from fractions import Fraction
from math import exp, inf, log

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from chooser.circuits.charging import Phase, falling, rising
from chooser.circuits.laws import Train, solved

LN2 = log(2.0)


def oscillator(supply, lower, upper, *, current=0.0, series=0.0, high=1.0, low=0.0):
    """A node swung between two trip points by an output with two levels, as fractions."""
    return Train(
        (
            rising(supply, high, lower, upper, current=current, series=series),
            falling(supply, low, upper, lower, current=current, series=series),
        )
    )


# A sum of movements ------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("supply", "upper", "lower", "factor"),
    [
        # Worked out: ln((V - VTn) / (V - VTp)) + ln(VTp / VTn), to the digits given.
        (4.5, 2.38, 1.40, 0.910614),
        (2.0, 1.18, 0.52, 1.409934),
        (6.0, 3.14, 1.89, 0.870247),
        (4.5, 3.15, 0.90, 2.233592),
        (5.0, 2.9, 1.9, 0.812322),
        (3.0, 2.0, 1.0, 1.386294),
    ],
)
def test_both_halves_of_an_oscillator(supply, upper, lower, factor):
    train = oscillator(supply, lower / supply, upper / supply)
    assert float(train.interval(1e5, 1e-6, 0.0)) == pytest.approx(0.1 * factor, rel=1e-6)
    assert float(train.resistance(0.1 * factor, 1e-6, 0.0)) == pytest.approx(1e5, rel=1e-6)


def test_both_halves_against_integration_over_cycles():
    """A node driven by an inverter with a resistance, a leak across it and an input current."""
    supply, upper, lower, series, current, g = 5.0, 0.58, 0.38, 500.0, 2e-6, 4e-6
    train = oscillator(supply, lower, upper, current=current, series=series, high=0.96, low=0.03)
    r, c, high = 22e3, 1e-7, True
    node, times = lower * supply, []
    for _ in range(4):
        source, stop = (0.96, upper) if high else (0.03, lower)

        def slope(_time, v, source=source):
            return [((source * supply - v[0]) / (r + series) - current - g * v[0]) / c]

        def tripped(_time, v, stop=stop):
            return v[0] - stop * supply

        tripped.terminal = True
        run = solve_ivp(slope, (0.0, 1.0), [node], "LSODA", events=tripped, rtol=1e-10, atol=1e-12)
        times.append(run.t_events[0][0])
        node, high = stop * supply, not high
    found = [float(time) for time in train.times((r,), c, g)]
    assert times == pytest.approx(found * 2, rel=1e-7)
    assert float(train.interval(r, c, g)) == pytest.approx(sum(found), rel=1e-14)


@st.composite
def trains(draw):
    lower, upper = draw(st.floats(0.1, 0.45)), draw(st.floats(0.5, 0.85))
    train = oscillator(
        draw(st.floats(2.0, 18.0)),
        lower,
        upper,
        current=draw(st.one_of(st.just(0.0), st.floats(-12, -5.5).map(lambda x: 10.0**x))),
        series=draw(st.one_of(st.just(0.0), st.floats(1.0, 1e3))),
        high=draw(st.floats(0.9, 1.0)),
        low=draw(st.floats(0.0, 0.05)),
    )
    return Train(train.phases, draw(st.sampled_from((1.0, 0.5, 16384.0))))


leaks = st.one_of(st.just(0.0), st.floats(-13, -5).map(lambda x: 10.0**x))


@settings(max_examples=300)
@given(trains(), leaks, st.floats(-11, -3).map(lambda x: 10.0**x), st.floats(-6.0, -1e-3))
def test_round_trip_of_a_train(train, g, c, power):
    most = min(float(train.endless_from(g)), 1e9)
    r = most * 10.0**power
    time = float(train.interval(r, c, g))
    assert 0.0 < time < inf
    steep = float(train.sensitivity(r, c, g))
    assume(1e-4 < steep < 1e4)
    # The solver stops at a small last step; the steeper, the more of it is left.
    near = 2e-12 * max(1.0, 1.0 / steep, steep)
    assert float(train.resistance(time, c, g)) == pytest.approx(r, rel=near)


@given(trains(), leaks, st.floats(-5.0, -0.05))
def test_sensitivity_of_a_train_is_its_slope(train, g, power):
    r = min(float(train.endless_from(g)), 1e9) * 10.0**power
    steep = float(train.sensitivity(r, 1e-6, g))
    step = 1e-5
    around = train.interval(r * np.array([1.0 - step, 1.0 + step]), 1e-6, g)
    numeric = np.log(around[1] / around[0]) / np.log((1.0 + step) / (1.0 - step))
    assert numeric == pytest.approx(steep, rel=1e-4, abs=1e-5)


@given(trains(), leaks, st.floats(2, 6).map(lambda x: 10.0**x))
def test_a_train_is_as_weak_as_its_weakest_movement(train, g, r):
    ends = [float(phase.endless_from(g)) for phase in train.phases]
    assert float(train.endless_from(g)) == min(ends)
    assert float(train.leak_bound(g, 3.0)) == min(float(p.leak_bound(g, 3.0)) for p in train.phases)
    assert train.trip_ratio(r, g) == min(p.trip_ratio(r, g) for p in train.phases)
    assert (train.interval(r, 1e-6, g) == inf) == (r >= min(ends))
    # A current out of the node slows what rises and helps what falls.
    rise, fall = train.times((r,), 1e-6, g)
    plain_rise, plain_fall = train.lossless().times((r,), 1e-6, g)
    assert float(plain_rise) <= float(rise) * (1 + 1e-12)
    assert float(plain_fall) >= float(fall) * (1 - 1e-12)


def test_a_train_that_no_resistance_makes():
    train = oscillator(5.0, 1.0 / 3.0, 2.0 / 3.0, series=1e3)
    # Worked out: 1k alone makes 2 ln 2 ms with 1 uF.
    assert float(train.interval(1e-9, 1e-6, 0.0)) == pytest.approx(2 * LN2 * 1e-3)
    assert float(train.resistance(1e-3, 1e-6, 0.0)) < 1e-3
    assert float(train.resistance(4 * LN2 * 1e-3, 1e-6, 0.0)) == pytest.approx(1e3)


def test_movements_that_are_plain_products_are_added_in_fractions():
    half = Phase(5.0, 0.5, factor=LN2)
    train = Train((half, half), 16.0)
    r, c = Fraction(1000), Fraction(1, 10**6)
    assert train.exactly((r,), c) == (16 * Fraction(LN2) * r * c,) * 2
    assert float(train.interval(1e3, 1e-6, 1e-3)) == pytest.approx(32.0 * LN2 * 1e-3, rel=1e-15)
    assert float(train.resistance(1.0, 1e-6, 0.0)) == pytest.approx(1e6 / (32.0 * LN2), rel=1e-15)
    assert train.proportional
    assert train.starts_from == 0.0
    assert Train((half, PLAIN)).exactly((r,), c) is None


PLAIN = Phase(5.0, 2.0 / 3.0, discharge_resistance=100.0)


def test_one_movement_is_itself():
    train = Train((PLAIN,), 2.0)
    assert float(train.interval(1e4, 1e-6, 1e-6)) == 2.0 * float(PLAIN.interval(1e4, 1e-6, 1e-6))
    assert float(train.resistance(0.02, 1e-6, 1e-6)) == float(PLAIN.resistance(0.01, 1e-6, 1e-6))
    assert train.starts_from == PLAIN.starts_from == pytest.approx(50.0)
    assert train.proportional
    # The capacitor's leak helps a node that falls, so this one need not keep the proportion.
    assert not oscillator(5.0, 0.3, 0.6).proportional


def test_shapes_of_a_train():
    train = oscillator(5.0, 0.3, 0.6, current=1e-7)
    c = np.geomspace(1e-9, 1e-6, 7)
    found = train.resistance([[1e-3], [1e-2]], c, 1e-9)
    assert found.shape == (2, 7)
    assert train.interval(found, c, 1e-9).shape == (2, 7)
    np.testing.assert_allclose(train.interval(found, c, 1e-9), [[1e-3] * 7, [1e-2] * 7], rtol=1e-11)
    assert train.sensitivity(found, c, 1e-9).shape == (2, 7)
    assert train.resistance(1e-3, 1e-8, 0.0).shape == ()


# The solver --------------------------------------------------------------------------------------


@given(
    st.floats(-6, 6), st.floats(-8, 12), st.floats(0.2, 8.0), st.floats(-3, 3),
)  # fmt: skip
def test_powers_from_any_start(root, start, power, scale):
    """10^scale r^power is solved from up to 18 decades away."""
    wanted = 10.0**scale * (10.0**root) ** power
    found = solved(lambda r: 10.0**scale * r**power, wanted, 10.0**start)
    assert float(found) == pytest.approx(10.0**root, rel=1e-11)


@given(st.floats(0.01, 0.9999), st.floats(-3, 6))
def test_a_rise_to_infinity_at_a_known_place(part, start):
    """-ln(1 - r / 1000) is endless from 1000 on; the guess may be far beyond."""

    def time(r):
        with np.errstate(all="ignore"):
            return np.where(r < 1e3, -np.log1p(-np.minimum(r, 1e3) / 1e3), inf)

    wanted = -log(1.0 - part)
    assert float(solved(time, wanted, 10.0**start, 1e3)) == pytest.approx(1e3 * part, rel=1e-9)


@pytest.mark.parametrize("part", [1e-6, 0.3, 0.75, 0.999])
@pytest.mark.parametrize("start", [125.0, 900.0, 1e3 * (1.0 - 1e-7), 1e3, 2e3])
def test_a_start_on_the_brink_is_left_again(part, start):
    """Where the next point is endless the slope is too, and a step of nothing is no answer."""

    def time(r):
        with np.errstate(all="ignore"):
            return np.where(r < 1e3, -np.log1p(-np.minimum(r, 1e3) / 1e3), inf)

    assert float(solved(time, -log(1.0 - part), start, 1e3)) == pytest.approx(1e3 * part, rel=1e-9)


def test_what_is_never_reached_is_infinite_and_what_always_is_vanishes():
    found = solved(lambda r: 1.0 - np.exp(-r), [0.5, 2.0], 1.0)
    np.testing.assert_allclose(found, [LN2, inf])
    assert float(solved(lambda r: 1.0 + r, 0.5, 1.0)) < 1e-6


def test_many_at_once_do_not_disturb_each_other():
    wanted = np.geomspace(1e-6, 1e6, 50)[:, None]
    powers = np.array([0.5, 1.0, 3.0])
    found = solved(lambda r: r**powers, wanted, np.ones(3))
    np.testing.assert_allclose(found, wanted ** (1.0 / powers), rtol=1e-11)
    steps = solved(lambda r: r + 1e3 * (r > 1.0) * (1.0 - exp(-1.0)), wanted, 1.0)
    assert steps.shape == (50, 1)
