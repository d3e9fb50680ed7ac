"""How an answer is shown: a table for people, an object for programs."""

from __future__ import annotations

import shutil
import sys
import textwrap
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import typer

from chooser import quantities
from chooser.cautions import Caution, Code
from chooser.cli.stock_view import print_json, value_text
from chooser.cli.tables import print_line, table_lines, visible
from chooser.errors import Exit
from chooser.networks import Network, members, write_network
from chooser.parts import Holding
from chooser.search.fits import parts_in
from chooser.search.request import Answer, Fit

HEADINGS = ("fit", "interval", "error", "parts", "in the band", "worst case", "watch")
RIGHT = ("fit", "interval", "error", "parts", "in the band")
INDENT = "     "
NEAREST_SHOWN = 3
"""Fits shown where all miss the band."""

FAR = 10.0
"""Ratio of interval and target from which an error is told as a factor."""

PPM = 1e-6
SAFETY = (
    "Check the built circuit with a watch or counter. Not for anything where a wrong interval can "
    "hurt; mains loads only over a rated, enclosed relay, wired by a qualified person under local "
    "codes."
)


def print_answer(answer: Answer, *, as_json: bool, with_reasons: bool) -> None:
    """Print an answer on stdout."""
    if as_json:
        print_json(answer_json(answer))
        return
    width = shutil.get_terminal_size().columns if sys.stdout.isatty() else None
    for line in answer_lines(answer, width, with_reasons=with_reasons):
        print_line(line)


def finish(answer: Answer) -> None:
    """End the process with the status that says whether the stock can do it."""
    if not any(fit.in_band for fit in answer.fits):
        raise typer.Exit(int(Exit.STOCK_SHORT))


def answer_lines(answer: Answer, width: int | None, *, with_reasons: bool) -> list[str]:
    """Lay an answer out for a person.

    Parameters
    ----------
    answer : what was found.
    width : columns of the terminal, or None where lines may be as long as they need.
    with_reasons : whether each fit says why it ranks before the next.
    """
    lines = [*_wrapped(_heading(answer), width)]
    shown = _shown(answer)
    notes = _notes(shown)
    if shown:
        table = table_lines(HEADINGS, [_row(*pair, notes) for pair in shown], RIGHT)
        folded = width is not None and max(map(len, table)) > width
        lines += ["", *([] if folded else table[:1])]
        for (number, fit), row in zip(shown, table[1:], strict=True):
            lines += _folded(number, fit, notes, width) if folded else [row]
            lines += _networks(fit, width)
            if with_reasons:
                lines += _reasons(fit, width)
        lines.append("")
    for note in notes.values():
        lines += _wrapped(str(note), width, hanging="   ")
    if not with_reasons and any(len(fit.cautions) > 1 for _, fit in shown):
        lines += _wrapped("+n  so many further cautions; --why spells them out.", width)
    if not any(fit.in_band for fit in answer.fits):
        lines += _wrapped(_nothing(answer), width)
    for sentence in answer.advice:
        lines += _wrapped(sentence, width)
    # Where nothing was searched, rules for networks kept nothing out.
    refusals = [each for each in answer.refusals if each.holdings or answer.searched.combinations]
    if refusals:
        lines += _wrapped("By the house rules (--allow RULE lifts one):", width)
    for refusal in refusals:
        lines += _wrapped(f"{refusal.rule}: {refusal.why}", width, "  ", "    ")
    lines += _wrapped(_searched(answer), width)
    return [*lines, *(_wrapped(SAFETY, width) if answer.fits else [])]


def _reasons(fit: Fit, width: int | None) -> list[str]:
    """Say the further cautions, and why the fit ranks before the next."""
    lines = []
    for caution in fit.cautions[1:]:
        lines += _wrapped(f"also {caution.code}: {caution.text}", width, INDENT, INDENT + "    ")
    if fit.why:
        lines += _wrapped(f"before the next: {fit.why}", width, INDENT)
    return lines


def _shown(answer: Answer) -> list[tuple[int, Fit]]:
    """Return the fits to show, numbered: where all miss the band, a few are enough to see why."""
    some = any(fit.in_band for fit in answer.fits)
    return list(enumerate(answer.fits if some else answer.fits[:NEAREST_SHOWN], start=1))


