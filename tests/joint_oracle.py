"""Circuits of two resistors, listed one by one and sorted: as plain as `oracle`, on top of it.

A circuit is a network for RA, one for RB and one for C, all from one stock.  Nothing of the
package is used: the textbook times are fractions, those of a timer with currents are the
solutions of the charging equation, written down here once more.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from heapq import nsmallest

import oracle

LN2 = Fraction(math.log(2.0))

Wanted = Sequence[tuple[str, float, float]]
"""Output, least and most wanted value; equal ends where one value is wanted."""

Stock = dict[int, tuple[float, int | None]]


@dataclass(frozen=True)
class Row:
    """A circuit with its networks in the oracle's form, and their exact values."""

    ra: object
    rb: object
    c: object
    ohms: tuple[Fraction, Fraction]
    farad: Fraction

    @cached_property
    def resistors(self) -> list[int]:
        return sorted(oracle.parts_of(self.ra) + oracle.parts_of(self.rb))

    @cached_property
    def capacitors(self) -> list[int]:
        return oracle.parts_of(self.c)

    @cached_property
    def parts(self) -> int:
        return len(self.resistors) + len(self.capacitors)


def circuits(
    ohms: Stock,
    farads: Stock,
    most: tuple[int, int],
    boards: int,
    polar: set[int] | frozenset[int] = frozenset(),
) -> list[Row]:
    """List every circuit that the counts allow; polar parts never stand in series."""
    r_uses, c_uses = oracle.uses_of(ohms, boards), oracle.uses_of(farads, boards)
    capacitors = [
        each
        for each in oracle.all_networks(c_uses, most[1])
        if not oracle.polar_in_series(each, polar)
    ]
    valued = [(each, value_of(each, farads, "||")) for each in capacitors]
    return [
        Row(ra, rb, c, values, farad)
        for ra, rb, values in resistor_pairs(ohms, r_uses, most[0])
        for c, farad in valued
    ]


def resistor_pairs(
    ohms: Stock, uses: dict[int, int], most: int
) -> Iterator[tuple[object, object, tuple[Fraction, Fraction]]]:
    """Yield every RA and RB that together need no more pieces than there are."""
    listed = [
        (each, Counter(oracle.parts_of(each)), value_of(each, ohms, "+"))
        for each in oracle.all_networks(uses, most)
    ]
    for ra, taken_a, ohm_a in listed:
        for rb, taken_b, ohm_b in listed:
            if all(count <= uses[part] for part, count in (taken_a + taken_b).items()):
                yield ra, rb, (ohm_a, ohm_b)


def value_of(network: object, stock: Stock, adds: str) -> Fraction:
    worth = {part: oracle.fraction(value) for part, (value, _) in stock.items()}
    return oracle.value(network, worth, adds)


# Times -------------------------------------------------------------------------------------------


def textbook(row: Row, *, steered: bool) -> tuple[Fraction, Fraction]:
    """High and low time of a timer that trips at one and two thirds: R C ln 2 each."""
    ra, rb = row.ohms
    return (ra if steered else ra + rb) * row.farad * LN2, rb * row.farad * LN2


def swing(  # noqa: PLR0917 - the node has so many figures
    ohm: float, farad: float, leak: float, source: float, start: float, stop: float, current: float
) -> float:
    """Time of a node from one voltage to another, in volt, second and siemens.

    C dv/dt = (source - v) / R - G v - I; where it settles short of the stop it never ends.
    """
    conductance = 1.0 / ohm + leak
    rest = (source / ohm - current) / conductance
    if (rest - stop) * (stop - start) <= 0.0:
        return math.inf
    return farad / conductance * math.log((rest - start) / (rest - stop))


@dataclass(frozen=True)
class Currents:
    """What a timer takes from the node, and its switch; trip points in fractions of the supply."""

    supply: float
    upper: float
    lower: float
    into_input: float
    into_switch: float
    switch: float
    drop: float | None = None

    def times(self, row: Row, leak: float) -> tuple[float, float]:
        """Plain astable, or with `drop` the steered one whose diode has that voltage."""
        (ra, rb), farad = map(float, row.ohms), float(row.farad)
        high, low = self.supply * self.upper, self.supply * self.lower
        source, turn = self.supply - ra * self.into_switch, low
        if self.drop is not None:
            # The diode conducts while RB alone would have more than its voltage across it.
            turn = min(max(source - self.drop * (ra + rb) / rb, low), high)
        up = 0.0
        if turn > low:
            steered = source - (self.drop or 0.0)
            up = swing(ra, farad, leak, steered, low, turn, self.into_input)
        if turn < high:
            up += swing(ra + rb, farad, leak, source, turn, high, self.into_input)
        # While on, the switch divides the supply with RA: seen from RB a source of its own.
        rest = self.supply * self.switch / (ra + self.switch)
        beside = ra * self.switch / (ra + self.switch)
        return up, swing(rb + beside, farad, leak, rest, high, low, self.into_input)


# Errors and orders -------------------------------------------------------------------------------


def made(times: tuple[Fraction | float, Fraction | float]) -> dict[str, Fraction | float]:
    high, low = times
    return {"high": high, "low": low, "period": high + low, "duty": high / (high + low)}


def miss(times: tuple[Fraction | float, Fraction | float], wanted: Wanted) -> Fraction | float:
    """The largest error of any output: 0 inside a range, relative to its nearer end outside."""
    exact = isinstance(times[0], Fraction)
    outputs, worst = made(times), Fraction(0) if exact else 0.0
    for output, least, most in wanted:
        low, high = (oracle.fraction(end) if exact else end for end in (least, most))
        value = outputs[output]
        worst = max(worst, 1 - value / low, value / high - 1)
    return worst


def kept(rows: list[Row], times: Callable[[Row], tuple], wanted: Wanted) -> list[Row]:
    """Return the rows inside every range that was asked for; all of them where none is."""
    ranges = [(output, *ends) for output, *ends in wanted if ends[0] < ends[1]]
    found = [row for row in rows if not ranges or miss(times(row), ranges) <= 1e-12]
    return found or rows


def shortlist(rows: list[Row], rough: Callable[[Row], float], rank: str, top: int) -> list[Row]:
    """Return the rows that may be among the first `top`: fractions for the rest would be waste.

    `rough` is the error as a float; two parts per million are room for rounding to whole ones.
    """
    keyed = [((row.parts if rank == "count" else 0, rough(row)), row) for row in rows]
    if len(keyed) <= top:
        return rows
    parts, error = nsmallest(top, (key for key, _ in keyed))[-1]
    last = parts, error * (1 + 1e-9) + 2e-6
    return [row for key, row in keyed if key <= last]


def ranked(
    rows: list[Row],
    size: Callable[[Row], Fraction | float],
    uses: dict[int, int],
    rank: str,
) -> list[tuple]:
    """Sort circuits: (ppm, parts, error, plenty, resistor ids, capacitor ids, row) of each."""
    listed = []
    for row in rows:
        error = size(row)
        many = oracle.plentiful(uses, row.resistors + row.capacitors)
        listed.append(
            (oracle.ppm(error), row.parts, error, many, row.resistors, row.capacitors, row)
        )
    return oracle.in_order(listed, rank)


def all_uses(ohms: Stock, farads: Stock, boards: int) -> dict[int, int]:
    """Pieces of every part that one board may use."""
    return {**oracle.uses_of(ohms, boards), **oracle.uses_of(farads, boards)}
