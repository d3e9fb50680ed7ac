"""The monostable against published figures, the charging equation itself, and its own laws."""

import tomllib
from math import inf, log
from pathlib import Path

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from chooser.circuits.monostable import (
    Drive,
    earliest,
    interval,
    latest,
    limits,
    resistance,
    sensitivity,
    trip_ratio,
    typical,
)
from chooser.circuits.timers import timer_named, timer_names

PUBLISHED = tomllib.loads(
    (Path(__file__).parent.parent / "published" / "monostable.toml").read_text(encoding="utf-8")
)
LN3 = log(3.0)
PLAIN = Drive(5.0, 2.0 / 3.0)


def rows(name):
    return pytest.mark.parametrize("row", PUBLISHED[name])


@rows("worked")
def test_worked_examples(row):
    time = float(interval(row["r"], row["c"], 0.0, PLAIN))
    assert time == pytest.approx(row["exact"], rel=1e-6)
    # The sheets round ln 3 to 1.1, which is 0.13 % too much.
    assert time == pytest.approx(row["printed"], rel=1.4e-3)


@rows("most")
def test_published_greatest_resistors_are_where_the_interval_becomes_infinite(row):
    drive = Drive(row["supply"], 2.0 / 3.0, row["current"])
    most = float(resistance(1e9, 1e-6, 0.0, drive))
    assert most == pytest.approx(row["exact"], rel=1e-4)
    assert most == pytest.approx(row["printed"], rel=0.021)
    assert np.isfinite(interval(row["exact"] * 0.999, 1e-6, 0.0, drive))
    assert interval(row["exact"] * 1.001, 1e-6, 0.0, drive) == inf


@rows("start")
def test_start_voltage(row):
    r = 10e3
    switch = r * row["volt"] / (row["supply"] - row["volt"])
    drive = Drive(row["supply"], 2.0 / 3.0, 0.0, switch)
    change = float(interval(r, 1e-6, 0.0, drive)) / (r * 1e-6 * LN3) - 1.0
    assert change == pytest.approx(row["change"], abs=6e-6)


@rows("leak_resistance")
def test_leak_resistance_table(row):
    r, c = 100e3, 10e-6
    leak = 1.0 / (np.array(row["ratio"]) * r)
    np.testing.assert_allclose(interval(r, c, leak, PLAIN) / (r * c), row["interval"], rtol=1e-7)


def test_a_leak_of_three_times_r_makes_exactly_half_as_long_again():
    # Worked out: R' = 3/4 R, and ln((3/4) / (3/4 - 2/3)) = ln 9 = 2 ln 3.
    assert float(interval(1e6, 1e-6, 1.0 / 3e6, PLAIN)) == pytest.approx(1.5 * LN3, rel=1e-14)


@pytest.mark.parametrize("ratio", [2.0, 1.9, 1.0, 0.01])
def test_a_leak_of_twice_r_or_less_never_ends(ratio):
    # Worked out: the node settles at Rp / (R + Rp), at or below two thirds.
    assert interval(1e6, 1e-6, 1.0 / (ratio * 1e6) * (1.0 + 1e-12), PLAIN) == inf


@rows("leak_current")
def test_leak_current_table(row):
    drive = Drive(row["supply"], 2.0 / 3.0, row["current"])
    time = float(interval(row["r"], 1e-6, 0.0, drive))
    assert time / (row["r"] * 1e-6) == pytest.approx(row["interval"], rel=1e-7)


@rows("stretch")
def test_stretch_table(row):
    drive = Drive(row["supply"], 2.0 / 3.0, row["current"])
    r = np.array(row["r"])
    stretch = interval(r, 1e-6, 0.0, drive) / (r * 1e-6 * LN3) - 1.0
    np.testing.assert_allclose(stretch, row["stretch"], rtol=5e-3)


@rows("threshold")
def test_other_thresholds(row):
    for fraction, expected in zip(row["fraction"], row["interval"], strict=True):
        time = float(interval(1e6, 1e-6, 0.0, Drive(5.0, fraction)))
        assert time == pytest.approx(expected, rel=5e-5)


def test_leakage_guarantee_that_never_ends_and_typical_leakage_that_does():
    # A long-running 555 asked about on a manufacturer's forum: 956k and 470 uF at 5 V charge with
    # 1.743 uA at the trip point; the capacitor's guarantee is 23.5 uA at its 5 V (worked out).
    guarantee = 23.5e-6 / 5.0
    charging = trip_ratio(956e3, guarantee, PLAIN) * guarantee * 5.0 * 2.0 / 3.0
    assert charging == pytest.approx(1.743e-6, rel=1e-3)
    assert interval(956e3, 470e-6, guarantee, PLAIN) == inf
    assert np.isfinite(interval(956e3, 470e-6, guarantee / 100.0, PLAIN))


