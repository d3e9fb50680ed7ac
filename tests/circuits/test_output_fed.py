"""The output-fed astable against the circuit step by step; where it stalls, and says so."""

from dataclasses import replace
from itertools import product
from math import inf, log

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from sample_slots import slot
from turning import Turn, follow

from chooser.circuits.circuit import Bounds, outputs_of
from chooser.circuits.output_fed import LEAST_OHM, output_fed
from chooser.circuits.timers import timer_named, timer_names
from chooser.errors import BadRequestError
from chooser.interval import outlook

LN2 = log(2.0)
REAL = [name for name in timer_names() if name != "ideal"]


def by_integration(timer, supply, levels, current, parts):
    """Follow the node from power-up: an output with two levels and two resistances."""
    r, c, g = parts
    up, down = levels
    above, below = timer.output_high_resistance, timer.output_low_resistance

    def swung(source, series):
        return lambda v: ((source - v) / (r + series) - current - g * v) / c

    high = Turn(swung(up, above), timer.threshold * supply)
    low = Turn(swung(down, below), timer.trigger * supply)
    return follow([high, low, high, low], 0.0, 100.0 * (r + above + below) * c)


def check(law, first, run, parts):
    r, c, g = parts
    high, low = (float(time) for time in law.times((r,), c, g))
    if first is not None:
        assert run[0] == pytest.approx(float(first.times((r,), c, g)[0]), rel=1e-7)
    assert run[1:] == pytest.approx([low, high, low][: len(run) - 1], rel=1e-7)


@pytest.mark.parametrize("name", REAL)
@pytest.mark.parametrize("supply", [5.0, 12.0])
def test_full_cycles_from_power_up(name, supply):
    timer = timer_named(name)
    circuit = output_fed(timer, supply)
    levels = (supply - timer.output_high_drop_typical, timer.output_low_typical)
    for r, share in product((2.2e3, 100e3), (0.0, 0.01, 0.05)):
        parts = (r, 4.7e-7, share / r)
        run = by_integration(timer, supply, levels, timer.threshold_current_typical, parts)
        check(circuit.typical, circuit.first, run, parts)


@pytest.mark.parametrize("name", ["NE555", "TLC555", "ICM7555"])
def test_corners_are_the_limits_of_levels_and_input_current(name):
    timer, supply, parts = timer_named(name), 9.0, (47e3, 1e-7, 1e-7)
    circuit = output_fed(timer, supply)
    usual, most = timer.output_high_drop_typical, timer.output_high_drop_limit
    runs = [
        by_integration(timer, supply, (supply - drop, low), current, parts)
        for drop, low, current in product(
            (max(2.0 * usual - most, 0.0), most),
            (0.0, timer.output_low_limit),
            (0.0, timer.threshold_current_limit),
        )
    ]
    assert len(circuit.corners) == len(runs) == 8
    for law, run in zip(circuit.corners, runs, strict=True):
        check(law, None, run, parts)


@pytest.mark.parametrize("load", [0.0, 1e-3, 20e-3])
def test_a_load_lowers_the_high_level_and_lengthens_the_high_time(load):
    timer, parts = timer_named("NE555"), (47e3, 1e-7, 0.0)
    circuit = output_fed(timer, 9.0, load)
    # SLFS022: 8 ohm of further drop, 2.5 V at 200 mA against 1.7 V at 100 mA.
    levels = (9.0 - timer.output_high_drop_typical - 8.0 * load, timer.output_low_typical)
    run = by_integration(timer, 9.0, levels, timer.threshold_current_typical, parts)
    check(circuit.typical, circuit.first, run, parts)
    free = output_fed(timer, 9.0)
    loaded, alone = (float(x.typical.times((47e3,), 1e-7, 0.0)[0]) for x in (circuit, free))
    assert loaded > alone or load == 0.0


# Stall -------------------------------------------------------------------------------------------


def test_a_bipolar_output_at_5_volt_only_just_clears_the_trip_point():
    # From memory: 3.8 V typical, hardly loaded; the trip point is 3.33 V.
    circuit = output_fed(timer_named("NE555"), 5.0)
    times = [float(time) for time in circuit.typical.times((100e3,), 1e-6, 0.0)]
    # Worked out: T = 2.244 RC, duty 67.7 %; 30 nA and the output's ohms are in it too.
    found = outputs_of(circuit, times)
    assert found["period"] == pytest.approx(0.2244, rel=3e-3)
    assert found["duty"] == pytest.approx(0.677, abs=2e-3)
    # SLFS022: 3.3 V at the limit, which does not; some pieces stall, and the corners say so.
    assert inf in [float(law.times((100e3,), 1e-6, 0.0)[0]) for law in circuit.corners]


