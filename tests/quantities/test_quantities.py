"""Resistances, capacitances, voltages, powers and currents as people write them."""

from __future__ import annotations

import re
import time

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.preferred import values_between
from chooser.quantities import (
    format_capacitance,
    format_current,
    format_power,
    format_resistance,
    format_voltage,
    parse_capacitance,
    parse_count,
    parse_current,
    parse_duration,
    parse_factor,
    parse_frequency,
    parse_percent,
    parse_power,
    parse_price,
    parse_resistance,
    parse_tempco,
    parse_temperature,
    parse_tolerance,
    parse_turns,
    parse_voltage,
)

# Source: IEC 60062, the letter as decimal mark (R, K, M as printed in code lists; G, T and
# L from memory). The spellings around them are common practice, no source.
RESISTANCES = [
    ("R47", 0.47),
    ("4R7", 4.7),
    ("2R2", 2.2),
    ("0R5", 0.5),
    ("470R", 470),
    ("4K7", 4700),
    ("47K3", 47300),
    ("4M7", 4.7e6),
    ("1G5", 1.5e9),
    ("1T", 1e12),
    ("5L6", 0.0056),
    ("4k7", 4700),
    ("k47", 470),
    ("4k70", 4700),
    ("4k7Ω", 4700),
    ("4k7 ohm", 4700),
    ("4.7k", 4700),
    ("4,7k", 4700),
    ("4.7 k", 4700),
    (" 4.7  k  ohm ", 4700),
    ("4.7 kOhm", 4700),
    ("4.7 k-ohms", 4700),
    ("4.7k\N{OHM SIGN}", 4700),
    ("4.7k\N{GREEK CAPITAL LETTER OMEGA}", 4700),
    ("4.7kR", 4700),
    ("4\N{NO-BREAK SPACE}k", 4000),
    ("4700", 4700),
    ("4700 Ohms", 4700),
    ("4.700", 4.7),
    ("0,470", 0.47),
    ("1234,567", 1234.567),
    (".5", 0.5),
    ("10K", 10000),
    ("1M", 1e6),
    ("1 MEG", 1e6),
    ("2.2 megohm", 2.2e6),
    ("10 kilohm", 10000),
    ("10 kiloohms", 10000),
    ("5 milliohm", 0.005),
    ("4e3", 4000),
    ("1E+03", 1000),
    ("4.7E3", 4700),
]

# Source: as above; p, n, u, m and F of IEC 60062, MFD and MMF of old prints (common practice).
CAPACITANCES = [
    ("4n7", 4.7e-9),
    ("100n", 1e-7),
    ("2u2", 2.2e-6),
    ("u47", 0.47e-6),
    ("n47", 0.47e-9),
    ("4m7", 4.7e-3),
    ("1F5", 1.5),
    ("0.1uF", 1e-7),
    ("0,1 \N{MICRO SIGN}F", 1e-7),
    ("0,1 \N{GREEK SMALL LETTER MU}F", 1e-7),
    ("\N{MICRO SIGN}47", 0.47e-6),
    ("220p", 220e-12),
    ("220 PF", 220e-12),
    ("100nf", 1e-7),
    ("10UF", 10e-6),
    ("1mF", 1e-3),
    ("1 millifarad", 1e-3),
    ("10 mfd", 10e-6),
    ("10 MFD", 10e-6),
    ("100 MMF", 100e-12),
    ("100 mmfd", 100e-12),
    ("100\N{MICRO SIGN}\N{MICRO SIGN}F", 100e-12),
    ("10 microfarad", 10e-6),
    ("22 nanofarads", 22e-9),
    ("1F", 1.0),
    ("1e-7 F", 1e-7),
]

OTHERS = [
    (parse_voltage, "16V", 16),
    (parse_voltage, "16", 16),
    (parse_voltage, "1.5kV", 1500),
    (parse_voltage, "6V3", 6.3),
    (parse_voltage, "6,3 v", 6.3),
    (parse_voltage, "16 VDC", 16),
    (parse_voltage, "+5 V", 5),
    (parse_voltage, "500mV", 0.5),
    (parse_power, "1/4W", 0.25),
    (parse_power, "1/4", 0.25),
    (parse_power, "1/8 watt", 0.125),
    (parse_power, "½W", 0.5),
    (parse_power, "0.25W", 0.25),
    (parse_power, "0.25", 0.25),
    (parse_power, "250mW", 0.25),
    (parse_power, "0W25", 0.25),
    (parse_current, "3uA", 3e-6),
    (parse_current, "250 nA", 250e-9),
    (parse_current, "10pA", 1e-11),
    (parse_current, "3u", 3e-6),
    (parse_current, "2,5 mA", 2.5e-3),
    (parse_current, "1 A", 1),
]


