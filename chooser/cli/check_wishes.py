"""How a verdict compares with what was wanted, and with what the formula promises on paper."""

from __future__ import annotations

from math import isfinite

import numpy as np

from chooser.cautions import Code
from chooser.circuits.circuit import TIMED
from chooser.cli.check_words import nominal_text, percent_text
from chooser.cli.words import (
    FAR,
    accepted_text,
    chance_text,
    output_name,
    output_text,
    shown_output,
    wanted_text,
)
from chooser.interval import Reading
from chooser.search.request import Target
from chooser.verdict import Verdict

_TOO_FAST = (Code.SHORT_INTERVAL, Code.FREQUENCY_LIMIT)


def wish_sentences(verdict: Verdict) -> list[str]:
    """Compare each output with its target, and say how many builds land in the bands."""
    said = [_wish(verdict, target) for target in verdict.targets]
    if not said:
        return []
    band = "the band" if len(said) == 1 else "all bands"
    if any(caution.code in _TOO_FAST for caution in verdict.cautions):
        return [*said, f"How many builds lie in {band} is unknown: the device's delays rule."]
    return [*said, f"Of builds alike, {chance_text(verdict.outlook.chance)} lie in {band}."]


def _wish(verdict: Verdict, target: Target) -> str:
    """Compare one output with its target; a frequency that was asked for as a frequency."""
    output = shown_output(target)
    reading, wanted = verdict.outlook.of(output), wanted_text(target)
    name = output_name(output, target.called)
    name, text = f"{name[:1].upper()}{name[1:]}", error_text(reading, _as_shown(target))
    ratio = 1.0 + _as_shown(target).error(reading.nominal)
    if not 1.0 / FAR < ratio < FAR:
        return f"{name}: {text}, not {wanted}."
    accepted = accepted_text(target, verdict.within)
    inside = "" if target.is_range else f" ({accepted} accepted)"
    return f"{name}: {text}, where {wanted} was wanted{inside}."


def _as_shown(target: Target) -> Target:
    """Return the target in the unit that it was asked in."""
    if target.frequency is None:
        return target
    return Target("frequency", target.frequency, target.frequency)


def error_text(reading: Reading, target: Target) -> str:
    """Write how far an output is from its target; far ones as a factor."""
    ratio = 1.0 + target.error(reading.nominal)
    more, less = ("long", "short") if target.output in TIMED else ("high", "low")
    if not isfinite(ratio) or ratio <= 0.0:
        return nominal_text(reading)
    if ratio >= FAR:
        return f"{_factor(ratio)} x too {more}: {nominal_text(reading)}"
    if ratio <= 1.0 / FAR:
        return f"{_factor(1.0 / ratio)} x too {less}: {nominal_text(reading)}"
    if target.is_range and ratio == 1.0:
        return "inside the range"
    return f"{percent_text(ratio - 1.0, signed=True)} off"


def _factor(ratio: float) -> str:
    """Write a factor with two digits that mean something."""
    return f"{float(f'{ratio:.2g}'):,.0f}"


def paper_sentences(verdict: Verdict) -> list[str]:
    """Say of a circuit that never ends what its formula makes without any losses."""
    chief = verdict.outlook.chief
    if is_ending(chief):
        return []
    circuit = verdict.circuit
    ohms = [verdict.slots[name].value for name in circuit.resistors]
    with np.errstate(all="ignore"):
        times = circuit.typical.lossless().times(ohms, verdict.slots["C"].value, 0.0)
    time = verdict.variant.scale * float(sum(times))
    if not 0.0 < time < float("inf"):
        return []
    what = "" if chief.output == "interval" else f"a {chief.output} of "
    made = output_text(chief.output, time, digits=3)
    return [f"Without any losses it would make {what}{made}."]


def is_ending(reading: Reading) -> bool:
    """Tell whether an output has a nominal at all."""
    return isfinite(reading.nominal)