@pytest.mark.parametrize(
    ("supply", "load"),
    [
        # Worked out: 8 ohm x load takes the level below two thirds, with 1.2 V lost already.
        (5.0, (5.0 / 3.0 - 1.2) / 8.0),
        (4.5, (4.5 / 3.0 - 1.2) / 8.0),
        (6.0, (6.0 / 3.0 - 1.2) / 8.0),
    ],
)
def test_the_load_at_which_it_stalls(supply, load):
    timer = timer_named("NE555")
    fine = output_fed(timer, supply, load * 0.999)
    # 1k, so that the 30 nA of the input do not count.
    assert np.isfinite(fine.typical.times((1e3,), 1e-6, 0.0)).all()
    with pytest.raises(BadRequestError, match="would stall; lighten the load"):
        output_fed(timer, supply, load * 1.001)


def test_the_sentence_names_level_load_and_trip_point():
    said = (
        "The output of the NE555 timer at 5 V only rises to 3.32 V under 60 mA, below the trip "
        "point of 3.33 V: this circuit would stall; lighten the load, or build it as `astable`."
    )
    with pytest.raises(BadRequestError) as refused:
        output_fed(timer_named("NE555"), 5.0, 60e-3)
    assert str(refused.value) == said


def test_an_output_of_3_3_volt_at_5_volt_is_no_oscillator():
    # SLFS022: 3.3 V at 5 V (and 100 mA); such a piece stalls without any further load.
    weak = replace(timer_named("NE555"), output_high_drop_typical=1.7)
    with pytest.raises(BadRequestError, match=r"3\.3 V, below .*CMOS timer or a higher supply"):
        output_fed(weak, 5.0)
    assert np.isfinite(output_fed(weak, 9.0).typical.times((10e3,), 1e-6, 0.0)).all()


@pytest.mark.parametrize("margin", [0.99, 1.01])
def test_a_level_around_the_trip_point_against_integration(margin):
    timer = replace(
        timer_named("NE555"),
        output_high_drop_typical=5.0 / 3.0 * margin,
        threshold_current_typical=0.0,
    )
    levels = (5.0 - timer.output_high_drop_typical, timer.output_low_typical)
    run = by_integration(timer, 5.0, levels, 0.0, (10e3, 1e-6, 0.0))
    if margin > 1.0:
        assert run == [inf]
        with pytest.raises(BadRequestError, match="would stall"):
            output_fed(timer, 5.0)
    else:
        check(output_fed(timer, 5.0).typical, None, run, (10e3, 1e-6, 0.0))


# Inverse and limits ------------------------------------------------------------------------------


@given(
    st.sampled_from(REAL), st.floats(2.0, 7.0), st.floats(-11, -4),
    st.one_of(st.just(0.0), st.floats(-12, -6)),
)  # fmt: skip
def test_resistance_is_the_inverse_of_the_period(name, r, c, g):
    law = output_fed(timer_named(name), 9.0).law
    r, c, g = 10.0**r, 10.0**c, 10.0**g if g else 0.0
    end = float(law.endless_from(g))
    period = float(law.interval(r, c, g))
    assert (period == inf) is (r >= end)
    if r < 0.999 * end:
        assert float(law.resistance(period, c, g)) == pytest.approx(r, rel=1e-9)
        assert float(law.interval(r, 2.0 * c, g)) == pytest.approx(2.0 * period)


def test_trip_ratio_and_leak_bound_are_currents_at_the_upper_trip_point():
    timer = replace(timer_named("NE555"), output_high_resistance=0.0, output_low_resistance=0.0)
    law = output_fed(timer, 9.0).law
    # Worked out: 7.8 V less 6 V over R against 30 nA and 6 V across the leak.
    assert law.trip_ratio(1e6, 1e-7) == pytest.approx(1.8e-6 / (30e-9 + 0.6e-6))
    assert float(law.endless_from(1e-7)) == pytest.approx(1.8 / 0.63e-6)
    assert float(law.leak_bound(1e-7, 3.0)) == pytest.approx(1e6)


def test_the_circuit_has_the_timers_figures():
    timer = timer_named("NE555")
    circuit = output_fed(timer, 9.0)
    assert circuit.error.plus == circuit.error.minus == timer.astable_error_limit
    assert (circuit.slots, circuit.timer) == (("R", "C"), timer)
    assert circuit.shortest == 1.0 / timer.highest_frequency
    assert circuit.bounds.least == LEAST_OHM
    # Worked out: a tenth of (7.8 - 6) V / 250 nA.
    assert circuit.bounds.most == pytest.approx(720e3)


