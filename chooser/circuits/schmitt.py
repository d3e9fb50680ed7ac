"""The Schmitt-inverter oscillator: R from output to input, C from input to ground.

    high = R C ln((V - VTn) / (V - VTp)),  low = R C ln(VTp / VTn)

for an output that reaches the rails; the output's own resistance stands in series with R.
The thresholds VTp and VTn scatter more than two to one from piece to piece, so an inverter
that is owned should be measured once: K = T / (R C) then replaces them.
"""

from __future__ import annotations

from dataclasses import replace
from math import log

from chooser.circuits.astable import OUTPUTS
from chooser.circuits.charging import falling, rising
from chooser.circuits.circuit import Bounds, Circuit
from chooser.circuits.gates import Gate, check_gate_supply, thresholds
from chooser.circuits.laws import Train
from chooser.parts import Tolerance

MEASURED = Tolerance(0.02, 0.02)
"""Taken of a measured factor whose accuracy is not said: two percent (our assumption)."""


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
    usual = _ratio(points.upper, points.lower)
    shortest, longest = _ratio(*points.closest()), _ratio(points.upper_high, points.lower_low)
    error = Tolerance(1.0 - shortest / usual, longest / usual - 1.0)
    scale = 1.0
    if factor is not None:
        scale, error = factor / usual, accuracy or MEASURED
    usual_points = (points.upper, points.lower)
    typical = _train(gate, supply, usual_points, scale)
    current = gate.input_current_limit
    corners = tuple(
        _train(replace(gate, output_resistance_typical=ohm), supply, usual_points, scale, lost)
        for lost in (0.0, current, -current)
        for ohm in (0.0, gate.output_resistance_limit)
    )
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
        bounds=Bounds(
            gate.smallest_resistor,
            gate.largest_resistor,
            "output resistance",
            "input current and board leakage",
        ),
        least_farad=gate.smallest_capacitor,
        first=replace(typical, phases=(first,)),
        output_resistance=gate.output_resistance_typical,
    )


def _ratio(upper: float, lower: float) -> float:
    """Return K of two thresholds."""
    return log((1.0 - lower) / (1.0 - upper)) + log(upper / lower)


def _train(
    gate: Gate, supply: float, points: tuple[float, float], scale: float, current: float = 0.0
) -> Train:
    upper, lower = points
    series = gate.output_resistance_typical
    return Train(
        (
            rising(supply, 1.0, lower, upper, current=current, series=series),
            falling(supply, 0.0, upper, lower, current=current, series=series),
        ),
        scale,
    )
