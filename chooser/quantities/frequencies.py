"""Frequencies: ``440Hz``, ``1.5 kHz``, ``1k2``, ``3.06 mHz``.

Conventions
-----------
Hertz inside. Before Hz a small m is milli and a large M is mega; ``mhz`` was written by somebody
who does not care for the difference, so it is refused, and so is a lone ``m``.
"""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.quantities.durations import parse_duration
from chooser.quantities.notation import Grammar, read, write_with_unit

_PREFIXES: Mapping[str, int] = MappingProxyType({"m": -3, "": 0, "k": 3, "M": 6, "G": 9})


def format_frequency(hertz: float, *, digits: int | None = None) -> str:
    """Write a frequency.

    Parameters
    ----------
    hertz : Hz. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``440 Hz``, ``1.5 kHz`` or ``3.06 mHz``.

    See Also
    --------
    parse_frequency
    """
    return write_with_unit(hertz, _PREFIXES, "Hz", digits=digits)


FREQUENCY = Grammar(
    what="a frequency",
    example="440Hz, 1.5kHz or 3.06mHz",
    write=format_frequency,
    prefixes={
        "": 0,
        "u": -6,
        "k": 3,
        "K": 3,
        "M": 6,
        "G": 9,
        "micro": -6,
        "milli": -3,
        "kilo": 3,
        "mega": 6,
        "giga": 9,
    },
    words=("hertz", "hz", ""),
    wholes={"mHz": -3, "mHertz": -3},
    letters={"k": 3, "K": 3, "M": 6, "G": 9},
    doubtful={"m": (6, -3)},
    bare=None,
    bare_readings=("Hz", "kHz"),
    least=1e-9,
    most=1e11,
)
"""Hertz. A bare number is refused."""


def parse_frequency(text: str) -> float:
    """Read a frequency: ``440Hz``, ``1.5 kHz``, ``1k2Hz``, ``2.2MHz``, ``3.06mHz``.

    Parameters
    ----------
    text : any text with a prefix or unit.

    Returns
    -------
    Hertz, finite and > 0.

    Raises
    ------
    AmbiguousValueError
        For a bare number, for ``5mhz`` and ``5m`` (milli or mega), and for ``1,500 Hz``.
    UnreadableValueError
        Where it is no frequency; of a duration it tells the frequency with that period.

    See Also
    --------
    format_frequency
    """
    try:
        return read(text, FREQUENCY)
    except AmbiguousValueError:
        raise
    except UnreadableValueError:
        period = _period(text)
        if period is None:
            raise
    inverse = format_frequency(1 / period, digits=6)
    raise UnreadableValueError(
        text, "is a duration, not a frequency", f"write {inverse} if it is the period"
    )


def _period(text: str) -> float | None:
    """Read a duration, None where it is none."""
    try:
        return parse_duration(text)
    except UnreadableValueError:
        return None
