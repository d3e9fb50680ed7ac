"""Temperatures: ``25C``, ``-10 °C``.

Conventions
-----------
Degree Celsius inside and outside, the one quantity here that is not in its SI unit: every data
sheet of the trade gives it so. Kelvin and Fahrenheit are refused with the Celsius they are.
"""

from __future__ import annotations

import re

from chooser.errors import UnreadableValueError
from chooser.quantities.decimals import NUMBER, clean, doubtful, plain, read_number

_EXAMPLE = "25C or -10C"
_DEGREE = r"(?:[\N{DEGREE SIGN}\N{MASCULINE ORDINAL INDICATOR}]|deg\.?|degrees?)"
_TEMPERATURE = re.compile(
    rf"(?P<number>{NUMBER}) ?(?:"
    rf"(?P<celsius>{_DEGREE}? ?(?:c|celsius|centigrade)|\N{{DEGREE CELSIUS}})"
    rf"|(?P<fahrenheit>{_DEGREE}? ?(?:f|fahrenheit)|\N{{DEGREE FAHRENHEIT}})"
    rf"|(?P<kelvin>{_DEGREE}? ?(?:k|kelvins?)|\N{{KELVIN SIGN}})"
    rf"|{_DEGREE})?",
    re.IGNORECASE,
)
_ABSOLUTE_ZERO = -273.15
_MOST = 1000.0


def parse_temperature(text: str) -> float:
    """Read a temperature: ``25C``, ``-10 °C``, ``85 deg C``.

    Parameters
    ----------
    text : any text.

    Returns
    -------
    Degree Celsius, from absolute zero to 1000.

    Raises
    ------
    AmbiguousValueError
        For a number without unit, and ``1,000 C``.
    UnreadableValueError
        Where it is no temperature, or in kelvin or degree Fahrenheit.

    See Also
    --------
    format_temperature
    """
    match = _TEMPERATURE.fullmatch(clean(text, "a temperature", _EXAMPLE))
    if match is None:
        raise UnreadableValueError(text, "is not a temperature", f"write it like {_EXAMPLE}")
    numbers = read_number(match["number"], text)
    if match["kelvin"] or match["fahrenheit"]:
        raise _other_unit(text, numbers[0].scaled(0), in_kelvin=bool(match["kelvin"]))
    if len(numbers) > 1 or not match["celsius"]:
        problem = "" if match["celsius"] else "has no unit"
        raise doubtful(text, [f"{number}C" for number in numbers], parse_temperature, problem)
    value = numbers[0].scaled(0)
    if value < _ABSOLUTE_ZERO:
        raise UnreadableValueError(text, "is below absolute zero", f"write it like {_EXAMPLE}")
    if value > _MOST:
        raise UnreadableValueError(
            text, "is no believable temperature", f"write it like {_EXAMPLE}"
        )
    return value or 0.0  # never -0.0


def _other_unit(text: str, value: float, *, in_kelvin: bool) -> UnreadableValueError:
    """Make the refusal of kelvin or Fahrenheit, with the Celsius it is where that is one."""
    celsius = value + _ABSOLUTE_ZERO if in_kelvin else (value - 32) / 1.8
    believable = _ABSOLUTE_ZERO <= celsius <= _MOST
    advice = f"{plain(round(celsius, 2))}C" if believable else f"degree Celsius, like {_EXAMPLE}"
    unit = "kelvin" if in_kelvin else "degree Fahrenheit"
    return UnreadableValueError(text, f"is in {unit}", f"write {advice}")


def format_temperature(celsius: float, *, digits: int | None = None) -> str:
    """Write a temperature.

    Parameters
    ----------
    celsius : degree Celsius. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``25 C``.

    See Also
    --------
    parse_temperature
    """
    return f"{plain(celsius, 0, digits)} C"
