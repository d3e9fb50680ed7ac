"""Rules on the parts themselves: rating, polarity, tolerance, counts, dielectric, size."""

from __future__ import annotations

from math import isfinite

from chooser.cautions.record import FitFacts, farad_text, names, volt_text
from chooser.circuits.scattering import SIGMAS
from chooser.networks import Group, Join, Network
from chooser.parts import Holding, Sureness
from chooser.quantities import format_percent
from chooser.technologies import is_polarised, taken_for, technology_of, tolerance_of

STRAY_FARAD = 1e-9
"""Below it strays count: a breadboard and its wires add some 10 pF, 1 % of 1 nF."""

BIG_FARAD = 1e-3
"""Common practice, no source: from 1000 uF a capacitor is emptied before it is touched."""

BIG_CHARGE = 0.01
"""Coulomb; what 1000 uF hold at 10 V."""

COARSE = 0.05
"""Tolerance of a capacitor from which its errors hide everything else."""

_TAKEN = {
    "electrolytic": "an electrolytic",
    "ceramic": "a ceramic of unknown class",
}

NOISE = 1e-6
"""Errors below a part per million are not told apart."""


def needed_rating(holding: Holding, supply: float) -> float:
    """Return the rated voltage (volt) that a capacitor should have at a supply (volt).

    Twice the supply for tantalum, 1.5 times for other electrolytics, the supply itself for
    the rest (common practice, from memory).
    """
    technology = taken_for(holding.part)
    if technology == "tantalum":
        return 2.0 * supply
    return 1.5 * supply if technology.startswith("electrolytic") else supply


def over_voltage(facts: FitFacts) -> str | None:
    """Speak of capacitors rated below the supply."""
    weak = [
        holding
        for holding in facts.capacitors
        if holding.part.voltage is not None and holding.part.voltage < facts.supply
    ]
    if not weak:
        return None
    return (
        f"The supply of {volt_text(facts.supply)} exceeds the rated voltage of {names(weak)}, "
        f"which may burst; take one for {volt_text(_needed(weak, facts))} or more."
    )


def thin_margin(facts: FitFacts) -> str | None:
    """Speak of electrolytics rated for hardly more than the supply."""
    thin = [
        holding
        for holding in facts.capacitors
        if holding.part.voltage is not None
        and facts.supply <= holding.part.voltage < needed_rating(holding, facts.supply)
    ]
    if not thin:
        return None
    return (
        f"At {volt_text(facts.supply)} the rated voltage of {names(thin)} leaves little in "
        f"reserve; prefer one for {volt_text(_needed(thin, facts))} or more."
    )


def rating_unknown(facts: FitFacts) -> str | None:
    """Speak of capacitors whose rating nobody wrote down."""
    unknown = [holding for holding in facts.capacitors if holding.part.voltage is None]
    if not unknown or not facts.supply:
        return None
    return (
        f"No rated voltage is written down for {names(unknown)}; "
        f"check that it stands {volt_text(_needed(unknown, facts))} or more."
    )


def reversed_swing(facts: FitFacts) -> str | None:
    """Speak of polarised capacitors that the circuit charges both ways round."""
    polarised = _polarised(facts)
    if not (polarised and facts.circuit.alternating):
        return None
    return (
        "This circuit charges its capacitor both ways round, which ruins or bursts "
        f"{names(polarised)}; take a film or non-polar one."
    )


def polarised_series(facts: FitFacts) -> str | None:
    """Speak of polarised capacitors joined end to end."""
    if not (_polarised(facts) and _has_series(facts.networks["C"])):
        return None
    return (
        "Polarised capacitors in series share the voltage by their leakage, not by their value, "
        "and one of them may burst; use a single capacitor or non-polar ones."
    )


def polarity(facts: FitFacts) -> str | None:
    """Speak of which way round a polarised capacitor belongs."""
    polarised = _polarised(facts)
    if not polarised or facts.circuit.alternating:
        return None
    where = "the timing node" if facts.is_timed else "the side of the higher voltage"
    return f"Put the plus of {names(polarised)} to {where}: reversed, it leaks and may burst."


def class_2(facts: FitFacts) -> str | None:
    """Speak of ceramics that do not hold their value."""
    poor = [
        holding
        for holding in facts.capacitors
        if (technology := technology_of(holding.part)) is not None and technology.ceramic_class > 1
    ]
    if not poor:
        return None
    return (
        "Class 2 and 3 ceramics move by tens of percent with voltage, warmth and age; "
        f"take a film or C0G capacitor instead of {names(poor)}."
    )


