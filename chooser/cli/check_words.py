"""The words for parts, causes, networks and figures that a verdict is told in.

No figure has more digits than its spread leaves a meaning.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import ceil, inf, log10

from chooser import quantities
from chooser.causes import Cause
from chooser.cli.stock_view import describe_fully, value_text
from chooser.cli.tables import visible
from chooser.cli.words import output_name, output_text
from chooser.climate import Mover
from chooser.interval import Reading
from chooser.networks import Network, write_network
from chooser.parts import Holding, Kind, Part
from chooser.search.request import Target
from chooser.verdict import Verdict

_SIGMAS = 6.0
"""Spreads that fit between the ends of a worst case, as a rule."""


def network_text(network: Network[Holding]) -> str:
    """Write a network by the values that are calculated with."""
    return write_network(network, lambda holding: value_text(holding.part, holding.part.effective))


def pick_text(holding: Holding, count: int = 1) -> str:
    """Say what is taken how often, and from which drawer; a typed part lies in none."""
    where = f" (holding {holding.id}, drawer {visible(holding.drawer)})" if holding.id > 0 else ""
    return f"{f'{count} x ' if count > 1 else ''}{part_text(holding.part)}{where}"


def part_text(part: Part) -> str:
    """Say all that is known of a part, but for the kind, which the slot tells."""
    said = describe_fully(part)
    told = part.kind in (Kind.RESISTOR, Kind.CAPACITOR)
    return said.replace(f" {part.kind}", "", 1) if told else said


def cause_text(cause: Cause | Mover, verdict: Verdict) -> str:
    """Name a cause: the part and the slot it is in, or the device."""
    if cause.holding is None:
        return verdict.circuit.device or "the device"
    count = f"{cause.count} x " if isinstance(cause, Cause) and cause.count > 1 else ""
    part = cause.holding.part
    known = [
        value_text(part, part.value),
        "measured" if part.measured is not None else "",
        part.technology or "",
    ]
    return f"{count}{' '.join(word for word in known if word)} ({cause.slot})"


def nominal_text(reading: Reading) -> str:
    """Write a nominal, or what stands for one that is none."""
    return output_text(reading.output, reading.nominal, digits=digits_of(reading))


def digits_of(reading: Reading) -> int:
    """Return how many digits of a nominal mean something, at least three."""
    spread = reading.spread
    if reading.high is not None and 0.0 < reading.nominal < inf:
        # What only the corners know (output levels, thresholds) is not in the spread.
        spread = max(spread, (reading.high - reading.low) / reading.nominal / _SIGMAS)
    if not 0.0 < spread < inf:
        return 6
    return min(max(1 - ceil(log10(spread)), 3), 6)


def percent_text(fraction: float, *, signed: bool = False) -> str:
    """Write a fraction as percent with two digits; very small ones as being so."""
    if abs(fraction) < 1e-5:  # noqa: PLR2004 - less than a thousandth of a percent
        return "0%" if fraction == 0.0 else "less than 0.001%"
    return quantities.format_percent(fraction, digits=2, signed=signed)


def called(output: str, targets: Sequence[Target]) -> str:
    """Return what an output was called by who asked; "" where by its own name."""
    return next((target.called for target in targets if target.output == output), "")


def time_name(output: str, targets: Sequence[Target]) -> str:
    """Return what a time is called in a sentence: "interval", "high time", "on time (low)"."""
    if output not in ("high", "low"):
        return output
    asked = called(output, targets)
    return output_name(output, f"{asked} time") if asked else f"{output} time"