def test_a_timer_whose_input_draws_nothing_has_the_boards_limit_only():
    timer = replace(
        timer_named("TLC555"), threshold_current_typical=0.0, threshold_current_limit=0.0
    )
    assert output_fed(timer, 9.0).bounds.most == 10e6


def test_ideal_is_half_and_half():
    circuit = output_fed(timer_named("ideal"), 5.0)
    law = circuit.law
    assert set(circuit.corners) == {law}
    high, low = law.times((1e5,), 1e-6, 1e-3)
    assert float(high) == float(low) == 1e5 * 1e-6 * LN2
    assert float(circuit.first.times((1e5,), 1e-6, 0.0)[0]) == pytest.approx(0.1 * log(3.0))
    assert float(law.resistance(1.0, 1e-6, 0.0)) == pytest.approx(1e6 / (2.0 * LN2), rel=1e-15)
    assert circuit.bounds == Bounds()
    assert circuit.lossless


def test_an_ideal_timer_with_other_trip_points():
    # Worked out: ln((1 - b) / (1 - a)) and ln(a / b) at 0.65 and 0.31.
    circuit = output_fed(replace(timer_named("ideal"), threshold=0.65, trigger=0.31), 5.0)
    high, low = (float(time) for time in circuit.typical.times((1e6,), 1e-6, 0.0))
    assert (high, low) == pytest.approx((0.678758, 0.740400), rel=1e-6)


# Levels from piece to piece ----------------------------------------------------------------------


@pytest.mark.parametrize(("name", "supply"), [("NE555", 5.0), ("NE555", 9.0), ("cmos", 5.0)])
def test_scattering_levels_against_monte_carlo(name, supply):
    """Levels anywhere as half normal laws to their limits, pieces that stall in no band."""
    timer = timer_named(name)
    circuit = output_fed(timer, supply)
    r, c = slot(47e3, 0.01, 0.01), slot(1e-6, 0.05, 0.05)
    nominal = outlook(circuit, (r,), c, {}).chief.nominal
    rng, runs = np.random.default_rng(21), 400_000

    def drawn(usual, most):
        z = np.clip(rng.standard_normal(runs), -3.0, 3.0)
        return usual + z / 3.0 * np.where(z < 0.0, min(most - usual, usual), most - usual)

    high = 1.0 - drawn(timer.output_high_drop_typical, timer.output_high_drop_limit) / supply
    low = drawn(timer.output_low_typical, timer.output_low_limit) / supply
    ohm, farad = rng.uniform(r.low, r.high, runs), rng.uniform(c.low, c.high, runs)
    a, b, current = timer.threshold, timer.trigger, timer.threshold_current_typical / supply
    up, down = ohm + timer.output_high_resistance, ohm + timer.output_low_resistance
    with np.errstate(invalid="ignore", divide="ignore"):
        rises = up * farad * np.log((high - b - current * up) / (high - a - current * up))
        falls = down * farad * np.log((a - low + current * down) / (b - low + current * down))
        factor = 1.0 + rng.standard_normal(runs) * timer.astable_error_limit / 3.0
        period = np.where(high - a > current * up, (rises + falls) * factor, inf)
    for band in ((0.9, 1.1), (0.98, 1.02), (1.0, 1.5), (0.0, 1e6)):
        ends = band[0] * nominal, band[1] * nominal
        hits = float(np.mean((period >= ends[0]) & (period <= ends[1])))
        chance = outlook(circuit, (r,), c, {"period": ends}).chance
        assert chance == pytest.approx(hits, abs=0.015), band
    found = outlook(circuit, (r,), c, {}).chief
    # At 5 V a few pieces hardly clear the trip point: their long tail has no sigma to speak of.
    tail = np.isfinite(period) & (period < 2.0 * nominal)
    near = 0.1 if supply == 5.0 and name == "NE555" else 0.02
    assert found.spread == pytest.approx(float(period[tail].std()) / nominal, rel=near)
    assert found.mean == pytest.approx(float(period[tail].mean()), rel=near / 2.0)


def test_a_load_beyond_what_the_output_may_source_is_refused():
    said = (
        "The output of the cmos timer can source 1 mA, and the load takes 5 mA; "
        "drive it by a transistor."
    )
    with pytest.raises(BadRequestError) as refused:
        output_fed(timer_named("cmos"), 9.0, 5e-3)
    assert str(refused.value) == said
    assert output_fed(timer_named("NE555"), 9.0, 5e-3).setting == "5 mA load on the high output"


def test_a_piece_that_hardly_rises_at_all_stalls_too():
    weak = replace(timer_named("NE555"), output_high_drop_limit=4.0)
    worst = [law.times((10e3,), 1e-6, 0.0)[0] for law in output_fed(weak, 5.0).corners]
    assert inf in worst
    assert 0.0 not in worst
