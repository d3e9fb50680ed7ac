"""The table of timers against its own promises, and a user's file against bad input."""

import dataclasses
import os
from math import inf

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.circuits.timers import (
    FIGURES,
    TIMERS,
    Timer,
    check_supply,
    timer_named,
    timer_names,
)
from chooser.errors import BadRequestError, UnknownNameError

BUILT_IN = (
    "ideal", "bipolar", "NE555", "SA555", "SE555", "LM555",
    "cmos", "TLC555", "LMC555", "ICM7555", "TS555",
)  # fmt: skip


def test_the_known_timers():
    assert timer_names() == BUILT_IN


@pytest.mark.parametrize("name", BUILT_IN)
def test_every_figure_has_a_source(name):
    sources = dict(timer_named(name).sources)
    assert set(sources) == set(FIGURES)
    assert all(len(source) > 3 for source in sources.values())


@pytest.mark.parametrize("name", BUILT_IN)
def test_figures_are_in_si_units_and_believable(name):
    timer = timer_named(name)
    assert timer.title
    assert timer.ideal == (name == "ideal")
    if timer.ideal:
        return
    assert 1.0 <= timer.supply_min < timer.supply_max <= 18.0
    assert 0.6 < timer.threshold < 0.7
    assert 0.0 < timer.threshold_current_typical <= timer.threshold_current_limit <= 250e-9
    assert 0.0 < timer.discharge_leakage_typical <= timer.discharge_leakage_limit <= 100e-9
    assert 5.0 < timer.discharge_resistance_typical < timer.discharge_resistance_limit < 100.0
    assert 5e-3 < timer.discharge_current_limit < 50e-3
    assert 0.0 < timer.timing_error_typical < timer.timing_error_limit < 0.2
    assert 0.1e-6 < timer.shortest_interval < 100e-6
    assert 0.3 < timer.trigger < 0.34
    assert 0.0 < timer.astable_error_typical < timer.astable_error_limit < 0.2
    for drift in ("temperature_drift", "astable_temperature_drift"):
        assert 10e-6 < getattr(timer, f"{drift}_typical") < getattr(timer, f"{drift}_limit") < 1e-3
    for drift in ("supply_drift", "astable_supply_drift"):
        assert 0.2e-3 < getattr(timer, f"{drift}_typical") < getattr(timer, f"{drift}_limit") < 0.04
    assert 50e3 < timer.highest_frequency < 5e6
    assert 0.0 <= timer.output_high_drop_typical < timer.output_high_drop_limit < 2.0
    assert 0.0 <= timer.output_low_typical < timer.output_low_limit < 0.5
    assert 5.0 < timer.output_high_resistance < 1e3
    assert 5.0 < timer.output_low_resistance < 50.0
    assert 1e-3 <= timer.source_current_limit <= timer.sink_current_limit <= 200e-3


