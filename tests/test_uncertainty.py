"""Limits around the value that is calculated with: meter before print before technology."""

import pytest

from chooser.parts import Kind, Part, Tolerance
from chooser.technologies import technology_named
from chooser.uncertainty import METER_ACCURACY, limits_of

PRINTED = Tolerance(0.2, 0.8)


@pytest.mark.parametrize("kind", list(Kind))
def test_a_reading_without_its_meter_gets_the_usual_accuracy(kind):
    part = Part(kind, 10.0, tolerance=PRINTED, measured=12.0)
    accuracy = METER_ACCURACY[kind]
    assert limits_of(part) == Tolerance(accuracy, accuracy)
    # Common practice, no source: hand-held meters read capacitance worse than resistance.
    assert accuracy == (0.05 if kind is Kind.CAPACITOR else 0.01)


def test_the_meter_named_counts():
    part = Part(Kind.CAPACITOR, 1e-6, tolerance=PRINTED, measured=1.1e-6, meter=0.005)
    assert limits_of(part) == Tolerance(0.005, 0.005)


def test_a_perfect_meter_leaves_no_doubt():
    part = Part(Kind.RESISTOR, 1e3, measured=1e3, meter=0.0)
    assert limits_of(part) == Tolerance(0.0, 0.0)


def test_a_meter_without_a_reading_says_nothing():
    assert limits_of(Part(Kind.RESISTOR, 1e3, tolerance=PRINTED, meter=0.001)) == PRINTED


def test_the_printed_tolerance_counts_before_the_technology():
    part = Part(Kind.CAPACITOR, 1e-6, tolerance=PRINTED, technology="c0g")
    assert limits_of(part) == PRINTED


def test_without_print_the_technology_decides():
    part = Part(Kind.CAPACITOR, 1e-6, technology="polystyrene")
    assert limits_of(part) == technology_named("polystyrene", Kind.CAPACITOR).tolerance


@pytest.mark.parametrize(("kind", "half"), [(Kind.RESISTOR, 0.05), (Kind.CAPACITOR, 0.2)])
def test_without_anything_the_customary_one(kind, half):
    """Common practice, no source: 5 % resistors and 20 % capacitors."""
    assert limits_of(Part(kind, 1.0)) == Tolerance(half, half)
