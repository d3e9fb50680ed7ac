"""How holdings and loads are shown: as a table, as a sentence, as JSON."""

from __future__ import annotations

import json
from collections.abc import Iterable, Sequence
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

from chooser import quantities
from chooser.cli.tables import print_line, print_table
from chooser.parts import Count, Entry, Holding, Kind, Part

if TYPE_CHECKING:
    from chooser.stock.comparing import Difference, LoadPlan

HEADINGS = (
    "id",
    "drawer",
    "kind",
    "value",
    "tolerance",
    "technology",
    "voltage",
    "count",
    "claimed",
    "free",
    "measured",
)


def print_json(answer: dict[str, Any]) -> None:
    """Print one JSON object, with the version of its form."""
    print_line(json.dumps({"schema": 1} | answer, ensure_ascii=True, allow_nan=False))


def print_holdings(holdings: Iterable[Holding]) -> None:
    """Print holdings as a table."""
    rows = [_row(holding) for holding in holdings]
    print_table(HEADINGS, rows, right_aligned=("id", "value", "count", "claimed", "free"))


def holding_json(holding: Holding) -> dict[str, Any]:
    """Give a holding as JSON has it: SI units, fractions, null for what is not known."""
    return {
        "id": holding.id,
        "drawer": holding.drawer,
        **asdict(holding.part),
        "count": asdict(holding.count),
        "claimed": holding.claimed,
        "free": holding.free,
    }


def entry_json(entry: Entry) -> dict[str, Any]:
    """Give what a sheet says as JSON, in the form of a holding."""
    return {
        "drawer": entry.drawer,
        **asdict(entry.part),
        "count": asdict(entry.count),
        "place": entry.place,
    }


def describe(part: Part) -> str:
    """Name a part in words: "10k 1% metal-film resistor"."""
    tolerance = "" if part.tolerance is None else quantities.format_tolerance(part.tolerance)
    voltage = "" if part.voltage is None else quantities.format_voltage(part.voltage)
    words = [value_text(part, part.value), tolerance, voltage, part.technology or "", part.kind]
    if part.measured is not None:
        words.append(f"measured {value_text(part, part.measured)}")
    return " ".join(word for word in words if word)


def value_text(part: Part, value: float) -> str:
    """Write a value of this part's kind, ohm or farad."""
    if part.kind is Kind.CAPACITOR:
        return quantities.format_capacitance(value)
    return quantities.format_resistance(value)


def plan_json(plan: LoadPlan, *, preview: bool, change: int | None) -> dict[str, Any]:
    """Give a load as JSON."""
    return {
        "preview": preview,
        "change": change,
        "new": [entry_json(entry) for entry in plan.new],
        "changed": [
            {
                "holding": holding_json(found.holding),
                "says": entry_json(found.entry),
                "recounted": found.recounted,
                "amended": list(found.amended),
            }
            for found in plan.changed
        ],
        "unchanged": plan.unchanged,
        "unmentioned": [holding_json(holding) for holding in plan.unmentioned],
    }


def print_plan(plan: LoadPlan, *, preview: bool) -> None:
    """Print what a load changes; a preview lists the new holdings too."""
    rows = [_change_row(found) for found in plan.changed]
    if preview:
        rows = [_new_row(entry) for entry in plan.new] + rows
    if rows:
        print_table(("change", "drawer", "part", "before", "after"), rows)
    print_line(plan_sentence(plan, preview=preview))
    if plan.unmentioned:
        print_line(_unmentioned_sentence(plan.unmentioned))


def plan_sentence(plan: LoadPlan, *, preview: bool) -> str:
    """Close a load with its figures."""
    if not plan.new and not plan.changed:
        return f"Nothing differs: {_holdings(plan.unchanged)} as the stock has them already."
    drawers = len({entry.drawer.casefold() for entry in plan.new})
    parts = [f"{_holdings(len(plan.new))} new in {drawers} drawer{'' if drawers == 1 else 's'}"]
    for number, word in (
        (len(plan.recounted), "recounted"),
        (len(plan.amended), "amended"),
        (plan.unchanged, "unchanged"),
    ):
        parts += [f"{number} {word}"] if number else []
    return f"{'Loading would bring' if preview else 'Loaded'}: {', '.join(parts)}."


def count_text(count: Count) -> str:
    """Write a count: 20, ~50 or plenty."""
    return quantities.format_count(count)


def _row(holding: Holding) -> list[str]:
    part = holding.part
    return [
        str(holding.id),
        holding.drawer,
        part.kind,
        value_text(part, part.value),
        "" if part.tolerance is None else quantities.format_tolerance(part.tolerance),
        part.technology or "",
        "" if part.voltage is None else quantities.format_voltage(part.voltage),
        count_text(holding.count),
        str(holding.claimed) if holding.claimed else "",
        "plenty" if holding.free is None else str(holding.free),
        "" if part.measured is None else value_text(part, part.measured),
    ]


def _new_row(entry: Entry) -> list[str]:
    return ["new", entry.drawer, describe(entry.part), "", count_text(entry.count)]


def _change_row(found: Difference) -> list[str]:
    old, new = found.holding, found.entry
    before = [count_text(old.count)] if found.recounted else []
    after = [count_text(new.count)] if found.recounted else []
    for name in found.amended:
        before.append(f"{name} {_trait(old.part, name)}")
        after.append(f"{name} {_trait(new.part, name)}")
    words = [*(["recount"] if found.recounted else []), *(["amend"] if found.amended else [])]
    return [
        " and ".join(words),
        old.drawer,
        f"{old.id}: {describe(old.part)}",
        ", ".join(before),
        ", ".join(after),
    ]


def _trait(part: Part, name: str) -> str:
    value = getattr(part, name)
    return "(none)" if value in (None, "") else str(value)


def _unmentioned_sentence(holdings: Sequence[Holding]) -> str:
    shown = ", ".join(f"{holding.id} in {holding.drawer}" for holding in holdings[:5])
    more = f" and {len(holdings) - 5} more" if len(holdings) > 5 else ""  # noqa: PLR2004
    return (
        f"Not in these sheets, though their drawers are, and left as they were: {shown}{more}; "
        "if a row was corrected, take the old holding's parts out of the count."
    )


def _holdings(number: int) -> str:
    return f"{number} holding{'' if number == 1 else 's'}"
