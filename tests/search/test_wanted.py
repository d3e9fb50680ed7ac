"""The resistances that a capacitor wants make the targets exactly, and none is named in vain."""

from __future__ import annotations

import random

import numpy as np
import pytest

from chooser.circuits.astable import astable
from chooser.circuits.circuit import charging_resistance, outputs_of
from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.circuits.diodes import diode_named
from chooser.circuits.monostable import monostable
from chooser.circuits.output_fed import output_fed
from chooser.circuits.plain import capacitance, resistance
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.search.request import Request, Target
from chooser.search.slots import charging_bounds
from chooser.search.terms import Rule
from chooser.search.wanted import aim_of, wanted_resistances

SILICON = diode_named("silicon")
PAIRS = {
    "ideal": astable(timer_named("ideal"), 9.0),
    "bipolar": astable(timer_named("bipolar"), 9.0),
    "held": astable(timer_named("cmos"), 9.0, 4.0),
    "steered ideal": steered(timer_named("ideal"), 9.0, diode_named("ideal")),
    "steered": steered(timer_named("bipolar"), 12.0, SILICON),
    "steered both": steered(timer_named("cmos"), 12.0, SILICON, both=True),
}
SINGLES = (
    monostable(timer_named("bipolar"), 9.0),
    output_fed(timer_named("TLC555"), 9.0),
    counter(counter_named("HEF4060B"), 9.0),
)


def only(output, value):
    return Target(output, value, value)


def one(farad, leak=0.0):
    return np.array([farad]), np.array([leak])


@pytest.mark.parametrize("name", PAIRS)
def test_two_resistors_make_both_times(name):
    circuit, rnd, made = PAIRS[name], random.Random(name), 0
    for _ in range(40):
        low = 10 ** rnd.uniform(-4, 1)
        share = rnd.uniform(1.3, 3) if circuit.twin.through_both else rnd.uniform(0.2, 5)
        request = Request(circuit, (only("high", low * share), only("low", low)))
        farad = np.array([10 ** rnd.uniform(-9, -5) for _ in range(20)])
        leak = farad / 25.0 * rnd.choice((0.0, 1e-3, 1.0))
        ra, rb = wanted_resistances(request, farad, leak)
        least, most = charging_bounds(leak, request)
        good = (np.minimum(ra, rb) >= least) & (charging_resistance(circuit, (ra, rb)) <= most)
        good &= np.isfinite(ra)
        times = circuit.twin.times((ra[good], rb[good]), farad[good], leak[good])
        # Three rounds of a weak coupling; the search only needs to know which networks are near.
        np.testing.assert_allclose(times[0], low * share, rtol=2e-3)
        np.testing.assert_allclose(times[1], low, rtol=2e-3)
        made += int(good.sum())
    assert made > 50


@pytest.mark.parametrize("name", ["ideal", "steered ideal"])
def test_the_textbook_is_solved_exactly(name):
    """By hand, ln 2 each: 20 ms and 10 ms on 1 uF want 14.427k in RA + RB or in both."""
    circuit = PAIRS[name]
    tenth = 1e-2 / (1e-6 * np.log(2))
    request = Request(circuit, (only("high", 2e-2), only("low", 1e-2)))
    ra, rb = wanted_resistances(request, *one(1e-6))
    assert float(rb[0]) == pytest.approx(tenth, rel=1e-12)
    whole = 2 * tenth - (tenth if circuit.twin.through_both else 0)
    assert float(ra[0]) == pytest.approx(whole, rel=1e-12)


@pytest.mark.parametrize("circuit", SINGLES, ids=lambda circuit: circuit.family)
def test_one_resistor_makes_the_target_on_the_first_pin(circuit):
    rnd, made = random.Random(circuit.family), 0
    for _ in range(30):
        wanted = 10 ** rnd.uniform(-3, 2)
        farad = np.array([10 ** rnd.uniform(-9, -5) for _ in range(10)])
        request = Request(circuit, (only(circuit.outputs[0], wanted),))
        (r,) = wanted_resistances(request, farad, farad / 1e5)
        good = (r > 1.0) & (r < 1e7)
        times = circuit.typical.times((r[good],), farad[good], farad[good] / 1e5)
        times = [circuit.variants[0].scale * time for time in times]
        if len(times) > 1:
            times = [outputs_of(circuit, times)[circuit.outputs[0]]]
        np.testing.assert_allclose(times[0], wanted, rtol=1e-9)
        made += int(good.sum())
    assert made > 20


def test_plain_values_want_themselves_or_nothing():
    (r,) = wanted_resistances(Request(resistance(), (only("resistance", 4711.0),)), 1.0, 0.0)
    assert float(r) == 4711.0
    assert wanted_resistances(Request(capacitance(), (only("capacitance", 1e-7),)), 1e-7, 0) == ()


def test_what_cannot_be_is_infinite_or_below_the_least():
    """Beyond the losses, and where the high time asks for less than RB alone takes."""
    circuit = PAIRS["bipolar"]
    endless = Request(circuit, (only("high", 3600.0), only("low", 1.0)))
    ra, _ = wanted_resistances(endless, *one(1e-6))
    assert np.isinf(ra)
    lifted = Request(circuit, endless.targets, lifted=frozenset({Rule.RESISTOR_LIMITS}))
    assert np.isinf(wanted_resistances(lifted, *one(1e-6, 1e-3))[0])
    below = Request(circuit, (only("high", 1e-2), only("low", 2e-2)))
    assert wanted_resistances(below, *one(1e-6))[0] <= 0.0


@pytest.mark.parametrize(
    ("targets", "aim"),
    [
        ((only("high", 2.0), only("low", 1.0)), (2.0, 1.0)),
        ((only("low", 1.0), only("high", 2.0)), (2.0, 1.0)),
        ((only("period", 4.0), only("duty", 0.75)), (3.0, 1.0)),
        ((only("period", 4.0), Target("duty", 0.5, 0.75)), (2.5, 1.5)),
        # A plain astable has no duty below a half: the middle of what is left is meant.
        ((only("period", 4.0), Target("duty", 0.1, 0.75)), (2.5, 1.5)),
    ],
)
def test_what_two_targets_aim_at(targets, aim):
    assert aim_of(Request(PAIRS["ideal"], targets)) == pytest.approx(aim, rel=1e-12)


def test_a_steered_circuit_may_aim_below_a_half():
    request = Request(PAIRS["steered ideal"], (only("period", 4.0), Target("duty", 0.1, 0.3)))
    assert aim_of(request) == pytest.approx((0.8, 3.2), rel=1e-12)


@pytest.mark.parametrize(("name", "charging"), [("ideal", 3e4), ("steered", 1e4)])
def test_what_the_capacitor_charges_through(name, charging):
    assert charging_resistance(PAIRS[name], (np.array(1e4), np.array(2e4))) == charging
