"""The astable against published figures, the circuit itself step by step, and its own laws."""

import tomllib
from dataclasses import replace
from fractions import Fraction
from itertools import product
from math import inf, log
from pathlib import Path

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from chooser.circuits.astable import OUTPUTS, AstableLaw, astable, shortest_period, trip_points
from chooser.circuits.circuit import Bounds, outputs_of
from chooser.circuits.monostable import monostable
from chooser.circuits.timers import timer_named, timer_names
from chooser.errors import BadRequestError

PUBLISHED = tomllib.loads(
    (Path(__file__).parent.parent / "published" / "astable.toml").read_text(encoding="utf-8")
)
LN2, LN3 = log(2.0), log(3.0)
IDEAL = astable(timer_named("ideal"), 5.0)
THIRDS = AstableLaw(5.0, 2.0 / 3.0, 1.0 / 3.0)
"""The same without the short form: a switch of no resistance, and no currents."""
REAL = [name for name in timer_names() if name != "ideal"]


def rows(name):
    return pytest.mark.parametrize("row", PUBLISHED[name])


def made(circuit, row, law=None):
    times = (law or circuit.typical).times((row["ra"], row["rb"]), row["c"], 0.0)
    return {name: float(value) for name, value in outputs_of(circuit, times).items()}


@rows("worked")
@pytest.mark.parametrize("law", [None, THIRDS], ids=["product", "equation"])
def test_worked_examples(row, law):
    found = made(IDEAL, row, law)
    exact = {name: row[name] for name in OUTPUTS if name in row}
    assert {name: found[name] for name in exact} == pytest.approx(exact, rel=3e-5)
    printed = row["printed"]
    assert {name: found[name] for name in printed} == pytest.approx(printed, rel=row["rounding"])


@rows("mismatch")
def test_a_text_that_disagrees_with_its_own_figure_is_not_reproduced(row):
    found = made(IDEAL, row)
    assert found["period"] == pytest.approx(row["period"], rel=2e-6)
    assert found["duty"] == pytest.approx(row["duty"], rel=2e-5)
    assert found["period"] != pytest.approx(row["printed"]["period"], rel=0.015)
    assert found["duty"] != pytest.approx(row["printed"]["duty"], rel=5e-5)


@rows("first")
@pytest.mark.parametrize("timer", ["ideal", "TLC555"])
def test_the_first_high_time_after_power_up(row, timer):
    circuit = astable(timer_named(timer), 5.0)
    first = float(circuit.first.times((1e5, 1e5), 1e-6, 0.0)[0])
    later = float(circuit.typical.times((1e5, 1e5), 1e-6, 0.0)[0])
    assert first / later == pytest.approx(row["ratio"], rel=1e-6 if timer == "ideal" else 1e-4)


@rows("control")
@pytest.mark.parametrize("timer", ["ideal", "TLC555"])
def test_a_voltage_forced_on_the_control_pin(row, timer):
    circuit = astable(timer_named(timer), row["supply"], row["control"])
    high, low = (float(time) for time in circuit.typical.lossless().times((1e6, 1e6), 1e-6, 0.0))
    near = 3e-6 if timer == "ideal" else 2e-4  # the switch of the real one
    assert high / 2.0 == pytest.approx(row["high"], rel=near)
    # Worked out: the trip points stay at 2 : 1, so the low time is that of the open pin.
    assert low == pytest.approx(LN2, rel=near)


@pytest.mark.parametrize(("supply", "control"), [(5.0, 0.5), (5.0, 4.6), (9.0, 9.0), (9.0, -1.0)])
def test_a_control_voltage_that_cannot_work_is_refused(supply, control):
    with pytest.raises(BadRequestError, match="choose a control voltage between"):
        astable(timer_named("NE555"), supply, control)


@rows("fractions")
def test_trip_points_that_are_not_thirds(row):
    ideal = replace(timer_named("ideal"), threshold=row["upper"], trigger=row["lower"])
    real = AstableLaw(5.0, row["upper"], row["lower"])
    for law in (astable(ideal, 5.0).typical, real):
        high, low = law.times((3e5, 7e5), 1e-6, 0.0)
        assert float(high) == pytest.approx(row["high"], rel=1e-6)
        assert float(low) / 0.7 == pytest.approx(row["low"], rel=1e-6)
    assert trip_points(timer_named("ICM7555"), 5.0, None) == (row["upper"], row["lower"])


# The circuit itself ------------------------------------------------------------------------------


