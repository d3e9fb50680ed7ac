"""Published worked examples, tables of data sheets and errors in print, family by family."""

import tomllib
from dataclasses import replace
from math import inf, log
from pathlib import Path

import pytest

from chooser.circuits.astable import astable
from chooser.circuits.circuit import outputs_of
from chooser.circuits.counter import counter
from chooser.circuits.counters import check_ratio, counter_named
from chooser.circuits.delay import delay
from chooser.circuits.diodes import diode_named
from chooser.circuits.gates import gate_named
from chooser.circuits.leakage import leak_conductance
from chooser.circuits.logic_monostable import logic_monostable
from chooser.circuits.monostable import monostable
from chooser.circuits.one_shots import one_shot_named
from chooser.circuits.output_fed import output_fed
from chooser.circuits.schmitt import schmitt
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.parts import Kind, Part, Tolerance

FOLDER = Path(__file__).parent.parent / "published"
FILES = {
    file.stem: tomllib.loads(file.read_text(encoding="utf-8")) for file in FOLDER.glob("*.toml")
}
PUBLISHED = FILES["families"]
LN2 = log(2.0)


def rows(name):
    return pytest.mark.parametrize("row", PUBLISHED[name])


def test_there_are_enough_of_them_and_each_says_where_it_is_from():
    printed = [
        row for file in FILES.values() for table in file.values() for row in table
        if "printed" in row or "typical" in row
    ]  # fmt: skip
    assert len(printed) >= 25
    assert all(len(row["source"]) > 3 for row in printed)


def divided(device, division, supply=5.0):
    """A counter of whose outputs only one may be used; its oscillator alone for 1."""
    chip = counter_named(device)
    if division == 1:
        return counter(chip, supply), 1.0
    circuit = counter(chip, supply, (check_ratio(chip, division),), whole_period=True)
    return circuit, circuit.variants[0].scale


# Worked examples ---------------------------------------------------------------------------------


@rows("counter")
def test_oscillators_and_dividers(row):
    circuit, scale = divided(row["device"], row["division"])
    period = scale * float(circuit.law.interval(row["r"], row["c"], 0.0))
    found, exact = (1.0 / period, "frequency") if "frequency" in row else (period, "period")
    assert found == pytest.approx(row[exact], rel=2e-6)
    assert found == pytest.approx(row["printed"], rel=row["rounding"])


@rows("one_shot")
def test_one_shots(row):
    circuit = logic_monostable(one_shot_named(row["device"]), row["supply"])
    time = float(circuit.law.interval(row["r"], row["c"], 0.0))
    assert time == pytest.approx(row["interval"], rel=1e-5)
    assert time == pytest.approx(row["printed"], rel=row["rounding"])
    assert float(circuit.law.resistance(time, row["c"], 0.0)) == pytest.approx(row["r"], rel=1e-9)


@rows("output_fed")
def test_the_half_duty_mode(row):
    circuit = output_fed(timer_named("ideal"), 5.0)
    times = circuit.typical.times((row["r"],), row["c"], 0.0)
    found = outputs_of(circuit, [float(time) for time in times])
    assert found["frequency"] == pytest.approx(row["frequency"], rel=1e-6)
    assert found["frequency"] == pytest.approx(row["printed"], rel=row["rounding"])
    assert found["duty"] == pytest.approx(0.5, rel=1e-12)


# Equations ---------------------------------------------------------------------------------------


@rows("diode_factor")
@pytest.mark.parametrize("timer", ["ideal", "TLC555"])
@pytest.mark.parametrize("both", [False, True])
def test_a_constant_drop_and_the_supply(row, timer, both):
    diode = diode_named(f"{row['drop']}V")
    near = 1e-6 if timer == "ideal" else 1e-3  # its switch and its nanoampere
    for supply, factor, longer in zip(row["supply"], row["factor"], row["longer"], strict=True):
        circuit = steered(timer_named(timer), supply, diode, both=both)
        high, low = (float(t) for t in circuit.typical.times((1e5, 1e5), 1e-6, 0.0))
        assert high == pytest.approx(0.1 * factor, rel=near)
        assert high / (0.1 * LN2) - 1.0 == pytest.approx(longer, abs=6e-4)
        assert low == pytest.approx(0.1 * (factor if both else LN2), rel=near)


@rows("output_levels")
def test_real_output_levels(row):
    supply = row["supply"]
    timer = replace(
        timer_named("NE555"),
        output_high_drop_typical=supply - row["high_level"],
        output_low_typical=row["low_level"],
        output_high_resistance=0.0,
        output_low_resistance=0.0,
        threshold_current_typical=0.0,
    )
    circuit = output_fed(timer, supply)
    times = [float(time) for time in circuit.typical.times((1e5,), 1e-6, 0.0)]
    found = outputs_of(circuit, times)
    assert found["period"] == pytest.approx(0.1 * row["period"], rel=3e-6)
    assert found["duty"] == pytest.approx(row["duty"], abs=5e-4)


