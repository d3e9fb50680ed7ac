"""Parts coming, being counted, put aside and given back: each a change with its movements.

Conventions: pieces are whole numbers > 0; a holding is named by its number. The write lock is
held from reading to writing, so what is checked here is still true when it is written.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from sqlalchemy import func, select
from sqlalchemy.orm import Session

from chooser.errors import BadRequestError, StockError
from chooser.parts import Count, Entry, Holding, Sureness, identity_of
from chooser.stock.comparing import difference
from chooser.stock.models import Claim
from chooser.stock.register import (
    add_claims,
    add_holdings,
    add_movements,
    all_lines,
    amend,
    correction,
)
from chooser.stock.session import note_change, writing
from chooser.stock.snapshot import Line


@dataclass(frozen=True, slots=True)
class Added:
    """What adding parts did.

    Attributes
    ----------
    holding : the holding as it is now. created : True where it was not in the stock before.
    change : number of the change. before : the holding as it was, None where it was created.
    amended : names of the traits that were said now and were another or none before.
    """

    holding: Holding
    created: bool
    change: int
    before: Holding | None = None
    amended: tuple[str, ...] = ()


def add(path: Path, entry: Entry, what: str = "add") -> Added:
    """Put parts into a drawer: onto the holding that is the same part, else as a new one.

    Traits that are said now amend the holding, as in loading; what is not said is kept, and so
    is the marking, which is that of the parts that lie there already.

    Parameters
    ----------
    path : the database file; it is built where it is missing.
    entry : the part, its drawer and how many come in. what : said of the change in the history.

    Raises
    ------
    StockError : the database cannot be used.
    """
    with writing(path, create=True) as session:
        change = note_change(session, what)
        known = {
            identity_of(line.holding.part, line.holding.drawer): line.holding
            for line in all_lines(session)
        }
        found = known.get(entry.identity)
        amended: tuple[str, ...] = ()
        if found is None:
            (number,) = add_holdings(session, change, [entry])
        else:
            number = found.id
            sureness = _vaguer(found.count, entry.count)
            add_movements(session, change, {number: (entry.count.number, sureness)})
            said = difference(found, entry)
            amended = tuple(name for name in said.amended if name != "marking")
            amend(session, number, said.entry.part, amended)
        holding = _lines(session, [number])[number].holding
    return Added(holding, found is None, change, found, amended)


def correct(path: Path, holding: int, count: Count, what: str = "count") -> int:
    """Write down what was counted in a drawer; the difference becomes a movement.

    Returns
    -------
    The number of the change.

    Raises
    ------
    StockError : no such holding, or less was counted than is claimed.
    """
    with writing(path) as session:
        line = _lines(session, [holding])[holding]
        claimed = line.holding.claimed
        if count.sureness is not Sureness.PLENTY and count.number < claimed:
            raise StockError(
                f"Holding {holding} has {claimed} pieces claimed, so {count.number} cannot be all "
                "there is; release some, or count again."
            )
        change = note_change(session, what)
        add_movements(session, change, {holding: correction(line.balance, count)})
    return change


def claim(path: Path, pieces: Mapping[int, int], purpose: str) -> int:
    """Put parts aside for a purpose: all of them or none.

    Parameters
    ----------
    path : the database file. pieces : how many of each holding. purpose : what they are for.

    Returns
    -------
    The number of the change.

    Raises
    ------
    StockError : no such holding, or fewer are free than asked for.
    BadRequestError : nothing is asked for, or a number of pieces is not positive.
    """
    _require_pieces(pieces)
    with writing(path) as session:
        lines = _lines(session, pieces)
        short = [
            f"Only {line.holding.free} of holding {number} in drawer {line.holding.drawer} are "
            f"free, {pieces[number]} were asked for; take fewer or choose another part."
            for number, line in lines.items()
            if line.holding.free is not None and line.holding.free < pieces[number]
        ]
        if short:
            raise StockError("\n".join(short))
        change = note_change(session, f"claim for {purpose}")
        add_claims(session, change, pieces, purpose)
    return change


def release(path: Path, pieces: Mapping[int, int], purpose: str) -> int:
    """Give back parts that were put aside for a purpose: all of them or none.

    Returns
    -------
    The number of the change.

    Raises
    ------
    StockError : no such holding, or fewer are claimed for that purpose.
    BadRequestError : nothing is asked for, or a number of pieces is not positive.
    """
    _require_pieces(pieces)
    with writing(path) as session:
        _lines(session, pieces)
        held = _claimed_for(session, purpose)
        short = [
            f"Only {held.get(number, 0)} of holding {number} are claimed for {purpose}, "
            f"{asked} cannot be released; give a smaller number."
            for number, asked in pieces.items()
            if held.get(number, 0) < asked
        ]
        if short:
            raise StockError("\n".join(short))
        change = note_change(session, f"release from {purpose}")
        given_back = {number: -asked for number, asked in pieces.items()}
        add_claims(session, change, given_back, purpose)
    return change


def _vaguer(old: Count, new: Count) -> Sureness:
    """Adding to a count leaves it as unsure as the less sure of the two."""
    order = (Sureness.EXACT, Sureness.ROUGH, Sureness.PLENTY)
    return max(old.sureness, new.sureness, key=order.index)


def _require_pieces(pieces: Mapping[int, int]) -> None:
    if not pieces:
        raise BadRequestError("No parts were named; name at least one holding and its pieces.")
    for number, asked in pieces.items():
        if asked <= 0:
            raise BadRequestError(
                f"{asked} pieces of holding {number} make no sense; give a number above zero."
            )


def _lines(session: Session, numbers: Mapping[int, int] | list[int]) -> dict[int, Line]:
    """Find holdings by their numbers, as they are under the write lock."""
    lines = {line.holding.id: line for line in all_lines(session)}
    for number in numbers:
        if number not in lines:
            raise StockError(
                f"There is no holding {number} in the stock; "
                "`chooser stock list` shows the numbers."
            )
    return {number: lines[number] for number in numbers}


def _claimed_for(session: Session, purpose: str) -> dict[int, int]:
    rows = session.execute(
        select(Claim.holding_id, func.sum(Claim.quantity))
        .where(Claim.purpose == purpose)
        .group_by(Claim.holding_id)
    )
    return {number: int(total) for number, total in rows}
