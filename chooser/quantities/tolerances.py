"""Tolerances and percentages: ``5%``, ``-20/+80%``, and the letters of IEC 60062.

Conventions
-----------
Everything is a fraction inside (5 % is 0.05). Half widths: 5 % means from -5 % to +5 %.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from types import MappingProxyType

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.parts import Tolerance
from chooser.quantities.decimals import NUMBER, Number, clean, doubtful, plain, read_number

TOLERANCE_LETTERS: Mapping[str, Tolerance] = MappingProxyType(
    {
        "E": Tolerance(0.00005, 0.00005),  # from memory
        "B": Tolerance(0.001, 0.001),
        "C": Tolerance(0.0025, 0.0025),
        "D": Tolerance(0.005, 0.005),
        "F": Tolerance(0.01, 0.01),
        "G": Tolerance(0.02, 0.02),
        "J": Tolerance(0.05, 0.05),
        "K": Tolerance(0.1, 0.1),
        "M": Tolerance(0.2, 0.2),
        "N": Tolerance(0.3, 0.3),
        "Q": Tolerance(0.1, 0.3),  # from memory
        "S": Tolerance(0.2, 0.5),
        "T": Tolerance(0.1, 0.5),
        "Z": Tolerance(0.2, 0.8),
    }
)
"""Relative tolerance letters of IEC 60062 that have one meaning."""

DOUBTFUL_LETTERS: Mapping[str, tuple[str, ...]] = MappingProxyType(
    {
        "H": ("3%", "2.5%"),
        "L": ("0.01%", "15%"),
        "P": ("0.02%", "-0/+100%"),
        "W": ("0.05%", "-0/+200%"),
    }
)
"""Letters that older lists used otherwise than IEC 60062 does (the IEC figures from memory)."""

PICOFARAD_LETTERS: Mapping[str, float] = MappingProxyType(
    {"B": 0.1e-12, "C": 0.25e-12, "D": 0.5e-12, "F": 1e-12, "G": 2e-12}
)
"""Absolute tolerance letters below 10 pF, in farad (F and G from memory)."""

_EXAMPLE = "5%, -20/+80% or a letter such as J"
_WIDEST = 10.0
_PLUS_MINUS = r"(?:\N{PLUS-MINUS SIGN}|\+/-|\+-|-/\+|-\+)"
_SYMMETRIC = re.compile(
    rf"(?:{_PLUS_MINUS} ?)?(?P<number>{NUMBER}) ?(?P<percent>%|percent|pct)?"
    r"(?P<ppm> ?ppm)?",
    re.IGNORECASE,
)
_TWO_SIDED = re.compile(
    rf"(?P<first>(?=[+-]){NUMBER}|0(?= ?%? ?/)) ?%? ?(?:/|to)? ?(?P<second>(?=[+-]){NUMBER}|0) ?%?",
    re.IGNORECASE,
)


def parse_percent(text: str) -> float:
    """Read a percentage: ``2%``, ``0.5 %``, ``500ppm``.

    Parameters
    ----------
    text : any text.

    Returns
    -------
    The fraction (2 % is 0.02), dimensionless, finite and >= 0.

    Raises
    ------
    UnreadableValueError
        Where it is none; a number without a % sign is refused, since 0.02 and 2 are both used.

    See Also
    --------
    format_percent
    """
    cleaned = clean(text, "a percentage", "2%")
    match = _SYMMETRIC.fullmatch(cleaned)
    if match is None or (match["percent"] and match["ppm"]):
        raise UnreadableValueError(text, "is not a percentage", "write it like 2%")
    number = _one_number(text, match["number"], parse_percent)
    if not (match["percent"] or match["ppm"]):
        readings = [f"{number}%", f"{plain(number.scaled(2))}%"]
        raise doubtful(text, readings, parse_percent, "has no % sign")
    fraction = number.scaled(-6 if match["ppm"] else -2)
    if fraction < 0:
        raise UnreadableValueError(text, "is below zero", "write a percentage such as 2%")
    if fraction > _WIDEST:
        raise UnreadableValueError(text, "is no believable percentage", "write it like 2%")
    return fraction


def parse_tolerance(text: str) -> Tolerance:
    """Read a tolerance: ``5%``, ``5``, ``±5%``, ``-20/+80%``, ``K``.

    Parameters
    ----------
    text : any text; a number of 1 or more without % sign means percent.

    Returns
    -------
    Tolerance
        As fractions, both ends >= 0 and not both zero.

    Raises
    ------
    AmbiguousValueError
        For a bare number below 1 (percent or fraction?), a lone ``+5%`` and letters that
        have changed their meaning.
    UnreadableValueError
        Where it is no tolerance.

    See Also
    --------
    format_tolerance
    """
    cleaned = clean(text, "a tolerance", _EXAMPLE)
    if len(cleaned) == 1 and cleaned.isalpha():
        return _letter(text, cleaned.upper())
    two_sided = _TWO_SIDED.fullmatch(cleaned.replace("..", "/"))
    if two_sided:
        return _two_sided(text, two_sided["first"], two_sided["second"])
    match = _SYMMETRIC.fullmatch(cleaned)
    if match is None or match["ppm"]:
        raise UnreadableValueError(text, "is not a tolerance", f"write {_EXAMPLE}")
    return _symmetric(text, match)


def _letter(text: str, letter: str) -> Tolerance:
    """Look a letter up."""
    if letter in TOLERANCE_LETTERS:
        return TOLERANCE_LETTERS[letter]
    if letter in DOUBTFUL_LETTERS:
        raise AmbiguousValueError(text, DOUBTFUL_LETTERS[letter])
    known = ", ".join(sorted(TOLERANCE_LETTERS))
    raise UnreadableValueError(
        text, "is no tolerance letter", f"write one of {known}, or a percentage such as 5%"
    )


def _symmetric(text: str, match: re.Match[str]) -> Tolerance:
    """Read ``5%``, ``±5 %`` or ``5``."""
    number = _one_number(text, match["number"], parse_tolerance)
    width = number.digits.lstrip("-")
    if match["number"][0] in "+-":
        one_sided = f"-0/+{width}%" if match["number"][0] == "+" else f"-{width}/+0%"
        readings = [f"{Number(width, number.exponent)}%", one_sided]
        raise doubtful(text, readings, parse_tolerance)
    fraction = number.scaled(-2)
    if not match["percent"] and 0 < number.scaled(0) < 1:
        readings = [f"{number}%", f"{plain(number.scaled(2))}%"]
        raise doubtful(text, readings, parse_tolerance, "has no % sign")
    return _checked(text, fraction, fraction)


def _two_sided(text: str, first: str, second: str) -> Tolerance:
    """Read ``-20/+80%`` with the ends in either order; only a zero end may lack its sign."""
    ends: dict[str, float] = {}
    for typed in (first, second):
        value = abs(_one_number(text, typed, parse_tolerance).scaled(-2))
        sign = typed[0] if typed[0] in "+-" else "" if value == 0 else "?"
        ends[sign] = value
    if "?" in ends or len(ends) == 1:
        raise UnreadableValueError(
            text, "does not say which end is below and which above", "write it like -20/+80%"
        )
    return _checked(text, ends.get("-", 0.0), ends.get("+", 0.0))


def _one_number(text: str, typed: str, parse: Callable[[str], object]) -> Number:
    """Read a number that has one reading."""
    numbers = read_number(typed, text)
    if len(numbers) > 1:
        raise doubtful(text, [f"{number}%" for number in numbers], parse)
    return numbers[0]


def _checked(text: str, minus: float, plus: float) -> Tolerance:
    """Refuse tolerances no part has."""
    if minus == plus == 0:
        raise UnreadableValueError(
            text, "is zero, and no part is exact", "write the printed tolerance such as 5%"
        )
    if not (0 <= minus < 1 and 0 <= plus <= _WIDEST):
        raise UnreadableValueError(text, "is no believable tolerance", f"write {_EXAMPLE}")
    return Tolerance(minus, plus)


def format_percent(fraction: float, *, signed: bool = False, digits: int | None = None) -> str:
    """Write a fraction as a percentage.

    Parameters
    ----------
    fraction : dimensionless (0.05 is 5 %). signed : write the + of positive ones too.
    digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``5%`` or ``+0.1%``.

    See Also
    --------
    parse_percent
    """
    return f"{'+' if signed and fraction > 0 else ''}{plain(fraction, -2, digits)}%"


def format_tolerance(tolerance: Tolerance, *, digits: int | None = None) -> str:
    """Write a tolerance.

    Parameters
    ----------
    tolerance : as fractions. digits : significant digits, or None for exact.

    Returns
    -------
    ``5%`` where both ends are alike, else ``-20/+80%``.

    See Also
    --------
    parse_tolerance
    """
    minus, plus = (plain(end, -2, digits) for end in (tolerance.minus, tolerance.plus))
    return f"{plus}%" if minus == plus else f"-{minus}/+{plus}%"
