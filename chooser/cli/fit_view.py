"""How an answer is shown: a table for people, an object for programs."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Sequence
from dataclasses import dataclass

import typer

from chooser import quantities
from chooser.cautions import Caution, Code
from chooser.cli.fit_json import answer_json
from chooser.cli.stock_view import print_json, value_text
from chooser.cli.supporting_view import supporting_json, supporting_lines
from chooser.cli.tables import print_line, table_lines, visible
from chooser.cli.words import (
    FAR,
    accepted_text,
    chance_text,
    ends_text,
    output_name,
    output_text,
    picked,
    place_texts,
    shown_output,
    standing_lines,
    wanted_text,
    wrapped,
)
from chooser.errors import Exit
from chooser.networks import write_network
from chooser.parts import Holding
from chooser.search.request import Answer, Fit, Request, Target
from chooser.search.terms import Rank
from chooser.supporting.picking import Supporting

INDENT = "     "
TOO_FAST = (Code.SHORT_INTERVAL, Code.FREQUENCY_LIMIT)
NEAREST_SHOWN = 3
"""Fits shown where all miss the band."""

MANY = 10**12
PPM = 1e-6
TO_TIME = (5.0, 120.0)
"""Seconds that are worth timing and not too long to wait for."""


def print_answer(
    answer: Answer, supporting: Supporting | None = None, *, as_json: bool, with_reasons: bool
) -> None:
    """Print an answer on stdout, with the supporting parts of its first fit where asked."""
    if as_json:
        print_json(answer_json(answer) | supporting_json(supporting))
        return
    width = shutil.get_terminal_size().columns if sys.stdout.isatty() else None
    below = supporting_lines(supporting, width)
    for line in answer_lines(answer, width, below, with_reasons=with_reasons):
        print_line(line)


def finish(answer: Answer, supporting: Supporting | None = None) -> None:
    """End the process with the status that says whether the stock can do it."""
    short = supporting is not None and supporting.missing
    if short or not any(fit.in_band for fit in answer.fits):
        raise typer.Exit(int(Exit.STOCK_SHORT))


def answer_lines(
    answer: Answer, width: int | None, below: Sequence[str] = (), *, with_reasons: bool
) -> list[str]:
    """Lay an answer out for a person.

    Parameters
    ----------
    answer : what was found.
    width : columns of the terminal, or None where lines may be as long as they need.
    below : what stands right below the table.
    with_reasons : whether each fit says why it ranks before the next.
    """
    lines = [*wrapped(_heading(answer), width)]
    shown = _shown(answer)
    notes = _notes(shown)
    if shown:
        headings = _headings(answer.request)
        rows = [_row(number, fit, answer.request, notes) for number, fit in shown]
        table = table_lines(headings, rows, headings[:-2])
        folded = width is not None and max(map(len, table)) > width
        lines += ["", *([] if folded else table[:1])]
        for (number, fit), row in zip(shown, table[1:], strict=True):
            lines += _folded(number, fit, answer.request, notes, width) if folded else [row]
            lines += _networks(fit, width)
            lines += _divided(fit, answer.request, width)
            if with_reasons:
                lines += _reasons(fit, width)
        lines += ["", *below]
    for note in notes.values():
        lines += wrapped(str(note), width, hanging="   ")
    if not with_reasons and any(len(fit.cautions) > 1 for _, fit in shown):
        lines += wrapped("+n  so many further cautions; --why spells them out.", width)
    if not any(fit.in_band for fit in answer.fits):
        lines += wrapped(_nothing(answer), width)
    for sentence in (*answer.advice, *answer.ways_out):
        lines += wrapped(sentence, width)
    # Where nothing was searched, rules for networks kept nothing out.
    refusals = [each for each in answer.refusals if each.holdings or answer.searched.combinations]
    if refusals:
        lines += wrapped("By the house rules (--allow RULE lifts one):", width)
    for refusal in refusals:
        lines += wrapped(f"{refusal.rule}: {refusal.why}", width, "  ", "    ")
    lines += wrapped(_searched(answer), width)
    timed = answer.request.circuit.device or answer.request.circuit.outputs[0] == "interval"
    return [*lines, *(standing_lines(width) if answer.fits and timed else [])]


def _reasons(fit: Fit, width: int | None) -> list[str]:
    """Say the further cautions, and why the fit ranks before the next."""
    lines = []
    for caution in fit.cautions[1:]:
        lines += wrapped(f"also {caution.code}: {caution.text}", width, INDENT, INDENT + "    ")
    if fit.why:
        lines += wrapped(f"before the next: {fit.why}", width, INDENT)
    return lines


def _shown(answer: Answer) -> list[tuple[int, Fit]]:
    """Return the fits to show, numbered: where all miss the band, a few are enough to see why."""
    some = any(fit.in_band for fit in answer.fits)
    return list(enumerate(answer.fits if some else answer.fits[:NEAREST_SHOWN], start=1))


def _heading(answer: Answer) -> str:
    request = answer.request
    wishes = ", ".join(_wish_text(target, request) for target in request.targets)
    boards = [] if request.boards == 1 else [f"{request.boards} boards"]
    told = [f"{request.circuit.title} of {wishes}", *place_texts(request.circuit), *boards]
    return f"{', '.join(told)}."


def _wish_text(target: Target, request: Request) -> str:
    """Say what is wanted of an output, and what is accepted."""
    if target.is_free:
        return "any duty"
    chief = target.output == request.circuit.outputs[0]
    name = "" if chief else f"{output_name(target.output, target.called)} "
    if target.is_range:
        return f"{name}{wanted_text(target)}"
    within = quantities.format_percent(request.within)
    return f"{name}{wanted_text(target)} within {within} ({accepted_text(target, request.within)})"


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


def _columns(request: Request) -> list[tuple[str, str]]:
    """Return the outputs that have a column, each with its heading."""
    columns = [
        (output_name(shown_output(target), target.called), shown_output(target))
        for target in request.targets
    ]
    # Two resistors choose the duty; of one it is what the device makes it.
    if len(request.circuit.resistors) == 1 and "duty" in request.circuit.outputs:
        columns.append(("duty", "duty"))
    return columns


def _headings(request: Request) -> tuple[str, ...]:
    taken = ("output",) if request.circuit.variants[0].name else ()
    names = [heading for heading, _ in _columns(request)]
    return ("fit", *names, *taken, "error", "parts", "in the band", "worst case", "watch")


def _row(number: int, fit: Fit, request: Request, notes: dict[Code, _Note]) -> list[str]:
    out = fit.outlook
    mark = notes[fit.cautions[0].code].letter if fit.cautions else ""
    if len(fit.cautions) > 1:
        mark += f" +{len(fit.cautions) - 1}"
    return [
        str(number),
        *(output_text(output, out.of(output).nominal, digits=4) for _, output in _columns(request)),
        *((fit.variant.name,) if fit.variant.name else ()),
        _error_text(fit, _shown_error(fit, request)),
        str(fit.parts),
        "unknown" if _too_short(fit) else chance_text(out.chance),
        _worst_case(fit, request),
        mark,
    ]


def _too_short(fit: Fit) -> bool:
    """Tell whether the timer's own delays rule: then the formula says nothing of the odds."""
    return any(caution.code in TOO_FAST for caution in fit.cautions)


