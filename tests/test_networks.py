"""Networks: values against hand calculation, and the laws that every network obeys."""

from __future__ import annotations

import math
from fractions import Fraction
from itertools import product

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.networks import (
    DEEPEST_BRACKETS,
    Group,
    Join,
    Leaf,
    adding_join,
    canonical,
    members,
    parse_network,
    replace,
    shares_of,
    slot_tolerance,
    tolerance_shares,
    value_of,
    write_network,
)
from chooser.parts import Kind, Tolerance
from chooser.quantities import parse_resistance

# Trees are slow to draw; a few dozen of them meet every shape of six parts.
few = settings(max_examples=40, deadline=None)

VALUES = st.fractions(min_value=Fraction(1, 1000), max_value=1000, max_denominator=1000)
JOINS = st.sampled_from(list(Join))


def trees(leaf):
    def grouped(children):
        return st.builds(
            lambda join, inside: Group(join, tuple(inside)),
            JOINS,
            st.lists(children, min_size=2, max_size=4),
        )

    return st.recursive(st.builds(Leaf, leaf), grouped, max_leaves=6)


NETWORKS = trees(VALUES)


def worth(network, adds=Join.SERIES):
    return value_of(network, adds, lambda value: value)


def same(value):
    return value


def read(text):
    return parse_network(text, float)


# Values --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "ohm"),
    [
        # By hand, from Ohm's and Kirchhoff's laws.
        ("10", Fraction(10)),
        ("10 + 20", Fraction(30)),
        ("10 || 10", Fraction(5)),
        ("10 || 20 || 20", Fraction(5)),
        ("10 + (22 || 47)", 10 + Fraction(22 * 47, 69)),
        ("(10 + 22) || (47 + 1)", Fraction(32 * 48, 80)),
        ("100 || (220 + 470)", Fraction(6900, 79)),
    ],
)
def test_values_by_hand(text, ohm):
    network = parse_network(text, Fraction)
    assert worth(network) == ohm
    # Duality: capacitors side by side add, so swapping the signs gives the same numbers.
    assert worth(swapped(network), Join.PARALLEL) == ohm


def swapped(network):
    if isinstance(network, Leaf):
        return network
    return Group(network.join.dual, tuple(swapped(child) for child in network.children))


def test_what_adds_by_kind():
    assert adding_join(Kind.CAPACITOR) is Join.PARALLEL
    assert {adding_join(kind) for kind in (Kind.RESISTOR, Kind.POT, Kind.TRIMMER)} == {Join.SERIES}


def test_nothing_beside_something_shorts_it():
    """A leak of zero in a series chain of leaks: no current flows at all."""
    assert value_of(read("0 + 5"), Join.PARALLEL, same) == 0
    assert value_of(read("0 || 5"), Join.PARALLEL, same) == 5


# Laws ----------------------------------------------------------------------------------------


@few
@given(NETWORKS, VALUES, JOINS)
def test_values_scale_with_their_parts(network, factor, adds):
    scaled = replace(network, lambda value: value * factor)
    assert worth(scaled, adds) == factor * worth(network, adds)


@few
@given(NETWORKS, JOINS, st.data())
def test_a_larger_part_makes_a_larger_network(network, adds, data):
    grown = data.draw(st.integers(0, sum(1 for _ in members(network)) - 1))
    places = iter(range(100))
    larger = replace(network, lambda value: value + (1 if next(places) == grown else 0))
    assert worth(larger, adds) > worth(network, adds)


@few
@given(NETWORKS, JOINS)
def test_the_dual_network_of_reciprocals_has_the_reciprocal_value(network, adds):
    dual = swapped(replace(network, lambda value: 1 / value))
    assert worth(dual, adds) == 1 / worth(network, adds)


@few
@given(NETWORKS, JOINS)
def test_shares_are_positive_and_sum_to_one(network, adds):
    shares = shares_of(network, adds, same)
    assert [member for member, _ in shares] == list(members(network))
    assert all(share > 0 for _, share in shares)
    assert sum(share for _, share in shares) == pytest.approx(1.0, abs=1e-12)


@few
@given(NETWORKS, JOINS)
def test_shares_are_the_relative_slopes(network, adds):
    """Against the difference quotient of each part in turn."""
    step = Fraction(1, 10**9)
    whole = worth(network, adds)
    for place, (_, share) in enumerate(shares_of(network, adds, same)):
        places = iter(range(100))
        moved = replace(network, lambda x: x * (1 + step) if next(places) == place else x)  # noqa: B023
        assert float((worth(moved, adds) / whole - 1) / step) == pytest.approx(share, abs=1e-8)


