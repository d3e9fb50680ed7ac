"""Durations: ``90s``, ``1.5min``, ``2h``, ``12ms``, ``1:30``, ``2h30min``.

Conventions
-----------
Seconds inside. A clock text of two groups is m:ss, of three h:mm:ss. A lone ``m`` may be
minutes or milli and is refused; between hours and seconds it can only be minutes.
"""

from __future__ import annotations

import re
from fractions import Fraction
from math import isfinite

from chooser.errors import UnreadableValueError
from chooser.quantities.decimals import (
    NUMBER,
    around_point,
    clean,
    doubtful,
    exact_digits,
    plain,
    read_number,
)

_EXAMPLE = "90s, 1.5min, 2h, 12ms or 1:30"
_IN_SECONDS = 120
"""Below this many seconds an interval is written in one unit."""

_LEAST, _MOST = Fraction(1, 10**9), Fraction(10**10)

_UNITS: dict[str, Fraction] = {
    **dict.fromkeys(("ns", "nsec", "nanosecond", "nanoseconds"), Fraction(1, 10**9)),
    **dict.fromkeys(("us", "usec", "microsecond", "microseconds"), Fraction(1, 10**6)),
    **dict.fromkeys(("ms", "msec", "millisecond", "milliseconds"), Fraction(1, 1000)),
    **dict.fromkeys(("s", "sec", "secs", "second", "seconds"), Fraction(1)),
    **dict.fromkeys(("min", "mins", "minute", "minutes"), Fraction(60)),
    **dict.fromkeys(("h", "hr", "hrs", "hour", "hours"), Fraction(3600)),
    **dict.fromkeys(("d", "day", "days"), Fraction(86400)),
}
_CLOCK = re.compile(r"([0-9]+):([0-9]{2})(?::([0-9]{2}))?(?:[.,]([0-9]+))?")
_PIECE = rf"({NUMBER}) ?([A-Za-z]+)"
_PIECES = re.compile(rf"{_PIECE}(?: ?{_PIECE})*")


def parse_duration(text: str) -> float:
    """Read a duration.

    Parameters
    ----------
    text : any text.

    Returns
    -------
    Seconds, finite and > 0.

    Raises
    ------
    AmbiguousValueError
        For a number without unit, a lone ``m``, and ``1,500 s``.
    UnreadableValueError
        Where it is no duration.

    See Also
    --------
    format_duration
    """
    cleaned = clean(text, "a duration", _EXAMPLE)
    clock = _CLOCK.fullmatch(cleaned)
    if clock:
        return _checked(text, _clock(text, clock))
    if re.fullmatch(NUMBER, cleaned):
        readings = [
            f"{number}{unit}" for number in read_number(cleaned, text) for unit in ("s", "min")
        ]
        raise doubtful(text, readings, parse_duration, "has no unit")
    if not _PIECES.fullmatch(cleaned):
        raise _unreadable(text, cleaned)
    return _checked(text, _sum(text, re.findall(_PIECE, cleaned)))


def _clock(text: str, clock: re.Match[str]) -> Fraction:
    """Add up ``m:ss`` or ``h:mm:ss``."""
    groups = [group for group in clock.group(1, 2, 3) if group is not None]
    if any(int(group) >= 60 for group in groups[1:]):  # noqa: PLR2004
        raise UnreadableValueError(
            text,
            "has 60 or more after a colon",
            "write m:ss such as 1:30 or h:mm:ss such as 1:02:03",
        )
    total = Fraction(0)
    for group in groups:
        total = total * 60 + int(group)
    return total + Fraction(f"0.{clock[4] or 0}")


def _sum(text: str, pieces: list[tuple[str, str]]) -> Fraction:
    """Add up ``2h 30min``: units falling, each number but the first below the next unit."""
    units = [_unit(text, pieces, place) for place in range(len(pieces))]
    if units != sorted(set(units), reverse=True):
        raise UnreadableValueError(
            text, "does not name its units from large to small, each once", "write it like 2h 30min"
        )
    total = Fraction(0)
    for place, (typed, name) in enumerate(pieces):
        numbers = read_number(typed, text)
        if len(numbers) > 1:
            raise doubtful(text, [f"{number}{name}" for number in numbers], parse_duration)
        amount = Fraction(str(numbers[0])) * units[place]
        if place and not 0 <= amount < units[place - 1]:
            raise UnreadableValueError(
                text, f"has {typed}{name} beside a larger unit", "write it like 2h 30min"
            )
        total += amount
    return total