def by_integration(r, c, g, drive):
    """Charge the node step by step; the event is the trip point."""
    supply, trip = drive.supply, drive.threshold * drive.supply
    start = supply * drive.discharge_resistance / (r + drive.discharge_resistance)

    def slope(_time, node):
        return [((supply - node[0]) / r - drive.leak_current - g * node[0]) / c]

    def tripped(_time, node):
        return node[0] - trip

    tripped.terminal = True
    run = solve_ivp(
        slope, (0.0, 200.0 * r * c), [start], "LSODA", events=tripped, rtol=1e-10, atol=1e-12
    )
    return float(run.t_events[0][0]) if len(run.t_events[0]) else inf


@pytest.mark.parametrize("supply", [5.0, 15.0])
@pytest.mark.parametrize("r", [1e3, 47e3, 2.2e6])
@pytest.mark.parametrize("switch", [0.0, 44.4])
@pytest.mark.parametrize("current", [0.0, 3e-8, 3.5e-7])
@pytest.mark.parametrize("share", [0.0, 0.02, 0.3])
def test_numerical_integration(supply, r, switch, current, share):
    # `share` is the leak in siemens, counted in 1/R.
    drive = Drive(supply, 2.0 / 3.0, current, switch)
    time = float(interval(r, 22e-6, share / r, drive))
    assert by_integration(r, 22e-6, share / r, drive) == pytest.approx(time, rel=1e-7)


@pytest.mark.parametrize("timer", ["NE555", "ICM7555"])
@pytest.mark.parametrize("margin", [0.98, 1.02])
def test_never_ends_against_integration_around_the_analytic_limit(timer, margin):
    drive = latest(timer_named(timer), 9.0)
    g = 1e-6
    most = (1.0 - drive.threshold) / (drive.leak_current / 9.0 + drive.threshold * g)
    r = most * margin
    assert (interval(r, 1e-5, g, drive) == inf) == (margin > 1.0)
    assert (by_integration(r, 1e-5, g, drive) == inf) == (margin > 1.0)


def test_ideal_is_the_textbook_formula_and_nothing_else():
    drive = typical(timer_named("ideal"), 9.0)
    assert earliest(timer_named("ideal"), 9.0) == latest(timer_named("ideal"), 9.0) == drive
    r, c = np.array([1e3, 820e3, 4.7e6]), np.array([1e-9, 1e-4, 2.2e-3])
    np.testing.assert_array_equal(interval(r, c, 1e-3, drive), r * c * LN3)
    np.testing.assert_array_equal(sensitivity(r, c, 1e-3, drive), np.ones(3))
    np.testing.assert_allclose(resistance(90.0, c, 1e-3, drive), 90.0 / (c * LN3), rtol=1e-15)
    assert limits(timer_named("ideal"), 9.0) == (0.0, inf)
    assert trip_ratio(1e6, 1.0, drive) == inf


@st.composite
def drives(draw):
    return Drive(
        supply=draw(st.floats(1.0, 20.0)),
        threshold=draw(st.floats(0.05, 0.95)),
        leak_current=draw(st.one_of(st.just(0.0), st.floats(-13, -5).map(lambda x: 10**x))),
        discharge_resistance=draw(st.one_of(st.just(0.0), st.floats(0.1, 500.0))),
    )


leaks = st.one_of(st.just(0.0), st.floats(-13, -4).map(lambda x: 10.0**x))
farads = st.floats(-11, -2).map(lambda x: 10.0**x)


def ends(g, drive):
    loss = drive.leak_current / drive.supply + drive.threshold * g
    most = (1.0 - drive.threshold) / loss if loss else 1e12
    return drive.discharge_resistance * (1.0 - drive.threshold) / drive.threshold, most


@settings(max_examples=300)
@given(drives(), leaks, farads, st.floats(-9, -1e-9), st.booleans())
def test_resistance_is_the_inverse_of_interval(drive, g, c, power, near_the_end):
    least, most = ends(g, drive)
    part = 10.0**power
    r = least + (most - least) * ((1.0 - part) if near_the_end else part)
    time = float(interval(r, c, g, drive))
    assume(0.0 < time < inf)
    assert float(resistance(time, c, g, drive)) == pytest.approx(r, rel=1e-12)


@given(drives(), leaks, farads, st.floats(-6, 6))
def test_interval_is_the_inverse_of_resistance(drive, g, c, power):
    time = 10.0**power
    r = resistance(time, c, g, drive)
    steep = float(sensitivity(r, c, g, drive))
    assume(steep < 1e6)  # nearer to the end one bit of R is more than the tolerance
    assert float(interval(r, c, g, drive)) == pytest.approx(time, rel=1e-13 * (10.0 + steep))


