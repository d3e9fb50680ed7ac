"""Parts and fits for the tests of cautions."""

from chooser.cautions import FitFacts, cautions_of
from chooser.circuits.astable import astable
from chooser.circuits.monostable import monostable
from chooser.circuits.timers import timer_named
from chooser.interval import outlook
from chooser.networks import Group, Leaf
from chooser.parts import Count, Holding, Kind, Part, Tolerance
from chooser.slot_facts import NOTHING, slot_facts

ONE, TWENTY = Tolerance(0.01, 0.01), Tolerance(0.2, 0.2)
ANYTHING = {"interval": (0.0, 1e9)}


def holding(kind, value, drawer, **traits):
    return Holding(1, Part(kind, value, **traits), drawer, Count(20))


def resistor(value=470e3, **traits):
    traits = {"technology": "metal-film", "tolerance": ONE, **traits}
    return holding(Kind.RESISTOR, value, "A4", **traits)


def film(value=1e-6, **traits):
    traits = {
        "technology": "polyester",
        "tolerance": Tolerance(0.05, 0.05),
        "voltage": 63.0,
        **traits,
    }
    return holding(Kind.CAPACITOR, value, "F2", **traits)


def electrolytic(value=47e-6, **traits):
    traits = {"technology": "electrolytic", "tolerance": TWENTY, "voltage": 25.0, **traits}
    return holding(Kind.CAPACITOR, value, "F3", **traits)


def fit(circuit, *parts, **wanted):
    """Make a fit of one part (or a ready network) for each slot; wanted gives outputs a target."""
    networks = {
        name: part if isinstance(part, Group) else Leaf(part)
        for name, part in zip(circuit.slots, parts, strict=True)
    }
    kinds = {name: Kind.CAPACITOR if name == "C" else Kind.RESISTOR for name in networks}
    slots = {
        name: slot_facts(network, kinds[name], circuit.supply, lossless=circuit.lossless)
        for name, network in networks.items()
    }
    rs = [slots[name] for name in circuit.resistors]
    out = outlook(circuit, rs, slots.get("C", NOTHING), {})
    return FitFacts(circuit, networks, slots, out, {k: (v, v) for k, v in wanted.items()})


def timed(r, c, timer="NE555", supply=9.0, target=None):
    """Make a monostable."""
    wanted = {} if target is None else {"interval": target}
    return fit(monostable(timer_named(timer), supply), r, c, **wanted)


def flashing(ra, rb, c, timer="NE555", supply=9.0, **wanted):
    """Make an astable."""
    return fit(astable(timer_named(timer), supply), ra, rb, c, **wanted)


def codes(these):
    return [caution.code.value for caution in cautions_of(these)]


def text_of(these, code):
    (caution,) = [caution for caution in cautions_of(these) if caution.code == code]
    return caution.text
