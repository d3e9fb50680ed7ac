"""What the cautions say: figures worked out by hand or published, and the way out.

"Published" figures are the computed tables of bench notes; the others are worked out beside the
check, apart from the package.
"""

import re
from dataclasses import replace
from math import log

import pytest
from caution_bench import (
    codes,
    electrolytic,
    film,
    fit,
    flashing,
    resistor,
    text_of,
    timed,
)

from chooser.cautions.of_surroundings import COUPLED
from chooser.cautions.record import surely_below
from chooser.circuits.astable import astable
from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.circuits.diodes import diode_named
from chooser.circuits.gates import gate_named
from chooser.circuits.monostable import monostable
from chooser.circuits.output_fed import output_fed
from chooser.circuits.schmitt import schmitt
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.quantities import parse_duration

PERFECT = replace(
    timer_named("TLC555"),
    name="perfect",
    threshold_current_typical=0.0,
    threshold_current_limit=0.0,
    discharge_leakage_typical=0.0,
    discharge_leakage_limit=0.0,
    discharge_resistance_typical=0.0,
    discharge_resistance_limit=0.0,
)
"""Ideal thresholds, no losses of its own; yet no textbook timer, for it knows of others'."""


def test_the_texts_name_parts_and_figures():
    short = timed(resistor(), electrolytic(voltage=10.0))
    assert "47u in drawer F3" in text_of(short, "rating-margin")
    assert "13.5 V" in text_of(short, "rating-margin")
    weak = timed(resistor(), electrolytic(voltage=6.3))
    assert "burst" in text_of(weak, "rating-margin")
    decoration = text_of(timed(resistor(), electrolytic(), target=24.5), "capacitor-tolerance")
    assert "moves the interval by -20% to +20%" in decoration
    assert "decoration" in decoration
    perfect = timed(resistor(), electrolytic())
    wanted = perfect.outlook.chief.nominal
    perfect = replace(perfect, wanted={"interval": (wanted, wanted)})
    assert "less than 0.0001%" in text_of(perfect, "capacitor-tolerance")
    assert "2M2" in text_of(timed(resistor(2.2e6), film(), "cmos"), "high-resistance")
    assert "10 us" in text_of(timed(resistor(1e3), film(1e-9, technology="c0g")), "short-interval")
    assert "47u in drawer F3" in text_of(timed(resistor(), electrolytic()), "polarity")


def percent_after(words, text):
    return float(text.split(words)[1].split("%")[0])


