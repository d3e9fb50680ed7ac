"""Verdicts on published circuits, right and wrong ones, and on what leaks."""

from __future__ import annotations

from dataclasses import replace
from math import inf, log

import pytest

from chooser.cautions import Code
from chooser.circuits.astable import AstableLaw, astable
from chooser.circuits.charging import Phase
from chooser.circuits.circuit import Variant
from chooser.circuits.diodes import diode_named
from chooser.circuits.monostable import monostable
from chooser.circuits.output_fed import output_fed
from chooser.circuits.plain import capacitance, resistance
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.errors import BadRequestError
from chooser.networks import Leaf
from chooser.parts import Count, Holding, Kind, Part, Tolerance
from chooser.search.request import Target
from chooser.temperature import Warmth
from chooser.verdict import judged

IDEAL, BIPOLAR, CMOS = (timer_named(name) for name in ("ideal", "bipolar", "cmos"))
RATED = 63.0


def resistor(ohm, percent=1.0):
    tolerance = Tolerance(percent / 100.0, percent / 100.0)
    part = Part(Kind.RESISTOR, ohm, tolerance=tolerance, technology="metal-film")
    return Leaf(Holding(-1, part, "", Count(1)))


def capacitor(farad, technology="electrolytic", percent=20.0, **traits):
    tolerance = Tolerance(percent / 100.0, percent / 100.0)
    traits = {"voltage": RATED, **traits}
    part = Part(Kind.CAPACITOR, farad, tolerance=tolerance, technology=technology, **traits)
    return Leaf(Holding(-2, part, "", Count(1)))


def leaking(farad, siemens):
    """Give a capacitor that leaks so much, typically and at most."""
    return capacitor(farad, "polypropylene", 1.0, leakage=max(siemens, 1e-20) * RATED)


def judge(circuit, networks, targets=(), warmth=None, **more):
    slots = dict(zip(circuit.slots, networks, strict=True))
    return judged(circuit, slots, targets, 0.02, warmth, variant=Variant(), **more)


def one_shot(current=0.0, supply=9.0):
    """Make a textbook one-shot whose timer draws a constant current, and capacitors may leak."""
    law = Phase(supply, 2.0 / 3.0, current)
    plain = monostable(IDEAL, supply)
    return replace(plain, typical=law, corners=(law,), lossless=False)


def oscillator(current=0.0, supply=9.0):
    law = AstableLaw(supply, 2.0 / 3.0, 1.0 / 3.0, current)
    return replace(astable(IDEAL, supply), typical=law, corners=(law,), lossless=False)


class TestPublishedCircuits:
    def test_62_minutes_that_are_51_seconds(self):
        # Copied from page to page: 1 Mohm and 47 uF as 62 minutes; it is R C ln 3 = 51.6 s.
        wanted = Target("interval", 3720.0, 3720.0)
        verdict = judge(monostable(IDEAL, 9.0), (resistor(1e6), capacitor(47e-6)), (wanted,))
        assert verdict.outlook.chief.nominal == pytest.approx(51.6, abs=0.05)
        assert 1.0 / (1.0 + verdict.errors["interval"]) == pytest.approx(72.0, rel=2e-3)
        assert not verdict.in_band
        assert verdict.outlook.chance == 0.0

    def test_a_slow_oscillator_that_may_never_end(self):
        # A maker's forum: 909 k, 47 k and 470 uF at 5 V as "5.5 min", 3.06 mHz; 326.757 s exactly.
        parts = (resistor(909e3), resistor(47e3), capacitor(470e-6, voltage=10.0))
        out = judge(astable(IDEAL, 5.0), parts).outlook
        assert out.of("period").nominal == pytest.approx(326.757, abs=1e-3)
        assert out.of("frequency").nominal == pytest.approx(3.060383e-3, rel=1e-6)
        assert out.of("high").nominal == pytest.approx(311.445, abs=1e-3)
        assert out.of("low").nominal == pytest.approx(15.312, abs=1e-3)

        real = judge(astable(CMOS, 5.0), parts)
        # Worked out: 5/3 V through 956 k leave 1.743 uA, and 0.01 C V allows 15.7 uA at the trip
        # point; on the guarantee it never ends, with a thirtieth of that it does.
        assert real.leakage.ratio_limit == pytest.approx(1.743 / (15.67 + 0.1), rel=0.01)
        assert real.leakage.stretch_limit == inf
        assert real.leakage.ratio > 3.0
        assert real.outlook.chief.nominal < inf
        assert real.outlook.chief.high is None
        assert real.first.high is None
        assert real.cautions[0].code is Code.MAY_NEVER_END

    def test_a_search_that_found_an_hour_in_100_000_microfarad(self):
        # A brute-force search's "one hour": 51 k, 470 ohm and 100 000 uF, 3600.2 s on paper.
        parts = (resistor(51e3), resistor(470.0), capacitor(0.1, voltage=16.0))
        wanted = Target("period", 3600.0, 3600.0)
        paper = judge(astable(IDEAL, 9.0), parts, (wanted,))
        assert paper.outlook.chief.nominal == pytest.approx(3600.2, abs=0.1)
        real = judge(astable(BIPOLAR, 9.0), parts, (wanted,))
        assert real.outlook.chief.nominal == inf
        assert real.errors["period"] == inf
        assert real.causes == ()


