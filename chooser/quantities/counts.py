"""Counts and other plain numbers of a stock sheet: pieces, turns, prices, tempco.

Conventions
-----------
``20`` is exact, ``~50`` is rough, ``plenty`` never limits. Whether ``1,000`` or ``1.000``
pieces are one or a thousand depends on the country, so both are refused.
"""

from __future__ import annotations

import re
from collections.abc import Callable

from chooser.errors import UnreadableValueError
from chooser.parts import Count, Sureness
from chooser.quantities.decimals import NUMBER, clean, doubtful, plain, read_number

_MOST_PIECES = 1_000_000
_EXAMPLE = "20, ~50 or plenty"
_ROUGH = re.compile(
    r"(?:~|\N{ALMOST EQUAL TO}|about|approx\.?|ca\.?|circa|roughly) ?", re.IGNORECASE
)
_PIECES = re.compile(r" ?(?:pieces?|pcs?\.?|off|x)", re.IGNORECASE)


def parse_count(text: str) -> Count:
    """Read a count: ``20``, ``~50``, ``plenty``.

    Parameters
    ----------
    text : any text.

    Returns
    -------
    Count
        Pieces >= 0 (dimensionless), and how well they are known.

    Raises
    ------
    AmbiguousValueError
        For ``1,000`` and ``1.000``.
    UnreadableValueError
        Where it is no count; negative and fractional ones are none.

    See Also
    --------
    format_count
    """
    cleaned = clean(text, "a count", _EXAMPLE)
    if cleaned.lower() == "plenty":
        return Count(0, Sureness.PLENTY)
    rough = _ROUGH.match(cleaned)
    typed = cleaned[rough.end() :] if rough else cleaned
    number = _whole(text, _without_pieces(typed), "~" if rough else "")
    return Count(number, Sureness.ROUGH if rough else Sureness.EXACT)


def format_count(count: Count) -> str:
    """Write a count.

    Parameters
    ----------
    count : pieces, dimensionless.

    Returns
    -------
    ``20``, ``~50`` or ``plenty``.

    See Also
    --------
    parse_count
    """
    if count.sureness is Sureness.PLENTY:
        return "plenty"
    return f"{'~' if count.sureness is Sureness.ROUGH else ''}{count.number}"


def parse_pack(text: str) -> int:
    """Read the pieces in a pack: ``100``, ``100 pcs``.

    Parameters
    ----------
    text : any text.

    Returns
    -------
    Pieces > 0, dimensionless.

    Raises
    ------
    UnreadableValueError
        Where it is no whole number above zero.
    """
    pieces = _whole(text, _without_pieces(clean(text, "a pack size", "100")))
    if pieces == 0:
        raise UnreadableValueError(text, "is zero, and no pack is empty", "write it like 100")
    return pieces


def _without_pieces(typed: str) -> str:
    """Take the word for pieces off the end."""
    for match in _PIECES.finditer(typed):
        if match.end() == len(typed) and match.start() > 0:
            return typed[: match.start()]
    return typed


def _whole(text: str, typed: str, lead: str = "") -> int:
    """Read a whole number >= 0; lead is what stood before it."""
    if not re.fullmatch(NUMBER, typed):
        advice = "write the number of pieces, ~50 for about fifty, or plenty"
        raise UnreadableValueError(text, "is not a count", advice)
    if re.fullmatch(r"[+-]?[1-9][0-9]{0,2}[.,][0-9]{3}", typed):
        whole, thousands = re.split(r"[.,]", typed)
        readings = [lead + whole + thousands] + ([lead + whole] if int(thousands) == 0 else [])
        raise doubtful(text, readings, parse_count, "may have a decimal mark or group thousands")
    value = read_number(typed, text)[0].scaled(0)
    if value < 0:
        raise UnreadableValueError(text, "is below zero", f"write the pieces you have: {_EXAMPLE}")
    if value > _MOST_PIECES:
        advice = f"write at most {_MOST_PIECES}, or plenty"
        raise UnreadableValueError(text, "is no believable count", advice)
    if value != int(value):
        raise UnreadableValueError(text, "is not a whole number", f"write it like {_EXAMPLE}")
    return int(value)


_TURNS = re.compile(
    rf"(?P<number>{NUMBER}|[1-9]/[1-9])[ -]?(?P<unit>turns?|t|deg|degrees?|\N{{DEGREE SIGN}})?",
    re.IGNORECASE,
)
_MOST_TURNS = 100


