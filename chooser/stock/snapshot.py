"""Reading the whole stock in one go, without the weight of an ORM.

Importing SQLAlchemy takes longer than everything else an answer needs, so the one statement that
every answer runs is written out here; a test holds its columns equal to the typed models.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any

from chooser.parts import Count, Holding, Kind, Part, Sureness, Taper, Tolerance
from chooser.stock.connection import looking
from chooser.stock.upgrade import make_ready

TRAITS: tuple[str, ...] = tuple(
    name
    for field in fields(Part)
    for name in (
        ("tolerance_minus", "tolerance_plus") if field.name == "tolerance" else (field.name,)
    )
)
"""The columns of a holding that describe its part, in the order of `Part`."""

# The last movement of a holding says how sure its count is: SQLite takes a bare column from the
# row of the only max() of the query (sqlite.org/lang_select.html, "Bare columns in an aggregate
# query"); the HAVING keeps that max() in use.
SNAPSHOT_SQL = f"""
SELECT holdings.id, drawers.name, coalesce(moved.number, 0), coalesce(moved.sureness, 'exact'),
       coalesce(put_aside.number, 0), {", ".join(f"holdings.{trait}" for trait in TRAITS)}
FROM holdings
JOIN drawers ON drawers.id = holdings.drawer_id
LEFT JOIN (SELECT holding_id, sum(quantity) AS number, sureness
           FROM movements GROUP BY holding_id HAVING max(id) > 0) AS moved
       ON moved.holding_id = holdings.id
LEFT JOIN (SELECT holding_id, sum(quantity) AS number
           FROM claims GROUP BY holding_id) AS put_aside
       ON put_aside.holding_id = holdings.id
ORDER BY holdings.id
"""  # noqa: S608 - the names come from the fields of Part, not from a user


@dataclass(frozen=True, slots=True)
class Line:
    """A holding and the plain sum of its movements (which "plenty" hides).

    Attributes
    ----------
    holding : the record handed out. balance : sum of the movements, in pieces.
    """

    holding: Holding
    balance: int


def read_stock(path: Path) -> tuple[Holding, ...]:
    """Read every holding with its count and what of it is claimed.

    Parameters
    ----------
    path : the database file; an old one is upgraded first, after a copy.

    Returns
    -------
    The holdings in order of their numbers, those with nothing left included.

    Raises
    ------
    StockError : there is no stock yet, or the file cannot be used.
    """
    make_ready(path)
    with looking(path) as connection:
        rows = connection.execute(SNAPSHOT_SQL).fetchall()
    return tuple(line.holding for line in lines_of(rows))


def lines_of(rows: Iterable[Sequence[Any]]) -> list[Line]:
    """Turn the rows of `SNAPSHOT_SQL` into records."""
    return [_line(*row) for row in rows]


def _line(
    number: int, drawer: str, balance: int, sureness: str, claimed: int, *traits: Any
) -> Line:
    kind, value, marking, minus, plus, technology, power, voltage, tempco, measured = traits[:10]
    meter, leakage, taper, *rest = traits[10:]
    part = Part(
        Kind(kind),
        value,
        marking,
        None if minus is None else Tolerance(minus, plus),
        technology,
        power,
        voltage,
        tempco,
        measured,
        meter,
        leakage,
        None if taper is None else Taper(taper),
        *rest,
    )
    sure = Sureness(sureness)
    count = Count(0 if sure is Sureness.PLENTY else balance, sure)
    return Line(Holding(number, part, drawer, count, claimed), balance)


def traits_of(part: Part) -> dict[str, Any]:
    """Spread a part over the columns of its holding; the opposite of reading it."""
    values: dict[str, Any] = {
        field.name: getattr(part, field.name) for field in fields(Part) if field.name != "tolerance"
    }
    limits = part.tolerance
    values["tolerance_minus"] = None if limits is None else limits.minus
    values["tolerance_plus"] = None if limits is None else limits.plus
    return values