class TestStretch:
    # Worked out: ln((3 - x) / (1 - x)) / ln 3 with x the inverse ratio, and the same from a third.
    @pytest.mark.parametrize(
        ("ratio", "one", "high"),
        [
            (1000, 0.0006, 0.0007),
            (100, 0.006, 0.007),
            (30, 0.021, 0.025),
            (20, 0.031, 0.037),
            (10, 0.065, 0.078),
            (5, 0.14, 0.17),
            (3, 0.26, 0.32),
            (2, 0.47, 0.59),
            (1, inf, inf),
            (0.9, inf, inf),
        ],
    )
    def test_by_a_constant_current(self, ratio, one, high):
        current = 9.0 / 3.0 / 1e6 / ratio
        for circuit, parts, expected in (
            (one_shot(current), (resistor(1e6), leaking(1e-6, 0.0)), one),
            (oscillator(current), (resistor(5e5), resistor(5e5), leaking(1e-6, 0.0)), high),
        ):
            leakage = judge(circuit, parts).leakage
            assert leakage.ratio == pytest.approx(ratio, rel=1e-9)
            # The last digit printed, half of it either way.
            assert leakage.stretch == pytest.approx(expected, rel=0.08, abs=5e-5)
            assert leakage.stretch_limit == leakage.stretch

    # Worked out for a resistance across C: k ln(k / (k - 2/3)) / ln 3, k = Rp / (R + Rp).
    @pytest.mark.parametrize(
        ("times", "stretch"),
        [
            (1000, 0.00082),
            (100, 0.00831),
            (50, 0.01682),
            (20, 0.04372),
            (10, 0.09374),
            (5, 0.22081),
            (3, 0.50000),
            (2.1, 1.555),
            (1.9, inf),
        ],
    )
    def test_by_a_leak_resistance(self, times, stretch):
        leakage = judge(one_shot(), (resistor(1e6), leaking(1e-6, 1.0 / (times * 1e6)))).leakage
        assert leakage.stretch == pytest.approx(stretch, abs=5e-4 if times == 2.1 else 6e-6)
        assert leakage.ratio == pytest.approx(times / 2.0, rel=1e-9)

    @pytest.mark.parametrize(
        ("ohm", "supply", "stretch"),
        # Worked out with the 250 nA that data sheets allow a threshold input.
        [
            (1e6, 5.0, 0.1012),
            (1e6, 9.0, 0.0536),
            (1e6, 15.0, 0.0314),
            (3.3e6, 5.0, 0.458),
            (100e3, 5.0, 0.00919),
        ],
    )
    def test_by_the_threshold_current(self, ohm, supply, stretch):
        circuit = one_shot(250e-9, supply)
        leakage = judge(circuit, (resistor(ohm), leaking(1e-6, 0.0))).leakage
        assert leakage.stretch == pytest.approx(stretch, abs=1e-4 if stretch < 0.4 else 3e-4)

    def test_a_meter_on_the_node(self):
        # Worked out: 4.7 M and 220 uF go from 1136 s to 2752 s under 10 M; from 5 M on for ever.
        watched = judge(one_shot(), (resistor(4.7e6), leaking(220e-6, 0.0)))
        assert watched.outlook.chief.nominal == pytest.approx(1136.0, abs=0.5)
        assert watched.leakage.metered == pytest.approx(2752.0, abs=0.5)
        assert judge(one_shot(), (resistor(5e6), leaking(220e-6, 0.0))).leakage.metered == inf

    def test_a_lossless_circuit_has_nothing_to_say_of_leakage(self):
        assert judge(monostable(IDEAL, 9.0), (resistor(1e6), capacitor(1e-4))).leakage is None

    def test_a_steered_astable_charges_through_one_resistor(self):
        parts = (resistor(100e3), resistor(900e3), leaking(1e-6, 1e-9))
        found = judge(steered(CMOS, 9.0, diode_named("ideal")), parts).leakage
        other = judge(steered(CMOS, 9.0, diode_named("ideal")), (parts[0], resistor(1e3), parts[2]))
        assert found.ratio == pytest.approx(other.leakage.ratio, rel=1e-9)

    def test_an_output_that_may_not_reach_the_trip_point(self):
        """SLFS022: 3.3 V of output at 5 V do not reach 3.33 V, with nothing lost at all."""
        circuit = output_fed(timer_named("NE555"), 5.0)
        leakage = judge(circuit, (resistor(47e3), leaking(1e-6, 1e-12))).leakage
        assert (leakage.ratio_limit, leakage.stretch_limit) == (0.0, inf)
        assert 1.0 < leakage.ratio < inf
        assert 0.0 < leakage.stretch < inf


