"""Values with a unit, as people write them: ``4k7``, ``4.7 kOhm``, ``0,1 uF``, ``R47``.

One reader for every unit; what differs between units is a table, the `Grammar`.
The letter-as-decimal-mark codes are those of IEC 60062 (R, K, M, G, T, L for resistors,
p, n, u, m, F for capacitors; L, G and T from memory).

Conventions
-----------
SI base units out. A text with two readings is refused with both of them.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from math import isfinite

from chooser.errors import UnreadableValueError
from chooser.quantities.decimals import (
    NUMBER,
    Number,
    around_point,
    clean,
    doubtful,
    exact_digits,
    plain,
    read_number,
)


@dataclass(frozen=True, slots=True)
class Grammar:
    """How values of one unit are spelled.

    Attributes
    ----------
    what : name of the quantity with its article. example : how to write one.
    write : from a value in the base unit to the text that reads back as it.
    prefixes : spelling before the unit -> power of ten; one letter counts case, words do not.
    words : spellings of the unit, lower case, longest first; "" where it may be left out.
    wholes : prefix and unit together, exact case first, else lower case -> power of ten.
    letters : letters that stand for the decimal mark -> power of ten.
    doubtful : prefixes and letters with several readings -> their powers of ten.
    bare : power of ten of a bare number, or None where it is refused.
    bare_readings : what may have been left out behind a bare number.
    usual : ends of what a bare number may have meant, in the base unit.
    least, most : ends of what is believable, in the base unit.
    """

    what: str
    example: str
    write: Callable[[float], str]
    prefixes: Mapping[str, int]
    words: tuple[str, ...]
    least: float
    most: float
    wholes: Mapping[str, int] = field(default_factory=dict)
    letters: Mapping[str, int] = field(default_factory=dict)
    doubtful: Mapping[str, tuple[int, ...]] = field(default_factory=dict)
    bare: int | None = 0
    bare_readings: tuple[str, ...] = ()
    usual: tuple[float, float] = (0.0, float("inf"))


def read(text: str, grammar: Grammar) -> float:
    """Read a value in the unit of a grammar.

    Parameters
    ----------
    text : any text. grammar : the unit.

    Returns
    -------
    The value in the base unit of the grammar, finite and > 0.

    Raises
    ------
    AmbiguousValueError
        Where there are several readings; it names them.
    UnreadableValueError
        Where there is none, or the value is zero, negative or beyond belief.
    """
    cleaned = clean(text, grammar.what, grammar.example)
    values = _values(text, cleaned, grammar)
    if not values:
        raise _unreadable(text, cleaned, grammar)
    if len(values) > 1:
        readings = [grammar.write(value) for value in values]
        raise doubtful(text, readings, lambda reading: read(reading, grammar))
    _check_believable(text, values[0], grammar)
    return values[0]


def reads(text: str, grammar: Grammar) -> bool:
    """Tell whether a text is exactly one value of a grammar."""
    try:
        read(text, grammar)
    except UnreadableValueError:
        return False
    return True


def is_bare(text: str) -> bool:
    """Tell whether a text is a number and nothing else."""
    return re.fullmatch(NUMBER, text.strip()) is not None


_NUMBER_FIRST = re.compile(rf"(?P<number>{NUMBER}) ?(?P<suffix>[A-Za-z \-]*)")
_LETTER_AS_MARK = re.compile(
    r"(?P<before>[0-9]*)(?P<letter>ohm|[A-Za-z])(?P<after>[0-9]+) ?(?P<word>[A-Za-z]*)"
)
_E_AS_MARK = re.compile(r"(?P<before>[0-9]+)E(?P<after>[0-9]+) ?(?:ohms?)?", re.IGNORECASE)


def _values(text: str, cleaned: str, grammar: Grammar) -> list[float]:
    """List the different values a cleaned text can mean, in the base unit."""
    numbers, powers = _number_and_suffix(text, cleaned, grammar)
    if not powers:
        numbers, powers = _letter_code(cleaned, grammar)
    values = [number.scaled(power) for number in numbers for power in powers]
    # An E between digits is an exponent to some and the ohm letter to others (4E7).
    code = _E_AS_MARK.fullmatch(cleaned)
    if values and code and "R" in grammar.letters and "E" in cleaned:
        values.append(float(f"{code['before']}.{code['after']}"))
    return list(dict.fromkeys(values))


def _number_and_suffix(
    text: str, cleaned: str, grammar: Grammar
) -> tuple[tuple[Number, ...], tuple[int, ...]]:
    """Read ``4.7 kOhm``: a number, then prefix and unit; no powers where it is none."""
    match = _NUMBER_FIRST.fullmatch(cleaned)
    if match is None:
        return (), ()
    suffix = match["suffix"].replace(" ", "").replace("-", "")
    numbers = read_number(match["number"], text)
    if suffix:
        return numbers, _powers_of(suffix, grammar)
    if grammar.bare is None and any(number.scaled(0) for number in numbers):
        readings = _bare_readings(numbers, grammar)
        raise doubtful(text, readings, lambda reading: read(reading, grammar), "has no unit")
    return numbers, (grammar.bare or 0,)


_SMALL = 1e-3
"""A bare number below this may be in the base unit, as calculators and spreadsheets give it."""


def _bare_readings(numbers: Sequence[Number], grammar: Grammar) -> list[str]:
    """List what a bare number may have meant, the absurd left out where anything else remains."""
    low, high = grammar.usual
    every, usual = [], []
    for number in numbers:
        small = abs(number.scaled(0)) < _SMALL
        for unit in (*grammar.bare_readings, *([""] if small else [])):
            (power,) = _powers_of(unit, grammar) if unit else (0,)
            value = number.scaled(power)
            # 0.0000001u says nothing to anybody, 0p1 does.
            written = grammar.write(value) if small or number.exponent else f"{number}{unit}"
            every.append(written)
            usual += [written] if low <= value <= high else []
    return usual or every


def _powers_of(suffix: str, grammar: Grammar) -> tuple[int, ...]:
    """List the powers of ten that a prefix with its unit can mean."""
    for spelling in (suffix, suffix.lower()):
        if spelling in grammar.wholes:
            return (grammar.wholes[spelling],)
    for word in grammar.words:
        if not suffix.lower().endswith(word):
            continue
        prefix = suffix[: len(suffix) - len(word)]
        known = prefix if len(prefix) <= 1 else prefix.lower()
        if known in grammar.prefixes:
            return (grammar.prefixes[known],)
        if known in grammar.doubtful:
            return grammar.doubtful[known]
    return ()


def _letter_code(cleaned: str, grammar: Grammar) -> tuple[tuple[Number, ...], tuple[int, ...]]:
    """Read ``4k7``: a letter in the place of the decimal mark; no powers where it is none."""
    match = _LETTER_AS_MARK.fullmatch(cleaned)
    # A word of one letter behind a code (4k7R, 4n7K) is something else than the unit.
    if match is None or match["word"].lower() not in {"", *_long_words(grammar)}:
        return (), ()
    letter = match["letter"]
    known = grammar.letters.get(letter)
    powers = grammar.doubtful.get(letter, ()) if known is None else (known,)
    return (Number(f"{match['before']}.{match['after']}"),), powers


def _long_words(grammar: Grammar) -> Iterator[str]:
    """List the unit words that may follow a letter code: all but the ohm letter."""
    return (word for word in grammar.words if word != "r")


def _check_believable(text: str, value: float, grammar: Grammar) -> None:
    """Refuse zero, negative values and those no part has."""
    advice = f"write it like {grammar.example}"
    if value == 0:
        raise UnreadableValueError(text, f"is zero, which is no {_noun(grammar)}", advice)
    if value < 0:
        raise UnreadableValueError(text, f"is below zero, which is no {_noun(grammar)}", advice)
    if not grammar.least <= value <= grammar.most:
        ends = f"{grammar.write(grammar.least)} and {grammar.write(grammar.most)}"
        problem = f"is no believable {_noun(grammar)}"
        raise UnreadableValueError(text, problem, f"write one between {ends}")


def _noun(grammar: Grammar) -> str:
    return grammar.what.split(" ", 1)[1]


_LOOKALIKES = str.maketrans(
    {
        "l": "1",
        "I": "1",
        "|": "1",
        "O": "0",
        "o": "0",
        ";": ".",
        ":": ".",
        "\N{CYRILLIC SMALL LETTER KA}": "k",
        "\N{CYRILLIC CAPITAL LETTER KA}": "K",
        "\N{CYRILLIC CAPITAL LETTER EM}": "M",
        "\N{CYRILLIC SMALL LETTER O}": "0",
        "\N{CYRILLIC CAPITAL LETTER O}": "0",
    }
)


def _unreadable(text: str, cleaned: str, grammar: Grammar) -> UnreadableValueError:
    """Make the refusal, with the nearest text that would have been read."""
    advice = f"write it like {grammar.example}"
    for candidate in _near(cleaned):
        if _is_one_value(candidate, grammar):
            advice = f"perhaps {candidate} was meant"
            break
    return UnreadableValueError(text, f"is not {grammar.what}", advice)


def _near(cleaned: str) -> Iterator[str]:
    """List texts that are one slip of the hand away."""
    first, _, rest = cleaned.partition(" ")
    yield first.translate(_LOOKALIKES) + rest
    yield cleaned.translate(_LOOKALIKES)
    yield cleaned.replace(" ", "")
    yield cleaned.strip(".,;:'\"()=")
    yield from (cleaned.swapcase(), cleaned.lower(), cleaned.upper())
    if cleaned.endswith(("E", "e")):
        yield f"{cleaned[:-1]}R"


def _is_one_value(candidate: str, grammar: Grammar) -> bool:
    """Tell whether a candidate has exactly one reading, and that one believable."""
    try:
        values = _values(candidate, candidate, grammar)
    except UnreadableValueError:
        return False
    return len(values) == 1 and grammar.least <= values[0] <= grammar.most


def write_with_letter(
    value: float, letters: Mapping[str, int], *, digits: int | None, lead: bool
) -> str:
    """Write a value with the letter of its prefix as the decimal mark (IEC 60062).

    Parameters
    ----------
    value : in the base unit. letters : letter -> power of ten, smallest first.
    digits : significant digits, or None for exact. lead : keep the 0 before a leading letter.

    Returns
    -------
    Text such as ``4k7``, which reads back as the same value where digits is None.
    """
    smallest = next(iter(letters))
    if value == 0 or not isfinite(value):
        return f"0{smallest}" if value == 0 else str(value)
    if value < 0:
        return "-" + write_with_letter(-value, letters, digits=digits, lead=lead)
    figures, exponent = exact_digits(value, digits)
    top = exponent + len(figures) - 1
    letter = max(
        (letter for letter in letters if letters[letter] <= top),
        key=letters.__getitem__,
        default=smallest,
    )
    whole, fraction = around_point(figures, exponent - letters[letter])
    if fraction and whole == "0" and not lead:
        whole = ""
    return f"{whole}{letter}{fraction}"


def write_with_unit(
    value: float, prefixes: Mapping[str, int], unit: str, *, digits: int | None
) -> str:
    """Write a value as number, space, prefix and unit.

    Parameters
    ----------
    value : in the base unit. prefixes : prefix -> power of ten, smallest first.
    unit : sign of the unit. digits : significant digits, or None for exact.

    Returns
    -------
    Text such as ``1.5 kV``, which reads back as the same value where digits is None.
    """
    prefix = next(iter(prefixes)) if value and isfinite(value) else ""
    if value and isfinite(value):
        figures, exponent = exact_digits(abs(value), digits)
        for known, power in prefixes.items():
            if power < exponent + len(figures):
                prefix = known
    return f"{plain(value, prefixes.get(prefix, 0), digits)} {prefix}{unit}"
