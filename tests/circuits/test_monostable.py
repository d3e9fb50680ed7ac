"""The monostable against published figures, its house rule, and the textbook."""

import tomllib
from math import inf, log
from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from chooser.circuits.charging import Phase
from chooser.circuits.circuit import Bounds
from chooser.circuits.monostable import monostable
from chooser.circuits.timers import timer_named, timer_names
from chooser.errors import BadRequestError

PUBLISHED = tomllib.loads(
    (Path(__file__).parent.parent / "published" / "monostable.toml").read_text(encoding="utf-8")
)
LN3 = log(3.0)
PLAIN = Phase(5.0, 2.0 / 3.0)


def rows(name):
    return pytest.mark.parametrize("row", PUBLISHED[name])


@rows("worked")
def test_worked_examples(row):
    for law in (PLAIN, monostable(timer_named("ideal"), 5.0).law):
        time = float(law.interval(row["r"], row["c"], 0.0))
        assert time == pytest.approx(row["exact"], rel=1e-6)
        # The sheets round ln 3 to 1.1, which is 0.13 % too much.
        assert time == pytest.approx(row["printed"], rel=1.4e-3)


@rows("most")
def test_published_greatest_resistors_are_where_the_interval_becomes_infinite(row):
    law = Phase(row["supply"], 2.0 / 3.0, row["current"])
    most = float(law.resistance(1e9, 1e-6, 0.0))
    assert most == pytest.approx(row["exact"], rel=1e-4)
    assert most == pytest.approx(row["printed"], rel=0.021)
    assert np.isfinite(law.interval(row["exact"] * 0.999, 1e-6, 0.0))
    assert law.interval(row["exact"] * 1.001, 1e-6, 0.0) == inf


@rows("start")
def test_start_voltage(row):
    r = 10e3
    switch = r * row["volt"] / (row["supply"] - row["volt"])
    law = Phase(row["supply"], 2.0 / 3.0, 0.0, switch)
    change = float(law.interval(r, 1e-6, 0.0)) / (r * 1e-6 * LN3) - 1.0
    assert change == pytest.approx(row["change"], abs=6e-6)


@rows("leak_resistance")
def test_leak_resistance_table(row):
    r, c = 100e3, 10e-6
    leak = 1.0 / (np.array(row["ratio"]) * r)
    np.testing.assert_allclose(PLAIN.interval(r, c, leak) / (r * c), row["interval"], rtol=1e-7)


@rows("leak_current")
def test_leak_current_table(row):
    law = Phase(row["supply"], 2.0 / 3.0, row["current"])
    time = float(law.interval(row["r"], 1e-6, 0.0))
    assert time / (row["r"] * 1e-6) == pytest.approx(row["interval"], rel=1e-7)


@rows("stretch")
def test_stretch_table(row):
    law = Phase(row["supply"], 2.0 / 3.0, row["current"])
    r = np.array(row["r"])
    stretch = law.interval(r, 1e-6, 0.0) / (r * 1e-6 * LN3) - 1.0
    np.testing.assert_allclose(stretch, row["stretch"], rtol=5e-3)


@rows("threshold")
def test_other_thresholds(row):
    for fraction, expected in zip(row["fraction"], row["interval"], strict=True):
        time = float(Phase(5.0, fraction).interval(1e6, 1e-6, 0.0))
        assert time == pytest.approx(expected, rel=5e-5)


@rows("control")
@pytest.mark.parametrize("timer", ["ideal", "TLC555"])
def test_a_voltage_forced_on_the_control_pin_is_the_trip_point(row, timer):
    circuit = monostable(timer_named(timer), row["supply"], row["control"])
    time = float(circuit.law.lossless().interval(1e6, 1e-6, 0.0))
    # The discharge switch of the real one leaves a few parts in a hundred thousand.
    assert time == pytest.approx(row["interval"], rel=1e-6 if timer == "ideal" else 1e-4)
    for corner in circuit.corners:
        around = float(corner.lossless().interval(1e6, 1e-6, 0.0))
        assert around == pytest.approx(row["interval"], rel=1e-6 if timer == "ideal" else 1e-3)


def test_the_control_pin_at_its_own_voltage_changes_nothing():
    open_, forced = (
        monostable(timer_named("NE555"), 9.0, control).law.interval(1e5, 1e-6, 1e-9)
        for control in (None, 6.0)
    )
    assert float(open_) == pytest.approx(float(forced), rel=1e-12)


@pytest.mark.parametrize(("supply", "control"), [(5.0, 0.5), (5.0, 4.6), (9.0, 9.0), (9.0, -1.0)])
def test_a_control_voltage_that_cannot_work_is_refused(supply, control):
    with pytest.raises(BadRequestError, match="choose a control voltage between"):
        monostable(timer_named("NE555"), supply, control)


