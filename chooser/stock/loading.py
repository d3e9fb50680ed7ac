"""Bringing the stock in line with what sheets say (the rules are those of `comparing`)."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from sqlalchemy.orm import Session

from chooser.parts import Entry
from chooser.stock.comparing import LoadPlan, plan_of
from chooser.stock.register import add_holdings, add_movements, all_lines, amend, correction
from chooser.stock.revision import State, state_of
from chooser.stock.session import note_change, writing
from chooser.stock.snapshot import read_stock


@dataclass(frozen=True, slots=True)
class LoadReport:
    """What loading did.

    Attributes
    ----------
    plan : what was changed. change : number of the change, None where nothing differed.
    """

    plan: LoadPlan
    change: int | None


def compare(path: Path, entries: Sequence[Entry]) -> LoadPlan:
    """Tell what loading would change, changing nothing; a missing stock counts as empty.

    Raises
    ------
    StockError : the database cannot be used, or the entries cannot be loaded as they are.
    """
    return plan_of(() if state_of(path) is State.MISSING else read_stock(path), entries)


def apply(path: Path, entries: Sequence[Entry], what: str = "load") -> LoadReport:
    """Load the entries: all of them or nothing, in one transaction.

    Parameters
    ----------
    path : the database file; it is built where it is missing.
    entries : what the sheets say. what : said of the change in the history.

    Raises
    ------
    StockError : the database cannot be used, two entries speak of one holding, or a count is
        below what is claimed; nothing is changed then.
    """
    with writing(path, create=True) as session:
        lines = all_lines(session)
        plan = plan_of([line.holding for line in lines], entries)
        if not plan.new and not plan.changed:
            return LoadReport(plan, None)
        change = note_change(session, what)
        balances = {line.holding.id: line.balance for line in lines}
        _write(session, change, plan, balances)
    return LoadReport(plan, change)


def _write(session: Session, change: int, plan: LoadPlan, balances: dict[int, int]) -> None:
    """Write a plan down within the open session."""
    add_holdings(session, change, plan.new)
    moves = {
        found.holding.id: correction(balances[found.holding.id], found.entry.count)
        for found in plan.recounted
    }
    add_movements(session, change, moves)
    for found in plan.amended:
        amend(session, found.holding.id, found.entry.part, found.amended)
