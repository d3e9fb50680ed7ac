"""What cannot be true of a part, and what cannot be a name: one set of checks for every way in.

Conventions: SI units and fractions, as in `chooser.parts`. The checks say what is wrong; the
edges say where.
"""

from __future__ import annotations

from dataclasses import dataclass

from chooser import quantities
from chooser.errors import UnreadableValueError
from chooser.parts import Kind, Part, Tolerance

_POTS = (Kind.POT, Kind.TRIMMER)
TRAIT_KINDS: dict[str, tuple[Kind, ...]] = {
    "power": (Kind.RESISTOR, *_POTS),
    "leakage": (Kind.CAPACITOR,),
    "taper": _POTS,
    "turns": _POTS,
    "end_resistance": _POTS,
}
"""The kinds that have a trait, where not all of them do."""

_FURTHEST = 3.0
"""No part that still works is this many times off; a lost `k` or `n` is a thousand times."""
LONGEST_DRAWER = 60
"""Characters of the name of a drawer; it has to fit into a line with everything else."""
LONGEST_NOTE = 500
"""Characters of a note."""


@dataclass(frozen=True, slots=True)
class Complaint:
    """One trait that cannot be.

    Attributes
    ----------
    trait : field of `Part`. problem : what is wrong with it, to stand behind what was seen.
    advice : what to do. Neither ends in a full stop.
    """

    trait: str
    problem: str
    advice: str


def complaints_of(part: Part, marked: Tolerance | None = None) -> tuple[Complaint, ...]:
    """Find the traits that are fine alone and cannot be true together.

    Parameters
    ----------
    part : as it was said. marked : the tolerance its marking tells by a letter, or None.

    Returns
    -------
    What is wrong, in the order of the fields; empty where nothing is.
    """
    found = []
    if marked is not None and part.tolerance not in (None, marked):
        found.append(
            Complaint(
                "tolerance",
                f"is not what the letter of the marking {part.marking} says",
                "correct the one that is wrong",
            )
        )
    for trait, kinds in TRAIT_KINDS.items():
        if part.kind not in kinds and getattr(part, trait) is not None:
            found.append(unfitting(trait, part.kind))
    if not part.value / _FURTHEST <= part.effective <= part.value * _FURTHEST:
        found.append(
            Complaint(
                "measured",
                f"is far from the value {_printed(part)}",
                "look at its unit, or give the value that is printed on the part",
            )
        )
    if part.end_resistance is not None and part.end_resistance >= part.value:
        found.append(
            Complaint(
                "end_resistance",
                f"is not below the value {_printed(part)}",
                "give what is left at the stop, such as 2R",
            )
        )
    return tuple(found)


def unfitting(trait: str, kind: Kind) -> Complaint:
    """Say that a kind of part has no such trait."""
    name = trait.replace("_", " ")
    return Complaint(trait, f"is said of a {kind.value}, which has no {name}", "leave it out")


def drawer_name(text: str) -> str:
    """Read the name of a drawer: printable, not blank, at most 60 characters.

    Raises
    ------
    UnreadableValueError : it is none.
    """
    name = _printable(text)
    if not name:
        raise UnreadableValueError(text, "is no name of a drawer", "give one, such as A4")
    if len(name) > LONGEST_DRAWER:
        raise UnreadableValueError(
            f"{name[:20]}…",
            f"is {len(name)} characters long",
            f"keep the name of a drawer to {LONGEST_DRAWER} at most",
        )
    return name


def free_text(text: str) -> str:
    """Read a note: printable, at most 500 characters; white space becomes single spaces.

    Raises
    ------
    UnreadableValueError : it is too long, or could drive a terminal.
    """
    note = _printable(text)
    if len(note) > LONGEST_NOTE:
        raise UnreadableValueError(
            f"{note[:20]}…", f"is {len(note)} characters long", f"keep it to {LONGEST_NOTE} at most"
        )
    return note


def _printable(text: str) -> str:
    cleaned = " ".join(text.split())
    if not cleaned.isprintable():
        raise UnreadableValueError(text, "holds characters that cannot be printed", "type it again")
    return cleaned


def _printed(part: Part) -> str:
    """Give the value as it stands on the part, or as it would."""
    if part.marking:
        return part.marking
    write = (
        quantities.format_capacitance
        if part.kind is Kind.CAPACITOR
        else quantities.format_resistance
    )
    return write(part.value)