def parse_turns(text: str) -> float:
    """Read the travel of a pot: ``25``, ``10 turns``, ``3/4``, ``270 deg``.

    Parameters
    ----------
    text : any text; a bare number is turns.

    Returns
    -------
    Turns, dimensionless, > 0.

    Raises
    ------
    UnreadableValueError
        Where it is no travel.
    """
    match = _TURNS.fullmatch(clean(text, "a number of turns", "25 or 270 deg"))
    if match is None:
        raise UnreadableValueError(text, "is not a number of turns", "write it like 25 or 270 deg")
    if "/" in match["number"]:
        above, below = match["number"].split("/")
        value = int(above) / int(below)
    else:
        value = _single(text, match["number"], parse_turns)
    if match["unit"] and not match["unit"].lower().startswith("t"):
        value /= 360
    if not 0 < value <= _MOST_TURNS:
        raise UnreadableValueError(text, "is no believable travel", "write it like 25 or 270 deg")
    return value


_PRICE = re.compile(rf"[$€£¥]? ?(?P<number>{NUMBER}) ?(?:[$€£¥]|[A-Za-z]{{3}})?")
_MOST_PRICE = 1e9


def parse_price(text: str) -> float:
    """Read a price: ``1.20``, ``1,20 EUR``, ``€0.35``.

    Parameters
    ----------
    text : any text; the currency is the user's own and is not kept.

    Returns
    -------
    The amount in the user's currency, >= 0.

    Raises
    ------
    AmbiguousValueError
        For ``1,000``.
    UnreadableValueError
        Where it is no price.
    """
    match = _PRICE.fullmatch(clean(text, "a price", "1.20"))
    if match is None:
        raise UnreadableValueError(text, "is not a price", "write it like 1.20")
    value = _single(text, match["number"], parse_price)
    if not 0 <= value <= _MOST_PRICE:
        raise UnreadableValueError(text, "is no believable price", "write it like 1.20")
    return value


_TEMPCO = re.compile(
    rf"(?:\N{{PLUS-MINUS SIGN}}|\+/-|\+-)? ?(?P<number>{NUMBER})"
    r" ?(?P<unit>ppm(?: ?/ ?(?:\N{DEGREE SIGN} ?)?[CK])?)?",
    re.IGNORECASE,
)
_MOST_PPM = 10_000
_LEAST_BARE_PPM = 0.5


def parse_tempco(text: str) -> float:
    """Read a temperature coefficient: ``100ppm``, ``±100 ppm/K``, ``-400``.

    Parameters
    ----------
    text : any text; a bare number is ppm/K.

    Returns
    -------
    1/K (100 ppm/K is 1e-4), with its sign.

    Raises
    ------
    AmbiguousValueError
        For a bare number so small that it may already be in 1/K.
    UnreadableValueError
        Where it is no temperature coefficient.

    See Also
    --------
    format_tempco
    """
    example = "100ppm or -400 ppm/K"
    match = _TEMPCO.fullmatch(clean(text, "a temperature coefficient", example))
    if match is None:
        problem = "is not a temperature coefficient"
        raise UnreadableValueError(text, problem, f"write it like {example}")
    ppm = _single(text, match["number"], parse_tempco)
    if not match["unit"] and 0 < abs(ppm) < _LEAST_BARE_PPM:
        readings = [f"{plain(ppm)}ppm", f"{plain(ppm, -6)}ppm"]
        raise doubtful(text, readings, parse_tempco, "has no unit")
    if abs(ppm) > _MOST_PPM:
        problem = "is no believable temperature coefficient"
        raise UnreadableValueError(text, problem, f"write it like {example}")
    return read_number(match["number"], text)[0].scaled(-6)


def format_tempco(per_kelvin: float, *, digits: int | None = None) -> str:
    """Write a temperature coefficient.

    Parameters
    ----------
    per_kelvin : 1/K. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``100 ppm/K``.

    See Also
    --------
    parse_tempco
    """
    return f"{plain(per_kelvin, -6, digits)} ppm/K"


def _single(text: str, typed: str, parse: Callable[[str], object]) -> float:
    """Read a number that has one reading."""
    numbers = read_number(typed, text)
    if len(numbers) > 1:
        raise doubtful(text, [str(number) for number in numbers], parse)
    return numbers[0].scaled(0)