def test_leakage_guarantee_that_never_ends_and_typical_leakage_that_does():
    # A long-running 555 asked about on a manufacturer's forum: 956k and 470 uF at 5 V charge with
    # 1.743 uA at the trip point; the capacitor's guarantee is 23.5 uA at its 5 V (worked out).
    guarantee = 23.5e-6 / 5.0
    charging = PLAIN.trip_ratio(956e3, guarantee) * guarantee * 5.0 * 2.0 / 3.0
    assert charging == pytest.approx(1.743e-6, rel=1e-3)
    assert PLAIN.interval(956e3, 470e-6, guarantee) == inf
    assert np.isfinite(PLAIN.interval(956e3, 470e-6, guarantee / 100.0))


def by_integration(r, c, g, law):
    """Charge the node step by step; the event is the trip point."""
    supply, trip = law.swing, law.threshold * law.swing
    start = supply * law.discharge_resistance / (r + law.discharge_resistance)

    def slope(_time, node):
        return [((supply - node[0]) / r - law.leak_current - g * node[0]) / c]

    def tripped(_time, node):
        return node[0] - trip

    tripped.terminal = True
    run = solve_ivp(
        slope, (0.0, 200.0 * r * c), [start], "LSODA", events=tripped, rtol=1e-10, atol=1e-12
    )
    return float(run.t_events[0][0]) if len(run.t_events[0]) else inf


@pytest.mark.parametrize("timer", ["NE555", "ICM7555"])
@pytest.mark.parametrize("margin", [0.98, 1.02])
def test_never_ends_against_integration_around_the_analytic_limit(timer, margin):
    _, law = monostable(timer_named(timer), 9.0).corners
    g = 1e-6
    most = (1.0 - law.threshold) / (law.leak_current / 9.0 + law.threshold * g)
    r = most * margin
    assert (law.interval(r, 1e-5, g) == inf) == (margin > 1.0)
    assert (by_integration(r, 1e-5, g, law) == inf) == (margin > 1.0)


@pytest.mark.parametrize("timer", [name for name in timer_names() if name != "ideal"])
def test_the_circuit_has_the_timers_figures(timer):
    """Every figure in its place: typical ones, and the corners of earliest and latest end."""
    found = timer_named(timer)
    circuit = monostable(found, 9.0)
    draws = found.threshold_current_typical + found.discharge_leakage_typical
    most = found.threshold_current_limit + found.discharge_leakage_limit
    a = found.threshold
    assert circuit.typical == Phase(9.0, a, draws, found.discharge_resistance_typical)
    assert circuit.corners == (
        Phase(9.0, a, 0.0, found.discharge_resistance_limit),
        Phase(9.0, a, most),
    )
    assert circuit.error.plus == circuit.error.minus == found.timing_error_limit
    assert (circuit.resistors, circuit.slots, circuit.outputs) == (
        ("R",),
        ("R", "C"),
        ("interval",),
    )
    assert circuit.shortest == found.shortest_interval
    assert circuit.timer == found
    assert not circuit.lossless


def test_ideal_is_the_textbook_formula_and_nothing_else():
    circuit = monostable(timer_named("ideal"), 9.0)
    law = circuit.law
    assert set(circuit.corners) == {law}
    r, c = np.array([1e3, 820e3, 4.7e6]), np.array([1e-9, 1e-4, 2.2e-3])
    np.testing.assert_array_equal(law.interval(r, c, 1e-3), r * c * LN3)
    np.testing.assert_array_equal(law.sensitivity(r, c, 1e-3), np.ones(3))
    np.testing.assert_allclose(law.resistance(90.0, c, 1e-3), 90.0 / (c * LN3), rtol=1e-15)
    assert circuit.bounds == Bounds(0.0, inf)
    assert circuit.error.plus == circuit.error.minus == 0.0
    assert circuit.lossless
    assert law.trip_ratio(1e6, 1.0) == inf


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
    bounds = monostable(timer_named(timer), supply).bounds
    assert (bounds.least, bounds.most) == pytest.approx((least, most), rel=1e-3)


@pytest.mark.parametrize("timer", [name for name in timer_names() if name != "ideal"])
def test_within_the_limits_the_timers_currents_cost_little_and_always_end(timer):
    found = timer_named(timer)
    for supply in (found.supply_min, found.supply_max):
        circuit = monostable(found, supply)
        bounds, latest = circuit.bounds, circuit.corners[1]
        assert bounds.least < bounds.most
        worst = float(latest.interval(bounds.most, 1e-6, 0.0))
        plain = float(Phase(supply, found.threshold).interval(bounds.most, 1e-6, 0.0))
        assert 1.0 <= worst / plain < 1.07
        assert latest.trip_ratio(bounds.most, 0.0) >= 10.0 * (1.0 - 1e-12)
