"""Logic one-shots: K by type, edition and supply, and a node that charges to 1 - exp(-K)."""

from math import exp, inf

import pytest
from hypothesis import given
from hypothesis import strategies as st
from turning import Turn, follow

from chooser.circuits.logic_monostable import logic_monostable
from chooser.circuits.one_shots import factor, one_shot_named, one_shot_names
from chooser.circuits.schmitt import MEASURED
from chooser.errors import BadRequestError, UnknownNameError
from chooser.parts import Tolerance

EVERY = [name for name in one_shot_names() if one_shot_named(name).supply_min <= 5.0]


@pytest.mark.parametrize("name", EVERY)
@pytest.mark.parametrize("share", [0.0, 0.02, 0.1])
def test_as_a_node_that_charges_through_r(name, share):
    chip = one_shot_named(name)
    law = logic_monostable(chip, 5.0).law
    k, r, c = factor(chip, 5.0), 22e3, 1e-7
    g = share / r
    turn = Turn(lambda v: ((5.0 - v) / (r + chip.extra_ohm) - g * v) / c, 5.0 * (1.0 - exp(-k)))
    (time,) = follow([turn], 0.0, 100.0 * r * c)
    assert float(law.interval(r, c, g)) == pytest.approx(time, rel=1e-7)
    if not share:
        assert time == pytest.approx(k * (r + chip.extra_ohm) * c, rel=1e-7)


@pytest.mark.parametrize("margin", [0.98, 1.02])
def test_a_leak_that_it_cannot_charge_against(margin):
    # Worked out: K = 1 trips at 1 - 1/e; the leak holds the node below it from R G = 1/(e - 1) on.
    law, r, c = logic_monostable(one_shot_named("CD4538B"), 5.0).law, 1e5, 1e-6
    g = margin / (exp(1.0) - 1.0) / r
    turn = Turn(lambda v: ((5.0 - v) / r - g * v) / c, 5.0 * (1.0 - exp(-1.0)))
    endless = margin > 1.0
    assert (follow([turn], 0.0, 100.0 * r * c) == [inf]) is endless
    assert bool(law.interval(r, c, g) == inf) is endless
    assert (r >= float(law.endless_from(g))) is endless
    assert (law.trip_ratio(r, g) <= 1.0) is endless
    assert float(law.leak_bound(g, 1.0)) == pytest.approx(float(law.endless_from(g)))


@pytest.mark.parametrize(
    ("name", "supply", "k"),
    [
        ("74HC123-1998", 5.0, 0.55),  # 74HC/HCT123 (8 Jul 1998) p. 9 note 1
        ("74HC123-1998", 2.0, 0.48),
        ("74HC123-2015", 5.0, 0.45),  # 74HC_HCT123 Rev. 9 (19 Jan 2015) p. 10 note 2
        ("74HC123-2015", 2.0, 0.55),
        ("74HC4538", 5.0, 0.7),  # 74HC_HCT4538 Rev. 3, section 1
        ("CD4538B", 5.0, 1.0),  # DS006000 p. 1
        ("HEF4538B", 10.0, 1.0),
        ("HEF4047B", 10.0, 2.4849066),  # HEF4047B p. 11: ln 12
        ("74HC423A", 5.0, 1.0),
        ("CD4098B", 5.0, 0.5),  # from memory
    ],
)
def test_the_same_parts_in_another_chip(name, supply, k):
    circuit = logic_monostable(one_shot_named(name), supply)
    assert float(circuit.law.interval(1e5, 1e-6, 0.0)) == pytest.approx(0.1 * k, rel=1e-7)


def test_the_older_rules_with_their_fixed_resistance():
    # From memory: 0.28 R C (1 + 0.7k / R); a textbook's example 7-12: 0.32 of the same form.
    for name, k in (("74123", 0.28), ("74LS122", 0.32)):
        law = logic_monostable(one_shot_named(name), 5.0).law
        assert float(law.interval(10e3, 1e-8, 0.0)) == pytest.approx(k * 1e-4 * 1.07, rel=1e-9)
        # Worked out: 700 ohm alone make K C 700.
        assert float(law.resistance(k * 1e-8 * 700.0, 1e-8, 0.0)) == pytest.approx(0.0, abs=1e-6)
        assert float(law.resistance(k * 1e-8 * 500.0, 1e-8, 0.0)) == pytest.approx(-200.0)


@pytest.mark.parametrize("typed", ["74HC123", "4538", "74LS123"])
def test_a_bare_number_whose_makers_differ_is_refused(typed):
    with pytest.raises(UnknownNameError, match="alone says too little, its makers differ"):
        logic_monostable(one_shot_named(typed), 5.0)


@pytest.mark.parametrize(
    ("name", "supply"), [("74121", 9.0), ("74HC123-2015", 12.0), ("CD4538B", 2.0), ("4047", 18.0)]
)
def test_a_supply_outside_the_chips_range_is_refused(name, supply):
    with pytest.raises(BadRequestError, match=f"does not work at {supply:g} V"):
        logic_monostable(one_shot_named(name), supply)


def test_a_factor_that_was_measured_replaces_the_rule():
    chip = one_shot_named("HEF4538B")
    for accuracy, error in ((None, MEASURED), (Tolerance(0.01, 0.0), Tolerance(0.01, 0.0))):
        circuit = logic_monostable(chip, 5.0, 1.08, accuracy)
        assert circuit.error == error
        assert float(circuit.law.interval(1e5, 1e-6, 0.0)) == pytest.approx(0.108)


@pytest.mark.parametrize("name", EVERY)
def test_the_circuit_has_the_limits_of_its_sheet(name):
    chip = one_shot_named(name)
    circuit = logic_monostable(chip, 5.0)
    assert (circuit.bounds.least, circuit.bounds.most) == (
        chip.smallest_resistor,
        chip.largest_resistor,
    )
    assert (circuit.least_farad, circuit.most_farad) == (
        chip.smallest_capacitor,
        chip.largest_capacitor,
    )
    assert (circuit.error.minus, circuit.error.plus) == (chip.factor_minus, chip.factor_plus)
    assert circuit.alternating is (name == "HEF4047B")
    assert (circuit.slots, circuit.outputs) == (("R", "C"), ("interval",))


@given(st.sampled_from(EVERY), st.floats(3.3, 6.5), st.floats(-10, -3), st.floats(-12, -7))
def test_resistance_is_the_inverse(name, r, c, g):
    law = logic_monostable(one_shot_named(name), 5.0).law
    r, c, g = 10.0**r, 10.0**c, 10.0**g
    time = float(law.interval(r, c, g))
    assert (time == inf) is (r >= float(law.endless_from(g)))
    if r < 0.999 * float(law.endless_from(g)):
        assert float(law.resistance(time, c, g)) == pytest.approx(r, rel=1e-9)
        assert float(law.interval(r, 2.0 * c, g)) == pytest.approx(2.0 * time)
