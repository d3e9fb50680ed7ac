"""The words for parts, causes and networks that a verdict is told in."""

from __future__ import annotations

from chooser.causes import Cause
from chooser.cli.stock_view import describe_fully, value_text
from chooser.cli.tables import visible
from chooser.climate import Mover
from chooser.networks import Network, write_network
from chooser.parts import Holding, Kind, Part
from chooser.verdict import Verdict


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
