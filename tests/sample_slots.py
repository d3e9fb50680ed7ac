"""Slots with limits given as fractions, and circuits to put them in."""

from chooser.circuits.monostable import monostable
from chooser.circuits.timers import timer_named
from chooser.parts import Tolerance
from chooser.slot_facts import SlotFacts

EVERYTHING = {"interval": (0.0, 1e12)}


def slot(value, minus, plus, typical_leak=0.0, limit_leak=0.0):
    tolerance = Tolerance(minus, plus)
    return SlotFacts(
        value,
        value * (1.0 - minus),
        value * (1.0 + plus),
        tolerance.spread,
        tolerance.shift,
        typical_leak,
        limit_leak,
    )


def one_shot(timer, supply=9.0):
    """The monostable of a timer, or of the name of one."""
    return monostable(timer_named(timer) if isinstance(timer, str) else timer, supply)