@pytest.mark.parametrize(
    ("name", "figure", "expected"),
    [
        # SLFS022 (NE555/SA555/SE555), electrical characteristics.
        ("NE555", "threshold_current_typical", 30e-9),
        ("NE555", "threshold_current_limit", 250e-9),
        ("NE555", "discharge_leakage_typical", 20e-9),
        ("NE555", "discharge_leakage_limit", 100e-9),
        ("NE555", "timing_error_typical", 0.01),
        ("NE555", "timing_error_limit", 0.03),
        ("NE555", "supply_max", 16.0),
        ("SE555", "timing_error_limit", 0.015),
        # SNAS548C (LM555): 100 nA and 1 nA typical; 80 mV and 200 mV at 4.5 mA.
        ("LM555", "threshold_current_typical", 100e-9),
        ("LM555", "discharge_leakage_typical", 1e-9),
        ("LM555", "discharge_resistance_typical", 0.080 / 4.5e-3),
        ("LM555", "discharge_resistance_limit", 0.200 / 4.5e-3),
        # HA17555 p. 6 note 4.
        ("bipolar", "shortest_interval", 10e-6),
        # SLFS043C (TLC555): 10 pA; 0.14 V and 0.5 V at 10 mA.
        ("TLC555", "threshold_current_typical", 10e-12),
        ("TLC555", "discharge_resistance_typical", 14.0),
        ("TLC555", "discharge_resistance_limit", 50.0),
        # SNAS558J p. 4 (LMC555): 1 nA and 100 nA; 150 and 300 mV at 10 mA; 1.0 to 1.2 ms.
        ("LMC555", "discharge_leakage_limit", 100e-9),
        ("LMC555", "discharge_resistance_limit", 30.0),
        ("LMC555", "timing_error_limit", 0.1 / 1.1),
        # ICM7555 product specification p. 339; ICM7555/7556 p. 8-171.
        ("ICM7555", "threshold", 0.65),
        ("ICM7555", "discharge_leakage_limit", 10e-9),
        # TS555 p. 7.
        ("TS555", "timing_error_typical", 0.04),
        ("TS555", "astable_error_typical", 0.03),
        ("TS555", "temperature_drift_typical", 75e-6),
        ("TS555", "supply_drift_typical", 3.8e-3),
        ("TS555", "astable_supply_drift_typical", 1e-3),
        ("TS555", "highest_frequency", 2.7e6),
        ("TS555", "sink_current_limit", 50e-3),
        # SLFS022: astable error, drifts, trigger 5 V at 15 V; 100 mA: 13.3 V at 15 V.
        ("NE555", "trigger", 5.0 / 15.0),
        ("NE555", "astable_error_typical", 0.0225),
        ("NE555", "temperature_drift_typical", 50e-6),
        ("NE555", "astable_temperature_drift_typical", 150e-6),
        ("NE555", "supply_drift_limit", 5e-3),
        ("NE555", "astable_supply_drift_typical", 3e-3),
        ("NE555", "output_high_drop_limit", 15.0 - 13.3),
        ("NE555", "output_high_resistance", (13.3 - 12.5) / 0.1),
        ("NE555", "sink_current_limit", 0.2),
        ("SE555", "astable_error_typical", 0.015),
        ("SE555", "temperature_drift_limit", 100e-6),
        ("SE555", "astable_temperature_drift_typical", 90e-6),
        # NE/SA/SE555 product specification: 5 and 13 %, 6 % for SE; 150 and 500 ppm/C; 1 %/V.
        ("bipolar", "astable_error_typical", 0.05),
        ("NE555", "astable_error_limit", 0.13),
        ("SE555", "astable_error_limit", 0.06),
        ("NE555", "temperature_drift_limit", 150e-6),
        ("NE555", "astable_temperature_drift_limit", 500e-6),
        ("NE555", "astable_supply_drift_limit", 10e-3),
        # SNAS548C: 2.25 % as an astable.
        ("LM555", "astable_error_typical", 0.0225),
        # SLFS043C: 1 and 3 %; 0.1 and 0.5 %/V; 1.2 MHz; 4.8 V at 1 mA, 0.21 V at 8 mA, 5 V.
        ("TLC555", "astable_error_typical", 0.01),
        ("TLC555", "astable_error_limit", 0.03),
        ("TLC555", "supply_drift_typical", 1e-3),
        ("TLC555", "supply_drift_limit", 5e-3),
        ("TLC555", "highest_frequency", 1.2e6),
        ("TLC555", "output_high_resistance", 0.2 / 1e-3),
        ("TLC555", "output_low_resistance", 0.21 / 8e-3),
        ("TLC555", "sink_current_limit", 100e-3),
        ("TLC555", "source_current_limit", 10e-3),
        # SNAS558J p. 4: 75 ppm/C; 0.3 %/V; 3 MHz; 1.0 V at 50 mA and 11.3 V at 10 mA, 12 V.
        ("LMC555", "temperature_drift_typical", 75e-6),
        ("LMC555", "supply_drift_typical", 3e-3),
        ("LMC555", "highest_frequency", 3e6),
        ("LMC555", "output_high_resistance", 0.7 / 10e-3),
        ("LMC555", "output_low_resistance", 1.0 / 50e-3),
        # ICM7555 product specification p. 339; ICM7555/7556 p. 8-171: 0.4 V at 20 mA.
        ("ICM7555", "trigger", 0.31),
        ("ICM7555", "astable_error_limit", 0.05),
        ("ICM7555", "supply_drift_limit", 30e-3),
        ("ICM7555", "temperature_drift_typical", 100e-6),
        ("ICM7555", "highest_frequency", 500e3),
        ("ICM7555", "output_low_resistance", 0.4 / 20e-3),
        ("ICM7555", "sink_current_limit", 20e-3),
    ],
)
def test_figures_against_the_data_sheets(name, figure, expected):
    assert getattr(timer_named(name), figure) == pytest.approx(expected, rel=2e-3)