def _heading(answer: Answer) -> str:
    request = answer.request
    low, high = (quantities.format_duration(end, digits=6) for end in request.band)
    boards = "" if request.boards == 1 else f", {request.boards} boards"
    timer = f"{request.timer.name} timer"
    supply = quantities.format_voltage(request.supply)
    return (
        f"One-shot of {quantities.format_duration(request.target)} within "
        f"{quantities.format_percent(request.within)} ({low} to {high}), "
        f"{timer} at {supply}{boards}."
    )


@dataclass(frozen=True, slots=True)
class _Note:
    """A caution below the table: its letter, and the fit whose figures it tells."""

    letter: str
    fit: int
    caution: Caution

    def __str__(self) -> str:
        return f"{self.letter}  {self.caution.code} (fit {self.fit}): {self.caution.text}"


def _notes(shown: Sequence[tuple[int, Fit]]) -> dict[Code, _Note]:
    """Give every kind of first caution a letter, in the order of appearance."""
    notes: dict[Code, _Note] = {}
    for number, fit in shown:
        if fit.cautions and fit.cautions[0].code not in notes:
            note = _Note(_letter(len(notes)), number, fit.cautions[0])
            notes[fit.cautions[0].code] = note
    return notes


def _letter(number: int) -> str:
    name = chr(ord("a") + number % 26)
    return name if number < 26 else _letter(number // 26 - 1) + name  # noqa: PLR2004


def _row(number: int, fit: Fit, notes: dict[Code, _Note]) -> list[str]:
    out = fit.outlook
    mark = notes[fit.cautions[0].code].letter if fit.cautions else ""
    if len(fit.cautions) > 1:
        mark += f" +{len(fit.cautions) - 1}"
    return [
        str(number),
        quantities.format_duration(out.nominal, digits=4),
        _error_text(fit),
        str(parts_in(fit)),
        "unknown" if _too_short(fit) else chance_text(out.chance),
        _worst_case(fit),
        mark,
    ]


def _too_short(fit: Fit) -> bool:
    """Tell whether the timer's own delays rule: then the formula says nothing of the odds."""
    return any(caution.code is Code.SHORT_INTERVAL for caution in fit.cautions)


def _error_text(fit: Fit) -> str:
    """Write an error so that the column can be compared; far ones as a factor."""
    percent = fit.error * 100
    if fit.error >= FAR - 1:
        return f"{fit.error + 1:,.0f} x too long"
    if fit.error <= 1 / FAR - 1:
        return f"{1 / (fit.error + 1):,.0f} x too short"
    if abs(fit.error) < PPM / 2:
        return "0%"
    written = f"{percent:+.2f}%" if abs(percent) >= 0.005 else f"{percent:+.4f}%"  # noqa: PLR2004
    return written if fit.in_band else f"{written} out"


def chance_text(chance: float) -> str:
    """Write a probability as people count: boards of ten or of a hundred."""
    if chance >= 0.995:  # noqa: PLR2004 - rounds to all of them
        return "nearly all"
    if chance < 0.005:  # noqa: PLR2004 - rounds to none
        return "hardly any"
    return f"{round(chance * 100)} of 100"


def _worst_case(fit: Fit) -> str:
    low = quantities.format_duration(fit.outlook.low, digits=3)
    high = fit.outlook.high
    return f"{low} to {'never' if high is None else quantities.format_duration(high, digits=3)}"


def _folded(number: int, fit: Fit, notes: dict[Code, _Note], width: int | None) -> list[str]:
    """Write the row as a sentence, for terminals too narrow for the table."""
    _, interval, error, parts, chance, worst, mark = _row(number, fit, notes)
    watch = f", watch {mark}" if mark else ""
    text = f"{number}. {interval} ({error}), {parts} parts, {chance} in the band, {worst}{watch}"
    return _wrapped(text, width, hanging=INDENT)


def _networks(fit: Fit, width: int | None) -> list[str]:
    """Say how the parts are joined, and from which drawers they come."""
    lines = []
    for slot, network in (("R", fit.resistor), ("C", fit.capacitor)):
        text = write_network(network, lambda h: value_text(h.part, h.part.effective))
        picks = "; ".join(_pick_text(holding, count) for holding, count in picked(network))
        lines += _wrapped(f"{slot} = {text}   from {picks}", width, INDENT, INDENT + "    ")
    return lines


def _pick_text(holding: Holding, count: int) -> str:
    part = holding.part
    words = [
        f"{count} x" if count > 1 else "",
        value_text(part, part.value),
        quantities.format_tolerance(part.tolerance) if part.tolerance else "",
        quantities.format_voltage(part.voltage) if part.voltage else "",
        part.technology or "",
        f"measured {value_text(part, part.measured)}" if part.measured is not None else "",
    ]
    return f"{visible(holding.drawer)}: {' '.join(word for word in words if word)}"


def picked(network: Network[Holding]) -> list[tuple[Holding, int]]:
    """Return each holding of a network once, with how often a board takes from it."""
    by_id = {holding.id: holding for holding in members(network)}
    counts = Counter(holding.id for holding in members(network))
    return [(by_id[number], count) for number, count in counts.items()]


def _nothing(answer: Answer) -> str:
    if not answer.fits:
        return "Nothing in this stock makes such an interval."
    return "Nothing in this stock lies in the accepted band; these come nearest."


def _searched(answer: Answer) -> str:
    searched = answer.searched
    if not searched.combinations:
        return "There was nothing to search."
    noun = "circuit" if searched.combinations == 1 else "circuits"
    how = searched.limit or "exact: no circuit of the space is better placed"
    return f"Searched {searched.combinations:,} {noun} in {searched.seconds:.2g} s; {how}."


def _wrapped(
    text: str, width: int | None, indent: str = "", hanging: str | None = None
) -> list[str]:
    if width is None:
        return [indent + text]
    return textwrap.wrap(
        text,
        max(width, 20),
        initial_indent=indent,
        subsequent_indent=indent if hanging is None else hanging,
        break_on_hyphens=False,
    )


def answer_json(answer: Answer) -> dict[str, Any]:
    """Give an answer as JSON has it: SI units, fractions."""
    request, searched = answer.request, answer.searched
    return {
        "circuit": "monostable",
        "targets": {"interval": request.target},
        "within": request.within,
        "timer": request.timer.name,
        "supply": request.supply,
        "boards": request.boards,
        "rank": str(request.rank),
        "searched": {
            "combinations": searched.combinations,
            "complete": searched.complete,
            "seconds": round(searched.seconds, 6),
            **({"limit": searched.limit} if searched.limit else {}),
        },
        "fits": [fit_json(fit, request.target, request.boards) for fit in answer.fits],
        "left_out": [
            {"rule": str(each.rule), "text": each.why, "holdings": list(each.holdings)}
            for each in answer.refusals
        ],
        "advice": list(answer.advice),
    }


def fit_json(fit: Fit, target: float, boards: int) -> dict[str, Any]:
    """Give one fit as JSON has it; the picks are for all boards together."""
    out = fit.outlook
    return {
        "parts": parts_in(fit),
        "outputs": {
            "interval": {
                "target": target,
                "nominal": out.nominal,
                "error": fit.error,
                "mean": out.mean,
                "low": out.low,
                "high": out.high,
            }
        },
        "in_band": fit.in_band,
        "spread": out.spread,
        "chance": out.chance,
        "likely_miss": fit.likely_miss,
        "slots": {
            "R": _slot_json(fit.resistor, fit.resistance, boards),
            "C": _slot_json(fit.capacitor, fit.capacitance, boards),
        },
        "cautions": [{"code": str(each.code), "text": each.text} for each in fit.cautions],
        "why": fit.why,
    }


def _slot_json(network: Network[Holding], value: float, boards: int) -> dict[str, Any]:
    return {
        "network": write_network(network, lambda h: value_text(h.part, h.part.effective)),
        "value": value,
        "picks": [
            {"holding": holding.id, "drawer": holding.drawer, "count": count * boards}
            for holding, count in picked(network)
        ],
    }
