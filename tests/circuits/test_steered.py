"""The steered astable against the circuit step by step, diode and all, and its own laws."""

from dataclasses import replace
from fractions import Fraction
from itertools import product
from math import exp, inf, log

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq
from turning import Turn, follow

from chooser.circuits.astable import AstableLaw, astable
from chooser.circuits.circuit import outputs_of
from chooser.circuits.diodes import diode_named
from chooser.circuits.steered import DROP_ERROR, SteeredLaw, steered
from chooser.circuits.timers import timer_named
from chooser.errors import BadRequestError

LN2 = log(2.0)
SILICON, SCHOTTKY = diode_named("silicon"), diode_named("schottky")
THIRDS = (2.0 / 3.0, 1.0 / 3.0)


# The circuit itself ------------------------------------------------------------------------------


def shockley(diode, volt):
    """The current through a diode of an exponential law at a voltage."""
    return diode.reference_current * exp(min((volt - diode.drop) / diode.slope, 300.0))


def by_integration(parts, law, cycles=2):
    """Build the circuit up from power-up: node, discharge pin, diodes, comparators.

    The pin has no capacitance, so its voltage is where Kirchhoff's law holds, found by bisection.
    A constant drop conducts all the time here, whatever is beside it.
    """
    ra, rb, c, g = parts
    timer, diode = law.timer, law.diode
    supply = timer.supply

    def charging(v):
        if diode.slope == 0.0:
            return (supply - diode.drop - v) / ra - timer.switch_leak

        def surplus(pin):
            beside = 0.0 if law.both else (pin - v) / rb
            through = (supply - pin) / ra - timer.switch_leak
            return through - beside - shockley(diode, pin - v)

        pin = brentq(surplus, v - 3.0, supply, xtol=1e-14, rtol=1e-14)
        return (supply - pin) / ra - timer.switch_leak

    def discharging(v):
        if timer.switch == 0.0:
            source, series = 0.0, rb
        else:
            source = supply * timer.switch / (ra + timer.switch)
            series = rb + ra * timer.switch / (ra + timer.switch)
        if not law.both:
            return (source - v) / series
        if diode.slope == 0.0:
            return (source + diode.drop - v) / series

        def surplus(drop):
            return (v - source - drop) / series - shockley(diode, drop)

        return -shockley(diode, brentq(surplus, -3.0, v - source, xtol=1e-14, rtol=1e-14))

    def lost(v):
        return timer.input_current + g * v

    high = Turn(lambda v: (charging(v) - lost(v)) / c, timer.upper * supply)
    low = Turn(lambda v: (discharging(v) - lost(v)) / c, timer.lower * supply)
    return follow([high, low] * cycles, 0.0, 100.0 * (ra + rb) * c)


def check_cycles(law, resistors, c, g, *, near, near_first):
    run = by_integration((*resistors, c, g), law)
    high, low = (float(time) for time in law.times(resistors, c, g))
    first = replace(law, timer=replace(law.timer, lower=0.0))
    begin = float(first.times(resistors, c, g)[0])
    assert run[0] == pytest.approx(begin, rel=near_first)
    assert run[1:] == pytest.approx([low, high, low][: len(run) - 1], rel=near)


LOSSES = list(product((0.0, 2.5e-7), (0.0, 1e-7), (0.0, 44.4), (0.0, 0.02)))


@pytest.mark.parametrize("supply", [5.0, 15.0])
@pytest.mark.parametrize("trips", [THIRDS, (0.65, 0.31)])
@pytest.mark.parametrize("both", [False, True])
@pytest.mark.parametrize("resistors", [(2.2e3, 10e3), (100e3, 470e3), (330e3, 330e3)])
def test_full_cycles_with_a_constant_drop(supply, trips, both, resistors):
    for current, leak, switch, share in LOSSES[::3]:
        timer = AstableLaw(supply, *trips, current, leak, switch)
        law = SteeredLaw(timer, diode_named("0.6V"), both)
        check_cycles(law, resistors, 2.2e-6, share / resistors[0], near=1e-6, near_first=1e-6)


