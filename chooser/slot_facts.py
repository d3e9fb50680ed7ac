"""A slot as the honest interval sees it: one value with its ends, its spread and its leak."""

from __future__ import annotations

from dataclasses import dataclass

from chooser.circuits.leakage import leak_conductance
from chooser.networks import Join, Network, adding_join, slot_tolerance, value_of
from chooser.parts import Holding, Kind
from chooser.uncertainty import limits_of


@dataclass(frozen=True, slots=True)
class SlotFacts:
    """What is known of the network in one slot.

    Attributes
    ----------
    value : network value, ohm or farad, > 0.
    low, high : worst-case ends in the same unit, low <= value <= high.
    spread : one sigma relative to the value. shift : mean error relative to the value.
    leak_typical, leak_limit : leak conductance of a capacitor slot in siemens.
    """

    value: float
    low: float
    high: float
    spread: float
    shift: float
    leak_typical: float = 0.0
    leak_limit: float = 0.0


NOTHING = SlotFacts(1.0, 1.0, 1.0, 0.0, 0.0)
"""Stands for the capacitor of a circuit that has none."""


def slot_facts(
    network: Network[Holding], kind: Kind, supply: float, *, lossless: bool
) -> SlotFacts:
    """Return what is known of a network of holdings.

    Parameters
    ----------
    network : the network. kind : of its parts.
    supply : in volt, where a capacitor's rating is not known. lossless : leaks are left out.
    """
    found = slot_tolerance(
        network,
        adding_join(kind),
        lambda holding: holding.part.effective,
        lambda holding: limits_of(holding.part),
    )
    leaks = (0.0, 0.0)
    if kind is Kind.CAPACITOR and not lossless:
        # Leaks combine as conductances do, whatever the parts' values.
        leaks = (
            value_of(network, Join.PARALLEL, lambda h: leak_conductance(h.part, supply).typical),
            value_of(network, Join.PARALLEL, lambda h: leak_conductance(h.part, supply).limit),
        )
    return SlotFacts(found.value, found.low, found.high, found.spread, found.shift, *leaks)