@pytest.mark.parametrize("typed", ["ne555", "NE555", " Ne555 "])
def test_names_in_any_case(typed):
    assert timer_named(typed).name == "NE555"


@pytest.mark.parametrize(
    ("typed", "meant"), [("NE556", "NE555"), ("bipolr", "bipolar"), ("TLC5555", "TLC555")]
)
def test_an_unknown_name_is_refused_with_the_nearest_and_all_known(typed, meant):
    with pytest.raises(UnknownNameError) as refused:
        timer_named(typed)
    text = str(refused.value)
    assert repr(typed) in text
    assert f"did you mean {meant}?" in text
    assert all(name in text for name in BUILT_IN)


def test_a_far_off_name_gets_no_guess():
    with pytest.raises(UnknownNameError, match="'xyzzy'") as refused:
        timer_named("xyzzy")
    assert "did you mean" not in str(refused.value)


def test_a_timer_cannot_be_changed():
    with pytest.raises(dataclasses.FrozenInstanceError):
        timer_named("NE555").threshold = 0.5


@pytest.mark.parametrize(
    ("name", "supply", "allowed"),
    [
        ("NE555", 4.5, True),
        ("NE555", 16.0, True),
        ("NE555", 4.4, False),
        ("NE555", 18.0, False),
        ("LMC555", 1.5, True),
        ("ideal", 230.0, True),
        ("ideal", 0.0, False),
        ("ideal", -5.0, False),
        ("ideal", inf, False),
        ("cmos", float("nan"), False),
    ],
)
def test_supply_range(name, supply, allowed):
    if allowed:
        check_supply(timer_named(name), supply)
        return
    with pytest.raises(BadRequestError, match=f"The timer {name} does not work at"):
        check_supply(timer_named(name), supply)


OWN = """
[low-power]
like = "TLC555"
title = "our low-power type"
threshold_current_limit = { value = 20e-12, source = "bench, one piece" }
timing_error_limit = 0.02

[low-power-2]
like = "low-power"
supply_max = 12
"""


def test_a_users_file_adds_types(tmp_path):
    file = tmp_path / "own.toml"
    file.write_text(OWN, encoding="utf-8")
    assert timer_names(file) == (*BUILT_IN, "low-power", "low-power-2")
    own = timer_named("LOW-POWER", file)
    model = timer_named("TLC555")
    assert own.title == "our low-power type"
    assert own.threshold_current_limit == 20e-12
    assert dict(own.sources)["threshold_current_limit"] == "bench, one piece"
    assert own.timing_error_limit == 0.02
    assert dict(own.sources)["timing_error_limit"] == ""
    assert own.discharge_leakage_limit == model.discharge_leakage_limit
    assert timer_named("low-power-2", file).supply_max == 12.0
    assert timer_named("NE555", file) == timer_named("NE555")
    assert timer_names() == BUILT_IN


def test_a_whole_type_without_a_model(tmp_path):
    file = tmp_path / "own.toml"
    figures = {key: getattr(timer_named("NE555"), key) for key in FIGURES}
    lines = "\n".join(f"{key} = {value!r}" for key, value in figures.items())
    file.write_text(f"[twin]\n{lines}\n", encoding="utf-8")
    twin = timer_named("twin", file)
    assert twin == dataclasses.replace(timer_named("NE555"), name="twin", title="twin")


OLD_KEYS = (
    "supply_min", "supply_max", "threshold", "threshold_current_typical",
    "threshold_current_limit", "discharge_leakage_typical", "discharge_leakage_limit",
    "discharge_resistance_typical", "discharge_resistance_limit", "discharge_current_limit",
    "timing_error_typical", "timing_error_limit", "shortest_interval",
)  # fmt: skip


