"""What the cells of each column say: text in, a trait of the part out, or a refusal."""

from __future__ import annotations

import re
from dataclasses import dataclass
from difflib import get_close_matches

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.parts import Kind, Taper, Tolerance
from chooser.preferred import is_kit, parse_kit
from chooser.quantities import (
    parse_capacitance,
    parse_percent,
    parse_resistance,
)
from chooser.quantities.markings import parse_capacitor_marking
from chooser.technologies import find_technology, nearest_technologies, technology_names

_KINDS = {
    Kind.RESISTOR: ("resistor", "resistors", "res", "r"),
    Kind.POT: ("pot", "pots", "potentiometer", "potentiometers", "panel pot"),
    Kind.TRIMMER: ("trimmer", "trimmers", "trim pot", "trimpot", "trimming pot", "preset"),
    Kind.CAPACITOR: ("capacitor", "capacitors", "cap", "caps", "c", "condenser"),
}
_KIND_NAMES = {name: kind for kind, names in _KINDS.items() for name in names}

_TAPERS = {
    Taper.LINEAR: ("linear", "lin"),
    Taper.LOG: ("log", "logarithmic", "audio"),
    Taper.REVERSE_LOG: ("reverse-log", "reverse log", "rev log", "antilog", "anti-log", "revlog"),
}
_TAPER_NAMES = {name: taper for taper, names in _TAPERS.items() for name in names}

_BARE_PERCENT = re.compile(r"[1-9]\d*(?:[.,]\d+)?")


@dataclass(frozen=True, slots=True)
class ValueCell:
    """What a value cell says.

    Attributes
    ----------
    values : ohm or farad; one, or those of a kit.
    tolerance : where a marking on the part tells it.
    """

    values: tuple[float, ...]
    tolerance: Tolerance | None = None


def read_kind(text: str) -> Kind:
    """Read the kind of a part; the usual short forms and plurals too."""
    name = " ".join(re.split(r"[\s_-]+", text.casefold()))
    if name in _KIND_NAMES:
        return _KIND_NAMES[name]
    close = get_close_matches(name[:30], _KIND_NAMES, n=1)
    meant = f"did you mean {_KIND_NAMES[close[0]].value}" if close else ""
    raise UnreadableValueError(
        text, "is no kind of part", meant or "write resistor, pot, trimmer or capacitor"
    )


def read_value(text: str, kind: Kind) -> ValueCell:
    """Read a value, a kit, or the marking printed on a capacitor, with its tolerance letter."""
    if is_kit(text):
        return ValueCell(parse_kit(text, kind))
    if kind is not Kind.CAPACITOR:
        return ValueCell((parse_resistance(text),))
    marking = parse_capacitor_marking(text)
    return ValueCell((marking.value,), marking.tolerance)


def read_measured(text: str, kind: Kind) -> float:
    """Read a measured value, ohm or farad."""
    return parse_capacitance(text) if kind is Kind.CAPACITOR else parse_resistance(text)


def read_meter(text: str) -> float:
    """Read the accuracy of a meter, a fraction; a bare number of 1 or more is percent."""
    bare = _BARE_PERCENT.fullmatch(text) is not None
    return parse_percent(f"{text}%" if bare else text)


def read_technology(text: str, kind: Kind) -> str:
    """Read a technology into its stored name."""
    found = find_technology(text, kind)
    if found is not None:
        return found.name
    near = nearest_technologies(text, kind)
    raise UnreadableValueError(
        text,
        f"is no technology of a {kind.value}",
        ("did you mean " if near else "write ") + " or ".join(near or technology_names(kind)),
    )


def read_taper(text: str) -> Taper:
    """Read a taper by its name; the letters A, B and C mean different ones in different places."""
    name = text.casefold()
    if name in _TAPER_NAMES:
        return _TAPER_NAMES[name]
    if name in {"a", "b", "c"}:
        # A is log, B linear, C reverse log in Asia and America; A is linear, B or C log on older
        # European pots (makers' catalogues disagree on the reverse letter).
        readings = {
            "a": ("log", "linear"),
            "b": ("linear", "log"),
            "c": ("reverse-log", "log"),
        }
        raise AmbiguousValueError(
            text, readings[name], "means different tapers on Asian and on older European pots"
        )
    close = get_close_matches(name[:30], _TAPER_NAMES, n=1)
    meant = f"did you mean {_TAPER_NAMES[close[0]].value}" if close else ""
    raise UnreadableValueError(text, "is no taper", meant or "write linear, log or reverse-log")
