"""How a verdict is shown: a page for people, an object for programs.

A page runs from what matters at once (what it does, whether that is what was wanted) to what is
only looked up (temperature, supply), then the cautions.
"""

from __future__ import annotations

import shutil
import sys
from collections.abc import Iterable
from math import inf, isfinite

from chooser import quantities
from chooser.causes import Cause
from chooser.cautions import METER_OHM, Code
from chooser.circuits.circuit import TIMED
from chooser.cli.check_json import verdict_json
from chooser.cli.check_wishes import is_ending, paper_sentences, wish_sentences
from chooser.cli.check_words import (
    called,
    cause_text,
    digits_of,
    network_text,
    nominal_text,
    percent_text,
    pick_text,
    time_name,
)
from chooser.cli.stock_view import print_json
from chooser.cli.tables import print_line, table_lines
from chooser.cli.words import (
    ends_text,
    fitted,
    output_name,
    output_text,
    picked,
    place_texts,
    standing_lines,
    wrapped,
)
from chooser.climate import Climate, widest
from chooser.temperature import REFERENCE_CELSIUS
from chooser.verdict import Leakage, Verdict

BAR = 20
"""Columns of a bar that stands for the whole spread."""

LEAST_SHARE = 0.001
"""Share of the spread below which a figure says no more than that it is small."""

WORTH_A_WORD = 0.001
"""Relative change below which nothing is said of what makes it."""

INDENT = "    "


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
        [*_outputs(verdict, width), *_sentences(_compared(verdict), width)],
        _sentences(_first(verdict), width),
        _causes(verdict, width),
        _sentences(_losses(verdict), width),
        _temperature(verdict, width),
        _sentences(_supply(verdict), width),
        _cautions(verdict, width),
        _standing(verdict, width),
    )
    lines: list[str] = []
    for section in sections:
        lines += ["", *section] if lines and section else section
    return lines


def _heading(verdict: Verdict) -> str:
    circuit = verdict.circuit
    output = [f"output {verdict.variant.name}"] if verdict.variant.name else []
    return f"{', '.join([circuit.title, *place_texts(circuit), *output])}."


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
            output_name(reading.output, called(reading.output, verdict.targets)),
            nominal_text(reading),
            ends_text(reading.output, reading.low, reading.high),
            percent_text(reading.spread) if isfinite(reading.spread) else "",
        ]
        for reading in verdict.outlook.readings
    ]
    return fitted(table_lines(headings, rows, (), width), width, INDENT)


def _compared(verdict: Verdict) -> list[str]:
    return [*wish_sentences(verdict), *paper_sentences(verdict)]


def _first(verdict: Verdict) -> list[str]:
    first = verdict.first
    if first is None or not isfinite(first.nominal):
        return []
    later = verdict.outlook.of(first.output)
    time = output_text(first.output, first.nominal, digits=digits_of(later))
    than = "longer" if first.nominal >= later.nominal else "shorter"
    ends = ends_text(first.output, first.low, first.high)
    name = time_name(first.output, verdict.targets)
    return [f"The first {name} after power-up is {than}: {time} ({ends})."]


def _causes(verdict: Verdict, width: int | None) -> list[str]:
    """Lay out which part is the problem, with a bar for each; the bars go first."""
    if not verdict.causes:
        return []
    output = verdict.outlook.chief.output
    spread = percent_text(verdict.outlook.chief.spread)
    title = f"What makes the spread of the {output} ({spread}, 1 sigma):"
    headings = ("cause", "share", "without it", "")
    rows = [
        [cause_text(cause, verdict), _share(cause), percent_text(cause.spread_without), _bar(cause)]
        for cause in verdict.causes
    ]
    table = table_lines(headings, rows, ("share", "without it"))
    if width is not None and max(map(len, table)) > width:
        table = table_lines(headings[:3], [row[:3] for row in rows], headings[1:3])
    if width is not None and max(map(len, table)) > width:
        table = table_lines(headings[:3], [row[:3] for row in rows], headings[1:3], width, "cause")
    return [*wrapped(title, width), *fitted(table, width, INDENT)]


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
        said.append(
            f"At the trip point the charging current is {_times(leakage.ratio)} what leaks, and "
            f"with all at their limits {_times(leakage.ratio_limit)}; {_costs(leakage, verdict)}."
        )
    return [*said, *_metered(leakage, verdict)]


