"""Which part is the problem: what each part, and the device, has in the spread of an output.

Conventions: shares are of the variance, to first order, and add up to 1. The parts of one slot
err together, so a slot's variance is shared among its parts in proportion to what each adds to
the slot's spread; slots and device are independent.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import inf, sqrt

from chooser.circuits.circuit import Circuit
from chooser.interval import Reading
from chooser.networks import Network, adding_join, tolerance_shares
from chooser.parts import Holding, Kind
from chooser.uncertainty import limits_of


@dataclass(frozen=True, slots=True)
class Cause:
    """One cause of the spread of an output.

    Attributes
    ----------
    slot : the slot its part is in; "" for the device.
    holding : the part; None for the device. count : how often the slot has it.
    share : of the variance, 0 to 1.
    spread_without : one sigma of the output, relative, if this cause were no more: what an exact
        measurement of the part would buy.
    """

    slot: str
    holding: Holding | None
    count: int
    share: float
    spread_without: float


def kind_in(slot: str) -> Kind:
    """Return the kind of part that goes into a slot of this name."""
    return Kind.CAPACITOR if slot == "C" else Kind.RESISTOR


def causes_of(
    circuit: Circuit, networks: Mapping[str, Network[Holding]], reading: Reading
) -> tuple[Cause, ...]:
    """Share the spread of an output among its causes.

    Parameters
    ----------
    circuit : the circuit. networks : what is in each of its slots.
    reading : the output, as `chooser.interval.outlook` read it.

    Returns
    -------
    Every part and the device, the greatest share first; empty where nothing scatters or the
    output is endless.
    """
    if not 0.0 < reading.spread < inf:
        return ()
    variance = reading.spread**2
    found: list[Cause] = []
    for slot, steep in zip(circuit.slots, reading.follows, strict=True):
        spreads = _spreads(networks[slot], kind_in(slot))
        whole = steep * sum(spread for _, _, spread in spreads)
        for holding, count, spread in spreads:
            own = steep * spread
            rest = variance - whole**2 + (whole - own) ** 2
            found.append(Cause(slot, holding, count, whole * own / variance, _root(rest)))
    if reading.device:
        own = reading.device**2
        found.append(Cause("", None, 1, own / variance, _root(variance - own)))
    return tuple(sorted(found, key=lambda cause: -cause.share))


def _spreads(network: Network[Holding], kind: Kind) -> list[tuple[Holding, int, float]]:
    """Return each holding once: how often it is there, and what it adds to the slot's spread."""
    shares = tolerance_shares(
        network,
        adding_join(kind),
        lambda holding: holding.part.effective,
        lambda holding: limits_of(holding.part),
    )
    found: dict[int, tuple[Holding, int, float]] = {}
    for share in shares:
        holding = share.member
        _, count, spread = found.get(holding.id, (holding, 0, 0.0))
        found[holding.id] = (holding, count + 1, spread + share.spread)
    return list(found.values())


def _root(variance: float) -> float:
    return sqrt(max(variance, 0.0))  # rounding may leave a little less than nothing