@pytest.mark.parametrize("supply", [5.0, 15.0])
@pytest.mark.parametrize("both", [False, True])
@pytest.mark.parametrize(
    "resistors", [(1e3, 1e3), (2.2e3, 10e3), (100e3, 10e3), (33e3, 1e6), (680e3, 470e3)]
)
def test_full_cycles_with_the_exponential_law(supply, both, resistors):
    """What flows through RB beside the diode is in it; where RA >> RB it is nearly all."""
    for current, leak, switch, share in (LOSSES[0], *LOSSES[3::6], LOSSES[-1]):
        timer = AstableLaw(supply, *THIRDS, current, leak, switch)
        for diode in (SILICON, SCHOTTKY):
            law = SteeredLaw(timer, diode, both)
            g = share / resistors[0]
            check_cycles(law, resistors, 2.2e-6, g, near=1e-6, near_first=1e-5)


@pytest.mark.parametrize("supply", [3.0, 9.0])
def test_full_cycles_between_other_trip_points(supply):
    for trips, diode in product(((0.65, 0.31), (0.5, 0.25)), (SILICON, SCHOTTKY)):
        law = SteeredLaw(AstableLaw(supply, *trips, 1e-7, 1e-8, 20.0), diode)
        check_cycles(law, (47e3, 100e3), 1e-6, 2e-7, near=1e-6, near_first=1e-5)


def test_a_constant_drop_holds_only_while_the_diode_conducts():
    """Worked out: RB (V - v) / (RA + RB) must exceed the drop up to the trip point.

    Beyond it RB carries everything, as in the plain astable.
    """
    timer = AstableLaw(5.0, *THIRDS)
    constant = SteeredLaw(timer, diode_named("0.5V"))
    plain = float(timer.times((1e6, 1e4), 1e-6, 0.0)[0])
    assert float(constant.times((1e6, 1e4), 1e-6, 0.0)[0]) == pytest.approx(plain, rel=1e-12)
    # 5 V, RA = RB: the diode conducts up to 5 - 2 x 1 = 3 V, worked out by hand in two pieces.
    halves = SteeredLaw(timer, diode_named("1V")).times((1e6, 1e6), 1e-6, 0.0)[0]
    by_hand = log((4.0 - 5.0 / 3.0) / (4.0 - 3.0)) + 2.0 * log((5.0 - 3.0) / (5.0 - 10.0 / 3.0))
    assert float(halves) == pytest.approx(by_hand, rel=1e-12)
    for diode in (SILICON, SCHOTTKY):
        found = float(SteeredLaw(timer, diode).times((1e6, 1e4), 1e-6, 0.0)[0])
        assert found == pytest.approx(plain, rel=0.012)
        assert found < plain


# Where it never ends -----------------------------------------------------------------------------


@pytest.mark.parametrize("diode", [diode_named("0.6V"), SILICON, SCHOTTKY], ids=lambda d: d.name)
@pytest.mark.parametrize("losses", [(2.5e-7, 0.0, 0.0), (0.0, 1e-7, 2e-7), (1e-7, 1e-7, 1e-6)])
def test_endless_from_is_where_the_high_time_becomes_infinite(diode, losses):
    current, leak, g = losses
    law = SteeredLaw(AstableLaw(5.0, *THIRDS, current, leak, 10.0), diode, both=True)
    end = float(law.endless_from(g))
    # Worked out: what RA carries at the trip point is the leaks and nothing else.
    left = 5.0 / 3.0 - float(diode.drop_at(current + g * 10.0 / 3.0))
    assert end == pytest.approx(left / (current + leak + g * 10.0 / 3.0), rel=1e-12)
    for margin, endless in ((1.0 - 1e-6, False), (1.0 + 1e-6, True)):
        assert bool(law.times((end * margin, 1e5), 1e-6, g)[0] == inf) is endless
        assert (law.trip_ratio(end * margin * (1.02 if endless else 0.95), g) <= 1.0) is endless
    for margin, endless in ((0.98, False), (1.02, True)):
        run = by_integration((end * margin, 1e5, 1e-6, g), law, 1)
        assert (run[0] == inf) is endless
        if not endless:
            first = replace(law, timer=replace(law.timer, lower=0.0))
            found = float(first.times((end * margin, 1e5), 1e-6, g)[0])
            assert found == pytest.approx(run[0], rel=1e-3)


