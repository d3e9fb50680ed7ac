"""Counts, packs, turns, prices and temperature coefficients of a stock sheet."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.parts import Count, Sureness
from chooser.quantities import (
    format_count,
    format_tempco,
    parse_count,
    parse_pack,
    parse_price,
    parse_tempco,
    parse_turns,
)


@pytest.mark.parametrize(
    ("text", "count"),
    [
        ("20", Count(20)),
        ("0", Count(0)),
        ("20.0", Count(20)),
        ("20,0", Count(20)),
        ("20 pcs", Count(20)),
        ("20pcs.", Count(20)),
        ("20 pieces", Count(20)),
        ("~50", Count(50, Sureness.ROUGH)),
        ("~ 50", Count(50, Sureness.ROUGH)),
        ("about 50", Count(50, Sureness.ROUGH)),
        ("ca. 50 pcs", Count(50, Sureness.ROUGH)),
        ("≈50", Count(50, Sureness.ROUGH)),
        ("plenty", Count(0, Sureness.PLENTY)),
        (" Plenty ", Count(0, Sureness.PLENTY)),
    ],
)
def test_a_count_is_read(text, count):
    assert parse_count(text) == count


@pytest.mark.parametrize(
    ("text", "readings"),
    [("1,000", ("1000", "1")), ("1.000", ("1000", "1")), ("~1,500", ("~1500",))],
)
def test_a_grouped_count_is_refused_with_its_readings(text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse_count(text)
    assert caught.value.readings == readings


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("-3", "is below zero"),
        ("~-3", "is below zero"),
        ("2.5", "not a whole number"),
        ("1e300", "no believable count"),
        ("lots", "plenty"),
        ("50+", "not a count"),
        ("~", "not a count"),
        ("pcs", "not a count"),
        ("1k", "not a count"),
        ("20 20", "not a count"),
        ("1.000.000", "write 1000000 without"),
    ],
)
def test_what_is_no_count_is_refused_with_what_to_do(text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse_count(text)
    assert caught.value.advice


def test_a_million_is_the_most_anybody_counts():
    assert parse_count("1000000") == Count(1_000_000)
    for text in ("1000001", "~1e9", "1e9"):
        with pytest.raises(UnreadableValueError, match="write at most 1000000, or plenty"):
            parse_count(text)


@given(st.integers(0, 10**6), st.sampled_from([Sureness.EXACT, Sureness.ROUGH]))
def test_a_written_count_is_read_as_the_same(number, sureness):
    assert parse_count(format_count(Count(number, sureness))) == Count(number, sureness)
    assert parse_count(format_count(Count(0, Sureness.PLENTY))) == Count(0, Sureness.PLENTY)


def test_a_pack_has_at_least_one_piece():
    assert parse_pack("100") == 100
    assert parse_pack("100 pcs") == 100
    for text in ("0", "-1", "2.5", "~50", "plenty", ""):
        with pytest.raises(UnreadableValueError):
            parse_pack(text)


@pytest.mark.parametrize(
    ("text", "turns"),
    [
        ("25", 25),
        ("10 turns", 10),
        ("10-turn", 10),
        ("1 turn", 1),
        ("3/4", 0.75),
        ("270°", 0.75),
        ("270 deg", 0.75),
        ("0,75", 0.75),
    ],
)
def test_turns_are_read(text, turns):
    assert parse_turns(text) == turns


@pytest.mark.parametrize("text", ["", "0", "-1", "multi", "1e9", "3/0", "1.0.0"])
def test_what_is_no_travel_is_refused(text):
    with pytest.raises(UnreadableValueError):
        parse_turns(text)


@pytest.mark.parametrize(
    ("text", "amount"),
    [("1.20", 1.2), ("1,20 EUR", 1.2), ("€0.35", 0.35), ("0.35 €", 0.35), ("$ 2", 2), ("0", 0)],
)
def test_a_price_is_read(text, amount):
    assert parse_price(text) == amount


@pytest.mark.parametrize("text", ["", "-1", "1,000", "free", "1e99", "€", "1.2.3"])
def test_what_is_no_price_is_refused(text):
    with pytest.raises(UnreadableValueError):
        parse_price(text)


@pytest.mark.parametrize(
    ("text", "per_kelvin"),
    [
        ("100ppm", 100e-6),
        ("100", 100e-6),
        ("±100 ppm/K", 100e-6),
        ("+/-50ppm/°C", 50e-6),
        ("50 ppm / C", 50e-6),
        ("-400 ppm/K", -400e-6),
        ("0", 0),
    ],
)
def test_a_temperature_coefficient_is_read(text, per_kelvin):
    assert parse_tempco(text) == per_kelvin


def test_a_tiny_bare_temperature_coefficient_is_refused_with_its_readings():
    with pytest.raises(AmbiguousValueError) as caught:
        parse_tempco("0.0001")
    assert caught.value.readings == ("0.0001ppm", "100ppm")


@pytest.mark.parametrize("text", ["", "ppm", "1e9", "NP0", "100 %/K", "1,000"])
def test_what_is_no_temperature_coefficient_is_refused(text):
    with pytest.raises(UnreadableValueError):
        parse_tempco(text)


@given(st.floats(-1e-2, 1e-2))
def test_a_written_temperature_coefficient_is_read_as_the_same(per_kelvin):
    assert parse_tempco(format_tempco(per_kelvin)) == per_kelvin


@given(st.text() | st.from_regex(r"[~+-]?[0-9.,/]{1,5} ?(pcs|x|turns|deg|ppm|EUR)?"))
def test_any_text_is_read_or_refused(text):
    for parse in (parse_count, parse_pack, parse_turns, parse_price, parse_tempco):
        try:
            parse(text)
        except UnreadableValueError as error:
            assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
