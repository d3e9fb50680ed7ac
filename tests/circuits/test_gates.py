"""The table of Schmitt inverters, its thresholds between the rows, and bad input."""

import dataclasses
from math import log

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.circuits.gates import (
    GATES,
    Gate,
    check_gate_supply,
    gate_named,
    gate_names,
    thresholds,
)
from chooser.errors import BadRequestError, UnknownNameError

BUILT_IN = ("74HC14", "74HCT14", "CD40106", "CD4093")


def period(upper, lower):
    """Period of the inverter oscillator over R C, from its thresholds as fractions."""
    return log((1.0 - lower) / (1.0 - upper)) + log(upper / lower)


def test_the_known_gates():
    assert gate_names() == BUILT_IN


@pytest.mark.parametrize("name", BUILT_IN)
def test_every_figure_has_a_source(name):
    gate = gate_named(name)
    sources = dict(gate.sources)
    assert set(sources) == set(GATES.keys) - {"number"}
    assert all(len(source) > 3 for source in sources.values())
    assert all(row.source for row in gate.thresholds)


@pytest.mark.parametrize(
    ("name", "supply", "expected", "tolerance"),
    [
        # Thresholds from memory; the periods that follow from them were worked out apart.
        ("74HC14", 4.5, 0.910614, 1e-6),
        ("74HC14", 2.0, 1.409934, 1e-6),
        ("74HC14", 6.0, 0.870247, 1e-6),
        ("CD40106", 5.0, 0.812322, 1e-6),
        ("CD40106", 10.0, 0.811278, 1e-6),
        ("CD40106", 15.0, 0.811548, 1e-6),
        ("CD4093", 5.0, 0.812322, 1e-6),
        # From memory: older sheets print about 0.67 R C for HCT and 0.8 R C for HC.
        ("74HCT14", 4.5, 0.67, 0.05),
        ("74HC14", 4.5, 0.8, 0.15),
    ],
)
def test_typical_periods(name, supply, expected, tolerance):
    at = thresholds(gate_named(name), supply)
    assert period(at.upper, at.lower) == pytest.approx(expected, rel=tolerance)


def test_the_longest_period_of_the_limits():
    # From memory: 3.15 and 0.90 V at 4.5 V; worked out apart.
    at = thresholds(gate_named("74HC14"), 4.5)
    assert period(at.upper_high, at.lower_low) == pytest.approx(2.233592, rel=1e-6)


def test_the_least_hysteresis_of_the_low_end():
    # From memory: 1.70 V with 0.4 V of hysteresis at 4.5 V; worked out apart.
    at = thresholds(gate_named("74HC14"), 4.5)
    low = period(at.upper_low, at.upper_low - at.hysteresis_low)
    assert low == pytest.approx(0.401795, rel=1e-5)


@pytest.mark.parametrize("name", BUILT_IN)
@pytest.mark.parametrize("share", [0.0, 0.2, 0.5, 0.8, 1.0])
def test_no_pair_within_the_limits_has_a_shorter_period_than_the_closest(name, share):
    gate = gate_named(name)
    at = thresholds(gate, gate.supply_min + share * (gate.supply_max - gate.supply_min))
    upper, lower = at.closest()
    assert at.upper_low - 1e-12 <= upper <= at.upper_high + 1e-12
    assert at.lower_low - 1e-12 <= lower <= at.lower_high + 1e-12
    steps = [step / 60 for step in range(61)]
    uppers = [at.upper_low + step * (at.upper_high - at.upper_low) for step in steps]
    lowers = [at.lower_low + step * (at.lower_high - at.lower_low) for step in steps]
    pairs = [(u, v) for u in uppers for v in lowers if u - v >= at.hysteresis_low]
    shortest = min(period(u, v) for u, v in pairs)
    assert period(upper, lower) <= shortest * (1.0 + 1e-9)
    assert period(upper, lower) >= 0.8 * shortest
    assert max(period(u, v) for u, v in pairs) == period(at.upper_high, at.lower_low)


def test_limits_that_cannot_meet_leave_their_own_gap():
    at = dataclasses.replace(thresholds(gate_named("74HC14"), 5.0), upper_low=0.50, lower_high=0.35)
    assert at.closest() == pytest.approx((0.50, 0.35))


def test_between_two_rows_the_volts_are_interpolated():
    gate = gate_named("CD40106")
    at = thresholds(gate, 7.5)
    assert at.upper == pytest.approx((2.9 + 5.9) / 2.0 / 7.5)
    assert at.lower_high == pytest.approx((2.8 + 5.2) / 2.0 / 7.5)


