"""Stocks of fixed sizes for the benchmarks, the same on every run."""

from __future__ import annotations

import numpy as np

from chooser.parts import Count, Holding, Kind, Part, Tolerance
from chooser.preferred import values_between

ONE, FIVE = Tolerance(0.01, 0.01), Tolerance(0.05, 0.05)


def preferred_stock() -> tuple[Holding, ...]:
    """168 resistors (E24 over seven decades) and 42 film capacitors (E6 over seven decades)."""
    ohms = values_between("E24", 10, 9.1e7)[:168]
    farads = values_between("E6", 1e-9, 6.8e-3)[:42]
    return _stock(ohms, farads)


def measured_stock(times: int = 10) -> tuple[Holding, ...]:
    """So many times the parts, every value measured and different from all others."""
    dice = np.random.default_rng(20)
    ohms = sorted({float(f"{10**x:.6g}") for x in dice.uniform(1, 7, 168 * times)})
    farads = sorted({float(f"{10**x:.6g}") for x in dice.uniform(-9, -3, 42 * times)})
    return _stock(ohms, farads)


def _stock(ohms: list[float], farads: list[float]) -> tuple[Holding, ...]:
    parts = [Part(Kind.RESISTOR, value, tolerance=ONE) for value in ohms]
    parts += [
        Part(Kind.CAPACITOR, value, tolerance=FIVE, technology="polyester", voltage=63.0)
        for value in farads
    ]
    return tuple(Holding(i, part, "A1", Count(20)) for i, part in enumerate(parts, start=1))
