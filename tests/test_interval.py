"""The honest interval: corners against every corner, chance against Monte Carlo, and laws."""

from dataclasses import replace
from itertools import product
from math import inf, log, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chooser.circuits.monostable import Drive, interval, sensitivity, typical
from chooser.circuits.timers import timer_named
from chooser.interval import SlotFacts, likely_miss, mean_of, outlook, spread_of
from chooser.parts import Tolerance

EVERYTHING = (0.0, 1e12)


def slot(value, minus, plus, typical_leak=0.0, limit_leak=0.0):
    tolerance = Tolerance(minus, plus)
    return SlotFacts(
        value,
        value * (1.0 - minus),
        value * (1.0 + plus),
        tolerance.spread,
        tolerance.shift,
        typical_leak,
        limit_leak,
    )


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
    found = outlook(R, c, timer, supply, EVERYTHING)
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
    assert outlook(R, C, timer, 9.0, EVERYTHING).nominal == pytest.approx(expected, rel=1e-13)


def test_an_interval_that_may_never_end_has_no_high_end():
    # Worked out: at the limit of an electrolytic, C / 100 s, 50 s of R C never end.
    r = slot(1e6, 0.01, 0.01)
    c = slot(60e-6, 0.2, 0.2, 60e-6 / 3000.0, 60e-6 / 100.0)
    found = outlook(r, c, timer_named("cmos"), 9.0, EVERYTHING)
    assert found.high is None
    assert found.nominal < inf
    assert found.chance == pytest.approx(1.0)


def test_an_interval_that_never_ends_at_typical_leakage():
    r = slot(1e6, 0.01, 0.01)
    c = slot(60e-6, 0.2, 0.2, 60e-6 / 90.0, 60e-6 / 80.0)
    found = outlook(r, c, timer_named("cmos"), 9.0, EVERYTHING)
    assert (found.nominal, found.high, found.mean, found.spread) == (inf, None, inf, inf)
    assert found.chance == 0.0
    assert found.low < inf


def test_chance_where_only_part_of_the_resistors_ever_end():
    # The leak alone takes everything from 1 Mohm up (Rp = 2R): half of R's range ends.
    r, c = slot(1e6, 0.1, 0.1), slot(1e-6, 0.0, 0.0, 0.5e-6, 0.5e-6)
    found = outlook(r, c, replace(timer_named("ideal"), ideal=False), 9.0, EVERYTHING)
    assert found.chance == pytest.approx(0.5, abs=3e-3)


def test_ideal_counts_the_tolerances_of_the_parts_alone():
    found = outlook(R, C, timer_named("ideal"), 9.0, EVERYTHING)
    plain = R.value * C.value * log(3.0)
    assert found.nominal == plain
    assert found.low == pytest.approx(plain * 0.95 * 0.8)
    assert found.high == pytest.approx(plain * 1.05 * 1.5)
    # Worked out: uniform errors have a sigma of the full width over the root of 12.
    assert found.spread == pytest.approx(sqrt((0.1**2 + 0.7**2) / 12.0))
    assert found.mean == pytest.approx(plain * 1.15)


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
    found = outlook(slot(1e5, r, r), slot(1e-6, c, c), timer, 9.0, EVERYTHING)
    assert found.high / found.nominal - 1.0 == pytest.approx(worst[0], abs=6e-4)
    assert found.low / found.nominal - 1.0 == pytest.approx(worst[1], abs=6e-4)
    # Uniform parts and a timer whose limit is three sigmas: the limits' root over root three.
    as_uniform = sqrt((found.spread**2 - (chip / 3) ** 2) * 3.0 + chip**2)
    assert as_uniform == pytest.approx(root, abs=6e-4)


CASES = {
    # name: (timer, R minus, R plus, C minus, C plus, band as fractions of the nominal)
    "electrolytic": ("bipolar", 0.01, 0.01, 0.2, 0.2, (0.98, 1.02)),
    "asymmetric": ("bipolar", 0.05, 0.05, 0.2, 0.8, (0.9, 1.3)),
    "equal tolerances": ("ideal", 0.05, 0.05, 0.05, 0.05, (0.97, 1.04)),
    "resistor alone": ("ideal", 0.05, 0.05, 0.0, 0.0, (0.98, 1.3)),
    "capacitor alone": ("ideal", 0.0, 0.0, 0.1, 0.1, (0.5, 1.03)),
    "timer alone": ("bipolar", 0.0, 0.0, 0.0, 0.0, (0.99, 1.005)),
    "timer rules": ("LMC555", 0.01, 0.01, 0.02, 0.02, (0.98, 1.02)),
    "resistor and timer": ("TLC555", 0.05, 0.05, 0.0, 0.0, (0.98, 1.02)),
    "narrow band": ("cmos", 0.05, 0.05, 0.06, 0.06, (0.999, 1.001)),
    "far away": ("cmos", 0.01, 0.01, 0.05, 0.05, (1.5, 1.6)),
}


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("leaky", [False, True])
def test_chance_against_monte_carlo(case, leaky):
    name, r_minus, r_plus, c_minus, c_plus, share = CASES[case]
    timer = timer_named(name)
    farad = 10e-6
    r = slot(1e6, r_minus, r_plus)
    c = slot(farad, c_minus, c_plus, farad / 40.0 if leaky else 0.0, farad / 30.0)
    nominal = outlook(r, c, timer, 9.0, EVERYTHING).nominal
    band = (share[0] * nominal, share[1] * nominal)
    chance = outlook(r, c, timer, 9.0, band).chance

    rng = np.random.default_rng(20_240_607)
    runs = 1_000_000
    sigmas = rng.standard_normal(runs)
    while (beyond := np.abs(sigmas) > 3.0).any():
        sigmas[beyond] = rng.standard_normal(np.count_nonzero(beyond))
    times = interval(
        rng.uniform(r.low, r.high, runs),
        rng.uniform(c.low, c.high, runs),
        c.leak_typical,
        typical(timer, 9.0),
    ) * (1.0 + sigmas * timer.timing_error_limit / 3.0)
    hits = float(np.mean((times >= band[0]) & (times <= band[1])))
    noise = sqrt(max(hits * (1.0 - hits), 1e-9) / runs)
    assert chance == pytest.approx(hits, abs=1e-3 + 2.0 * noise)