@pytest.mark.parametrize(("model", "poorest"), [("ICM7555", "bipolar"), ("ideal", "ideal")])
def test_what_the_monostable_does_not_need_may_be_left_out(tmp_path, model, poorest):
    file = tmp_path / "own.toml"
    given = timer_named(model)
    lines = "\n".join(f"{key} = {getattr(given, key)!r}" for key in OLD_KEYS)
    ideal = f"\nideal = {str(given.ideal).lower()}"
    file.write_text(f"[short]\n{lines}{ideal}\n", encoding="utf-8")
    short = timer_named("short", file)
    assert all(getattr(short, key) == getattr(given, key) for key in OLD_KEYS)
    assert short.trigger == given.threshold / 2.0
    for row in ("typical", "limit"):
        assert getattr(short, f"astable_error_{row}") == getattr(given, f"timing_error_{row}")
        for drift in ("temperature_drift", "supply_drift"):
            fallen_back = getattr(timer_named(poorest), f"{drift}_{row}")
            assert getattr(short, f"{drift}_{row}") == fallen_back
            assert getattr(short, f"astable_{drift}_{row}") == fallen_back
    assert short.highest_frequency == (inf if given.ideal else 1.0 / given.shortest_interval)
    assert short.output_high_drop_typical == timer_named(poorest).output_high_drop_typical
    assert short.sink_current_limit == timer_named(poorest).sink_current_limit
    assert dict(short.sources)["trigger"] == "default: half of threshold"
    assert dict(short.sources)["sink_current_limit"] == f"default: as {poorest}"


@pytest.mark.parametrize("name", ["bipolar", "NE555", "SA555", "SE555", "LM555"])
def test_a_bipolar_output_fed_at_5_volt_may_not_reach_its_own_threshold(name):
    # SLFS022: 3.3 V typical at 100 mA and 5 V, below the threshold of 3.33 V: it stalls.
    timer = timer_named(name)
    assert 5.0 - timer.output_high_drop_limit < 5.0 * timer.threshold
    assert 5.0 - timer.output_high_drop_typical > 5.0 * timer.threshold


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("[x", "is not a TOML file"),
        ("x = 3", "3 is no table of figures"),
        ('[x]\nlike = "NE999"', "key like: 'NE999' is no timer known"),
        ("[x]\nlike = 5", "key like: 5 is no timer known"),
        ('[x]\nlike = "x"', "key like: 'x' is no timer known"),
        ("[x]\nsupply_min = 4", "the key supply_max is missing"),
        ('[x]\nlike = "cmos"\nsupply_mx = 4', "did you mean supply_max?"),
        ('[x]\nlike = "cmos"\nqwerty = 4', "'qwerty' is no key of a timer"),
        ('[x]\nlike = "cmos"\nsupply_max = "12 V"', "key supply_max: '12 V' is no number"),
        ('[x]\nlike = "cmos"\nsupply_max = true', "key supply_max: True is no number"),
        ('[x]\nlike = "cmos"\nsupply_max = [1]', "key supply_max: [1] is no number"),
        ('[x]\nlike = "cmos"\nsupply_max = { source = "a" }', "is no figure"),
        ('[x]\nlike = "cmos"\nsupply_max = { value = 5, unit = "V" }', "is no figure"),
        ('[x]\nlike = "cmos"\nsupply_max = { value = 5, source = 5 }', "is no figure"),
        ('[x]\nlike = "cmos"\nsupply_max = 0', "must be more than 0"),
        ('[x]\nlike = "cmos"\nsupply_max = -9', "must be 0 or more"),
        ('[x]\nlike = "cmos"\nsupply_max = nan', "must be 0 or more"),
        ('[x]\nlike = "cmos"\nthreshold = 1.5', "must be below 1, as a fraction"),
        ('[x]\nlike = "cmos"\ntiming_error_limit = 3', "(3 % is 0.03)"),
        ('[x]\nlike = "cmos"\ndischarge_resistance_limit = inf', "must be finite"),
        (f'[x]\nlike = "cmos"\nshortest_interval = 1{"0" * 400}', "must be finite"),
        (f'[x]\nlike = "cmos"\nshortest_interval = 1{"0" * 5000}', "is not a TOML file"),
        ('[x]\nlike = "cmos"\ntrigger = 0.7', "trigger (0.7) is not below threshold (0.666667)"),
        ('[x]\nlike = "cmos"\nastable_error_limit = 3', "(3 % is 0.03)"),
        ('[x]\nlike = "cmos"\nsource_current_limit = 0', "must be more than 0"),
        ('[x]\nlike = "ideal"\noutput_high_resistance = 8', "an ideal timer has no currents"),
        ('[x]\nlike = "cmos"\nsupply_min = 16', "supply_min (16) is above supply_max (15)"),
        (
            '[x]\nlike = "cmos"\ndischarge_leakage_typical = 1e-6',
            "discharge_leakage_typical (1e-06) is above discharge_leakage_limit (1e-07)",
        ),
        ('[x]\nlike = "cmos"\ntitle = 5', "key title: 5 is not a text"),
        ('[x]\nlike = "cmos"\nideal = "no"', "key ideal: 'no' is not true or false"),
        ('[x]\nlike = "ideal"\ntiming_error_limit = 0.1', "an ideal timer has no currents"),
        ('[ne555]\nlike = "cmos"', "there already is a timer of this name"),
        ('[a]\nlike = "cmos"\n[A]\nlike = "cmos"', "there already is a timer of this name"),
        ("x = " + "[" * 5000, "own.toml"),
    ],
)
def test_a_bad_file_is_refused_with_file_and_key(tmp_path, text, said):
    file = tmp_path / "own.toml"
    file.write_text(text, encoding="utf-8")
    with pytest.raises(BadRequestError) as refused:
        timer_named("NE555", file)
    message = str(refused.value)
    assert said in message
    assert "own.toml" in message
    assert message.endswith(".")
    assert "\n" not in message
    assert len(message) < 600


