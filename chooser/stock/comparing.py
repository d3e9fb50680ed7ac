"""What sheets say against what the stock says: pure, no database.

Conventions: a sheet states what lies in a drawer. A difference in count becomes a correction, a
difference in the other traits amends the holding, and holdings that the sheets do not mention
stay as they are. An empty cell says nothing: it keeps what the stock already knows.

A row that matches no holding, where its drawer has exactly one unmentioned holding of the same
kind and value (both measured or neither), is that holding with a trait corrected: else every
slip of the pen that is mended would count the parts twice.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

from chooser.errors import StockError
from chooser.parts import Count, Entry, Holding, Part, Sureness, identity_of

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
    """Find the rows that can only be a holding whose traits were corrected, by their identity.

    First the rows that merely fill in what was blank, then those of the same count in which one
    trait differs; each only where row and holding have no other to go with.
    """
    old = [
        holding
        for identity, holding in known.items()
        if identity not in mentioned and not _is_empty(holding)
    ]
    new = [entry for identity, entry in mentioned.items() if identity not in known]
    found: dict[tuple[object, ...], Holding] = {}
    for contradictions in (0, 1):
        taken = {holding.id for holding in found.values()}
        partners = {
            entry.identity: [
                holding
                for holding in old
                if holding.id not in taken and _may_be(holding, entry, contradictions)
            ]
            for entry in new
            if entry.identity not in found
        }
        wooed = Counter(holding.id for holdings in partners.values() for holding in holdings)
        for entry in new:
            holdings = partners.get(entry.identity, [])
            if len(holdings) == 1 and wooed[holdings[0].id] == 1:
                (holding,) = holdings
                own = identity_of(holding.part, holding.drawer)
                merged = identity_of(_filled(holding.part, entry.part), holding.drawer)
                # What a row leaves blank is kept; it must not become a part already there.
                if merged in (own, entry.identity) or not (merged in known or merged in mentioned):
                    found[entry.identity] = holding
    return found


def _may_be(holding: Holding, entry: Entry, contradictions: int) -> bool:
    """Tell whether a row may be a holding with so many of its traits corrected."""
    old, new = holding.part, entry.part
    if (holding.drawer.casefold(), old.kind, old.value) != (
        entry.drawer.casefold(),
        new.kind,
        new.value,
    ):
        return False
    alone = holding.count == entry.count == Count(1)
    if (old.measured is None) != (new.measured is None) and not (alone and old.measured is None):
        return False  # a measured piece is another line than the bag it came from
    differing = sum(
        getattr(old, name) != getattr(new, name)
        for name in CORRECTABLE
        if getattr(old, name) is not None and getattr(new, name) is not None
    )
    return differing == contradictions and (differing == 0 or holding.count == entry.count)


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
