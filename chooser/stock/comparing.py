"""What sheets say against what the stock says: pure, no database.

Conventions: a sheet states what lies in a drawer. A difference in count becomes a correction, a
difference in the other traits amends the holding, and holdings that the sheets do not mention
stay as they are. An empty cell says nothing: it keeps what the stock already knows.

A row that matches no holding, where its drawer has exactly one unmentioned holding of the same
kind and value (both measured or neither), is that holding with a trait corrected: else every
slip of the pen that is mended would count the parts twice.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

from chooser.errors import StockError
from chooser.parts import Entry, Holding, Part, Sureness, identity_of

CORRECTABLE = ("tolerance", "technology", "voltage", "measured", "taper", "turns")
"""Traits that tell holdings apart, and may yet have been written down wrongly."""

AMENDABLE = (
    "marking",
    "power",
    "tempco",
    "meter",
    "leakage",
    "end_resistance",
    "price",
    "pack",
    "supplier",
    "order_code",
    "note",
)
"""Traits that may be corrected without making it another holding."""


@dataclass(frozen=True, slots=True)
class Difference:
    """A holding of which the sheet says something else.

    Attributes
    ----------
    holding : as it is in the stock. entry : as the sheet says, empty cells filled from the stock.
    recounted : True where the count differs. amended : names of the traits that differ.
    """

    holding: Holding
    entry: Entry
    recounted: bool
    amended: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class LoadPlan:
    """What loading would change.

    Attributes
    ----------
    new : entries that become holdings. changed : holdings that differ.
    unchanged : number of entries that say what the stock says already.
    unmentioned : holdings with parts left, in drawers the sheets name, that the sheets leave out.
    """

    new: tuple[Entry, ...]
    changed: tuple[Difference, ...]
    unchanged: int
    unmentioned: tuple[Holding, ...]

    @property
    def recounted(self) -> tuple[Difference, ...]:
        """The holdings whose count changes."""
        return tuple(difference for difference in self.changed if difference.recounted)

    @property
    def amended(self) -> tuple[Difference, ...]:
        """The holdings of which other traits change."""
        return tuple(difference for difference in self.changed if difference.amended)


def plan_of(holdings: Iterable[Holding], entries: Sequence[Entry]) -> LoadPlan:
    """Compare entries with the stock.

    Parameters
    ----------
    holdings : the whole stock. entries : what the sheets say.

    Raises
    ------
    StockError : two entries speak of one holding, or a count is below what is claimed; the
        message has one line for each such entry.
    """
    known = {identity_of(holding.part, holding.drawer): holding for holding in holdings}
    mentioned = _without_twins(entries)
    corrected = _corrections(known, mentioned)
    pairs = [
        (known.get(identity) or corrected.get(identity), entry)
        for identity, entry in mentioned.items()
    ]
    _refuse_below_claims(pairs)
    differences = [difference(holding, entry) for holding, entry in pairs if holding is not None]
    changed = tuple(found for found in differences if found.recounted or found.amended)
    drawers = {entry.drawer.casefold() for entry in entries}
    met = {holding.id for holding, _ in pairs if holding is not None}
    return LoadPlan(
        new=tuple(entry for holding, entry in pairs if holding is None),
        changed=changed,
        unchanged=len(differences) - len(changed),
        unmentioned=tuple(
            holding
            for holding in known.values()
            if holding.id not in met
            and holding.drawer.casefold() in drawers
            and not _is_empty(holding)
        ),
    )


def _without_twins(entries: Sequence[Entry]) -> dict[tuple[object, ...], Entry]:
    """Key the entries by what they speak of; refuse two that speak of the same."""
    keyed: dict[tuple[object, ...], Entry] = {}
    twins: list[str] = []
    for entry in entries:
        first = keyed.setdefault(entry.identity, entry)
        if first is not entry:
            twins.append(
                f"{entry.place} says the same part in drawer {entry.drawer} as {first.place}; "
                "put them in one row, or in two drawers."
            )
    if twins:
        raise StockError("\n".join(twins))
    return keyed


def _corrections(
    known: Mapping[tuple[object, ...], Holding], mentioned: Mapping[tuple[object, ...], Entry]
) -> dict[tuple[object, ...], Holding]:
    """Find the rows that can only be a holding whose traits were corrected, by their identity."""
    old: dict[tuple[object, ...], list[Holding]] = {}
    for identity, holding in known.items():
        if identity not in mentioned and not _is_empty(holding):
            old.setdefault(_likeness(holding.part, holding.drawer), []).append(holding)
    new: dict[tuple[object, ...], list[Entry]] = {}
    for identity, entry in mentioned.items():
        if identity not in known:
            new.setdefault(_likeness(entry.part, entry.drawer), []).append(entry)
    found = {}
    for likeness, (entry, *more) in new.items():
        candidates = old.get(likeness, [])
        if more or len(candidates) != 1:
            continue
        (holding,) = candidates
        own = identity_of(holding.part, holding.drawer)
        merged = identity_of(_filled(holding.part, entry.part), holding.drawer)
        # What the row leaves blank is kept; that must not make it a part which is there already.
        if merged in (own, entry.identity) or not (merged in known or merged in mentioned):
            found[entry.identity] = holding
    return found


def _likeness(part: Part, drawer: str) -> tuple[object, ...]:
    """Give what a correction leaves as it is."""
    return (drawer.casefold(), part.kind, part.value, part.measured is None)


def _refuse_below_claims(pairs: Iterable[tuple[Holding | None, Entry]]) -> None:
    """Refuse counts that would leave less than what is put aside."""
    short = [
        f"{entry.place} counts {entry.count.number} in drawer {holding.drawer}, but "
        f"{holding.claimed} of holding {holding.id} are claimed; release some, or count again."
        for holding, entry in pairs
        if holding is not None
        and entry.count.sureness is not Sureness.PLENTY
        and entry.count.number < holding.claimed
    ]
    if short:
        raise StockError("\n".join(short))


def difference(holding: Holding, entry: Entry) -> Difference:
    """Tell in what an entry differs from the holding it speaks of; empty cells are filled."""
    part = _filled(holding.part, entry.part)
    amended = tuple(
        name
        for name in (*CORRECTABLE, *AMENDABLE)
        if getattr(part, name) != getattr(holding.part, name)
    )
    return Difference(holding, replace(entry, part=part), holding.count != entry.count, amended)


def _filled(old: Part, new: Part) -> Part:
    """Keep what is known wherever the sheet says nothing."""
    silent = {
        name: getattr(old, name)
        for name in (*CORRECTABLE, *AMENDABLE)
        if getattr(new, name) in (None, "")
    }
    return replace(new, **silent)


def _is_empty(holding: Holding) -> bool:
    return holding.count.sureness is not Sureness.PLENTY and holding.count.number == 0
