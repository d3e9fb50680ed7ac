"""Frozen records of the stock: a part, its tolerance, a count, a holding.

Conventions: SI units throughout (ohm, farad, volt, watt, ampere); tolerances and other
relative quantities are fractions (5 % is 0.05); tempco is in 1/K (100 ppm/K is 1e-4).
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Kind(StrEnum):
    """What a holding is."""

    RESISTOR = "resistor"
    POT = "pot"
    TRIMMER = "trimmer"
    CAPACITOR = "capacitor"


class Taper(StrEnum):
    """How a pot's resistance grows with its travel."""

    LINEAR = "linear"
    LOG = "log"
    REVERSE_LOG = "reverse-log"


@dataclass(frozen=True, slots=True)
class Tolerance:
    """Relative limits around a value: value x (1 - minus) to value x (1 + plus).

    Attributes
    ----------
    minus, plus : fractions, both >= 0; minus < 1.
    """

    minus: float
    plus: float

    @property
    def spread(self) -> float:
        """One sigma of a uniform law between the limits, as a fraction of the value."""
        return float((self.plus + self.minus) / 12**0.5)

    @property
    def shift(self) -> float:
        """Mean of that law relative to the value (0 for symmetric limits)."""
        return (self.plus - self.minus) / 2


class Sureness(StrEnum):
    """How well a count is known."""

    EXACT = "exact"
    ROUGH = "rough"
    PLENTY = "plenty"


@dataclass(frozen=True, slots=True)
class Count:
    """How many parts are in a drawer.

    Attributes
    ----------
    number : pieces >= 0; ignored (0) where the sureness is "plenty".
    sureness : exact (limits), rough (limits, look first) or plenty (never limits).
    """

    number: int
    sureness: Sureness = Sureness.EXACT


@dataclass(frozen=True, slots=True)
class Part:
    """One kind of part: what is printed on it and what was measured.

    Attributes
    ----------
    kind : resistor, pot, trimmer or capacitor.
    value : nominal value, ohm or farad, > 0.
    marking : the value as the user typed it ("" where it was made, as by a kit).
    tolerance : printed tolerance, or None where unknown.
    technology : a name of `chooser.technologies`, or None where unknown.
    power : rated power in watt. voltage : rated voltage in volt.
    tempco : temperature coefficient in 1/K.
    measured : measured value, ohm or farad. meter : accuracy of that reading, a fraction.
    leakage : leakage current at rated voltage in ampere, printed or measured.
    taper, turns, end_resistance : of pots; turns of travel; ohm left at the stop.
    price : of one pack, in the user's currency. pack : pieces in a pack.
    supplier, order_code, note : free text, "" where empty.
    """

    kind: Kind
    value: float
    marking: str = ""
    tolerance: Tolerance | None = None
    technology: str | None = None
    power: float | None = None
    voltage: float | None = None
    tempco: float | None = None
    measured: float | None = None
    meter: float | None = None
    leakage: float | None = None
    taper: Taper | None = None
    turns: float | None = None
    end_resistance: float | None = None
    price: float | None = None
    pack: int | None = None
    supplier: str = ""
    order_code: str = ""
    note: str = ""

    @property
    def effective(self) -> float:
        """The value to calculate with: measured where measured, else nominal (ohm or farad)."""
        return self.value if self.measured is None else self.measured


@dataclass(frozen=True, slots=True)
class Holding:
    """A line of the stock: one kind of part in one drawer.

    Attributes
    ----------
    id : number of the holding (> 0), unique in the stock.
    part : what it is.
    drawer : name of the place.
    count : how many are there. claimed : how many of them are put aside for jobs.
    """

    id: int
    part: Part
    drawer: str
    count: Count
    claimed: int = 0

    @property
    def free(self) -> int | None:
        """Pieces that may be used now; None means it never limits."""
        if self.count.sureness is Sureness.PLENTY:
            return None
        return self.count.number - self.claimed


@dataclass(frozen=True, slots=True)
class Entry:
    """One statement of what lies in a drawer, as a sheet row or a command says it.

    Attributes
    ----------
    part : what it is. drawer : name of the place, not blank. count : how many are there.
    place : where it was said ("parts.csv row 7"), for messages.
    """

    part: Part
    drawer: str
    count: Count
    place: str

    @property
    def identity(self) -> tuple[object, ...]:
        """What makes two entries speak of the same holding; drawers differ by more than case."""
        return identity_of(self.part, self.drawer)


def identity_of(part: Part, drawer: str) -> tuple[object, ...]:
    """Tell holdings apart: equal results are the same kind of part in the same drawer.

    Price, rating in watts, supplier and note may be corrected without making it another holding.
    """
    return (
        part.kind,
        part.value,
        part.tolerance,
        part.technology,
        part.voltage,
        part.measured,
        part.taper,
        part.turns,
        drawer.casefold(),
    )
