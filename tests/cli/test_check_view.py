"""A verdict as a person and as a program meets it."""

from __future__ import annotations

import json
import math
import re
from dataclasses import replace
from itertools import pairwise

import pytest

from chooser.cautions import STANDING
from chooser.circuits.astable import astable
from chooser.circuits.circuit import Variant
from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.circuits.delay import delay
from chooser.circuits.monostable import monostable
from chooser.circuits.plain import capacitance, resistance
from chooser.circuits.timers import timer_named
from chooser.cli.check_view import print_verdict, verdict_lines
from chooser.cli.quick_entry import read_part
from chooser.cli.typed_parts import read_slot
from chooser.parts import Count, Holding, Tolerance
from chooser.search.request import Target
from chooser.temperature import Warmth
from chooser.verdict import judged

IDEAL, BIPOLAR, CMOS = (timer_named(name) for name in ("ideal", "bipolar", "cmos"))
STOCK = (Holding(17, read_part("10k 1% metal film"), "A4", Count(5)),)


def verdict(circuit, texts, targets=(), warmth=None, variant=None, **more):
    networks = {
        slot: read_slot(text, slot, circuit, lambda: STOCK)
        for slot, text in zip(circuit.slots, texts, strict=True)
    }
    return judged(circuit, networks, targets, 0.02, warmth, variant=variant or Variant(), **more)


def page(*arguments, width=None, **more):
    return "\n".join(verdict_lines(verdict(*arguments, **more), width))


def interval(seconds):
    return (Target("interval", seconds, seconds),)


SLOW = (astable(BIPOLAR, 5.0), ("909k 1%", "47k 1%", "470u 20% electrolytic 25V"))
USUAL = (monostable(CMOS, 9.0), ("820k 1% metal film", "100u 20% electrolytic 25V"))


