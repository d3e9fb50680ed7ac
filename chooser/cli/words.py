"""Words that more than one page shares: outputs, odds, picks, and lines that fit the width."""

from __future__ import annotations

import textwrap
from collections import Counter
from collections.abc import Callable

from chooser import quantities
from chooser.cautions import STANDING
from chooser.networks import Network, members
from chooser.parts import Holding

FAR = 10.0
"""Ratio of interval and target from which an error is told as a factor."""

WATCH = "Check the built circuit with a watch or counter."


def output_text(output: str, value: float, *, digits: int | None = None) -> str:
    """Write an output's value as people read it, in its own unit."""
    writers: dict[str, Callable[..., str]] = {
        "frequency": quantities.format_frequency,
        "duty": quantities.format_percent,
        "resistance": quantities.format_resistance,
        "capacitance": quantities.format_capacitance,
    }
    return writers.get(output, quantities.format_duration)(value, digits=digits)


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


def standing_lines(width: int | None) -> list[str]:
    """Say, once under an answer, what holds for every timing circuit."""
    return wrapped(" ".join([WATCH, *(caution.text for caution in STANDING)]), width)
