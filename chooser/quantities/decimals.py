"""Decimal text and floats, both ways and exactly: the ground the other readers stand on.

A number is kept as the digits that were typed until the very end, so that "4.7" with the
prefix kilo becomes float("4.7e3") and never 4.7 * 1000.

Conventions
-----------
The decimal mark is a point or a comma. A comma followed by exactly three digits may group
thousands as well, so such a number has two readings and nobody here chooses between them.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from decimal import Decimal
from math import isfinite

from chooser.errors import AmbiguousValueError, UnreadableValueError

LONGEST = 60
"""Characters a value may have; anything longer is a pasted page, not a value."""

_SAME_SIGN = str.maketrans(
    {
        "\N{MICRO SIGN}": "u",
        "\N{GREEK SMALL LETTER MU}": "u",
        "\N{OHM SIGN}": "ohm",
        "\N{GREEK CAPITAL LETTER OMEGA}": "ohm",
        "\N{MINUS SIGN}": "-",
        "\N{EN DASH}": "-",
    }
)

NUMBER = r"[+-]?(?:[0-9]+(?:[.,][0-9]+)*|[.,][0-9]+)(?:[eE][+-]?[0-9]{1,3})?(?![0-9.,])"
"""Pattern of one number, sign and exponent included."""

_NUMBER_PARTS = re.compile(
    r"(?P<sign>[+-]?)(?P<digits>[0-9.,]+)(?:[eE](?P<exponent>[+-]?[0-9]{1,3}))?"
)
_MAYBE_GROUPED = re.compile(r"[1-9][0-9]{0,2},[0-9]{3}")


@dataclass(frozen=True, slots=True)
class Number:
    """A decimal number as typed: digits x 10^exponent.

    Attributes
    ----------
    digits : sign, digits and at most one decimal point. exponent : power of ten, dimensionless.
    """

    digits: str
    exponent: int = 0

    def scaled(self, power: int) -> float:
        """Give the float nearest to this number x 10^power (dimensionless)."""
        return float(f"{self.digits}e{self.exponent + power}")

    def __str__(self) -> str:
        return f"{self.digits}e{self.exponent}" if self.exponent else self.digits


def clean(text: str, what: str, example: str) -> str:
    """Unify the spellings of micro, ohm, minus and spaces.

    Parameters
    ----------
    text : any text. what : what is wanted, with its article, for the message.
    example : how such a value is written, for the message.

    Returns
    -------
    The text with single spaces, ``u`` for micro, ``ohm`` for the omega sign, ASCII minus.

    Raises
    ------
    UnreadableValueError
        Where nothing is left, or the text is far too long for a value.
    """
    if len(text) > LONGEST:
        problem = f"is {len(text)} characters long, too long for {what}"
        raise UnreadableValueError(f"{text[:20]}…", problem, f"write it like {example}")
    cleaned = " ".join(text.translate(_SAME_SIGN).split())
    if not cleaned:
        raise UnreadableValueError(text, f"is empty where {what} is wanted", f"write {example}")
    return cleaned


def read_number(text: str, whole: str | None = None) -> tuple[Number, ...]:
    """Read one number in each way it can be meant.

    Parameters
    ----------
    text : matches `NUMBER`. whole : the text it stands in, for the message.

    Returns
    -------
    One `Number`, or two where a comma may be a decimal mark or group thousands.

    Raises
    ------
    UnreadableValueError
        Where separators group the digits.
    """
    match = _NUMBER_PARTS.fullmatch(text)
    if match is None:
        raise UnreadableValueError(text if whole is None else whole, "is not a number")
    digits, exponent = match["digits"], int(match["exponent"] or 0)
    marks = digits.count(",") + digits.count(".")
    if marks > 1:
        raise _grouped(text if whole is None else whole, digits)
    readings = [digits.replace(",", ".")]
    if _MAYBE_GROUPED.fullmatch(digits):
        readings.append(digits.replace(",", ""))
    sign = "-" if match["sign"] == "-" else ""
    return tuple(Number(sign + reading, exponent) for reading in readings)


def doubtful(
    text: str, readings: Sequence[str], parse: Callable[[str], object], problem: str = ""
) -> UnreadableValueError:
    """Make the refusal of a text with several readings, naming only those that can be typed.

    Parameters
    ----------
    text : what was read. readings : what it could mean, at least one.
    parse : the reader of such texts. problem : why it is refused, or "".

    Returns
    -------
    An `AmbiguousValueError`; where no reading is a value, what is wrong with the first.
    """
    failure: UnreadableValueError | None = None
    typeable = []
    for reading in dict.fromkeys(readings):
        try:
            parse(reading)
        except UnreadableValueError as error:
            failure = failure or error
        else:
            typeable.append(reading)
    if typeable or failure is None:
        return AmbiguousValueError(text, typeable, problem)
    return UnreadableValueError(text, failure.problem, failure.advice)


def _grouped(whole: str, digits: str) -> UnreadableValueError:
    """Make the refusal of grouped digits, with the number as it should be written."""
    for group, point in ((",", "."), (".", ",")):
        pattern = rf"[0-9]{{1,3}}(?:\{group}[0-9]{{3}})+(?:\{point}[0-9]+)?"
        if re.fullmatch(pattern, digits):
            plain = digits.replace(group, "").replace(point, ".")
            return UnreadableValueError(
                whole, "has separators between its digits", f"write {plain} without them"
            )
    return UnreadableValueError(
        whole, "has more than one decimal mark", "write one number such as 4.7"
    )


def exact_digits(value: float, digits: int | None = None) -> tuple[str, int]:
    """Take a float apart into decimal digits and a power of ten.

    Parameters
    ----------
    value : finite and > 0, any unit. digits : significant digits to round to, or None for
        the shortest ones that read back as the same float.

    Returns
    -------
    Digits without trailing zeros, and the power of ten of the last of them (dimensionless).
    """
    text = repr(value) if digits is None else f"{value:.{max(digits, 1) - 1}e}"
    _, numerals, exponent = Decimal(text).as_tuple()
    figures = "".join(map(str, numerals))
    stripped = figures.rstrip("0") or "0"
    return stripped, int(exponent) + len(figures) - len(stripped)


def around_point(figures: str, exponent: int) -> tuple[str, str]:
    """Write figures x 10^exponent as the digits before and after the decimal mark.

    Parameters
    ----------
    figures : decimal digits. exponent : power of ten of the last one, dimensionless.

    Returns
    -------
    Digits before ("0" where there are none) and after ("" where there are none) the mark.
    """
    if exponent >= 0:
        return figures + "0" * exponent, ""
    padded = figures.rjust(1 - exponent, "0")
    return padded[:exponent].lstrip("0") or "0", padded[exponent:]


def plain(value: float, power: int = 0, digits: int | None = None) -> str:
    """Write value / 10^power in plain decimals.

    Parameters
    ----------
    value : any float, any unit. power : power of ten to divide by, dimensionless.
    digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``4.7``; very small and very large ones with an exponent.
    """
    if value == 0 or not isfinite(value):
        return "0" if value == 0 else str(value)
    sign = "-" if value < 0 else ""
    figures, exponent = exact_digits(abs(value), digits)
    exponent -= power
    if not -20 < exponent + len(figures) <= 20:  # noqa: PLR2004 - longer ones nobody can count
        return f"{sign}{figures}e{exponent}"
    whole, fraction = around_point(figures, exponent)
    return f"{sign}{whole}.{fraction}" if fraction else f"{sign}{whole}"