def by_integration(parts, law, cycles=2):
    """Build the circuit up from power-up: two nodes, a switch, two comparators.

    The discharge pin has no capacitance, so Kirchhoff's law gives its voltage at once.
    """
    ra, rb, c, g = parts
    supply, node, off, times = law.supply, 0.0, True, []

    def pin(v):
        if off:
            return (supply / ra - law.switch_leak + v / rb) / (1.0 / ra + 1.0 / rb)
        if law.switch == 0.0:
            return 0.0
        return (supply / ra + v / rb) / (1.0 / ra + 1.0 / rb + 1.0 / law.switch)

    def slope(_time, v):
        return [((pin(v[0]) - v[0]) / rb - law.input_current - g * v[0]) / c]

    for _ in range(2 * cycles):
        stop = supply * (law.upper if off else law.lower)

        def tripped(_time, v, stop=stop):
            return v[0] - stop

        tripped.terminal = True
        run = solve_ivp(
            slope, (0.0, 100.0 * (ra + rb) * c), [node], "LSODA",
            events=tripped, rtol=1e-10, atol=1e-12,
        )  # fmt: skip
        if not len(run.t_events[0]):
            return [*times, inf]
        times.append(float(run.t_events[0][0]))
        node, off = stop, not off
    return times


@pytest.mark.parametrize("supply", [4.5, 15.0])
@pytest.mark.parametrize("trips", [(2.0 / 3.0, 1.0 / 3.0), (0.65, 0.31), (0.85, 0.425)])
@pytest.mark.parametrize("resistors", [(1e3, 1e3), (1e3, 470e3), (680e3, 22e3)])
def test_full_cycles_from_power_up(supply, trips, resistors):
    for current, leak, switch, share in product(
        (0.0, 2.5e-7), (0.0, 1e-7), (0.0, 44.4), (0.0, 0.02, 0.1)
    ):
        law = AstableLaw(supply, *trips, current, leak, switch)
        first = replace(law, lower=0.0)
        c, g = 2.2e-6, share / sum(resistors)
        run = by_integration((*resistors, c, g), law)
        high, low = (float(time) for time in law.times(resistors, c, g))
        begin = float(first.times(resistors, c, g)[0])
        assert run == pytest.approx([begin, low, high, low][: len(run)], rel=1e-7)


def test_a_high_time_that_never_ends():
    law = AstableLaw(5.0, 2.0 / 3.0, 1.0 / 3.0, 2.5e-7, 0.0, 10.0)
    end = float(law.endless_from(1e-7))
    # Worked out: (V - a V) / R = I + G a V.
    assert end == pytest.approx((5.0 / 3.0) / (2.5e-7 + 1e-7 * 10.0 / 3.0))
    for margin, endless in ((0.98, False), (1.02, True)):
        ra, rb = end * margin * 0.75, end * margin * 0.25
        assert bool(law.times((ra, rb), 1e-6, 1e-7)[0] == inf) is endless
        assert (by_integration((ra, rb, 1e-6, 1e-7), law, 1)[0] == inf) is endless
        assert (law.trip_ratio(ra + rb, 1e-7) <= 1.0) is endless


def test_a_switch_that_cannot_reach_the_lower_trip_point_never_ends_the_low_time():
    # Worked out: RA || r divide the supply to a third where RA = 2 r.
    law = AstableLaw(5.0, 2.0 / 3.0, 1.0 / 3.0, switch=100.0)
    assert law.times((199.0, 1e3), 1e-6, 0.0)[1] == inf
    assert law.times((201.0, 1e3), 1e-6, 0.0)[1] < inf
    assert by_integration((199.0, 1e3, 1e-6, 0.0), law)[1] == inf
    assert float(law.rb_for(1e-3, 199.0, 1e-6, 0.0)) <= 0.0


# Resistors from times ----------------------------------------------------------------------------


@st.composite
def laws(draw):
    current, leak = (
        draw(st.one_of(st.just(0.0), st.floats(-12, -6.3).map(lambda x: 10.0**x))) for _ in "12"
    )
    switch = draw(st.one_of(st.just(0.0), st.floats(1.0, 60.0)))
    supply, trips = (
        draw(st.floats(2.0, 18.0)),
        draw(st.sampled_from(((2.0 / 3.0, 1.0 / 3.0), (0.65, 0.31), (0.9, 0.45), (0.2, 0.1)))),
    )
    return AstableLaw(supply, *trips, current, leak, switch)


