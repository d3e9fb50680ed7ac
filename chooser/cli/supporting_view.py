"""How supporting parts are shown: a table below the fits, an object beside them."""

from __future__ import annotations

from typing import Any

from chooser.cli.stock_view import describe
from chooser.cli.tables import table_lines
from chooser.cli.words import fitted, wrapped
from chooser.parts import Kind
from chooser.quantities import format_current
from chooser.supporting.needs import Need
from chooser.supporting.picking import Picked, Supporting

INDENT = " " * 8
"""As far in as the cells of a folded row stand."""
HEADINGS = ("for", "part", "drawer", "why")


def supporting_lines(supporting: Supporting | None, width: int | None) -> list[str]:
    """Lay supporting parts out for a person, a line of space below them; none where none are.

    Parameters
    ----------
    supporting : those of the first fit. width : columns of the terminal, or None.
    """
    if supporting is None:
        return []
    lines = ["With fit 1:"]
    if supporting.picks:
        rows = [_row(pick) for pick in supporting.picks]
        table = table_lines(HEADINGS, rows, width=width, wrapping="why")
        lines += fitted(table, width, INDENT)
    for text in (*map(missing_text, supporting.missing), *supporting.cautions):
        lines += wrapped(text, width)
    return [*lines, ""]


def supporting_json(supporting: Supporting | None) -> dict[str, Any]:
    """Give supporting parts as JSON has them: ohm, farad, volt, ampere; nothing for none."""
    if supporting is None:
        return {}
    return {
        "supporting": {
            "fit": 1,
            "picks": [_pick_json(pick) for pick in supporting.picks],
            "missing": [_missing_json(need) for need in supporting.missing],
            "cautions": list(supporting.cautions),
        }
    }


def missing_text(need: Need) -> str:
    """Say what the stock lacks."""
    return f"No {need.use} in stock: {need.window}."


def _row(pick: Picked) -> list[str]:
    count = f"{pick.count} x " if pick.count > 1 else ""
    return [
        pick.need.use,
        count + describe(pick.holding.part),
        pick.holding.drawer,
        pick.need.why + _current_text(pick),
    ]


def _current_text(pick: Picked) -> str:
    """Say what an LED gets from the resistor that was found."""
    if pick.need.drive is None:
        return ""
    ampere = pick.need.drive.current(pick.holding.part.effective)
    return f"; {format_current(ampere, digits=3)} with this one"


def _pick_json(pick: Picked) -> dict[str, Any]:
    value, drive = pick.holding.part.effective, pick.need.drive
    return {
        "use": pick.need.use,
        "value": value,
        "holding": pick.holding.id,
        "drawer": pick.holding.drawer,
        "count": pick.count,
        "why": pick.need.why,
        **({"current": drive.current(value)} if drive else {}),
    }


def _missing_json(need: Need) -> dict[str, Any]:
    return {
        "use": need.use,
        "low": need.least,
        "high": need.most,
        **({"voltage": need.volt} if need.kind is Kind.CAPACITOR else {}),
        "text": missing_text(need),
    }
