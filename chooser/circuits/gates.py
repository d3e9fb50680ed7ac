"""The figures of the Schmitt inverters, read from one table; a user's file adds types.

The thresholds of a Schmitt input are given at a few supplies, each with wide limits and with
the least hysteresis that is left between them. In between they are interpolated in volt;
below the first and above the last supply their fraction of the supply is kept.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from chooser.circuits.figure_values import Number, Rows, Text
from chooser.circuits.figures import Catalogue, at_supply, check_order, check_rows
from chooser.errors import BadRequestError


@dataclass(frozen=True, slots=True)
class ThresholdRow:
    """Both thresholds at one supply, all in volt.

    Attributes
    ----------
    supply : supply voltage.
    upper_low, upper, upper_high : upper threshold, low limit, typical and high limit.
    lower_low, lower, lower_high : lower threshold, the same.
    hysteresis_low : least difference between the two of one piece.
    source : where the row is from.
    """

    supply: float
    upper_low: float
    upper: float
    upper_high: float
    lower_low: float
    lower: float
    lower_high: float
    hysteresis_low: float
    source: str


@dataclass(frozen=True, slots=True)
class Gate:
    """What the data sheet of one Schmitt inverter says.

    Attributes
    ----------
    name : type number. title : what it is, in words. number : bare number, or "".
    supply_min, supply_max : supply voltage in volt.
    thresholds : rows in ascending order of the supply.
    input_current_limit : of one input, ampere.
    output_resistance_typical, output_resistance_limit : of the output, ohm.
    smallest_resistor, largest_resistor : customary timing resistor, ohm.
    smallest_capacitor : customary timing capacitor, farad.
    sources : (figure, where it is from) pairs; not part of equality.
    """

    name: str
    title: str
    number: str
    supply_min: float
    supply_max: float
    thresholds: tuple[ThresholdRow, ...]
    input_current_limit: float
    output_resistance_typical: float
    output_resistance_limit: float
    smallest_resistor: float
    largest_resistor: float
    smallest_capacitor: float
    sources: tuple[tuple[str, str], ...] = field(default=(), compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Thresholds:
    """Both thresholds of a gate at one supply, as fractions of that supply.

    Attributes
    ----------
    upper_low, upper, upper_high : upper threshold, low limit, typical and high limit.
    lower_low, lower, lower_high : lower threshold, the same.
    hysteresis_low : least difference between the two of one piece.
    """

    upper_low: float
    upper: float
    upper_high: float
    lower_low: float
    lower: float
    lower_high: float
    hysteresis_low: float

    def allow(self, upper: float, lower: float) -> bool:
        """Tell whether a piece may have these thresholds."""
        return (
            self.upper_low * (1.0 - _ROUNDING) <= upper <= self.upper_high * (1.0 + _ROUNDING)
            and self.lower_low * (1.0 - _ROUNDING) <= lower <= self.lower_high * (1.0 + _ROUNDING)
            and upper - lower >= self.hysteresis_low * (1.0 - _ROUNDING)
        )

    def closest(self) -> tuple[float, float]:
        """Return the upper and lower threshold, within the limits, of the shortest period.

        A period is R C ln(u (1 - l) / (l (1 - u))). It shrinks as u and l approach each other,
        and with their difference held it is shortest where they lie evenly around one half.
        The longest period belongs to `upper_high` and `lower_low`.
        """
        gap = max(self.hysteresis_low, self.upper_low - self.lower_high)
        least = max(self.lower_low, self.upper_low - gap)
        most = min(self.lower_high, self.upper_high - gap)
        lower = min(max((1.0 - gap) / 2.0, least), most)
        return lower + gap, lower

    def extremes(self) -> tuple[tuple[float, float], ...]:
        """Return the pairs of upper and lower threshold at which times and duty are extreme.

        Those are the corners of what the limits and the least hysteresis leave of all pairs:
        high and low time are monotone in either threshold, so their ends lie there; the duty's
        do too (tried on a grid for every row on file), and the shortest period's is `closest`.
        """
        ends = [(upper, lower) for upper in self._uppers for lower in self._lowers]
        gap = self.hysteresis_low
        ends += [(upper, upper - gap) for upper in self._uppers]
        ends += [(lower + gap, lower) for lower in self._lowers]
        return tuple(dict.fromkeys((*(pair for pair in ends if self.allow(*pair)), self.closest())))

    @property
    def _uppers(self) -> tuple[float, float]:
        return self.upper_low, self.upper_high

    @property
    def _lowers(self) -> tuple[float, float]:
        return self.lower_low, self.lower_high


_ROUNDING = 1e-12
_VOLTS = tuple(Thresholds.__dataclass_fields__)


def gate_named(name: str, file: Path | None = None) -> Gate:
    """Return the Schmitt inverter of a name, in any mixture of upper and lower case.

    Parameters
    ----------
    name : a type number.
    file : a file of the form of gates.toml with more types, or None.

    Raises
    ------
    UnknownNameError
        No such gate; the sentence names the nearest and all known ones.
    BadRequestError
        The file cannot be read or a figure in it cannot be; the sentence names file and key.
    """
    return GATES.named(name, file)


def gate_names(file: Path | None = None) -> tuple[str, ...]:
    """Return the names of all gates, those of the file last (errors as in `gate_named`)."""
    return tuple(GATES.known(file))


def check_gate_supply(gate: Gate, supply: float) -> None:
    """Refuse a supply voltage (volt) that the gate does not work at.

    Raises
    ------
    BadRequestError
        Outside the gate's supply range.
    """
    GATES.check_supply(gate, supply)


def thresholds(gate: Gate, supply: float) -> Thresholds:
    """Return the thresholds of a gate at a supply voltage (volt), as fractions of it.

    Raises
    ------
    BadRequestError
        Outside the gate's supply range.
    """
    check_gate_supply(gate, supply)
    first, second, share = at_supply(gate.thresholds, supply)
    across = first.supply + share * (second.supply - first.supply)
    volts = {
        key: getattr(first, key) + share * (getattr(second, key) - getattr(first, key))
        for key in _VOLTS
    }
    return Thresholds(**{key: volt / across for key, volt in volts.items()})


def _check(gate: Gate, place: str) -> None:
    """Refuse figures that contradict each other."""
    pairs = (
        ("supply_min", "supply_max"),
        ("output_resistance_typical", "output_resistance_limit"),
        ("smallest_resistor", "largest_resistor"),
    )
    check_order(gate, pairs, place)
    check_rows(gate.thresholds, f"{place}, key thresholds")
    for row in gate.thresholds:
        _check_row(row, f"{place}, key thresholds, row at {row.supply:g} V")


def _check_row(row: ThresholdRow, place: str) -> None:
    """Refuse thresholds that no piece can have."""
    pairs = (
        ("upper_low", "upper"),
        ("upper", "upper_high"),
        ("lower_low", "lower"),
        ("lower", "lower_high"),
        ("lower_low", "upper_low"),
        ("lower_high", "upper_high"),
    )
    check_order(row, pairs, place)
    if row.upper - row.lower < row.hysteresis_low:
        raise BadRequestError(
            f"{place}: upper less lower ({row.upper - row.lower:g}) is below hysteresis_low "
            f"({row.hysteresis_low:g}); correct one of them."
        )
    if row.upper_high >= row.supply:
        raise BadRequestError(
            f"{place}: upper_high ({row.upper_high:g}) is not below the supply; write volt."
        )


_POSITIVE = Number(above_zero=True)
_LARGEST = Number(above_zero=True, may_be_endless=True)

GATES = Catalogue(
    record=Gate,
    noun="gate",
    file="gates.toml",
    model="74HC14",
    keys={
        "number": Text(),
        "supply_min": _POSITIVE,
        "supply_max": _POSITIVE,
        "thresholds": Rows(ThresholdRow, dict.fromkeys(("supply", *_VOLTS), _POSITIVE)),
        "input_current_limit": Number(),
        "output_resistance_typical": Number(),
        "output_resistance_limit": Number(),
        "smallest_resistor": _POSITIVE,
        "largest_resistor": _LARGEST,
        "smallest_capacitor": _POSITIVE,
    },
    check=_check,
)
"""The Schmitt inverters, from gates.toml."""
