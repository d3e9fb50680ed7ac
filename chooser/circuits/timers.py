"""The figures of the timers, read from one table; a user's file of the same form adds types."""

from __future__ import annotations

import tomllib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields
from functools import lru_cache
from importlib import resources
from math import inf, isnan
from pathlib import Path
from stat import S_ISREG
from typing import Any

from chooser.errors import BadRequestError, UnknownNameError


@dataclass(frozen=True, slots=True)
class Timer:
    """What the data sheet of one timer says; typical figures beside their limits.

    Attributes
    ----------
    name : type number. title : what it is, in words.
    supply_min, supply_max : supply voltage in volt.
    threshold : trip point as a fraction of the supply.
    threshold_current_typical, threshold_current_limit : into the threshold input, ampere.
    discharge_leakage_typical, discharge_leakage_limit : into the discharge pin while off, ampere.
    discharge_resistance_typical, discharge_resistance_limit : of the discharge switch, ohm.
    discharge_current_limit : largest current the switch is specified for, ampere.
    timing_error_typical, timing_error_limit : of the timer alone, fractions of the interval.
    shortest_interval : in second; below it the timer's own delays rule.
    ideal : True for the textbook formula.
    sources : (figure, where it is from) pairs; not part of equality.
    """

    name: str
    title: str
    supply_min: float
    supply_max: float
    threshold: float
    threshold_current_typical: float
    threshold_current_limit: float
    discharge_leakage_typical: float
    discharge_leakage_limit: float
    discharge_resistance_typical: float
    discharge_resistance_limit: float
    discharge_current_limit: float
    timing_error_typical: float
    timing_error_limit: float
    shortest_interval: float
    ideal: bool = False
    sources: tuple[tuple[str, str], ...] = field(default=(), compare=False, repr=False)


FIGURES = tuple(
    figure.name
    for figure in fields(Timer)
    if figure.name not in {"name", "title", "ideal", "sources"}
)
"""Keys of a type that hold a number, in the order of the record."""

_PAIRS = tuple(
    (key, key.removesuffix("typical") + "limit") for key in FIGURES if key.endswith("typical")
)
_ABOVE_ZERO = frozenset({"supply_max", "threshold", "discharge_current_limit"})
_BELOW_ONE = frozenset({"threshold", "timing_error_typical", "timing_error_limit"})
_LONGEST = 60
_MOST_BYTES = 2**20
_MAY_BE_ENDLESS = frozenset({"supply_max", "discharge_current_limit"})


def timer_named(name: str, file: Path | None = None) -> Timer:
    """Return the timer of a name, in any mixture of upper and lower case.

    Parameters
    ----------
    name : a type number, or ideal, bipolar or cmos.
    file : a file of the form of timers.toml with more types, or None.

    Raises
    ------
    UnknownNameError
        No such timer; the sentence names the nearest and all known ones.
    BadRequestError
        The file cannot be read or a figure in it cannot be; the sentence names file and key.
    """
    known = _known(file)
    found = {key.casefold(): timer for key, timer in known.items()}.get(name.strip().casefold())
    if found is None:
        raise UnknownNameError(_unknown(name, tuple(known)))
    return found


def timer_names(file: Path | None = None) -> tuple[str, ...]:
    """Return the names of all timers, those of the file last (errors as in `timer_named`)."""
    return tuple(_known(file))


def check_supply(timer: Timer, supply: float) -> None:
    """Refuse a supply voltage (volt) that the timer does not work at.

    Raises
    ------
    BadRequestError
        Outside the timer's supply range, or not above zero.
    """
    if timer.supply_min <= supply <= timer.supply_max and 0.0 < supply < inf:
        return
    allowed = (
        "above 0 V" if timer.ideal else f"between {timer.supply_min:g} and {timer.supply_max:g} V"
    )
    raise BadRequestError(
        f"The timer {timer.name} does not work at {supply:g} V; choose a supply {allowed}"
        + ("." if timer.ideal else ", or another timer.")
    )


def _unknown(name: str, known: tuple[str, ...]) -> str:
    """Return the sentence that refuses a name."""
    from difflib import get_close_matches

    folded = {key.casefold(): key for key in known}
    near = get_close_matches(name.strip().casefold(), folded, n=1, cutoff=0.5)
    hint = f"; did you mean {folded[near[0]]}?" if near else "."
    return f"{_shown(name)} is no timer that is known{hint} Known are {', '.join(known)}."


def _known(file: Path | None) -> Mapping[str, Timer]:
    """Return all timers by name."""
    built_in = _built_in()
    if file is None:
        return built_in
    return {**built_in, **_read(_text_of(file), str(file), built_in)}


@lru_cache(maxsize=1)
def _built_in() -> Mapping[str, Timer]:
    """Return the timers of the table that ships with the package."""
    text = resources.files(__package__).joinpath("timers.toml").read_text(encoding="utf-8")
    return _read(text, "timers.toml", {})


def _text_of(file: Path) -> str:
    """Return the text of a user's file, or refuse it in a sentence."""
    try:
        # Looked at before it is opened: opening a pipe would wait for somebody to write to it.
        if not S_ISREG(file.stat().st_mode):
            raise BadRequestError(f"{file} is not a plain file; name a file like timers.toml.")
        with file.open("rb") as opened:
            data = opened.read(_MOST_BYTES + 1)
    except FileNotFoundError:
        raise BadRequestError(f"There is no file {file}; check its name.") from None
    except (OSError, ValueError) as error:
        reason = (error.strerror if isinstance(error, OSError) else None) or str(error)
        raise BadRequestError(
            f"{file} cannot be read ({reason.lower()}); check its name and its rights."
        ) from None
    if len(data) > _MOST_BYTES:
        raise BadRequestError(f"{file} is larger than 1 MiB; name a file like timers.toml.")
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError:
        raise BadRequestError(f"{file} is not UTF-8 text; save it as UTF-8.") from None


