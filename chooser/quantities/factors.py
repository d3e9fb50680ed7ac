"""Bare factors, with or without a tolerance: ``0.83``, ``0.83 2%``.

Conventions
-----------
A factor has no unit; its tolerance follows it and carries a % sign, so that nothing else that
stands behind a number is taken for one.
"""

from __future__ import annotations

import re

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.parts import Tolerance
from chooser.quantities.decimals import NUMBER, clean, doubtful, plain, read_number
from chooser.quantities.tolerances import format_tolerance, parse_tolerance

_EXAMPLE = "0.83 or 0.83 2%"
_FACTOR = re.compile(rf"(?P<number>{NUMBER})(?: ?(?P<tolerance>[^%A-Za-z][^A-Za-z]*%))?")
_PERCENTAGE = re.compile(rf"(?P<number>{NUMBER}) ?(?:%|percent|pct)", re.IGNORECASE)
_LEAST, _MOST = 1e-6, 1e6


def parse_factor(text: str) -> tuple[float, Tolerance | None]:
    """Read a factor such as the K of an interval K R C: ``0.83``, ``0.83 2%``, ``0.7 ±5%``.

    Parameters
    ----------
    text : any text.

    Returns
    -------
    The factor, dimensionless, > 0; and its tolerance, None where none was written.

    Raises
    ------
    AmbiguousValueError
        For ``1,234`` and for a tolerance with several readings.
    UnreadableValueError
        Where it is no factor.

    See Also
    --------
    format_factor
    """
    cleaned = clean(text, "a factor", _EXAMPLE)
    percentage = _PERCENTAGE.fullmatch(cleaned)
    if percentage:
        readings = [plain(n.scaled(-2)) for n in read_number(percentage["number"], text)]
        raise doubtful(text, readings, parse_factor, "is a percentage where a factor is wanted")
    match = _FACTOR.fullmatch(cleaned)
    if match is None:
        raise UnreadableValueError(text, "is not a factor", f"write it like {_EXAMPLE}")
    numbers = read_number(match["number"], text)
    if len(numbers) > 1:
        behind = f" {match['tolerance']}" if match["tolerance"] else ""
        raise doubtful(text, [f"{number}{behind}" for number in numbers], parse_factor)
    value = numbers[0].scaled(0)
    if not _LEAST <= value <= _MOST:
        state = "is zero" if value == 0 else "is below zero" if value < 0 else "is not believable"
        raise UnreadableValueError(text, f"{state} as a factor", f"write it like {_EXAMPLE}")
    return value, _tolerance(text, match["number"], match["tolerance"])


def _tolerance(text: str, number: str, typed: str | None) -> Tolerance | None:
    """Read what stands behind the factor."""
    if typed is None:
        return None
    try:
        return parse_tolerance(typed)
    except AmbiguousValueError as error:
        readings = [f"{number} {reading}" for reading in error.readings]
        raise AmbiguousValueError(text, readings) from None
    except UnreadableValueError as error:
        problem = f"has a tolerance, {typed}, that {error.problem}"
        raise UnreadableValueError(text, problem, error.advice) from None


def format_factor(value: float, tolerance: Tolerance | None = None) -> str:
    """Write a factor exactly, with its tolerance where it has one.

    Parameters
    ----------
    value : dimensionless. tolerance : as fractions, or None.

    Returns
    -------
    Text such as ``0.83`` or ``0.83 2%``.

    See Also
    --------
    parse_factor
    """
    return plain(value) + (f" {format_tolerance(tolerance)}" if tolerance else "")
