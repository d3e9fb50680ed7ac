"""An answer as JSON has it: SI units, fractions."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from chooser.cautions import STANDING
from chooser.circuits.circuit import Circuit, Variant
from chooser.cli.stock_view import value_text
from chooser.cli.words import picked
from chooser.interval import Reading
from chooser.networks import write_network
from chooser.search.request import Answer, Fit, Request, Slot, Target


def answer_json(answer: Answer) -> dict[str, Any]:
    """Give an answer as JSON has it: SI units, fractions."""
    request, searched = answer.request, answer.searched
    circuit = request.circuit
    return {
        "circuit": circuit.family,
        "targets": targets_json(request.targets),
        "within": request.within,
        **({"timer": circuit.timer.name} if circuit.timer else {}),
        "device": circuit.device,
        "supply": circuit.supply,
        "setting": circuit.setting,
        "boards": request.boards,
        "rank": str(request.rank),
        "searched": {
            "combinations": searched.combinations,
            "complete": searched.complete,
            "seconds": round(searched.seconds, 6),
            **({"limit": searched.limit} if searched.limit else {}),
        },
        "fits": [fit_json(fit, request) for fit in answer.fits],
        "left_out": [
            {"rule": str(each.rule), "text": each.why, "holdings": list(each.holdings)}
            for each in answer.refusals
        ],
        "advice": list(answer.advice),
        "ways_out": list(answer.ways_out),
        "standing": [{"code": str(each.code), "text": each.text} for each in STANDING],
    }


def targets_json(targets: Sequence[Target]) -> dict[str, Any]:
    """Give what was asked, a frequency as the frequency."""
    found: dict[str, Any] = {}
    for target in targets:
        if target.is_free:
            continue
        if target.frequency is not None:
            found["frequency"] = target.frequency
        else:
            found[target.output] = [target.low, target.high] if target.is_range else target.low
    return found


def fit_json(fit: Fit, request: Request) -> dict[str, Any]:
    """Give one fit as JSON has it; the picks are for all boards together."""
    return {
        "parts": fit.parts,
        "outputs": {
            reading.output: reading_json(reading, wanted_of(reading.output, request.targets))
            for reading in fit.outlook.readings
        },
        **_divided_json(fit, request),
        "in_band": fit.in_band,
        "spread": fit.spread,
        "chance": fit.outlook.chance,
        "likely_miss": fit.likely_miss,
        "slots": {slot.name: _slot_json(slot, request.boards) for slot in fit.slots},
        "cautions": [{"code": str(each.code), "text": each.text} for each in fit.cautions],
        "why": fit.why,
    }


def wanted_of(output: str, targets: Sequence[Target]) -> Target | None:
    """Return the target of an output; of a period asked for by its frequency, that frequency."""
    for target in targets:
        if target.frequency is not None and output in ("period", "frequency"):
            hertz = target.frequency
            return Target("frequency", hertz, hertz) if output == "frequency" else None
        if target.output == output and not target.is_free:
            return target
    return None


def _divided_json(fit: Fit, request: Request) -> dict[str, Any]:
    """Give the output a counter is taken from, its oscillator, and earlier outputs to time."""
    if not fit.variant.name:
        return {}
    period = fit.outlook.chief.nominal / fit.variant.scale
    return {
        **taken_json(request.circuit, fit.variant),
        "oscillator": {"period": period, "frequency": 1 / period},
        "first_rises": {tap.name: period * tap.scale for tap in request.circuit.taps},
    }


def taken_json(circuit: Circuit, variant: Variant) -> dict[str, Any]:
    """Give the output of a counter, and the oscillator periods in a whole period of it."""
    first_rise = next(tap.scale for tap in circuit.taps if tap.name == variant.name)
    return {"output": variant.name, "ratio": round(2.0 * first_rise)}


def reading_json(reading: Reading, target: Target | None = None) -> dict[str, Any]:
    """Give what one output will do; with its error where it has a target."""
    wanted: dict[str, Any] = {}
    if target is not None:
        ends = [target.low, target.high]
        wanted["target"] = ends if target.is_range else target.low
        wanted["error"] = target.error(reading.nominal)
    return {
        **wanted,
        "nominal": reading.nominal,
        "mean": reading.mean,
        "low": reading.low,
        "high": reading.high,
        "spread": reading.spread,
    }


def _slot_json(slot: Slot, boards: int) -> dict[str, Any]:
    return {
        "network": write_network(slot.network, lambda h: value_text(h.part, h.part.effective)),
        "value": slot.value,
        "picks": [
            {"holding": holding.id, "drawer": holding.drawer, "count": count * boards}
            for holding, count in picked(slot.network)
        ],
    }