def _shown_error(fit: Fit, request: Request) -> float:
    """Return the error to show: of a frequency that was asked for, the frequency's."""
    for target in request.targets:
        if target.frequency is not None and fit.errors[target.output] == fit.error:
            return fit.outlook.of("frequency").nominal / target.frequency - 1
    return fit.error


def _error_text(fit: Fit, error: float) -> str:
    """Write an error so that the column can be compared; far ones as a factor."""
    percent = error * 100
    if error >= FAR - 1:
        return f"{error + 1:,.0f} x too {_far_words(fit)[1]}"
    if error <= 1 / FAR - 1:
        return f"{1 / (error + 1):,.0f} x too {_far_words(fit)[0]}"
    if abs(error) < PPM / 2:
        return "0%"
    written = f"{percent:+.2f}%" if abs(percent) >= 0.005 else f"{percent:+.4f}%"  # noqa: PLR2004
    return written if fit.in_band else f"{written} out"


def _far_words(fit: Fit) -> tuple[str, str]:
    """Return what too little and too much are called of the chief output."""
    timed = fit.outlook.chief.output in ("interval", "period")
    return ("short", "long") if timed else ("small", "large")


def _worst_case(fit: Fit, request: Request) -> str:
    """Say the ends of every output that was asked for, but for a duty that may be anything."""
    outputs = [shown_output(target) for target in request.targets if not target.is_free]
    readings = map(fit.outlook.of, outputs)
    return ", ".join(ends_text(each.output, each.low, each.high) for each in readings)


