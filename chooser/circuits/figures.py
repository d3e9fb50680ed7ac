"""Tables of device figures: one TOML file a kind of device, each figure with its source.

Conventions
-----------
A file holds one table a type. A figure is ``{ value = 1e-9, source = "..." }`` or a bare
number, in SI units; figures that depend on the supply are lists of rows. ``like`` starts from
another type of the same kind and changes what follows. A user's file of the same form adds
types, never replaces one. Faults are refused in one sentence with file, ``[table]`` and key.
"""

from __future__ import annotations

import tomllib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from importlib import resources
from itertools import pairwise
from math import inf
from pathlib import Path
from stat import S_ISREG
from typing import Any, Generic, Protocol, TypeVar

from chooser.circuits.figure_values import (
    Flag,
    Key,
    Number,
    Rows,
    Text,
    read_plain,
    read_rows,
    read_sourced,
    shown,
)
from chooser.errors import BadRequestError, UnknownNameError

_MOST_BYTES = 2**20


class Device(Protocol):
    """What every record of a type has; those that work from a supply have its range too."""

    @property
    def name(self) -> str:
        """Type number."""

    @property
    def sources(self) -> tuple[tuple[str, str], ...]:
        """Pairs of a figure and where it is from."""


class Powered(Protocol):
    """A device with a supply range, in volt."""

    @property
    def name(self) -> str:
        """Type number."""

    @property
    def supply_min(self) -> float:
        """Lowest supply, volt."""

    @property
    def supply_max(self) -> float:
        """Highest supply, volt."""


class SupplyRow(Protocol):
    """A row of figures at one supply voltage, in volt."""

    @property
    def supply(self) -> float:
        """Supply of this row, volt."""


D = TypeVar("D", bound=Device)
R = TypeVar("R", bound=SupplyRow)


@dataclass(frozen=True, eq=False)
class Catalogue(Generic[D]):
    """All types of one kind of device: those that ship with the package, and a user's.

    Attributes
    ----------
    record : the frozen record of one type; has ``name``, ``title``, ``sources`` and the keys.
    noun : what one is called. file : the table in this package. model : a usual type.
    keys : what a table may hold, in order; ``title`` and ``like`` come on top.
    check : refuses figures that contradict each other, given a record and its place.
    """

    record: Callable[..., D]
    noun: str
    file: str
    model: str
    keys: Mapping[str, Key]
    check: Callable[[D, str], None]

    @cached_property
    def built_in(self) -> Mapping[str, D]:
        """The types of the table that ships with the package, by name."""
        text = resources.files(__package__).joinpath(self.file).read_text(encoding="utf-8")
        return self.read(text, self.file, {})

    def known(self, file: Path | None = None) -> Mapping[str, D]:
        """Return all types by name, those of the file last (`BadRequestError` for its faults)."""
        if file is None:
            return self.built_in
        text = _text_of(file, self.file)
        return {**self.built_in, **self.read(text, str(file), self.built_in)}

    def named(self, name: str, file: Path | None = None) -> D:
        """Return the type of a name, in any mixture of upper and lower case.

        A bare number (the key ``number``) is enough where one type alone has it.

        Raises
        ------
        UnknownNameError
            No such type, or a number that several makers use for different figures.
        BadRequestError
            The file cannot be read or a figure in it cannot be.
        """
        known = self.known(file)
        typed = _folded(name)
        found = [device for key, device in known.items() if _folded(key) == typed]
        found = found or [
            device
            for device in known.values()
            if typed and _folded(getattr(device, "number", "")) == typed
        ]
        if not found:
            raise UnknownNameError(self._unknown(name, tuple(known)))
        if len(found) > 1:
            raise UnknownNameError(
                f"{shown(name)} alone says too little, its makers differ; "
                f"name one of {', '.join(device.name for device in found)}."
            )
        return found[0]

    def check_supply(self, device: Powered, supply: float) -> None:
        """Refuse a supply voltage (volt) that the device does not work at.

        Raises
        ------
        BadRequestError
            Outside the supply range, not finite, or not above zero.
        """
        low, high = device.supply_min, device.supply_max
        if low <= supply <= high and 0.0 < supply < inf:
            return
        allowed = (
            f"above {low:g} V."
            if high == inf
            else f"between {low:g} and {high:g} V, or another {self.noun}."
        )
        raise BadRequestError(
            f"The {self.noun} {device.name} does not work at {supply:g} V; "
            f"choose a supply {allowed}"
        )

    def read(self, text: str, place: str, known: Mapping[str, D]) -> dict[str, D]:
        """Read types from TOML text; later types may be like earlier or known ones."""
        read: dict[str, D] = {}
        for name, table in _tables(text, place, self.file).items():
            if _folded(name) in {_folded(other) for other in (*known, *read)}:
                raise BadRequestError(
                    f"{place} [{name}]: there already is a {self.noun} of this name; give it "
                    f'another one, such as [my-{name}], with like = "{name}".'
                )
            read[name] = self._device(name, table, f"{place} [{name}]", {**known, **read})
        return read

    def _device(self, name: str, table: object, place: str, known: Mapping[str, D]) -> D:
        """Return the type that one table of a file describes."""
        if not isinstance(table, dict):
            raise BadRequestError(
                f"{place}: {shown(table)} is no table of figures; write one as [{name}]."
            )
        given = dict(table)
        values: dict[str, Any] = {"title": name}
        sources: dict[str, str] = {}
        if "like" in given:
            model = self._model(given.pop("like"), place, known)
            values = {key: getattr(model, key) for key in (*self.keys, "title")}
            sources = dict(model.sources)
        for key, entry in given.items():
            values[key], source = self._entry(key, entry, place)
            if source is not None:
                sources[key] = source
        self._fill_in(values, sources, place)
        device = self.record(name=name, sources=tuple(sources.items()), **values)
        self.check(device, place)
        return device

    def _fill_in(self, values: dict[str, Any], sources: dict[str, str], place: str) -> None:
        """Add what is missing, or refuse the table where it has to be there."""
        for key, kind in self.keys.items():
            if key in values:
                continue
            if isinstance(kind, Number) and kind.default is not None:
                values[key], sources[key] = kind.default(key, values)
            elif isinstance(kind, Text | Flag):
                values[key] = "" if isinstance(kind, Text) else False
            else:
                raise BadRequestError(
                    f"{place}: the key {key} is missing; add it, "
                    f'or start with like = "{self.model}".'
                )

    def _model(self, like: object, place: str, known: Mapping[str, D]) -> D:
        """Return the type that another one is like."""
        folded = {_folded(key): device for key, device in known.items()}
        model = folded.get(_folded(like)) if isinstance(like, str) else None
        if model is None:
            raise BadRequestError(
                f"{place}, key like: {shown(like)} is no {self.noun} known so far; "
                f"write one of {', '.join(known)}."
            )
        return model

    def _entry(self, key: str, entry: object, place: str) -> tuple[Any, str | None]:
        """Return the value of one key and its source; None where such a key has none."""
        kind = Text() if key == "title" else self.keys.get(key)
        if kind is None:
            raise BadRequestError(
                f"{place}: {shown(key)} is no key of a {self.noun}{self._near(key)}."
            )
        where = f"{place}, key {key}"
        if isinstance(kind, Rows):
            rows = read_rows(entry, kind, where)
            return rows, "; ".join(dict.fromkeys(row.source for row in rows))
        if isinstance(kind, Number):
            return read_sourced(entry, kind, where)
        return read_plain(entry, kind, where), None

    def _unknown(self, name: str, known: tuple[str, ...]) -> str:
        """Return the sentence that refuses a name."""
        from difflib import get_close_matches

        folded = {_folded(key): key for key in known}
        near = get_close_matches(_folded(name), folded, n=1, cutoff=0.5)
        hint = f"; did you mean {folded[near[0]]}?" if near else "."
        return f"{shown(name)} is no {self.noun} that is known{hint} Known are {', '.join(known)}."

    def _near(self, key: str) -> str:
        """Return a hint at the key that was meant."""
        from difflib import get_close_matches

        near = get_close_matches(key, (*self.keys, "title", "like"), n=1)
        if near:
            return f"; did you mean {near[0]}?"
        # A pair is named once, so that the sentence stays a sentence.
        stems = dict.fromkeys(
            key.removesuffix("_typical").removesuffix("_limit") for key in self.keys
        )
        return f"; known are {', '.join(stems)}"


