"""Oscillator and counter: two inverters step by step, and what the pins make of the period."""

from dataclasses import replace
from math import inf, log

import pytest
from hypothesis import given
from hypothesis import strategies as st
from turning import Turn, follow

from chooser.circuits.counter import counter
from chooser.circuits.counters import check_ratio, counter_named, counter_names
from chooser.errors import BadRequestError, UnknownNameError

LN3 = log(3.0)
FREE = replace(counter_named("HEF4060B"), period_factor=2.0 * LN3)
"""A 4060 that is what the theory says: no published constant comes between."""


def by_integration(supply, parts, cycles=3):
    """Follow the node that Rt, Ct and the input's large resistor share, through both inverters.

    Both switch at half the supply. The far side of Ct hangs on the second output, so the node
    is kicked by the supply at each turn; Rt pulls it the other way; a leak lies across Ct.
    """
    r, c, g = parts

    def pulled(source, far):
        return lambda v: ((source - v) / r - g * (v - far)) / c

    fall = Turn(pulled(0.0, supply), supply / 2.0, -supply)
    rise = Turn(pulled(supply, 0.0), supply / 2.0, supply)
    return follow([fall, rise] * cycles, 1.5 * supply, 100.0 * r * c)


@pytest.mark.parametrize("supply", [5.0, 12.0])
@pytest.mark.parametrize("share", [0.0, 0.01, 0.1, 0.5, 0.9])
def test_the_theory_of_two_inverters(supply, share):
    law = counter(FREE, supply).law
    r, c = 470e3, 1e-7
    run = by_integration(supply, (r, c, share / r))
    assert run == pytest.approx([run[0]] * 6, rel=1e-7)
    assert float(law.interval(r, c, share / r)) == pytest.approx(run[0] + run[1], rel=1e-7)
    if not share:
        # Worked out: 2 ln 3 at half the supply.
        assert run[0] + run[1] == pytest.approx(2.197225 * r * c, rel=1e-6)


@pytest.mark.parametrize("margin", [0.98, 1.02])
def test_a_leak_that_stops_it(margin):
    # Worked out: Rt and the leak meet at half the supply where Rt G = 1.
    law, r, c = counter(FREE, 5.0).law, 1e5, 1e-6
    g = margin / r
    endless = margin > 1.0
    assert (by_integration(5.0, (r, c, g))[0] == inf) is endless
    assert bool(law.interval(r, c, g) == inf) is endless
    assert (r >= float(law.endless_from(g))) is endless
    assert (law.trip_ratio(r, g) <= 1.0) is endless
    assert float(law.leak_bound(g, 1.0)) == pytest.approx(float(law.endless_from(g)))


@pytest.mark.parametrize("name", counter_names())
def test_the_published_constant_scales_the_theory(name):
    chip = counter_named(name)
    law = counter(chip, 5.0).law
    assert float(law.interval(1e5, 1e-7, 0.0)) == pytest.approx(chip.period_factor * 1e-2)
    for share in (0.01, 0.1):
        run = by_integration(5.0, (1e5, 1e-7, share / 1e5), 1)
        found = float(law.interval(1e5, 1e-7, share / 1e5))
        assert found == pytest.approx(sum(run) * chip.period_factor / (2.0 * LN3), rel=1e-7)


@pytest.mark.parametrize("name", counter_names())
def test_after_a_reset_an_output_rises_at_half_its_period(name):
    """Count the oscillator's periods through a ripple of toggling stages."""
    chip = counter_named(name)
    usable = tuple(output for output in chip.outputs if output.stages <= 10)
    rises = [variant.scale for variant in counter(chip, 5.0, usable).variants]
    periods = [variant.scale for variant in counter(chip, 5.0, usable, whole_period=True).variants]
    for output, rise, period in zip(usable, rises, periods, strict=True):
        levels = [count >> (output.stages - 1) & 1 for count in range(2**output.stages + 1)]
        assert levels.index(1) == rise
        assert len(levels) - 1 == period
        assert levels[-1] == 0


def test_the_longest_of_a_4060():
    # Worked out: 8192 periods to the first rise of Q14, 16384 for all of it.
    chip = counter_named("HEF4060B")
    last = check_ratio(chip, 16384)
    for whole, scale in ((False, 8192.0), (True, 16384.0)):
        circuit = counter(chip, 5.0, (last,), whole_period=whole)
        assert [variant.scale for variant in circuit.variants] == [scale]
    assert len(counter(chip, 5.0).variants) == len(chip.outputs)
    assert [tap.scale for tap in counter(chip, 5.0, (last,)).taps] == [
        8.0, 16.0, 32.0, 64.0, 128.0, 256.0, 512.0, 2048.0, 4096.0, 8192.0,
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("ratio", "said"),
    [
        # 74HC4060 Rev. 03 section 1, MC14060B p. 1: no Q11, and nothing below Q4.
        (2048, r"next are 1024 \(Q10\) and 4096 \(Q12\)"),
        (8, r"next is 16 \(Q4\)"),
        (32768, r"next is 16384 \(Q14\)"),
        (1000, r"next are 512 \(Q9\) and 1024 \(Q10\)"),
    ],
)
def test_a_division_without_a_pin_is_refused(ratio, said):
    with pytest.raises(BadRequestError, match=f"division by {ratio} has no pin.*{said}"):
        check_ratio(counter_named("MC14060B"), ratio)


@pytest.mark.parametrize("typed", ["4060", "4541"])
def test_a_bare_number_whose_makers_differ_is_refused(typed):
    with pytest.raises(UnknownNameError, match="alone says too little, its makers differ"):
        counter_named(typed)


@pytest.mark.parametrize(
    ("name", "supply"), [("74HC4060", 9.0), ("HEF4060B", 2.0), ("HEF4060B", 18.0)]
)
def test_a_supply_outside_the_chips_range_is_refused(name, supply):
    with pytest.raises(BadRequestError, match=rf"{name} does not work at {supply:g} V"):
        counter(counter_named(name), supply)


@pytest.mark.parametrize("name", counter_names())
def test_the_circuit_has_the_limits_of_its_sheet(name):
    chip = counter_named(name)
    circuit = counter(chip, 5.0)
    assert (circuit.bounds.least, circuit.bounds.most) == (
        chip.smallest_resistor,
        chip.largest_resistor,
    )
    assert (circuit.error.minus, circuit.error.plus) == (chip.rule_minus, chip.rule_plus)
    assert circuit.alternating
    # With the least resistor and capacitor the rule still holds.
    quickest = float(circuit.law.interval(circuit.bounds.least, circuit.least_farad, 0.0))
    assert circuit.least_farad >= chip.smallest_capacitor
    assert 1.0 / quickest <= chip.highest_frequency * (1.0 + 1e-12)


@given(st.floats(4.0, 6.5), st.floats(-10, -5), st.floats(-12, -6))
def test_resistance_is_the_inverse(r, c, g):
    law = counter(counter_named("74HC4060"), 5.0).law
    r, c, g = 10.0**r, 10.0**c, 10.0**g
    period = float(law.interval(r, c, g))
    assert (period == inf) is (r >= float(law.endless_from(g)))
    if r < 0.999 * float(law.endless_from(g)):
        assert float(law.resistance(period, c, g)) == pytest.approx(r, rel=1e-9)
        assert float(law.interval(r, 2.0 * c, g)) == pytest.approx(2.0 * period)
        assert float(law.interval(1.01 * r, c, g)) > period