def stray(facts: FitFacts) -> str | None:
    """Speak of capacitances that a hand nearby changes."""
    if not facts.is_timed or facts.c.value >= STRAY_FARAD:
        return None
    return (
        f"With only {farad_text(facts.c.value)} the strays of board and fingers (some 10 pF) "
        "count; use 1 nF or more, or time the built circuit."
    )


def capacitor_tolerance(facts: FitFacts) -> str | None:
    """Speak of an exactness that the capacitor's tolerance makes an illusion."""
    if not facts.is_timed:
        return None
    down, up = facts.c.low / facts.c.value - 1.0, facts.c.high / facts.c.value - 1.0
    wide = max(-down, up)
    rest = [facts.slots[name] for name in facts.circuit.resistors]
    others = [max(1.0 - r.low / r.value, r.high / r.value - 1.0) for r in rest]
    error = facts.circuit.error
    device = max(error.minus, error.plus, SIGMAS * facts.outlook.chief.device)
    if wide < COARSE or wide < 2.0 * max(*others, device):
        return None
    if all(holding.part.measured is not None for holding in facts.capacitors):
        return None
    missed = _paper_error(facts)
    if missed is not None and missed >= wide:
        return None
    paper = "an exact figure" if missed is None else f"the error of {_small(missed)}"
    return (
        f"The capacitor alone moves the {facts.circuit.outputs[0]} by "
        f"{format_percent(down, digits=2)} to {format_percent(up, digits=2, signed=True)}, "
        f"so {paper} on paper is decoration; measure the capacitor and ask again."
    )


def assumed_tolerance(facts: FitFacts) -> str | None:
    """Speak of tolerances that nobody wrote down."""
    assumed = [
        holding
        for holding in facts.holdings
        if holding.part.measured is None and tolerance_of(holding.part)[1]
    ]
    if not assumed:
        return None
    return (
        f"No tolerance is written down for {names(assumed)}, so the usual one is assumed; "
        "measure it or write its tolerance into the stock."
    )


def assumed_kind(facts: FitFacts) -> str | None:
    """Speak of capacitors whose technology nobody wrote down."""
    unknown: dict[str, list[Holding]] = {}
    for holding in facts.capacitors:
        if technology_of(holding.part) is None:
            unknown.setdefault(taken_for(holding.part), []).append(holding)
    if not unknown:
        return None
    said = " and ".join(
        f"{names(holdings)} counts as {_TAKEN.get(kind, kind)}"
        for kind, holdings in unknown.items()
    )
    return (
        f"No technology is written down, so {said}; write polyester, c0g or what it is beside it."
    )


def rough_count(facts: FitFacts) -> str | None:
    """Speak of drawers to look into first."""
    rough = [holding for holding in facts.holdings if holding.count.sureness is Sureness.ROUGH]
    if not rough:
        return None
    return f"The count of {names(rough)} is only rough; look into the drawer first."


def stored_charge(facts: FitFacts) -> str | None:
    """Speak of capacitors that stay charged."""
    farad = facts.c.value
    if not facts.capacitors or (farad < BIG_FARAD and farad * facts.supply < BIG_CHARGE):
        return None
    return (
        f"The capacitor ({farad_text(farad)}) holds its charge after switching off; "
        "discharge it through a resistor before touching or measuring it."
    )


def _needed(holdings: list[Holding], facts: FitFacts) -> float:
    """Return the rating in volt that would do for any of the holdings."""
    return max(needed_rating(holding, facts.supply) for holding in holdings)


def _polarised(facts: FitFacts) -> list[Holding]:
    """Return the picked capacitors that reverse voltage destroys."""
    return [holding for holding in facts.capacitors if is_polarised(holding.part)]


def _has_series(network: Network[Holding]) -> bool:
    if not isinstance(network, Group):
        return False
    return network.join is Join.SERIES or any(_has_series(child) for child in network.children)


def _paper_error(facts: FitFacts) -> float | None:
    """Return the largest error of an output that is to have one value; None where none is."""
    errors = [
        abs(facts.outlook.of(output).nominal / low - 1.0)
        for output, (low, high) in facts.wanted.items()
        if low == high and isfinite(facts.outlook.of(output).nominal)
    ]
    return max(errors, default=None)


def _small(error: float) -> str:
    """Return an error as a percentage; what is below the search's resolution as such."""
    return "less than 0.0001%" if error < NOISE else format_percent(error, digits=2)
