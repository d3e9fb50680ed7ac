"""The house rules: what a timing circuit should not be built from, and why.

Every rule holds unless it is lifted, and whatever it keeps out is said with the reason.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from chooser.circuits.monostable import Drive, limits
from chooser.errors import BadRequestError
from chooser.parts import Holding, Kind
from chooser.quantities import format_resistance, format_voltage
from chooser.search.request import Refusal, Request
from chooser.search.terms import REASONS, USUAL_PARTS, Rule
from chooser.technologies import technology_of

LEAST_FARAD = 1e-9
"""Least timing capacitance: 10 pF of strays, a usual figure, are then 1 %."""

LEAK_RATIO = 3.0
"""Least charging current at the trip point over the capacitor's typical leakage.

At 3 the interval is stretched by a fifth to a quarter, and what it will be next week is
anybody's guess; the limit is ours, the stretch follows from the charging equation.
"""


@dataclass(frozen=True, slots=True)
class Usable:
    """What the rules leave to the search.

    Attributes
    ----------
    resistors, capacitors : usable holdings with free pieces.
    refusals : what was kept out.
    """

    resistors: tuple[Holding, ...]
    capacitors: tuple[Holding, ...]
    refusals: tuple[Refusal, ...]


def check_part_numbers(request: Request) -> None:
    """Refuse a request for slots of more parts than anyone solders, unless the rule is lifted.

    Raises
    ------
    BadRequestError
    """
    most = max(request.most_resistors, request.most_capacitors)
    if most > USUAL_PARTS and Rule.MANY_PARTS not in request.lifted:
        raise BadRequestError(
            f"{most} parts in one slot is more than the {USUAL_PARTS} that make sense on a board;"
            f" ask for fewer, or add --allow {Rule.MANY_PARTS}."
        )


def usable_parts(holdings: Iterable[Holding], request: Request) -> Usable:
    """Sort out the holdings that may become timing parts.

    Parameters
    ----------
    holdings : the whole stock.
    request : says the supply and which rules are lifted.
    """
    stock = [holding for holding in holdings if holding.free is None or holding.free > 0]
    resistors = [holding for holding in stock if holding.part.kind is Kind.RESISTOR]
    capacitors = [holding for holding in stock if holding.part.kind is Kind.CAPACITOR]
    refusals: list[Refusal] = []
    if Rule.CERAMIC not in request.lifted:
        capacitors = _sift(capacitors, _is_class_2, Rule.CERAMIC, "ceramic", refusals)
    if Rule.VOLTAGE not in request.lifted:

        def too_low(holding: Holding) -> bool:
            return holding.part.voltage is not None and holding.part.voltage < request.supply

        what = f"under {format_voltage(request.supply)}"
        capacitors = _sift(capacitors, too_low, Rule.VOLTAGE, what, refusals)
    return Usable(tuple(resistors), tuple(capacitors), tuple(refusals))


def resistor_limits(request: Request) -> tuple[float, float]:
    """Return the least and most timing resistance in ohm that the timer allows."""
    if Rule.RESISTOR_LIMITS in request.lifted:
        return 0.0, float("inf")
    return limits(request.timer, request.supply)


def leak_bound(leak: ArrayLike, drive: Drive) -> NDArray[np.float64]:
    """Return the resistance that still charges LEAK_RATIO times what the capacitor leaks.

    At the trip point, (1 - a) V / R = LEAK_RATIO x a V G, with a the threshold as a fraction of
    the supply V.

    Parameters
    ----------
    leak : typical leak conductance G in siemens, >= 0, any shape. drive : the timer.

    Returns
    -------
    Ohm, of the same shape; infinity where nothing leaks.
    """
    with np.errstate(divide="ignore"):
        return np.asarray((1 - drive.threshold) / (LEAK_RATIO * drive.threshold * np.asarray(leak)))


def limits_refusal(request: Request) -> Refusal | None:
    """Say the timer's limits of the timing resistor, where there are any."""
    least, most = resistor_limits(request)
    if not 0 < least < most < float("inf"):
        return None
    return Refusal(
        Rule.RESISTOR_LIMITS,
        f"Timing resistors stay between {format_resistance(least, digits=3)} (discharge-pin "
        f"current) and {format_resistance(most, digits=3)} (the {request.timer.name} timer's own "
        "currents and board leakage), less where the capacitor leaks.",
    )


def _is_class_2(holding: Holding) -> bool:
    technology = technology_of(holding.part)
    return technology is not None and technology.ceramic_class > 1


def _sift(
    holdings: Collection[Holding],
    refused: Callable[[Holding], bool],
    rule: Rule,
    what: str,
    refusals: list[Refusal],
) -> list[Holding]:
    """Keep what is not refused; note what is."""
    out = [holding for holding in holdings if refused(holding)]
    if out:
        noun = "capacitor" if len(out) == 1 else "capacitors"
        why = f"{len(out)} {what} {noun} left out: {REASONS[rule]}."
        refusals.append(Refusal(rule, why, tuple(holding.id for holding in out)))
    return [holding for holding in holdings if not refused(holding)]