def at_supply(rows: Sequence[R], supply: float) -> tuple[R, R, float]:
    """Return the rows beside a supply voltage (volt), and the share of the second one.

    Parameters
    ----------
    rows : one or more, in ascending order of their supply.
    supply : below the first or above the last row, that row is returned twice.
    """
    above = next((place for place, row in enumerate(rows) if row.supply >= supply), len(rows))
    if above in {0, len(rows)}:
        row = rows[min(above, len(rows) - 1)]
        return row, row, 0.0
    low, high = rows[above - 1], rows[above]
    return low, high, (supply - low.supply) / (high.supply - low.supply)


def check_order(device: object, pairs: Sequence[tuple[str, str]], place: str) -> None:
    """Refuse a device whose first figure of a pair is above the second one."""
    for low, high in pairs:
        if getattr(device, low) > getattr(device, high):
            raise BadRequestError(
                f"{place}: {low} ({getattr(device, low):g}) is above {high} "
                f"({getattr(device, high):g}); correct one of them."
            )


def check_rows(rows: Sequence[SupplyRow], place: str) -> None:
    """Refuse rows that are not in ascending order of the supply."""
    for low, high in pairwise(rows):
        if low.supply >= high.supply:
            raise BadRequestError(
                f"{place}: the row at {high.supply:g} V follows the one at {low.supply:g} V; "
                "write each supply once, the lowest first."
            )


def _folded(name: str) -> str:
    """Return a name as it is compared."""
    return name.strip().casefold()


def _text_of(file: Path, example: str) -> str:
    """Return the text of a user's file, or refuse it in a sentence."""
    try:
        # Looked at before it is opened: opening a pipe would wait for somebody to write to it.
        if not S_ISREG(file.stat().st_mode):
            raise BadRequestError(f"{file} is not a plain file; name a file like {example}.")
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
        raise BadRequestError(f"{file} is larger than 1 MiB; name a file like {example}.")
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError:
        raise BadRequestError(f"{file} is not UTF-8 text; save it as UTF-8.") from None


def _tables(text: str, place: str, example: str) -> dict[str, Any]:
    """Return what TOML text holds."""
    try:
        return tomllib.loads(text)
    except ValueError as error:  # also a number of thousands of digits
        raise BadRequestError(
            f"{place} is not a TOML file: {error}; write it like {example}."
        ) from None
    except RecursionError:
        raise BadRequestError(f"{place} is nested too deeply; write it like {example}.") from None
