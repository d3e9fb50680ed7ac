"""Small stocks for the tests of the search, fixed and random."""

from __future__ import annotations

from dataclasses import replace

import oracle

from chooser.circuits.monostable import monostable
from chooser.circuits.timers import timer_named
from chooser.networks import Leaf
from chooser.parts import Count, Holding, Kind, Part, Sureness
from chooser.search.find import find_fits
from chooser.search.request import Request, Target
from chooser.search.terms import Rule

OHMS = (1e3, 1.5e3, 2.2e3, 3.3e3, 1e4, 1.5e4, 2.2e4, 3.3e4, 1e5)
FARADS = (1e-8, 4.7e-8, 1e-7, 2.2e-7, 1e-6)
EVERY_RULE = frozenset(Rule)


def resistor(number, ohm, count=1, drawer="A1", **traits):
    return Holding(number, Part(Kind.RESISTOR, ohm, **traits), drawer, counted(count))


def capacitor(number, farad, count=1, drawer="F1", technology="polyester", **traits):
    part = Part(Kind.CAPACITOR, farad, technology=technology, **traits)
    return Holding(number, part, drawer, counted(count))


def counted(count):
    """Read a count: a number, a Count, or None for plenty."""
    if isinstance(count, Count):
        return count
    return Count(0, Sureness.PLENTY) if count is None else Count(count)


def asked(target, timer="ideal", supply=9.0, **options):
    """A request for a monostable of so many seconds."""
    circuit = monostable(timer_named(timer), supply)
    return Request(circuit, (Target("interval", target, target),), **options)


def found(holdings, target, **options):
    """The fits of an answer."""
    return find_fits(holdings, asked(target, **options)).fits


def plain(network):
    """A network of holdings in the oracle's form."""
    if isinstance(network, Leaf):
        return network.member if isinstance(network.member, int) else network.member.id
    children = sorted((plain(child) for child in network.children), key=repr)
    return (network.join.value, tuple(children))


def ids(network):
    return oracle.parts_of(plain(network))


def ohms_of(fit):
    """The ids in the resistor slot of a monostable."""
    return ids(fit.slot("R").network)


def farads_of(fit):
    """The ids in the capacitor slot."""
    return ids(fit.slot("C").network)


def parts_of(fit):
    """The ids of both slots of a monostable."""
    return ohms_of(fit), farads_of(fit)


def with_slot(fit, name, **changes):
    """A fit with something else in one slot."""
    slots = tuple(replace(slot, **changes) if slot.name == name else slot for slot in fit.slots)
    return replace(fit, slots=slots)


def stock_of(holdings, kind):
    """Value and count of a kind of holdings, as the oracle takes them."""
    return {
        holding.id: (holding.part.effective, holding.free)
        for holding in holdings
        if holding.part.kind is kind
    }


def sides(holdings):
    return stock_of(holdings, Kind.RESISTOR), stock_of(holdings, Kind.CAPACITOR)


def random_holding(rnd, number, make, values):
    """One drawer with a quirk now and then: a measured piece, a rough count, claimed parts."""
    value = rnd.choice(values)
    count = rnd.choice((1, 1, 1, 2, 2, 2, 3, None))
    holding = make(number, value, count, drawer=rnd.choice("ABC"))
    quirk = rnd.random()
    if quirk < 0.15:
        measured = float(f"{value * rnd.uniform(0.9, 1.1):.4g}")
        return replace(holding, part=replace(holding.part, measured=measured))
    if quirk < 0.25 and count:
        return replace(holding, count=Count(count, Sureness.ROUGH))
    if quirk < 0.35 and count:
        return replace(holding, count=Count(count + 2), claimed=2)
    return holding


def random_stock(rnd, most_resistors=4, most_capacitors=3):
    """A few drawers of few values, so that ties and equal drawers are common."""
    ohms = rnd.sample(OHMS, rnd.randint(1, 4))
    farads = rnd.sample(FARADS, rnd.randint(1, 3))
    numbers = rnd.sample(range(1, 40), most_resistors + most_capacitors)
    return [
        *(
            random_holding(rnd, number, resistor, ohms)
            for number in numbers[: rnd.randint(1, most_resistors)]
        ),
        *(
            random_holding(rnd, number, capacitor, farads)
            for number in numbers[most_resistors : most_resistors + rnd.randint(1, most_capacitors)]
        ),
    ]