def test_one_diode_lets_the_second_resistor_end_what_the_diode_does_not():
    """Where only the drop is left, RB goes on charging; from the plain astable's limit on nothing.

    Of 5 V two thirds are 3.33 V, so a third over all that is lost there is that limit.
    """
    timer = AstableLaw(5.0, *THIRDS, 2.5e-7, 0.0, 10.0)
    one, two = SteeredLaw(timer, SILICON), SteeredLaw(timer, SILICON, both=True)
    end = float(one.endless_from(1e-7))
    assert end == pytest.approx(5.0 / 3.0 / (2.5e-7 + 10.0 / 3.0 * 1e-7))
    past = 0.9 * end
    assert past > float(two.endless_from(1e-7))
    assert two.times((past, 0.05 * end), 1e-6, 1e-7)[0] == inf
    assert one.times((past, 0.05 * end), 1e-6, 1e-7)[0] < inf
    for rb in (1e3, 1e4, 1e5, 1e6, 1e7):
        assert one.times((end * 1.001, rb), 1e-6, 1e-7)[0] == inf


@pytest.mark.parametrize("diode", [diode_named("0.6V"), SILICON], ids=lambda d: d.name)
def test_leak_bound_is_a_ratio_of_currents_at_the_trip_point(diode):
    law = SteeredLaw(AstableLaw(9.0, *THIRDS), diode)
    bound = law.leak_bound(np.array([1e-7, 0.0]), 3.0)
    # Worked out: 6 V across the leak; the current of three times that leaves 3 V less the drop.
    current = 3.0 * 6.0 * 1e-7
    assert float(bound[0]) == pytest.approx((3.0 - float(diode.drop_at(current))) / current)
    assert bound[1] == inf
    assert law.trip_ratio(float(bound[0]), 1e-7) == pytest.approx(3.0, rel=0.01)
    assert law.trip_ratio(float(bound[0]), 0.0) == inf
    assert law.endless_from(0.0) == inf


# Resistors from times ----------------------------------------------------------------------------


@st.composite
def laws(draw):
    current, leak = (
        draw(st.one_of(st.just(0.0), st.floats(-12, -6.6).map(lambda x: 10.0**x))) for _ in "12"
    )
    trips = draw(st.sampled_from((THIRDS, (0.65, 0.31), (0.5, 0.25))))
    switch = draw(st.one_of(st.just(0.0), st.floats(1.0, 45.0)))
    timer = AstableLaw(draw(st.floats(4.5, 18.0)), *trips, current, leak, switch)
    diode = draw(st.sampled_from((SILICON, SCHOTTKY, diode_named("0.6V"), diode_named("ideal"))))
    return SteeredLaw(timer, diode, draw(st.booleans()))


ohms = st.floats(3.3, 6.5).map(lambda x: 10.0**x)
farads = st.floats(-10, -3).map(lambda x: 10.0**x)
leaks = st.one_of(st.just(0.0), st.floats(-13, -6.5).map(lambda x: 10.0**x))


@settings(max_examples=100, deadline=None)
@given(laws(), st.tuples(ohms, ohms), farads, leaks, st.floats(1e-4, 0.5))
def test_ra_for_is_the_inverse_of_the_high_time(law, rs, c, g, short):
    ra, rb = rs
    end = float(law.endless_from(g))
    ra = min(ra, end * (1.0 - short))  # short of where it never ends, by little or much
    high = float(law.times((ra, rb), c, g)[0])
    assert 0.0 < high < inf
    found = float(law.ra_for(high, rb, c, g))
    # The time computed back is the better measure where it is steep.
    assert float(law.times((found, rb), c, g)[0]) == pytest.approx(high, rel=1e-8)
    assert found == pytest.approx(ra, rel=1e-8)


@settings(max_examples=100, deadline=None)
@given(laws(), ohms, ohms, farads, leaks)
def test_rb_for_is_the_inverse_of_the_low_time(law, ra, rb, c, g):
    low = float(law.times((ra, rb), c, g)[1])
    assert 0.0 < low < inf
    # Where the leak alone would nearly do, RB hardly matters and is hardly known.
    assume(g * rb < 3.0 and law.timer.input_current * rb < 0.3 * law.timer.supply)
    found = float(law.rb_for(low, ra, c, g))
    assert float(law.times((ra, found), c, g)[1]) == pytest.approx(low, rel=1e-9)
    assert found == pytest.approx(rb, rel=1e-6)


