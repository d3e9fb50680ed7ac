"""Reading a part as a person says it in one breath: "10k 1% metal film", "4u7 63 V polyester".

Words in any order: a value, a tolerance, a voltage, a power, a tempco, a taper, the kind and the
technology, each read as in the cell of a sheet; and "measured 96n 2%" and "leakage 3uA", where
the figure follows its word (the percentage is the meter's, and may be left out). Nothing is
guessed: a value that may be ohms or farads needs its kind said.
"""

from __future__ import annotations

import re
from collections import deque
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from functools import partial
from typing import Any

from chooser import quantities
from chooser.errors import AmbiguousValueError, BadRequestError, UnreadableValueError
from chooser.parts import Entry, Kind, Part, Tolerance
from chooser.plausible import complaints_of, drawer_name, free_text
from chooser.sheets import traits

# Which trait a word speaks of, by its form; tried in this order.
_FORMS: tuple[tuple[str, re.Pattern[str]], ...] = (
    ("tolerance", re.compile(r"[±+-].*|.*%")),
    ("voltage", re.compile(r"[\d.,]+k?(V|v|VDC|Vdc)")),
    ("turns", re.compile(r"\d+-?turns?", re.IGNORECASE)),
    ("power", re.compile(r"[\d.,/]+m?[Ww]")),
    ("tempco", re.compile(r"[\d.,]+ppm(/[KC])?", re.IGNORECASE)),
    ("value", re.compile(r"[.,]?\d.*|[RrNnUuPp\u00b5\u03bc]\d.*")),
)
# Words that say what the figure behind them is, and the form of that figure; a low leakage
# electrolytic with its voltage behind is none of them.
_ANNOUNCED = {
    "measured": ("measured", re.compile(r"\S+")),
    "measures": ("measured", re.compile(r"\S+")),
    "reads": ("measured", re.compile(r"\S+")),
    "leakage": ("leakage", re.compile(r"[\d.,]+[munp\u00b5\u03bc]?A", re.IGNORECASE)),
    "leaks": ("leakage", re.compile(r"\S+")),
}
_PERCENT = re.compile(r"(?:±|\+/?-)?[\d.,]+%")
# Without a word for it, only these may be farads; 10K is ohms to everybody, though on a small
# ceramic it could be 10 pF with its tolerance letter.
_FARADS = re.compile(r"[pnuf\u00b5\u03bc]|^\d+$|^\d{3}[a-z]$", re.IGNORECASE)
# A unit typed apart from its number: "10 k", "4.7 uF", "63 V", "1 %", "10 k ohm".
_UNIT_APART = re.compile(
    r"(?<=\d)\s+(?=%|[kKMuUnNpP\u00b5\u03bc]?(?:\s?[\u03a9\u2126]|\s?ohms?\b|F\b)"
    r"|[kKMunp\u00b5\u03bc](?:\s|$)|k?V\b|m?W\b|[mun\u00b5\u03bc]?A\b|ppm)"
    r"|(?:(?<=±)|(?<=/-)|(?<=\+-))\s+(?=[\d.,]+\s?%)"
)
_OHM_APART = re.compile(r"(?<=\d[kKMR])\s+(?=[\u03a9\u2126]|ohms?\b)", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class _Words:
    """The words of an entry, sorted by what they speak of."""

    kind: Kind | None
    traits: dict[str, str]
    technology: str


def read_entry(
    text: str, kind: Kind | None, said: Mapping[str, str], drawer: str, count: str
) -> Entry:
    """Read a part with its drawer and count.

    Parameters
    ----------
    text, kind, said : as `read_part`. drawer : name of the drawer. count : 20, ~50 or plenty.

    Raises
    ------
    BadRequestError : as `read_part`.
    UnreadableValueError : the drawer has no such name as can be printed, or as `read_part`.
    """
    name = drawer_name(drawer)
    pieces = quantities.parse_count(count)
    return Entry(read_part(text, kind, said), name, pieces, "the command line")


def read_part(text: str, kind: Kind | None = None, said: Mapping[str, str] | None = None) -> Part:
    """Read a part from one line of text.

    Parameters
    ----------
    text : such as "10k 1% metal film". kind : where it is known; it need not be in the text then.
    said : further traits by the name of their field in `Part`, as text; they win over the line.

    Returns
    -------
    The part, in SI units.

    Raises
    ------
    BadRequestError : no value, more than one, or words that contradict each other.
    UnreadableValueError : a trait cannot be read, or has more than one reading.
    """
    words = _sorted_words(text)
    texts = words.traits | dict(said or {})
    if "value" not in texts:
        raise _valueless(text, words.technology, kind or words.kind)
    technology = texts.pop("technology", words.technology)
    marking = texts.pop("value")
    kind = _kind_of(marking, technology, _agreed(kind, words.kind, text))
    cell = traits.read_value(marking, kind)
    part = Part(kind, cell.values[0], marking, cell.tolerance)
    if technology:
        part = replace(part, technology=traits.read_technology(technology, kind))
    # Not checked field by field by mypy: each parser below gives what its field takes.
    fields: dict[str, Any] = {name: _READERS[name](seen, kind) for name, seen in texts.items()}
    return _sensible(replace(part, **fields), cell.tolerance, texts)


def _valueless(text: str, rest: str, kind: Kind | None) -> BadRequestError | UnreadableValueError:
    """Say that there is no value, with what a word that is nearly one was meant to be."""
    for word in rest.split():
        try:
            traits.read_value(word, kind or Kind.RESISTOR)
        except UnreadableValueError as error:
            if error.advice.startswith("perhaps"):
                return error
    return BadRequestError(f"{text!r} holds no value; write one such as 10k, 4u7 or 100n.")


def _sorted_words(text: str) -> _Words:
    kind: Kind | None = None
    found: dict[str, str] = {}
    rest: list[str] = []
    words = _OHM_APART.sub("", _UNIT_APART.sub("", text)).replace(", ", " ").split()
    for word in _unannounced(words, found, text):
        called = _read_or_none(traits.read_kind, word)
        trait = _trait_of(word)
        if called is not None:
            kind = _agreed(kind, called, text)
        elif trait is None:
            rest.append(word)
        elif trait in found:
            raise _two_readings(text, trait, found[trait], word)
        else:
            found[trait] = word
    # A piece that was only measured is worth what was measured.
    if "measured" in found:
        found.setdefault("value", found["measured"])
    return _Words(kind, found, " ".join(rest))


def _unannounced(words: list[str], found: dict[str, str], text: str) -> Iterator[str]:
    """Yield the words that speak for themselves; the others go to `found` with their figures."""
    left = deque(words)
    while left:
        word = left.popleft()
        announced = _ANNOUNCED.get(word.casefold().rstrip(":"))
        if not left and announced is not None and announced[0] == "measured":
            raise BadRequestError(f"{text!r} says {word!r} without a figure; write it behind.")
        if announced is None or not left or not announced[1].fullmatch(left[0]):
            yield word
            continue
        trait = announced[0]
        figure = left.popleft()
        if trait in found:
            raise _two_readings(text, trait, found[trait], figure)
        found[trait] = figure
        if trait == "measured" and left and _PERCENT.fullmatch(left[0]):
            found["meter"] = left.popleft().lstrip("±+/-")


def _two_readings(text: str, trait: str, one: str, other: str) -> BadRequestError:
    return BadRequestError(
        f"{text!r} gives two readings for the {trait}, {one} and {other}; write one of them."
    )


def _trait_of(word: str) -> str | None:
    """Tell which trait a word speaks of by its form, None where it is a word of its own."""
    if len(word) > 1 and _read_or_none(traits.read_taper, word) is not None:
        return "taper"
    return next((name for name, form in _FORMS if form.fullmatch(word)), None)


def _agreed(first: Kind | None, second: Kind | None, text: str) -> Kind | None:
    if first is not None and second is not None and first is not second:
        raise BadRequestError(f"{text!r} is called a {first} and a {second}; say one of them.")
    return first or second


def _kind_of(marking: str, technology: str, said: Kind | None) -> Kind:
    """Find the kind from what was said, else from the only kind that fits."""
    if said is not None:
        return said
    by_value = _kinds_by_value(marking)
    fitting = [
        kind
        for kind in by_value
        if not technology or _read_or_none(partial(traits.read_technology, kind=kind), technology)
    ]
    if len(fitting) == 1:
        return fitting[0]
    if len(by_value) == 1:
        return by_value[0]  # the technology is then refused with its near names
    if not by_value:
        return Kind.RESISTOR  # the value is then refused with what is wrong in it
    raise BadRequestError(
        f"{marking!r} may be a resistor or a capacitor; say which with --kind resistor or "
        "--kind capacitor."
    )


def _kinds_by_value(marking: str) -> list[Kind]:
    """Tell what a value may be of: 10k ohms, 100n farads, 100 and 473K either."""
    kinds = (Kind.RESISTOR, Kind.CAPACITOR) if _FARADS.search(marking) else (Kind.RESISTOR,)
    return [kind for kind in kinds if _can_be_read(marking, kind)]


def _can_be_read(marking: str, kind: Kind) -> bool:
    """Tell whether a value can be read as of this kind; an ambiguous one can, once it is said."""
    try:
        traits.read_value(marking, kind)
    except AmbiguousValueError:
        return True
    except UnreadableValueError:
        return False
    return True


def _read_or_none(read: Callable[[str], Any], text: str) -> Any:
    try:
        return read(text)
    except UnreadableValueError:
        return None


def _plain(read: Callable[[str], object]) -> Callable[[str, Kind], object]:
    return lambda text, _kind: read(text)


_READERS: dict[str, Callable[[str, Kind], object]] = {
    "tolerance": _plain(quantities.parse_tolerance),
    "voltage": _plain(quantities.parse_voltage),
    "power": _plain(quantities.parse_power),
    "tempco": _plain(quantities.parse_tempco),
    "measured": traits.read_measured,
    "meter": _plain(traits.read_meter),
    "leakage": _plain(quantities.parse_current),
    "taper": _plain(traits.read_taper),
    "turns": _plain(quantities.parse_turns),
    "end_resistance": _plain(quantities.parse_resistance),
    "note": _plain(free_text),
}


def _sensible(part: Part, marked: Tolerance | None, seen: Mapping[str, str]) -> Part:
    """Refuse what cannot be true of the part, as in a sheet.

    Parameters
    ----------
    part : what was read. marked : the tolerance of its marking, or None.
    seen : the traits as they were typed.
    """
    found = complaints_of(part, marked)
    if found:
        raise BadRequestError(
            "\n".join(
                f"The {each.trait.replace('_', ' ')} {seen.get(each.trait, '')!r} {each.problem}; "
                f"{each.advice}."
                for each in found
            )
        )
    return part