class TestLosses:
    def test_the_leakage_caution_gives_ratio_and_stretch(self):
        # Worked out: 9 V / 3 / 330k is 9.09 uA; the leak at the trip point is a tenth of it.
        tight = timed(resistor(330e3), electrolytic(leakage=0.0))
        current = 9.0 / 3.0 / 330e3 / 10.0
        c = replace(tight.slots["C"], leak_limit=current / 6.0)
        leaky = replace(tight, slots={**tight.slots, "C": c})
        # The timer's own limit of 350 nA comes on top of the capacitor's 909 nA.
        said = text_of(leaky, "leakage")
        assert "only 7.2 times what is lost, mostly through the capacitor" in said
        assert re.search(r"lengthens the interval by up to [\d.]+% \([\d.]+% typically\):", said)
        assert "written down" in said
        # With a tight capacitor the timer is the one to blame: 9 V / 3 / 330k over 350 nA.
        blamed = text_of(tight, "leakage")
        assert "only 26 times what is lost, mostly to the NE555 timer itself" in blamed
        assert "CMOS" in blamed

    @pytest.mark.parametrize(
        ("ratio", "one_shot", "oscillator"),
        [
            # Published: charging current over leakage, and how much longer the two times get.
            (10.0, 6.5, 7.8),
            (5.0, 14.0, 17.0),
            (3.0, 26.0, 32.0),
            (2.0, 47.0, 59.0),  # rounded up from 46.5 and 58.5
        ],
    )
    def test_ratio_and_stretch_are_the_published_ones(self, ratio, one_shot, oscillator):
        current = 9.0 / 3.0 / 100e3 / ratio
        lossy = replace(PERFECT, threshold_current_typical=current, threshold_current_limit=current)
        c = film(leakage=0.0)
        said = text_of(fit(monostable(lossy, 9.0), resistor(100e3), c), "leakage")
        assert f"only {ratio:g} times" in said
        assert percent_after("lengthens the interval by up to ", said) == pytest.approx(
            one_shot, rel=0.03
        )
        said = text_of(fit(astable(lossy, 9.0), resistor(90e3), resistor(10e3), c), "leakage")
        assert f"only {ratio:g} times" in said
        found = percent_after("lengthens the high time by up to ", said)
        assert found == pytest.approx(oscillator, rel=0.03)

    @pytest.mark.parametrize("ratio", [1.5, 5.0, 51.0, 300.0])
    @pytest.mark.parametrize("trip", [0.1, 2.0 / 3.0, 0.9])
    def test_what_the_currents_alone_rule_out_is_indeed_ruled_out(self, ratio, trip):
        # t / (R C) is ln((1 - x) / (1 - a - x)) with a constant loss of x V / R.
        x = (1.0 - trip) / ratio
        by_current = log((1.0 - x) / (1.0 - trip - x)) / log(1.0 / (1.0 - trip)) - 1.0
        # With a leak across C: k = 1 / (1 + R G), and a R G is what is lost at the trip point.
        k = 1.0 / (1.0 + x / trip)
        by_leak = k * log(k / (k - trip)) / log(1.0 / (1.0 - trip)) - 1.0
        for stretch in (by_current, by_leak):
            assert not surely_below(stretch, ratio)

    def test_an_interval_that_never_ends_says_so_and_names_the_way_out(self):
        surely = timed(resistor(470e3), film(leakage=1e-3))
        assert "interval never ends" in text_of(surely, "may-never-end")
        maybe = text_of(
            timed(resistor(1e6), electrolytic(60e-6), "cmos", target=66.0), "may-never-end"
        )
        assert "interval may never end" in maybe
        assert "measure the leakage" in maybe
        assert "film" in maybe
        assert "`chooser fit counter 66s`" in maybe
        assert "counter" not in text_of(surely, "may-never-end")  # half a second needs none
        # Where the timer's own currents are to blame, a better capacitor is no way out.
        timer = text_of(timed(resistor(20e6), film(1e-7), "NE555"), "may-never-end")
        assert "CMOS timer" in timer
        assert "film" not in timer
        assert "`chooser fit counter" in timer
        pulses = flashing(resistor(470e3), resistor(470e3), electrolytic(100e-6), "cmos")
        assert "this oscillator may stop" in text_of(pulses, "may-never-end")

    @pytest.mark.parametrize(
        ("case", "seconds"),
        [
            (timed(resistor(470e3), electrolytic(4700e-6), "cmos", target=2430.0), 2430.0),
            # 1 M and 100 uF without losses, three digits of it.
            (timed(resistor(1e6), electrolytic(100e-6), "cmos"), 1e6 * 100e-6 * log(3.0)),
        ],
    )
    def test_the_counter_is_asked_for_what_was_meant(self, case, seconds):
        typed = text_of(case, "may-never-end").split("chooser fit counter ")[1].split("`")[0]
        assert parse_duration(typed) == pytest.approx(seconds, rel=5e-3)
        about = "(about the interval without losses)"
        assert (about in text_of(case, "may-never-end")) is (not case.wanted)

    def test_a_counter_is_not_told_to_use_a_counter(self):
        chip = counter_named("CD4060B")
        said = text_of(fit(counter(chip, 9.0), resistor(1e6), film(leakage=1e-3)), "may-never-end")
        assert "film" in said
        assert "counter" not in said

    def test_a_steered_oscillator_charges_through_ra_alone(self):
        timer = timer_named("TLC555")
        parts = resistor(47e3), resistor(100e3), film()
        assert fit(astable(timer, 9.0), *parts).charging == pytest.approx(147e3)
        steering = fit(steered(timer, 9.0, diode_named("silicon")), *parts)
        assert steering.charging == pytest.approx(47e3)


