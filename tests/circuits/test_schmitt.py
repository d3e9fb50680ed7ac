"""The Schmitt-inverter oscillator against the circuit step by step, and the measured factor."""

from dataclasses import replace
from itertools import pairwise, product
from math import exp, inf, log

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from sample_slots import slot
from turning import Turn, follow

from chooser.circuits.circuit import outputs_of
from chooser.circuits.gates import gate_named, gate_names, thresholds
from chooser.circuits.schmitt import MEASURED, schmitt
from chooser.errors import BadRequestError
from chooser.interval import outlook
from chooser.parts import Tolerance

SUPPLIES = {"74HC14": 4.5, "74HCT14": 5.0, "CD40106": 10.0, "CD4093": 10.0}


def by_integration(gate, supply, current, parts, pair=None):
    """Follow the node from power-up; the output reaches the rails through its own resistance."""
    r, c, g = parts
    points = thresholds(gate, supply)
    upper, lower = pair or (points.upper, points.lower)
    series = gate.output_resistance_typical

    def swung(source):
        return lambda v: ((source - v) / (r + series) - current - g * v) / c

    high, low = Turn(swung(supply), upper * supply), Turn(swung(0.0), lower * supply)
    return follow([high, low, high, low], 0.0, 100.0 * (r + series) * c)


@pytest.mark.parametrize("name", gate_names())
@pytest.mark.parametrize("share", [0.0, 0.02, 0.1])
def test_full_cycles_from_power_up(name, share):
    gate, supply = gate_named(name), SUPPLIES[name]
    circuit = schmitt(gate, supply)
    most = gate.input_current_limit
    for r in (10e3, 470e3):
        parts = (r, 1e-7, share / r)
        pairs = thresholds(gate, supply).extremes()
        corners = product(pairs, (0.0, most, -most), (0.0, gate.output_resistance_limit))
        laws = [((None, 0.0, gate.output_resistance_typical), circuit.typical)]
        laws += list(zip(corners, circuit.corners, strict=True))[::7]
        for (pair, current, ohm), law in laws:
            driver = replace(gate, output_resistance_typical=ohm)
            run = by_integration(driver, supply, current, parts, pair)
            high, low = (float(time) for time in law.times((r,), *parts[1:]))
            assert run[1:] == pytest.approx([low, high, low], rel=1e-7)
            if law is circuit.typical:
                first = float(circuit.first.times((r,), *parts[1:])[0])
                assert run[0] == pytest.approx(first, rel=1e-7)


def test_a_leak_that_keeps_the_node_near_half_the_supply():
    """A slow Schmitt circuit that stuck near half supply was put down to its capacitor's leak."""
    gate, r, c = gate_named("CD40106"), 470e3, 1e-4
    circuit = schmitt(gate, 10.0)
    # From memory: the upper threshold is 5.9 V, which is not reached from about R G = 4.1 / 5.9 on.
    for margin, endless in ((0.98, False), (1.02, True)):
        g = margin * 4.1 / 5.9 / (r + gate.output_resistance_typical)
        assert (by_integration(gate, 10.0, 0.0, (r, c, g))[0] == inf) is endless
        assert bool(circuit.law.interval(r, c, g) == inf) is endless
        assert (r >= float(circuit.law.endless_from(g))) is endless
        assert (circuit.law.trip_ratio(r, g) <= 1.0) is endless


@pytest.mark.parametrize("name", gate_names())
def test_without_losses_it_is_the_logarithm_of_the_thresholds(name):
    supply = SUPPLIES[name]
    points = thresholds(gate_named(name), supply)
    high, low = (float(t) for t in schmitt(gate_named(name), supply).typical.times((1e6,), 1e-6, 0))
    # The output's resistance beside 1M is below a thousandth.
    assert high == pytest.approx(log((1 - points.lower) / (1 - points.upper)), rel=1e-3)
    assert low == pytest.approx(log(points.upper / points.lower), rel=1e-3)


def of_corners(circuit, output):
    """An output at the device's corners, R so large that its output's resistance is nothing."""
    laws = [law for law in circuit.corners if law.phases[0].leak_current == 0.0]
    return [float(outputs_of(circuit, law.times((1e9,), 1e-9, 0.0))[output]) for law in laws]


@pytest.mark.parametrize("name", gate_names())
def test_the_limits_of_times_and_duty_are_those_of_the_thresholds(name):
    """Against every pair on a grid of what the limits and the least hysteresis allow."""
    gate = gate_named(name)
    for row in gate.thresholds:
        supply, points = row.supply, thresholds(gate, row.supply)
        upper, lower = np.meshgrid(
            np.linspace(points.upper_low, points.upper_high, 201),
            np.linspace(points.lower_low, points.lower_high, 201),
        )
        there = upper - lower >= points.hysteresis_low
        upper, lower = upper[there], lower[there]
        high, low = np.log((1.0 - lower) / (1.0 - upper)), np.log(upper / lower)
        circuit = schmitt(gate, supply)
        made = outputs_of(circuit, (high, low))
        for output in ("high", "low", "period", "duty"):
            found = of_corners(circuit, output)
            # The grid misses the slanted edge by a step at most.
            assert min(found) == pytest.approx(float(made[output].min()), rel=0.03), output
            assert min(found) <= made[output].min() * (1.0 + 1e-6), output
            assert max(found) == pytest.approx(float(made[output].max()), rel=0.01), output
            assert max(found) >= made[output].max() * (1.0 - 1e-6), output


