"""The two slots of a one-resistor, one-capacitor circuit, laid out for the search."""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.leakage import leak_conductance
from chooser.circuits.monostable import endless_from, resistance, starts_from, typical
from chooser.networks import Group, Join, Leaf
from chooser.parts import Holding, Part, Tolerance
from chooser.search.house_rules import LEAST_FARAD, leak_bound, resistor_limits
from chooser.search.pools import Floats, Pool, gather
from chooser.search.request import Request
from chooser.search.tables import Rows, Shape, Tables, every_network
from chooser.search.terms import Rank, Rule
from chooser.technologies import is_polarised
from chooser.uncertainty import limits_of

MARGIN = 1e-6
"""Distance, relative, from where the interval becomes none or endless: nearer, rounding rules."""


def resistor_pool(holdings: Sequence[Holding], request: Request) -> Pool:
    """Gather the resistors; only the balanced order tells tolerances apart."""
    fine = request.rank is Rank.BALANCED

    def likeness(holding: Holding) -> Hashable:
        part = holding.part
        return (part.effective, limits_of(part)) if fine else part.effective

    return gather(holdings, request.boards, likeness)


def capacitor_pool(holdings: Sequence[Holding], request: Request) -> Pool:
    """Gather the capacitors; leakage and polarity always tell them apart."""
    fine = request.rank is Rank.BALANCED

    def likeness(holding: Holding) -> Hashable:
        part = holding.part
        leak = leak_of(part, request)
        same = (part.effective, leak, is_polarised(part))
        return (*same, limits_of(part)) if fine else same

    return gather(holdings, request.boards, likeness)


def leak_of(part: Part, request: Request) -> float:
    """Return the typical leak conductance in siemens; none for the ideal timer."""
    return 0.0 if request.timer.ideal else leak_conductance(part, request.supply).typical


@dataclass(frozen=True, slots=True)
class CapacitorSlots:
    """Capacitor networks of one size, each with the resistance that it wants.

    Attributes
    ----------
    rows : the networks.
    farad, leak : (n,) capacitance in farad and typical leak conductance in siemens.
    wanted : (n,) resistance in ohm that makes the target interval exactly.
    least, most : (n,) resistances in ohm that the house rules allow.
    main : (n,) number of the lot with the greatest share of the capacitance.
    """

    rows: Rows
    farad: Floats
    leak: Floats
    wanted: Floats
    least: Floats
    most: Floats
    main: NDArray[np.int32]

    def __len__(self) -> int:
        return len(self.farad)


def capacitor_slots(pool: Pool, tables: Tables, size: int, request: Request) -> CapacitorSlots:
    """List the capacitor networks of one size that the house rules allow.

    Parameters
    ----------
    pool : the capacitors. tables : their tables, in 1/farad.
    size : capacitors in the network.
    request : what is asked.
    """
    polarised = np.array([is_polarised(lot.holdings[0].part) for lot in pool.lots], dtype=np.bool_)
    leaks = np.array([leak_of(lot.holdings[0].part, request) for lot in pool.lots])
    series_allowed = Rule.POLARISED_SERIES in request.lifted
    pieces = []
    for rows in every_network(tables, size):
        kept = rows if series_allowed else rows.take(_unpolarised_series(rows, polarised))
        if Rule.STRAYS not in request.lifted:
            kept = kept.take(kept.value <= 1 / LEAST_FARAD * (1 + 1e-12))
        pieces.append(_slots(kept, pool, leaks, request))
    return _together(pieces)


def _slots(rows: Rows, pool: Pool, leaks: Floats, request: Request) -> CapacitorSlots:
    drive = typical(request.timer, request.supply)
    farad = rows.evaluate(pool.value, Join.PARALLEL)
    leak = rows.evaluate(leaks, Join.PARALLEL)
    least, most = resistor_limits(request)
    # An interval that never starts or never ends is no answer, whatever rule is lifted.
    least = max(least, starts_from(drive) * (1 + MARGIN))
    bounds = np.minimum(most, endless_from(leak, drive) * (1 - MARGIN))
    if Rule.RESISTOR_LIMITS not in request.lifted and not request.timer.ideal:
        bounds = np.minimum(bounds, leak_bound(leak, drive))
    wanted = resistance(request.target, farad, leak, drive)
    main = _main_lots(rows, pool.value)
    return CapacitorSlots(rows, farad, leak, wanted, np.full(len(rows), least), bounds, main)


def _main_lots(rows: Rows, farad: Floats) -> NDArray[np.int32]:
    """Return the lot with the greatest share of each network's capacitance."""
    column = np.argmax(rows.shares(farad, Join.PARALLEL), axis=1)
    return np.asarray(rows.leaves[np.arange(len(rows)), column])


def _together(pieces: Sequence[CapacitorSlots]) -> CapacitorSlots:
    if len(pieces) == 1:
        return pieces[0]
    return CapacitorSlots(
        Rows.concatenated([piece.rows for piece in pieces]),
        np.concatenate([piece.farad for piece in pieces]),
        np.concatenate([piece.leak for piece in pieces]),
        np.concatenate([piece.wanted for piece in pieces]),
        np.concatenate([piece.least for piece in pieces]),
        np.concatenate([piece.most for piece in pieces]),
        np.concatenate([piece.main for piece in pieces]),
    )


def _unpolarised_series(rows: Rows, polarised: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Tell which rows have no polarised part anywhere in a series group."""
    fine = np.ones(len(rows), dtype=np.bool_)
    for number, shape in enumerate(rows.shapes):
        columns = _in_series(shape)
        if columns:
            chosen = np.flatnonzero(rows.shape == number)
            fine[chosen] = ~polarised[rows.leaves[chosen][:, columns]].any(axis=1)
    return fine


@cache
def _in_series(shape: Shape) -> tuple[int, ...]:
    """Return the leaf columns that stand in some series group."""
    if isinstance(shape, Leaf):
        return ()
    if shape.join is Join.SERIES:
        return tuple(_columns(shape))
    return tuple(column for child in shape.children for column in _in_series(child))


def _columns(shape: Shape) -> list[int]:
    if isinstance(shape, Group):
        return [column for child in shape.children for column in _columns(child)]
    return [shape.member]


def lot_tolerances(pool: Pool) -> list[Tolerance]:
    """Return the limits of every lot's parts around their effective value."""
    return [limits_of(lot.holdings[0].part) for lot in pool.lots]
