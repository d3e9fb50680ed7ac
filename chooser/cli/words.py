"""Words that more than one page shares: outputs, wishes, odds, picks, and lines that fit."""

from __future__ import annotations

import textwrap
from collections import Counter
from collections.abc import Callable

from chooser import quantities
from chooser.cautions import STANDING
from chooser.circuits.circuit import TIMED, Circuit
from chooser.networks import Network, members
from chooser.parts import Holding
from chooser.search.request import Target

FAR = 10.0
"""Ratio of interval and target from which an error is told as a factor."""

WATCH = "Check the built circuit with a watch or counter."


STOPS = {"frequency": (0.0,), "duty": (0.0, 1.0)}
"""Values that belong to no oscillation; a time that is endless tells that by itself."""


def output_text(output: str, value: float, *, digits: int | None = None) -> str:
    """Write an output's value as people read it, in its own unit.

    A time that does not end is "never", and the frequency or duty of what stands still "stops".
    """
    if value != value or value in STOPS.get(output, ()):  # noqa: PLR0124 - no number
        return "never" if output in TIMED else "stops"
    writers: dict[str, Callable[..., str]] = {
        "frequency": quantities.format_frequency,
        "duty": quantities.format_percent,
        "resistance": quantities.format_resistance,
        "capacitance": quantities.format_capacitance,
    }
    return writers.get(output, quantities.format_duration)(value, digits=digits)


def ends_text(output: str, low: float, high: float | None) -> str:
    """Write the ends of a worst case, to three digits; None stands for what may never end."""
    endless = "never" if output in TIMED else "stops"
    most = endless if high is None else output_text(output, high, digits=3)
    return f"{output_text(output, low, digits=3)} to {most}"


def place_texts(circuit: Circuit) -> list[str]:
    """Say what a circuit is built around, at which supply, and what else was decided."""
    volt = f"at {quantities.format_voltage(circuit.supply, digits=4)}" if circuit.supply else ""
    return [text for text in (f"{circuit.device} {volt}".strip(), circuit.setting) if text]


def shown_output(target: Target) -> str:
    """Return the output that is shown for a target: a frequency where it was asked for."""
    return target.output if target.frequency is None else "frequency"


def output_name(output: str, called: str = "") -> str:
    """Return how an output is told: as it was asked for, and which level that is."""
    return f"{called} ({output})" if called else output


def wanted_text(target: Target) -> str:
    """Write what is wanted of an output."""
    if target.frequency is not None:
        return quantities.format_frequency(target.frequency)
    if target.is_range:
        low, high = (output_text(target.output, end, digits=6) for end in (target.low, target.high))
        return f"{low} to {high}"
    return output_text(target.output, target.low)


def accepted_text(target: Target, within: float) -> str:
    """Write the band that is accepted; of a frequency it is the band of its period, in hertz."""
    output, ends = shown_output(target), target.band(within)
    if target.frequency is not None:
        ends = target.frequency / (1.0 + within), target.frequency / (1.0 - within)
    low, high = (output_text(output, end, digits=6) for end in ends)
    return f"{low} to {high}"


def chance_text(chance: float) -> str:
    """Write a probability as people count: boards of ten or of a hundred."""
    if chance >= 0.995:  # noqa: PLR2004 - rounds to all of them
        return "nearly all"
    if chance < 0.005:  # noqa: PLR2004 - rounds to none
        return "hardly any"
    return f"{round(chance * 100)} of 100"


def picked(network: Network[Holding]) -> list[tuple[Holding, int]]:
    """Return each holding of a network once, with how often a board takes from it."""
    by_id = {holding.id: holding for holding in members(network)}
    counts = Counter(holding.id for holding in members(network))
    return [(by_id[number], count) for number, count in counts.items()]


def wrapped(
    text: str, width: int | None, indent: str = "", hanging: str | None = None
) -> list[str]:
    """Return a text in lines that fit the width, or in one line where there is none."""
    if width is None:
        return [indent + text]
    return textwrap.wrap(
        text,
        max(width, 20),
        initial_indent=indent,
        subsequent_indent=indent if hanging is None else hanging,
        break_on_hyphens=False,
    )


def fitted(table: list[str], width: int | None, hanging: str) -> list[str]:
    """Break the lines of a table that was folded and is still too wide."""
    if width is None:
        return table
    return [
        piece
        for line in table
        for piece in ([line] if len(line) <= width else wrapped(line, width, hanging=hanging))
    ]


def standing_lines(width: int | None) -> list[str]:
    """Say, once under an answer, what holds for every timing circuit."""
    return wrapped(" ".join([WATCH, *(caution.text for caution in STANDING)]), width)
