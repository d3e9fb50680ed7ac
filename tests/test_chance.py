"""The chance to land in every band: against Monte Carlo with fixed seeds, and by hand."""

from dataclasses import replace
from math import erf, exp, expm1, inf, log, pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sample_slots import EVERYTHING, one_shot, slot

from chooser.chance import chance_of, device_law
from chooser.circuits.astable import OUTPUTS, astable
from chooser.circuits.charging import Phase, falling, rising
from chooser.circuits.circuit import Circuit, outputs_of
from chooser.circuits.laws import Train
from chooser.circuits.plain import ValueLaw
from chooser.circuits.scattering import SIGMAS
from chooser.circuits.timers import timer_named
from chooser.interval import outlook
from chooser.parts import Tolerance
from chooser.slot_facts import NOTHING

RUNS = 1_000_000


def cut_normal(rng, runs):
    """Draw from a normal law without what lies beyond the data sheet's limit."""
    sigmas = rng.standard_normal(runs)
    while (beyond := np.abs(sigmas) > SIGMAS).any():
        sigmas[beyond] = rng.standard_normal(np.count_nonzero(beyond))
    return sigmas


def device_factors(rng, error, runs, draw=cut_normal):
    """Factors of a device: normal to either side of the usual one, a third of each limit wide."""
    sigmas = draw(rng, runs)
    return 1.0 + sigmas * np.where(sigmas < 0.0, error.minus, error.plus) / SIGMAS


def drawn(circuit, rs, c):
    """The outputs of many builds: parts anywhere between their ends, a device off the shelf."""
    rng, runs = np.random.default_rng(20_240_607), RUNS
    times = circuit.typical.times(
        [rng.uniform(r.low, r.high, runs) for r in rs],
        rng.uniform(c.low, c.high, runs),
        c.leak_typical,
    )
    factor = device_factors(rng, circuit.error, runs)
    return outputs_of(circuit, [time * factor for time in times])


def hits_of(made, bands):
    inside = np.ones(RUNS, dtype=bool)
    for output, (low, high) in bands.items():
        inside &= (made[output] >= low) & (made[output] <= high)
    hits = float(np.mean(inside))
    return hits, sqrt(max(hits * (1.0 - hits), 1e-9) / RUNS)


# One resistor, one band --------------------------------------------------------------------------

CASES = {
    # name: (timer, R minus, R plus, C minus, C plus, band as fractions of the nominal)
    "electrolytic": ("bipolar", 0.01, 0.01, 0.2, 0.2, (0.98, 1.02)),
    "asymmetric": ("bipolar", 0.05, 0.05, 0.2, 0.8, (0.9, 1.3)),
    "equal tolerances": ("ideal", 0.05, 0.05, 0.05, 0.05, (0.97, 1.04)),
    "resistor alone": ("ideal", 0.05, 0.05, 0.0, 0.0, (0.98, 1.3)),
    "capacitor alone": ("ideal", 0.0, 0.0, 0.1, 0.1, (0.5, 1.03)),
    "timer alone": ("bipolar", 0.0, 0.0, 0.0, 0.0, (0.99, 1.005)),
    "timer rules": ("LMC555", 0.01, 0.01, 0.02, 0.02, (0.98, 1.02)),
    "resistor and timer": ("TLC555", 0.05, 0.05, 0.0, 0.0, (0.98, 1.02)),
    "narrow band": ("cmos", 0.05, 0.05, 0.06, 0.06, (0.999, 1.001)),
    "far away": ("cmos", 0.01, 0.01, 0.05, 0.05, (1.5, 1.6)),
}


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("leaky", [False, True])
def test_chance_against_monte_carlo(case, leaky):
    name, r_minus, r_plus, c_minus, c_plus, share = CASES[case]
    circuit = one_shot(name)
    farad = 10e-6
    r = slot(1e6, r_minus, r_plus)
    c = slot(farad, c_minus, c_plus, farad / 40.0 if leaky else 0.0, farad / 30.0)
    nominal = outlook(circuit, (r,), c, EVERYTHING).chief.nominal
    band = {"interval": (share[0] * nominal, share[1] * nominal)}
    chance = outlook(circuit, (r,), c, band).chance
    hits, noise = hits_of(drawn(circuit, (r,), c), band)
    assert chance == pytest.approx(hits, abs=1e-3 + 2.0 * noise)


