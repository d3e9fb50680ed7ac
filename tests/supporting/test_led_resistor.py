"""The resistor of an LED, worked by hand from the output figures of timers.toml."""

from __future__ import annotations

import re
from math import inf

import pytest
from supporting_bench import divider, inverter, logic, one_shot

from chooser.circuits.output_fed import output_fed
from chooser.circuits.timers import timer_named
from chooser.errors import BadRequestError
from chooser.supporting.led import Drive, Led, drive_of, output_note

RED = Led(2.0, 10e-3)
RED_LOW = Led(2.0, 10e-3, to_supply=True)


@pytest.mark.parametrize(
    ("circuit", "led", "ohm"),
    [
        # The textbook's (V - Vled) / I, either way round.
        (one_shot("ideal"), RED, 700.0),
        (one_shot("ideal"), RED_LOW, 700.0),
        (one_shot("ideal", 5.0), Led(1.8, 20e-3), 160.0),
        # 9 V less 1.2 V, less 8 ohm x 10 mA, less 2 V: 5.72 V.
        (one_shot("NE555"), RED, 572.0),
        # 9 V less 0.1 V, less 12 ohm x 10 mA, less 2 V: 6.78 V.
        (one_shot("NE555"), RED_LOW, 678.0),
        (one_shot("NE555", 5.0), RED, 172.0),
        # 400 ohm of a CD40106 (from memory) are part of the 1400 ohm that make 5 mA.
        (inverter(), Led(2.0, 5e-3), 1000.0),
        # Nothing known: the rail.
        (divider(), Led(2.0, 5e-3), 1400.0),
        (logic(), Led(2.0, 5e-3, to_supply=True), 1400.0),
    ],
)
def test_worked_by_hand(circuit, led, ohm):
    drive = drive_of(circuit, led)
    assert drive.ohm(led.ampere) == pytest.approx(ohm, rel=1e-12)
    assert drive.current(ohm) == pytest.approx(led.ampere, rel=1e-12)


def test_no_led_gets_more_than_a_tenth_too_much_or_less_than_two_thirds():
    for drive in (Drive(7.0, 0.0), Drive(5.8, 8.0), Drive(7.0, 400.0)):
        least, most = drive.window(10e-3)
        wanted = drive.ohm(10e-3)
        assert least <= wanted <= most
        assert drive.current(least) <= 11e-3 * (1 + 1e-12)
        assert least >= 0.8 * wanted
        assert most == pytest.approx(1.5 * wanted)
        assert drive.current(most) >= 10e-3 / 1.5 * (1 - 1e-12)


def test_without_an_output_resistance_the_window_is_plain_ohms_law():
    # 7 V: 11 mA through 636.4 ohm, 6.67 mA through 1050 ohm.
    assert Drive(7.0, 0.0).window(10e-3) == pytest.approx((7.0 / 11e-3, 1050.0))


def test_the_window_keeps_the_output_within_its_limit():
    least, _ = Drive(7.0, 0.0, most=10.2e-3).window(10e-3)
    assert least == pytest.approx(7.0 / 10.2e-3)


def test_dissipation_is_that_of_the_resistor_alone():
    # 10 mA: 7 V across 700 ohm are 70 mW; a further 100 ohm in the output take their own share.
    assert Drive(7.0, 0.0).watt(700.0) == pytest.approx(70e-3)
    assert Drive(8.0, 100.0).watt(700.0) == pytest.approx(70e-3)


class TestRefusals:
    def test_a_current_that_no_way_round_allows(self):
        # SLFS022: 200 mA either way.
        with pytest.raises(BadRequestError) as caught:
            drive_of(one_shot("NE555"), Led(2.0, 0.3))
        assert str(caught.value) == (
            "The output of the NE555 timer can source 200 mA, and the LED is to have 300 mA; "
            "drive it by a transistor."
        )

    def test_a_current_that_the_other_way_round_allows(self):
        timer = timer_named("cmos")
        between = (timer.source_current_limit + timer.sink_current_limit) / 2.0
        assert timer.source_current_limit < between < timer.sink_current_limit
        with pytest.raises(
            BadRequestError, match=r"turn it round \(--led-to supply\): it can sink"
        ):
            drive_of(one_shot("cmos"), Led(2.0, between))
        assert drive_of(one_shot("cmos"), Led(2.0, between, to_supply=True)).volt > 0.0

    def test_at_the_limit_itself_there_is_an_answer(self):
        assert drive_of(one_shot("NE555"), Led(2.0, 0.2)).window(0.2)[0] > 0.0

    @pytest.mark.parametrize(
        ("led", "words"),
        [
            # 5 V less 1.28 V; the low output would leave 4.78 V.
            (Led(3.8, 10e-3), r"leaves 3\.72 V, .* turn it round \(--led-to supply\)\."),
            (Led(4.9, 10e-3), r"leaves 3\.72 V, .* a higher supply\."),
        ],
    )
    def test_too_little_left_for_a_resistor(self, led, words):
        with pytest.raises(BadRequestError, match=words):
            drive_of(one_shot("NE555", 5.0), led)

    def test_a_weak_gate_leaves_nothing(self):
        # 400 ohm x 20 mA are 8 V of 5.
        with pytest.raises(BadRequestError, match="high output of the CD40106 leaves nothing"):
            drive_of(inverter(supply=5.0), Led(2.0, 20e-3))


class TestNotes:
    def test_a_timer_with_figures_needs_none(self):
        assert output_note(one_shot("NE555"), RED) == ""

    @pytest.mark.parametrize(
        ("circuit", "level", "gate"),
        [(divider(), True, False), (logic(), True, False), (inverter(), False, True)],
    )
    def test_what_is_not_on_file_is_said(self, circuit, level, gate):
        note = output_note(circuit, RED)
        assert note.startswith(f"How much the output of the {circuit.device} may carry is not on ")
        assert "see that its data sheet allows 10 mA" in note
        assert ("taken to reach the rail" in note) is level
        assert ("another gate of the chip" in note) is gate

    def test_an_output_that_times_by_its_own_level(self):
        circuit = output_fed(timer_named("NE555"), 9.0)
        assert "only true with --load 10mA." in output_note(circuit, RED)
        assert "(--led-to ground)" in output_note(circuit, RED_LOW)
        assert output_note(output_fed(timer_named("ideal"), 9.0), RED) == ""


def test_without_a_limit_any_current_is_possible():
    assert drive_of(one_shot("ideal", 12.0), Led(2.0, 1.0)).most == inf
    assert re.search("--load", output_note(output_fed(timer_named("cmos"), 9.0), Led(2.0, 1e-3)))
