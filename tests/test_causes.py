"""Shares of the spread: their sum, the parts measured away one by one, and Monte Carlo."""

from __future__ import annotations

from dataclasses import replace
from math import hypot, log, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chooser.causes import causes_of, kind_in
from chooser.circuits.astable import astable
from chooser.circuits.gates import gate_named, thresholds
from chooser.circuits.monostable import monostable
from chooser.circuits.schmitt import schmitt
from chooser.circuits.timers import timer_named
from chooser.interval import outlook
from chooser.networks import Group, Join, Leaf, adding_join, members, value_of
from chooser.networks import replace as changed
from chooser.parts import Count, Holding, Kind, Part, Tolerance
from chooser.slot_facts import slot_facts

IDEAL, BIPOLAR = timer_named("ideal"), timer_named("bipolar")


def held(number, kind, value, percent, **traits):
    tolerance = Tolerance(percent / 100.0, percent / 100.0)
    return Holding(number, Part(kind, value, tolerance=tolerance, **traits), "A1", Count(9))


def resistor(number, value, percent):
    return held(number, Kind.RESISTOR, value, percent)


def film(number, value, percent):
    return held(number, Kind.CAPACITOR, value, percent, technology="polypropylene", voltage=63.0)


def series(*parts):
    return Group(Join.SERIES, tuple(map(Leaf, parts)))


def reading_of(circuit, networks):
    facts = {
        slot: slot_facts(networks[slot], kind_in(slot), circuit.supply, lossless=circuit.lossless)
        for slot in circuit.slots
    }
    rs = [facts[slot] for slot in circuit.resistors]
    return outlook(circuit, rs, facts["C"], {}).chief


def causes(circuit, networks):
    return causes_of(circuit, networks, reading_of(circuit, networks))


def test_the_capacitor_is_the_whole_problem():
    # Worked out: squares of 20 % and 1 % share as 400 to 1; both uniform, sigma = t / root 3.
    found = causes(
        monostable(IDEAL, 9.0), {"R": Leaf(resistor(1, 820e3, 1)), "C": Leaf(film(2, 1e-4, 20))}
    )
    assert [cause.slot for cause in found] == ["C", "R"]
    assert [cause.share for cause in found] == pytest.approx([400 / 401, 1 / 401], rel=1e-6)
    without = [cause.spread_without for cause in found]
    assert without == pytest.approx([0.01 / sqrt(3), 0.20 / sqrt(3)], rel=1e-6)


def test_parts_of_one_slot_err_together_and_share_by_what_they_add():
    # Worked out: 1 k of 5 % beside 9 k of 1 % adds 0.5 % to their 0.9 %; both make 1.4 %.
    networks = {
        "R": series(resistor(1, 1e3, 5), resistor(2, 9e3, 1)),
        "C": Leaf(film(3, 1e-6, 2)),
    }
    found = {cause.holding.id: cause for cause in causes(monostable(IDEAL, 9.0), networks)}
    whole = 1.4**2 + 2.0**2
    assert found[1].share == pytest.approx(1.4 * 0.5 / whole, rel=1e-6)
    assert found[2].share == pytest.approx(1.4 * 0.9 / whole, rel=1e-6)
    assert found[2].spread_without == pytest.approx(hypot(0.005, 0.02) / sqrt(3), rel=1e-6)


def test_a_holding_that_is_taken_twice_is_one_cause():
    tenk = resistor(1, 10e3, 1)
    networks = {"R": series(tenk, tenk), "C": Leaf(film(2, 1e-6, 1))}
    found = causes(monostable(IDEAL, 9.0), networks)
    assert [(cause.holding.id, cause.count) for cause in found] == [(1, 2), (2, 1)]
    assert found[0].share == pytest.approx(0.5, rel=1e-6)


def test_the_device_is_a_cause_of_its_own():
    # NE555 data sheet: 3 % at most, a third of it one sigma.
    networks = {"R": Leaf(resistor(1, 10e3, 0)), "C": Leaf(film(2, 1e-6, 0))}
    device, *parts = causes(monostable(BIPOLAR, 9.0), networks)
    assert (device.slot, device.holding, device.spread_without) == ("", None, 0.0)
    assert device.share == pytest.approx(1.0)
    assert [part.share for part in parts] == [0.0, 0.0]


def test_where_nothing_scatters_there_is_no_cause():
    networks = {"R": Leaf(resistor(1, 10e3, 0)), "C": Leaf(film(2, 1e-6, 0))}
    assert causes(monostable(IDEAL, 9.0), networks) == ()


def test_an_interval_that_never_ends_has_no_spread_to_share():
    leaky = replace(film(2, 1e-4, 5).part, leakage=1e-3)
    networks = {"R": Leaf(resistor(1, 1e6, 1)), "C": Leaf(Holding(2, leaky, "A1", Count(1)))}
    assert causes(monostable(BIPOLAR, 9.0), networks) == ()


@st.composite
def slots(draw, kind):
    """Draw a network of one to three parts."""
    part = resistor if kind is Kind.RESISTOR else film
    values = st.floats(1e3, 1e6) if kind is Kind.RESISTOR else st.floats(1e-8, 1e-5)
    number = draw(st.integers(1, 3))
    leaves = [
        Leaf(part(place, draw(values), draw(st.floats(0.1, 20.0)))) for place in range(number)
    ]
    if number == 1:
        return leaves[0]
    joins = draw(st.permutations(list(Join)))
    if number == 2:
        return Group(joins[0], tuple(leaves))
    return Group(joins[0], (leaves[0], Group(joins[1], tuple(leaves[1:]))))


