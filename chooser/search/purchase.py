"""The one part to buy that would bring the circuit into the band."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import product

import numpy as np

from chooser.circuits.circuit import charging_resistance, outputs_of
from chooser.circuits.leakage import leak_conductance
from chooser.parts import Holding, Kind, Part
from chooser.preferred import values_between
from chooser.quantities import (
    format_capacitance,
    format_duration,
    format_percent,
    format_resistance,
)
from chooser.search.joint import errors_of, in_ranges
from chooser.search.pools import Floats, Ints
from chooser.search.request import Request
from chooser.search.slots import charging_bounds
from chooser.search.terms import Rule
from chooser.search.wanted import FAR_OHM, LEAST_OHM, aim_of

BIGGEST_FILM = 4.7e-6
"""Farad up to which film capacitors are commonly sold (common practice, no source)."""

BIGGEST_CAPACITOR = 2.2e-3
"""Farad beyond which no capacitor is suggested: it would load the discharge pin."""

SOLD_OHM = (1.0, 10e6)
"""Resistors that every dealer has, in ohm (common practice, no source)."""

MOST_OWNED = 40_000
"""Ways to choose the parts beside the bought one that are looked at."""

NEIGHBOURS = 4
"""Values on sale around the wanted one that are weighed."""


@dataclass(frozen=True, slots=True)
class Purchase:
    """A part to buy and the holdings it works with.

    Attributes
    ----------
    bought : the part. slot : where it goes. series : the E-series it is from.
    owned : the holding used beside it in each other slot.
    output : the chief output they make, as people read it. error : relative to the target.
    boards : how many are built, each with one of the bought parts.
    """

    bought: Part
    slot: str
    series: str
    owned: tuple[tuple[str, Holding], ...]
    output: str
    error: float
    boards: int = 1

    def __str__(self) -> str:
        bought = self.bought
        what = f"{_value(bought, bought.value)} {bought.technology or ''}".rstrip()
        number = "One" if self.boards == 1 else f"{self.boards} of"
        several = len(self.owned) > 1
        beside = " and ".join(
            f"the {_value(holding.part, holding.part.effective)} in drawer {holding.drawer}"
            + (f" as {name}" if several else "")
            for name, holding in self.owned
        )
        use = f"bought{f' as {self.slot}' if several else ''} for {beside}" if beside else "bought"
        return (
            f"{number} {what} {bought.kind} ({self.series}) {use} would make {self.output} "
            f"({format_percent(self.error, digits=2, signed=True)})."
        )


def one_purchase(
    resistors: Sequence[Holding], capacitors: Sequence[Holding], request: Request
) -> Purchase | None:
    """Find the single purchase that gets into the band, a resistor before a capacitor.

    Parameters
    ----------
    resistors, capacitors : usable holdings; single ones go with the bought part.
    request : what is asked.

    Returns
    -------
    The purchase with the smallest error, from E24, else from E96 for resistors; E6 for
    capacitors. None where no single part helps beside the first MOST_OWNED ways to use what is
    owned, or of a counter for any output.
    """
    for variant in request.circuit.variants:
        circuit = replace(request.circuit, variants=(variant,))
        found = _one_for(resistors, capacitors, replace(request, circuit=circuit))
        if found is not None:
            return found
    return None


def _one_for(
    resistors: Sequence[Holding], capacitors: Sequence[Holding], request: Request
) -> Purchase | None:
    """Find the purchase for a circuit whose output is decided."""
    circuit = request.circuit
    stock = {
        name: _several(capacitors if name == "C" else resistors, request.boards)
        for name in circuit.slots
    }
    for series in ("E24", "E96"):
        found = [_bought(stock, name, series, request) for name in circuit.resistors]
        best = min(filter(None, found), key=lambda each: abs(each.error), default=None)
        if best is not None:
            return best
    return _bought(stock, "C", "E6", request) if circuit.capacitor else None


def _several(holdings: Sequence[Holding], boards: int) -> list[Holding]:
    return [each for each in holdings if each.free is None or each.free >= boards]


def _bought(
    stock: dict[str, list[Holding]], slot: str, series: str, request: Request
) -> Purchase | None:
    """Return the best value of a series for one slot, beside what is owned for the others."""
    others = [name for name in request.circuit.slots if name != slot]
    combinations = list(_combinations([stock[name] for name in others], request.boards))
    bought = np.array(_on_sale(slot, series, request))
    if not combinations or not len(bought):
        return None
    values = {
        name: np.array([way[place].part.effective for way in combinations])
        for place, name in enumerate(others)
    }
    leak = _owned_leaks(combinations, others, request)
    choice = _nearest(bought, _wanted(slot, values, leak, request))
    columns = {name: np.repeat(column, NEIGHBOURS) for name, column in values.items()}
    columns[slot] = bought[choice.ravel()]
    leak = np.repeat(leak, NEIGHBOURS)
    if slot == "C" and not request.circuit.lossless:
        own = [
            leak_conductance(_part("C", float(value)), request.circuit.supply) for value in bought
        ]
        leak = np.array([each.typical for each in own])[choice.ravel()]
    errors = _errors(columns, leak, request)
    best = int(np.argmin(np.round(errors, 4)))
    if not errors[best] <= request.within:
        return None
    part = _part(slot, float(columns[slot][best]))
    pairs = tuple(zip(others, combinations[best // NEIGHBOURS], strict=True))
    made = {name: float(column[best]) for name, column in columns.items()}
    output, error = _worst(made, float(leak[best]), request)
    return Purchase(part, slot, series, pairs, output, error, request.boards)


def _nearest(bought: Floats, wanted: Floats) -> Ints:
    """Return, for each wanted value, the places of its neighbours on sale: (n, NEIGHBOURS)."""
    place = np.searchsorted(bought, np.nan_to_num(wanted, nan=0.0, posinf=np.inf))
    around = place[:, None] + np.arange(NEIGHBOURS) - NEIGHBOURS // 2
    return np.asarray(np.clip(around, 0, len(bought) - 1))


def _wanted(slot: str, values: dict[str, Floats], leak: Floats, request: Request) -> Floats:
    """Return what the bought part should be beside each way to fill the other slots.

    Of two resistors near enough: what is bought is a neighbour, and every neighbour is weighed.
    """
    circuit = request.circuit
    if not circuit.resistors or not circuit.capacitor:
        return np.full(len(leak), request.target)
    if len(circuit.resistors) == 1:
        time = request.target / circuit.variants[0].scale
        if slot == "R":
            return circuit.law.resistance(time, values["C"], leak)
        with np.errstate(divide="ignore"):
            return np.asarray(time / circuit.law.interval(values["R"], 1.0, 0.0))
    return _wanted_of_pair(slot, values, leak, request)


def _wanted_of_pair(slot: str, values: dict[str, Floats], leak: Floats, request: Request) -> Floats:
    law, (high, low) = request.circuit.twin, aim_of(request)
    by_period = any(target.output == "period" for target in request.targets)
    with np.errstate(all="ignore"):
        if slot == "C":
            made = law.times((values["RA"], values["RB"]), 1.0, 0.0)
            if by_period:
                return np.asarray((high + low) / (made[0] + made[1]))
            return np.asarray(np.sqrt(high / made[0] * low / made[1]))
        c = values["C"]
        if slot == "RA":
            other = law.times((FAR_OHM, values["RB"]), c, leak)[1]
            time = high + low - other if by_period else np.full(len(c), high)
            return law.ra_for(np.maximum(time, 1e-3 * high), values["RB"], c, leak)
        if by_period:
            rest = law.times((values["RA"], LEAST_OHM), c, leak)[0]
            left = np.maximum(high + low - rest, 1e-3 * low) / (2.0 if law.through_both else 1.0)
            return law.rb_for(left, values["RA"], c, leak)
        return law.rb_for(np.full(c.shape, low), values["RA"], c, leak)


def _combinations(choices: list[list[Holding]], boards: int) -> Iterator[tuple[Holding, ...]]:
    """Yield the ways to fill the other slots with single parts, as far as they are looked at."""
    ways = product(*choices)
    for number, way in enumerate(ways):
        if number >= MOST_OWNED:
            return
        taken = Counter(holding.id for holding in way)
        if all(h.free is None or h.free >= taken[h.id] * boards for h in way):
            yield way


def _on_sale(slot: str, series: str, request: Request) -> list[float]:
    if slot == "C":
        least, most = max(request.circuit.least_farad, 1e-12), BIGGEST_CAPACITOR
        if request.circuit.alternating and Rule.POLARISED_SWING not in request.lifted:
            most = BIGGEST_FILM
        return values_between(series, least, most) if least <= most else []
    return values_between(series, *SOLD_OHM)


def _part(slot: str, value: float) -> Part:
    if slot != "C":
        return Part(Kind.RESISTOR, value)
    technology = "polyester" if value <= BIGGEST_FILM else "electrolytic"
    return Part(Kind.CAPACITOR, value, technology=technology)


def _owned_leaks(
    combinations: Sequence[tuple[Holding, ...]], others: Sequence[str], request: Request
) -> Floats:
    """Return the typical leak of each combination's capacitor in siemens; 0 where it has none."""
    circuit = request.circuit
    if circuit.lossless or "C" not in others:
        return np.zeros(len(combinations))
    place = others.index("C")
    leaks = (leak_conductance(way[place].part, circuit.supply).typical for way in combinations)
    return np.fromiter(leaks, np.float64, len(combinations))