class TestFirst:
    def test_the_first_high_time_starts_from_nothing(self):
        # Theory: ln 3 / ln 2 = 1.585 times the later ones; reported as almost twice.
        parts = (resistor(10e3), resistor(47e3), capacitor(10e-6, "polyester"))
        verdict = judge(astable(IDEAL, 9.0), parts)
        high = verdict.outlook.of("high")
        ratio = log(3.0) / log(2.0)
        assert verdict.first.output == "high"
        assert verdict.first.nominal == pytest.approx(high.nominal * ratio, rel=1e-12)
        assert verdict.first.low == pytest.approx(high.low * ratio, rel=1e-12)
        assert verdict.first.high == pytest.approx(high.high * ratio, rel=1e-12)

    def test_4_seconds_high_and_2_low_begin_with_6_seconds(self):
        # A field report of "about 3 x": 4 s high and 2 s low start with 6.34 s.
        ohm = 2.0 / (log(2.0) * 10e-6)
        parts = (resistor(ohm), resistor(ohm), capacitor(10e-6, "polyester"))
        assert judge(astable(IDEAL, 9.0), parts).first.nominal == pytest.approx(6.34, abs=0.005)

    def test_losses_leave_the_ends_outside(self):
        parts = (resistor(470e3), resistor(10e3), capacitor(47e-6))
        verdict = judge(astable(BIPOLAR, 9.0), parts)
        slots, law = verdict.slots, verdict.circuit.first
        error = verdict.circuit.error
        ohms = [slots["RA"].low, slots["RB"].low]
        least = float(law.lossless().times(ohms, slots["C"].low, 0.0)[0]) * (1.0 - error.minus)
        assert verdict.first.low == pytest.approx(least, rel=1e-12)
        assert verdict.first.low < verdict.first.nominal
        limits = replace(
            law,
            input_current=BIPOLAR.threshold_current_limit,
            switch_leak=BIPOLAR.discharge_leakage_limit,
        )
        ohms = [slots["RA"].high, slots["RB"].high]
        most = limits.times(ohms, slots["C"].high, slots["C"].leak_limit / 4.0)[0]
        assert verdict.first.high is None or verdict.first.high > float(most)

    def test_a_one_shot_has_no_other_first_time(self):
        assert judge(monostable(CMOS, 9.0), (resistor(1e5), capacitor(1e-6))).first is None