@settings(max_examples=100, deadline=None)
@given(laws(), st.tuples(ohms, ohms), farads, leaks, st.floats(1.001, 3.0))
def test_what_each_part_does_to_each_time(law, rs, c, g, more):
    ra, rb = rs
    assume(ra * more < 0.9 * float(law.endless_from(g)))
    high, low = (float(x) for x in law.times((ra, rb), c, g))
    # Six digits of the quadrature are enough to tell.
    more_ra = [float(x) for x in law.times((ra * more, rb), c, g)]
    assert more_ra[0] > high
    assert more_ra[1] <= low * (1.0 + 1e-6)
    more_rb = [float(x) for x in law.times((ra, rb * more), c, g)]
    assert more_rb[0] >= high * (1.0 - 3e-6)
    assert more_rb[1] > low
    assert [float(x) for x in law.times((ra, rb), 2.0 * c, g)] == pytest.approx(
        [2.0 * high, 2.0 * low], rel=1e-9
    )
    if g or law.timer.input_current or law.timer.switch_leak:
        lossless = [float(x) for x in law.lossless().times((ra, rb), c, 0.0)]
        assert lossless[0] <= high * (1.0 + 1e-6)
        assert lossless[1] >= low * (1.0 - 1e-6)


def test_shapes_broadcast():
    law = SteeredLaw(AstableLaw(9.0, *THIRDS, 1e-8, 1e-9, 10.0), SILICON)
    c = np.geomspace(1e-9, 1e-6, 7)
    high, low = law.times((np.array([[1e4], [1e5]]), 1e5), c, 1e-9)
    assert high.shape == low.shape == (2, 7)
    assert law.ra_for([[1e-4], [1e-3]], 1e5, c, 0.0).shape == (2, 7)
    assert law.rb_for([[1e-4], [1e-3]], 1e5, c, 0.0).shape == (2, 7)
    one = float(law.times((1e5, 1e5), c[3], 1e-9)[0])
    assert float(high[1, 3]) == pytest.approx(one, rel=1e-9)


def test_one_that_never_ends_does_not_disturb_the_others():
    law = SteeredLaw(AstableLaw(9.0, *THIRDS, 1e-7, 1e-7, 10.0), SILICON)
    high = law.times((np.array([1e4, 1e9, 1e5]), 1e5), 1e-6, 1e-9)[0]
    alone = [float(law.times((ra, 1e5), 1e-6, 1e-9)[0]) for ra in (1e4, 1e9, 1e5)]
    assert alone[1] == inf
    np.testing.assert_allclose(high, alone, rtol=1e-9)


# The circuit of a timer --------------------------------------------------------------------------


def test_without_a_drop_it_is_two_plain_products():
    circuit = steered(timer_named("ideal"), 5.0, diode_named("ideal"))
    law = circuit.typical
    rs, c = (np.array([1e3, 470e3]), np.array([2.2e3, 1e3])), 1e-6
    high, low = law.times(rs, c, 1e-3)
    np.testing.assert_allclose(high, rs[0] * c * LN2, rtol=1e-15)
    np.testing.assert_allclose(low, rs[1] * c * LN2, rtol=1e-15)
    r, farad = Fraction(1000), Fraction(1, 10**6)
    assert law.exactly((r, 2 * r), farad) == (
        r * farad * Fraction(LN2),
        2 * r * farad * Fraction(LN2),
    )
    assert float(law.ra_for(1e-3, 1e5, 1e-6, 0.0)) == pytest.approx(1e3 / LN2)
    assert float(law.rb_for(1e-3, 1e5, 1e-6, 0.0)) == pytest.approx(1e3 / LN2)
    assert law.trip_ratio(1e6, 1.0) == law.endless_from(1.0) == inf
    assert set(circuit.corners) == {law}
    assert circuit.lossless
    assert SteeredLaw(AstableLaw(5.0, *THIRDS), SILICON).exactly((r, r), farad) is None


@pytest.mark.parametrize("both", [False, True])
def test_duty_below_one_half(both):
    """What the plain astable cannot do; and the duty moves with the supply unless both drop."""
    duties = []
    for supply in (5.0, 15.0):
        circuit = steered(timer_named("TLC555"), supply, SILICON, both=both)
        times = [float(t) for t in circuit.typical.times((10e3, 90e3), 1e-6, 0.0)]
        duties.append(outputs_of(circuit, times)["duty"])
        assert 0.08 < duties[-1] < 0.14
        assert circuit.twin.least_duty == 0.0
        assert not circuit.twin.through_both
    assert (abs(duties[0] - duties[1]) < 0.005) is both


