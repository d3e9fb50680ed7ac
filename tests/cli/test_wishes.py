"""What is wanted, in words: to targets where it can be, to a sentence where it cannot."""

from __future__ import annotations

import shlex

import pytest
from typer.testing import CliRunner

from chooser.circuits.astable import astable
from chooser.circuits.diodes import diode_named
from chooser.circuits.monostable import monostable
from chooser.circuits.output_fed import output_fed
from chooser.circuits.plain import capacitance, resistance
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.cli.app import app
from chooser.cli.wishes import (
    high_low_targets,
    interval_targets,
    period_targets,
    value_targets,
)
from chooser.errors import BadRequestError

PLAIN = astable(timer_named("bipolar"), 9.0)
HELD = astable(timer_named("bipolar"), 9.0, 7.0)
STEERED = steered(timer_named("bipolar"), 9.0, diode_named("silicon"))
NOTHING = dict.fromkeys(("high", "low", "on", "off", "frequency", "period", "duty"))


@pytest.fixture(scope="module")
def stock(tmp_path_factory):
    """A few parts: what is impossible is refused before they are even looked at."""
    path = tmp_path_factory.mktemp("wishes") / "stock.csv"
    path.write_text(
        "kind,value,count,drawer,technology\n"
        "resistor,10k,9,A1,metal-film\nresistor,22k,9,A2,metal-film\n"
        "capacitor,100n,9,F1,polyester\n",
        encoding="utf-8",
    )
    return str(path)


def options(*, fits=True, active="high", **said):
    return NOTHING | said | {"fits": fits, "active": active}


def ends(targets):
    return {target.output: (target.low, target.high) for target in targets}


# Wishes that can be -------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("said", "wanted"),
    [
        ({"high": "2s", "low": "1s"}, {"high": (2.0, 2.0), "low": (1.0, 1.0)}),
        ({"on": "2s", "off": "1s"}, {"high": (2.0, 2.0), "low": (1.0, 1.0)}),
        ({"on": "1s", "off": "2s", "active": "low"}, {"high": (2.0, 2.0), "low": (1.0, 1.0)}),
        ({"period": "2ms", "duty": "60%"}, {"period": (2e-3, 2e-3), "duty": (0.6, 0.6)}),
        ({"frequency": "500Hz", "duty": "55..60%"}, {"period": (2e-3, 2e-3), "duty": (0.55, 0.6)}),
        ({"frequency": "0.5Hz", "duty": "30..60%"}, {"period": (2.0, 2.0), "duty": (0.3, 0.6)}),
    ],
)
def test_two_wishes_make_two_targets(said, wanted):
    found = ends(high_low_targets(options(**said), PLAIN))
    assert list(found) == list(wanted)
    for output, span in wanted.items():
        assert found[output] == pytest.approx(span, rel=1e-12)


@pytest.mark.parametrize("duty", ["1%", "30%", "50%", "20..40%"])
def test_a_steered_circuit_may_be_asked_for_any_duty(duty):
    targets = high_low_targets(options(frequency="1kHz", duty=duty), STEERED)
    assert [target.output for target in targets] == ["period", "duty"]


def test_a_frequency_alone_leaves_the_duty_free_but_remembers_what_was_said():
    period, duty = high_low_targets(options(frequency="440Hz"), PLAIN)
    assert (period.low, period.frequency) == (pytest.approx(1 / 440), 440.0)
    assert (duty.output, duty.is_range) == ("duty", True)
    (only,) = high_low_targets(options(frequency="440Hz", fits=False), PLAIN)
    assert only.output == "period"
    (period,) = period_targets(options(period="2ms"), output_fed(timer_named("cmos"), 5.0))
    assert (period.output, period.low, period.frequency) == ("period", 2e-3, None)


def test_on_and_off_are_remembered_with_their_levels():
    for active, called in (("high", ["on", "off"]), ("low", ["off", "on"])):
        targets = high_low_targets(options(on="1s", off="1s", active=active), STEERED)
        assert [(each.output, each.called) for each in targets] == [
            ("high", called[0]),
            ("low", called[1]),
        ]
    assert {t.called for t in high_low_targets(options(high="1s", low="1s"), STEERED)} == {""}


