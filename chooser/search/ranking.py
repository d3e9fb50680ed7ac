"""What makes one fit better than another, compared in exact fractions.

Orders
------
error : |error| in whole ppm, parts, |error|, then the tie-breaks.
count : parts, |error|, then the tie-breaks.

The tie-breaks are in `chooser.search.choosing`.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from chooser.circuits.monostable import LN3, interval, typical
from chooser.networks import Join, Network, members, value_of
from chooser.search.pools import Pool
from chooser.search.request import Request
from chooser.search.terms import Rank

PPM = 1e-6

Size = Fraction | float
"""The size of an error: a fraction where the formula allows it, else a float."""


def exact(value: float) -> Fraction:
    """Return the decimal number that a float was read from.

    Parameters
    ----------
    value : in any unit; 4.7e-9 becomes 47 / 10 000 000 000, not its binary neighbour.
    """
    return Fraction(repr(float(value)))


@dataclass(frozen=True, slots=True)
class Pairing:
    """A resistor network and a capacitor network of lots.

    Attributes
    ----------
    resistor, capacitor : the networks; leaves are numbers of lots.
    parts : how many parts in all.
    size : size of the error. ppm : the same in whole parts per million.
    """

    resistor: Network[int]
    capacitor: Network[int]
    parts: int
    size: Size
    ppm: int


class _Exactly:
    """The values of lots as fractions, each made when first asked for."""

    def __init__(self, values: Sequence[float]) -> None:
        self._values = values
        self._made: dict[int, Fraction] = {}

    def __call__(self, lot: int) -> Fraction:
        if lot not in self._made:
            self._made[lot] = exact(self._values[lot])
        return self._made[lot]


class Judge:
    """Calculates errors from exact network values.

    With the ideal timer everything is a fraction (ln 3 stands for its nearest float), so equal
    errors are seen to be equal.  With a real one the interval is a float of correctly rounded
    network values: equal networks still give equal intervals.
    """

    def __init__(self, request: Request, resistors: Pool, capacitors: Pool) -> None:
        self._request = request
        self._ohm = _Exactly(resistors.value.tolist())
        self._farad = _Exactly(capacitors.value.tolist())
        self._target = exact(request.target)
        self._drive = typical(request.timer, request.supply)
        self._values: dict[Network[int], Fraction] = {}

    def pairing(self, resistor: Network[int], capacitor: Network[int], leak: float) -> Pairing:
        """Weigh a pair of networks of lots; `leak` is the capacitor's in siemens."""
        ohm = value_of(resistor, Join.SERIES, self._ohm)
        if capacitor not in self._values:
            self._values[capacitor] = value_of(capacitor, Join.PARALLEL, self._farad)
        size = self.size_of_error(ohm, self._values[capacitor], leak)
        parts = sum(1 for _ in members(resistor)) + sum(1 for _ in members(capacitor))
        return Pairing(resistor, capacitor, parts, size, whole_ppm(size))

    def size_of_error(self, ohm: Fraction, farad: Fraction, leak: float) -> Size:
        """Return |interval - target| / target of exact values and a leak in siemens."""
        if self._request.timer.ideal:
            return abs(ohm * farad * Fraction(LN3) / self._target - 1)
        time = float(interval(float(ohm), float(farad), leak, self._drive))
        return abs(time / self._request.target - 1)


def whole_ppm(size: Size) -> int:
    """Round the size of an error to whole parts per million, halves up."""
    if isinstance(size, Fraction):
        return int(size * 1_000_000 + Fraction(1, 2))
    return int(size / PPM + 0.5)


def order_key(rank: Rank) -> Callable[[Pairing], tuple[Any, ...]]:
    """Return the sort key of an exact order, without the tie-breaks."""
    if rank is Rank.COUNT:
        return lambda pairing: (pairing.parts, pairing.size)
    return lambda pairing: (pairing.ppm, pairing.parts, pairing.size)