@pytest.mark.parametrize(
    ("parse", "text", "value"),
    [(parse_resistance, *row) for row in RESISTANCES]
    + [(parse_capacitance, *row) for row in CAPACITANCES]
    + OTHERS,
)
def test_a_value_is_read_as_the_float_of_its_decimals(parse, text, value):
    assert parse(text) == value


@pytest.mark.parametrize(
    ("parse", "text", "readings"),
    [
        (parse_resistance, "10m", ("10M", "R01")),
        (parse_resistance, "10 mohm", ("10M", "R01")),
        (parse_resistance, "4m7", ("4M7", "R0047")),
        (parse_resistance, "1,000", ("1R", "1k")),
        (parse_resistance, "4,700 k", ("4k7", "4M7")),
        (parse_resistance, "4E7", ("40M", "4R7")),
        (parse_capacitance, "4.7", ("4.7p", "4.7n", "4.7u")),
        (parse_capacitance, "100", ("100p", "100n", "100u", "10p")),
        (parse_capacitance, "104", ("104p", "104n", "104u", "100n")),
        (parse_capacitance, "1m", ("1u", "1000u")),
        (parse_capacitance, "10 MF", ("10u", "10000u")),
        (parse_capacitance, "4M7", ("4u7", "4700u")),
        (parse_capacitance, "1,000n", ("1n", "1u")),
        (parse_voltage, "1,000", ("1 V", "1 kV")),
        (parse_current, "3", ("3nA", "3uA", "3mA")),
    ],
)
def test_a_doubtful_value_is_refused_with_readings_that_can_be_typed(parse, text, readings):
    with pytest.raises(AmbiguousValueError) as caught:
        parse(text)
    assert caught.value.readings == readings
    values = [parse(reading) for reading in readings]
    assert len(set(values)) == len(values)


@pytest.mark.parametrize(
    ("parse", "text", "words"),
    [
        (parse_resistance, "lk5", "perhaps 1k5 was meant"),
        (parse_resistance, "1O0k", "perhaps 100k was meant"),
        (parse_resistance, "4k 7", "perhaps 4k7 was meant"),
        (parse_resistance, "4\N{CYRILLIC SMALL LETTER KA}7", "perhaps 4k7 was meant"),
        (parse_resistance, "10 000", "perhaps 10000 was meant"),
        (parse_resistance, "470E", "perhaps 470R was meant"),
        (parse_resistance, "4k7.", "perhaps 4k7 was meant"),
        (parse_resistance, "4k7k", "not a resistance"),
        (parse_resistance, "1k5k", "not a resistance"),
        (parse_resistance, "4.7k7", "not a resistance"),
        (parse_resistance, "4R7k", "not a resistance"),
        (parse_resistance, "4k7J", "not a resistance"),
        (parse_resistance, "1.000.000", "write 1000000 without"),
        (parse_resistance, "1,000.5", "write 1000.5 without"),
        (parse_resistance, "1.000,5k", "write 1000.5 without"),
        (parse_resistance, "4.7.7", "more than one decimal mark"),
        (parse_resistance, "100n", "is a capacitance, not a resistance"),
        (parse_resistance, "", "is empty"),
        (parse_resistance, "  ", "is empty"),
        (parse_resistance, "0", "is zero"),
        (parse_resistance, "0R", "is zero"),
        (parse_resistance, "-5k", "is below zero"),
        (parse_resistance, "\N{MINUS SIGN}5k", "is below zero"),
        (parse_resistance, "1e300", "no believable resistance"),
        (parse_resistance, "1e-300", "no believable resistance"),
        (parse_resistance, "inf", "not a resistance"),
        (parse_resistance, "nan", "not a resistance"),
        (parse_resistance, "\N{ARABIC-INDIC DIGIT FOUR}k7", "not a resistance"),
        (parse_resistance, "10²", "not a resistance"),
        (parse_capacitance, "4k7", "is a resistance, not a capacitance"),
        (parse_capacitance, "470R", "is a resistance, not a capacitance"),
        (parse_capacitance, "473K", "write 47n if it is the marking"),
        (parse_capacitance, "1f", "perhaps 1F was meant"),
        (parse_capacitance, "3000F", "no believable capacitance"),
        (parse_capacitance, "0n", "is zero"),
        (parse_voltage, "250VAC", "not a voltage"),
        (parse_power, "1/0W", "not a power"),
        (parse_capacitance, "-100", "is below zero"),
        (parse_current, "0", "is zero"),
        (parse_current, "-3", "is below zero"),
    ],
)
def test_what_is_no_value_is_refused_with_what_to_do(parse, text, words):
    with pytest.raises(UnreadableValueError, match=re.escape(words)) as caught:
        parse(text)
    assert caught.value.advice
    assert not isinstance(caught.value, AmbiguousValueError)