class TestThePage:
    def test_wrong_by_a_factor_of_seventy_is_visible_at_once(self):
        # 1 Mohm and 47 uF, offered as 62 minutes; it is 51.6 s.
        out = page(monostable(IDEAL, 9.0), ("1M", "47u electrolytic"), interval(3720.0))
        assert "Interval: 72 x too short: 51.6 s, not 1 h 02 min." in out
        assert "hardly any lie in the band" in out

    def test_it_says_what_it_is_and_what_it_does(self):
        lines = page(monostable(IDEAL, 9.0), ("820k 1%", "100u 20%"), interval(90.0)).splitlines()
        assert lines[0] == "One-shot, ideal timer at 9 V."
        assert lines[1:3] == ["  R = 820k 1%", "  C = 100u 20%"]
        # 820 k x 100 uF x ln 3 = 90.0862 s; corners 0.99 x 0.8 and 1.01 x 1.2 of it.
        assert " ".join(lines[5].split()) == "interval 90.1 s 71.3 s to 109 s 12%"
        assert "+0.096% off, where 90 s was wanted (88.2 s to 91.8 s accepted)" in lines[6]
        assert lines[7] == "Of builds alike, 10 of 100 lie in the band."

    def test_no_digits_beyond_meaning(self):
        exact = page(monostable(IDEAL, 9.0), ("820k 0.01%", "100n 0.01% polystyrene"))
        assert "90.086 ms" in exact
        assert "90.1 s " in page(monostable(IDEAL, 9.0), ("820k 1%", "100u 20%"))

    def test_the_causes_largest_first_with_bars_of_their_length(self):
        out = page(*USUAL)
        table = out[out.index("What makes the spread") :].splitlines()[2:]
        rows = list(table[: table.index("")])
        assert rows[0].startswith("100u electrolytic (C)")
        assert "820k metal-film (R)" in out
        assert "cmos timer" in out
        bars = [row.count("#") for row in rows]
        assert bars == sorted(bars, reverse=True)
        assert sum(bars) in range(18, 22)

    def test_leakage_in_words(self):
        out = page(*SLOW)
        assert re.search(r"charging current is 2\.7 times what leaks", out)
        assert "high time 30% longer, at the limits endless." in out
        assert "may-never-end: " in out
        assert "10M meter on the timing node" in out

    def test_the_meter_is_told_once(self):
        short = page(*USUAL)
        long = page(monostable(CMOS, 9.0), ("4.7M", "1u polyester"))
        for out in (short, long):
            assert out.count("10M meter on the timing node") == 1

    def test_leakage_that_does_not_count_is_told_as_such(self):
        assert "leakage hardly counts" in page(monostable(CMOS, 9.0), ("10k", "100n polypropylene"))

    def test_the_first_time_after_power_up(self):
        out = page(astable(IDEAL, 9.0), ("10k 1%", "10k 1%", "100n 5% polyester"))
        # 20 k x 100 n x ln 3 = 2.197 ms.
        assert "The first high time after power-up is longer: 2.2 ms (" in out
        wanted = (Target("high", 1e-3, 1e-3, called="off"), Target("low", 1e-3, 1e-3, called="on"))
        out = page(astable(IDEAL, 9.0), ("10k 1%", "10k 1%", "100n 5% polyester"), wanted)
        assert "The first off time (high) after power-up is longer: 2.2 ms (" in out
        assert "Off (high): +39% off, where 1 ms was wanted" in out
        assert re.search(r"^on \(low\) +693 us", out, re.MULTILINE)
        assert "after power-up" not in page(*USUAL)

    def test_temperature_at_both_ends_and_over_both(self):
        out = page(*USUAL, warmth=Warmth(0.0, 40.0))
        table = [line for line in out.splitlines() if re.match(r"\s*(0 C|40 C|both)\s", line)]
        assert [line.split()[0] for line in table] == ["0", "40", "both"]
        assert "At 0 C 100u electrolytic (C) moves it most, by -13% to -6.7%" in out
        assert "the leakage moves it by +" in out
        assert "temperature" not in page(*USUAL)
        single = page(*USUAL, warmth=Warmth(25.0, 25.0))
        assert "25 C" in single
        assert "both" not in single
        assert single.count("(parts are specified at 20 C).") == 1
        assert "specified" not in out

    def test_a_dielectric_outside_its_rating(self):
        # EIA RS-198: Z5U is for +10 to +85 C.
        out = page(monostable(CMOS, 9.0), ("10k", "1u z5u 50V"), warmth=Warmth(-10.0, 20.0))
        assert "outside-rating: At -10 C 1u would leave" in out

    def test_the_supply(self):
        at = {"at_supply": lambda volt: monostable(BIPOLAR, volt)}
        out = page(monostable(BIPOLAR, 9.0), ("1M", "1u polypropylene"), **at)
        assert re.search(
            r"One volt more of supply moves the interval by -0\.\d+% by its formula, and by up to "
            r"0\.5% either way by the device's own drift\.",
            out,
        )
        ideal = {"at_supply": lambda volt: monostable(IDEAL, volt)}
        out = page(monostable(IDEAL, 9.0), ("1M", "1u polypropylene"), **ideal)
        assert "The supply hardly moves the interval." in out
        assert "supply" not in page(monostable(IDEAL, 9.0), ("1M", "1u 63V polypropylene"))

    def test_all_cautions_then_the_standing_sentence_last(self):
        found = verdict(*SLOW)
        lines = verdict_lines(found, None)
        said = [line.split(":")[0] for line in lines if re.match(r"[a-z-]+: ", line)]
        assert said == [str(caution.code) for caution in found.cautions]
        assert lines[-1].endswith(" ".join(caution.text for caution in STANDING))

    def test_an_assumed_tolerance_is_said(self):
        assert "assumed-tolerance: No tolerance is written down for 820k" in page(
            monostable(IDEAL, 9.0), ("820k", "100u 20%")
        )

    def test_networks_and_holdings_are_spelled_out(self):
        out = page(monostable(CMOS, 9.0), ("#17 + #17 + (22k || 47k)", "100n 5% polyester"))
        line = next(line for line in out.splitlines() if line.startswith("  R = "))
        assert line == (
            "  R = 10k + 10k + (22k || 47k) = 34k99: "
            "2 x 10k 1% metal-film (holding 17, drawer A4); 22k; 47k"
        )

    def test_a_range_is_met_or_not(self):
        circuit, texts = astable(IDEAL, 9.0), ("10k", "10k", "100n polyester")
        inside = page(circuit, texts, (Target("duty", 0.6, 0.7), Target("period", 9.0, 9.0)))
        assert "Duty: inside the range" in inside
        assert "Period: 4,300 x too short" in inside
        assert "in all bands" in inside
        assert "Duty: +" in page(circuit, texts, (Target("duty", 0.5, 0.55),))

    def test_too_fast_for_the_device_leaves_the_odds_unknown(self):
        circuit = monostable(BIPOLAR, 9.0)
        out = page(circuit, ("1k 1%", "1n 5% c0g"), interval(1.1e-6))
        assert "is unknown: the device's delays rule" in out

    def test_a_stuck_circuit_has_no_figures_to_print(self):
        out = page(
            astable(BIPOLAR, 9.0),
            ("51k", "470", "100000u electrolytic 16V"),
            (Target("period", 3600.0, 3600.0),),
        )
        assert "Period: never, not 1 h" in out
        assert "stops" in out
        assert "stuck" not in out
        assert "nan" not in out
        assert "inf" not in out

    def test_what_never_ends_is_told_once_and_what_it_would_make(self):
        # (51 k + 2 x 470) x 0.1 F x ln 2 = 3600.2 s.
        texts = ("51k", "470", "100000u electrolytic 16V")
        out = page(astable(BIPOLAR, 9.0), texts, at_supply=lambda volt: astable(BIPOLAR, volt))
        assert "Without any losses it would make a period of 1 h." in out
        assert "that makes the high time endless.\n" in out
        for noise in ("The first", "meter", "One volt more"):
            assert noise not in out
        rows = {line.split()[0]: line.split()[1] for line in out.splitlines()[6:11]}
        assert rows == {
            "period": "never",
            "frequency": "stops",
            "high": "never",
            "low": "33.3",
            "duty": "stops",
        }
        # 10 Mohm x 1 mF x ln 3 = 10,986 s, which is 11,000 s in three digits.
        out = page(monostable(CMOS, 9.0), ("10M", "1000u electrolytic 16V"))
        assert "Without any losses it would make 3 h 03 min 20 s." in out
        assert "Without any losses" not in page(*SLOW)

    def test_a_meter_that_changes_no_digit_is_not_spoken_of(self):
        assert "meter" not in page(monostable(CMOS, 9.0), ("1k", "10u 10% polyester"))

    def test_the_setting_stands_behind_the_supply(self):
        circuit = replace(monostable(CMOS, 9.0), setting="control pin at 4 V")
        out = page(circuit, ("10k", "1u polyester"))
        assert out.startswith("One-shot, cmos timer at 9 V, control pin at 4 V.\n")
        circuit = replace(delay(5.0, 0.5, Tolerance(0.0, 0.0)), setting="threshold 50%")
        assert page(circuit, ("10k", "1u polyester")).startswith(
            "RC delay, at 5 V, threshold 50%.\n"
        )

    def test_a_frequency_is_compared_as_one(self):
        # 20 k + 10 k, 100 nF, ln 2: 480.9 Hz; asked 440 Hz, to 2 % of the period.
        texts = ("10k 1%", "10k 1%", "100n 5% polyester")
        out = page(astable(IDEAL, 9.0), texts, (Target("period", 1 / 440, 1 / 440, 440.0),))
        assert (
            "Frequency: +9.3% off, where 440 Hz was wanted (431.373 Hz to 448.98 Hz accepted)."
        ) in out
        out = page(astable(IDEAL, 9.0), texts, (Target("period", 1e-7, 1e-7, 1e7),))
        assert "Frequency: 21,000 x too low: 481 Hz, not 10 MHz." in out

    def test_the_output_of_a_counter_is_named(self):
        circuit = counter(counter_named("HEF4060B"), 5.0)
        out = page(circuit, ("100k", "470n polyester"), variant=circuit.variants[-1])
        heading = out.splitlines()[0]
        assert heading.startswith("Oscillator and counter, HEF4060B at 5 V, ")
        assert heading.endswith(", output Q14 (pin 3).")
        assert "meter on the timing node" not in out

    def test_plain_networks(self):
        out = page(resistance(), ("10k 1% + 22k 1%",), (Target("resistance", 3.0, 3.0),))
        assert out.splitlines()[0] == "Resistance."
        assert "11,000 x too high: 32k, not 3R" in out
        assert "Capacitance, at 9 V." in page(capacitance(9.0), ("10n 5% c0g",))

    @pytest.mark.parametrize("width", [34, 40, 60, 80, 140])
    def test_no_line_is_wider_than_the_terminal(self, width):
        for circuit, texts in (SLOW, USUAL):
            chief = circuit.outputs[0]
            found = verdict(circuit, texts, (Target(chief, 330.0, 330.0),), Warmth(-30.0, 60.0))
            lines = verdict_lines(found, width)
            assert max(map(len, lines)) <= width
            assert all(line.isascii() for line in lines)
            # Nothing is lost by folding but the bars, which only repeat the figures.
            words = " ".join(lines).replace("#", "").split()
            whole = " ".join(verdict_lines(found, None)).replace("#", "").split()
            assert set(whole) <= set(words)

    def test_sections_are_apart_by_one_empty_line(self):
        lines = verdict_lines(verdict(*SLOW), None)
        assert not any(not one and not two for one, two in pairwise(lines))
        assert lines[0]


