"""What people type into the slots of a circuit."""

from __future__ import annotations

from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.circuits.astable import astable
from chooser.circuits.monostable import monostable
from chooser.circuits.plain import resistance
from chooser.circuits.timers import timer_named
from chooser.cli.quick_entry import read_part
from chooser.cli.typed_parts import read_slot
from chooser.errors import BadRequestError, StockError
from chooser.networks import Group, Join, Leaf, members
from chooser.parts import Count, Holding, Kind, Part, Sureness, Tolerance

CIRCUIT = monostable(timer_named("bipolar"), 9.0)
TWIN = astable(timer_named("bipolar"), 9.0)
R, C = Kind.RESISTOR, Kind.CAPACITOR
STOCK = tuple(
    Holding(number, read_part(text), drawer, Count(5))
    for number, text, drawer in [
        (17, "10k 1% metal film", "A4"),
        (20, "22k 5%", "A5"),
        (61, "100u 25V electrolytic", "F2"),
        (70, "10k trimmer", "P1"),
    ]
)


def sym(fraction):
    return Tolerance(fraction, fraction)


def no_stock():
    raise AssertionError("the stock was read for nothing")


def parts(text, slot="R", circuit=CIRCUIT, stock=no_stock):
    return [each.part for each in members(read_slot(text, slot, circuit, stock))]


@pytest.mark.parametrize(
    ("slot", "text", "part"),
    [
        ("R", "820k", Part(R, 820e3, "820k")),
        ("R", " 820k 1% ", Part(R, 820e3, "820k", sym(0.01))),
        ("R", "4700", Part(R, 4700.0, "4700")),
        (
            "C",
            "100u 20% electrolytic 25V",
            Part(C, 1e-4, "100u", sym(0.2), "electrolytic", voltage=25.0),
        ),
        ("C", "100n measured 96n 2%", Part(C, 1e-7, "100n", measured=96e-9, meter=0.02)),
        ("C", "104", Part(C, 1e-7, "104")),
        ("C", "100u -20/+80%", Part(C, 1e-4, "100u", Tolerance(0.2, 0.8))),
        ("C", "100u +80/-20%", Part(C, 1e-4, "100u", Tolerance(0.2, 0.8))),
        ("R", "10k +-5%", Part(R, 10e3, "10k", sym(0.05))),
        ("R", "10k +/- 5 %", Part(R, 10e3, "10k", sym(0.05))),
    ],
)
def test_one_part(slot, text, part):
    network = read_slot(text, slot, CIRCUIT, no_stock)
    assert isinstance(network, Leaf)
    held = network.member
    assert held.part == part
    assert held.id < 0
    assert held.drawer == ""
    assert held.count == Count(0, Sureness.PLENTY)
    assert held.free is None


def test_an_expression_keeps_its_arrangement():
    network = read_slot("10k + (22k 1% || 47k)", "R", CIRCUIT, no_stock)
    assert isinstance(network, Group)
    assert network.join is Join.SERIES
    inner = network.children[1]
    assert isinstance(inner, Group)
    assert inner.join is Join.PARALLEL
    assert [each.part.value for each in members(network)] == [10e3, 22e3, 47e3]
    assert [each.part.tolerance for each in members(network)] == [None, sym(0.01), None]


def test_tolerances_with_a_plus_may_stand_in_an_expression():
    found = parts("(100u -20/+80% || 47u 10%) + 1u +-5%", "C")
    assert [part.tolerance for part in found] == [Tolerance(0.2, 0.8), sym(0.1), sym(0.05)]


def test_every_typed_part_has_an_id_of_its_own_in_the_whole_circuit():
    ids = [
        each.id
        for slot, text in (("RA", "10k + 10k + 10k"), ("RB", "10k || 22k"), ("C", "1u || 2u2"))
        for each in members(read_slot(text, slot, TWIN, no_stock))
    ]
    assert len(set(ids)) == len(ids)
    assert max(ids) < 0