def test_chance_worked_out():
    ideal = one_shot("ideal")
    r, c = slot(1e5, 0.0, 0.0), slot(1e-5, 0.2, 0.2)

    def chance(circuit, c, low, high):
        return outlook(circuit, (r,), c, {"interval": (low, high)}).chance

    # A band of 4 % in a uniform range of 40 %.
    target = 1e5 * 1e-5 * log(3.0)
    assert chance(ideal, c, 0.98 * target, 1.02 * target) == pytest.approx(0.1, rel=1e-9)
    # Nothing varies: in or out, the ends included.
    exact = slot(1e-5, 0.0, 0.0)
    assert chance(ideal, exact, target, target) == 1.0
    assert chance(ideal, exact, 1.001 * target, 1.1 * target) == 0.0
    # From memory: a normal law keeps 68.27 % within one sigma, 99.73 % within three.
    sigma = timer_named("bipolar").timing_error_limit / 3.0
    bare = one_shot(replace(timer_named("ideal"), timing_error_limit=3.0 * sigma))
    one = (target * (1.0 - sigma), target * (1.0 + sigma))
    assert chance(bare, exact, *one) == pytest.approx(0.6827 / 0.9973, abs=1e-4)


def test_chance_where_only_part_of_the_resistors_ever_end():
    # The leak alone takes everything from 1 Mohm up (Rp = 2R): half of R's range ends.
    r, c = slot(1e6, 0.1, 0.1), slot(1e-6, 0.0, 0.0, 0.5e-6, 0.5e-6)
    circuit = one_shot(replace(timer_named("ideal"), ideal=False))
    assert outlook(circuit, (r,), c, EVERYTHING).chance == pytest.approx(0.5, abs=3e-3)


def test_a_network_without_a_capacitor():
    """A value alone: 4 of the 10 % that a resistor may be off."""
    circuit = Circuit(
        family="network",
        title="Resistor",
        device="",
        supply=0.0,
        resistors=("R",),
        capacitor=False,
        outputs=("resistance",),
        typical=ValueLaw("resistance"),
        corners=(ValueLaw("resistance"),),
        lossless=True,
    )
    found = outlook(circuit, (slot(1e3, 0.05, 0.05),), NOTHING, {"resistance": (980.0, 1020.0)})
    assert found.chance == pytest.approx(0.4, rel=1e-9)
    assert (found.chief.low, found.chief.high) == pytest.approx((950.0, 1050.0))
    assert found.chief.follows == pytest.approx((1.0,))


# A device with unequal limits --------------------------------------------------------------------

UNEQUAL = [Tolerance(0.05, 0.15), Tolerance(0.0, 0.12), Tolerance(0.07, 0.0), Tolerance(0.5, 0.01)]


@pytest.mark.parametrize("error", [Tolerance(0.03, 0.03), Tolerance(0.0, 0.0), *UNEQUAL])
def test_spread_and_shift_of_a_device_against_monte_carlo(error):
    found = device_law(error)
    rng = np.random.default_rng(5)
    factors = device_factors(rng, error, RUNS, lambda rng, runs: rng.standard_normal(runs))
    near = max(error.minus, error.plus) / SIGMAS / sqrt(RUNS) * 5.0
    assert found.shift == pytest.approx(float(factors.mean()) - 1.0, abs=near)
    assert found.spread == pytest.approx(float(factors.std()), abs=near)


def test_spread_and_shift_of_a_device_worked_out():
    # Equal limits: a third of them, in the middle.
    assert device_law(Tolerance(0.03, 0.03)).spread == pytest.approx(0.01)
    assert device_law(Tolerance(0.03, 0.03)).shift == 0.0
    # A half normal law on one side alone, the other half of the devices at the usual value:
    # mean sigma / sqrt(2 pi), mean square sigma^2 / 2.
    one_sided = device_law(Tolerance(0.0, 0.3))
    assert one_sided.shift == pytest.approx(0.1 / sqrt(2.0 * pi))
    assert one_sided.spread == pytest.approx(0.1 * sqrt(0.5 - 0.5 / pi))


