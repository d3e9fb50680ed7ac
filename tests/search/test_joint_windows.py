"""Windows of two resistors miss nothing: whatever an error leaves open lies in them."""

from __future__ import annotations

import random

import numpy as np
import pytest
from pair_stocks import WISHES, leaky_stock, random_targets, random_times
from stocks import EVERY_RULE

from chooser.circuits.astable import astable
from chooser.circuits.diodes import diode_named
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.search import windows
from chooser.search.boxes import Inverse, box_of
from chooser.search.joint import errors_of, widest
from chooser.search.request import Request
from chooser.search.space import Space
from chooser.search.tables import every_network

STEERED = steered(timer_named("ideal"), 9.0, diode_named("ideal"))


def crossed(spaced, slots):
    """Values of every pair of networks of one or two resistors, each on every capacitor network."""
    tables = (rows for size in (1, 2) for rows in every_network(spaced.resistor_tables, size))
    values = np.concatenate([rows.value for rows in tables])
    axes = values, values, np.arange(len(slots))
    return [each.ravel() for each in np.meshgrid(*axes, indexing="ij")]


def missed(circuit, holdings, targets, errors):
    """Count circuits within each of falling errors, and those outside their own window."""
    request = Request(circuit, targets, most_resistors=2, lifted=EVERY_RULE)
    spaced = Space([h for h in holdings if h.id < 11], [h for h in holdings if h.id > 10], request)
    inside = out = 0
    for capacitors in (1, 2):
        slots = spaced.slots(capacitors)
        inverse = Inverse(circuit.twin, slots, widest(spaced, slots))
        ra, rb, slot = crossed(spaced, slots)
        times = circuit.twin.times((ra, rb), slots.farad[slot], slots.leak[slot])
        made = errors_of(request, times)
        for error in errors:
            box = box_of(targets, error)
            ends = inverse.windows(box, error)
            near = made <= error
            a, b, where = ra[near], rb[near], slot[near]
            to_a, to_b = (tuple(end[where] for end in each) for each in (ends.ra, ends.rb))
            checked = [(a, to_a), (b, to_b)]
            checked.append((a, inverse.ra_beside(box, b, to_a, where).ra))
            checked.append((b, inverse.rb_beside(box, a, to_b, where).rb))
            held = [
                (low * (1 - windows.ROUNDING) <= value) & (value <= high * (1 + windows.ROUNDING))
                for value, (low, high) in checked
            ]
            inside += len(a)
            out += len(a) - int(np.logical_and.reduce(held).sum())
    return inside, out


def random_twin(rnd):
    timer = timer_named(rnd.choice(("ideal", "bipolar", "cmos", "NE555", "ICM7555")))
    control = rnd.choice((None, 3.0, 6.5))
    if rnd.random() < 0.4:
        return astable(timer, 9.0, control)
    diode = diode_named(rnd.choice(("silicon", "schottky", "0.6V", "ideal")))
    both = rnd.random() < 0.5 and control != 3.0
    return steered(timer, 9.0, diode, both=both, control=control)


def sweep_windows(rnd, trials):
    total = 0
    for _ in range(trials):
        circuit, holdings = random_twin(rnd), leaky_stock(rnd)
        targets = random_targets(rnd, rnd.choice(WISHES), *random_times(rnd, holdings))
        errors = sorted((10 ** rnd.uniform(-6, 1.5) for _ in range(3)), reverse=True)
        inside, out = missed(circuit, holdings, targets, errors)
        assert not out, (circuit.family, circuit.device, targets, errors)
        total += inside
    return total


def test_windows_hold_every_circuit_within_their_error():
    assert sweep_windows(random.Random("windows"), 25) > 500


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(2))
def test_windows_hold_every_circuit_of_many_stocks(seed):
    sweep_windows(random.Random(f"windows {seed}"), 100)


@pytest.mark.parametrize("wish", WISHES)
def test_the_box_holds_exactly_the_times_within_an_error(wish):
    """The box is no wider than the targets say: its corners in turn break some target."""
    rnd = random.Random(f"box {wish}")
    for _ in range(200):
        high, low = 10 ** rnd.uniform(-3, 1), 10 ** rnd.uniform(-3, 1)
        targets = random_targets(rnd, wish, high, low)
        error = 10 ** rnd.uniform(-6, 1)
        request = Request(STEERED, targets)
        box = box_of(targets, error)
        times = np.array([10 ** rnd.uniform(-4, 2) for _ in range(64)]) * high
        others = np.array([10 ** rnd.uniform(-4, 2) for _ in range(64)]) * low
        within = errors_of(request, (times, others)) <= error
        assert (times[within] >= box.high[0] * (1 - 1e-12)).all()
        assert (times[within] <= box.high[1] * (1 + 1e-12)).all()
        assert (others[within] >= box.low[0] * (1 - 1e-12)).all()
        assert (others[within] <= box.low[1] * (1 + 1e-12)).all()
        if wish == "both times":
            inside = (times >= box.high[0]) & (times <= box.high[1])
            inside &= (others >= box.low[0]) & (others <= box.low[1])
            assert (errors_of(request, (times, others))[inside] <= error * (1 + 1e-9)).all()
