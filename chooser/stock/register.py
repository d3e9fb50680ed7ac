"""Writing holdings and movements within the transaction of one command."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from typing import Any

from sqlalchemy import Table, func, insert, select, update
from sqlalchemy.orm import Session

from chooser.parts import Count, Entry, Part, Sureness
from chooser.stock import models
from chooser.stock.snapshot import SNAPSHOT_SQL, Line, lines_of, traits_of


def all_lines(session: Session) -> list[Line]:
    """Read the stock as it is now, under the write lock."""
    return lines_of(session.connection().exec_driver_sql(SNAPSHOT_SQL).fetchall())


def add_holdings(session: Session, change: int, entries: Sequence[Entry]) -> list[int]:
    """Write new holdings with their first counts.

    Parameters
    ----------
    session : the open session. change : number of the change.
    entries : what to add; none of them may be in the stock yet.

    Returns
    -------
    The numbers of the new holdings, in the order of the entries.
    """
    if not entries:
        return []
    drawers = _drawer_numbers(session, entries)
    first = session.scalar(select(func.coalesce(func.max(models.Holding.id), 0) + 1)) or 1
    numbers = list(range(first, first + len(entries)))
    _insert(
        session,
        models.Holding.__table__,
        [
            {"id": number, "drawer_id": drawers[entry.drawer.casefold()], **traits_of(entry.part)}
            for number, entry in zip(numbers, entries, strict=True)
        ],
    )
    moves = {
        number: (entry.count.number, entry.count.sureness)
        for number, entry in zip(numbers, entries, strict=True)
    }
    add_movements(session, change, moves)
    return numbers


def amend(session: Session, holding: int, part: Part, names: Collection[str]) -> None:
    """Write the named traits (fields of `Part`) of a holding as the part has them."""
    if not names:
        return
    columns = {"tolerance": ("tolerance_minus", "tolerance_plus")}
    wanted = {column for name in names for column in columns.get(name, (name,))}
    values = {column: value for column, value in traits_of(part).items() if column in wanted}
    session.execute(update(models.Holding).where(models.Holding.id == holding).values(values))


def add_movements(session: Session, change: int, moves: Mapping[int, tuple[int, Sureness]]) -> None:
    """Write movements: for each holding the pieces (with sign) and the sureness from then on."""
    _insert(
        session,
        models.Movement.__table__,
        [
            {
                "change_id": change,
                "holding_id": holding,
                "quantity": quantity,
                "sureness": sureness,
            }
            for holding, (quantity, sureness) in moves.items()
        ],
    )


def add_claims(session: Session, change: int, pieces: Mapping[int, int], purpose: str) -> None:
    """Write claims: for each holding the pieces put aside (> 0) or given back (< 0)."""
    _insert(
        session,
        models.Claim.__table__,
        [
            {"change_id": change, "holding_id": holding, "quantity": quantity, "purpose": purpose}
            for holding, quantity in pieces.items()
        ],
    )


def correction(balance: int, count: Count) -> tuple[int, Sureness]:
    """Find the movement that turns the sum of the movements into what was counted."""
    if count.sureness is Sureness.PLENTY:
        return (0, Sureness.PLENTY)
    return (count.number - balance, count.sureness)


def _drawer_numbers(session: Session, entries: Sequence[Entry]) -> dict[str, int]:
    """Find the number of every drawer that the entries name; add the drawers that are new."""
    numbers = {
        drawer.name.casefold(): drawer.id for drawer in session.scalars(select(models.Drawer))
    }
    names = {
        entry.drawer.casefold(): entry.drawer
        for entry in reversed(entries)  # the first spelling of a name wins
        if entry.drawer.casefold() not in numbers
    }
    fresh = [models.Drawer(name=name) for name in reversed(names.values())]
    session.add_all(fresh)
    session.flush()
    return numbers | {drawer.name.casefold(): drawer.id for drawer in fresh}


def _insert(session: Session, table: Any, rows: Sequence[dict[str, Any]]) -> None:
    """Insert many rows with one statement prepared once."""
    assert isinstance(table, Table)  # noqa: S101 - tells mypy what __table__ is
    if rows:
        session.connection().execute(insert(table), list(rows))
