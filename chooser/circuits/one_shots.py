"""The figures of the logic one-shots, read from one table; a user's file adds types.

The interval of a logic one-shot is K R C, or K C (R + 700 ohm) for the older TTL types that
print 0.28 R C (1 + 0.7 / R) with R in kohm. K differs between makers and even editions of one
type number, so a bare number with several of them is refused.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from chooser.circuits.figure_values import Flag, Number, Rows, Text
from chooser.circuits.figures import Catalogue, at_supply, check_order, check_rows
from chooser.errors import BadRequestError


@dataclass(frozen=True, slots=True)
class FactorRow:
    """The factor at one supply.

    Attributes
    ----------
    supply : supply voltage in volt.
    factor : K as the sheet's rule has it.
    measured : K as the sheet's own table has it, typical, at 0.1 uF; else the same as the rule.
    source : where the row is from.
    """

    supply: float
    factor: float
    measured: float
    source: str


@dataclass(frozen=True, slots=True)
class OneShot:
    """What the data sheet of one logic one-shot says; t = K C (R + extra_ohm).

    Attributes
    ----------
    name : type, with the edition where they differ. title : what it is, in words.
    number : bare number, or "".
    supply_min, supply_max : supply voltage in volt.
    factors : rows in ascending order of the supply.
    extra_ohm : added to R by the rule, ohm.
    factor_minus, factor_plus : how far pieces lie below and above the rule, fractions of it.
    smallest_resistor, largest_resistor : timing resistor, ohm.
    smallest_capacitor, largest_capacitor : timing capacitor that the rule holds for, farad.
    alternating : True where the capacitor is charged both ways round, so that it must not be
        a polarised one.
    sources : (figure, where it is from) pairs; not part of equality.
    """

    name: str
    title: str
    number: str
    supply_min: float
    supply_max: float
    factors: tuple[FactorRow, ...]
    extra_ohm: float
    factor_minus: float
    factor_plus: float
    smallest_resistor: float
    largest_resistor: float
    smallest_capacitor: float
    largest_capacitor: float
    alternating: bool = False
    sources: tuple[tuple[str, str], ...] = field(default=(), compare=False, repr=False)


def one_shot_named(name: str, file: Path | None = None) -> OneShot:
    """Return the one-shot of a name, in any mixture of upper and lower case.

    Parameters
    ----------
    name : a type; a bare number such as 4047 where one type alone has it.
    file : a file of the form of one_shots.toml with more types, or None.

    Raises
    ------
    UnknownNameError
        No such one-shot, or a number whose makers or editions differ; the sentence names them.
    BadRequestError
        The file cannot be read or a figure in it cannot be; the sentence names file and key.
    """
    return ONE_SHOTS.named(name, file)


def one_shot_names(file: Path | None = None) -> tuple[str, ...]:
    """Return the names of all one-shots, those of the file last (errors as in `one_shot_named`)."""
    return tuple(ONE_SHOTS.known(file))


def check_one_shot_supply(one_shot: OneShot, supply: float) -> None:
    """Refuse a supply voltage (volt) that the one-shot does not work at.

    Raises
    ------
    BadRequestError
        Outside its supply range.
    """
    ONE_SHOTS.check_supply(one_shot, supply)


def factor(one_shot: OneShot, supply: float) -> float:
    """Return K of the rule at a supply voltage (volt), interpolated between the rows.

    Raises
    ------
    BadRequestError
        Outside the supply range.
    """
    return _between(one_shot, supply, "factor")


def measured_factor(one_shot: OneShot, supply: float) -> float:
    """Return K as the sheet's own table has it (else as `factor`); errors as there."""
    return _between(one_shot, supply, "measured")


def _between(one_shot: OneShot, supply: float, column: str) -> float:
    """Return one column of the factor rows at a supply."""
    check_one_shot_supply(one_shot, supply)
    first, second, share = at_supply(one_shot.factors, supply)
    low: float = getattr(first, column)
    high: float = getattr(second, column)
    return low + share * (high - low)


def _as_rule(_key: str, values: Mapping[str, Any]) -> tuple[float, str]:
    """Return the rule's factor, where no other was measured."""
    return values["factor"], "default: as factor"


def _no_extra(_key: str, _values: Mapping[str, Any]) -> tuple[float, str]:
    """Return nothing to add to R, as most rules have it."""
    return 0.0, "default: the rule is K R C"


def _check(one_shot: OneShot, place: str) -> None:
    """Refuse figures that contradict each other."""
    pairs = (
        ("supply_min", "supply_max"),
        ("smallest_resistor", "largest_resistor"),
        ("smallest_capacitor", "largest_capacitor"),
    )
    check_order(one_shot, pairs, place)
    check_rows(one_shot.factors, f"{place}, key factors")
    for row in one_shot.factors:
        share = row.measured / row.factor - 1.0
        if not -one_shot.factor_minus <= share <= one_shot.factor_plus:
            raise BadRequestError(
                f"{place}, key factors, row at {row.supply:g} V: measured ({row.measured:g}) is "
                "outside factor_minus and factor_plus; correct one of them."
            )


_POSITIVE = Number(above_zero=True)
_LARGEST = Number(above_zero=True, may_be_endless=True)

ONE_SHOTS = Catalogue(
    record=OneShot,
    noun="one-shot",
    file="one_shots.toml",
    model="CD4538B",
    keys={
        "number": Text(),
        "supply_min": _POSITIVE,
        "supply_max": _POSITIVE,
        "factors": Rows(
            FactorRow,
            {
                "supply": _POSITIVE,
                "factor": _POSITIVE,
                "measured": Number(above_zero=True, default=_as_rule),
            },
        ),
        "extra_ohm": Number(default=_no_extra),
        "factor_minus": Number(below_one=True),
        "factor_plus": Number(),
        "smallest_resistor": _POSITIVE,
        "largest_resistor": _LARGEST,
        "smallest_capacitor": _POSITIVE,
        "largest_capacitor": _LARGEST,
        "alternating": Flag(),
    },
    check=_check,
)
"""The logic one-shots, from one_shots.toml."""
