"""What a circuit needs beside its timing parts."""

from __future__ import annotations

import pytest
from supporting_bench import (
    capacitor,
    divider,
    electrolytic,
    fit_of,
    inverter,
    logic,
    one_shot,
    resistor,
    series,
    slow,
)

from chooser.circuits.astable import astable
from chooser.circuits.circuit import Circuit
from chooser.circuits.delay import delay
from chooser.circuits.diodes import diode_named
from chooser.circuits.output_fed import output_fed
from chooser.circuits.plain import resistance
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.parts import Kind, Tolerance
from chooser.supporting.led import Led
from chooser.supporting.needs import needs_of

TIMER = timer_named("NE555")
CHIP = ["supply bypass", "supply reservoir", "control bypass"]
FORCED = CHIP[:2]


def uses(circuit: Circuit, fit=None, **more):
    return [need.use for need in needs_of(circuit, fit or slow(circuit), **more)]


def need(use, circuit, fit=None, **more):
    (found,) = (each for each in needs_of(circuit, fit or slow(circuit), **more) if each.use == use)
    return found


@pytest.mark.parametrize(
    ("circuit", "expected"),
    [
        (one_shot(), [*CHIP, "trigger pull-up"]),
        (one_shot(control=5.0), [*FORCED, "trigger pull-up"]),
        (astable(TIMER, 9.0), CHIP),
        (astable(TIMER, 9.0, 5.0), FORCED),
        (steered(TIMER, 9.0, diode_named("silicon")), CHIP),
        (steered(TIMER, 9.0, diode_named("silicon"), control=5.0), FORCED),
        (output_fed(TIMER, 9.0), CHIP),
        (inverter(), ["supply bypass"]),
        (logic(), ["supply bypass"]),
        (
            divider(),
            ["supply bypass", "second resistor Rs", "reset capacitor", "reset resistor"],
        ),
        (delay(9.0, 0.5, Tolerance(0.0, 0.0)), []),
    ],
    ids=lambda value: getattr(value, "family", ""),
)
def test_every_circuit_gets_what_it_needs(circuit, expected):
    assert uses(circuit) == expected
    if expected:
        assert uses(circuit, led=Led(2.0, 1e-3)) == [*expected, "LED resistor"]


def test_a_plain_resistance_needs_nothing():
    assert needs_of(resistance(), slow()) == ()


def test_windows_hold_what_is_preferred_and_everything_has_its_reason():
    circuits = (one_shot(), divider(), inverter())
    for circuit in circuits:
        for each in needs_of(circuit, slow(circuit), Led(2.0, 1e-3), held=1e9):
            assert 0.0 < each.least <= each.preferred <= each.most
            assert each.why
            assert each.source


def test_capacitors_must_stand_the_supply_and_electrolytics_better_more():
    rated = {each.use: each for each in needs_of(one_shot(supply=12.0), slow())}
    for use in CHIP:
        assert rated[use].volt == 12.0
    assert rated["supply reservoir"].volt_preferred == 18.0
    assert rated["supply bypass"].volt_preferred == 12.0
    assert rated["trigger pull-up"].volt == 0.0


class TestTheTrigger:
    def quick(self, ohm, farad):
        return fit_of(one_shot(), resistor(1, ohm), capacitor(2, farad, technology="polyester"))

    def test_a_long_interval_outlasts_any_trigger(self):
        assert "trigger coupling" not in uses(one_shot())
        assert "trigger coupling" in uses(one_shot(), held=60.0)

    @pytest.mark.parametrize("ohm", [2e3, 10e3, 47e3, 1e6])
    def test_whatever_is_picked_its_time_constant_is_at_most_a_tenth(self, ohm):
        fit = self.quick(ohm, 1e-7)
        found = {each.use: each for each in needs_of(one_shot(), fit)}
        product = found["trigger pull-up"].most * found["trigger coupling"].most
        assert product <= 0.1 * fit.outlook.of("interval").low * (1 + 1e-12)
        assert found["trigger coupling"].least == 1e-9
        assert found["trigger pull-up"].least == 4.7e3
        assert "switch pull-up" in found

    def test_by_hand(self):
        # 22 ms and more: 22k x 100n is a tenth; about 2.2 ms: 10n.
        assert need("trigger coupling", one_shot(), self.quick(1e6, 1e-7)).most == 100e-9
        circuit = one_shot("ideal")
        exact = Tolerance(0.0, 0.0)
        fit = fit_of(
            circuit,
            resistor(1, 20e3, tolerance=exact),
            capacitor(2, 1e-7, technology="polyester", tolerance=exact),
        )
        # 20k x 100n x ln 3 = 2.1972 ms; a tenth of it over 22k is 9.99n.
        found = need("trigger coupling", circuit, fit)
        assert found.most == pytest.approx(9.987e-9, rel=1e-3)
        assert found.preferred == found.most

    def test_too_short_for_a_switch(self):
        # 1.1 x 1k x 10n = 11 us: not even 4k7 and 1n, 4.7 us, are a tenth of it.
        fit = self.quick(1e3, 10e-9)
        assert "trigger coupling" not in uses(one_shot(), fit)
        assert "by logic" in need("trigger pull-up", one_shot(), fit).caution


class TestTheCounter:
    @pytest.mark.parametrize(
        ("chip", "least", "most"),
        [
            # MC14060B: 2 Rt < Rs < 10 Rt, from memory; 74HC4060 of Dec 1990: about 2 Rt.
            ("MC14060B", 2.0, 10.0),
            ("74HC4060", 1.8, 2.5),
        ],
    )
    def test_the_second_resistor_follows_the_first(self, chip, least, most):
        circuit = divider(chip, 5.0)
        network = series(resistor(1, 33e3), resistor(2, 1e3))
        found = need("second resistor Rs", circuit, fit_of(circuit, network, capacitor(3, 1e-6)))
        assert (found.least, found.most) == pytest.approx((least * 34e3, most * 34e3))
        assert found.kind is Kind.RESISTOR

    def test_the_reset_lasts_some_milliseconds(self):
        found = {each.use: each for each in needs_of(divider(), slow(divider()))}
        c, r = found["reset capacitor"], found["reset resistor"]
        assert c.preferred * r.preferred == pytest.approx(10e-3)
        assert c.least * r.least > 1e-3
        assert c.most * r.most < 0.3


@pytest.mark.parametrize(
    ("use", "words"),
    [
        ("control bypass", "4n7 to 100n, ceramic or film, rated 9 V or more"),
        ("supply reservoir", "10u to 100u, electrolytic, rated 9 V or more"),
        ("trigger pull-up", "4k7 to 22k"),
    ],
)
def test_windows_in_words(use, words):
    fit = fit_of(one_shot(), resistor(1, 470e3), electrolytic(2, 100e-6))
    assert need(use, one_shot(), fit).window == words
