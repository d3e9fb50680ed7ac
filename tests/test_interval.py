"""The honest interval: corners of one time, spread against Monte Carlo, and laws."""

from dataclasses import replace
from itertools import product
from math import inf, log, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sample_slots import EVERYTHING, one_shot, slot

from chooser.circuits.astable import astable
from chooser.circuits.charging import Phase
from chooser.circuits.circuit import EXACT
from chooser.circuits.timers import timer_named
from chooser.interval import likely_miss, mean_of, outlook, spread_of, weight_of


def by_the_formula(r, c, g, *, supply, threshold, current, switch):
    """Worked out anew with plain numbers: the Thevenin form of the charging equation."""
    source = (supply - r * current) / (1.0 + r * g)
    trip = threshold * supply
    if source <= trip:
        return inf
    start = supply * switch / (r + switch)
    return r / (1.0 + r * g) * c * log((source - start) / (source - trip))


R = slot(330e3, 0.05, 0.05)
C = slot(22e-6, 0.2, 0.5, 22e-6 / 3000.0, 22e-6 / 100.0)
RA, RB = slot(47e3, 0.01, 0.01), slot(120e3, 0.05, 0.05)


# Corners -----------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["NE555", "LMC555", "ICM7555", "ideal"])
@pytest.mark.parametrize("c", [C, slot(1e-6, 0.1, 0.1, 1e-10, 1e-9)])
def test_low_and_high_against_every_corner(name, c):
    timer, supply = timer_named(name), 9.0
    ideal = timer.ideal
    currents = (0.0, timer.threshold_current_limit + timer.discharge_leakage_limit)
    corners = [
        by_the_formula(
            r,
            farad,
            0.0 if ideal else g,
            supply=supply,
            threshold=timer.threshold,
            current=current,
            switch=switch,
        )
        * (1.0 + error)
        for r, farad, g, current, switch, error in product(
            (R.low, R.value, R.high),
            (c.low, c.value, c.high),
            (0.0, c.leak_typical, c.leak_limit),
            currents,
            (0.0, timer.discharge_resistance_limit),
            (-timer.timing_error_limit, 0.0, timer.timing_error_limit),
        )
    ]
    found = outlook(one_shot(timer), (R,), c, EVERYTHING).chief
    assert found.low == pytest.approx(min(corners), rel=1e-12)
    assert found.high == pytest.approx(max(corners), rel=1e-12)
    assert found.low <= found.nominal <= found.high


def test_nominal_is_at_typical_figures():
    timer = timer_named("NE555")
    expected = by_the_formula(
        R.value,
        C.value,
        C.leak_typical,
        supply=9.0,
        threshold=timer.threshold,
        current=timer.threshold_current_typical + timer.discharge_leakage_typical,
        switch=timer.discharge_resistance_typical,
    )
    found = outlook(one_shot(timer), (R,), C, EVERYTHING).chief
    assert found.nominal == pytest.approx(expected, rel=1e-13)


def test_a_scale_stretches_all_times_alike():
    """The pin of a counter, say: 16 times the oscillator's period, the duty as it is."""
    circuit, rs, c = astable(timer_named("NE555"), 9.0), (RA, RB), slot(1e-6, 0.1, 0.1)
    once, more = (outlook(circuit, rs, c, {"period": (0.0, 1e12)}, scale) for scale in (1.0, 16.0))
    for output in ("high", "low", "period"):
        assert more.of(output).nominal == pytest.approx(16.0 * once.of(output).nominal)
        assert more.of(output).high == pytest.approx(16.0 * once.of(output).high)
    assert more.of("frequency").low == pytest.approx(once.of("frequency").low / 16.0)
    assert more.of("duty").nominal == pytest.approx(once.of("duty").nominal)
    assert more.of("period").spread == pytest.approx(once.of("period").spread)


# What may never end ------------------------------------------------------------------------------


def test_an_interval_that_may_never_end_has_no_high_end():
    # Worked out: at the limit of an electrolytic, C / 100 s, 50 s of R C never end.
    r = slot(1e6, 0.01, 0.01)
    c = slot(60e-6, 0.2, 0.2, 60e-6 / 3000.0, 60e-6 / 100.0)
    found = outlook(one_shot("cmos"), (r,), c, EVERYTHING)
    assert found.chief.high is None
    assert found.chief.nominal < inf
    assert found.chance == pytest.approx(1.0)