@few
@given(NETWORKS, JOINS, VALUES, VALUES)
def test_equal_tolerances_give_exactly_that_tolerance(network, adds, minus, plus):
    limits = Tolerance(minus / 1001, plus / 100)
    found = slot_tolerance(network, adds, same, lambda _: limits)
    assert found.low == found.value * (1 - limits.minus)
    assert found.high == found.value * (1 + limits.plus)
    assert found.spread == pytest.approx(limits.spread)
    assert found.shift == pytest.approx(float(limits.shift))


@few
@given(trees(st.tuples(VALUES, st.floats(0, 0.5), st.floats(0, 0.5))), JOINS)
def test_no_corner_lies_outside_low_and_high(network, adds):
    found = slot_tolerance(
        network, adds, lambda part: float(part[0]), lambda part: Tolerance(part[1], part[2])
    )
    places = sum(1 for _ in members(network))
    for ends in product((0, 1), repeat=min(places, 6)):
        signs = iter((*ends, *ends))
        corner = value_of(
            replace(network, lambda p: float(p[0]) * (1 + p[2] if next(signs) else 1 - p[1])),  # noqa: B023
            adds,
            same,
        )
        assert found.low * (1 - 1e-12) <= corner <= found.high * (1 + 1e-12)


# Tolerances ----------------------------------------------------------------------------------


def tolerances_of(text, tolerance):
    return slot_tolerance(read(text), Join.SERIES, same, tolerance.__getitem__)


def test_series_of_unequal_tolerances():
    """By hand: 100k 1 % + 10k 5 % is (1 + 0.5) / 110 = 1.36364 % in the worst case."""
    found = tolerances_of(
        "100e3 + 10e3", {100e3: Tolerance(0.01, 0.01), 10e3: Tolerance(0.05, 0.05)}
    )
    assert found.value == 110e3
    assert found.high / found.value - 1 == pytest.approx(0.0136364, abs=5e-8)
    assert 1 - found.low / found.value == pytest.approx(0.0136364, abs=5e-8)
    # The parts err together: the uniform law of the worst case, not the root of the squares.
    assert found.spread == pytest.approx(0.0136364 / math.sqrt(3), abs=5e-8)


def test_parallel_of_unequal_tolerances():
    """By hand: 100k 1 % || 1M 5 % is between 1/(1/99k + 1/950k) and 1/(1/101k + 1/1.05M)."""
    limits = {100e3: Tolerance(0.01, 0.01), 1e6: Tolerance(0.05, 0.05)}
    found = tolerances_of("100e3 || 1e6", limits)
    assert found.low / found.value - 1 == pytest.approx(-0.0137750, abs=5e-8)
    assert found.high / found.value - 1 == pytest.approx(0.0135100, abs=5e-8)
    assert found.spread == pytest.approx(0.0136364 / math.sqrt(3), abs=5e-8)


def test_series_capacitors_share_by_their_reciprocals():
    """By hand: of 10 uF + 22 uF the smaller holds 22/32 of the energy (8.25 V of 12 V)."""
    shares = dict(shares_of(read("10e-6 + 22e-6"), Join.PARALLEL, same))
    assert shares[10e-6] == pytest.approx(8.25 / 12)
    assert shares[22e-6] == pytest.approx(3.75 / 12)
    assert value_of(read("10e-6 + 22e-6"), Join.PARALLEL, same) == pytest.approx(6.875e-6)


def test_lopsided_tolerances_shift_the_mean():
    """-20/+80 % is uniform from 0.8 to 1.8: mean 1.3, one sigma 1/sqrt(12)."""
    found = slot_tolerance(Leaf(1e-6), Join.PARALLEL, same, lambda _: Tolerance(0.2, 0.8))
    assert found.shift == pytest.approx(0.3)
    assert found.spread == pytest.approx(1 / math.sqrt(12))


# Canonical form ------------------------------------------------------------------------------


def shuffled(network, rnd):
    """The same network, written otherwise: groups shuffled, and some bracketed once more."""
    if isinstance(network, Leaf):
        return network
    children = [shuffled(child, rnd) for child in network.children]
    rnd.shuffle(children)
    if len(children) > 2 and rnd.random() < 0.5:
        children = [Group(network.join, tuple(children[:2])), *children[2:]]
    return Group(network.join, tuple(children))