class TestSupply:
    PARTS = (resistor(1e6), leaking(1e-6, 0.0))

    def test_the_textbook_formula_does_not_know_the_supply(self):
        found = judge(
            monostable(IDEAL, 9.0), self.PARTS, at_supply=lambda volt: monostable(IDEAL, volt)
        ).per_volt
        assert found.formula == pytest.approx(0.0, abs=1e-12)
        assert found.device == 0.0

    def test_a_constant_current_costs_more_at_a_low_supply(self):
        # Worked out: t = R C ln((V - x) / (V / 3 - x)), x = R I, so d ln t / dV follows.
        x, volt = 1e6 * 250e-9, 9.0
        logarithm = log((volt - x) / (volt / 3.0 - x))
        slope = (1.0 / (volt - x) - 1.0 / (volt - 3.0 * x)) / logarithm
        found = judge(
            one_shot(250e-9, volt), self.PARTS, at_supply=lambda v: one_shot(250e-9, v)
        ).per_volt
        assert found.formula == pytest.approx(slope, rel=5e-3)

    def test_beyond_the_range_of_the_device_one_side_is_enough(self):
        def at_supply(volt):
            if volt > 9.0:
                raise BadRequestError("Too much.")
            return one_shot(250e-9, volt)

        both = judge(one_shot(250e-9), self.PARTS, at_supply=lambda v: one_shot(250e-9, v)).per_volt
        found = judge(one_shot(250e-9), self.PARTS, at_supply=at_supply).per_volt
        assert found.formula == pytest.approx(both.formula, rel=0.1)

    def test_where_no_other_supply_is_possible_the_formula_is_unknown(self):
        def refusing(volt):
            raise BadRequestError(f"Not at {volt}.")

        timer = timer_named("NE555")
        found = judge(monostable(timer, 9.0), self.PARTS, at_supply=refusing).per_volt
        assert found.formula is None
        assert found.device == timer.supply_drift_limit
        assert judge(monostable(timer, 9.0), self.PARTS).per_volt.formula is None

    def test_a_diode_drop_shows(self):
        # Worked out: both halves last ln((2V/3 - d) / (V/3 - d)), with d = 0.6 V.
        def at(volt):
            return steered(IDEAL, volt, diode_named("0.6V"), both=True)

        slope_of = [log((2 * v / 3 - 0.6) / (v / 3 - 0.6)) for v in (8.55, 9.45)]
        slope = log(slope_of[1] / slope_of[0]) / 0.9
        parts = (resistor(100e3), resistor(100e3), leaking(1e-6, 0.0))
        verdict = judge(at(9.0), parts, at_supply=at)
        assert verdict.per_volt.formula == pytest.approx(slope, rel=1e-3)


class TestTargets:
    def test_inside_the_band(self):
        parts = (resistor(820e3), capacitor(100e-6))
        verdict = judge(monostable(IDEAL, 9.0), parts, (Target("interval", 90.0, 90.0),))
        # 820 k x 100 uF x ln 3 = 90.0862 s.
        assert verdict.errors["interval"] == pytest.approx(0.000958, abs=1e-6)
        assert verdict.in_band
        # A band of 4 % in a range of hardly more than 40 %.
        assert verdict.outlook.chance == pytest.approx(0.1, abs=0.005)

    def test_one_of_two_outside(self):
        parts = (resistor(10e3), resistor(10e3), capacitor(100e-9, "polyester"))
        targets = (Target("duty", 0.6, 0.7), Target("frequency", 50.0, 50.0))
        verdict = judge(astable(IDEAL, 9.0), parts, targets)
        assert verdict.errors["duty"] == 0.0
        # 1 / (30 k x 100 n x ln 2) = 480.9 Hz.
        assert verdict.errors["frequency"] == pytest.approx(480.9 / 50.0 - 1.0, rel=1e-4)
        assert not verdict.in_band

    def test_scaled_by_the_variant(self):
        circuit = monostable(IDEAL, 9.0)
        networks = {"R": resistor(1e5), "C": capacitor(1e-6)}
        once, often = (
            judged(circuit, networks, (), 0.02, None, variant=Variant("Q", scale))
            for scale in (1.0, 8192.0)
        )
        assert often.outlook.chief.nominal == once.outlook.chief.nominal * 8192.0


CIRCUITS = {
    "one-shot": (monostable(BIPOLAR, 9.0), (resistor(1e5), capacitor(1e-6))),
    "ideal one-shot": (monostable(IDEAL, 9.0), (resistor(1e5), capacitor(1e-6))),
    "astable": (astable(CMOS, 9.0), (resistor(1e5), resistor(1e5), capacitor(1e-6))),
    "ideal astable": (astable(IDEAL, 9.0), (resistor(1e5), resistor(1e5), capacitor(1e-6))),
    "resistance": (resistance(), (resistor(1e5),)),
    "capacitance": (capacitance(9.0), (capacitor(1e-6),)),
}


@pytest.mark.parametrize("name", CIRCUITS)
def test_every_circuit_gets_a_whole_verdict(name):
    circuit, parts = CIRCUITS[name]
    verdict = judge(circuit, parts, (), Warmth(0.0, 40.0))
    assert sum(cause.share for cause in verdict.causes) == pytest.approx(1.0, abs=1e-12)
    assert set(verdict.slots) == set(circuit.slots)
    assert [climate.celsius for climate in verdict.climates] == [0.0, 40.0]
    for reading in verdict.outlook.readings:
        assert reading.low <= reading.nominal <= reading.high
        for climate in verdict.climates:
            there = climate.outlook.of(reading.output)
            assert there.low <= there.nominal <= there.high