@pytest.mark.parametrize(("supply", "row"), [(3.0, 5.0), (4.9, 5.0), (15.1, 15.0), (18.0, 15.0)])
def test_beyond_the_rows_the_fractions_are_kept(supply, row):
    gate = gate_named("CD40106")
    beyond, at_row = thresholds(gate, supply), thresholds(gate, row)
    assert dataclasses.astuple(beyond) == pytest.approx(dataclasses.astuple(at_row))


@pytest.mark.parametrize("name", BUILT_IN)
@given(share=st.floats(0.0, 1.0))
def test_thresholds_are_in_order_at_any_supply(name, share):
    gate = gate_named(name)
    supply = min(gate.supply_min + share * (gate.supply_max - gate.supply_min), gate.supply_max)
    at = thresholds(gate, supply)
    assert 0.0 < at.lower_low < at.lower < at.lower_high < 1.0
    assert at.lower_low < at.upper_low < at.upper < at.upper_high < 1.0
    assert 0.0 < at.hysteresis_low < at.upper - at.lower


@pytest.mark.parametrize(
    ("name", "supply", "allowed"),
    [
        ("74HC14", 2.0, True),
        ("74HC14", 6.1, False),
        ("74HCT14", 3.3, False),
        ("CD40106", 12.0, True),
        ("CD4093", 0.0, False),
        ("CD4093", float("nan"), False),
    ],
)
def test_supply_range(name, supply, allowed):
    gate = gate_named(name)
    if allowed:
        check_gate_supply(gate, supply)
        return
    words = f"The gate {name} does not work at .* or another gate"
    with pytest.raises(BadRequestError, match=words):
        check_gate_supply(gate, supply)
    with pytest.raises(BadRequestError, match=words):
        thresholds(gate, supply)


@pytest.mark.parametrize(
    ("typed", "name"), [("74hc14", "74HC14"), ("40106", "CD40106"), (" cd4093 ", "CD4093")]
)
def test_names_in_any_case(typed, name):
    assert gate_named(typed).name == name


def test_an_unknown_name_is_refused_with_the_nearest():
    with pytest.raises(UnknownNameError, match=r"'CD40160' is no gate .* did you mean CD40106"):
        gate_named("CD40160")


ROW = (
    "supply = 5, upper_low = 2.2, upper = 2.9, upper_high = 3.6, "
    "lower_low = 0.9, lower = 1.9, lower_high = 2.8, hysteresis_low = 0.3"
)


def test_a_users_piece_with_its_own_thresholds(tmp_path):
    file = tmp_path / "own.toml"
    file.write_text(f'[ours]\nlike = "74HC14"\nthresholds = [{{ {ROW} }}]\n', encoding="utf-8")
    ours = gate_named("ours", file)
    assert thresholds(ours, 6.0).upper == pytest.approx(2.9 / 5.0)
    assert ours.smallest_resistor == gate_named("74HC14").smallest_resistor
    assert gate_names(file) == (*BUILT_IN, "ours")


@pytest.mark.parametrize(
    ("rows", "said"),
    [
        ("3", "3 is no list of rows"),
        ("[]", "[] is no list of rows"),
        ("[3]", "row 1: 3 is no row"),
        ("[{ supply = 5 }]", "row 1: upper_low is missing"),
        (f"[{{ {ROW}, middle = 2 }}]", "row 1: {'supply': 5"),
        (f"[{{ {ROW} }}, {{ {ROW} }}]", "the row at 5 V follows the one at 5 V"),
        (f"[{{ {ROW.replace('2.9', '-2.9')} }}]", "row 1, upper: -2.9 cannot be"),
        (f"[{{ {ROW.replace('2.9', 'true')} }}]", "row 1, upper: True is no number"),
        (f"[{{ {ROW}, source = 5 }}]", "row 1, source: 5 is not a text"),
        (f"[{{ {ROW.replace('2.9', '2.0')} }}]", "upper_low (2.2) is above upper (2)"),
        (f"[{{ {ROW.replace('3.6', '5.6')} }}]", "upper_high (5.6) is not below the supply"),
        (f"[{{ {ROW.replace('0.3', '1.3')} }}]", "is below hysteresis_low (1.3)"),
    ],
)
def test_bad_rows_are_refused_with_file_key_and_row(tmp_path, rows, said):
    file = tmp_path / "own.toml"
    file.write_text(f'[x]\nlike = "74HC14"\nthresholds = {rows}\n', encoding="utf-8")
    with pytest.raises(BadRequestError) as refused:
        gate_named("x", file)
    message = str(refused.value)
    assert said in message
    assert "own.toml [x], key thresholds" in message
    assert message.endswith(".")
    assert len(message) < 600


@given(st.text(max_size=200))
def test_any_text_is_read_or_refused(text):
    try:
        read = GATES.read(text, "own.toml", {})
    except BadRequestError as refused:
        assert "own.toml" in str(refused)  # noqa: PT017 - either way is right
    else:
        assert all(isinstance(gate, Gate) for gate in read.values())
