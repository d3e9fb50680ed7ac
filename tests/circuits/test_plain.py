"""A plain resistance or capacitance: the network's value, and nothing else."""

from fractions import Fraction
from math import inf

import numpy as np
import pytest

from chooser.circuits.circuit import outputs_of
from chooser.circuits.plain import capacitance, resistance


def test_a_resistance_is_its_own_value():
    circuit = resistance()
    law = circuit.law
    assert outputs_of(circuit, law.times((4700.0,), 1.0, 0.0)) == {"resistance": 4700.0}
    assert law.exactly((Fraction(4700),), Fraction(1)) == (4700,)
    np.testing.assert_array_equal(law.interval([1e3, 2e3], 1.0, np.zeros((3, 1))), [[1e3, 2e3]] * 3)
    assert float(law.resistance(4700.0, 1.0, 0.0)) == 4700.0
    assert float(law.sensitivity(1e3, 1.0, 0.0)) == 1.0
    assert law.proportional
    assert (circuit.slots, circuit.outputs, circuit.capacitor) == (("R",), ("resistance",), False)


def test_a_capacitance_is_its_own_value():
    circuit = capacitance(16.0)
    law = circuit.law
    assert outputs_of(circuit, law.times((), 4.7e-6, 1e-6)) == {"capacitance": 4.7e-6}
    assert law.exactly((), Fraction(47, 10**7)) == (Fraction(47, 10**7),)
    assert law.interval(np.ones(3), 4.7e-6, 0.0).tolist() == [4.7e-6] * 3
    assert float(law.sensitivity(1e3, 1e-6, 0.0)) == 0.0
    assert not law.proportional
    assert (circuit.slots, circuit.outputs, circuit.supply) == (("C",), ("capacitance",), 16.0)


@pytest.mark.parametrize("circuit", [resistance(), capacitance()], ids=lambda x: x.family)
def test_nothing_is_lost_and_nothing_ends(circuit):
    law = circuit.law
    assert law.endless_from(1.0) == law.leak_bound(1.0, 3.0) == law.trip_ratio(1.0, 1.0) == inf
    assert law.lossless() is law
    assert law.starts_from == 0.0
    assert set(circuit.corners) == {law}
    assert circuit.lossless
    assert circuit.device == ""
    assert circuit.error.plus == circuit.error.minus == 0.0