def test_chance_worked_out():
    ideal = timer_named("ideal")
    r, c = slot(1e5, 0.0, 0.0), slot(1e-5, 0.2, 0.2)
    # A band of 4 % in a uniform range of 40 %.
    target = 1e5 * 1e-5 * log(3.0)
    found = outlook(r, c, ideal, 9.0, (0.98 * target, 1.02 * target))
    assert found.chance == pytest.approx(0.1, rel=1e-9)
    # Nothing varies: in or out, the ends included.
    exact = slot(1e-5, 0.0, 0.0)
    assert outlook(r, exact, ideal, 9.0, (target, target)).chance == 1.0
    assert outlook(r, exact, ideal, 9.0, (1.001 * target, 1.1 * target)).chance == 0.0
    # From memory: a normal law keeps 68.27 % within one sigma, 99.73 % within three.
    sigma = timer_named("bipolar").timing_error_limit / 3.0
    bare = replace(ideal, timing_error_limit=3.0 * sigma)
    one = (target * (1.0 - sigma), target * (1.0 + sigma))
    assert outlook(r, exact, bare, 9.0, one).chance == pytest.approx(0.6827 / 0.9973, abs=1e-4)


tolerances = st.one_of(st.just(0.0), st.floats(1e-4, 0.5))


@settings(max_examples=60)
@given(tolerances, tolerances, tolerances, st.floats(0.0, 0.12), st.floats(0.3, 1.5))
def test_laws_of_the_outlook(r_minus, c_minus, c_plus, chip, middle):
    timer = replace(timer_named("cmos"), timing_error_limit=chip, timing_error_typical=0.0)
    r = slot(470e3, r_minus, r_minus)
    c = slot(1e-6, c_minus, c_plus, 1e-10, 1e-9)
    found = outlook(r, c, timer, 9.0, EVERYTHING)
    assert found.low <= found.nominal <= found.high
    assert found.low <= found.mean <= found.high
    assert found.chance == pytest.approx(1.0, abs=1e-9)
    near = (found.nominal * middle * 0.98, found.nominal * middle * 1.02)
    wide = (found.nominal * middle * 0.9, found.nominal * middle * 1.1)
    assert 0.0 <= outlook(r, c, timer, 9.0, near).chance <= 1.0
    assert outlook(r, c, timer, 9.0, near).chance <= outlook(r, c, timer, 9.0, wide).chance + 1e-12
    beyond = (found.high * 1.0001, found.high * 2.0)
    assert outlook(r, c, timer, 9.0, beyond).chance == pytest.approx(0.0, abs=1e-9)
    # Parts of the band add up to the whole.
    cut = found.nominal * middle
    below = outlook(r, c, timer, 9.0, (0.0, cut)).chance
    above = outlook(r, c, timer, 9.0, (cut, 1e12)).chance
    if r_minus or c_minus or c_plus or chip > 1e-3:
        assert below + above == pytest.approx(1.0, abs=1e-9)


def test_scores_are_vectorised_and_agree_with_the_outlook():
    timer = timer_named("NE555")
    found = outlook(R, C, timer, 9.0, EVERYTHING)
    drive = typical(timer, 9.0)
    values = np.array([R.value, 2.0 * R.value])
    steep = sensitivity(values, C.value, C.leak_typical, drive)
    spread = spread_of(steep, R.spread, C.spread, timer.timing_error_limit)
    mean = mean_of(interval(values, C.value, C.leak_typical, drive), steep, R.shift, C.shift)
    assert spread.shape == mean.shape == (2,)
    assert spread[0] == pytest.approx(found.spread, rel=1e-14)
    assert mean[0] == pytest.approx(found.mean, rel=1e-14)


def test_spread_and_mean_against_monte_carlo():
    timer = timer_named("bipolar")
    r, c = slot(220e3, 0.01, 0.01), slot(10e-6, 0.1, 0.3, 1e-9, 1e-8)
    found = outlook(r, c, timer, 9.0, EVERYTHING)
    rng = np.random.default_rng(77)
    times = interval(
        rng.uniform(r.low, r.high, 400_000),
        rng.uniform(c.low, c.high, 400_000),
        c.leak_typical,
        typical(timer, 9.0),
    ) * (1.0 + rng.standard_normal(400_000) * timer.timing_error_limit / 3.0)
    assert found.mean == pytest.approx(float(times.mean()), rel=1e-3)
    assert found.spread == pytest.approx(float(times.std()) / found.nominal, rel=1e-2)


def test_likely_miss():
    # 3-4-5 and 5-12-13 triangles.
    np.testing.assert_allclose(
        likely_miss([0.03, -0.05, 0.0], [0.04, 0.12, 0.1]), [0.05, 0.13, 0.1]
    )
    assert float(likely_miss(0.0, 0.0)) == 0.0


def test_losses_make_the_interval_steeper_in_r():
    # At a stretch of a tenth, one percent of R is more than one percent of the interval.
    drive = Drive(5.0, 2.0 / 3.0, 250e-9)
    assert 1.05 < float(sensitivity(989e3, 1e-6, 0.0, drive)) < 1.2