def test_an_interval_that_never_ends_at_typical_leakage():
    r = slot(1e6, 0.01, 0.01)
    c = slot(60e-6, 0.2, 0.2, 60e-6 / 90.0, 60e-6 / 80.0)
    found = outlook(one_shot("cmos"), (r,), c, EVERYTHING)
    chief = found.chief
    assert (chief.nominal, chief.high, chief.mean, chief.spread) == (inf, None, inf, inf)
    assert found.chance == 0.0
    assert chief.low < inf


def test_an_interval_that_just_ends_has_no_mean():
    # Rp = 2R never ends; a millionth below it does, but any part a little larger would not.
    circuit = one_shot(replace(timer_named("ideal"), ideal=False))
    c = slot(1e-6, 0.1, 0.1, 0.5e-6, 0.5e-6)
    found = outlook(circuit, (slot(1e6 * (1.0 - 1e-6), 0.1, 0.1),), c, EVERYTHING)
    assert found.chief.nominal < inf
    assert (found.chief.high, found.chief.mean, found.chief.spread) == (None, inf, inf)
    assert 0.0 < found.chance < 1.0


def test_an_oscillator_that_may_stop_with_its_output_high():
    rs = slot(500e3, 0.01, 0.01), slot(500e3, 0.01, 0.01)
    c = slot(60e-6, 0.2, 0.2, 60e-6 / 3000.0, 60e-6 / 100.0)
    found = outlook(astable(timer_named("cmos"), 9.0), rs, c, {"period": (0.0, 1e12)})
    assert found.of("period").high is found.of("high").high is None
    assert found.of("low").high < inf
    assert found.of("frequency").low == 0.0
    assert found.of("duty").high == 1.0
    assert found.of("period").nominal < inf


# Tolerances alone --------------------------------------------------------------------------------


def test_ideal_counts_the_tolerances_of_the_parts_alone():
    found = outlook(one_shot("ideal"), (R,), C, EVERYTHING).chief
    plain = R.value * C.value * log(3.0)
    assert found.nominal == plain
    assert found.low == pytest.approx(plain * 0.95 * 0.8)
    assert found.high == pytest.approx(plain * 1.05 * 1.5)
    # Worked out: uniform errors have a sigma of the full width over the root of 12.
    assert found.spread == pytest.approx(sqrt((0.1**2 + 0.7**2) / 12.0))
    assert found.mean == pytest.approx(plain * 1.15)
    assert found.follows == pytest.approx((1.0, 1.0), rel=1e-9)


@pytest.mark.parametrize(
    ("r", "c", "chip", "worst", "root"),
    [
        # Worked out as products of all corners, and as root of the sum of squares of the limits.
        (0.05, 0.20, 0.03, (0.298, -0.263), 0.208),
        (0.01, 0.10, 0.03, (0.144, -0.136), 0.105),
        (0.01, 0.05, 0.01, (0.071, -0.069), 0.052),
    ],
)
def test_a_chain_of_tolerances(r, c, chip, worst, root):
    timer = replace(timer_named("ideal"), timing_error_limit=chip)
    found = outlook(one_shot(timer), (slot(1e5, r, r),), slot(1e-6, c, c), EVERYTHING).chief
    assert found.high / found.nominal - 1.0 == pytest.approx(worst[0], abs=6e-4)
    assert found.low / found.nominal - 1.0 == pytest.approx(worst[1], abs=6e-4)
    # Uniform parts and a timer whose limit is three sigmas: the limits' root over root three.
    as_uniform = sqrt((found.spread**2 - (chip / 3) ** 2) * 3.0 + chip**2)
    assert as_uniform == pytest.approx(root, abs=6e-4)


def test_what_each_part_does_to_the_textbook_astable():
    """By hand: period (RA + 2 RB) C ln 2, high (RA + RB) C ln 2, duty their quotient."""
    rs = slot(1e3, 0.01, 0.01), slot(3e3, 0.02, 0.02)
    found = outlook(astable(timer_named("ideal"), 9.0), rs, slot(1e-6, 0.1, 0.1), {})
    expected = {
        "period": (1 / 7, 6 / 7, 1.0),
        "frequency": (-1 / 7, -6 / 7, -1.0),
        "high": (1 / 4, 3 / 4, 1.0),
        "low": (0.0, 1.0, 1.0),
        "duty": (1 / 4 - 1 / 7, 3 / 4 - 6 / 7, 0.0),
    }
    sigmas = [x / sqrt(3.0) for x in (0.01, 0.02, 0.1)]
    for output, follows in expected.items():
        reading = found.of(output)
        assert reading.follows == pytest.approx(follows, abs=1e-9), output
        spread = sqrt(sum((f * s) ** 2 for f, s in zip(follows, sigmas, strict=True)))
        assert reading.spread == pytest.approx(spread, rel=1e-8), output