class TestJson:
    def answered(self, capsys, *arguments, **more):
        print_verdict(verdict(*arguments, **more), as_json=True)
        return json.loads(capsys.readouterr().out)

    def test_the_contract(self, capsys):
        answer = self.answered(capsys, *USUAL, interval(90.0), Warmth(0.0, 40.0))
        assert list(answer) == [
            "schema",
            "circuit",
            "targets",
            "within",
            "timer",
            "device",
            "supply",
            "setting",
            "outputs",
            "first",
            "spread",
            "in_band",
            "chance",
            "likely_miss",
            "slots",
            "causes",
            "leakage",
            "temperature",
            "per_volt",
            "cautions",
        ]
        assert answer["schema"] == 1
        assert answer["circuit"] == "monostable"
        assert answer["targets"] == {"interval": 90.0}
        assert answer["outputs"]["interval"]["target"] == 90.0
        assert answer["first"] is None
        assert answer["slots"]["R"] == {
            "network": "820k",
            "value": 820e3,
            "low": 820e3 * 0.99,
            "high": 820e3 * 1.01,
            "picks": [{"holding": None, "drawer": None, "part": "820k 1% metal-film", "count": 1}],
        }
        assert sum(cause["share"] for cause in answer["causes"]) == pytest.approx(1.0)
        assert answer["causes"][-1].keys() == {"cause", "slot", "share", "spread_without"}
        assert [each["celsius"] for each in answer["temperature"]] == [0.0, 40.0]
        assert answer["temperature"][0]["moves_most"]["slot"] == "C"
        assert answer["per_volt"] == {"formula": None, "device": 0.03}

    def test_the_likely_miss_is_that_of_the_worst_target(self, capsys):
        targets = (Target("high", 2e-3, 2e-3), Target("low", 1e-3, 1e-3))
        texts = ("10k 1%", "10k 1%", "100n 5% polyester")
        answer = self.answered(capsys, astable(IDEAL, 9.0), texts, targets)
        # Low: 10 k x 100 nF x ln 2 = 693 us; R 1 % and C 5 % even give one sigma of 2.94 %.
        miss = math.hypot(1 - math.log(2), math.hypot(0.01, 0.05) / math.sqrt(3))
        assert answer["likely_miss"] == pytest.approx(miss, rel=1e-9)

    def test_a_counter_says_what_its_output_divides_by(self, capsys):
        circuit = counter(counter_named("HEF4060B"), 5.0)
        by_name = {variant.name: variant for variant in circuit.variants}
        variant = next(each for name, each in by_name.items() if name.startswith("Q14"))
        answer = self.answered(capsys, circuit, ("100k", "470n polyester"), variant=variant)
        assert answer["ratio"] == 2**14

    def test_chance_and_band_only_where_something_was_wanted(self, capsys):
        answer = self.answered(capsys, *USUAL)
        assert answer["targets"] == {}
        assert "chance" not in answer
        assert "likely_miss" not in answer
        assert "in_band" not in answer
        assert "error" not in answer["outputs"]["interval"]

    def test_what_is_endless_is_null(self, capsys):
        parts = ("51k", "470", "100000u electrolytic 16V")
        warmth = Warmth(0.0, 40.0)
        answer = self.answered(
            capsys, astable(BIPOLAR, 9.0), parts, (Target("period", 3600.0, 3600.0),), warmth
        )
        period = answer["outputs"]["period"]
        assert [period[key] for key in ("nominal", "high", "error", "spread")] == [None] * 4
        assert answer["leakage"]["stretch"] is None
        assert answer["first"]["high"] is None
        assert answer["causes"] == []

    def test_holdings_keep_number_and_drawer(self, capsys):
        answer = self.answered(capsys, monostable(CMOS, 9.0), ("#17 + #17", "100n polyester"))
        assert answer["slots"]["R"]["picks"] == [
            {
                "holding": 17,
                "drawer": "A4",
                "part": "10k 1% metal-film",
                "count": 2,
            }
        ]

    def test_people_get_the_page(self, capsys):
        print_verdict(verdict(*USUAL), as_json=False)
        assert capsys.readouterr().out.startswith("One-shot, cmos timer at 9 V.\n")