def test_a_huge_text_is_refused_at_once_and_not_repeated():
    began = time.perf_counter()
    with pytest.raises(UnreadableValueError, match="10000000 characters long") as caught:
        parse_resistance("9" * 10_000_000)
    assert len(str(caught.value)) < 200
    assert time.perf_counter() - began < 1


@pytest.mark.parametrize(
    ("value", "exact", "rounded"),
    [
        (4700, "4k7", "4k7"),
        (470, "470R", "470R"),
        (4.7, "4R7", "4R7"),
        (0.47, "R47", "R47"),
        (0.047, "R047", "R047"),
        (1e6, "1M", "1M"),
        (4683, "4k683", "4k68"),
        (4702, "4k702", "4k7"),
        (999.96, "999R96", "1k"),
        (24_930.5, "24k9305", "24k9"),
        (0.0, "0R", "0R"),
        (-4700.0, "-4k7", "-4k7"),
        (float("inf"), "inf", "inf"),
    ],
)
def test_a_resistance_is_written_as_its_letter_code(value, exact, rounded):
    assert format_resistance(value) == exact
    assert format_resistance(value, digits=3) == rounded


@pytest.mark.parametrize(
    ("write", "value", "text"),
    [
        (format_capacitance, 4.7e-9, "4n7"),
        (format_capacitance, 470e-9, "470n"),
        (format_capacitance, 100e-6, "100u"),
        (format_capacitance, 4.7e-3, "4700u"),
        (format_capacitance, 0.5e-12, "0p5"),
        (format_capacitance, 1.5, "1F5"),
        (format_voltage, 6.3, "6.3 V"),
        (format_voltage, 1500, "1.5 kV"),
        (format_voltage, 0.08, "80 mV"),
        (format_power, 0.25, "250 mW"),
        (format_power, 2.0, "2 W"),
        (format_current, 3e-6, "3 uA"),
        (format_current, 250e-9, "250 nA"),
        (format_current, 0.0, "0 A"),
    ],
)
def test_other_values_are_written_with_the_usual_prefix(write, value, text):
    assert write(value) == text


TRIPS = [
    (parse_resistance, format_resistance, -6, 15),
    (parse_capacitance, format_capacitance, -15, 1),
    (parse_voltage, format_voltage, -3, 6),
    (parse_power, format_power, -6, 6),
    (parse_current, format_current, -15, 3),
]


@pytest.mark.parametrize(("parse", "write", "least", "most"), TRIPS)
@given(data=st.data())
def test_reading_what_was_written_gives_the_same_float(parse, write, least, most, data):
    any_float = st.floats(float(f"1e{least}"), float(f"1e{most}"))
    typed = st.builds(
        lambda digits, power: float(f"{digits}e{power}"),
        st.integers(1, 9999),
        st.integers(least, most - 4),
    )
    value = data.draw(any_float | typed)
    assert parse(write(value)) == value


@given(st.floats(1e-5, 1e14), st.integers(1, 6))
def test_a_rounded_value_is_within_half_a_unit_of_its_last_digit(ohm, digits):
    assert parse_resistance(format_resistance(ohm, digits=digits)) == pytest.approx(
        ohm, rel=0.5000001 * 10 ** (1 - digits)
    )


@pytest.mark.parametrize("name", ["E24", "E96"])
def test_every_preferred_capacitance_is_written_and_read_back(name):
    for farad in values_between(name, 1e-12, 1e-2):
        assert parse_capacitance(format_capacitance(farad)) == farad


@given(st.text() | st.from_regex(r"[0-9.,]{0,4} ?[RkKmMunpµΩVWAFE]{0,2}[0-9.,]{0,3} ?(ohm|F|V)?"))
def test_any_text_is_a_value_or_refused(text):
    for parse in (parse_resistance, parse_capacitance, parse_voltage, parse_power, parse_current):
        try:
            value = parse(text)
        except UnreadableValueError as error:
            assert str(error).endswith(".")  # noqa: PT017 - both ends are fine, a crash is not
        else:
            assert 0 < value <= 1e15


READERS = [
    parse_resistance,
    parse_capacitance,
    parse_voltage,
    parse_power,
    parse_current,
    parse_duration,
    parse_tolerance,
    parse_percent,
    parse_count,
    parse_tempco,
    parse_turns,
    parse_price,
    parse_frequency,
    parse_temperature,
    parse_factor,
]


@pytest.mark.parametrize("parse", READERS)
@given(
    text=st.from_regex(r"[-+~]?[0-9.,]{1,6} ?[kKmMnpuRFEHP]?(min|m|%|x|ohm|F|A)?", fullmatch=True)
)
def test_each_reading_of_a_refused_text_can_be_typed(parse, text):
    try:
        parse(text)
    except AmbiguousValueError as error:
        assert error.readings  # noqa: PT017 - most texts are not refused
        for reading in error.readings:
            parse(reading)
    except UnreadableValueError as error:
        assert error.advice  # noqa: PT017 - as above