@pytest.mark.parametrize(
    ("output", "weight"),
    [("interval", 1), ("period", 1), ("high", 1), ("low", 1), ("frequency", -1), ("duty", 0)],
)
def test_how_outputs_follow_a_device_that_is_slow(output, weight):
    assert weight_of(output) == weight


def test_the_device_moves_the_times_and_not_the_duty():
    timer = replace(timer_named("ideal"), astable_error_limit=0.1)
    exact = [slot(value, 0.0, 0.0) for value in (1e3, 3e3, 1e-6)]
    found = outlook(astable(timer, 9.0), exact[:2], exact[2], {})
    period = 7e-3 * log(2.0)
    assert (found.of("period").low, found.of("period").high) == pytest.approx(
        (0.9 * period, 1.1 * period)
    )
    assert (found.of("frequency").low, found.of("frequency").high) == pytest.approx(
        (1.0 / 1.1 / period, 1.0 / 0.9 / period)
    )
    assert found.of("duty").low == found.of("duty").high == pytest.approx(4.0 / 7.0)
    assert found.of("period").spread == pytest.approx(0.1 / 3.0)
    assert found.of("duty").spread == 0.0


# Laws --------------------------------------------------------------------------------------------

tolerances = st.one_of(st.just(0.0), st.floats(1e-4, 0.5))


@settings(max_examples=60)
@given(tolerances, tolerances, tolerances, st.floats(0.0, 0.12), st.floats(0.3, 1.5))
def test_laws_of_the_outlook(r_minus, c_minus, c_plus, chip, middle):
    timer = replace(timer_named("cmos"), timing_error_limit=chip, timing_error_typical=0.0)
    r = slot(470e3, r_minus, r_minus)
    c = slot(1e-6, c_minus, c_plus, 1e-10, 1e-9)

    def chance(low, high):
        return outlook(one_shot(timer), (r,), c, {"interval": (low, high)}).chance

    found = outlook(one_shot(timer), (r,), c, EVERYTHING)
    chief = found.chief
    assert chief.low <= chief.nominal <= chief.high
    assert chief.low <= chief.mean <= chief.high
    assert found.chance == pytest.approx(1.0, abs=1e-9)
    near = (chief.nominal * middle * 0.98, chief.nominal * middle * 1.02)
    wide = (chief.nominal * middle * 0.9, chief.nominal * middle * 1.1)
    assert 0.0 <= chance(*near) <= 1.0
    assert chance(*near) <= chance(*wide) + 1e-12
    assert chance(chief.high * 1.0001, chief.high * 2.0) == pytest.approx(0.0, abs=1e-9)
    # Parts of the band add up to the whole.
    cut = chief.nominal * middle
    if r_minus or c_minus or c_plus or chip > 1e-3:
        assert chance(0.0, cut) + chance(cut, 1e12) == pytest.approx(1.0, abs=1e-9)


def test_scores_are_vectorised_and_agree_with_the_outlook():
    circuit = one_shot("NE555")
    found = outlook(circuit, (R,), C, EVERYTHING).chief
    law, sigma = circuit.law, circuit.error.plus / 3.0
    values = np.array([R.value, 2.0 * R.value])
    steep = law.sensitivity(values, C.value, C.leak_typical)
    spread = spread_of((steep, 1.0), (R.spread, C.spread), sigma)
    time = law.interval(values, C.value, C.leak_typical)
    mean = mean_of(time, (steep, 1.0), (R.shift, C.shift))
    assert spread.shape == mean.shape == (2,)
    # The outlook takes its slopes from differences, good to nine digits.
    assert spread[0] == pytest.approx(found.spread, rel=1e-8)
    assert mean[0] == pytest.approx(found.mean, rel=1e-8)
    assert found.follows == pytest.approx((float(steep[0]), 1.0), rel=1e-8)


