"""Circuits, fits and drawers for the tests of supporting parts."""

from chooser.circuits.circuit import Variant
from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.circuits.gates import gate_named
from chooser.circuits.logic_monostable import logic_monostable
from chooser.circuits.monostable import monostable
from chooser.circuits.one_shots import one_shot_named
from chooser.circuits.schmitt import schmitt
from chooser.circuits.timers import timer_named
from chooser.interval import outlook
from chooser.networks import Group, Join, Leaf
from chooser.parts import Count, Holding, Kind, Part, Sureness, Tolerance
from chooser.search.request import Fit, Slot
from chooser.slot_facts import slot_facts

FIVE, TEN = Tolerance(0.05, 0.05), Tolerance(0.1, 0.1)


def counted(count):
    if isinstance(count, Count):
        return count
    return Count(0, Sureness.PLENTY) if count is None else Count(count)


def resistor(number, ohm, count=20, drawer="A1", **traits):
    traits = {"tolerance": FIVE, "technology": "carbon-film", "power": 0.25, **traits}
    return Holding(number, Part(Kind.RESISTOR, ohm, **traits), drawer, counted(count))


def capacitor(number, farad, count=20, drawer="C1", **traits):
    traits = {"tolerance": TEN, "technology": "x7r", "voltage": 50.0, **traits}
    return Holding(number, Part(Kind.CAPACITOR, farad, **traits), drawer, counted(count))


def electrolytic(number, farad, count=20, **traits):
    traits = {"technology": "electrolytic", "voltage": 25.0, **traits}
    return capacitor(number, farad, count, drawer="E1", **traits)


def one_shot(timer="NE555", supply=9.0, control=None):
    return monostable(timer_named(timer), supply, control)


def divider(chip="HEF4060B", supply=9.0):
    return counter(counter_named(chip), supply)


def inverter(chip="CD40106", supply=9.0):
    return schmitt(gate_named(chip), supply)


def logic(chip="CD4538B", supply=9.0):
    return logic_monostable(one_shot_named(chip), supply)


def series(*holdings):
    return Group(Join.SERIES, tuple(Leaf(holding) for holding in holdings))


def fit_of(circuit, *parts):
    """A fit of one holding, or a network of them, for each slot."""
    networks = [part if isinstance(part, Group) else Leaf(part) for part in parts]
    slots, facts = [], []
    for name, network in zip(circuit.slots, networks, strict=True):
        kind = Kind.CAPACITOR if name == "C" else Kind.RESISTOR
        facts.append(slot_facts(network, kind, circuit.supply, lossless=circuit.lossless))
        slots.append(Slot(name, network, facts[-1].value))
    out = outlook(circuit, facts[:-1], facts[-1], {})
    return Fit(tuple(slots), Variant(), out, {}, 0.0, 0.0, 0.0, in_band=True, cautions=())


def slow(circuit=None, number=901):
    """A fit of a resistor and a capacitor that make some seconds."""
    circuit = circuit or one_shot()
    parts = [resistor(number + i, 470e3) for i in range(len(circuit.resistors))]
    return fit_of(circuit, *parts, capacitor(999, 10e-6, technology="polyester"))
