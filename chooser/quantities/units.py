"""The units of parts as grammars: ohm, farad, volt, watt, ampere; and how each is written."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from chooser.quantities.notation import Grammar, write_with_letter, write_with_unit

_OHM_LETTERS: Mapping[str, int] = MappingProxyType({"R": 0, "k": 3, "M": 6, "G": 9, "T": 12})
_FARAD_LETTERS: Mapping[str, int] = MappingProxyType({"p": -12, "n": -9, "u": -6, "F": 0})
_VOLT_PREFIXES: Mapping[str, int] = MappingProxyType({"m": -3, "": 0, "k": 3})
_WATT_PREFIXES: Mapping[str, int] = MappingProxyType({"u": -6, "m": -3, "": 0, "k": 3})
_AMPERE_PREFIXES: Mapping[str, int] = MappingProxyType({"p": -12, "n": -9, "u": -6, "m": -3, "": 0})


def format_resistance(ohm: float, *, digits: int | None = None) -> str:
    """Write a resistance as its IEC 60062 letter code.

    Parameters
    ----------
    ohm : resistance in ohm. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``4k7``, ``470R``, ``R47`` or ``4k683``; exact ones read back as the same value.

    See Also
    --------
    parse_resistance
    """
    return write_with_letter(ohm, _OHM_LETTERS, digits=digits, lead=False)


def format_capacitance(farad: float, *, digits: int | None = None) -> str:
    """Write a capacitance as its IEC 60062 letter code, in p, n and u, from 1 F on in F.

    Milli is never written: too many people have read it as micro.

    Parameters
    ----------
    farad : capacitance in farad. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``4n7``, ``470n`` or ``4700u``; exact ones read back as the same value.

    See Also
    --------
    parse_capacitance
    """
    return write_with_letter(farad, _FARAD_LETTERS, digits=digits, lead=True)


def format_voltage(volt: float, *, digits: int | None = None) -> str:
    """Write a voltage.

    Parameters
    ----------
    volt : V. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``16 V`` or ``1.5 kV``.

    See Also
    --------
    parse_voltage
    """
    return write_with_unit(volt, _VOLT_PREFIXES, "V", digits=digits)


def format_power(watt: float, *, digits: int | None = None) -> str:
    """Write a power.

    Parameters
    ----------
    watt : W. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``250 mW`` or ``2 W``.

    See Also
    --------
    parse_power
    """
    return write_with_unit(watt, _WATT_PREFIXES, "W", digits=digits)


def format_current(ampere: float, *, digits: int | None = None) -> str:
    """Write a current.

    Parameters
    ----------
    ampere : A. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``3 uA`` or ``250 nA``.

    See Also
    --------
    parse_current
    """
    return write_with_unit(ampere, _AMPERE_PREFIXES, "A", digits=digits)


RESISTANCE = Grammar(
    what="a resistance",
    example="4k7, 470R or 1M",
    write=format_resistance,
    prefixes={
        "": 0,
        "k": 3,
        "K": 3,
        "M": 6,
        "G": 9,
        "T": 12,
        "L": -3,
        "kilo": 3,
        "kil": 3,
        "mega": 6,
        "meg": 6,
        "giga": 9,
        "tera": 12,
        "milli": -3,
    },
    words=("ohms", "ohm", "r", ""),
    letters={"R": 0, "r": 0, "ohm": 0, "k": 3, "K": 3, "M": 6, "G": 9, "T": 12, "L": -3},
    doubtful={"m": (6, -3)},
    least=1e-6,
    most=1e15,
)
"""Ohm. A bare number is ohm; a small m is milli by the book and mega by habit, so refused."""

CAPACITANCE = Grammar(
    what="a capacitance",
    example="100n, 4u7 or 220p",
    write=format_capacitance,
    prefixes={
        "p": -12,
        "P": -12,
        "n": -9,
        "N": -9,
        "u": -6,
        "U": -6,
        "pico": -12,
        "nano": -9,
        "micro": -6,
        "milli": -3,
    },
    words=("farads", "farad", "fd", "f", ""),
    wholes={
        "F": 0,
        "farad": 0,
        "farads": 0,
        "mF": -3,
        "mfd": -6,
        "mmf": -12,
        "mmfd": -12,
        "uuf": -12,
        "uufd": -12,
    },
    letters={"p": -12, "P": -12, "n": -9, "N": -9, "u": -6, "U": -6, "m": -3, "F": 0},
    doubtful={"m": (-6, -3), "M": (-6, -3)},
    bare=None,
    bare_readings=("p", "n", "u"),
    usual=(0.5e-12, 1.0),
    least=1e-15,
    most=10.0,
)
"""Farad. MFD and MMF are the old spellings of micro and pico; a lone m or MF is refused."""

VOLTAGE = Grammar(
    what="a voltage",
    example="16V or 1.5kV",
    write=format_voltage,
    prefixes={"": 0, "m": -3, "k": 3, "K": 3, "kilo": 3, "milli": -3},
    words=("volts", "volt", "vdc", "v"),
    letters={"V": 0, "v": 0},
    least=1e-3,
    most=1e6,
)
"""Volt. A bare number is volt; 6V3 is the code on capacitors."""

POWER = Grammar(
    what="a power",
    example="1/4W, 0.25W or 250mW",
    write=format_power,
    prefixes={"": 0, "u": -6, "m": -3, "k": 3, "K": 3, "kilo": 3, "milli": -3},
    words=("watts", "watt", "w"),
    letters={"W": 0, "w": 0},
    least=1e-6,
    most=1e6,
)
"""Watt. A bare number is watt."""

CURRENT = Grammar(
    what="a current",
    example="3uA or 250nA",
    write=format_current,
    prefixes={
        "": 0,
        "p": -12,
        "n": -9,
        "u": -6,
        "m": -3,
        "pico": -12,
        "nano": -9,
        "micro": -6,
        "milli": -3,
    },
    words=("amperes", "ampere", "amps", "amp", "a", ""),
    bare=None,
    bare_readings=("nA", "uA", "mA"),
    usual=(1e-11, 0.1),
    least=1e-15,
    most=1e3,
)
"""Ampere."""
