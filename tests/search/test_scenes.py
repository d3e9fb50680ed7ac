"""One level of the space at a time: the best within a bound, ties at the last place included."""

from __future__ import annotations

import random

import numpy as np
import pytest
from stocks import EVERY_RULE, random_stock

from chooser.circuits.astable import astable
from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.circuits.diodes import diode_named
from chooser.circuits.gates import gate_named
from chooser.circuits.monostable import monostable
from chooser.circuits.plain import capacitance, resistance
from chooser.circuits.schmitt import schmitt
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.parts import Kind
from chooser.search import space
from chooser.search.joint import errors_of
from chooser.search.request import Request, Target
from chooser.search.scenes import CapacitorAlone, OneResistor, Scenes, TwoResistors
from chooser.search.space import Space
from chooser.search.tables import allowed, every_network

BIPOLAR, IDEAL = timer_named("bipolar"), timer_named("ideal")
CIRCUITS = {
    "monostable": (monostable(BIPOLAR, 9.0), OneResistor),
    "schmitt": (schmitt(gate_named("74HC14"), 5.0), OneResistor),
    "counter": (counter(counter_named("HEF4060B"), 9.0), OneResistor),
    "resistance": (resistance(), OneResistor),
    "capacitance": (capacitance(), CapacitorAlone),
    "astable": (astable(BIPOLAR, 9.0), TwoResistors),
    "textbook": (astable(IDEAL, 9.0), TwoResistors),
    "steered": (steered(BIPOLAR, 9.0, diode_named("0.6V")), TwoResistors),
}


def random_targets(rnd, circuit):
    if len(circuit.resistors) == 2:
        low = 10 ** rnd.uniform(-4, -1)
        high = low * rnd.uniform(1.1, 3)
        return (Target("high", high, high), Target("low", low, low))
    ends = {"resistance": (2, 5), "capacitance": (-8, -6)}.get(circuit.family, (-4, 0))
    wanted = 10 ** rnd.uniform(*ends) * (1000 if circuit.family == "counter" else 1)
    return (Target(circuit.outputs[0], wanted, wanted),)


def everything(opened, level, slots):
    """The errors of every circuit of a level, by laying all tables out against each other."""
    circuit, request = opened.request.circuit, opened.request
    tables = [every_network(opened.resistor_tables, size) for size in level.resistors]
    values = [np.concatenate([rows.value for rows in each]) for each in tables]
    leaves = [np.concatenate([rows.leaves for rows in each]) for each in tables]
    axes = [np.arange(len(each)) for each in values] + [np.arange(len(slots))]
    *rows, slot = (axis.ravel() for axis in np.meshgrid(*axes, indexing="ij"))
    rs = [value[row] for value, row in zip(values, rows, strict=True)]
    times = circuit.typical.times(rs, slots.farad[slot], slots.leak[slot])
    if len(rs) == 2:
        errors = errors_of(request, times)
        pieces = np.concatenate([of[row] for of, row in zip(leaves, rows, strict=True)], axis=1)
        charging = rs[0] + rs[1] if circuit.twin.through_both else rs[0]
        kept = allowed(pieces, opened.resistor_tables.uses) & (charging <= slots.most[slot])
        return errors[kept & np.isfinite(errors)]
    errors = np.abs(slots.scale[slot] * np.sum(times, axis=0) / request.target - 1)
    if rs:
        errors = errors[(rs[0] >= slots.least[slot]) & (rs[0] <= slots.most[slot])]
    return errors[np.isfinite(errors)]


def check_level(opened, level, scenes, rnd):
    slots = opened.slots(level.capacitors)
    if not len(slots):
        return 0
    errors = np.sort(everything(opened, level, slots))
    top = opened.request.top
    bounds = [np.inf, 10 ** rnd.uniform(-6, 2)]
    if len(errors):
        bounds.append(float(rnd.choice(errors.tolist())) * (1 + 1e-9))
    for bound in bounds:
        found = np.sort(scenes.at(level, slots).best(bound).error)
        inside = errors[errors <= bound]
        expected = inside[: min(top, len(inside))]
        assert len(found) >= len(expected), (level, bound)
        np.testing.assert_allclose(found[: len(expected)], expected, rtol=1e-9, atol=1e-11)
        # Beyond the wanted number only what equals the last place, and nothing over the bound.
        assert (found <= bound * (1 + 1e-11)).all()
        if len(found) > top:
            np.testing.assert_allclose(found[top:], found[top - 1], rtol=1e-9, atol=1e-11)
        if len(inside) >= top:
            last = found[top - 1]
            assert len(found) >= np.count_nonzero(inside <= last + 1e-14 * (1 + last))
    return len(errors)


@pytest.mark.parametrize("name", CIRCUITS)
def test_every_level_gives_its_best(monkeypatch, name):
    circuit, kind = CIRCUITS[name]
    rnd, total = random.Random(name), 0
    for _ in range(6):
        holdings = random_stock(rnd, 3, 2)
        request = Request(
            circuit,
            random_targets(rnd, circuit),
            top=rnd.choice((1, 3, 10)),
            most_resistors=2,
            lifted=EVERY_RULE,
        )
        with monkeypatch.context() as patch:
            patch.setattr(space, "MOST_LISTED", rnd.choice((0, 5, 150_000)))
            sides = [[h for h in holdings if h.part.kind is which] for which in Kind]
            by_kind = dict(zip(Kind, sides, strict=True))
            opened = Space(by_kind[Kind.RESISTOR], by_kind[Kind.CAPACITOR], request)
            scenes = Scenes(opened)
            for level in opened.levels():
                if opened.slots(level.capacitors):
                    assert isinstance(scenes.at(level, opened.slots(level.capacitors)), kind)
                total += check_level(opened, level, scenes, rnd)
    assert total > 10


def test_a_bound_that_nothing_meets_finds_nothing():
    rnd = random.Random("nothing")
    for circuit, _ in CIRCUITS.values():
        targets = random_targets(rnd, circuit)
        holdings = random_stock(rnd, 3, 2)
        request = Request(circuit, targets, lifted=EVERY_RULE)
        resistors = [each for each in holdings if each.part.kind is Kind.RESISTOR]
        capacitors = [each for each in holdings if each.part.kind is Kind.CAPACITOR]
        opened = Space(resistors, capacitors, request)
        scenes = Scenes(opened)
        for level in list(opened.levels())[:3]:
            slots = opened.slots(level.capacitors)
            if len(slots):
                least = everything(opened, level, slots).min(initial=np.inf)
                if 0 < least < np.inf:
                    assert not len(scenes.at(level, slots).best(least * 0.999))
