"""How a verdict is shown: a page for people, an object for programs.

A page runs from what matters at once (what it does, whether that is what was wanted) to what is
only looked up (temperature, supply), then the cautions. No figure has more digits than its spread
leaves a meaning.
"""

from __future__ import annotations

import shutil
import sys
from collections.abc import Iterable
from math import ceil, inf, isfinite, log10

from chooser import quantities
from chooser.causes import Cause
from chooser.cautions import METER_OHM, Code
from chooser.circuits.circuit import TIMED
from chooser.cli.check_json import verdict_json
from chooser.cli.check_words import cause_text, network_text, pick_text
from chooser.cli.stock_view import print_json
from chooser.cli.tables import print_line, table_lines
from chooser.cli.words import (
    FAR,
    chance_text,
    output_text,
    picked,
    standing_lines,
    wrapped,
)
from chooser.climate import Climate, widest
from chooser.interval import Reading
from chooser.search.request import Target
from chooser.verdict import PerVolt, Verdict

BAR = 20
"""Columns of a bar that stands for the whole spread."""

LEAST_SHARE = 0.001
"""Share of the spread below which a figure says no more than that it is small."""

WORTH_A_WORD = 0.001
"""Relative change below which nothing is said of what makes it."""

INDENT = "    "
_SIGMAS = 6.0
"""Spreads that fit between the ends of a worst case, as a rule."""

_TOO_FAST = (Code.SHORT_INTERVAL, Code.FREQUENCY_LIMIT)


def print_verdict(verdict: Verdict, *, as_json: bool) -> None:
    """Print a verdict on stdout."""
    if as_json:
        print_json(verdict_json(verdict))
        return
    width = shutil.get_terminal_size().columns if sys.stdout.isatty() else None
    for line in verdict_lines(verdict, width):
        print_line(line)


def verdict_lines(verdict: Verdict, width: int | None) -> list[str]:
    """Lay a verdict out for a person.

    Parameters
    ----------
    verdict : the verdict.
    width : columns of the terminal, or None where lines may be as long as they need.
    """
    sections = (
        [*wrapped(_heading(verdict), width), *_slots(verdict, width)],
        [*_outputs(verdict, width), *_sentences(_wishes(verdict), width)],
        _sentences(_first(verdict), width),
        _causes(verdict, width),
        _sentences(_losses(verdict), width),
        _temperature(verdict, width),
        _sentences(_supply(verdict.per_volt, verdict.outlook.chief.output), width),
        _cautions(verdict, width),
        _standing(verdict, width),
    )
    lines: list[str] = []
    for section in sections:
        lines += ["", *section] if lines and section else section
    return lines


def _heading(verdict: Verdict) -> str:
    circuit = verdict.circuit
    device = f", {circuit.device}" if circuit.device else ""
    volt = quantities.format_voltage(circuit.supply, digits=4) if circuit.supply else ""
    output = f", output {verdict.variant.name}" if verdict.variant.name else ""
    return f"{circuit.title}{device}{' at ' if volt else ''}{volt}{output}."


def _slots(verdict: Verdict, width: int | None) -> list[str]:
    """Say what is in each slot, and what is known of every part."""
    lines: list[str] = []
    for slot in verdict.circuit.slots:
        network = verdict.networks[slot]
        parts = picked(network)
        text = pick_text(*parts[0]) if len(parts) == 1 and parts[0][1] == 1 else ""
        if not text:
            value = _value(slot, verdict.slots[slot].value)
            text = f"{network_text(network)} = {value}"
            text += f": {'; '.join(pick_text(holding, count) for holding, count in parts)}"
        lines += wrapped(f"{slot} = {text}", width, "  ", INDENT)
    return lines


def _value(slot: str, value: float) -> str:
    write = quantities.format_capacitance if slot == "C" else quantities.format_resistance
    return write(value, digits=4)


def _outputs(verdict: Verdict, width: int | None) -> list[str]:
    headings = ("output", "nominal", "worst case", "1 sigma")
    rows = [
        [
            reading.output,
            _nominal(reading),
            _ends(reading.output, reading.low, reading.high),
            _percent(reading.spread) if isfinite(reading.spread) else "",
        ]
        for reading in verdict.outlook.readings
    ]
    return _fitted(table_lines(headings, rows, (), width), width)


def _nominal(reading: Reading) -> str:
    return _text(reading.output, reading.nominal, _digits(reading))


def _digits(reading: Reading) -> int:
    """Return how many digits of a nominal mean something, at least three."""
    spread = reading.spread
    if reading.high is not None and 0.0 < reading.nominal < inf:
        # What only the corners know (output levels, thresholds) is not in the spread.
        spread = max(spread, (reading.high - reading.low) / reading.nominal / _SIGMAS)
    if not 0.0 < spread < inf:
        return 6
    return min(max(1 - ceil(log10(spread)), 3), 6)


