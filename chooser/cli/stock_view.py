"""How holdings and loads are shown: as a table, as a sentence, as JSON."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable, Sequence
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

from chooser import quantities
from chooser.cli.boundary import say
from chooser.cli.tables import print_line, print_table
from chooser.parts import Count, Entry, Holding, Kind, Part

if TYPE_CHECKING:
    from chooser.stock.comparing import Difference, LoadPlan
    from chooser.stock.ledger import Added

HEADINGS = ("id", "drawer", "part", "count", "claimed", "free")


def print_json(answer: dict[str, Any]) -> None:
    """Print one JSON object, with the version of its form."""
    print_line(json.dumps({"schema": 1} | answer, ensure_ascii=True, allow_nan=False))


def print_holdings(holdings: Iterable[Holding]) -> None:
    """Print holdings as a table, a line each; a long part goes on below itself."""
    rows = [_row(holding) for holding in holdings]
    print_table(HEADINGS, rows, ("id", "count", "claimed", "free"), wrapping="part")


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
    words = [*_printed(part), part.technology or "", part.kind]
    if part.measured is not None:
        words.append(f"measured {value_text(part, part.measured)}")
    return " ".join(word for word in words if word)


def describe_fully(part: Part) -> str:
    """Say everything that is known of a part, the kind only where the rest does not tell it."""
    told = part.technology is not None and part.kind in (Kind.RESISTOR, Kind.CAPACITOR)
    more = [
        _known(part, name, name.replace("_", " ") + " ")
        for name in ("measured", "meter", "leakage", "end_resistance")
    ]
    words = [
        *_printed(part),
        *(_known(part, name) for name in ("power", "tempco", "technology", "taper")),
        "" if part.turns is None else f"{trait_text(part, 'turns')}-turn",
        "" if told else part.kind,
    ]
    said = [" ".join(word for word in words if word), *more, part.note]
    return ", ".join(each for each in said if each)


def _printed(part: Part) -> list[str]:
    return [value_text(part, part.value), _known(part, "tolerance"), _known(part, "voltage")]


def _known(part: Part, name: str, lead: str = "") -> str:
    return "" if getattr(part, name) is None else lead + trait_text(part, name)


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
    new = f"{_holdings(len(plan.new))} new in {drawers} drawer{'' if drawers == 1 else 's'}"
    parts = [new] if plan.new else []
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
    return [
        str(holding.id),
        holding.drawer,
        describe_fully(holding.part),
        count_text(holding.count),
        str(holding.claimed) if holding.claimed else "",
        "plenty" if holding.free is None else str(holding.free),
    ]


def _new_row(entry: Entry) -> list[str]:
    return ["new", entry.drawer, describe(entry.part), "", count_text(entry.count)]


def _change_row(found: Difference) -> list[str]:
    old, new = found.holding, found.entry
    before = [count_text(old.count)] if found.recounted else []
    after = [count_text(new.count)] if found.recounted else []
    for name in found.amended:
        before.append(f"{name} {trait_text(old.part, name)}")
        after.append(f"{name} {trait_text(new.part, name)}")
    words = [*(["recount"] if found.recounted else []), *(["amend"] if found.amended else [])]
    return [
        " and ".join(words),
        old.drawer,
        f"{old.id}: {describe(old.part)}",
        ", ".join(before),
        ", ".join(after),
    ]


def say_amended(added: Added) -> None:
    """Say which traits of a holding were changed by adding to it."""
    if added.before is None or not added.amended:
        return
    changes = ", ".join(
        f"{name.replace('_', ' ')} {trait_text(added.before.part, name)} to "
        f"{trait_text(added.holding.part, name)}"
        for name in added.amended
    )
    say(f"Holding {added.holding.id} was amended: {changes}.")


def trait_text(part: Part, name: str) -> str:
    """Write a trait of a part as a person would type it, "(none)" where it is not known."""
    value = getattr(part, name)
    if value in (None, ""):
        return "(none)"
    if name in ("value", "measured"):
        return value_text(part, value)
    write = _WRITERS.get(name, str)
    return write(value)


_WRITERS: dict[str, Callable[[Any], str]] = {
    "tolerance": quantities.format_tolerance,
    "power": quantities.format_power,
    "voltage": quantities.format_voltage,
    "tempco": quantities.format_tempco,
    "meter": quantities.format_percent,
    "leakage": quantities.format_current,
    "turns": "{:g}".format,
    "end_resistance": quantities.format_resistance,
    "price": "{:g}".format,
}


def _unmentioned_sentence(holdings: Sequence[Holding]) -> str:
    shown = ", ".join(f"{holding.id} in {holding.drawer}" for holding in holdings[:5])
    more = f" and {len(holdings) - 5} more" if len(holdings) > 5 else ""  # noqa: PLR2004
    return (
        f"Not in these sheets, though their drawers are, and left as they were: {shown}{more}; "
        "where one is gone, or has become another row, load its old row once more with count 0."
    )


def _holdings(number: int) -> str:
    return f"{number} holding{'' if number == 1 else 's'}"
