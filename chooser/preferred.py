"""Preferred numbers, IEC 60063: the series E3 to E192, and kits made of them.

E3 to E24 are a historic table (E24 departs from the formula in eight places). E48, E96 and
E192 are round(100 x 10^(k/n)) with one exception, 920 instead of 919 in E192 (from memory).

Conventions
-----------
Numbers of a decade are integers: two digits up to E24, three from E48 on. Values made of them
are the floats of their decimal text: 4.7e-9, never 47 * 1e-10.
"""

from __future__ import annotations

import re
from bisect import bisect_left
from fractions import Fraction
from functools import cache
from math import floor, isfinite, log10

from chooser.errors import (
    AmbiguousValueError,
    BadRequestError,
    UnknownNameError,
    UnreadableValueError,
)
from chooser.parts import Kind
from chooser.quantities.decimals import clean
from chooser.quantities.ranges import Span, parse_capacitance_range, parse_resistance_range

SERIES_NAMES = ("E3", "E6", "E12", "E24", "E48", "E96", "E192")

_E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)  # fmt: skip  # noqa: E501
_E192_EXCEPTIONS = {919: 920}


@cache
def series(name: str) -> tuple[int, ...]:
    """List the numbers of one decade of a series.

    Parameters
    ----------
    name : ``E3``, ``E6``, ``E12``, ``E24``, ``E48``, ``E96`` or ``E192``, any case.

    Returns
    -------
    Rising integers, dimensionless: from 10 up to E24, from 100 for the finer series.

    Raises
    ------
    UnknownNameError
        For any other name.

    References
    ----------
    IEC 60063, preferred number series for resistors and capacitors.
    """
    wanted = name.strip().upper()
    if wanted not in SERIES_NAMES:
        known = ", ".join(SERIES_NAMES)
        raise UnknownNameError(
            f"{name[:20]!r} is no series of preferred numbers; use one of {known}."
        )
    size = int(wanted[1:])
    if size <= len(_E24):
        return _E24[:: len(_E24) // size]
    numbers = (round(100 * 10 ** (step / size)) for step in range(size))
    return tuple(_E192_EXCEPTIONS.get(number, number) for number in numbers)


def values_between(name: str, low: float, high: float) -> list[float]:
    """List the values of a series from low to high.

    Parameters
    ----------
    name : of the series. low, high : ends in any one unit, both > 0 and both included.

    Returns
    -------
    Rising values in the unit of the ends, each the float of its decimal text.

    Raises
    ------
    BadRequestError
        Where the ends are not finite, not above zero, or the wrong way round.
    UnknownNameError
        For an unknown series.
    """
    _check_positive(low, high)
    if low > high:
        raise BadRequestError(f"The range from {low:g} to {high:g} runs backwards; swap its ends.")
    decades = range(floor(log10(low)) - 1, floor(log10(high)) + 2)
    values = (value for decade in decades for value in _decade(name, decade))
    return [value for value in values if low <= value <= high]


def nearest(name: str, value: float) -> float:
    """Find the value of a series with the smallest ratio to a value, the lower one on a tie.

    Parameters
    ----------
    name : of the series. value : finite and > 0, any unit.

    Returns
    -------
    The preferred value, in the same unit.

    Raises
    ------
    BadRequestError
        Where the value is not finite or not above zero.
    UnknownNameError
        For an unknown series.
    """
    _check_positive(value)
    decade = floor(log10(value))
    around = [near for shift in (-1, 0, 1) for near in _decade(name, decade + shift)]
    place = bisect_left(around, value)
    below, above = around[max(place - 1, 0)], around[place]
    # In exact fractions: value / below against above / value, without rounding at the border.
    nearer_below = Fraction(value) ** 2 <= Fraction(below) * Fraction(above)
    return below if nearer_below else above


_KIT = re.compile(r"(?P<series>E[0-9]+)[,: ]+(?P<range>.+)", re.IGNORECASE)


def is_kit(text: str) -> bool:
    """Tell whether a text has the form of a kit, ``E12 10..1M``, readable or not."""
    return (
        re.match(r"\s*E[0-9]+[\s,:]*[^\s,:].*?(?:\.\.|…|-|\bto\b)", text, re.IGNORECASE) is not None
    )


def parse_kit(text: str, kind: Kind) -> tuple[float, ...]:
    """Read a kit: ``E12 10..1M`` for resistors and pots, ``E6 1n..1u`` for capacitors.

    Parameters
    ----------
    text : any text. kind : what the kit holds.

    Returns
    -------
    Rising values in ohm or farad, at least one, both ends of the range included.

    Raises
    ------
    AmbiguousValueError
        Where an end has several readings.
    UnreadableValueError
        Where it is no kit, or no value of the series lies in the range.
    """
    example = "E6 1n..1u" if kind is Kind.CAPACITOR else "E12 10..1M"
    match = _KIT.fullmatch(clean(text, "a kit", example))
    if match is None:
        raise UnreadableValueError(text, "is not a kit", f"write it like {example}")
    name = match["series"].upper()
    if name not in SERIES_NAMES:
        known = ", ".join(SERIES_NAMES)
        raise UnreadableValueError(text, f"names no known series ({name})", f"use one of {known}")
    span = _span(text, match["range"], kind)
    values = tuple(values_between(name, span.low, span.high))
    if not values:
        raise UnreadableValueError(text, f"has no value of {name} in it", "widen the range")
    return values


def _span(text: str, typed: str, kind: Kind) -> Span:
    """Read the range of a kit, naming the whole kit in a refusal."""
    parse = parse_capacitance_range if kind is Kind.CAPACITOR else parse_resistance_range
    try:
        return parse(typed)
    except AmbiguousValueError as error:
        raise AmbiguousValueError(text, error.readings, error.problem) from None
    except UnreadableValueError as error:
        raise UnreadableValueError(text, error.problem, error.advice) from None


@cache
def _decade(name: str, decade: int) -> tuple[float, ...]:
    """List the values from 10^decade to just below 10^(decade + 1)."""
    numbers = series(name)
    power = decade - (len(str(numbers[0])) - 1)
    return tuple(float(f"{number}e{power}") for number in numbers)


def _check_positive(*values: float) -> None:
    for value in values:
        if not (isfinite(value) and value > 0):
            raise BadRequestError(
                f"{value} is no value of a part; it must be finite and above zero."
            )
