"""How a device itself scatters: what the search takes of it, and the chance with it."""

import numpy as np
import pytest
from sample_slots import one_shot, slot

from chooser.chance import device_law, device_of
from chooser.circuits.circuit import outputs_of
from chooser.circuits.gates import gate_named, thresholds
from chooser.circuits.output_fed import output_fed
from chooser.circuits.schmitt import schmitt
from chooser.circuits.timers import timer_named
from chooser.interval import outlook


def test_a_device_without_scatter_has_its_own_factor_alone():
    circuit = one_shot("NE555")
    assert device_of(circuit) == device_law(circuit.error)


@pytest.mark.parametrize("supply", [5.0, 9.0])
def test_a_device_at_usual_parts_is_that_of_any_fit(supply):
    circuit = output_fed(timer_named("NE555"), supply)
    for ohm, farad in ((4.7e3, 1e-6), (220e3, 10e-9)):
        found = outlook(circuit, (slot(ohm, 0.01, 0.01),), slot(farad, 0.05, 0.05), {}).chief
        # The currents of the input, which a large R counts, shift it a little.
        assert device_of(circuit).spread == pytest.approx(found.device, rel=0.2)
        assert device_of(circuit).spread > device_law(circuit.error).spread
        assert found.mean / found.nominal - 1.0 == pytest.approx(device_of(circuit).shift, abs=0.01)


def test_chance_of_a_cd40106_against_monte_carlo():
    """Thresholds drawn from the table's limits, with its least hysteresis between them."""
    gate = gate_named("CD40106")
    circuit, points = schmitt(gate, 5.0), thresholds(gate, 5.0)
    r, c = slot(1e6, 0.01, 0.01), slot(1e-7, 0.1, 0.1)
    rng, runs = np.random.default_rng(31), 1_000_000

    def drawn_from(usual, low, high):
        z = np.clip(rng.standard_normal(runs), -3.0, 3.0) / 3.0
        return usual + z * np.where(z < 0.0, usual - low, high - usual)

    upper = drawn_from(points.upper, points.upper_low, points.upper_high)
    lower = drawn_from(points.lower, points.lower_low, points.lower_high)
    parts = rng.uniform(r.low, r.high, runs) * rng.uniform(c.low, c.high, runs)
    sold = upper - lower >= points.hysteresis_low
    upper, lower, parts = upper[sold], lower[sold], parts[sold]
    high, low = parts * np.log((1.0 - lower) / (1.0 - upper)), parts * np.log(upper / lower)
    made = outputs_of(circuit, (high, low))
    for shares in (
        {"period": (0.9, 1.1)},
        {"period": (0.98, 1.02)},
        {"frequency": (0.5, 1.5)},
        {"duty": (0.9, 1.1)},
        {"high": (0.8, 1.2), "low": (0.8, 1.2)},
    ):
        usual = outlook(circuit, (r,), c, {})
        bands = {
            output: tuple(end * usual.of(output).nominal for end in ends)
            for output, ends in shares.items()
        }
        inside = np.ones(len(high), dtype=bool)
        for output, ends in bands.items():
            inside &= (made[output] >= ends[0]) & (made[output] <= ends[1])
        found = outlook(circuit, (r,), c, bands).chance
        assert found == pytest.approx(float(np.mean(inside)), abs=0.03), shares