def _costs(leakage: Leakage, verdict: Verdict) -> str:
    """Say what the losses do to the time in which the capacitor is charged."""
    if leakage.stretch_limit < WORTH_A_WORD:
        return "leakage hardly counts"
    makes = f"that makes the {time_name(leakage.output, verdict.targets)}"
    if not isfinite(leakage.stretch):
        return f"{makes} endless"
    return f"{makes} {_longer(leakage.stretch)}, at the limits {_longer(leakage.stretch_limit)}"


def _metered(leakage: Leakage, verdict: Verdict) -> list[str]:
    """Say what a meter on the timing node does, where it does anything that was not told."""
    reading = verdict.outlook.of(leakage.output)
    told = any(caution.code is Code.METER_ON_NODE for caution in verdict.cautions)
    if leakage.metered is None or told or not is_ending(reading):
        return []
    time = output_text(leakage.output, leakage.metered, digits=digits_of(reading))
    if time == nominal_text(reading):
        return []
    made = time if isfinite(leakage.metered) else "endless"
    ohm = quantities.format_resistance(METER_OHM)
    return [f"A {ohm} meter on the timing node would make it {made}."]


def _times(ratio: float) -> str:
    return f"{float(f'{ratio:.2g}'):,g} times" if ratio < inf else "far above"


def _longer(stretch: float) -> str:
    if not isfinite(stretch):
        return "endless"
    return f"{percent_text(stretch)} longer" if stretch > 0.0 else "no longer"


def _temperature(verdict: Verdict, width: int | None) -> list[str]:
    """Lay out the ends of the temperatures, and say what moves most."""
    climates = verdict.climates
    if not climates:
        return []
    chief = verdict.outlook.chief.output
    rows = [
        [
            quantities.format_temperature(climate.celsius, digits=4),
            nominal_text(climate.outlook.chief),
            ends_text(chief, climate.outlook.chief.low, climate.outlook.chief.high),
        ]
        for climate in climates
    ]
    if len(climates) > 1:
        rows.append(["both", "", ends_text(chief, *widest(climates, chief))])
    table = table_lines(("temperature", chief, "worst case"), rows, ("temperature",), width)
    said = [_moved(each, verdict) for each in climates]
    if len(climates) == 1:
        reference = quantities.format_temperature(REFERENCE_CELSIUS)
        said = [f"{said[0]} (parts are specified at {reference})"]
    return [*fitted(table, width, INDENT), *_sentences((f"{each}." for each in said), width)]


def _moved(climate: Climate, verdict: Verdict) -> str:
    """Say what moves the chief output most at one temperature."""
    mover = climate.mover
    said = []
    if mover is not None and mover.size >= WORTH_A_WORD:
        name = cause_text(mover, verdict)
        ends = (
            f"{percent_text(mover.least, signed=True)} to {percent_text(mover.most, signed=True)}"
        )
        said.append(f"{name} moves it most, by {ends}")
    if climate.by_leakage == inf:
        said.append("the leakage alone makes it endless")
    elif abs(climate.by_leakage) >= WORTH_A_WORD:
        said.append(f"the leakage moves it by {percent_text(climate.by_leakage, signed=True)}")
    where = quantities.format_temperature(climate.celsius, digits=4)
    return f"At {where} {', and '.join(said) if said else 'nothing moves it to speak of'}"


def _supply(verdict: Verdict) -> list[str]:
    """Say what one volt more of supply does."""
    per_volt, output = verdict.per_volt, verdict.outlook.chief.output
    if per_volt is None or not is_ending(verdict.outlook.chief):
        return []
    said = []
    if per_volt.formula is not None and abs(per_volt.formula) >= WORTH_A_WORD / 10:
        said.append(f"by {percent_text(per_volt.formula, signed=True)} by its formula")
    if per_volt.device:
        said.append(
            f"by up to {percent_text(per_volt.device)} either way by the device's own drift"
        )
    if not said:
        return [] if per_volt.formula is None else [f"The supply hardly moves the {output}."]
    return [f"One volt more of supply moves the {output} {', and '.join(said)}."]


def _cautions(verdict: Verdict, width: int | None) -> list[str]:
    lines: list[str] = []
    for caution in verdict.cautions:
        lines += wrapped(f"{caution.code}: {caution.text}", width, hanging=INDENT)
    return lines


def _sentences(said: Iterable[str], width: int | None) -> list[str]:
    return [line for sentence in said for line in wrapped(sentence, width)]


def _standing(verdict: Verdict, width: int | None) -> list[str]:
    """Say what holds for every circuit that times something."""
    timed = verdict.circuit.outputs[0] in TIMED
    return standing_lines(width) if timed else []