@given(drives(), leaks, farads, st.floats(0.001, 0.98))
def test_sensitivity_is_the_slope_and_never_below_one(drive, g, c, part):
    least, most = ends(g, drive)
    r = least + (most - least) * part
    steep = float(sensitivity(r, c, g, drive))
    assert steep >= 1.0
    step = 1e-5
    around = interval(r * np.array([1.0 - step, 1.0 + step]), c, g, drive)
    assume(around[0] > 0.0 and around[1] < inf)
    numeric = np.log(around[1] / around[0]) / np.log((1.0 + step) / (1.0 - step))
    assume(steep < 50.0)
    assert numeric == pytest.approx(steep, rel=1e-4)


@given(drives(), leaks, st.floats(3, 7), st.floats(0.0, 0.5))
def test_losses_and_values_lengthen_and_start_voltage_shortens(drive, g, power, more):
    r, c = 10.0**power, 1e-6
    grown = 1.0 + more
    base = float(interval(r, c, g, drive))
    room = base * (1.0 - 1e-12)
    assert float(interval(r * grown, c, g, drive)) >= room
    assert float(interval(r, c * grown, g, drive)) >= room
    assert float(interval(r, c, g * grown, drive)) >= room
    current = Drive(
        drive.supply, drive.threshold, drive.leak_current * grown, drive.discharge_resistance
    )
    assert float(interval(r, c, g, current)) >= room
    switch = Drive(
        drive.supply, drive.threshold, drive.leak_current, drive.discharge_resistance * grown
    )
    slower = float(interval(r, c, g, switch))
    assert slower <= base * (1.0 + 1e-12)


def test_a_switch_that_cannot_empty_the_capacitor_makes_no_interval():
    drive = Drive(5.0, 2.0 / 3.0, 0.0, 100.0)
    assert interval(49.9, 1e-6, 0.0, drive) == 0.0
    assert interval(50.1, 1e-6, 0.0, drive) > 0.0
    assert sensitivity(49.9, 1e-6, 0.0, drive) == inf
    # Losses beyond what the switch itself carries leave no resistor at all.
    np.testing.assert_array_equal(
        np.isfinite(resistance(1.0, 1e-6, [1.0, 1e-6], drive)), [False, True]
    )


def test_shapes_broadcast_and_blocks_do_not_show():
    drive = latest(timer_named("bipolar"), 9.0)
    c = np.geomspace(1e-9, 1e-3, 20_000)
    whole = resistance(1.0, c, c / 3000.0, drive)
    pieces = [resistance(1.0, farad, farad / 3000.0, drive) for farad in c[::1999]]
    np.testing.assert_allclose(whole[::1999], pieces, rtol=1e-13)
    times = np.array([[0.1], [1.0], [10.0]])
    found = resistance(times, c[:5], 0.0, drive)
    assert found.shape == (3, 5)
    assert interval(found, c[:5], 0.0, drive).shape == (3, 5)
    assert sensitivity(1e4, c[:5], np.zeros((3, 1)), drive).shape == (3, 5)
    assert resistance(1.0, 1e-6, 0.0, drive).shape == ()
    assert resistance(1.0, np.array([]), 0.0, drive).shape == (0,)


@pytest.mark.parametrize(
    ("timer", "supply", "least", "most"),
    [
        # A tenth of the resistance at which 250 nA + 100 nA take everything (4.762 Mohm at 5 V,
        # 14.29 Mohm at 15 V, worked out from SLFS022).
        ("NE555", 5.0, 1e3, 476.2e3),
        ("NE555", 15.0, 1e3, 1.429e6),
        # 18 V through 15 mA, the current the switch is specified for.
        ("SE555", 18.0, 1.2e3, 1.714e6),
        # SNAS558J: 100 nA at 12 V make 40 Mohm; a tenth.
        ("LMC555", 12.0, 1.2e3, 4.0e6),
        # 10 nA at 15 V make 500 Mohm (FN2867): the board is the limit.
        ("ICM7555", 15.0, 1e3, 10e6),
    ],
)
def test_house_limits(timer, supply, least, most):
    assert limits(timer_named(timer), supply) == pytest.approx((least, most), rel=1e-3)


@pytest.mark.parametrize("timer", [name for name in timer_names() if name != "ideal"])
def test_within_the_limits_the_timers_currents_cost_little_and_always_end(timer):
    found = timer_named(timer)
    for supply in (found.supply_min, found.supply_max):
        least, most = limits(found, supply)
        assert least < most
        worst = float(interval(most, 1e-6, 0.0, latest(found, supply)))
        plain = float(interval(most, 1e-6, 0.0, Drive(supply, found.threshold)))
        assert 1.0 <= worst / plain < 1.07
        assert trip_ratio(most, 0.0, latest(found, supply)) >= 10.0 * (1.0 - 1e-12)