@few
@given(NETWORKS, st.randoms(use_true_random=False))
def test_canonical_form_does_not_depend_on_the_order(network, rnd):
    form = canonical(network, same)
    assert canonical(shuffled(network, rnd), same) == form
    assert canonical(form, same) == form
    assert worth(form) == worth(network)
    assert sorted(members(form)) == sorted(members(network))


def joins_nested_alike(network):
    if isinstance(network, Leaf):
        return False
    inner = [child for child in network.children if isinstance(child, Group)]
    return any(child.join is network.join or joins_nested_alike(child) for child in inner)


@few
@given(NETWORKS)
def test_canonical_form_has_no_brackets_to_spare(network):
    assert not joins_nested_alike(canonical(network, same))


def test_canonical_form_puts_single_parts_first():
    network = read("(5 || 7) + 9 + 3")
    assert write_network(canonical(network, same), lambda x: f"{x:g}") == "3 + 9 + (5 || 7)"


# Writing and reading -------------------------------------------------------------------------


@few
@given(trees(st.integers(1, 10**9)))
def test_reading_what_was_written(network):
    assert parse_network(write_network(network, str), int) == network


@few
@given(trees(st.integers(1, 10**9)))
def test_blanks_do_not_matter(network):
    text = write_network(network, str)
    assert parse_network(text.replace(" ", ""), int) == network
    assert parse_network(f"  ( {text.replace(' ', '   ')} )\t", int) == network


def test_values_are_read_by_the_gate():
    network = parse_network("4k7 + (10 k || 2M2)", parse_resistance)
    assert list(members(network)) == [4700.0, 10e3, 2.2e6]


@pytest.mark.parametrize(
    ("text", "readings"),
    [
        ("1 + 2 || 3", ("1 + (2 || 3)", "(1 + 2) || 3")),
        ("1 || 2 + 3", ("(1 || 2) + 3", "1 || (2 + 3)")),
        ("1 + 2 || 3 + 4", ("1 + (2 || 3) + 4", "(1 + 2) || (3 + 4)")),
        ("(1 || 9) + 2 || 3", ("(1 || 9) + (2 || 3)", "((1 || 9) + 2) || 3")),
    ],
)
def test_mixed_signs_without_brackets_are_refused_with_both_readings(text, readings):
    with pytest.raises(AmbiguousValueError) as refusal:
        read(text)
    assert refusal.value.readings == readings
    assert len({worth(read(reading)) for reading in readings}) == 2
    assert all(reading in str(refusal.value) for reading in readings)


def test_mixed_signs_inside_brackets_are_refused_too():
    with pytest.raises(AmbiguousValueError):
        read("5 + (1 + 2 || 3)")


NONSENSE = ("", " ", "+", "1 +", "+ 1", "1 | 2", "1 ||| 2", "(1", "1)", "()", "(1) 2", "1 + (2")
TOO_DEEP = "(" * (DEEPEST_BRACKETS + 1) + "1" + ")" * (DEEPEST_BRACKETS + 1)


@pytest.mark.parametrize("text", [*NONSENSE, "1 + + 2", TOO_DEEP, "(" * 10_000])
def test_what_is_no_network_is_refused_in_a_sentence(text):
    with pytest.raises(UnreadableValueError) as refusal:
        read(text)
    assert str(refusal.value).endswith(".")


@few
@given(st.text() | st.text(alphabet="1k4 +|()"))
def test_any_text_is_read_or_refused(text):
    try:
        network = parse_network(text, parse_resistance)
    except UnreadableValueError:
        return
    assert worth(network) > 0


def test_a_long_row_is_no_burden():
    assert worth(parse_network(" + ".join(["1"] * 20_000), int)) == 20_000


def test_each_part_has_its_share_of_the_worst_case_and_of_the_spread():
    """100k 1 % + 10k 5 %, field arithmetic by hand: 10/11 x 1 % + 1/11 x 5 % = 1.36364 %."""
    network = Group(Join.SERIES, (Leaf((100e3, 0.01)), Leaf((10e3, 0.05))))
    parts = tolerance_shares(
        network, Join.SERIES, lambda part: part[0], lambda part: Tolerance(part[1], part[1])
    )
    assert [part.plus for part in parts] == pytest.approx([0.01 / 1.1, 0.005 / 1.1])
    assert sum(part.minus for part in parts) == pytest.approx(0.0136364, abs=5e-8)
    assert parts[0].spread == pytest.approx(0.01 / 1.1 / 3**0.5)
    assert all(part.shift == 0 for part in parts)
