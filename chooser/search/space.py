"""The space that a request opens: pools, their tables, and the levels of it by parts."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass
from itertools import product

from chooser.parts import Holding
from chooser.search.counting import networks_from, networks_from_polarised, pairs_from
from chooser.search.pools import Pool, uses_of
from chooser.search.request import Request
from chooser.search.slots import (
    CapacitorSlots,
    capacitor_pool,
    capacitor_slots,
    no_capacitor,
    resistor_pool,
)
from chooser.search.tables import Tables
from chooser.search.terms import Rule
from chooser.technologies import is_polarised

MOST_LISTED = 150_000
"""Groups of a resistor table that are listed; a larger one is split, because sorting costs more."""

MOST_CAPACITOR_NETWORKS = 4_000_000
"""Capacitor networks of one size that are listed; each wants a resistance of its own."""


@dataclass(frozen=True, slots=True)
class Level:
    """A part of the space: circuits of so many resistors in each slot and so many capacitors."""

    resistors: tuple[int, ...]
    capacitors: int

    @property
    def parts(self) -> int:
        """Parts in all."""
        return sum(self.resistors) + self.capacitors


class Space:
    """What there is to choose from.

    Parameters
    ----------
    resistors, capacitors : usable holdings.
    request : what is asked.

    Attributes
    ----------
    not_listed : numbers of capacitors whose networks were too many to list.
    """

    def __init__(
        self, resistors: Sequence[Holding], capacitors: Sequence[Holding], request: Request
    ) -> None:
        self.request = request
        self.not_listed: frozenset[int] = frozenset()
        self.resistors: Pool = resistor_pool(resistors, request)
        self.capacitors: Pool = capacitor_pool(capacitors, request)
        self.resistor_tables = Tables(self.resistors.adding, self.resistors.uses, MOST_LISTED)
        self._capacitor_tables = Tables(
            self.capacitors.adding, self.capacitors.uses, MOST_CAPACITOR_NETWORKS
        )
        # Each network stands in the list once for each variant of the circuit.
        self._most_listed = MOST_CAPACITOR_NETWORKS // len(request.circuit.variants)
        self._slots: dict[int, CapacitorSlots | None] = {}

    def levels(self) -> Iterator[Level]:
        """Yield the levels, rising in parts; among equals the fewer capacitors first."""
        circuit, request = self.request.circuit, self.request
        sizes = product(range(1, request.most_resistors + 1), repeat=len(circuit.resistors))
        capacitors = range(1, request.most_capacitors + 1) if circuit.capacitor else range(1)
        levels = [Level(*sizes) for sizes in product(sizes, capacitors)]
        yield from sorted(levels, key=lambda level: (level.parts, level.capacitors))

    def slots(self, capacitors: int) -> CapacitorSlots | None:
        """Return the capacitor networks of a size; None, noted, where they are too many.

        Of size 0, for a circuit without a capacitor, there is one: none.
        """
        if capacitors not in self._slots:
            if capacitors == 0:
                self._slots[0] = no_capacitor(self.request)
            elif self._capacitor_tables.count(capacitors) > self._most_listed:
                self.not_listed |= {capacitors}
                self._slots[capacitors] = None
            else:
                self._slots[capacitors] = capacitor_slots(
                    self.capacitors, self._capacitor_tables, capacitors, self.request
                )
        return self._slots[capacitors]


def combinations(
    resistors: Sequence[Holding],
    capacitors: Sequence[Holding],
    request: Request,
    not_listed: Collection[int] = (),
) -> int:
    """Count the circuits that the search covered, listed or by argument, by formula.

    Parameters
    ----------
    resistors, capacitors : usable holdings.
    request : its boards divide the counts, its most_resistors and most_capacitors bound the size.
    not_listed : numbers of capacitors that were not covered.
    """
    ohms = [uses_of(holding, request.boards) for holding in resistors]
    apart = Rule.POLARISED_SERIES not in request.lifted
    polar = [holding for holding in capacitors if apart and is_polarised(holding.part)]
    free = [holding for holding in capacitors if not (apart and is_polarised(holding.part))]
    free_uses = [uses_of(holding, request.boards) for holding in free]
    polar_uses = [uses_of(holding, request.boards) for holding in polar]
    circuit = request.circuit
    farads = sum(
        networks_from_polarised(free_uses, polar_uses, size)
        for size in range(1, request.most_capacitors + 1)
        if size not in not_listed
    )
    circuits = 1
    if len(circuit.resistors) == 1:
        sizes = range(1, request.most_resistors + 1)
        circuits = sum(networks_from(ohms, size) for size in sizes)
    elif circuit.resistors:
        circuits = pairs_from(ohms, request.most_resistors)
    return circuits * (farads if circuit.capacitor else 1) * len(circuit.variants)
