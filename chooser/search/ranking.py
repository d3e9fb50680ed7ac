"""What makes one fit better than another, compared in exact fractions.

Orders
------
error : |error| in whole ppm, parts, |error|, then the tie-breaks.
count : parts, |error|, then the tie-breaks.

Where several outputs have targets, the largest of their |errors| counts. The tie-breaks are in
`chooser.search.choosing`.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from chooser.circuits.circuit import outputs_of
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
    """Networks of lots for every slot.

    Attributes
    ----------
    resistors : the networks of the resistor slots; leaves are numbers of lots.
    capacitor : that of the capacitor slot, or None where there is none.
    variant : number of the circuit's variant.
    parts : how many parts in all.
    size : size of the error. ppm : the same in whole parts per million.
    """

    resistors: tuple[Network[int], ...]
    capacitor: Network[int] | None
    variant: int
    parts: int
    size: Size
    ppm: int

    @property
    def capacitors(self) -> tuple[Network[int], ...]:
        """The network of the capacitor slot, if there is one."""
        return () if self.capacitor is None else (self.capacitor,)


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

    Where the circuit's formula is a plain product everything is a fraction (ln 3 stands for its
    nearest float), so equal errors are seen to be equal.  With a real device the times are floats
    of correctly rounded network values: equal networks still give equal times.
    """

    def __init__(self, request: Request, resistors: Pool, capacitors: Pool) -> None:
        self._request = request
        self._ohm = _Exactly(resistors.value.tolist())
        self._farad = _Exactly(capacitors.value.tolist())
        self._wanted = [
            (target.output, exact(target.low), exact(target.high)) for target in request.targets
        ]
        self._values: dict[Network[int], Fraction] = {}

    def pairing(
        self,
        resistors: tuple[Network[int], ...],
        capacitor: Network[int] | None,
        leak: float = 0.0,
        variant: int = 0,
    ) -> Pairing:
        """Weigh networks of lots; `leak` is the capacitor's in siemens."""
        ohms = [value_of(network, Join.SERIES, self._ohm) for network in resistors]
        farad = Fraction(1)
        if capacitor is not None:
            if capacitor not in self._values:
                self._values[capacitor] = value_of(capacitor, Join.PARALLEL, self._farad)
            farad = self._values[capacitor]
        size = self.size_of_error(ohms, farad, leak, variant)
        networks = (*resistors, *((capacitor,) if capacitor is not None else ()))
        parts = sum(1 for network in networks for _ in members(network))
        return Pairing(resistors, capacitor, variant, parts, size, whole_ppm(size))

    def size_of_error(
        self, ohms: Sequence[Fraction], farad: Fraction, leak: float, variant: int = 0
    ) -> Size:
        """Return the largest |error| of exact values and a leak in siemens."""
        circuit = self._request.circuit
        scale = circuit.variants[variant].scale
        times = circuit.typical.exactly(ohms, farad)
        if times is not None:
            made = outputs_of(circuit, [exact(scale) * time for time in times])
            return max(_miss(made[output], low, high) for output, low, high in self._wanted)
        floats = circuit.typical.times([float(ohm) for ohm in ohms], float(farad), leak)
        found = outputs_of(circuit, [scale * float(time) for time in floats])
        errors: list[float] = [
            abs(target.error(found[target.output])) for target in self._request.targets
        ]
        return max(errors)


def _miss(value: Fraction, low: Fraction, high: Fraction) -> Fraction:
    if value < low:
        return 1 - value / low
    return value / high - 1 if value > high else Fraction(0)


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
