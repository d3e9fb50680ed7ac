"""The orders and the house rules by name, light enough for the command line to start with."""

from __future__ import annotations

from enum import StrEnum


class Rank(StrEnum):
    """What makes one fit better than another."""

    BALANCED = "balanced"
    ERROR = "error"
    COUNT = "count"


class Rule(StrEnum):
    """A house rule, by the name under which it is lifted."""

    RESISTOR_LIMITS = "resistor-limits"
    CERAMIC = "class-2-ceramic"
    POLARISED_SERIES = "polarised-series"
    POLARISED_SWING = "polarised-swing"
    VOLTAGE = "voltage"
    STRAYS = "small-capacitor"
    LARGE = "large-capacitor"
    MANY_PARTS = "many-parts"


NEAREST = 8
"""Resistor networks the balanced order weighs per capacitor network and number of resistors."""

USUAL_PARTS = 4
"""Parts in a slot that anyone cares to solder."""

REASONS = {
    Rule.RESISTOR_LIMITS: "the device's currents and the capacitor's leakage bound the resistance",
    Rule.CERAMIC: "class 2 and 3 ceramics change with voltage, temperature and age",
    Rule.POLARISED_SERIES: "polarised capacitors in series share the voltage by their leakage",
    Rule.POLARISED_SWING: "an oscillator that charges them both ways round reverses them",
    Rule.VOLTAGE: "the rated voltage is below the supply",
    Rule.STRAYS: "the strays of the board count beside so little",
    Rule.LARGE: "the data sheet of the device allows no more",
    Rule.MANY_PARTS: f"more than {USUAL_PARTS} parts in a slot are for test jigs",
}
"""Each rule in a clause, for the help and for refusals."""