def _unit(text: str, pieces: list[tuple[str, str]], place: int) -> Fraction:
    """Look up the unit of one piece, in seconds."""
    number, name = pieces[place]
    if name.lower() == "m":
        before = pieces[place - 1][1].lower() if place else ""
        after = pieces[place + 1][1].lower() if place + 1 < len(pieces) else ""
        if _UNITS.get(before) == _UNITS["h"] or _UNITS.get(after) == _UNITS["s"]:
            return _UNITS["min"]
        raise doubtful(text, [f"{number}min", f"{number}ms"], parse_duration)
    if name.startswith("M") and _UNITS.get(name.lower()) == _UNITS["ms"]:
        # A large M is mega; nobody means that, but who wrote it may not have meant milli either.
        raise doubtful(
            text, [f"{number}ms", f"{number}min"], parse_duration, "has a capital M, which is mega"
        )
    if name.lower() in _UNITS:
        return _UNITS[name.lower()]
    raise _unreadable(text, " ".join("".join(piece) for piece in pieces))


def _checked(text: str, seconds: Fraction) -> float:
    """Refuse zero, negative and unbelievable durations."""
    if seconds <= 0:
        state = "zero" if seconds == 0 else "below zero"
        raise UnreadableValueError(text, f"is {state}, which is no interval", f"write {_EXAMPLE}")
    if not _LEAST <= seconds <= _MOST:
        raise UnreadableValueError(
            text, "is no believable duration", "write one between 1ns and 100000d"
        )
    return float(seconds)


def _unreadable(text: str, cleaned: str) -> UnreadableValueError:
    """Make the refusal, with a near reading where there is one."""
    advice = f"write it like {_EXAMPLE}"
    for pattern, near in (
        (r"([0-9]+) ?h(?:ou)?r?s? ?([0-9]+)", "{}h{}min"),
        (r"([0-9]+) ?m(?:in)? ?([0-9]+)", "{}min{}s"),
        (r"([0-9]+):([0-9])", "{}:0{}"),
        (r"([0-9]+)[;.]([0-9]{2}) ?(?:min|h)?", "{}:{}"),
        (r"([0-9]+)' ?([0-9]+)(?:''|\")?", "{}min{}s"),
    ):
        match = re.fullmatch(pattern, cleaned, re.IGNORECASE)
        if match and _reads(near.format(*match.groups())):
            advice = f"perhaps {near.format(*match.groups())} was meant"
            break
    return UnreadableValueError(text, "is not a duration", advice)


def _reads(candidate: str) -> bool:
    """Tell whether a near text is a duration."""
    try:
        parse_duration(candidate)
    except UnreadableValueError:
        return False
    return True


def format_duration(seconds: float, *, digits: int | None = None) -> str:
    """Write a duration.

    Parameters
    ----------
    seconds : s. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``12 ms``, ``90.1 s``, ``12 min 5 s`` or ``2 h 05 min``; below two minutes
    in one unit. An infinite duration is ``never``.

    See Also
    --------
    parse_duration
    """
    if seconds == 0 or not isfinite(seconds):
        return "0 s" if seconds == 0 else "never" if seconds == float("inf") else str(seconds)
    if seconds < 0:
        return f"-{format_duration(-seconds, digits=digits)}"
    figures, exponent = exact_digits(seconds, digits)
    for power, unit in ((-9, "ns"), (-6, "us"), (-3, "ms")):
        if exponent + len(figures) <= power + 3:
            return f"{plain(seconds, power, digits)} {unit}"
    whole, fraction = around_point(figures, exponent)
    if int(whole) < _IN_SECONDS or int(whole) > _MOST:
        return f"{plain(seconds, 0, digits)} s"
    return _in_pieces(int(whole), fraction)


def _in_pieces(whole: int, fraction: str) -> str:
    """Write whole seconds and the digits behind them as hours, minutes and seconds."""
    minutes, left = divmod(whole, 60)
    hours, minutes = divmod(minutes, 60)
    pieces = [f"{hours} h"] if hours else []
    rest = f"{left:02}" + (f".{fraction}" if fraction else "")
    has_rest = bool(left or fraction)
    if minutes or has_rest or not hours:
        pieces.append(f"{minutes:02} min" if hours else f"{minutes} min")
    if has_rest:
        pieces.append(f"{rest} s")
    return " ".join(pieces)