leaks = st.one_of(st.just(0.0), st.floats(-13, -6).map(lambda x: 10.0**x))
farads = st.floats(-10, -3).map(lambda x: 10.0**x)
ohms = st.floats(3, 6.5).map(lambda x: 10.0**x)


def slope_in(law, place, rs, c, g):
    """The relative slope of the high or the low time in RA (0) or RB (1)."""
    step, around = 1e-6, []
    for sign in (1.0, -1.0):
        moved = [r * (1.0 + sign * step * (n == place)) for n, r in enumerate(rs)]
        around.append(float(law.times(moved, c, g)[place]))
    assume(around[1] > 0.0 and around[0] < inf)
    return log(around[0] / around[1]) / (2.0 * step)


@settings(max_examples=300)
@given(laws(), ohms, ohms, farads, leaks)
def test_ra_for_is_the_inverse_of_the_high_time(law, ra, rb, c, g):
    high = float(law.times((ra, rb), c, g)[0])
    assume(high < inf)
    steep = slope_in(law, 0, (ra, rb), c, g)
    assume(steep < 1e4)
    found = float(law.ra_for(high, rb, c, g))
    # RA is what is left of RA + RB, so where RB is much larger digits are lost.
    assert found == pytest.approx(ra, rel=1e-11 * max(1.0, 1.0 / steep, steep / 10.0))
    assert float(law.times((found, rb), c, g)[0]) == pytest.approx(high, rel=1e-10 * max(1, steep))


@settings(max_examples=300)
@given(laws(), ohms, ohms, farads, leaks)
def test_rb_for_is_the_inverse_of_the_low_time(law, ra, rb, c, g):
    low = float(law.times((ra, rb), c, g)[1])
    assume(low < inf)
    steep = slope_in(law, 1, (ra, rb), c, g)
    assume(steep > 1e-4)
    found = float(law.rb_for(low, ra, c, g))
    assert found == pytest.approx(rb, rel=1e-11 * max(1.0, 1.0 / steep))
    assert float(law.times((ra, found), c, g)[1]) == pytest.approx(low, rel=1e-10)


def test_no_resistor_makes_what_cannot_be():
    # RB alone makes ln 2 x 1 s already; 0.5 s leaves less than nothing for RA.
    for law in (IDEAL.twin, THIRDS, replace(THIRDS, switch_leak=1e-8)):
        assert float(law.ra_for(0.5, 1e6, 1e-6, 0.0)) == pytest.approx(0.5e6 / LN2 - 1e6, rel=0.03)
        assert float(law.ra_for(0.5, 1e6, 1e-6, 0.0)) < 0.0
    # Worked out: a leak alone discharges from 2/3 to 1/3 in C / G ln 2.
    leaky = float(THIRDS.rb_for(1.01 * LN2, 1e3, 1e-6, 1e-6))
    assert leaky == inf
    assert 1e6 < float(THIRDS.rb_for(0.99 * LN2, 1e3, 1e-6, 1e-6)) < inf
    # A low time shorter than the switch itself makes.
    slow = replace(THIRDS, switch=1e3)
    assert float(slow.rb_for(1e-5, 1e6, 1e-6, 0.0)) < 0.0


@pytest.mark.parametrize(
    "law", [IDEAL.twin, THIRDS, replace(THIRDS, switch=30.0, switch_leak=1e-9)]
)
def test_shapes_broadcast(law):
    c = np.geomspace(1e-8, 1e-6, 5)
    times = np.array([[1e-2], [1e-1], [1.0]])
    ra, rb = law.ra_for(times, 1e3, c, 0.0), law.rb_for(times, 1e4, c, 1e-12)
    assert ra.shape == rb.shape == (3, 5)
    np.testing.assert_allclose(law.times((ra, 1e3), c, 0.0)[0], np.broadcast_to(times, (3, 5)))
    np.testing.assert_allclose(law.times((1e4, rb), c, 1e-12)[1], np.broadcast_to(times, (3, 5)))
    assert law.ra_for(1.0, 1e3, 1e-6, 0.0).shape == ()
    assert [each.shape for each in law.times((ra, 1e4), c, 0.0)] == [(3, 5)] * 2
    assert np.shape(law.endless_from(c)) == (5,)


