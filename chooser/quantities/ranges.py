"""Ranges of values: ``10..1M``, ``1n..1u``, ``5..60s``, ``50..55%``, ``0..40C``.

Conventions
-----------
Both ends belong to the range, and the low end stands first. A resistance without a unit is
ohm, as everywhere. The unit of durations, percentages and temperatures may stand at the high
end alone.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.quantities.decimals import NUMBER, clean
from chooser.quantities.durations import parse_duration
from chooser.quantities.notation import is_bare, read
from chooser.quantities.temperatures import parse_temperature
from chooser.quantities.tolerances import parse_percent
from chooser.quantities.units import CAPACITANCE, RESISTANCE

_DIVIDER = re.compile(
    r" ?(?<!\.)\.\.(?!\.) ?| ?… ?| to "
    r"|(?<=[0-9A-Za-z%\N{DEGREE CELSIUS}])(?<![0-9][eE]) ?-(?= ?[0-9])",
    re.IGNORECASE,
)
_WITH_UNIT = re.compile(rf"{NUMBER}(?P<unit>[^0-9.,]+)")


@dataclass(frozen=True, slots=True)
class Span:
    """A range of values, both ends included.

    Attributes
    ----------
    low, high : ends in one unit, low <= high. Values of parts and durations are above zero,
        fractions are not below it, temperatures may be; only these may have equal ends.
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


def parse_duration_range(text: str) -> Span:
    """Read a range of durations: ``5s..60s``, ``5..60s``, ``1:30..5:00``.

    Parameters
    ----------
    text : any text; a bare low end has the unit of the high one.

    Returns
    -------
    Span
        In second.

    Raises
    ------
    AmbiguousValueError
        Where an end has no unit or several readings.
    UnreadableValueError
        Where it is no range, or runs backwards.

    See Also
    --------
    parse_duration
    """
    return _sharing_unit(text, "a range of durations", "5s..60s", parse_duration)


def parse_percent_range(text: str) -> Span:
    """Read a range of percentages: ``50..55%``, ``50%..55%``.

    Parameters
    ----------
    text : any text; a bare low end is percent where the high one is.

    Returns
    -------
    Span
        As fractions (50 % is 0.5), 0 <= low < high.

    Raises
    ------
    AmbiguousValueError
        Where an end has no % sign or several readings.
    UnreadableValueError
        Where it is no range, or runs backwards.

    See Also
    --------
    parse_percent
    """
    return _sharing_unit(text, "a range of percentages", "50..55%", parse_percent)


def parse_temperature_range(text: str) -> Span:
    """Read a temperature or a range of them: ``0..40C``, ``-10..+50 °C``, ``25C``.

    Parameters
    ----------
    text : any text; a bare low end has the unit of the high one.

    Returns
    -------
    Span
        In degree Celsius; low equals high where one temperature was written.

    Raises
    ------
    AmbiguousValueError
        Where an end has no unit or several readings.
    UnreadableValueError
        Where it is no temperature, is in another unit, or runs backwards.

    See Also
    --------
    parse_temperature
    """
    if not is_range(text):
        single = parse_temperature(text)
        return Span(single, single)
    return _sharing_unit(text, "a range of temperatures", "0..40C", parse_temperature)


def is_range(text: str) -> bool:
    """Tell whether a text has the form of a range, whatever stands at its ends."""
    try:
        _ends(text, "a range", "5s..60s")
    except UnreadableValueError:
        return False
    return True


def _ends(text: str, what: str, example: str) -> tuple[str, str]:
    """Cut a range in two."""
    ends = [end.strip() for end in _DIVIDER.split(clean(text, what, example))]
    if len(ends) != 2 or not all(ends):  # noqa: PLR2004 - two ends
        raise UnreadableValueError(text, f"is not {what}", f"write low..high such as {example}")
    return ends[0], ends[1]


def _sharing_unit(text: str, what: str, example: str, parse: Callable[[str], float]) -> Span:
    """Read a range whose unit may stand at the high end alone."""
    low, high = _ends(text, what, example)
    match = _WITH_UNIT.fullmatch(high)
    if match is None or not is_bare(low):
        return _span(text, low, high, parse)
    read_as = low + match["unit"]
    if _end(text, high, parse) < _end(text, read_as, parse):
        problem = f"runs backwards, as its low end is read as {read_as}"
        raise UnreadableValueError(text, problem, "write two ends, each with its unit")
    return _span(text, read_as, high, parse)


def _span(text: str, low: str, high: str, parse: Callable[[str], float]) -> Span:
    """Read both ends in their order."""
    values = _end(text, low, parse), _end(text, high, parse)
    if values[0] >= values[1]:
        state = "is empty" if values[0] == values[1] else "runs backwards"
        raise UnreadableValueError(text, state, "write two ends, the smaller one first")
    return Span(*values)


def _end(text: str, end: str, parse: Callable[[str], float]) -> float:
    """Read an end, saying in a refusal which range it belongs to."""
    try:
        return parse(end)
    except UnreadableValueError as error:
        problem = f"has an end, {end}, that {error.problem}"
        if isinstance(error, AmbiguousValueError):
            raise AmbiguousValueError(text, error.readings, problem) from None
        raise UnreadableValueError(text, problem, error.advice) from None