def test_spread_and_mean_against_monte_carlo():
    circuit = one_shot("bipolar")
    r, c = slot(220e3, 0.01, 0.01), slot(10e-6, 0.1, 0.3, 1e-9, 1e-8)
    found = outlook(circuit, (r,), c, EVERYTHING).chief
    rng = np.random.default_rng(77)
    times = circuit.law.interval(
        rng.uniform(r.low, r.high, 400_000), rng.uniform(c.low, c.high, 400_000), c.leak_typical
    ) * (1.0 + rng.standard_normal(400_000) * circuit.error.plus / 3.0)
    assert found.mean == pytest.approx(float(times.mean()), rel=1e-3)
    assert found.spread == pytest.approx(float(times.std()) / found.nominal, rel=1e-2)


def test_spread_and_mean_of_the_astable_against_monte_carlo():
    circuit = astable(timer_named("NE555"), 9.0)
    rs, c = (slot(4.7e3, 0.05, 0.05), slot(22e3, 0.02, 0.02)), slot(10e-6, 0.1, 0.14, 1e-9, 1e-8)
    found = outlook(circuit, rs, c, {})
    rng, runs = np.random.default_rng(78), 400_000
    high, low = circuit.typical.times(
        [rng.uniform(r.low, r.high, runs) for r in rs],
        rng.uniform(c.low, c.high, runs),
        c.leak_typical,
    )
    factor = 1.0 + rng.standard_normal(runs) * circuit.error.plus / 3.0
    made = {
        "period": (high + low) * factor,
        "frequency": 1.0 / (high + low) / factor,
        "high": high * factor,
        "low": low * factor,
        "duty": high / (high + low),
    }
    for output, values in made.items():
        reading = found.of(output)
        assert reading.mean == pytest.approx(float(values.mean()), rel=1e-3), output
        # The spread of a quotient is to first order.
        second = 1.5 * reading.spread**2 if output == "frequency" else 0.0
        sigma = float(values.std()) / reading.nominal
        assert reading.spread == pytest.approx(sigma, rel=1e-2 + 2.0 * second), output


def test_the_mean_of_a_frequency_with_one_sided_parts():
    """Worked out: 1 / C over a uniform law between its ends is ln(b / a) / (b - a)."""
    rs, c = [slot(10e3, 0.0, 0.0)] * 2, slot(1e-6, 0.0, 0.5)
    found = outlook(astable(timer_named("ideal"), 9.0), rs, c, {}).of("frequency")
    assert found.mean == pytest.approx(found.nominal * log(1.5) / 0.5, rel=2e-3)


def test_a_piece_that_never_ends_is_left_out_of_the_spread_and_in_no_band():
    fast, slow, dead = (Phase(5.0, trip) for trip in (0.5, 0.6, 1.0))
    plain = one_shot("cmos")
    circuit = replace(
        plain, typical=fast, corners=(fast,), error=EXACT,
        scatter=((0.5, fast), (0.3, slow), (0.2, dead)),
    )  # fmt: skip
    r, c = slot(1e6, 0.0, 0.0), slot(1e-6, 0.0, 0.0)
    found = outlook(circuit, (r,), c, {"interval": (0.0, 1e9)})
    # By hand: ln 2 five times of eight, ln 2.5 three times.
    few, many = log(2.0), log(2.5)
    mean = (5.0 * few + 3.0 * many) / 8.0
    sigma = sqrt((5.0 * (few - mean) ** 2 + 3.0 * (many - mean) ** 2) / 8.0)
    assert found.chief.mean == pytest.approx(mean)
    assert found.chief.spread == found.chief.device == pytest.approx(sigma / few)
    assert found.chance == pytest.approx(0.8)


def test_likely_miss():
    # 3-4-5 and 5-12-13 triangles.
    np.testing.assert_allclose(
        likely_miss([0.03, -0.05, 0.0], [0.04, 0.12, 0.1]), [0.05, 0.13, 0.1]
    )
    assert float(likely_miss(0.0, 0.0)) == 0.0


def test_losses_make_the_interval_steeper_in_r():
    # At a stretch of a tenth, one percent of R is more than one percent of the interval.
    phase = Phase(5.0, 2.0 / 3.0, 250e-9)
    assert 1.05 < float(phase.sensitivity(989e3, 1e-6, 0.0)) < 1.2