@rows("schmitt")
def test_schmitt_oscillators(row):
    gate = gate_named(row["device"])
    for supply, factor in zip(row["supply"], row["factor"], strict=True):
        period = float(schmitt(gate, supply).law.interval(1e5, 1e-6, 0.0))
        assert period == pytest.approx(0.1 * factor, rel=row["tolerance"])


@rows("schmitt_limits")
def test_how_far_schmitt_inverters_scatter(row):
    circuit = schmitt(gate_named(row["device"]), row["supply"])
    # 100 Mohm, so that the output's resistance does not count; corners without input current.
    factors = [
        float(law.interval(1e8, 1e-6, 0.0)) / 100.0
        for law in circuit.corners
        if law.phases[0].leak_current == 0.0
    ]
    longest, shortest = max(factors), min(factors)
    assert longest == pytest.approx(row["longest"], rel=row["tolerance"])
    assert shortest <= row["shortest"] * 1.001
    assert shortest == pytest.approx(row["shortest"], rel=row["tolerance"])


@rows("delay")
def test_delays(row):
    for fraction, time in zip(row["fraction"], row["time"], strict=True):
        law = delay(5.0, fraction, Tolerance(0.0, 0.0)).law
        assert float(law.interval(1e5, 1e-6, 0.0)) == pytest.approx(0.1 * time, rel=1e-6)


# Tables and the bench ----------------------------------------------------------------------------


@rows("maker_table")
def test_every_row_of_a_makers_table_is_within_the_limits(row):
    for place, supply in enumerate((5.0, 10.0, 15.0)):
        circuit = logic_monostable(one_shot_named(row["device"]), supply)
        rule = float(circuit.law.interval(100e3, row["c"], 0.0))
        low, high = rule * (1.0 - circuit.error.minus), rule * (1.0 + circuit.error.plus)
        assert low <= row["typical"][place] <= high
        if supply == 5.0 and "limits" in row:
            assert low <= row["limits"][0] * (1.0 + 1e-9)
            assert row["limits"][1] * (1.0 - 1e-9) <= high


@rows("measured")
def test_pieces_on_the_bench_are_within_the_limits_of_the_rule(row):
    circuit, scale = divided(row["device"], row["division"])
    share = 1.0 / (row["frequency"] * scale * float(circuit.law.interval(row["r"], row["c"], 0.0)))
    assert -circuit.error.minus <= share - 1.0 <= circuit.error.plus


# In print, and wrong -----------------------------------------------------------------------------


def built(row):
    """The circuit of a row, and the scale of its output."""
    if row["family"] == "counter":
        return divided(row["device"], row["division"])
    if row["family"] == "logic-monostable":
        return logic_monostable(one_shot_named(row["device"]), 10.0), 1.0
    family = monostable if row["family"] == "monostable" else astable
    return family(timer_named(row["device"]), 5.0), 1.0


@rows("wrong")
def test_errors_in_print_are_not_reproduced(row):
    circuit, scale = built(row)
    times = [scale * float(time) for time in circuit.typical.times(row["rs"], row["c"], 0.0)]
    found = outputs_of(circuit, times)
    if row["family"] == "counter":
        found = {"period": times[0], "frequency": 1.0 / times[0]}
    assert found[row["output"]] == pytest.approx(row["exact"], rel=2e-5)
    assert row["printed"] / found[row["output"]] == pytest.approx(row["off"], rel=2e-3)
    # A chip that is as far off as its limits allow still does not do what is printed.
    slack = max(circuit.error.plus, circuit.error.minus)
    assert not 1.0 - slack <= row["printed"] / found[row["output"]] <= 1.0 + slack


def test_where_a_formula_is_wrong_the_circuit_says_that_it_is_out_of_range():
    # SLFS043C p. 9; thread 969400; HEF4047B p. 8 and memory: each below what the rule holds for.
    fast = astable(timer_named("TLC555"), 5.0)
    assert sum(float(t) for t in fast.typical.times((470.0, 200.0), 200e-12, 0.0)) < fast.shortest
    assert divided("CD4060B", 1)[0].least_farad > 200e-12
    assert logic_monostable(one_shot_named("4047"), 10.0).least_farad > 10e-12


def test_pin_3_of_a_4060_is_the_last_stage():
    # 74HC4060 Rev. 03 section 1, and thread 643227, which divides it by 1024.
    chip = counter_named("HEF4060B")
    assert {output.pin: output.ratio for output in chip.outputs}[3] == 16384
    assert check_ratio(chip, 1024).pin != 3


@rows("never_ends")
def test_an_hour_by_the_formula_that_no_capacitor_makes(row):
    parts = ((row["ra"], row["rb"]), row["c"])
    plain = [float(t) for t in astable(timer_named("ideal"), 5.0).typical.times(*parts, 0.0)]
    assert sum(plain) == pytest.approx(row["period"], rel=2e-5)
    electrolytic = Part(Kind.CAPACITOR, row["c"], technology="electrolytic", voltage=6.3)
    leak = leak_conductance(electrolytic, row["supply"])
    law = astable(timer_named("NE555"), row["supply"]).typical
    assert float(law.times(*parts, leak.typical)[0]) == inf
    assert law.trip_ratio(row["ra"] + row["rb"], leak.typical) < 1.0
