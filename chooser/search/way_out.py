"""What else the same stock can do where an interval is too long for its capacitors."""

from __future__ import annotations

from collections.abc import Callable, Collection
from dataclasses import replace

from chooser.cautions import Code
from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.networks import write_network
from chooser.quantities import (
    format_capacitance,
    format_duration,
    format_resistance,
    format_voltage,
)
from chooser.search.request import Fit, Request
from chooser.search.terms import Rank, Rule

USUAL_COUNTER = "HEF4060B"
"""The counter that is offered: one of the commonest (common practice, no source)."""

USUAL_SUPPLY = 9.0
"""Volt that the commands assume where none is said."""

ONE_SHOTS = frozenset({"monostable", "logic-monostable", "delay"})
"""Families whose single interval a counter can make as well."""

LEAST_SECONDS = 1.0
"""Shorter intervals do not need a counter (our limit)."""

Search = Callable[[Request], Fit | None]
"""Finds the first fit of a request, if any."""


def way_out(fits: Collection[Fit], request: Request, search: Search) -> tuple[str, ...]:
    """Name a circuit of the same stock that surely ends, where the first fit may not.

    Parameters
    ----------
    fits : the answer so far, best first. request : what was asked.
    search : asked for an oscillator and counter of the same interval.

    Returns
    -------
    Whole sentences; none where the first fit is sound or the interval is no long one.
    """
    if request.circuit.family not in ONE_SHOTS or request.target < LEAST_SECONDS:
        return ()
    inside = [fit for fit in fits if fit.in_band]
    if inside and not _doubtful(inside[0]):
        return ()
    said = []
    sound = next((n for n, fit in enumerate(fits, 1) if fit.in_band and not _doubtful(fit)), None)
    if sound is not None:
        said.append(f"Fit {sound} surely ends: its capacitor leaks less.")
    divided = _divided(request, search)
    if divided is not None:
        said.append(divided)
    return tuple(said)


def _doubtful(fit: Fit) -> bool:
    return any(caution.code is Code.MAY_NEVER_END for caution in fit.cautions)


def _divided(request: Request, search: Search) -> str | None:
    """Return what an oscillator and counter of the same stock would do, as a sentence."""
    chip = counter_named(USUAL_COUNTER)
    supply = request.circuit.supply
    if not chip.supply_min <= supply <= chip.supply_max:
        return None
    asked = replace(
        request,
        circuit=counter(chip, supply),
        rank=Rank.BALANCED,
        top=1,
        lifted=request.lifted & {Rule.MANY_PARTS, Rule.CERAMIC},
    )
    fit = search(asked)
    if fit is None or not fit.in_band:
        return None
    r, c = (_written(fit, name) for name in ("R", "C"))
    made = format_duration(fit.outlook.chief.nominal, digits=4)
    command = f"chooser fit counter {format_duration(request.target).replace(' ', '')}"
    if supply != USUAL_SUPPLY:
        command += f" --supply {format_voltage(supply).replace(' ', '')}"
    return (
        f"The same stock makes it with an oscillator and counter ({chip.name}, output "
        f"{fit.variant.name}): R = {r} and C = {c} for {made}; see `{command}`."
    )


def _written(fit: Fit, name: str) -> str:
    write = format_capacitance if name == "C" else format_resistance
    return write_network(fit.slot(name).network, lambda holding: write(holding.part.effective))
