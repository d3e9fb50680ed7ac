"""What a table of device figures may hold, and the reading of its values.

A figure is ``{ value = 1e-9, source = "..." }`` or a bare number; rows are small tables. What
cannot be is refused in one sentence that starts with where it stands.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from math import inf, isnan
from typing import Any, TypeAlias

from chooser.errors import BadRequestError

_LONGEST = 60

Default: TypeAlias = Callable[[str, Mapping[str, Any]], tuple[Any, str]]
"""From a key and the values read so far to the value that is taken, and why."""


@dataclass(frozen=True, slots=True)
class Number:
    """A key that holds a number: 0 or more, and finite unless it may be endless.

    Attributes
    ----------
    above_zero, below_one, may_be_endless, whole : further rules.
    default : what is taken where the key is missing, or None where it must be there.
    """

    above_zero: bool = False
    below_one: bool = False
    may_be_endless: bool = False
    whole: bool = False
    default: Default | None = None


@dataclass(frozen=True, slots=True)
class Text:
    """A key that holds a text, "" where it is missing."""


@dataclass(frozen=True, slots=True)
class Flag:
    """A key that holds true or false, false where it is missing."""


@dataclass(frozen=True, slots=True)
class Rows:
    """A key that holds a list of rows, each a small table with these columns and a source.

    Attributes
    ----------
    record : the frozen record of one row; has the columns and ``source``.
    columns : the columns.
    """

    record: Callable[..., Any]
    columns: Mapping[str, Number | Text]


Key: TypeAlias = Number | Text | Flag | Rows


def shown(value: object) -> str:
    """Return a value as it was written, cut where it is too long for a sentence."""
    text = repr(value)
    return text if len(text) <= _LONGEST else f"{text[:_LONGEST]}..."


def read_plain(entry: object, kind: Text | Flag, where: str) -> object:
    """Return a text, or true or false."""
    wanted, words = (str, "a text") if isinstance(kind, Text) else (bool, "true or false")
    if not isinstance(entry, wanted):
        raise BadRequestError(f"{where}: {shown(entry)} is not {words}; write {words}.")
    return entry


def read_sourced(entry: object, kind: Number, where: str) -> tuple[float, str]:
    """Return a number and its source, "" for a bare number."""
    if not isinstance(entry, dict):
        return _number(entry, kind, where), ""
    unknown = set(entry) - {"value", "source"}
    source = entry.get("source", "")
    if "value" not in entry or unknown or not isinstance(source, str):
        raise BadRequestError(
            f"{where}: {shown(entry)} is no figure; "
            'write { value = 1e-9, source = "where it is from" }.'
        )
    return _number(entry["value"], kind, where), source


def _number(value: object, kind: Number, where: str) -> float:
    """Return a number that the key may have."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise BadRequestError(f"{where}: {shown(value)} is no number; write it in SI units.")
    try:
        number = float(value)
    except OverflowError:  # an integer of hundreds of digits
        number = inf if value > 0 else -inf
    checks = (
        (isnan(number) or number < 0.0, "0 or more"),
        (number == 0.0 and kind.above_zero, "more than 0"),
        (number >= 1.0 and kind.below_one, "below 1, as a fraction (3 % is 0.03)"),
        (number == inf and not kind.may_be_endless, "finite"),
        (kind.whole and not number.is_integer(), "a whole number"),
    )
    for wrong, words in checks:
        if wrong:
            raise BadRequestError(f"{where}: {shown(value)} cannot be; it must be {words}.")
    return int(number) if kind.whole else number


def read_rows(entry: object, kind: Rows, where: str) -> tuple[Any, ...]:
    """Return the rows of one key as records."""
    if not isinstance(entry, list) or not entry:
        raise BadRequestError(
            f"{where}: {shown(entry)} is no list of rows; write [{{ {_example(kind)} }}]."
        )
    return tuple(_row(row, kind, f"{where}, row {place}") for place, row in enumerate(entry, 1))


def _row(row: object, kind: Rows, where: str) -> Any:
    """Return one row as a record."""
    columns: dict[str, Number | Text] = {**kind.columns, "source": Text()}
    if not isinstance(row, dict) or set(row) - set(columns):
        raise BadRequestError(f"{where}: {shown(row)} is no row; write {{ {_example(kind)} }}.")
    values: dict[str, Any] = {}
    for column, rule in columns.items():
        if isinstance(rule, Text):
            values[column] = read_plain(row.get(column, ""), rule, f"{where}, {column}")
        elif column in row:
            values[column] = _number(row[column], rule, f"{where}, {column}")
        elif rule.default is not None:
            values[column], _ = rule.default(column, values)
        else:
            raise BadRequestError(f"{where}: {column} is missing; write {{ {_example(kind)} }}.")
    return kind.record(**values)


def _example(kind: Rows) -> str:
    """Return what a row looks like."""
    return ", ".join(f"{column} = ..." for column in (*kind.columns, "source"))