def test_a_check_may_compare_a_duty_alone():
    (duty,) = high_low_targets(options(fits=False, duty="10%"), PLAIN)
    assert (duty.output, duty.low, duty.high) == ("duty", 0.1, 0.1)


def test_a_forced_trip_point_moves_the_least_duty():
    """By hand: at 7 V of 9 V, high takes ln(5.5/2) and low ln 2 of R C: 59.3 % and more."""
    assert high_low_targets(options(frequency="1kHz", duty="62%"), HELD)
    with pytest.raises(BadRequestError, match="58%"):
        high_low_targets(options(frequency="1kHz", duty="58%"), HELD)


@pytest.mark.parametrize("read", [high_low_targets, period_targets, interval_targets])
def test_a_check_may_be_asked_without_a_wish(read):
    assert read(options(fits=False, target=None), PLAIN) == ()


def test_a_check_compares_with_what_could_never_be_asked():
    """A published circuit that claims the impossible is judged, not refused."""
    targets = high_low_targets(options(fits=False, frequency="1kHz", duty="30%"), PLAIN)
    assert ends(targets)["duty"] == (0.3, 0.3)
    one_shot = monostable(timer_named("bipolar"), 9.0)
    (target,) = interval_targets({"target": "1us", "fits": False}, one_shot)
    assert target.low == 1e-6


def test_plain_values_are_read_in_their_own_unit():
    (target,) = value_targets("resistance")({"target": "14k254"}, resistance())
    assert (target.output, target.low, target.high) == ("resistance", 14254.0, 14254.0)
    (target,) = value_targets("capacitance")({"target": "320n"}, capacitance())
    assert (target.output, target.low) == ("capacitance", 3.2e-7)
    assert value_targets("capacitance")({"target": None}, capacitance()) == ()


# Wishes that cannot be: exit status 2, nothing on stdout, one sentence with the way out -----------