def test_the_period_follows_the_supply():
    # Worked out: a drop of 0.6 V adds 35.8 % at 5 V and 9.5 % at 15 V.
    highs = [
        float(steered(timer_named("TLC555"), v, SILICON).typical.times((1e5, 1e5), 1e-6, 0.0)[0])
        for v in (5.0, 9.0, 15.0)
    ]
    assert highs[0] > highs[1] > highs[2] > 0.1 * LN2
    # Some microampere make a real diode drop less than the 0.6 V of the textbook.
    assert highs[0] < 0.1 * 0.940983


@pytest.mark.parametrize("timer", ["NE555", "TLC555", "ICM7555"])
def test_the_circuit_is_the_astable_and_a_diode(timer):
    plain = astable(timer_named(timer), 9.0)
    circuit = steered(timer_named(timer), 9.0, SILICON)
    assert circuit.typical == SteeredLaw(plain.typical, SILICON)
    assert circuit.first == SteeredLaw(plain.first, SILICON)
    assert {(law.timer, law.diode.drop) for law in circuit.corners} == set(
        product(plain.corners, (SILICON.drop + DROP_ERROR, SILICON.drop - DROP_ERROR))
    )
    assert (circuit.bounds, circuit.error, circuit.shortest) == (
        plain.bounds,
        plain.error,
        plain.shortest,
    )
    assert (circuit.slots, circuit.outputs) == (plain.slots, plain.outputs)


@pytest.mark.parametrize("diode", [SILICON, diode_named("0.6V")], ids=lambda d: d.name)
@pytest.mark.parametrize("both", [False, True])
def test_the_typical_times_lie_within_the_corners(diode, both):
    circuit = steered(timer_named("NE555"), 9.0, diode, both=both)
    usual = np.array([float(t) for t in circuit.typical.times((47e3, 100e3), 1e-6, 0.0)])
    around = np.array(
        [[float(t) for t in law.times((47e3, 100e3), 1e-6, 0.0)] for law in circuit.corners]
    )
    assert np.all(around.min(axis=0) <= usual)
    assert np.all(usual <= around.max(axis=0))


@pytest.mark.parametrize("timer", ["ideal", "TLC555"])
@pytest.mark.parametrize("both", [False, True])
def test_a_voltage_forced_on_the_control_pin(timer, both):
    # Worked out: with 4.5 V forced at 9 V, high ln((9 - 0.6 - 2.25) / (9 - 0.6 - 4.5)).
    circuit = steered(timer_named(timer), 9.0, diode_named("0.6V"), both=both, control=4.5)
    high, low = (float(t) for t in circuit.typical.times((1e5, 1e5), 1e-6, 0.0))
    assert high == pytest.approx(0.1 * log(6.15 / 3.9), rel=1e-3)
    assert low == pytest.approx(0.1 * (log(3.9 / 1.65) if both else LN2), rel=1e-3)


@pytest.mark.parametrize(
    ("supply", "drop", "both", "control"),
    [
        (1.8, "0.6V", False, None),  # a third of it is 0.6 V
        (3.0, "1V", False, None),
        (5.0, "0.6V", False, 4.5),  # half a volt is left
        (5.0, "0.6V", True, 1.2),  # and here it is the lower trip point
    ],
)
def test_a_diode_that_leaves_nothing_is_refused(supply, drop, both, control):
    with pytest.raises(BadRequestError, match=r"leaves nothing to charge with.*Schottky"):
        steered(timer_named("ideal"), supply, diode_named(drop), both=both, control=control)


def test_the_least_that_may_be_left():
    # Worked out: a third of the supply must be more than the drop and its scatter.
    assert DROP_ERROR == 0.05
    with pytest.raises(BadRequestError, match=r"At 1\.94 V a diode that drops 600 mV"):
        steered(timer_named("ideal"), 1.94, diode_named("0.6V"))
    circuit = steered(timer_named("ideal"), 1.96, diode_named("0.6V"))
    assert all(law.times((1e5, 1e5), 1e-6, 0.0)[0] < inf for law in circuit.corners)
    # One diode alone does not mind a low lower trip point.
    steered(timer_named("ideal"), 5.0, diode_named("0.6V"), control=1.2)


@pytest.mark.parametrize(("supply", "control"), [(5.0, 0.5), (5.0, 4.6), (9.0, -1.0)])
def test_a_control_voltage_that_cannot_work_is_refused(supply, control):
    with pytest.raises(BadRequestError, match="choose a control voltage between"):
        steered(timer_named("NE555"), supply, SILICON, control=control)
