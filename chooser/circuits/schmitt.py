"""The Schmitt-inverter oscillator: R from output to input, C from input to ground.

    high = R C ln((V - VTn) / (V - VTp)),  low = R C ln(VTp / VTn)

for an output that reaches the rails; the output's own resistance stands in series with R.
The thresholds VTp and VTn scatter more than two to one from piece to piece, so an inverter
that is owned should be measured once: K = T / (R C) then says what its two thresholds make
together. How far either of them is off its usual value it does not say, so the duty stays
uncertain: all pairs within the limits that have this K remain possible.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from math import exp, log

from chooser.circuits.astable import OUTPUTS
from chooser.circuits.charging import falling, rising
from chooser.circuits.circuit import EXACT, Bounds, Circuit, limits_text
from chooser.circuits.gates import Gate, Thresholds, check_gate_supply, thresholds
from chooser.circuits.laws import Train
from chooser.circuits.scattering import SIGMAS, Scatter, scattered_pair
from chooser.parts import Tolerance

MEASURED = Tolerance(0.02, 0.02)
"""Taken of a measured factor whose accuracy is not said: two percent (our assumption)."""

Pair = tuple[float, float]
"""Upper and lower threshold as fractions of the supply."""

_PAIRS = 40  # of thresholds that are tried for one measured factor


def schmitt(
    gate: Gate,
    supply: float,
    factor: float | None = None,
    accuracy: Tolerance | None = None,
) -> Circuit:
    """Return the circuit of an inverter.

    Parameters
    ----------
    gate : the inverter. supply : in volt.
    factor : K = T / (R C) as measured on the piece that is owned, or None.
    accuracy : of that factor; two percent where it is not known.

    Raises
    ------
    BadRequestError
        A supply that the gate does not work at.
    """
    check_gate_supply(gate, supply)
    points = thresholds(gate, supply)
    usual = (points.upper, points.lower)
    scale = 1.0 if factor is None else factor / _ratio(usual)
    typical = _train(gate, supply, usual, scale)
    error = EXACT if factor is None else accuracy or MEASURED
    if factor is None:
        corners = _corners(gate, supply, points.extremes())
        scatter = _scatter(gate, supply, points)
    else:
        pairs = _pairs_of(points, factor)
        corners = _corners(gate, supply, (usual, *pairs[:1], *pairs[-1:]), factor)
        scatter = _duty_scatter(gate, supply, points, pairs, factor)
    first = rising(supply, 1.0, 0.0, points.upper, series=gate.output_resistance_typical)
    return Circuit(
        family="schmitt",
        title="Schmitt oscillator",
        device=gate.name,
        supply=supply,
        resistors=("R",),
        capacitor=True,
        outputs=OUTPUTS,
        typical=typical,
        corners=corners,
        error=error,
        scatter=scatter,
        bounds=Bounds(
            gate.smallest_resistor,
            gate.largest_resistor,
            "output resistance",
            "input current and board leakage",
        ),
        least_farad=gate.smallest_capacitor,
        first=replace(typical, phases=(first,)),
        setting="" if factor is None else measured_text(factor, error),
        output_resistance=gate.output_resistance_typical,
    )


def measured_text(factor: float, error: Tolerance) -> str:
    """Say that a factor was measured, and how surely it is known."""
    return f"K = {factor:g}{limits_text(error)}"


def _ratio(pair: Pair) -> float:
    """Return K of two thresholds."""
    upper, lower = pair
    return log((1.0 - lower) / (1.0 - upper)) + log(upper / lower)


def _train(
    gate: Gate, supply: float, pair: Pair, scale: float = 1.0, current: float = 0.0
) -> Train:
    upper, lower = pair
    series = gate.output_resistance_typical
    return Train(
        (
            rising(supply, 1.0, lower, upper, current=current, series=series),
            falling(supply, 0.0, upper, lower, current=current, series=series),
        ),
        scale,
    )


def _corners(
    gate: Gate, supply: float, pairs: Sequence[Pair], factor: float | None = None
) -> tuple[Train, ...]:
    """Return every combination of thresholds, input current and output resistance."""
    most = gate.input_current_limit
    return tuple(
        _train(
            replace(gate, output_resistance_typical=ohm),
            supply,
            pair,
            1.0 if factor is None else factor / _ratio(pair),
            current,
        )
        for pair in pairs
        for current in (0.0, most, -most)
        for ohm in (0.0, gate.output_resistance_limit)
    )


def _scatter(gate: Gate, supply: float, points: Thresholds) -> Scatter:
    """Return pieces with all thresholds that their limits and the hysteresis allow."""
    return scattered_pair(
        (points.upper, points.upper_low, points.upper_high),
        (points.lower, points.lower_low, points.lower_high),
        lambda upper, lower: _train(gate, supply, (upper, lower)),
        points.allow,
    )


def _pairs_of(points: Thresholds, factor: float) -> list[Pair]:
    """Return pairs of thresholds that have a factor, the lowest first; none if none has."""
    step = (points.lower_high - points.lower_low) / (_PAIRS - 1)
    found = []
    for place in range(_PAIRS):
        lower = points.lower_low + place * step
        odds = exp(factor) * lower / (1.0 - lower)  # u / (1 - u) of the upper one
        upper = odds / (1.0 + odds)
        if points.allow(upper, lower):
            found.append((upper, lower))
    return found


def _duty_scatter(
    gate: Gate, supply: float, points: Thresholds, pairs: Sequence[Pair], factor: float
) -> Scatter:
    """Return pieces of a known factor, each as likely as its thresholds are among all pieces."""
    weights = [_likeliness(points, pair) for pair in pairs]
    return tuple(
        (weight / sum(weights), _train(gate, supply, pair, factor / _ratio(pair)))
        for pair, weight in zip(pairs, weights, strict=True)
    )


def _likeliness(points: Thresholds, pair: Pair) -> float:
    """Return the density of a pair of thresholds, up to a factor."""
    upper, lower = pair
    over = points.upper_high if upper > points.upper else points.upper_low
    beside = points.lower_high if lower > points.lower else points.lower_low
    sigmas = (
        SIGMAS * (upper - points.upper) / ((over - points.upper) or 1.0),
        SIGMAS * (lower - points.lower) / ((beside - points.lower) or 1.0),
    )
    return exp(-sum(sigma**2 for sigma in sigmas) / 2.0)
