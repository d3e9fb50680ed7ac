"""The capacitor slot of a circuit, laid out for the search with what each network wants."""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass, fields
from functools import cache
from math import isfinite

import numpy as np
from numpy.typing import NDArray

from chooser.circuits.leakage import leak_conductance
from chooser.networks import Group, Join, Leaf
from chooser.parts import Holding, Part, Tolerance
from chooser.search.house_rules import LEAK_RATIO, resistor_bounds
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
    """Return the typical leak conductance in siemens; none in a lossless circuit."""
    circuit = request.circuit
    return 0.0 if circuit.lossless else leak_conductance(part, circuit.supply).typical


@dataclass(frozen=True, slots=True)
class CapacitorSlots:
    """Capacitor networks of one size, each with the resistance that it wants.

    Attributes
    ----------
    rows : the networks; each as often as the circuit has variants.
    variant, scale : (n,) number of the circuit's variant, and what it multiplies times by.
    farad, leak : (n,) capacitance in farad and typical leak conductance in siemens.
    wanted : (n,) resistance in ohm that makes the target time exactly; of a circuit with two
        resistors the one that the capacitor would charge through, were it the only one.
    least, most : (n,) resistances in ohm that the house rules allow.
    main : (n,) number of the lot with the greatest share of the capacitance.
    """

    rows: Rows
    variant: NDArray[np.int16]
    scale: Floats
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
        kept = rows if series_allowed else rows.take(unpolarised_series(rows, polarised))
        if Rule.STRAYS not in request.lifted:
            kept = kept.take(kept.value * request.circuit.least_farad <= 1 + 1e-12)
        if Rule.LARGE not in request.lifted and isfinite(request.circuit.most_farad):
            kept = kept.take(kept.value * request.circuit.most_farad >= 1 - 1e-12)
        variants = range(len(request.circuit.variants))
        pieces += [_slots(kept, pool, leaks, request, variant) for variant in variants]
    return _together(pieces)


def no_capacitor(request: Request) -> CapacitorSlots:
    """Return the one way to have no capacitor, in a circuit without that slot."""
    one = np.ones(1)
    return CapacitorSlots(
        rows=Rows.blank(1),
        variant=np.zeros(1, dtype=np.int16),
        scale=one,
        farad=one,
        leak=np.zeros(1),
        wanted=request.circuit.law.resistance(request.target, one, 0.0),
        least=np.zeros(1),
        most=np.full(1, np.inf),
        main=np.zeros(1, dtype=np.int32),
    )


def _slots(rows: Rows, pool: Pool, leaks: Floats, request: Request, variant: int) -> CapacitorSlots:
    circuit = request.circuit
    farad = rows.evaluate(pool.value, Join.PARALLEL)
    leak = rows.evaluate(leaks, Join.PARALLEL)
    least, most = charging_bounds(leak, request)
    scale = circuit.variants[variant].scale
    wanted = np.ones(len(rows))
    if len(circuit.resistors) == 1:
        wanted = circuit.law.resistance(request.target / scale, farad, leak)
    return CapacitorSlots(
        rows=rows,
        variant=np.full(len(rows), variant, dtype=np.int16),
        scale=np.full(len(rows), scale),
        farad=farad,
        leak=leak,
        wanted=wanted,
        least=least,
        most=most,
        main=_main_lots(rows, pool.value),
    )


def charging_bounds(leak: Floats, request: Request) -> tuple[Floats, Floats]:
    """Return the least and most resistance in ohm to charge through, for each leak in siemens.

    The house rules set them, and so does what no rule can lift: a time that never starts or
    never ends is no answer.
    """
    circuit, bounds = request.circuit, resistor_bounds(request)
    if not circuit.resistors:
        return np.zeros(len(leak)), np.full(len(leak), np.inf)
    least = bounds.least
    if len(circuit.resistors) == 1:
        least = max(least, circuit.law.starts_from * (1 + MARGIN))
    most = np.minimum(bounds.most, circuit.law.endless_from(leak) * (1 - MARGIN))
    if Rule.RESISTOR_LIMITS not in request.lifted and not circuit.lossless:
        most = np.minimum(most, circuit.law.leak_bound(leak, LEAK_RATIO))
    return np.full(len(leak), least), most


def _main_lots(rows: Rows, farad: Floats) -> NDArray[np.int32]:
    """Return the lot with the greatest share of each network's capacitance."""
    column = np.argmax(rows.shares(farad, Join.PARALLEL), axis=1)
    return np.asarray(rows.leaves[np.arange(len(rows)), column])


def _together(pieces: Sequence[CapacitorSlots]) -> CapacitorSlots:
    if len(pieces) == 1:
        return pieces[0]
    return CapacitorSlots(
        Rows.concatenated([piece.rows for piece in pieces]),
        *(
            np.concatenate([getattr(piece, field.name) for piece in pieces])
            for field in fields(CapacitorSlots)[1:]
        ),
    )


def unpolarised_series(rows: Rows, polarised: NDArray[np.bool_]) -> NDArray[np.bool_]:
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