class TestMeter:
    def watched(self, ohm, farad=220e-6):
        c = electrolytic(farad, leakage=0.0)
        return fit(monostable(PERFECT, 9.0), resistor(ohm), c)

    def test_an_interval_while_it_is_being_watched(self):
        # Published for 4.7 Mohm and 220 uF: 1136 s, and 2752 s with a 10 Mohm meter.
        case = self.watched(4.7e6)
        assert case.outlook.chief.nominal == pytest.approx(1136.0, abs=0.5)
        assert case.stretch(case.circuit.typical, 1e-7, over=0.0) == pytest.approx(
            2752.0 / 1136.0 - 1.0, rel=1e-3
        )
        said = text_of(case, "meter-on-node")
        assert "goes from 18 min 56 s to 45 min 52 s" in said

    def test_from_half_the_meter_on_it_never_ends(self):
        # Published: 5 Mohm or more; the meter then holds the node below two thirds.
        assert "never ends" in text_of(self.watched(5.01e6), "meter-on-node")
        assert "never ends" not in text_of(self.watched(4.99e6), "meter-on-node")

    def test_small_resistors_do_not_mind(self):
        # Published: a leak of 50 R makes 1.7 % (and one of 20 R 4.4 %).
        assert "meter-on-node" not in codes(self.watched(200e3))
        assert "meter-on-node" in codes(self.watched(500e3))


class TestDischarge:
    @pytest.mark.parametrize(
        ("case", "texts"),
        [
            # 9 V / 680 ohm; 9 V / 0.9 kohm is 10 mA, but timing is specified from 1k on.
            (
                timed(resistor(680.0), film()),
                ("R at 680R", "13 mA", "specified from 1k on", "take 1k or"),
            ),
            (timed(resistor(900.0), film()), ("R at 900R", "10 mA")),
            # 16 V / 15 mA is 1.07 kohm.
            (timed(resistor(1e3), film(), supply=16.0), ("16 mA", "take 1k07 or")),
            (
                flashing(resistor(470.0), resistor(1e4), film()),
                # 19.1 mA of RA, and 6 V through RB on top.
                ("RA at 470R", "20 mA at first", "specified for 15 mA", "take 1k or more"),
            ),
            # Charged to two thirds of 9 V, through 100 ohm, and 0.9 mA of RA.
            (flashing(resistor(1e4), resistor(100.0), film()), ("RB at 100R", "61 mA")),
            # Each alone is within 15 mA: 15 V / 1 kohm and 10 V / 1 kohm.
            (
                flashing(resistor(1e3), resistor(1e3), film(), supply=15.0),
                ("RA at 1k and RB at 1k", "25 mA at first", "take larger ones"),
            ),
            # The control pin lets the capacitor charge to 8 V: 8 V / 500 ohm and 0.9 mA.
            (
                fit(
                    astable(timer_named("NE555"), 9.0, 8.0), resistor(1e4), resistor(500.0), film()
                ),
                ("RB at 500R", "17 mA"),
            ),
        ],
    )
    def test_the_pin_is_told_its_current(self, case, texts):
        said = text_of(case, "discharge-pin")
        for text in texts:
            assert text in said

    def test_recovery_takes_five_time_constants(self):
        # Published: 1000 uF with 15 ohm is 75 ms.
        slow = replace(timer_named("TLC555"), discharge_resistance_limit=15.0)
        case = fit(monostable(slow, 9.0), resistor(1e3), electrolytic(1000e-6))
        assert "takes up to 75 ms" in text_of(case, "recovery")

    def test_nanoseconds_of_recovery_are_not_worth_a_word(self):
        # 5 x 44.4 ohm x 1 nF are 0.2 us, 4 % of the 5.2 us; ten times that is.
        short = timed(resistor(4.7e3), film(1e-9))
        assert "recovery" not in codes(short)
        assert "recovery" in codes(timed(resistor(4.7e3), film(10e-9)))

    def test_recovery_is_measured_against_the_interval(self):
        # 5 x 44.4 ohm against 2 % of R ln 3: R below 10.1 kohm.
        assert "recovery" in codes(timed(resistor(10e3), film()))
        assert "recovery" not in codes(timed(resistor(10.5e3), film()))

    def test_a_surge_is_eased_by_a_resistor_that_makes_recovery_longer(self):
        # 5 x (44.4 + 100) ohm x 220 uF = 159 ms.
        said = text_of(timed(resistor(47e3), electrolytic(220e-6)), "discharge-surge")
        assert "220u" in said
        assert "47 to 100 ohm in series" in said
        assert "leave 160 ms" in said
        # Beside 4.7 kohm that resistor would shorten the interval by 2 %.
        said = text_of(timed(resistor(4.7e3), electrolytic(220e-6)), "discharge-surge")
        assert "smaller capacitor" in said
        assert "series" not in said