def straight(error):
    """A logic one-shot by its published rule: 0.7 R C."""
    law = Phase(5.0, -expm1(-0.7))
    return Circuit(
        family="logic-monostable",
        title="Logic one-shot",
        device="one-shot",
        supply=5.0,
        resistors=("R",),
        capacitor=True,
        outputs=("interval",),
        typical=law,
        corners=(law,),
        error=error,
        lossless=True,
    )


@pytest.mark.parametrize("error", UNEQUAL)
@pytest.mark.parametrize("parts", [0.0, 0.02, 0.2])
@pytest.mark.parametrize("band", [(0.98, 1.02), (0.9, 1.0), (1.0, 1.1), (0.5, 2.0)])
def test_chance_of_a_device_with_unequal_limits(error, parts, band):
    circuit = straight(error)
    r, c = slot(1e5, parts, parts), slot(1e-6, parts / 2.0, parts)
    bands = {"interval": (0.07 * band[0], 0.07 * band[1])}
    if parts == 0.0 and 1.0 in band:
        # Half of the devices on either side: a band that ends at the usual value cuts them.
        bands = {"interval": tuple(0.07 * end * (1.0 + 1e-6) for end in band)}
    hits, noise = hits_of(drawn(circuit, (r,), c), bands)
    assert outlook(circuit, (r,), c, bands).chance == pytest.approx(hits, abs=1e-3 + 2.0 * noise)


@pytest.mark.parametrize("error", UNEQUAL)
def test_corners_mean_and_spread_with_unequal_limits(error):
    circuit = straight(error)
    r, c = slot(1e5, 0.01, 0.01), slot(1e-6, 0.0, 0.0)
    found = outlook(circuit, (r,), c, EVERYTHING).chief
    assert found.low == pytest.approx(0.07 * 0.99 * (1.0 - error.minus))
    assert found.high == pytest.approx(0.07 * 1.01 * (1.0 + error.plus))
    device = device_law(error)
    assert found.mean == pytest.approx(0.07 * (1.0 + device.shift))
    assert found.spread == pytest.approx(sqrt(device.spread**2 + 0.01**2 / 3.0))


def test_one_sided_devices_by_hand():
    """Devices that are only slow, up to 12 %: half at the usual value, a third of 12 % a sigma."""
    circuit = straight(Tolerance(0.0, 0.12))
    exact = slot(1e5, 0.0, 0.0), slot(1e-6, 0.0, 0.0)
    bands = {"interval": (0.07, 0.07 * 1.04)}
    within = erf(1.0 / sqrt(2.0)) / erf(3.0 / sqrt(2.0))
    found = outlook(circuit, exact[:1], exact[1], bands).chance
    assert found == pytest.approx(0.5 + 0.5 * within, abs=1e-3)


# Two resistors, and several bands ----------------------------------------------------------------

BANDS = {
    "period": {"period": (0.97, 1.03)},
    "one-sided": {"period": (0.0, 1.01)},
    "frequency": {"frequency": (0.98, 1.02)},
    "duty": {"duty": (0.995, 1.004)},
    "period and duty": {"period": (0.95, 1.05), "duty": (0.99, 1.01)},
    "both times": {"high": (0.96, 1.03), "low": (0.97, 1.06)},
    "frequency and duty": {"frequency": (0.9, 1.2), "duty": (0.9999, 1.02)},
    "far away": {"period": (1.6, 2.0)},
    "narrow": {"period": (0.999, 1.001)},
}
PARTS = {
    "usual": (0.01, 0.05, (0.1, 0.1)),
    "electrolytic": (0.05, 0.05, (0.2, 0.5)),
    "resistors rule": (0.05, 0.1, (0.01, 0.01)),
    "capacitor alone": (0.0, 0.0, (0.1, 0.1)),
    "one resistor alone": (0.05, 0.0, (0.0, 0.0)),
}


def about(circuit, rs, c, shares, scale=1.0):
    """Bands as fractions of the nominal outputs."""
    found = outlook(circuit, rs, c, {}, scale)
    return {
        output: tuple(end * found.of(output).nominal for end in ends)
        for output, ends in shares.items()
    }


