"""What is printed on the body of a capacitor: ``104``, ``473K``, ``4n7K``, ``4R7C``.

Three digits are two figures and a number of zeros, in pF (common practice); a third digit of
8 or 9 means x 0.01 and x 0.1 (from memory). A letter behind it is the tolerance, IEC 60062.

Conventions
-----------
Farad and fractions inside. Below 10 pF the letters B, C, D, F and G are absolute, in pF.
A code that ends in 0 is refused: ``470`` is 47 pF to some makers and 470 pF to others.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from chooser.errors import AmbiguousValueError, BadRequestError, UnreadableValueError
from chooser.parts import Tolerance
from chooser.quantities.decimals import Number, clean, exact_digits
from chooser.quantities.notation import read, reads
from chooser.quantities.tolerances import (
    DOUBTFUL_LETTERS,
    PICOFARAD_LETTERS,
    TOLERANCE_LETTERS,
    format_tolerance,
)
from chooser.quantities.units import CAPACITANCE, format_capacitance

_EXAMPLE = "104, 473K or 4n7"
_SMALL = 10e-12
_CODE = re.compile(r"(?P<figures>[1-9][0-9])(?P<zeros>[0-9])?(?: ?(?P<letter>[A-Za-z]))?")
_R_CODE = re.compile(r"(?P<before>[0-9]?)R(?P<after>[0-9]{1,2})(?P<letter>[A-Z])?")
_LETTERED = re.compile(r"(?P<value>.*[A-Za-z][0-9]*) ?(?P<letter>[A-Z])")
_SHRINKING = {"8": -2, "9": -1}


@dataclass(frozen=True, slots=True)
class MarkingReading:
    """What a marking says.

    Attributes
    ----------
    text : the marking. value : farad. tolerance : printed on it, or None.
    rule : how it was read, a short phrase for people.
    """

    text: str
    value: float
    tolerance: Tolerance | None
    rule: str


def parse_capacitor_marking(text: str) -> MarkingReading:
    """Read a capacitor's value where a body marking is allowed as well.

    Parameters
    ----------
    text : any text: a marking, or a value with its unit. In ``4n7F`` the F is farad.

    Returns
    -------
    MarkingReading
        Value in farad and the tolerance as fractions where a letter gives it.

    Raises
    ------
    AmbiguousValueError
        For bare numbers that are no code, codes ending in 0, and letters that may be a unit
        as well as a tolerance (``104N``).
    UnreadableValueError
        Where it is neither.

    References
    ----------
    IEC 60062, marking codes for resistors and capacitors.

    See Also
    --------
    format_capacitor_marking
    """
    cleaned = clean(text, "a capacitance or its marking", _EXAMPLE)
    code = _CODE.fullmatch(cleaned)
    if code and (code["zeros"] or code["letter"]):
        reading = _digit_code(text, code)
        if reading:
            return reading
    point = _R_CODE.fullmatch(cleaned)
    if point:
        value = Number(f"{point['before']}.{point['after']}").scaled(-12)
        return _with_letter(text, value, point["letter"], "R as the decimal mark, in pF")
    if reads(cleaned, CAPACITANCE):
        return MarkingReading(text, read(text, CAPACITANCE), None, "value with its unit")
    return _letter_code(text, cleaned)


def code_value(text: str) -> float | None:
    """Give what a text would be worth as a digit code.

    Parameters
    ----------
    text : any text.

    Returns
    -------
    Farad, or None where the text has not the form of a three-digit code.
    """
    match = _CODE.fullmatch(text.strip())
    if match is None or not match["zeros"] or not _is_tolerance_letter(match["letter"] or "K"):
        return None
    power = _SHRINKING.get(match["zeros"], int(match["zeros"]))
    return Number(match["figures"]).scaled(power - 12)


def _letter_code(text: str, cleaned: str) -> MarkingReading:
    """Read ``4n7K``, or refuse as the plain reader does."""
    lettered = _LETTERED.fullmatch(cleaned)
    if lettered and reads(lettered["value"], CAPACITANCE):
        value = read(lettered["value"], CAPACITANCE)
        return _with_letter(text, value, lettered["letter"], "letter code")
    near = _LETTERED.fullmatch(cleaned[:-1] + cleaned[-1].upper())
    if near and near["letter"] in TOLERANCE_LETTERS and reads(near["value"], CAPACITANCE):
        advice = f"perhaps {near.group()} was meant"
        raise UnreadableValueError(text, "is not a capacitance or its marking", advice)
    return MarkingReading(text, read(text, CAPACITANCE), None, "value with its unit")


def _digit_code(text: str, code: re.Match[str]) -> MarkingReading | None:
    """Read ``104``, ``473K`` or ``47K``; None where the letter can only be a unit."""
    letter, zeros = code["letter"] or "", code["zeros"] or ""
    if letter and not _is_tolerance_letter(letter):
        return None
    if zeros == "0":
        readings = [f"{code['figures']}p", f"{code['figures']}0p"]
        raise AmbiguousValueError(text, readings, "ends in 0, which makers use in two ways")
    value = Number(code["figures"]).scaled(_SHRINKING.get(zeros, int(zeros or 0)) - 12)
    if letter == "k" and not zeros:
        raise _perhaps_a_resistor(text, code["figures"])
    as_unit = _unit_readings(code["figures"] + zeros, letter)
    # A code with M is so common, and 104 mega- or millifarad so absurd, that M is not in doubt.
    if as_unit and not (letter == "M" and zeros):
        problem = f"may end in a unit or in the tolerance letter {letter.upper()}"
        raise AmbiguousValueError(text, [format_capacitance(value), *as_unit], problem)
    rule = (
        f"{code['figures']} x 10^{_SHRINKING.get(zeros, zeros)} pF"
        if zeros
        else "two figures in pF"
    )
    return _with_letter(text, value, letter.upper(), rule)


def _perhaps_a_resistor(text: str, figures: str) -> AmbiguousValueError:
    """Refuse ``10k``: hardly anyone types the marking 10K so, and everyone a resistor."""
    return AmbiguousValueError(
        text,
        [f"{figures}K", f"{figures}p"],
        f"may be the marking {figures}K ({figures}p with 10 %), or a resistor was meant",
    )


def _is_tolerance_letter(letter: str) -> bool:
    """Tell whether a letter behind a digit code may be a tolerance; small p, n, u are units."""
    known = letter.upper() in TOLERANCE_LETTERS or letter.upper() in DOUBTFUL_LETTERS
    return known and letter not in "pnu"


def _unit_readings(figures: str, letter: str) -> tuple[str, ...]:
    """List the readings of a code whose letter is taken as the unit."""
    if not letter:
        return ()
    if letter == "F" and len(figures) == 2:  # noqa: PLR2004 - a cell of some farad, 47F
        return (f"{figures} farad",)
    try:
        return (format_capacitance(read(figures + letter, CAPACITANCE)),)
    except AmbiguousValueError as error:
        return error.readings
    except UnreadableValueError:
        return ()


def _with_letter(text: str, value: float, letter: str | None, rule: str) -> MarkingReading:
    """Add the tolerance of a letter to a value in farad."""
    if not letter:
        return MarkingReading(text, value, None, rule)
    tolerance = _tolerance_of(text, value, letter)
    return MarkingReading(
        text, value, tolerance, f"{rule}, {letter} for {format_tolerance(tolerance, digits=3)}"
    )


def _tolerance_of(text: str, value: float, letter: str) -> Tolerance:
    """Look a tolerance letter up for a value in farad."""
    if value < _SMALL and letter in PICOFARAD_LETTERS:
        width = PICOFARAD_LETTERS[letter] / value
        if width >= 1:
            raise UnreadableValueError(
                text, "has a tolerance as wide as its value", "write value and tolerance apart"
            )
        return Tolerance(width, width)
    if letter in TOLERANCE_LETTERS:
        return TOLERANCE_LETTERS[letter]
    if letter in DOUBTFUL_LETTERS:
        written = format_capacitance(value)
        readings = [f"{written} with {meaning}" for meaning in DOUBTFUL_LETTERS[letter]]
        raise AmbiguousValueError(
            text, readings, f"ends in {letter}, whose meaning has changed over the years"
        )
    raise UnreadableValueError(
        text, f"ends in {letter}, which is no tolerance letter", f"write it like {_EXAMPLE}"
    )


def format_capacitor_marking(farad: float, tolerance: Tolerance | None = None) -> str:
    """Write the marking of a capacitor: three digits where they can say it, else a letter code.

    Parameters
    ----------
    farad : capacitance in farad. tolerance : as fractions, or None to leave it out.

    Returns
    -------
    Text that `parse_capacitor_marking` reads as the same value and tolerance.

    Raises
    ------
    BadRequestError
        Where no marking says it without doubt.

    See Also
    --------
    parse_capacitor_marking
    """
    for code in _codes(farad):
        for letter in _letters_for(tolerance):
            if _says(code + letter, farad, tolerance):
                return code + letter
    printed = "" if tolerance is None else f" {format_tolerance(tolerance, digits=3)}"
    raise BadRequestError(
        f"No marking says {format_capacitance(farad, digits=4)}{printed} without doubt; "
        "write value and tolerance apart."
    )


def _codes(farad: float) -> list[str]:
    """List the ways to write a value without tolerance, the usual one first."""
    if not CAPACITANCE.least <= farad <= CAPACITANCE.most:
        return []
    figures, exponent = exact_digits(farad)
    zeros = exponent + 12 - (2 - len(figures))
    lettered = format_capacitance(farad)
    if len(figures) <= 2 and 1 <= zeros <= 7:  # noqa: PLR2004 - two figures and a digit of zeros
        return [f"{figures.ljust(2, '0')}{zeros}", lettered]
    return [lettered]


def _letters_for(tolerance: Tolerance | None) -> list[str]:
    """List the letters that might say a tolerance."""
    if tolerance is None:
        return [""]
    return list(dict.fromkeys([*TOLERANCE_LETTERS, *PICOFARAD_LETTERS]))


def _says(marking: str, farad: float, tolerance: Tolerance | None) -> bool:
    """Tell whether a marking reads as exactly this value and tolerance."""
    try:
        reading = parse_capacitor_marking(marking)
    except UnreadableValueError:
        return False
    return reading.value == farad and reading.tolerance == tolerance
