"""From a choice of holdings to a fit: what it will really do, and why it ranks where it does."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace as changed
from itertools import pairwise

from chooser.cautions import FitFacts, cautions_of
from chooser.interval import likely_miss, outlook
from chooser.networks import Network, replace
from chooser.parts import Holding, Kind
from chooser.quantities import format_percent
from chooser.search.choosing import Choice
from chooser.search.ranking import whole_ppm
from chooser.search.request import Fit, Request, Slot
from chooser.search.terms import Rank
from chooser.search.weighing import PER_PART
from chooser.slot_facts import NOTHING, SlotFacts, slot_facts


def fit_of(choice: Choice, holdings: Mapping[int, Holding], request: Request) -> Fit:
    """Work out what a choice will really do.

    Parameters
    ----------
    choice : networks of holding ids. holdings : the stock by id. request : what was asked.
    """
    circuit = request.circuit
    networks = [
        replace(network, holdings.__getitem__)
        for network in (*choice.resistors, *choice.capacitors)
    ]
    facts = dict(zip(circuit.slots, map(_facts(request), networks, circuit.slots), strict=True))
    rs = [facts[name] for name in circuit.resistors]
    variant = circuit.variants[choice.pairing.variant]
    out = outlook(circuit, rs, facts.get("C", NOTHING), request.bands, variant.scale)
    nominal = {reading.output: reading.nominal for reading in out.readings}
    errors = {target.output: target.error(nominal[target.output]) for target in request.targets}
    chief = max(request.targets, key=lambda target: abs(errors[target.output]))
    slots = tuple(
        Slot(name, network, facts[name].value)
        for name, network in zip(circuit.slots, networks, strict=True)
    )
    return Fit(
        slots=slots,
        variant=variant,
        outlook=out,
        errors=errors,
        error=errors[chief.output],
        spread=out.chief.spread,
        likely_miss=max(
            float(likely_miss(target.error(reading.mean), reading.spread))
            for target in request.targets
            for reading in [out.of(target.output)]
        ),
        in_band=request.accepts(nominal),
        cautions=cautions_of(FitFacts(circuit, _by_name(slots), facts, out, _wanted(request))),
    )


def _by_name(slots: Sequence[Slot]) -> dict[str, Network[Holding]]:
    return {slot.name: slot.network for slot in slots}


def _wanted(request: Request) -> dict[str, tuple[float, float]]:
    return {target.output: (target.low, target.high) for target in request.targets}


def _facts(request: Request) -> Callable[[Network[Holding], str], SlotFacts]:
    def of(network: Network[Holding], name: str) -> SlotFacts:
        circuit = request.circuit
        kind = Kind.CAPACITOR if name == "C" else Kind.RESISTOR
        return slot_facts(network, kind, circuit.supply, lossless=circuit.lossless)

    return of


def explained(fits: Sequence[Fit], rank: Rank) -> tuple[Fit, ...]:
    """Say of every fit but the last why it ranks before the next."""
    reason = _balanced_reason if rank is Rank.BALANCED else _exact_reason(rank)
    said = (changed(fit, why=reason(fit, after)) for fit, after in pairwise(fits))
    return (*said, *fits[-1:])


def _exact_reason(rank: Rank) -> Callable[[Fit, Fit], str]:
    def reason(fit: Fit, after: Fit) -> str:
        ppm, ppm_after = whole_ppm(abs(fit.error)), whole_ppm(abs(after.error))
        parts, parts_after = fit.parts, after.parts
        if rank is Rank.ERROR and ppm != ppm_after:
            return f"nearer: {ppm:,} ppm against {ppm_after:,} ppm"
        if parts != parts_after:
            return f"fewer parts: {parts} against {parts_after}"
        if ppm != ppm_after:
            return f"as many parts, nearer: {ppm:,} ppm against {ppm_after:,} ppm"
        if abs(abs(fit.error) - abs(after.error)) > 1e-15:  # noqa: PLR2004 - float rounding
            return "as many parts, nearer by less than a part per million"
        return "equally near with as many parts; its drawers hold more, or come first"

    return reason


def _balanced_reason(fit: Fit, after: Fit) -> str:
    if fit.in_band != after.in_band:
        return "inside the accepted band"
    parts, parts_after = fit.parts, after.parts
    miss, miss_after = _apart(fit.likely_miss, after.likely_miss)
    if parts == parts_after and miss == miss_after:
        return "an equal likely miss with as many parts; another capacitor comes next"
    if parts == parts_after:
        return f"likely miss {miss} against {miss_after} with as many parts"
    if parts < parts_after:
        return (
            f"likely miss {miss} with {parts} parts; {miss_after} with {parts_after} does not earn "
            f"{format_percent(PER_PART - 1, digits=2)} for each more"
        )
    return f"likely miss {miss} with {parts} parts against {miss_after} with {parts_after}"


def _apart(one: float, other: float) -> tuple[str, str]:
    """Write two fractions with as many digits as it takes to tell them apart, or six."""
    for digits in range(3, 7):
        texts = format_percent(one, digits=digits), format_percent(other, digits=digits)
        if texts[0] != texts[1]:
            break
    return texts