def _folded(
    number: int, fit: Fit, request: Request, notes: dict[Code, _Note], width: int | None
) -> list[str]:
    """Write the row as a sentence, for terminals too narrow for the table."""
    _, *outputs, error, parts, chance, worst, mark = _row(number, fit, request, notes)
    watch = f", watch {mark}" if mark else ""
    names = _headings(request)[1 : 1 + len(outputs)]
    told = ", ".join(f"{name} {text}" for name, text in zip(names, outputs, strict=True))
    text = (
        f"{number}. {told} ({error}), {parts} parts, {chance} in the band, worst case "
        f"{worst}{watch}"
    )
    return wrapped(text, width, hanging=INDENT)


def _networks(fit: Fit, width: int | None) -> list[str]:
    """Say how the parts are joined, and from which drawers they come."""
    lines = []
    for slot in fit.slots:
        text = write_network(slot.network, lambda h: value_text(h.part, h.part.effective))
        picks = "; ".join(_pick_text(holding, count) for holding, count in picked(slot.network))
        lines += wrapped(f"{slot.name} = {text}   from {picks}", width, INDENT, INDENT + "    ")
    return lines


def _divided(fit: Fit, request: Request, width: int | None) -> list[str]:
    """Say how fast a counter's oscillator runs, and which outputs tell it sooner."""
    if not fit.variant.name:
        return []
    period = fit.outlook.chief.nominal / fit.variant.scale
    text = f"oscillator {quantities.format_duration(period, digits=4)}"
    times = [(tap.name, period * tap.scale) for tap in request.circuit.taps]
    early = [each for each in times if TO_TIME[0] <= each[1] <= TO_TIME[1]][-2:]
    if early and fit.outlook.chief.nominal > TO_TIME[1]:
        told = ", ".join(
            f"{name} after {quantities.format_duration(time, digits=4)}" for name, time in early
        )
        text += f"; to time it sooner, after a reset these rise first: {told}"
    return wrapped(text, width, INDENT, INDENT + "    ")


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


def _nothing(answer: Answer) -> str:
    request = answer.request
    boards = f" for all {request.boards} boards" if request.boards > 1 else ""
    if not answer.fits:
        chief = request.circuit.outputs[0]
        return f"Nothing in this stock makes such {_with_article(chief)}{boards}."
    return f"Nothing in this stock lies in the accepted band{boards}; these come nearest."


def _with_article(noun: str) -> str:
    return f"{'an' if noun[0] in 'aeiou' else 'a'} {noun}"


def _searched(answer: Answer) -> str:
    searched = answer.searched
    if not searched.combinations:
        return "There was nothing to search."
    noun = "circuit" if searched.combinations == 1 else "circuits"
    count, time = _count(searched.combinations), f"{searched.seconds:.2g} s"
    if searched.limit and answer.request.rank is Rank.BALANCED:
        return f"Of {count} possible {noun} the nearest were weighed in {time}: {searched.limit}."
    how = searched.limit or "exact: no circuit of the space is better placed"
    return f"Searched {count} {noun} in {time}; {how}."


def _count(number: int) -> str:
    """Write a number of circuits; of very many two digits are enough."""
    return f"{number:,}" if number < MANY else f"{number:.1e}".replace("e+", "e")