IMPOSSIBLE = [
    # A plain astable charges through both resistors: high for more than half of the period.
    ("astable --frequency 1kHz --duty 30%", ["30%", "`fit steered`", "--active low"]),
    ("astable --high 1ms --low 2ms", ["33.3%", "`fit steered`", "--active low"]),
    ("astable --on 1ms --off 2ms", ["33.3%", "`fit steered`", "--active low"]),
    ("astable --on 2ms --off 1ms --active low", ["33.3%", "`fit steered`"]),
    ("astable --frequency 1kHz --duty 20..40%", ["40%", "`fit steered`"]),
    # RA = 0 would short the supply through the discharge pin.
    ("astable --frequency 1kHz --duty 50%", ["50%", "RA = 0", "`fit output-fed`"]),
    ("astable --high 1ms --low 1ms", ["50%", "RA = 0", "`fit output-fed`"]),
    ("astable --frequency 1kHz --duty 40..50%", ["50%", "`fit output-fed`"]),
    # The chip's own delays.
    ("monostable 1us", ["1 us", "delays", "--timer cmos", "`fit logic-monostable`"]),
    (
        "astable --frequency 300kHz --duty 60%",
        ["bipolar", "at 300 kHz", "delays", "(--timer cmos), or", "`fit schmitt`"],
    ),
    ("astable --period 5us", ["with a period of 5 us", "--timer cmos", "`fit schmitt`"]),
    ("output-fed --frequency 300kHz", ["at 300 kHz", "delays", "`fit schmitt`"]),
    ("output-fed --frequency 600kHz --timer cmos", ["take a Schmitt inverter (`fit schmitt`)"]),
    ("monostable 1.5us --timer cmos", ["take a logic one-shot (`fit logic-monostable`)"]),
    # No circuit of R and C at all.
    ("astable --frequency 10MHz", ["10 MHz", "below about 1 us", "too fast for any RC circuit"]),
    ("monostable 100ns --timer cmos", ["100 ns", "too fast for any RC circuit"]),
    # Supplies and control voltages.
    ("monostable 1s --supply 24V", ["24 V", "4.5", "16 V"]),
    ("astable --frequency 1kHz --supply 1V", ["1 V", "supply"]),
    ("steered --frequency 1kHz --supply 1V", ["1 V", "supply"]),
    ("schmitt --frequency 1kHz --chip CD40106 --supply 1V", ["CD40106", "1 V", "3 and 18 V"]),
    ("counter 1h --supply 30V", ["HEF4060B", "30 V", "3 and 15 V"]),
    ("logic-monostable 5ms --chip 74121 --supply 9V", ["74121", "9 V", "5.25 V"]),
    ("monostable 1s --control 9V", ["9 V", "control", "8.1 V"]),
    ("astable --frequency 1kHz --control 0.5V", ["500 mV", "control", "1 V"]),
    ("steered --frequency 1kHz --duty 30% --supply 4.5V --diode 2V", ["2 V", "Schottky"]),
    ("delay 1s --supply 5V --threshold 99%", ["99%", "not reached"]),
    ("delay 1s --supply 5V --threshold 6V", ["--threshold: 6 V", "supply of 5 V"]),
    ("schmitt --frequency 10kHz --chip 74HC14", ["at 9 V", "(9 V is the default; say --supply)"]),
    ("schmitt --frequency 1kHz --factor 100", ["--factor: '100' is not believable", "0.02 and 20"]),
    ("schmitt --frequency 1kHz --factor 0.01", ["--factor: '0.01' is not believable"]),
    (
        "output-fed --frequency 1kHz --timer NE555 --supply 5V --load 100mA",
        ["100 mA", "3.33 V", "stall", "lighten the load"],
    ),
    ("output-fed --frequency 1kHz --timer cmos --supply 5V --load 1A", ["1 mA", "transistor"]),
    # Outputs and names that do not exist.
    ("counter 1h --ratio 5", ["5", "no pin", "16 (Q4)"]),
    ("counter 1h --ratio 2048", ["2048", "no pin", "1024 (Q10)", "4096 (Q12)"]),
    ("counter 1h --ratio many", ["'many'", "16384"]),
    ("counter 1h --chip 4060", ["'4060'", "makers differ", "HEF4060B", "CD4060B"]),
    ("counter 1h --chip HEF4060", ["did you mean HEF4060B"]),
    ("logic-monostable 1ms --chip 4538", ["makers differ", "MC14538B"]),
    ("schmitt --frequency 1kHz --chip 74HC41", ["did you mean 74HC14"]),
    ("steered --frequency 1kHz --diode silicium", ["did you mean silicon"]),
    ("monostable 90s --timer NE5555", ["did you mean NE555"]),
    ("steered --frequency 1kHz --duty 30% --paths sideways", ["sideways", "one or both"]),
    ("astable --frequency 1kHz --active sideways", ["sideways", "high or low"]),
    # Half of a wish, two wishes at once, or none.
    ("astable --high 2ms", ["--high alone", "--low"]),
    ("astable --low 2ms", ["--low alone", "--high"]),
    ("astable --on 2ms", ["--on alone", "--off"]),
    ("steered --off 2ms", ["--off alone", "--on"]),
    ("astable --duty 60%", ["--duty alone", "--frequency"]),
    ("astable --high 2ms --low 1ms --frequency 3Hz", ["one way only", "--high", "--frequency"]),
    ("astable --high 2ms --low 1ms --on 2ms --off 1ms", ["one way only", "--high", "--on"]),
    ("steered --on 2ms --off 1ms --duty 60%", ["one way only", "--on"]),
    ("astable --frequency 3Hz --period 0.3s --duty 60%", ["say the same", "leave one out"]),
    ("schmitt --frequency 1kHz --period 1ms", ["say the same", "leave one out"]),
    ("astable", ["Say what is wanted", "--high 2s --low 1s"]),
    ("output-fed", ["Say what is wanted", "--frequency 440Hz"]),
    # No oscillation, no value, no range.
    ("astable --frequency 3Hz --duty 0%", ["0%", "no oscillation"]),
    ("steered --frequency 3Hz --duty 100%", ["100%", "no oscillation"]),
    ("astable --frequency 3Hz --duty 120%", ["120%", "no oscillation"]),
    ("astable --frequency 3Hz --duty 0.6", ["'0.6'", "60%"]),
    ("astable --frequency 3Hz --duty 60..55%", ["60..55%", "backwards"]),
    ("astable --frequency 0Hz", ["'0Hz'", "zero"]),
    ("astable --period 5", ["'5'", "5s"]),
    ("schmitt --frequency 1kHz --factor -1", ["'-1'", "below zero"]),
    ("monostable 5s..60s", ["'5s..60s'", "range", "30s"]),
    ("counter 5s..60s", ["'5s..60s'", "range"]),
    ("delay 0s", ["'0s'", "zero"]),
    ("resistance 100n", ["'100n'", "capacitance, not a resistance"]),
    ("resistance 1k..2k", ["'1k..2k' is a range", "one resistance", "14k25"]),
    ("capacitance 1n..2n", ["'1n..2n' is a range", "one capacitance", "320n"]),
    ("astable --frequency 400Hz..500Hz", ["--frequency: '400Hz..500Hz' is a range", "440Hz"]),
    ("steered --on 1s..2s --off 3s", ["--on: '1s..2s' is a range"]),
    ("capacitance 100", ["'100'", "100n"]),
]