def test_unreadable_files_are_refused(tmp_path):
    binary = tmp_path / "binary.toml"
    binary.write_bytes(b"\xff\xfe\x00[x]")
    with pytest.raises(BadRequestError, match="is not UTF-8 text"):
        timer_names(binary)
    with pytest.raises(BadRequestError, match=r"There is no file .*none\.toml; check its name"):
        timer_names(tmp_path / "none.toml")
    with pytest.raises(BadRequestError, match="is not a plain file"):
        timer_names(tmp_path)
    with pytest.raises(BadRequestError, match="cannot be read"):
        timer_names(tmp_path / ("x" * 300))
    with pytest.raises(BadRequestError, match="cannot be read"):
        timer_names(tmp_path / "a\0b")


def test_a_pipe_is_not_waited_for(tmp_path):
    os.mkfifo(tmp_path / "pipe.toml")
    with pytest.raises(BadRequestError, match="is not a plain file"):
        timer_names(tmp_path / "pipe.toml")


@pytest.mark.parametrize(("size", "fits"), [(2**20, True), (2**20 + 1, False)])
def test_a_file_of_more_than_a_mebibyte_is_not_read(tmp_path, size, fits):
    file = tmp_path / "long.toml"
    file.write_bytes(b"#" * size)
    if fits:
        assert timer_names(file) == timer_names()
    else:
        with pytest.raises(BadRequestError, match="larger than 1 MiB"):
            timer_names(file)


@pytest.mark.parametrize(
    ("name", "said"),
    [
        ("foo", "'foo' is no timer that is known. Known are ideal, bipolar"),
        ("NE556", "'NE556' is no timer that is known; did you mean NE555? Known are ideal"),
    ],
)
def test_an_unknown_timer_is_refused_in_whole_sentences(name, said):
    with pytest.raises(UnknownNameError) as refused:
        timer_named(name)
    assert str(refused.value).startswith(said)


@given(st.text(max_size=200))
def test_any_text_is_read_or_refused(text):
    try:
        read = TIMERS.read(text, "own.toml", {})
    except BadRequestError as refused:
        assert "own.toml" in str(refused)  # noqa: PT017 - either way is right
    else:
        assert all(isinstance(timer, Timer) for timer in read.values())
