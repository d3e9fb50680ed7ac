"""What a circuit does in the cold and in the heat.

Conventions: temperatures in degree Celsius, all parts at the same one; changes are relative to
20 C. The nominal there has every part moved as is typical, a steering diode's drop with it, and
the device not at all; the worst case has every part at the end of its tolerance and of its change
together, the leak's limit at that temperature, and the device's error widened by the greatest
usual drift. Left out is what else the device does in the heat: its input and leakage currents,
which a hot one has more of, its output levels, and thresholds that no drift is printed for.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import inf

import numpy as np

from chooser.causes import kind_in
from chooser.cautions.record import names
from chooser.circuits.circuit import Circuit, Variant, outputs_of
from chooser.circuits.leakage import leak_conductance_at
from chooser.circuits.steered import with_diode_at
from chooser.interval import Outlook, outlook
from chooser.networks import Join, Network, adding_join, members, shares_of, value_of
from chooser.parts import Holding, Kind, Tolerance
from chooser.quantities import format_temperature
from chooser.slot_facts import NOTHING, SlotFacts, slot_facts
from chooser.temperature import (
    LARGEST_LOSS,
    REFERENCE_CELSIUS,
    Warmth,
    change_of,
    outside_rating,
)
from chooser.uncertainty import limits_of


@dataclass(frozen=True, slots=True)
class Mover:
    """What moves the chief output most at a temperature.

    Attributes
    ----------
    slot : the slot its part is in; "" for the device. holding : the part; None for the device.
    least, most : change of the output by it, relative, to first order; leakage is not in it.
    """

    slot: str
    holding: Holding | None
    least: float
    most: float

    @property
    def size(self) -> float:
        """How far it may move the output, either way."""
        return max(abs(self.least), abs(self.most))


@dataclass(frozen=True, slots=True)
class Climate:
    """What a circuit does at one temperature.

    Attributes
    ----------
    celsius : the temperature. outlook : all outputs there.
    mover : what moves the chief output most, or None where nothing does.
    by_leakage : change of the chief output by the other typical leakage alone, relative; infinite
        where that makes it endless, 0 where it is so at 20 C already.
    outside : the parts whose technology is usually not rated for it.
    """

    celsius: float
    outlook: Outlook
    mover: Mover | None
    by_leakage: float
    outside: tuple[Holding, ...]


def climates_of(
    circuit: Circuit,
    networks: Mapping[str, Network[Holding]],
    warmth: Warmth,
    variant: Variant,
    follows: tuple[float, ...],
) -> tuple[Climate, ...]:
    """Return what a circuit does at the ends of a range of temperatures.

    Parameters
    ----------
    circuit, networks, variant : the circuit, and what is in its slots.
    warmth : the range. follows : d ln chief output / d ln value for each slot, at 20 C.

    Returns
    -------
    The cold end, and the warm one where it is another. Nothing moves further in between.
    """
    ends = dict.fromkeys((warmth.low, warmth.high))
    return tuple(_climate(circuit, networks, end, variant, follows) for end in ends)


def widest(climates: Sequence[Climate], output: str) -> tuple[float, float | None]:
    """Return the least and the most of an output over all climates; None for may never end."""
    readings = [climate.outlook.of(output) for climate in climates]
    highs = [reading.high for reading in readings if reading.high is not None]
    endless = len(highs) < len(readings)
    return min(reading.low for reading in readings), None if endless else max(highs)


def outside_rating_text(climates: Sequence[Climate]) -> str | None:
    """Say which parts are not rated for which end of the temperatures, and what to do."""
    said = [
        f"at {format_temperature(climate.celsius)} {names(climate.outside)}"
        for climate in climates
        if climate.outside
    ]
    if not said:
        return None
    text = (
        f"{' and '.join(said)} would leave the temperatures that parts of this technology are "
        "usually rated for; see its data sheet, or take another kind."
    )
    return text[0].upper() + text[1:]


def warmed(
    network: Network[Holding], kind: Kind, supply: float, celsius: float, *, lossless: bool
) -> SlotFacts:
    """Return what is known of a network of holdings at a temperature.

    Parameters
    ----------
    network, kind, supply, lossless : as for `chooser.slot_facts.slot_facts`.
    celsius : temperature of all parts, in degree Celsius.

    Returns
    -------
    Value by the typical changes; the ends are exact, for the value rises with each part.
    """
    adds = adding_join(kind)
    cool = slot_facts(network, kind, supply, lossless=lossless)
    leaks = (0.0, 0.0)
    if kind is Kind.CAPACITOR and not lossless:
        leaks = (
            value_of(network, Join.PARALLEL, lambda h: _leak(h, supply, celsius)[0]),
            value_of(network, Join.PARALLEL, lambda h: _leak(h, supply, celsius)[1]),
        )
    return SlotFacts(
        value_of(network, adds, lambda h: _ends(h, celsius)[1]),
        value_of(network, adds, lambda h: _ends(h, celsius)[0]),
        value_of(network, adds, lambda h: _ends(h, celsius)[2]),
        cool.spread,
        cool.shift,
        *leaks,
    )


def _ends(holding: Holding, celsius: float) -> tuple[float, float, float]:
    """Return least, typical and greatest value of a part at a temperature (ohm or farad)."""
    part, change, limits = holding.part, change_of(holding.part, celsius), limits_of(holding.part)
    return (
        part.effective * (1.0 - limits.minus) * (1.0 + change.least),
        part.effective * (1.0 + change.typical),
        part.effective * (1.0 + limits.plus) * (1.0 + change.most),
    )


def _leak(holding: Holding, supply: float, celsius: float) -> tuple[float, float]:
    leak = leak_conductance_at(holding.part, supply, celsius)
    return leak.typical, leak.limit


def _climate(
    circuit: Circuit,
    networks: Mapping[str, Network[Holding]],
    celsius: float,
    variant: Variant,
    follows: tuple[float, ...],
) -> Climate:
    facts = {
        slot: warmed(
            networks[slot], kind_in(slot), circuit.supply, celsius, lossless=circuit.lossless
        )
        for slot in circuit.slots
    }
    drift = circuit.temperature_drift * abs(celsius - REFERENCE_CELSIUS)
    error = Tolerance(min(circuit.error.minus + drift, LARGEST_LOSS), circuit.error.plus + drift)
    rs = [facts[slot] for slot in circuit.resistors]
    warm = with_diode_at(circuit, celsius)
    there = outlook(
        replace(warm, error=error), rs, facts.get("C", NOTHING), {}, scale=variant.scale
    )
    outside = {
        holding.id: holding
        for slot in circuit.slots
        for holding in members(networks[slot])
        if outside_rating(holding.part, celsius)
    }
    by_diode = _by_diode(circuit, warm, facts)
    movers = _movers(circuit, networks, celsius, follows)
    movers.append(Mover("", None, by_diode - drift, by_diode + drift))
    mover = max(movers, key=lambda each: each.size)
    return Climate(
        celsius,
        there,
        mover if mover.size else None,
        _by_leakage(circuit, networks, facts),
        tuple(outside.values()),
    )


def _by_leakage(
    circuit: Circuit, networks: Mapping[str, Network[Holding]], there: Mapping[str, SlotFacts]
) -> float:
    """Return what the leakage at a temperature alone does to the chief output."""
    if circuit.lossless or "C" not in there:
        return 0.0
    cool = {
        slot: slot_facts(networks[slot], kind_in(slot), circuit.supply, lossless=False)
        for slot in circuit.slots
    }
    leaks = (cool["C"].leak_typical, there["C"].leak_typical)
    before, after = (_chief(circuit, cool, leak) for leak in leaks)
    return after / before - 1.0 if 0.0 < before < inf else 0.0


def _by_diode(circuit: Circuit, warm: Circuit, there: Mapping[str, SlotFacts]) -> float:
    """Return what a steering diode's drop at a temperature alone does to the chief output."""
    if warm is circuit:
        return 0.0
    before, after = (_chief(each, there, there["C"].leak_typical) for each in (circuit, warm))
    return after / before - 1.0 if 0.0 < before < inf and after < inf else 0.0


def _chief(circuit: Circuit, slots: Mapping[str, SlotFacts], leak: float) -> float:
    """Return the chief output of slots with a leak across the capacitor."""
    with np.errstate(all="ignore"):
        ohms = [slots[slot].value for slot in circuit.resistors]
        times = circuit.typical.times(ohms, slots["C"].value, leak)
        return float(outputs_of(circuit, times)[circuit.outputs[0]])


def _movers(
    circuit: Circuit,
    networks: Mapping[str, Network[Holding]],
    celsius: float,
    follows: tuple[float, ...],
) -> list[Mover]:
    found = []
    for slot, steep in zip(circuit.slots, follows, strict=True):
        shares = shares_of(
            networks[slot], adding_join(kind_in(slot)), lambda holding: holding.part.effective
        )
        for holding, share in shares:
            change = change_of(holding.part, celsius)
            ends = sorted((steep * share * change.least, steep * share * change.most))
            found.append(Mover(slot, holding, ends[0], ends[1]))
    return found
