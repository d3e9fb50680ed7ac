"""Preferred numbers against IEC 60063, and kits."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import (
    AmbiguousValueError,
    BadRequestError,
    UnknownNameError,
    UnreadableValueError,
)
from chooser.parts import Kind
from chooser.preferred import (
    SERIES_NAMES,
    is_kit,
    nearest,
    parse_kit,
    series,
    values_between,
)
from chooser.quantities import format_capacitance, format_resistance, parse_resistance

# Source: IEC 60063, the tables of E24 and E96 as printed.
E24 = ("10 11 12 13 15 16 18 20 22 24 27 30 33 36 39 43 47 51 56 62 68 75 82 91", "E24")
E12 = ("10 12 15 18 22 27 33 39 47 56 68 82", "E12")
E6 = ("10 15 22 33 47 68", "E6")
E3 = ("10 22 47", "E3")
E96 = (
    (
        "100 102 105 107 110 113 115 118 121 124 127 130 133 137 140 143 147 150 154 158 162 165 "
        "169 174 178 182 187 191 196 200 205 210 215 221 226 232 237 243 249 255 261 267 274 280 "
        "287 294 301 309 316 324 332 340 348 357 365 374 383 392 402 412 422 432 442 453 464 475 "
        "487 499 511 523 536 549 562 576 590 604 619 634 649 665 681 698 715 732 750 768 787 806 "
        "825 845 866 887 909 931 953 976"
    ),
    "E96",
)


@pytest.mark.parametrize(("printed", "name"), [E3, E6, E12, E24, E96])
def test_the_series_are_the_printed_ones(printed, name):
    assert series(name) == tuple(map(int, printed.split()))


def test_each_series_has_as_many_numbers_as_its_name_says():
    for name in SERIES_NAMES:
        numbers = series(name)
        assert len(numbers) == len(set(numbers)) == int(name[1:])
        assert list(numbers) == sorted(numbers)


def test_e48_is_every_second_of_e96_and_e96_every_second_of_e192():
    # Source: the nesting of IEC 60063.
    assert series("E48") == series("E96")[::2]
    assert series("E96") == series("E192")[::2]


def test_e24_departs_from_the_formula_in_eight_places():
    # Computed from 10 x 10^(k/24); the table is IEC 60063.
    formula = [round(10 * 10 ** (k / 24)) for k in range(24)]
    departures = {n for n, f in zip(series("E24"), formula, strict=True) if n != f}
    assert departures == {27, 30, 33, 36, 39, 43, 47, 82}


def test_e192_departs_from_the_formula_at_920_only():
    # 920 instead of 919: from memory; the rest computed from 100 x 10^(k/192).
    formula = [round(100 * 10 ** (k / 192)) for k in range(192)]
    departures = [(f, n) for n, f in zip(series("E192"), formula, strict=True) if n != f]
    assert departures == [(919, 920)]


def test_e24_and_e96_share_only_a_few_numbers():
    # Computed from both tables of IEC 60063.
    shared = {n for n in series("E24") if 10 * n in series("E96")}
    assert shared == {10, 11, 13, 15, 20, 75}
    assert {n for n in series("E24") if 10 * n in series("E192")} - shared == {12, 16, 18, 24, 47}


@pytest.mark.parametrize("name", ["E10", "", "12", "E", "E 12 kits", "x" * 1000])
def test_an_unknown_series_is_refused_with_the_known_ones(name):
    with pytest.raises(UnknownNameError, match="E3, E6, E12, E24, E48, E96, E192"):
        series(name)


def test_values_are_the_floats_of_their_decimal_text():
    assert values_between("E3", 4.7e-9, 1e-7) == [4.7e-9, 1e-8, 2.2e-8, 4.7e-8, 1e-7]
    assert values_between("e12", 10, 47) == [10, 12, 15, 18, 22, 27, 33, 39, 47]
    assert values_between("E96", 976, 1020) == [976, 1000, 1020]
    assert values_between("E12", 101, 102) == []


@pytest.mark.parametrize("ends", [(2, 1), (0, 1), (-1, 1), (1, float("inf")), (float("nan"), 1)])
def test_impossible_ends_are_refused(ends):
    with pytest.raises(BadRequestError):
        values_between("E12", *ends)


@pytest.mark.parametrize(
    ("name", "value", "expected"),
    [
        ("E12", 5000, 4700),
        ("E12", 9.9, 10),
        ("E12", 9000, 8200),
        ("E12", 9100, 10000),  # 82 x 100 = 90.55 squared: the border is a ratio, not a middle
        ("E24", 49, 51),
        ("E96", 4683, 4640),
        ("E3", 1e-7, 1e-7),
        ("E6", 99e-9, 100e-9),
    ],
)
def test_the_nearest_value_has_the_smallest_ratio(name, value, expected):
    assert nearest(name, value) == expected


@given(st.sampled_from(SERIES_NAMES), st.floats(1e-12, 1e9))
def test_nothing_in_the_series_is_nearer_than_the_nearest(name, value):
    def ratio(other):
        return max(Fraction(other), Fraction(value)) / min(Fraction(other), Fraction(value))

    found = ratio(nearest(name, value))
    assert all(found <= ratio(other) for other in values_between(name, value / 11, value * 11))


@pytest.mark.parametrize("value", [0.0, -1.0, float("inf"), float("nan")])
def test_nothing_is_nearest_to_what_no_part_has(value):
    with pytest.raises(BadRequestError):
        nearest("E12", value)


@pytest.mark.parametrize("name", ["E24", "E96"])
def test_every_value_of_every_decade_is_written_and_read_back(name):
    for ohm in values_between(name, 0.1, 10e6):
        assert parse_resistance(format_resistance(ohm)) == ohm
        assert nearest(name, ohm) == ohm


def test_a_kit_lists_its_values():
    kit = parse_kit("E12 10..1M", Kind.RESISTOR)
    assert len(kit) == 61  # five decades of twelve, and 1M itself
    assert kit[0] == 10
    assert kit[-1] == 1e6
    assert kit[:13] == (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82, 100)
    written = [format_capacitance(farad) for farad in parse_kit("E3 1n..1u", Kind.CAPACITOR)]
    assert written == ["1n", "2n2", "4n7", "10n", "22n", "47n", "100n", "220n", "470n", "1u"]


@pytest.mark.parametrize("text", ["e24 1k..2k", "E24, 1k..2k", " E24: 1k .. 2k ", "E24 1k to 2k"])
def test_a_kit_may_be_written_in_several_ways(text):
    assert is_kit(text)
    expected = (1000, 1100, 1200, 1300, 1500, 1600, 1800, 2000)
    assert parse_kit(text, Kind.TRIMMER) == expected


@pytest.mark.parametrize(
    ("text", "kind", "words"),
    [
        ("E10 10..1M", Kind.RESISTOR, "E3, E6, E12"),
        ("E12", Kind.RESISTOR, "E12 10..1M"),
        ("E12 10", Kind.RESISTOR, "10..1M"),
        ("E12 1M..10", Kind.RESISTOR, "backwards"),
        ("E12 101..102", Kind.RESISTOR, "widen"),
        ("E6 1k..10k", Kind.CAPACITOR, "capacitance"),
        ("10..1M", Kind.RESISTOR, "not a kit"),
        ("E12 0..1M", Kind.RESISTOR, "zero"),
    ],
)
def test_a_bad_kit_is_refused_with_what_to_do(text, kind, words):
    with pytest.raises(UnreadableValueError, match=words):
        parse_kit(text, kind)


@pytest.mark.parametrize(
    ("text", "kind"), [("E12 10m..1M", Kind.RESISTOR), ("E6 1..100n", Kind.CAPACITOR)]
)
def test_a_kit_with_a_doubtful_end_is_refused_with_its_readings(text, kind):
    with pytest.raises(AmbiguousValueError):
        parse_kit(text, kind)


@pytest.mark.parametrize("text", ["4k7", "E12", "104", "10..1M", "", "E-12 1..2", "1E3"])
def test_other_texts_do_not_look_like_kits(text):
    assert not is_kit(text)


@given(
    st.text() | st.from_regex(r"E(12|24|96) [0-9kMpnu.,]{1,6}(\.\.|-| to )[0-9kMpnu.,]{1,6}"),
    st.sampled_from(Kind),
)
def test_any_text_is_a_kit_or_refused(text, kind):
    try:
        values = parse_kit(text, kind)
    except UnreadableValueError as error:
        assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
    else:
        assert values
        assert list(values) == sorted(set(values))
    is_kit(text)
