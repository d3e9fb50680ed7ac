"""What somebody's circuit will really do: the whole judgement of fixed parts.

Conventions: SI units, degree Celsius; an endless time is infinite as a nominal and None as a
worst case. What the numbers rest on is told where they are made: `chooser.interval` (corners,
spread, chance), `chooser.causes` (which part is the problem), `chooser.climate` (temperature).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from math import inf, isfinite, log

import numpy as np

from chooser.causes import Cause, causes_of, kind_in
from chooser.cautions import METER_OHM, Caution, Code, FitFacts, cautions_of
from chooser.circuits.circuit import Circuit, Variant, outputs_of
from chooser.circuits.laws import TimesLaw
from chooser.climate import Climate, climates_of, outside_rating_text
from chooser.errors import ChooserError
from chooser.interval import Outlook, Reading, outlook
from chooser.networks import Network
from chooser.parts import Holding
from chooser.search.request import Target
from chooser.slot_facts import NOTHING, SlotFacts, slot_facts
from chooser.temperature import Warmth

SUPPLY_STEP = 0.05
"""Of the supply: how far it is moved either way to see what the formula makes of it."""

_ROUNDING = 1e-12


@dataclass(frozen=True, slots=True)
class First:
    """The first time after power-up, where it is another one.

    Attributes
    ----------
    output : the output it is the first of. nominal : in second, at typical figures.
    low, high : worst case in second; None for one that may never end. They are those of the
        later times, lengthened as a circuit without losses is. Losses lengthen the first time a
        little less, so of a timer they are on the safe side; where thresholds or levels of the
        device scatter, they are an estimate.
    """

    output: str
    nominal: float
    low: float
    high: float | None


@dataclass(frozen=True, slots=True)
class PerVolt:
    """What one volt more of supply changes in the chief output, relative.

    Attributes
    ----------
    formula : by the formula, with its sign; None where it is not known.
    device : by the device's own drift, either way, the greatest usual size.
    """

    formula: float | None
    device: float


@dataclass(frozen=True, slots=True)
class Leakage:
    """What is lost on the way: through the capacitor, and into the device.

    Attributes
    ----------
    output : the time in which the capacitor is charged.
    ratio, ratio_limit : charging current at the trip point over all losses there, with typical
        losses and with all at their limits; infinite where nothing is lost, endless from 1 down,
        0 where the device may not even reach the trip point.
    stretch, stretch_limit : by how much losses lengthen that time, relative; infinite where it
        never ends.
    metered : that time in second while a meter hangs on the timing node; infinite for never,
        None where the capacitor is charged both ways round, so that it has no such node.
    """

    output: str
    ratio: float
    ratio_limit: float
    stretch: float
    stretch_limit: float
    metered: float | None


@dataclass(frozen=True, slots=True)
class Verdict:
    """All that is to be said of a circuit of fixed parts.

    Attributes
    ----------
    circuit, variant : the circuit. networks : what is in its slots, by name.
    slots : what is known of each slot. targets, within : what was wanted, maybe nothing.
    outlook : every output; its chance only counts where there are targets.
    errors : (nominal - target) / target by output with a target.
    in_band : whether every nominal output is inside its accepted band.
    first : the first time after power-up, or None where it is as the others.
    causes : what makes the spread of the chief output, the greatest share first.
    per_volt : what the supply does, or None where there is none. leakage : what is lost, or
        None where the formula knows no losses.
    climates : the ends of the temperatures asked for, the cold one first; maybe none.
    cautions : the one that matters most first.
    """

    circuit: Circuit
    variant: Variant
    networks: Mapping[str, Network[Holding]]
    slots: Mapping[str, SlotFacts]
    targets: tuple[Target, ...]
    within: float
    outlook: Outlook
    errors: Mapping[str, float]
    in_band: bool
    first: First | None
    causes: tuple[Cause, ...]
    per_volt: PerVolt | None
    leakage: Leakage | None
    climates: tuple[Climate, ...]
    cautions: tuple[Caution, ...]


@dataclass(frozen=True, slots=True)
class _Built:
    """A circuit with its parts in it."""

    circuit: Circuit
    rs: Sequence[SlotFacts]
    c: SlotFacts
    scale: float

    def outputs(self, circuit: Circuit, leak: float) -> dict[str, float]:
        """Return the nominal outputs of a circuit with these parts."""
        times = self.times(circuit.typical, leak)
        with np.errstate(all="ignore"):
            return {name: float(value) for name, value in outputs_of(circuit, times).items()}

    def times(self, law: TimesLaw, leak: float) -> list[float]:
        """Return the times in second that a law makes of these parts."""
        with np.errstate(all="ignore"):
            made = law.times([r.value for r in self.rs], self.c.value, leak)
        return [self.scale * float(time) for time in made]


def judged(
    circuit: Circuit,
    networks: Mapping[str, Network[Holding]],
    targets: tuple[Target, ...],
    within: float,
    warmth: Warmth | None,
    *,
    variant: Variant,
    at_supply: Callable[[float], Circuit] | None = None,
) -> Verdict:
    """Judge a circuit of fixed parts.

    Parameters
    ----------
    circuit : the circuit, everything fixed but its timing parts.
    networks : what is in each of its slots, by name.
    targets : what its outputs are to be; may be empty.
    within : half width of the accepted band, relative to a target.
    warmth : temperatures that it has to work at, or None.
    variant : how the output is taken.
    at_supply : makes the same circuit for another supply (volt), or None where it cannot; what
        it refuses is left out.
    """
    slots = {
        name: slot_facts(networks[name], kind_in(name), circuit.supply, lossless=circuit.lossless)
        for name in circuit.slots
    }
    rs, c = [slots[name] for name in circuit.resistors], slots.get("C", NOTHING)
    bands = {target.output: target.band(within) for target in targets}
    out = outlook(circuit, rs, c, bands, variant.scale)
    nominal = {reading.output: reading.nominal for reading in out.readings}
    wanted = {target.output: (target.low, target.high) for target in targets}
    facts = FitFacts(circuit, networks, slots, out, wanted)
    built = _Built(circuit, rs, c, variant.scale)
    climates = climates_of(circuit, networks, warmth, variant, out.chief.follows) if warmth else ()
    return Verdict(
        circuit=circuit,
        variant=variant,
        networks=networks,
        slots=slots,
        targets=targets,
        within=within,
        outlook=out,
        errors={target.output: target.error(nominal[target.output]) for target in targets},
        in_band=all(
            low * (1.0 - _ROUNDING) <= nominal[output] <= high * (1.0 + _ROUNDING)
            for output, (low, high) in bands.items()
        ),
        first=_first(built, facts.charged),
        causes=causes_of(circuit, networks, out.chief),
        per_volt=_per_volt(built, at_supply),
        leakage=_leakage(built, facts),
        climates=climates,
        cautions=(*cautions_of(facts), *_outside(climates)),
    )


def _outside(climates: Sequence[Climate]) -> tuple[Caution, ...]:
    """Return the caution that a part is not rated for a temperature, where one is not."""
    text = outside_rating_text(climates)
    return () if text is None else (Caution(Code.OUTSIDE_RATING, text),)


def _first(built: _Built, later: Reading) -> First | None:
    """Return the first time after power-up, beside the later ones."""
    circuit = built.circuit
    if circuit.first is None:
        return None
    plain = built.times(circuit.typical.lossless(), 0.0)[0]
    longer = built.times(circuit.first.lossless(), 0.0)[0] / plain
    nominal = built.times(circuit.first, built.c.leak_typical)[0]
    high = None if later.high is None else later.high * longer
    return First(later.output, nominal, later.low * longer, high)


def _per_volt(built: _Built, at_supply: Callable[[float], Circuit] | None) -> PerVolt | None:
    circuit = built.circuit
    if not circuit.device:
        return None
    return PerVolt(_by_formula(built, at_supply), circuit.supply_drift)


def _by_formula(built: _Built, at_supply: Callable[[float], Circuit] | None) -> float | None:
    """Return d ln chief output / d supply in 1/V, one-sided at the end of the device's range."""
    if at_supply is None:
        return None
    supply, chief = built.circuit.supply, built.circuit.outputs[0]
    ends: dict[float, float] = {}
    for volt in (supply * (1.0 - SUPPLY_STEP), supply, supply * (1.0 + SUPPLY_STEP)):
        try:
            there = built.circuit if volt == supply else at_supply(volt)
        except ChooserError:  # beyond what the device works at: the other side tells enough
            continue
        value = built.outputs(there, built.c.leak_typical)[chief]
        if isfinite(value) and value > 0.0:
            ends[volt] = value
    least, most = min(ends, default=supply), max(ends, default=supply)
    if least == most:
        return None
    return log(ends[most] / ends[least]) / (most - least)


def _leakage(built: _Built, facts: FitFacts) -> Leakage | None:
    circuit, c = built.circuit, built.c
    if circuit.lossless or not facts.is_timed:
        return None
    charging, meter = facts.charging, 1.0 / METER_OHM
    plain = built.times(circuit.typical.lossless(), 0.0)[0]
    if circuit.typical.trip_ratio(charging, meter) == inf or not 0.0 < plain < inf:
        return None
    return Leakage(
        output=facts.charged.output,
        ratio=circuit.typical.trip_ratio(charging, c.leak_typical),
        ratio_limit=min(law.trip_ratio(charging, c.leak_limit) for law in circuit.corners),
        stretch=facts.stretch(circuit.typical, c.leak_typical),
        stretch_limit=max(facts.stretch(law, c.leak_limit) for law in circuit.corners),
        metered=None
        if circuit.alternating
        else built.times(circuit.typical, c.leak_typical + meter)[0],
    )