def _text(output: str, value: float, digits: int) -> str:
    """Write an output; one that is no number belongs to an output that is stuck."""
    if output == "frequency" and value == 0.0:
        return "stops"
    return output_text(output, value, digits=digits) if value == value else "stuck"  # noqa: PLR0124


def _ends(output: str, low: float, high: float | None) -> str:
    """Write the ends of a worst case."""
    most = "never" if high is None else _text(output, high, 3)
    return f"{_text(output, low, 3)} to {most}"


def _percent(fraction: float, *, signed: bool = False) -> str:
    if abs(fraction) < 1e-5:  # noqa: PLR2004 - less than a thousandth of a percent
        return "0%" if fraction == 0.0 else "less than 0.001%"
    return quantities.format_percent(fraction, digits=2, signed=signed)


def _wishes(verdict: Verdict) -> list[str]:
    """Compare each output with its target, and say how many builds land in the bands."""
    said = [_wish(verdict, target) for target in verdict.targets]
    if not said:
        return []
    band = "the band" if len(said) == 1 else "all bands"
    if any(caution.code in _TOO_FAST for caution in verdict.cautions):
        return [*said, f"How many builds lie in {band} is unknown: the device's delays rule."]
    return [*said, f"Of builds alike, {chance_text(verdict.outlook.chance)} lie in {band}."]


def _wish(verdict: Verdict, target: Target) -> str:
    reading = verdict.outlook.of(target.output)
    low, high = (output_text(target.output, end, digits=6) for end in target.band(verdict.within))
    wanted = f"{low} to {high}" if target.is_range else output_text(target.output, target.low)
    name, text = _capital(target.output), error_text(reading, target)
    ratio = 1.0 + target.error(reading.nominal)
    if not 1.0 / FAR < ratio < FAR:
        return f"{name}: {text}, not {wanted}."
    inside = "" if target.is_range else f" ({low} to {high} accepted)"
    return f"{name}: {text}, where {wanted} was wanted{inside}."


def error_text(reading: Reading, target: Target) -> str:
    """Write how far an output is from its target; far ones as a factor."""
    ratio = 1.0 + target.error(reading.nominal)
    more, less = ("long", "short") if target.output in TIMED else ("high", "low")
    if not isfinite(ratio) or ratio <= 0.0:
        return _nominal(reading)
    if ratio >= FAR:
        return f"{_factor(ratio)} x too {more}: {_nominal(reading)}"
    if ratio <= 1.0 / FAR:
        return f"{_factor(1.0 / ratio)} x too {less}: {_nominal(reading)}"
    if target.is_range and ratio == 1.0:
        return "inside the range"
    return f"{_percent(ratio - 1.0, signed=True)} off"


def _factor(ratio: float) -> str:
    """Write a factor with two digits that mean something."""
    return f"{float(f'{ratio:.2g}'):,.0f}"


def _first(verdict: Verdict) -> list[str]:
    first = verdict.first
    if first is None:
        return []
    later = verdict.outlook.of(first.output)
    time = _text(first.output, first.nominal, _digits(later))
    than = "longer" if first.nominal >= later.nominal else "shorter"
    ends = _ends(first.output, first.low, first.high)
    return [f"The first {_called(first.output)} after power-up is {than}: {time} ({ends})."]


def _causes(verdict: Verdict, width: int | None) -> list[str]:
    """Lay out which part is the problem, with a bar for each; the bars go first."""
    if not verdict.causes:
        return []
    output = verdict.outlook.chief.output
    spread = _percent(verdict.outlook.chief.spread)
    title = f"What makes the spread of the {output} ({spread}, 1 sigma):"
    headings = ("cause", "share", "without it", "")
    rows = [
        [cause_text(cause, verdict), _share(cause), _percent(cause.spread_without), _bar(cause)]
        for cause in verdict.causes
    ]
    table = table_lines(headings, rows, ("share", "without it"))
    if width is not None and max(map(len, table)) > width:
        table = table_lines(headings[:3], [row[:3] for row in rows], headings[1:3])
    if width is not None and max(map(len, table)) > width:
        table = table_lines(headings[:3], [row[:3] for row in rows], headings[1:3], width, "cause")
    return [*wrapped(title, width), *_fitted(table, width)]


def _share(cause: Cause) -> str:
    if cause.share < LEAST_SHARE:
        return "0%" if cause.share == 0.0 else "< 0.1%"
    text = f"{cause.share * 100:.{0 if 0.1 <= cause.share < 0.995 else 1}f}%"  # noqa: PLR2004
    return text.replace(".0%", "%")


def _bar(cause: Cause) -> str:
    return "#" * round(cause.share * BAR)