def test_the_duty_of_a_cd40106_at_5_volt():
    """Worked out from the limits of the table: 2.2 V with 0.9 V, and 3.6 V with 2.8 V."""
    circuit = schmitt(gate_named("CD40106"), 5.0)
    duties = of_corners(circuit, "duty")
    least = log(4.1 / 2.8) / (log(4.1 / 2.8) + log(2.2 / 0.9))
    most = log(2.2 / 1.4) / (log(2.2 / 1.4) + log(3.6 / 2.8))
    assert (least, most) == pytest.approx((0.299, 0.643), abs=5e-4)
    assert (min(duties), max(duties)) == pytest.approx((least, most), rel=1e-5)
    found = outlook(circuit, (slot(1e5, 0.0, 0.0),), slot(1e-7, 0.0, 0.0), {}).of("duty")
    assert (found.low, found.high) == pytest.approx((0.299, 0.643), abs=0.005)
    assert 0.05 < found.spread < 0.15


def test_a_known_factor_leaves_the_duty_open():
    """Every pair of thresholds that stays possible has the factor, and its own duty."""
    gate = gate_named("CD40106")
    points, circuit = thresholds(gate, 5.0), schmitt(gate, 5.0, 0.83)
    assert len(circuit.scatter) > 10
    assert sum(weight for weight, _ in circuit.scatter) == pytest.approx(1.0)
    duties = []
    for _, law in circuit.scatter:
        high, low = (float(time) for time in law.times((1e9,), 1e-9, 0.0))
        assert high + low == pytest.approx(0.83, rel=1e-5)
        # u / (1 - u) over l / (1 - l) is exp K, and high and low tell both.
        lower = (1.0 - exp(-high)) / (exp(low) - exp(-high))
        upper = lower * exp(low)
        assert points.allow(upper * (1 - 1e-6), lower * (1 - 1e-6)) or points.allow(upper, lower)
        duties.append(high / (high + low))
    ends = of_corners(circuit, "duty")
    assert min(ends) <= min(duties) * (1 + 1e-6) < max(duties) <= max(ends) * (1 + 1e-6)
    assert 0.299 < min(ends) < 0.4
    assert 0.56 < max(ends) < 0.643
    assert max(of_corners(circuit, "period")) == pytest.approx(0.83, rel=1e-5)


def test_a_factor_that_no_pair_of_thresholds_has_is_believed_all_the_same():
    circuit = schmitt(gate_named("74HC14"), 5.0, 4.9)
    assert circuit.scatter == ()
    assert of_corners(circuit, "period") == pytest.approx([4.9] * 2, rel=1e-5)
    assert circuit.setting == "K = 4.9 +/-2%"


@pytest.mark.parametrize("factor", [0.5, 0.67, 0.8, 1.3])
def test_a_factor_that_was_measured_replaces_the_thresholds(factor):
    gate = gate_named("74HC14")
    for accuracy, expected in ((None, MEASURED), (Tolerance(0.01, 0.03), Tolerance(0.01, 0.03))):
        circuit = schmitt(gate, 5.0, factor, accuracy)
        assert circuit.error == expected
        assert circuit.setting == f"K = {factor} {'+/-2%' if accuracy is None else '-1/+3%'}"
        # Worked out: K R C; the output's 45 ohm beside 100k are 0.05 %.
        period = float(circuit.law.interval(1e5, 1e-6, 0.0))
        assert period == pytest.approx(0.1 * factor, rel=6e-4)
        assert float(circuit.law.resistance(period, 1e-6, 0.0)) == pytest.approx(1e5, rel=1e-9)
        plain = schmitt(gate, 5.0)
        duties = [
            float(times[0]) / float(times[0] + times[1])
            for times in (x.typical.times((1e5,), 1e-6, 0.0) for x in (circuit, plain))
        ]
        assert duties[0] == pytest.approx(duties[1])


@given(
    st.sampled_from(gate_names()), st.floats(3.0, 6.5), st.floats(-10, -4),
    st.one_of(st.just(0.0), st.floats(-12, -6)),
)  # fmt: skip
def test_resistance_is_the_inverse_of_the_period(name, r, c, g):
    law = schmitt(gate_named(name), SUPPLIES[name]).law
    r, c, g = 10.0**r, 10.0**c, 10.0**g if g else 0.0
    end, period = float(law.endless_from(g)), float(law.interval(r, c, g))
    assert (period == inf) is (r >= end)
    if r < 0.999 * end:
        assert float(law.resistance(period, c, g)) == pytest.approx(r, rel=1e-8)
        assert float(law.interval(r, 2.0 * c, g)) == pytest.approx(2.0 * period)
        assert float(law.interval(1.01 * r, c, g)) > period


@pytest.mark.parametrize(
    ("name", "supply"), [("74HC14", 9.0), ("74HC14", 1.5), ("74HCT14", 3.3), ("CD40106", 20.0)]
)
def test_a_supply_outside_the_chips_range_is_refused(name, supply):
    with pytest.raises(BadRequestError, match=rf"{name} does not work at {supply:g} V"):
        schmitt(gate_named(name), supply)


def test_the_period_over_the_supply_has_no_jumps():
    periods = [
        float(schmitt(gate_named("CD40106"), 3.0 + 0.1 * n).law.interval(1e5, 1e-7, 0.0))
        for n in range(151)
    ]
    assert all(abs(b / a - 1.0) < 0.02 for a, b in pairwise(periods))