def _read(text: str, place: str, known: Mapping[str, Timer]) -> dict[str, Timer]:
    """Read timers from TOML text; later types may be like earlier or known ones."""
    try:
        tables = tomllib.loads(text)
    except ValueError as error:  # also a number of thousands of digits
        raise BadRequestError(
            f"{place} is not a TOML file: {error}; write it like timers.toml."
        ) from None
    except RecursionError:
        raise BadRequestError(f"{place} is nested too deeply; write it like timers.toml.") from None
    read: dict[str, Timer] = {}
    for name, table in tables.items():
        folded = name.strip().casefold()
        if folded in {other.casefold() for other in (*known, *read)}:
            raise BadRequestError(
                f"{place} [{name}]: there already is a timer of this name; give it another "
                f'one, such as [my-{name}], with like = "{name}".'
            )
        read[name] = _timer(name, table, f"{place} [{name}]", {**known, **read})
    return read


def _timer(name: str, table: object, place: str, known: Mapping[str, Timer]) -> Timer:
    """Return the timer that one table of a file describes."""
    if not isinstance(table, dict):
        raise BadRequestError(
            f"{place}: {_shown(table)} is no table of figures; write one as [{name}]."
        )
    given = dict(table)
    values: dict[str, Any] = {"title": name}
    sources: dict[str, str] = {}
    if "like" in given:
        model = _model(given.pop("like"), place, known)
        values = {key: getattr(model, key) for key in (*FIGURES, "title", "ideal")}
        sources = dict(model.sources)
    for key, entry in given.items():
        values[key] = _entry(key, entry, place, sources)
    for key in FIGURES:
        if key not in values:
            raise BadRequestError(
                f'{place}: the key {key} is missing; add it, or start with like = "cmos".'
            )
    timer = Timer(name=name, sources=tuple(sources.items()), **values)
    _check(timer, place)
    return timer


def _model(like: object, place: str, known: Mapping[str, Timer]) -> Timer:
    """Return the timer that another one is like."""
    folded = {key.casefold(): timer for key, timer in known.items()}
    model = folded.get(like.strip().casefold()) if isinstance(like, str) else None
    if model is None:
        raise BadRequestError(
            f"{place}, key like: {_shown(like)} is no timer known so far; "
            f"write one of {', '.join(known)}."
        )
    return model


def _entry(key: str, entry: object, place: str, sources: dict[str, str]) -> object:
    """Return the value of one key, noting its source."""
    checks: dict[str, tuple[type, str]] = {
        "title": (str, "a text"),
        "ideal": (bool, "true or false"),
    }
    if key in checks:
        kind, words = checks[key]
        if not isinstance(entry, kind):
            raise BadRequestError(
                f"{place}, key {key}: {_shown(entry)} is not {words}; write {words}."
            )
        return entry
    if key not in FIGURES:
        raise BadRequestError(f"{place}: {_shown(key)} is no key of a timer{_near(key)}.")
    value = entry
    sources[key] = ""
    if isinstance(entry, dict):
        unknown = set(entry) - {"value", "source"}
        source = entry.get("source", "")
        if "value" not in entry or unknown or not isinstance(source, str):
            raise BadRequestError(
                f"{place}, key {key}: {_shown(entry)} is no figure; "
                'write { value = 1e-9, source = "where it is from" }.'
            )
        value, sources[key] = entry["value"], source
    return _figure(key, value, place)


def _figure(key: str, value: object, place: str) -> float:
    """Return a number that the key may have."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise BadRequestError(
            f"{place}, key {key}: {_shown(value)} is no number; write it in SI units."
        )
    try:
        number = float(value)
    except OverflowError:  # an integer of hundreds of digits
        number = inf if value > 0 else -inf
    checks: tuple[tuple[Callable[[float], bool], str], ...] = (
        (lambda n: isnan(n) or n < 0.0, "0 or more"),
        (lambda n: n == 0.0 and key in _ABOVE_ZERO, "more than 0"),
        (lambda n: n >= 1.0 and key in _BELOW_ONE, "below 1, as a fraction (3 % is 0.03)"),
        (lambda n: n == inf and key not in _MAY_BE_ENDLESS, "finite"),
    )
    for wrong, words in checks:
        if wrong(number):
            raise BadRequestError(
                f"{place}, key {key}: {_shown(value)} cannot be; it must be {words}."
            )
    return number


def _check(timer: Timer, place: str) -> None:
    """Refuse figures that contradict each other."""
    for low, high in (("supply_min", "supply_max"), *_PAIRS):
        if getattr(timer, low) > getattr(timer, high):
            raise BadRequestError(
                f"{place}: {low} ({getattr(timer, low):g}) is above {high} "
                f"({getattr(timer, high):g}); correct one of them."
            )
    if timer.ideal and any(getattr(timer, key) > 0.0 for pair in _PAIRS for key in pair):
        raise BadRequestError(
            f"{place}: an ideal timer has no currents, no resistance and no error; "
            "add ideal = false or take those figures out."
        )


def _shown(value: object) -> str:
    """Return a value as it was written, cut where it is too long for a sentence."""
    text = repr(value)
    return text if len(text) <= _LONGEST else f"{text[:_LONGEST]}..."


def _near(key: str) -> str:
    """Return a hint at the key that was meant."""
    from difflib import get_close_matches

    near = get_close_matches(key, (*FIGURES, "title", "like", "ideal"), n=1)
    return f"; did you mean {near[0]}?" if near else f"; known are {', '.join(FIGURES)}"