def _losses(verdict: Verdict) -> list[str]:
    """Say what is lost at the trip point, what that costs, and what a meter would."""
    leakage = verdict.leakage
    if leakage is None:
        return []
    said = []
    if leakage.ratio < inf or leakage.ratio_limit < inf:
        costs = (
            f"that makes the {_called(leakage.output)} {_longer(leakage.stretch)}, at the limits "
            f"{_longer(leakage.stretch_limit)}"
        )
        if leakage.stretch_limit < WORTH_A_WORD:
            costs = "leakage hardly counts"
        said.append(
            f"At the trip point the charging current is {_times(leakage.ratio)} what leaks, and "
            f"with all at their limits {_times(leakage.ratio_limit)}; {costs}."
        )
    told = any(caution.code is Code.METER_ON_NODE for caution in verdict.cautions)
    if leakage.metered is not None and not told:
        digits = _digits(verdict.outlook.of(leakage.output))
        time = _text(leakage.output, leakage.metered, digits)
        made = time if isfinite(leakage.metered) else "endless"
        ohm = quantities.format_resistance(METER_OHM)
        said.append(f"A {ohm} meter on the timing node would make it {made}.")
    return said


def _called(output: str) -> str:
    """Return what a time is called in a sentence."""
    return f"{output} time" if output in ("high", "low") else output


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _times(ratio: float) -> str:
    return f"{float(f'{ratio:.2g}'):,g} times" if ratio < inf else "far above"


def _longer(stretch: float) -> str:
    if not isfinite(stretch):
        return "endless"
    return f"{_percent(stretch)} longer" if stretch > 0.0 else "no longer"


def _temperature(verdict: Verdict, width: int | None) -> list[str]:
    """Lay out the ends of the temperatures, and say what moves most."""
    climates = verdict.climates
    if not climates:
        return []
    chief = verdict.outlook.chief.output
    rows = [
        [
            quantities.format_temperature(climate.celsius, digits=4),
            _nominal(climate.outlook.chief),
            _ends(chief, climate.outlook.chief.low, climate.outlook.chief.high),
        ]
        for climate in climates
    ]
    if len(climates) > 1:
        rows.append(["both", "", _ends(chief, *widest(climates, chief))])
    table = table_lines(("temperature", chief, "worst case"), rows, ("temperature",), width)
    return [
        *_fitted(table, width),
        *_sentences((_moved(each, verdict) for each in climates), width),
    ]


def _moved(climate: Climate, verdict: Verdict) -> str:
    """Say what moves the chief output most at one temperature."""
    mover = climate.mover
    said = []
    if mover is not None and mover.size >= WORTH_A_WORD:
        name = cause_text(mover, verdict)
        ends = f"{_percent(mover.least, signed=True)} to {_percent(mover.most, signed=True)}"
        said.append(f"{name} moves it most, by {ends}")
    if climate.by_leakage == inf:
        said.append("the leakage alone makes it endless")
    elif abs(climate.by_leakage) >= WORTH_A_WORD:
        said.append(f"the leakage moves it by {_percent(climate.by_leakage, signed=True)}")
    where = quantities.format_temperature(climate.celsius, digits=4)
    return f"At {where} {', and '.join(said) if said else 'nothing moves it to speak of'}."


def _supply(per_volt: PerVolt | None, output: str) -> list[str]:
    """Say what one volt more of supply does."""
    if per_volt is None:
        return []
    said = []
    if per_volt.formula is not None and abs(per_volt.formula) >= WORTH_A_WORD / 10:
        said.append(f"by {_percent(per_volt.formula, signed=True)} by its formula")
    if per_volt.device:
        said.append(f"by up to {_percent(per_volt.device)} either way by the device's own drift")
    if not said:
        return [] if per_volt.formula is None else [f"The supply hardly moves the {output}."]
    return [f"One volt more of supply moves the {output} {', and '.join(said)}."]


def _cautions(verdict: Verdict, width: int | None) -> list[str]:
    lines: list[str] = []
    for caution in verdict.cautions:
        lines += wrapped(f"{caution.code}: {caution.text}", width, hanging=INDENT)
    return lines


def _fitted(table: list[str], width: int | None) -> list[str]:
    """Break the lines of a table that was folded and is still too wide."""
    if width is None:
        return table
    return [
        piece
        for line in table
        for piece in ([line] if len(line) <= width else wrapped(line, width, hanging=INDENT))
    ]


def _sentences(said: Iterable[str], width: int | None) -> list[str]:
    return [line for sentence in said for line in wrapped(sentence, width)]


def _standing(verdict: Verdict, width: int | None) -> list[str]:
    """Say what holds for every circuit that times something."""
    timed = verdict.circuit.outputs[0] in TIMED
    return standing_lines(width) if timed else []