@settings(max_examples=60, deadline=None)
@given(slots(Kind.RESISTOR), slots(Kind.RESISTOR), slots(Kind.CAPACITOR), st.booleans())
def test_shares_sum_to_the_whole_and_stand_in_order(one, two, c, twin):
    circuit = (astable if twin else monostable)(BIPOLAR, 9.0)
    networks = dict(zip(circuit.slots, (one, two, c) if twin else (one, c), strict=True))
    found = causes(circuit, networks)
    shares = [cause.share for cause in found]
    assert sum(shares) == pytest.approx(1.0, abs=1e-12)
    assert shares == sorted(shares, reverse=True)
    assert all(share >= 0.0 for share in shares)
    assert len(found) == 1 + sum(1 for network in networks.values() for _ in members(network))


@settings(max_examples=40, deadline=None)
@given(slots(Kind.RESISTOR), slots(Kind.CAPACITOR), st.data())
def test_what_measuring_a_part_buys_is_what_the_measured_circuit_has(r, c, data):
    circuit, networks = monostable(BIPOLAR, 9.0), {"R": r, "C": c}
    cause = data.draw(st.sampled_from([each for each in causes(circuit, networks) if each.slot]))
    exact = replace(cause.holding, part=replace(cause.holding.part, tolerance=Tolerance(0.0, 0.0)))
    networks[cause.slot] = changed(
        networks[cause.slot], lambda each: exact if each.id == cause.holding.id else each
    )
    assert cause.spread_without == pytest.approx(reading_of(circuit, networks).spread, rel=1e-9)


def test_shares_of_slots_and_device_against_monte_carlo():
    circuit = astable(BIPOLAR, 9.0)
    networks = {
        "RA": series(resistor(1, 47e3, 5), resistor(2, 10e3, 1)),
        "RB": Leaf(resistor(3, 33e3, 5)),
        "C": Group(Join.PARALLEL, (Leaf(film(4, 1e-6, 2)), Leaf(film(5, 470e-9, 5)))),
    }
    rng, runs = np.random.default_rng(20_260_812), 200_000

    def values(slot, moved):
        network, error = networks[slot], rng.uniform(-1.0, 1.0, runs) if moved else np.zeros(runs)
        return value_of(
            network,
            adding_join(kind_in(slot)),
            lambda each: each.part.value * (1.0 + error * each.part.tolerance.plus),
        )

    def variance(moved, device=0.0):
        parts = {slot: values(slot, slot in moved) for slot in circuit.slots}
        high, low = circuit.typical.times([parts["RA"], parts["RB"]], parts["C"], 0.0)
        return float(np.var((high + low) * (1.0 + device * rng.standard_normal(runs))))

    found = causes(circuit, networks)
    whole = variance(circuit.slots, circuit.error.plus / 3.0)
    for slot in circuit.slots:
        share = sum(cause.share for cause in found if cause.slot == slot)
        assert share == pytest.approx(variance({slot}) / whole, rel=0.03)
    device = next(cause.share for cause in found if not cause.slot)
    assert device == pytest.approx(variance((), circuit.error.plus / 3.0) / whole, rel=0.03)


@pytest.mark.parametrize("supply", [5.0, 10.0])
def test_thresholds_that_scatter_are_the_devices_share(supply):
    """The whole variance with exact parts over that with all, drawn from the table's limits."""
    gate = gate_named("CD40106")
    circuit, points = schmitt(gate, supply), thresholds(gate, supply)
    networks = {"R": Leaf(resistor(1, 100e3, 1)), "C": Leaf(film(2, 1e-7, 20))}
    rng, runs = np.random.default_rng(20_260_901), 400_000

    def drawn(usual, low, high):
        z = np.clip(rng.standard_normal(runs), -3.0, 3.0)
        return usual + z / 3.0 * np.where(z < 0.0, usual - low, high - usual)

    upper = drawn(points.upper, points.upper_low, points.upper_high)
    lower = drawn(points.lower, points.lower_low, points.lower_high)
    sold = upper - lower >= points.hysteresis_low
    upper, lower = upper[sold], lower[sold]
    factor = np.log((1.0 - lower) / (1.0 - upper) * upper / lower)
    usual = log((1.0 - points.lower) / (1.0 - points.upper) * points.upper / points.lower)
    device = float(factor.std()) / usual
    (first, *_) = found = causes(circuit, networks)
    parts = (0.01**2 + 0.2**2) / 3.0
    assert (first.slot, first.holding) == ("", None)
    assert first.share == pytest.approx(device**2 / (device**2 + parts), rel=0.03)
    assert first.spread_without == pytest.approx(sqrt(parts), rel=0.02)
    assert sum(cause.share for cause in found) == pytest.approx(1.0, abs=1e-9)
    assert reading_of(circuit, networks).mean == pytest.approx(
        float(factor.mean()) / usual * reading_of(circuit, networks).nominal, rel=0.02
    )