@given(laws(), st.tuples(ohms, ohms), farads, leaks, st.floats(0.0, 0.5))
def test_what_each_part_does_to_each_time(law, rs, c, g, more):
    """What the search leans on: high grows with both, low with RB, and falls with RA if at all."""
    ra, rb = rs
    high, low = (float(time) for time in law.times((ra, rb), c, g))
    grown, room = 1.0 + more, 1e-12
    more_ra = [float(time) for time in law.times((ra * grown, rb), c, g)]
    more_rb = [float(time) for time in law.times((ra, rb * grown), c, g)]
    assert more_ra[0] >= high * (1 - room)
    assert more_ra[1] <= low * (1 + room)
    assert more_rb[0] >= high * (1 - room)
    assert more_rb[1] >= low * (1 - room)
    leaky = [float(time) for time in law.times((ra, rb), c, g * grown)]
    assert leaky[0] >= high * (1 - room)
    assert leaky[1] <= low * (1 + room)
    plain = [float(time) for time in law.lossless().times((ra, rb), c, g)]
    assert plain[0] <= high * (1 + room)
    assert plain[1] >= low * (1 - room)


# The record --------------------------------------------------------------------------------------


def test_ideal_is_the_textbook_formula_and_nothing_else():
    law = IDEAL.typical
    assert set(IDEAL.corners) == {law}
    rs, c = (np.array([1e3, 820e3]), np.array([2.2e3, 1e3])), np.array([1e-9, 1e-4])
    high, low = law.times(rs, c, 1e-3)
    np.testing.assert_allclose(high, (rs[0] + rs[1]) * c * LN2, rtol=1e-15)
    np.testing.assert_allclose(low, rs[1] * c * LN2, rtol=1e-15)
    r, farad, ln2 = Fraction(1000), Fraction(1, 10**6), Fraction(LN2)
    assert law.exactly((r, 2 * r), farad) == (3 * r * farad * ln2, 2 * r * farad * ln2)
    assert THIRDS.exactly((r, r), farad) is None
    assert float(IDEAL.first.times((1e3, 1e3), 1e-6, 0.0)[0]) == pytest.approx(2e-3 * LN3)
    assert IDEAL.bounds == Bounds(0.0, inf)
    assert IDEAL.lossless
    assert law.trip_ratio(1e6, 1.0) == inf
    assert law.endless_from(1.0) == inf


@pytest.mark.parametrize("timer", REAL)
def test_the_circuit_has_the_timers_figures(timer):
    found = timer_named(timer)
    circuit = astable(found, 9.0)
    assert circuit.typical == AstableLaw(
        9.0,
        found.threshold,
        found.trigger,
        found.threshold_current_typical,
        found.discharge_leakage_typical,
        found.discharge_resistance_typical,
    )
    assert circuit.first == replace(circuit.typical, lower=0.0)
    losses = {(law.input_current, law.switch_leak, law.switch) for law in circuit.corners}
    assert losses == {
        (current, leak, switch)
        for current in (0.0, found.threshold_current_limit)
        for leak in (0.0, found.discharge_leakage_limit)
        for switch in (0.0, found.discharge_resistance_limit)
    }
    assert circuit.error.plus == circuit.error.minus == found.astable_error_limit
    assert circuit.bounds == monostable(found, 9.0).bounds
    assert circuit.slots == ("RA", "RB", "C")
    assert circuit.outputs == OUTPUTS
    assert circuit.shortest == shortest_period(found) == 1.0 / found.highest_frequency


@pytest.mark.parametrize("timer", REAL)
def test_within_the_bounds_every_corner_oscillates(timer):
    found = timer_named(timer)
    for supply in (found.supply_min, found.supply_max):
        circuit = astable(found, supply)
        least, most = circuit.bounds.least, circuit.bounds.most
        for ra, rb in ((least, least), (least, most - least), (most - least, least)):
            plain = np.sum(
                AstableLaw(supply, found.threshold, found.trigger).times((ra, rb), 1e-6, 0)
            )
            for law in circuit.corners:
                assert float(np.sum(law.times((ra, rb), 1e-6, 0.0))) == pytest.approx(
                    plain, rel=0.1
                )


def test_leak_bound_is_a_ratio_of_currents_at_the_upper_trip_point():
    # Worked out: (V - a V) / R against G a V, at a = 2/3: R = 1 / (2 x ratio x G).
    np.testing.assert_allclose(THIRDS.leak_bound([1e-7, 0.0], 3.0), [1e7 / 6.0, inf])
    assert THIRDS.trip_ratio(1e7 / 6.0, 1e-7) == pytest.approx(3.0)