def test_holdings_by_their_number():
    network = read_slot("#17 + (# 20 || 47k)", "R", CIRCUIT, stock)
    found = list(members(network))
    assert found[:2] == [STOCK[0], STOCK[1]]
    assert found[2].id < 0
    assert parts("#61", "C", stock=stock) == [STOCK[2].part]


def stock():
    return STOCK


def test_trouble_with_the_stock_passes_through():
    def failing():
        raise StockError("There is no stock yet.")

    with pytest.raises(StockError, match="no stock yet"):
        read_slot("#17", "R", CIRCUIT, failing)


@pytest.mark.parametrize(
    ("slot", "text", "words"),
    [
        ("C", "100", ["--C: '100' ", "10p or 100p"]),
        ("C", "1000", ["--C: '1000' has no unit", "1000p or 1000n"]),
        ("R", "lk5", ["--R: 'lk5' ", "perhaps 1k5"]),
        ("R", "10m + 4k7", ["--R '10m + 4k7': '10m'", "10M"]),
        ("R", "10kk", ["--R: '10kk' is not a resistance"]),
        ("R", "100n", ["--R: '100n' is a capacitance, not a resistance; are R and C swapped?"]),
        ("R", "10k + 100n 5%", ["--R '10k + 100n 5%': '100n' is a", "are R and C swapped?"]),
        ("C", "10k5", ["--C: '10k5' is a resistance, not", "are R and C swapped?"]),
        ("R", "", ["--R: '' holds no value"]),
        ("R", "10k + ", ["lacks a part between its signs"]),
        ("R", "(10k", ["lacks a closing bracket"]),
        ("R", "10k + 22k || 47k", ["without brackets", "(10k + 22k) || 47k"]),
        ("C", "1u -20/+80% || 2u + 3u", ["1u -20/+80% || (2u + 3u)"]),
        ("R", "10k measured 100k", ["far from the value 10k"]),
        ("R", "10k measured", ["without a figure"]),
        ("C", "100u 5% electrolitic", ["did you mean electrolytic"]),
        ("R", "10k pot", ["called a resistor and a pot"]),
        ("R", "#99", ["--R: '#99' is not in the stock", "chooser stock list"]),
        ("R", "10k + #99", ["--R '10k + #99': '#99' is not in the stock"]),
        ("R", "#1 7", ["is no holding", "#17"]),
        ("R", "#", ["is no holding"]),
        ("R", "#61", ["100u 25 V electrolytic capacitor, and no resistor"]),
        ("C", "#17", ["metal-film resistor, and no capacitor"]),
        ("R", "#70", ["10k trimmer", "the resistance that it is set to"]),
        ("R", "10k + " * 200 + "10k", ["1203 characters"]),
        ("R", "+".join(["1k"] * 60), ["more than 50 parts"]),
    ],
)
def test_what_is_wrong_is_said_in_one_sentence_with_the_slot(slot, text, words):
    with pytest.raises(BadRequestError) as refused:
        read_slot(text, slot, CIRCUIT, stock)
    said = str(refused.value)
    assert said.startswith(f"--{slot}")
    assert all(word in said for word in words), said
    assert "\n" not in said
    assert said.endswith((".", "?"))


def test_a_slot_alone_cannot_be_swapped_and_two_resistors_are_told_apart():
    for circuit, slot, says in (
        (resistance(), "R", "write it like 4k7"),
        (TWIN, "RB", "are RB and C swapped?"),
    ):
        with pytest.raises(BadRequestError, match="is a capacitance, not a resistance") as refused:
            read_slot("47u", slot, circuit, no_stock)
        assert says in str(refused.value)


@given(st.text() | st.text("0123456789.,kMRnupFVW% +-/±ohm#()|"))
def test_any_text_is_read_or_refused(text):
    for slot in ("R", "C"):
        with suppress(BadRequestError):  # any other error fails
            assert all(part.value > 0 for part in parts(text, slot, stock=stock))