@pytest.mark.parametrize("name", ["ideal", "NE555", "TLC555"])
@pytest.mark.parametrize("parts", PARTS)
def test_two_resistors_against_monte_carlo(name, parts):
    circuit = astable(timer_named(name), 9.0)
    ra, rb, (minus, plus) = PARTS[parts]
    rs = slot(47e3, ra, ra), slot(33e3, rb, rb)
    c = slot(10e-6, minus, plus, 1e-8, 1e-7)
    made = drawn(circuit, rs, c)
    for title, shares in BANDS.items():
        bands = about(circuit, rs, c, shares)
        hits, noise = hits_of(made, bands)
        chance = outlook(circuit, rs, c, bands).chance
        assert chance == pytest.approx(hits, abs=2e-3 + 2.0 * noise), title


def test_a_duty_worked_out():
    """Duty (RA + RB) / (RA + 2 RB) with RB exact: it rises with RA alone, uniform in a range."""
    circuit = astable(timer_named("bipolar"), 9.0)
    ideal = astable(timer_named("ideal"), 9.0)
    rs, c = (slot(10e3, 0.1, 0.1), slot(10e3, 0.0, 0.0)), slot(1e-6, 0.2, 0.2)
    # RA between 9.5k and 10.2k of 9k to 11k, whatever C and the device's factor are.
    bands = {"duty": (19.5 / 29.5, 20.2 / 30.2)}
    assert outlook(ideal, rs, c, bands).chance == pytest.approx(0.35, abs=5e-3)
    assert chance_of(ideal, rs, c, {"duty": (0.0, 1.0)}, 1.0) == pytest.approx(1.0)
    assert chance_of(ideal, rs, c, {"duty": (0.7, 1.0)}, 1.0) == 0.0
    # A tolerance of the device alone does not change its duty.
    loose = replace(circuit, typical=ideal.typical, corners=ideal.corners)
    same = outlook(loose, rs, c, bands).chance
    assert same == pytest.approx(outlook(ideal, rs, c, bands).chance, rel=1e-12)


@pytest.mark.parametrize("scale", [1.0, 1.0 / 16.0, 16384.0])
def test_a_scale_moves_the_bands_with_it(scale):
    circuit = astable(timer_named("NE555"), 9.0)
    rs, c = (slot(47e3, 0.01, 0.01), slot(33e3, 0.05, 0.05)), slot(1e-6, 0.1, 0.1)
    shares = {"period": (0.95, 1.05), "duty": (0.995, 1.01)}
    chances = [
        outlook(circuit, rs, c, about(circuit, rs, c, shares, each), each).chance
        for each in (1.0, scale)
    ]
    assert chances[0] == pytest.approx(chances[1], rel=1e-9)
    bands = {"interval": (0.1 * scale, 0.12 * scale)}
    one = outlook(one_shot("NE555"), rs[:1], slot(2e-6, 0.1, 0.1), bands, scale)
    plain = outlook(one_shot("NE555"), rs[:1], slot(2e-6, 0.1, 0.1), {"interval": (0.1, 0.12)})
    assert one.chance == pytest.approx(plain.chance, rel=1e-9)


def oscillator(error):
    """One resistor between the output of a Schmitt inverter and its input."""
    law = Train((rising(5.0, 1.0, 0.35, 0.6), falling(5.0, 0.0, 0.6, 0.35)))
    return Circuit(
        family="schmitt",
        title="Oscillator",
        device="inverter",
        supply=5.0,
        resistors=("R",),
        capacitor=True,
        outputs=OUTPUTS,
        typical=law,
        corners=(law,),
        error=error,
    )


@pytest.mark.parametrize("error", [Tolerance(0.0, 0.0), Tolerance(0.2, 0.2), Tolerance(0.1, 0.5)])
@pytest.mark.parametrize("parts", [(0.05, 0.1), (0.0, 0.1), (0.1, 0.0), (0.0, 0.0)])
def test_one_resistor_with_any_band_against_monte_carlo(error, parts):
    circuit = oscillator(error)
    r, c = slot(47e3, parts[0], parts[0]), slot(1e-6, parts[1], parts[1], 1e-7, 1e-6)
    made = drawn(circuit, (r,), c)
    for shares in (
        {"period": (0.95, 1.1)},
        {"frequency": (0.9, 1.02)},
        {"high": (0.9, 1.05), "low": (0.93, 1.2)},
        {"period": (0.97, 1.3), "duty": (0.9, 1.1)},
    ):
        bands = about(circuit, (r,), c, shares)
        hits, noise = hits_of(made, bands)
        chance = outlook(circuit, (r,), c, bands).chance
        assert chance == pytest.approx(hits, abs=2e-3 + 2.0 * noise), shares


