"""A verdict as an object for programs: SI units, fractions, degree Celsius.

What is endless or unknown is null, for JSON has no infinity.
"""

from __future__ import annotations

from math import isfinite
from typing import Any

from chooser.cli.check_words import cause_text, network_text, part_text
from chooser.cli.fit_json import reading_json, taken_json, targets_json, wanted_of
from chooser.cli.words import picked
from chooser.climate import Climate
from chooser.interval import likely_miss
from chooser.verdict import Verdict


def verdict_json(verdict: Verdict) -> dict[str, Any]:
    """Give a verdict as JSON has it."""
    circuit = verdict.circuit
    found = {
        "circuit": circuit.family,
        "targets": targets_json(verdict.targets),
        "within": verdict.within,
        **({"timer": circuit.timer.name} if circuit.timer else {}),
        "device": circuit.device,
        "supply": circuit.supply,
        "setting": circuit.setting,
        **(taken_json(circuit, verdict.variant) if verdict.variant.name else {}),
        "outputs": {
            reading.output: reading_json(reading, wanted_of(reading.output, verdict.targets))
            for reading in verdict.outlook.readings
        },
        "first": _first(verdict),
        "spread": verdict.outlook.chief.spread,
        **_compared(verdict),
        "slots": {slot: _slot(verdict, slot) for slot in circuit.slots},
        "causes": [
            {
                "cause": cause_text(cause, verdict),
                "slot": cause.slot or None,
                "share": cause.share,
                "spread_without": cause.spread_without,
            }
            for cause in verdict.causes
        ],
        "leakage": _leakage(verdict),
        "temperature": [_climate(verdict, climate) for climate in verdict.climates],
        "per_volt": _per_volt(verdict),
        "cautions": _cautions(verdict),
    }
    return {name: _finite(value) for name, value in found.items()}


def _compared(verdict: Verdict) -> dict[str, Any]:
    """Give how it does against its targets, where it has some."""
    if not verdict.targets:
        return {}
    pairs = [(target, verdict.outlook.of(target.output)) for target in verdict.targets]
    return {
        "in_band": verdict.in_band,
        "chance": verdict.outlook.chance,
        "likely_miss": max(
            float(likely_miss(target.error(reading.mean), reading.spread))
            for target, reading in pairs
        ),
    }


def _first(verdict: Verdict) -> dict[str, Any] | None:
    first = verdict.first
    if first is None:
        return None
    ends = {"nominal": first.nominal, "low": first.low, "high": first.high}
    return {"output": first.output, **ends}


def _slot(verdict: Verdict, slot: str) -> dict[str, Any]:
    network, facts = verdict.networks[slot], verdict.slots[slot]
    return {
        "network": network_text(network),
        "value": facts.value,
        "low": facts.low,
        "high": facts.high,
        "picks": [
            {
                "holding": holding.id if holding.id > 0 else None,
                "drawer": holding.drawer or None,
                "part": part_text(holding.part),
                "count": count,
            }
            for holding, count in picked(network)
        ],
    }


def _leakage(verdict: Verdict) -> dict[str, Any] | None:
    leakage = verdict.leakage
    if leakage is None:
        return None
    return {
        "output": leakage.output,
        "ratio": leakage.ratio,
        "ratio_limit": leakage.ratio_limit,
        "stretch": leakage.stretch,
        "stretch_limit": leakage.stretch_limit,
        "with_meter": leakage.metered,
    }


def _climate(verdict: Verdict, climate: Climate) -> dict[str, Any]:
    mover = climate.mover
    return {
        "celsius": climate.celsius,
        "outputs": {
            reading.output: {
                "nominal": reading.nominal,
                "low": reading.low,
                "high": reading.high,
            }
            for reading in climate.outlook.readings
        },
        "moves_most": None
        if mover is None
        else {
            "cause": cause_text(mover, verdict),
            "slot": mover.slot or None,
            "least": mover.least,
            "most": mover.most,
        },
        "by_leakage": climate.by_leakage,
    }


def _per_volt(verdict: Verdict) -> dict[str, Any] | None:
    per_volt = verdict.per_volt
    return None if per_volt is None else {"formula": per_volt.formula, "device": per_volt.device}


def _cautions(verdict: Verdict) -> list[dict[str, str]]:
    return [{"code": str(each.code), "text": each.text} for each in verdict.cautions]


def _finite(value: Any) -> Any:
    """Replace what JSON cannot write by null."""
    if isinstance(value, dict):
        return {name: _finite(each) for name, each in value.items()}
    if isinstance(value, list):
        return [_finite(each) for each in value]
    return None if isinstance(value, float) and not isfinite(value) else value
