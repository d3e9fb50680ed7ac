"""The one gate for numbers: every text becomes a value here, and every value a text.

Conventions
-----------
SI base units and fractions inside (ohm, farad, second, hertz, volt, watt, ampere, 1/K; 5 % is
0.05); temperatures are in degree Celsius. Each reader returns a value or raises
`UnreadableValueError`, whose subclass `AmbiguousValueError` carries the readings of a text
that could mean several values. What an exact ``format_`` function writes, the ``parse_``
function beside it reads as the same float. Body markings such as ``104`` are read in
`chooser.quantities.markings`.
"""

from __future__ import annotations

import re

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.quantities.counts import (
    format_count,
    format_tempco,
    parse_count,
    parse_pack,
    parse_price,
    parse_tempco,
    parse_turns,
)
from chooser.quantities.durations import format_duration, parse_duration
from chooser.quantities.factors import format_factor, parse_factor
from chooser.quantities.frequencies import format_frequency, parse_frequency
from chooser.quantities.markings import code_value
from chooser.quantities.notation import Grammar, is_bare, read, reads
from chooser.quantities.ranges import (
    Span,
    is_range,
    parse_capacitance_range,
    parse_duration_range,
    parse_percent_range,
    parse_resistance_range,
    parse_temperature_range,
)
from chooser.quantities.temperatures import format_temperature, parse_temperature
from chooser.quantities.tolerances import (
    format_percent,
    format_tolerance,
    parse_percent,
    parse_tolerance,
)
from chooser.quantities.units import (
    CAPACITANCE,
    CURRENT,
    POWER,
    RESISTANCE,
    VOLTAGE,
    format_capacitance,
    format_current,
    format_power,
    format_resistance,
    format_voltage,
)

__all__ = [
    "Span",
    "format_capacitance",
    "format_count",
    "format_current",
    "format_duration",
    "format_factor",
    "format_frequency",
    "format_percent",
    "format_power",
    "format_resistance",
    "format_tempco",
    "format_temperature",
    "format_tolerance",
    "format_voltage",
    "is_range",
    "parse_capacitance",
    "parse_capacitance_range",
    "parse_count",
    "parse_current",
    "parse_duration",
    "parse_duration_range",
    "parse_factor",
    "parse_frequency",
    "parse_pack",
    "parse_percent",
    "parse_percent_range",
    "parse_power",
    "parse_price",
    "parse_resistance",
    "parse_resistance_range",
    "parse_tempco",
    "parse_temperature",
    "parse_temperature_range",
    "parse_tolerance",
    "parse_turns",
    "parse_voltage",
]


def parse_resistance(text: str) -> float:
    """Read a resistance: ``4k7``, ``4.7 kOhm``, ``R47``, ``4700``.

    Parameters
    ----------
    text : any text; a bare number is ohm.

    Returns
    -------
    Ohm, finite and > 0.

    Raises
    ------
    AmbiguousValueError
        For ``10m`` (milli or mega), ``1,000`` (one or a thousand) and ``4E7``.
    UnreadableValueError
        Where it is no resistance.

    See Also
    --------
    format_resistance
    """
    return _read_or_name(text, RESISTANCE, CAPACITANCE)


def parse_capacitance(text: str) -> float:
    """Read a capacitance: ``100n``, ``0,1 uF``, ``4u7``, ``10 mfd``.

    Parameters
    ----------
    text : any text; markings are not read here, see `chooser.quantities.markings`.

    Returns
    -------
    Farad, finite and > 0.

    Raises
    ------
    AmbiguousValueError
        For a bare number, a lone ``m`` or ``M``, and ``1,000n``.
    UnreadableValueError
        Where it is no capacitance.

    See Also
    --------
    format_capacitance
    """
    marked = code_value(text)
    try:
        return _read_or_name(text, CAPACITANCE, RESISTANCE)
    except AmbiguousValueError as error:
        if marked is None or not is_bare(text):
            raise
        readings = [*error.readings, format_capacitance(marked)]
        problem = f"has no unit, and as a marking it would be {readings[-1]}"
        raise AmbiguousValueError(text, list(dict.fromkeys(readings)), problem) from None
    except UnreadableValueError:
        if marked is None:
            raise
        advice = f"write {format_capacitance(marked)} if it is the marking on a capacitor"
        raise UnreadableValueError(text, "is not a capacitance", advice) from None


def _read_or_name(text: str, grammar: Grammar, other: Grammar) -> float:
    """Read a value, and say so where it is one of the other kind."""
    try:
        return read(text, grammar)
    except AmbiguousValueError:
        raise
    except UnreadableValueError as error:
        if not reads(text, other):
            raise
        problem = f"is {other.what}, not {grammar.what}"
        raise UnreadableValueError(text, problem, f"write it like {grammar.example}") from error


def parse_voltage(text: str) -> float:
    """Read a voltage: ``16V``, ``16``, ``6V3``, ``1.5kV``.

    Parameters
    ----------
    text : any text; a bare number is volt.

    Returns
    -------
    Volt, finite and > 0.

    Raises
    ------
    UnreadableValueError
        Where it is no voltage.

    See Also
    --------
    format_voltage
    """
    return read(text, VOLTAGE)


_VULGAR = str.maketrans({"¼": "1/4", "½": "1/2", "¾": "3/4", "⅛": "1/8"})
_FRACTION = re.compile(r"([1-9][0-9]?)/([1-9][0-9]?) ?(?:w|watts?)?", re.IGNORECASE)


def parse_power(text: str) -> float:
    """Read a power: ``1/4W``, ``0.25W``, ``250mW``, ``0.25``.

    Parameters
    ----------
    text : any text; a bare number is watt.

    Returns
    -------
    Watt, finite and > 0.

    Raises
    ------
    UnreadableValueError
        Where it is no power.

    See Also
    --------
    format_power
    """
    fraction = _FRACTION.fullmatch(text.translate(_VULGAR).strip())
    if fraction:
        return int(fraction[1]) / int(fraction[2])
    return read(text, POWER)


def parse_current(text: str) -> float:
    """Read a current: ``3uA``, ``250nA``.

    Parameters
    ----------
    text : any text with a prefix or unit.

    Returns
    -------
    Ampere, finite and > 0.

    Raises
    ------
    AmbiguousValueError
        For a bare number.
    UnreadableValueError
        Where it is no current.

    See Also
    --------
    format_current
    """
    return read(text, CURRENT)
