"""Ranges of values: ``10..1M``, ``1n..1u``.

Conventions
-----------
Both ends belong to the range, and the low end stands first. A resistance without a unit is
ohm, as everywhere.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.quantities.decimals import clean
from chooser.quantities.notation import read
from chooser.quantities.units import CAPACITANCE, RESISTANCE

_DIVIDER = re.compile(
    r" ?(?<!\.)\.\.(?!\.) ?| ?… ?| to |(?<=[0-9A-Za-z])(?<![0-9][eE]) ?-(?= ?[0-9])", re.IGNORECASE
)


@dataclass(frozen=True, slots=True)
class Span:
    """A range of values, both ends included.

    Attributes
    ----------
    low, high : ends in one SI unit, 0 < low < high.
    """

    low: float
    high: float


def parse_resistance_range(text: str) -> Span:
    """Read a range of resistances: ``10..1M``, ``1k..10k``.

    Parameters
    ----------
    text : any text; a bare end is ohm.

    Returns
    -------
    Span
        In ohm.

    Raises
    ------
    AmbiguousValueError
        Where an end has several readings.
    UnreadableValueError
        Where it is no range, or runs backwards.

    See Also
    --------
    parse_resistance
    """
    low, high = _ends(text, "a range of resistances", "10..1M")
    return _span(text, low, high, lambda end: read(end, RESISTANCE))


def parse_capacitance_range(text: str) -> Span:
    """Read a range of capacitances: ``1n..1u``.

    Parameters
    ----------
    text : any text; both ends need their unit.

    Returns
    -------
    Span
        In farad.

    Raises
    ------
    AmbiguousValueError
        Where an end has no unit or several readings.
    UnreadableValueError
        Where it is no range, or runs backwards.

    See Also
    --------
    parse_capacitance
    """
    low, high = _ends(text, "a range of capacitances", "1n..1u")
    return _span(text, low, high, lambda end: read(end, CAPACITANCE))


def is_range(text: str) -> bool:
    """Tell whether a text has the form of a range, whatever stands at its ends."""
    try:
        _ends(text, "a range", "5s..60s")
    except UnreadableValueError:
        return False
    return True


def _ends(text: str, what: str, example: str) -> tuple[str, str]:
    """Cut a range in two."""
    ends = _DIVIDER.split(clean(text, what, example))
    if len(ends) != 2 or not all(ends):  # noqa: PLR2004 - two ends
        raise UnreadableValueError(text, f"is not {what}", f"write low..high such as {example}")
    return ends[0], ends[1]


def _span(text: str, low: str, high: str, parse: Callable[[str], float]) -> Span:
    """Read both ends, saying in a refusal which range they belong to."""
    values = []
    for end in (low, high):
        try:
            values.append(parse(end))
        except AmbiguousValueError as error:
            problem = f"has an end, {end}, that can be read in more than one way"
            raise AmbiguousValueError(text, error.readings, problem) from None
        except UnreadableValueError as error:
            problem = f"has an end, {end}, that {error.problem}"
            raise UnreadableValueError(text, problem, error.advice) from None
    if values[0] >= values[1]:
        state = "is empty" if values[0] == values[1] else "runs backwards"
        raise UnreadableValueError(text, state, "write two ends, the smaller one first")
    return Span(values[0], values[1])