@pytest.mark.parametrize(("words", "says"), IMPOSSIBLE, ids=[words for words, _ in IMPOSSIBLE])
def test_what_cannot_be_gets_a_sentence_with_the_way_out(stock, words, says):
    done = CliRunner().invoke(app, ["fit", *words.split(), "--stock", stock])
    assert done.exit_code == 2
    assert done.stdout == ""
    for word in says:
        assert word in done.stderr
    assert done.stderr.count("\n") == 1
    assert done.stderr.endswith(".\n")
    assert "Traceback" not in done.stderr


TYPED_WRONG = [
    ("astable --frequency fast", "--frequency"),
    ("astable --period long", "--period"),
    ("astable --high long --low 1s", "--high"),
    ("astable --high 1s --low long", "--low"),
    ("astable --on 1s --off long", "--off"),
    ("astable --on long --off 1s", "--on"),
    ("astable --frequency 1kHz --duty half", "--duty"),
    ("monostable 1s --supply 9bolts", "--supply"),
    ("monostable 1s --control mid", "--control"),
    ("monostable 1s --within few", "--within"),
    ("monostable soon", "TARGET"),
    ("output-fed --frequency 1kHz --load much", "--load"),
    ("schmitt --frequency 1kHz --factor usual", "--factor"),
    ("delay 1s --threshold mid", "--threshold"),
    ("delay 1s --threshold '2V often'", "--threshold"),
    ("counter 1h --ratio many", "--ratio"),
]


@pytest.mark.parametrize(("words", "option"), TYPED_WRONG, ids=[words for words, _ in TYPED_WRONG])
def test_a_wrong_value_names_its_option(stock, words, option):
    done = CliRunner().invoke(app, ["fit", *shlex.split(words), "--stock", stock])
    assert done.exit_code == 2
    assert done.stderr.startswith(f"{option}: '")


@pytest.mark.parametrize("option", ["--target", "--temperature", "--within"])
def test_a_wrong_value_of_a_check_names_its_option(option):
    words = ["check", "monostable", "--R", "10k", "--C", "1u", option, "much"]
    done = CliRunner().invoke(app, words)
    assert done.exit_code == 2
    assert done.stderr.startswith(f"{option}: 'much' ")


def test_a_supply_that_was_typed_is_not_called_the_default(stock):
    words = "fit schmitt --frequency 10kHz --chip 74HC14 --supply 9V --stock"
    done = CliRunner().invoke(app, [*words.split(), stock])
    assert done.exit_code == 2
    assert "default" not in done.stderr


@pytest.mark.parametrize(
    "words",
    [
        "astable --on 1ms --off 2ms --active low",
        "steered --frequency 1kHz --duty 30%",
        "steered --high 1ms --low 2ms --paths both",
        "output-fed --frequency 1kHz --timer cmos",
        "logic-monostable 1ms --chip HEF4538B",
        "schmitt --frequency 20kHz",
        "counter 1h --ratio 16384",
        "counter 1h --ratio /16384",
    ],
)
def test_what_a_refusal_points_to_is_answered(stock, words):
    done = CliRunner().invoke(app, ["fit", *words.split(), "--stock", stock])
    assert done.exit_code in {0, 3}, done.stderr
    assert done.stderr == ""
