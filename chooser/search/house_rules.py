"""The house rules: what a timing circuit should not be built from, and why.

Every rule holds unless it is lifted, and whatever it keeps out is said with the reason.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

from chooser.circuits.circuit import Bounds
from chooser.errors import BadRequestError
from chooser.parts import Holding, Kind
from chooser.quantities import (
    format_capacitance,
    format_percent,
    format_resistance,
    format_voltage,
)
from chooser.search.request import Refusal, Request
from chooser.search.terms import REASONS, USUAL_PARTS, Rule
from chooser.technologies import is_polarised, technology_of

LEAK_RATIO = 3.0
"""Least charging current at the trip point over the capacitor's typical leakage.

At 3 the leak has stretched the interval by a sixth (17 %, from the charging equation), and what
it will be next week is anybody's guess; the limit is ours.
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


def check_request(request: Request) -> None:
    """Refuse a request that cannot be meant.

    Raises
    ------
    BadRequestError
        A band of nothing or of everything, or slots of more parts than anyone solders without the
        rule being lifted.
    """
    if not 0 < request.within < 1:
        raise BadRequestError(
            f"A band of {format_percent(request.within, digits=4)} to either side accepts "
            f"{'nothing' if request.within <= 0 else 'everything'}; write one such as 2%."
        )
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
    if not request.circuit.capacitor:
        return Usable(tuple(resistors), (), ())
    if Rule.CERAMIC not in request.lifted:
        out = [holding for holding in capacitors if _is_class_2(holding)]
        capacitors = _without(capacitors, out, Rule.CERAMIC, "of ceramic", refusals)
    if Rule.VOLTAGE not in request.lifted:
        supply = request.circuit.supply
        out = [holding for holding in capacitors if _is_rated_below(holding, supply)]
        what = f"rated below {format_voltage(supply)}"
        capacitors = _without(capacitors, out, Rule.VOLTAGE, what, refusals)
    if request.circuit.alternating and Rule.POLARISED_SWING not in request.lifted:
        out = [holding for holding in capacitors if is_polarised(holding.part)]
        capacitors = _without(capacitors, out, Rule.POLARISED_SWING, "of polarised kind", refusals)
    refusals += _network_refusals(capacitors, request)
    return Usable(tuple(resistors), tuple(capacitors), tuple(refusals))


def _network_refusals(capacitors: Sequence[Holding], request: Request) -> Iterator[Refusal]:
    """Say which networks of usable parts the rules keep out."""
    least_farad = request.circuit.least_farad
    small = [holding for holding in capacitors if holding.part.effective < least_farad]
    if small and Rule.STRAYS not in request.lifted:
        least = format_capacitance(least_farad, digits=3)
        why = f"Timing capacitances below {least} are left out: {REASONS[Rule.STRAYS]}."
        yield Refusal(Rule.STRAYS, why)
    most_farad = request.circuit.most_farad
    large = [holding for holding in capacitors if holding.part.effective > most_farad]
    if large and Rule.LARGE not in request.lifted:
        most = format_capacitance(most_farad, digits=3)
        why = f"Timing capacitances above {most} are left out: {REASONS[Rule.LARGE]}."
        yield Refusal(Rule.LARGE, why)
    polarised = [holding for holding in capacitors if is_polarised(holding.part)]
    if polarised and request.most_capacitors > 1 and Rule.POLARISED_SERIES not in request.lifted:
        why = f"Series of polarised capacitors are left out: {REASONS[Rule.POLARISED_SERIES]}."
        yield Refusal(Rule.POLARISED_SERIES, why)
    yield from _resistor_refusals(request)


def _resistor_refusals(request: Request) -> Iterator[Refusal]:
    """Say between which resistances the device is happy."""
    bounds = resistor_bounds(request)
    least, most = (format_resistance(ohm, digits=3) for ohm in (bounds.least, bounds.most))
    if bounds.least > bounds.most:
        yield Refusal(
            Rule.RESISTOR_LIMITS,
            f"No timing resistance suits the {request.circuit.device}: its {bounds.least_why} asks "
            f"for {least} or more, its {bounds.most_why} for {most} or less.",
        )
        return
    ends = []
    if bounds.least > 0:
        ends.append(f"at or above {least} ({bounds.least_why})")
    if bounds.most < float("inf"):
        ends.append(f"at or below {most} ({bounds.most_why}), less where the capacitor leaks")
    if ends:
        why = f"Timing resistances stay {' and '.join(ends)}."
        yield Refusal(Rule.RESISTOR_LIMITS, why)


def resistor_bounds(request: Request) -> Bounds:
    """Return the resistances that the device allows; all of them where the rule is lifted."""
    return Bounds() if Rule.RESISTOR_LIMITS in request.lifted else request.circuit.bounds


def _is_class_2(holding: Holding) -> bool:
    technology = technology_of(holding.part)
    return technology is not None and technology.ceramic_class > 1


def _is_rated_below(holding: Holding, supply: float) -> bool:
    return holding.part.voltage is not None and holding.part.voltage < supply


def _without(
    holdings: Sequence[Holding],
    out: Sequence[Holding],
    rule: Rule,
    what: str,
    refusals: list[Refusal],
) -> list[Holding]:
    """Take some holdings out, and note why."""
    if out:
        noun = "capacitor holding" if len(out) == 1 else "capacitor holdings"
        why = f"{len(out)} {noun} {what} left out: {REASONS[rule]}."
        refusals.append(Refusal(rule, why, tuple(holding.id for holding in out)))
    gone = {holding.id for holding in out}
    return [holding for holding in holdings if holding.id not in gone]