def test_nothing_varies():
    circuit = astable(timer_named("ideal"), 9.0)
    rs, c = (slot(1e3, 0.0, 0.0), slot(1e3, 0.0, 0.0)), slot(1e-6, 0.0, 0.0)
    period = 3e-3 * log(2.0)
    assert chance_of(circuit, rs, c, {"period": (period, period)}, 1.0) == 1.0
    assert chance_of(circuit, rs, c, {"frequency": (1 / period, 1 / period)}, 1.0) == 1.0
    assert chance_of(circuit, rs, c, {"period": (0.5 * period, 0.999 * period)}, 1.0) == 0.0
    assert chance_of(circuit, rs, c, {"duty": (0.66, 0.67)}, 1.0) == 1.0
    assert chance_of(circuit, rs, c, {"duty": (0.67, 0.68)}, 1.0) == 0.0
    both = {"period": (0.9 * period, 1.1 * period), "duty": (2 / 3, 2 / 3)}
    assert chance_of(circuit, rs, c, both, 1.0) == 1.0


def test_what_never_ends_is_in_no_band():
    circuit = astable(timer_named("cmos"), 9.0)
    rs, c = (slot(1e6, 0.1, 0.1), slot(1e3, 0.0, 0.0)), slot(1e-6, 0.0, 0.0, 0.5e-6, 0.5e-6)
    # As with the monostable: about half of RA's range ends, 999k of 900k to 1100k.
    assert chance_of(circuit, rs, c, {"period": (0.0, 1e12)}, 1.0) == pytest.approx(0.495, abs=8e-3)
    assert chance_of(circuit, rs, c, {"high": (0.0, inf)}, 1.0) == pytest.approx(0.495, abs=8e-3)
    dead = slot(1e-6, 0.0, 0.0, 5e-6, 5e-6)
    assert chance_of(circuit, rs, dead, {"period": (0.0, 1e12)}, 1.0) == 0.0


@settings(max_examples=40)
@given(
    st.floats(0.0, 0.2), st.floats(0.0, 0.2), st.floats(0.0, 0.3), st.floats(0.7, 1.4),
)  # fmt: skip
def test_laws_of_the_chance_with_two_resistors(ra, rb, farads, middle):
    circuit = astable(timer_named("NE555"), 9.0)
    rs, c = (slot(47e3, ra, ra), slot(33e3, rb, rb)), slot(1e-6, farads, farads)
    period = outlook(circuit, rs, c, {}).chief.nominal
    cut = middle * period

    def chance(**bands):
        return chance_of(circuit, rs, c, bands, 1.0)

    assert chance(period=(0.0, 1e12)) == pytest.approx(1.0, abs=1e-9)
    assert chance(period=(0.0, cut)) + chance(period=(cut, 1e12)) == pytest.approx(1.0, abs=1e-9)
    # A frequency is a period seen from the other side.
    turned = chance(frequency=(1.0 / cut, 1e12))
    assert turned == pytest.approx(chance(period=(0.0, cut)), abs=1e-9)
    # Two bands at once are never likelier than either.
    both = chance(period=(0.0, cut), duty=(0.0, 0.71))
    assert both <= min(chance(period=(0.0, cut)), chance(duty=(0.0, 0.71))) + 1e-12


def test_the_normal_law_is_the_one_that_is_meant():
    """Tabulated from memory: density at 0 is 0.3989, at one sigma 0.2420; area between 0.3413."""
    assert exp(-0.5) / sqrt(2.0 * pi) == pytest.approx(0.2420, abs=1e-4)
    circuit = straight(Tolerance(0.3, 0.3))
    exact = slot(1e5, 0.0, 0.0), slot(1e-6, 0.0, 0.0)
    bands = {"interval": (0.07, 0.077)}
    assert outlook(circuit, exact[:1], exact[1], bands).chance == pytest.approx(
        0.3413 / 0.9973, abs=1e-3
    )