def _errors(columns: dict[str, Floats], leak: Floats, request: Request) -> Floats:
    """Return the size of each combination's error; infinity where a rule forbids it."""
    circuit = request.circuit
    rs = tuple(columns[name] for name in circuit.resistors)
    farad = columns.get("C", np.ones(len(leak)))
    with np.errstate(invalid="ignore", divide="ignore"):
        times = tuple(
            circuit.variants[0].scale * time for time in circuit.typical.times(rs, farad, leak)
        )
        errors = errors_of(request, times)
    allowed = np.isfinite(errors) & in_ranges(request, times)
    if rs and circuit.capacitor:
        least, most = charging_bounds(leak, request)
        largest = np.maximum(charging_resistance(circuit, rs), np.max(rs, axis=0))
        allowed &= (largest <= most) & (np.min(rs, axis=0) >= least)
    if circuit.capacitor and Rule.STRAYS not in request.lifted:
        allowed &= farad >= circuit.least_farad
    if circuit.capacitor and Rule.LARGE not in request.lifted:
        allowed &= farad <= circuit.most_farad
    return np.where(allowed, errors, np.inf)


def _worst(values: dict[str, float], leak: float, request: Request) -> tuple[str, float]:
    """Return what the output with the largest error is, as text, and that error."""
    circuit = request.circuit
    rs = [values[name] for name in circuit.resistors]
    times = circuit.typical.times(rs, values.get("C", 1.0), leak)
    scale = circuit.variants[0].scale
    outputs = outputs_of(circuit, [scale * float(time) for time in times])
    errors = {target: target.error(float(outputs[target.output])) for target in request.targets}
    target = max(errors, key=lambda each: abs(errors[each]))
    made = _output_text(target.output, float(outputs[target.output]))
    pin = circuit.variants[0].name
    return f"{made}{f' at output {pin}' if pin else ''}", errors[target]


def _output_text(output: str, value: float) -> str:
    if output == "resistance":
        return format_resistance(value, digits=4)
    if output == "capacitance":
        return format_capacitance(value, digits=4)
    if output == "duty":
        return f"a duty of {format_percent(value, digits=3)}"
    name = "" if output == "interval" else f"a {output} time of " if output != "period" else ""
    return f"{name}{format_duration(value, digits=4)}"


def _value(part: Part, value: float) -> str:
    write = format_capacitance if part.kind is Kind.CAPACITOR else format_resistance
    return write(value)
