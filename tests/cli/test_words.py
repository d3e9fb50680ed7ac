"""The words that pages share."""

from __future__ import annotations

from dataclasses import replace
from math import inf, nan

import pytest

from chooser.circuits.delay import delay
from chooser.circuits.monostable import monostable
from chooser.circuits.plain import capacitance, resistance
from chooser.circuits.timers import timer_named
from chooser.cli.words import (
    accepted_text,
    ends_text,
    output_name,
    output_text,
    place_texts,
    wanted_text,
)
from chooser.parts import Tolerance
from chooser.search.request import Target


@pytest.mark.parametrize(
    ("output", "value", "text"),
    [
        ("interval", inf, "never"),
        ("high", inf, "never"),
        ("low", nan, "never"),
        ("period", nan, "never"),
        ("frequency", 0.0, "stops"),
        ("frequency", nan, "stops"),
        ("duty", nan, "stops"),
        ("duty", 0.0, "stops"),
        ("duty", 0.6, "60%"),
        ("frequency", 440.0, "440 Hz"),
        ("high", 0.5, "500 ms"),
    ],
)
def test_one_word_for_one_state(output, value, text):
    assert output_text(output, value) == text


def test_the_ends_of_a_worst_case():
    assert ends_text("interval", 1.0, None) == "1 s to never"
    assert ends_text("frequency", 0.0, 2.0) == "stops to 2 Hz"
    assert ends_text("duty", 0.6, None) == "60% to stops"
    assert ends_text("duty", 0.6, 0.7) == "60% to 70%"


def test_where_a_circuit_stands():
    plain = monostable(timer_named("cmos"), 9.0)
    assert place_texts(plain) == ["cmos timer at 9 V"]
    forced = replace(plain, setting="control pin at 4 V")
    assert place_texts(forced) == ["cmos timer at 9 V", "control pin at 4 V"]
    bare = replace(delay(5.0, 0.5, Tolerance(0.0, 0.0)), setting="threshold 50%")
    assert place_texts(bare) == ["at 5 V", "threshold 50%"]
    assert place_texts(resistance()) == []
    assert place_texts(capacitance(16.0)) == ["at 16 V"]


def test_what_is_wanted_and_accepted():
    tone = Target("period", 1 / 440, 1 / 440, 440.0)
    # 440 / 1.1 and 440 / 0.9.
    assert (wanted_text(tone), accepted_text(tone, 0.1)) == ("440 Hz", "400 Hz to 488.889 Hz")
    duty = Target("duty", 0.5, 0.55)
    assert (wanted_text(duty), accepted_text(duty, 0.1)) == ("50% to 55%", "50% to 55%")
    high = Target("high", 2.0, 2.0, called="on")
    assert (wanted_text(high), accepted_text(high, 0.02)) == ("2 s", "1.96 s to 2.04 s")
    assert (output_name(high.output, high.called), output_name("low")) == ("on (high)", "low")