class TestStall:
    def test_a_bipolar_output_at_5_v(self):
        # Published: 3.3 V of output (SLFS022) against 3.333 V, so there may be no oscillation.
        case = fit(output_fed(timer_named("NE555"), 5.0), resistor(10e3), film())
        assert case.outlook.chief.high is None
        said = text_of(case, "stall")
        assert "output's high level may not pass the upper trip point" in said
        assert "CMOS" in said

    def test_a_discharge_pin_that_is_held_up(self):
        # The pin comes down to 44.4 / (44.4 + RA): one third of the supply at 88.8 ohm.
        assert "stall" in codes(flashing(resistor(85.0), resistor(10e3), film()))
        assert "stall" not in codes(flashing(resistor(95.0), resistor(10e3), film()))
        said = text_of(flashing(resistor(85.0), resistor(10e3), film()), "stall")
        assert "Against RA the discharge pin may not get below" in said
        # At the typical 17.8 ohm: one third at 35.6 ohm.
        said = text_of(flashing(resistor(33.0), resistor(10e3), film()), "stall")
        assert "does not get below" in said
        assert "circuit stalls" in said


class TestSpeed:
    def test_the_frequency_limit_names_it(self):
        case = flashing(resistor(1e3), resistor(1e3), film(1e-9))
        assert "above 100 kHz" in text_of(case, "frequency-limit")

    def test_a_trigger_is_coupled_or_kept_short(self):
        # Published: 100 nF and 10 kohm hold a trigger below a third for 0.41 ms.
        assert pytest.approx(0.405e-3, rel=2e-3) == COUPLED
        said = text_of(timed(resistor(100e3), film(100e-9)), "trigger-length")
        assert "11 ms" in said
        assert "100n, with 10k to the supply (410 us)" in said
        short = text_of(timed(resistor(5e3), film(100e-9)), "trigger-length")
        assert "100n" not in short
        assert "keep the trigger pulse shorter" in short


@pytest.mark.parametrize("supply", [5.0, 9.0, 12.0])
def test_the_diode_caution_gives_the_slope_of_the_high_time(supply):
    # d/dV of ln ln((2V/3 - 0.6) / (V/3 - 0.6)), by hand.
    top, bottom = 2.0 * supply / 3.0 - 0.6, supply / 3.0 - 0.6
    slope = (2.0 / 3.0 / top - 1.0 / 3.0 / bottom) / log(top / bottom)
    circuit = steered(PERFECT, supply, diode_named("0.6V"))
    said = text_of(fit(circuit, resistor(47e3), resistor(100e3), film(leakage=0.0)), "diode-supply")
    found = percent_after("move by ", said) / 100.0
    assert found == pytest.approx(slope, rel=0.05)
    assert found < 0.0


class TestDevices:
    def test_scatter_is_told_in_sigmas_with_the_way_out_of_the_family(self):
        inverter = fit(schmitt(gate_named("CD40106"), 5.0), resistor(100e3), film(100e-9))
        said = text_of(inverter, "device-scatter")
        percent = percent_after("alone spreads the period by ", said)
        assert percent / 100.0 == pytest.approx(inverter.outlook.chief.device, abs=5e-3)
        assert "measure K = T/(R C), and give it by --factor" in said
        fed = fit(output_fed(timer_named("NE555"), 5.0), resistor(10e3), film())
        assert "CMOS timer or a higher supply" in text_of(fed, "device-scatter")

    def test_a_sigma_of_a_twentieth_is_where_it_begins(self):
        # Three sigmas of 15 %: the limit of the device's own factor.
        for limit, spoken in ((0.149, False), (0.151, True)):
            rough = replace(PERFECT, timing_error_limit=limit)
            case = fit(monostable(rough, 9.0), resistor(10e3), film(leakage=0.0))
            assert ("device-scatter" in codes(case)) is spoken

    def test_a_capacitor_of_no_technology_counts_as_one_by_its_size(self):
        # From the table of technologies: 1 uF and more as an electrolytic.
        large = text_of(timed(resistor(), film(1e-6, technology=None)), "assumed-kind")
        assert "1u in drawer F2 counts as an electrolytic; write polyester, c0g" in large
        small = text_of(timed(resistor(), film(100e-9, technology=None)), "assumed-kind")
        assert "counts as a ceramic of unknown class" in small
