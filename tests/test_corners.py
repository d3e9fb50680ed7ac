"""The corners of an oscillator: every combination of ends, and nothing beyond them."""

from itertools import product
from math import inf, log

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sample_slots import slot

from chooser.circuits.astable import OUTPUTS, astable
from chooser.circuits.timers import timer_named
from chooser.interval import outlook


def outputs_by_the_formula(rs, c, g, *, supply, trips, input_current, switch_leak, switch):
    """Worked out anew with plain numbers: Kirchhoff's laws for the two ways of the switch."""
    ra, rb = rs
    upper, lower = (trip * supply for trip in trips)
    whole = ra + rb
    top = (supply - ra * switch_leak - whole * input_current) / (1.0 + whole * g)
    high = inf
    if top > upper:
        high = whole / (1.0 + whole * g) * c * log((top - lower) / (top - upper))
    held = supply * switch / (ra + switch)
    path = rb + ra * switch / (ra + switch)
    bottom = (held - path * input_current) / (1.0 + path * g)
    low = inf
    if bottom < lower:
        low = path / (1.0 + path * g) * c * log((upper - bottom) / (lower - bottom))
    return high, low


RA, RB = slot(47e3, 0.01, 0.01), slot(120e3, 0.05, 0.05)


def astable_corners(timer, rs, c, supply, error):
    """All combinations of what may be, the middles too: highs, lows and the timer's factor."""
    ideal = timer.ideal
    for ra, rb, farad, g, current, leak, switch, factor in product(
        *((each.low, each.value, each.high) for each in rs),
        (c.low, c.value, c.high),
        (0.0,) if ideal else (0.0, c.leak_typical, c.leak_limit),
        {0.0, timer.threshold_current_limit},
        {0.0, timer.discharge_leakage_limit},
        (0.0, timer.discharge_resistance_typical, timer.discharge_resistance_limit),
        (1.0 - error, 1.0, 1.0 + error),
    ):
        high, low = outputs_by_the_formula(
            (ra, rb),
            farad,
            g,
            supply=supply,
            trips=(timer.threshold, timer.trigger),
            input_current=current,
            switch_leak=leak,
            switch=switch,
        )
        yield high * factor, low * factor


@pytest.mark.parametrize("name", ["NE555", "LMC555", "ICM7555", "ideal"])
@pytest.mark.parametrize("supply", [5.0, 12.0])
@pytest.mark.parametrize("rs", [(RA, RB), (slot(1e3, 0.05, 0.05), RB), (RB, slot(2e3, 0.1, 0.1))])
@pytest.mark.parametrize(
    "c",
    [slot(1e-6, 0.1, 0.1, 1e-10, 1e-9), slot(22e-6, 0.2, 0.5, 22e-6 / 3000.0, 22e-6 / 100.0)],
    ids=["film", "electrolytic"],
)
def test_corners_of_the_astable_against_every_corner(name, supply, rs, c):
    timer = timer_named(name)
    corners = list(astable_corners(timer, rs, c, supply, timer.astable_error_limit))
    found = outlook(astable(timer, supply), rs, c, {"period": (0.0, 1e12)})
    made = {
        "high": [high for high, _ in corners],
        "low": [low for _, low in corners],
        "period": [high + low for high, low in corners],
        "frequency": [1.0 / (high + low) for high, low in corners],
        "duty": [high / (high + low) if high < inf else 1.0 for high, low in corners],
    }
    assert [reading.output for reading in found.readings] == list(OUTPUTS)
    for output, values in made.items():
        reading = found.of(output)
        assert reading.low == pytest.approx(min(values), rel=1e-12), output
        most = max(values)
        assert reading.high == (None if most == inf else pytest.approx(most, rel=1e-12)), output
        assert reading.low <= reading.nominal <= (reading.high or inf)


@settings(max_examples=40)
@given(
    st.sampled_from(("NE555", "ICM7555")),
    st.tuples(*[st.floats(3.1, 6.2).map(lambda x: 10.0**x)] * 2),
    st.floats(0.0, 1.0),
    st.randoms(use_true_random=False),
)
def test_nothing_that_may_happen_lies_outside(name, ohms, leaky, rnd):
    """Anything between the ends of parts, leaks and currents, at random."""
    timer = timer_named(name)
    rs = tuple(slot(ohm, 0.05, 0.05) for ohm in ohms)
    # Up to the greatest leak at which every corner still ends.
    limit = leaky * 0.4 / (1.05 * sum(ohms))
    c = slot(1e-6, 0.2, 0.2, limit / 5.0, limit)
    found = outlook(astable(timer, 9.0), rs, c, {"period": (0.0, 1e12)})
    for _ in range(20):
        switch = rnd.random() * timer.discharge_resistance_limit
        high, low = outputs_by_the_formula(
            [rnd.uniform(each.low, each.high) for each in rs],
            rnd.uniform(c.low, c.high),
            rnd.uniform(0.0, limit),
            supply=9.0,
            trips=(timer.threshold, timer.trigger),
            input_current=rnd.random() * timer.threshold_current_limit,
            switch_leak=rnd.random() * timer.discharge_leakage_limit,
            switch=switch,
        )
        made = {"high": high, "low": low, "period": high + low, "duty": high / (high + low)}
        for output, value in made.items():
            reading = found.of(output)
            assert value >= reading.low * (1.0 - 1e-12), output
            assert reading.high is None or value <= reading.high * (1.0 + 1e-12), output


def test_a_leak_that_first_shortens_the_period():
    """With low trip points a leak helps the low time more than it slows the high one.

    Only near the leak that never lets the high time end does it turn, so the least period is
    neither without a leak nor with the most of it.
    """
    timer = timer_named("cmos")
    circuit = astable(timer, 9.0, 2.0)
    rs = slot(100e3, 0.01, 0.01), slot(1e6, 0.01, 0.01)
    c = slot(470e-6, 0.2, 0.2, 470e-6 / 3000.0, 470e-6 / 100.0)
    found = outlook(circuit, rs, c, {}).of("period")
    assert found.high is None
    for share in np.linspace(0.0, 1.0, 101):
        times = outputs_by_the_formula(
            [each.low for each in rs],
            c.low,
            float(share) * c.leak_limit,
            supply=9.0,
            trips=(2.0 / 9.0, 1.0 / 9.0),
            input_current=0.0,
            switch_leak=0.0,
            switch=0.0,
        )
        # The last percent is left to whoever looks between the ends.
        least = sum(times) * (1.0 - timer.astable_error_limit)
        assert found.low <= least * 1.01
