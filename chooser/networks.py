"""Series/parallel networks of parts of one kind: value, tolerance shares, reading and writing.

Conventions
-----------
`+` joins end to end and `||` joins side by side, for resistors and capacitors alike, so `+`
makes resistances larger and capacitances smaller.  A network is a tree whose leaves hold
anything (a holding, a value, a number in a table); what a leaf is worth is said by a function.
Every network function is homogeneous of degree one and increasing in each part; corners and
shares rest on that.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction
from typing import Generic, TypeVar

from chooser.errors import AmbiguousValueError, UnreadableValueError
from chooser.parts import Kind, Tolerance

T = TypeVar("T")
U = TypeVar("U")
V = TypeVar("V", float, Fraction)

DEEPEST_BRACKETS = 40
"""Brackets inside brackets that a written network may have; real ones have three or four."""


class Join(StrEnum):
    """How the children of a group are joined; the value is the sign people write."""

    SERIES = "+"
    PARALLEL = "||"

    @property
    def dual(self) -> Join:
        """The other way to join."""
        return Join.PARALLEL if self is Join.SERIES else Join.SERIES


@dataclass(frozen=True, slots=True)
class Leaf(Generic[T]):
    """One part."""

    member: T


@dataclass(frozen=True, slots=True)
class Group(Generic[T]):
    """Two or more networks joined one way."""

    join: Join
    children: tuple[Leaf[T] | Group[T], ...]


Network = Leaf[T] | Group[T]


def adding_join(kind: Kind) -> Join:
    """Return the join under which values of this kind simply add up."""
    return Join.PARALLEL if kind is Kind.CAPACITOR else Join.SERIES


def members(network: Network[T]) -> Iterator[T]:
    """Yield what the leaves hold, from left to right, repeats included."""
    if isinstance(network, Leaf):
        yield network.member
    else:
        for child in network.children:
            yield from members(child)


def replace(network: Network[T], member: Callable[[T], U]) -> Network[U]:
    """Return the same arrangement with every leaf's member changed."""
    if isinstance(network, Leaf):
        return Leaf(member(network.member))
    return Group(network.join, tuple(replace(child, member) for child in network.children))


def value_of(network: Network[T], adds: Join, of: Callable[[T], V]) -> V:
    """Calculate the value of a network.

    Parameters
    ----------
    network : the network.
    adds : the join under which the values add (`adding_join`); under the other one their
        reciprocals add.
    of : value of a leaf's member in ohm or farad (for a leak conductance: siemens), >= 0.

    Returns
    -------
    The value in the same unit; exact where `of` gives fractions.

    References
    ----------
    Kirchhoff's laws.
    """
    if isinstance(network, Leaf):
        return of(network.member)
    values = [value_of(child, adds, of) for child in network.children]
    if network.join is adds:
        return sum(values[1:], values[0])
    if 0 in values:
        return values[0] * 0
    reciprocals = [1 / value for value in values]
    return 1 / sum(reciprocals[1:], reciprocals[0])


def shares_of(
    network: Network[T], adds: Join, of: Callable[[T], float]
) -> tuple[tuple[T, float], ...]:
    """Tell how much of a small relative change of each part reaches the whole.

    The share of part i is w_i = (x_i / X) dX/dx_i: for resistors its share of the power, for
    capacitors of the stored energy.  Shares are positive and sum to one (Euler's theorem on
    homogeneous functions of degree one).

    Parameters
    ----------
    network, adds, of : as in `value_of`.

    Returns
    -------
    (member, share) for every leaf from left to right; shares are dimensionless.
    """
    if isinstance(network, Leaf):
        return ((network.member, 1.0),)
    whole = value_of(network, adds, of)
    found: list[tuple[T, float]] = []
    for child in network.children:
        part = value_of(child, adds, of)
        weight = part / whole if network.join is adds else whole / part
        found += [(member, weight * share) for member, share in shares_of(child, adds, of)]
    return tuple(found)


@dataclass(frozen=True, slots=True)
class ToleranceShare(Generic[T]):
    """What one part's tolerance does to the value of its network, to first order.

    Attributes
    ----------
    member : what the leaf holds. share : its share of the value, see `shares_of`.
    minus, plus : worst case, relative to the network's value, both >= 0.
    spread, shift : one sigma and mean shift, relative to the network's value.
    """

    member: T
    share: float
    minus: float
    plus: float
    spread: float
    shift: float


def tolerance_shares(
    network: Network[T],
    adds: Join,
    of: Callable[[T], float],
    tolerance: Callable[[T], Tolerance],
) -> tuple[ToleranceShare[T], ...]:
    """Tell which part brings how much of the uncertainty, from left to right.

    Parameters
    ----------
    network, adds, of : as in `value_of`.
    tolerance : limits of a leaf's member, relative to its value.
    """
    return tuple(
        ToleranceShare(
            member,
            share,
            share * tolerance(member).minus,
            share * tolerance(member).plus,
            share * tolerance(member).spread,
            share * tolerance(member).shift,
        )
        for member, share in shares_of(network, adds, of)
    )


@dataclass(frozen=True, slots=True)
class SlotTolerance:
    """What the tolerances of a network's parts do to its value.

    Attributes
    ----------
    value : nominal value, ohm or farad.
    low, high : worst-case ends, ohm or farad: all parts at their low, all at their high limit.
    spread : one sigma, relative; the parts of a slot err together, so their shares add.
    shift : relative mean shift by asymmetric tolerances.
    """

    value: float
    low: float
    high: float
    spread: float
    shift: float


def slot_tolerance(
    network: Network[T],
    adds: Join,
    of: Callable[[T], float],
    tolerance: Callable[[T], Tolerance],
) -> SlotTolerance:
    """Add up the tolerances of a network's parts.

    Parameters
    ----------
    network, adds, of, tolerance : as in `tolerance_shares`.

    Returns
    -------
    The slot's corners (exact, because the value increases in each part) and, to first order,
    its spread and mean shift.
    """
    parts = tolerance_shares(network, adds, of, tolerance)
    return SlotTolerance(
        value=value_of(network, adds, of),
        low=value_of(network, adds, lambda part: of(part) * (1 - tolerance(part).minus)),
        high=value_of(network, adds, lambda part: of(part) * (1 + tolerance(part).plus)),
        spread=sum(part.spread for part in parts),
        shift=sum(part.shift for part in parts),
    )


def canonical(network: Network[T], order: Callable[[T], object]) -> Network[T]:
    """Return the one form that all orders of writing the same network share.

    Groups inside a group of the same join are dissolved; in each group single parts come first,
    then groups, both by `order` of their members.

    Parameters
    ----------
    network : the network.
    order : sort key of a leaf's member; keys must be comparable with each other.
    """
    return _canonical(network, order)[1]


def _canonical(
    network: Network[T], order: Callable[[T], object]
) -> tuple[tuple[object, ...], Network[T]]:
    if isinstance(network, Leaf):
        return (0, order(network.member)), network
    children: list[tuple[tuple[object, ...], Network[T]]] = []
    for child in network.children:
        key, shaped = _canonical(child, order)
        if isinstance(shaped, Group) and shaped.join is network.join:
            children += [_canonical(grandchild, order) for grandchild in shaped.children]
        else:
            children.append((key, shaped))
    children.sort(key=lambda pair: pair[0])
    keys = tuple(key for key, _ in children)
    group = Group(network.join, tuple(child for _, child in children))
    return (1, len(keys), network.join.value, keys), group


def write_network(network: Network[T], text: Callable[[T], str]) -> str:
    """Write a network as people do: `10k + (22k || 47k)`, brackets only where the join changes."""
    if isinstance(network, Leaf):
        return text(network.member)
    pieces = [
        f"({write_network(child, text)})" if isinstance(child, Group) else text(child.member)
        for child in network.children
    ]
    return f" {network.join.value} ".join(pieces)


def parse_network(text: str, value: Callable[[str], T]) -> Network[T]:
    """Read a network from text, the inverse of `write_network`.

    Parameters
    ----------
    text : for instance `10k + (22k || 47k)`; blanks do not matter.
    value : reads one part, for instance `chooser.quantities.parse_resistance`.

    Raises
    ------
    AmbiguousValueError
        `+` and `||` side by side without brackets: both readings are named.
    UnreadableValueError
        Anything else that is no network; what `value` raises passes through.
    """
    reader = _Reader(text)
    network = reader.group(depth=0)
    if reader.left():
        raise UnreadableValueError(text, "has a closing bracket too many", "pair the brackets")
    return replace(network, value)


class _Reader:
    """A cursor over the text of a network."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.place = 0

    def left(self) -> str:
        return self.text[self.place :].strip()

    def group(self, depth: int) -> Network[str]:
        """Read operands and joins up to the closing bracket or the end."""
        operands = [self.operand(depth)]
        joins: list[Join] = []
        while (join := self.join()) is not None:
            joins.append(join)
            operands.append(self.operand(depth))
        if len(set(joins)) > 1:
            raise AmbiguousValueError(
                self.text,
                _bracketings(operands, joins),
                "mixes + and || without brackets",
            )
        return Group(joins[0], tuple(operands)) if joins else operands[0]

    def operand(self, depth: int) -> Network[str]:
        """Read one part or one bracket."""
        self.skip_blanks()
        if self.text.startswith("(", self.place):
            if depth >= DEEPEST_BRACKETS:
                raise UnreadableValueError(self.text, "has too many brackets inside each other")
            self.place += 1
            inner = self.group(depth + 1)
            self.skip_blanks()
            if not self.text.startswith(")", self.place):
                raise UnreadableValueError(
                    self.text, "lacks a closing bracket", "pair the brackets"
                )
            self.place += 1
            return inner
        start = self.place
        while self.place < len(self.text) and self.text[self.place] not in "+|()":
            self.place += 1
        part = self.text[start : self.place].strip()
        if not part:
            raise UnreadableValueError(
                self.text, "lacks a part between its signs", "write it like 10k + (22k || 47k)"
            )
        return Leaf(part)

    def join(self) -> Join | None:
        """Read a join sign, or nothing at a closing bracket or the end."""
        self.skip_blanks()
        for join in Join:
            if self.text.startswith(join.value, self.place):
                self.place += len(join.value)
                return join
        if self.place < len(self.text) and self.text[self.place] != ")":
            raise UnreadableValueError(
                self.text, f"cannot go on at {self.left()!r}", "join parts with + or ||"
            )
        return None

    def skip_blanks(self) -> None:
        while self.place < len(self.text) and self.text[self.place].isspace():
            self.place += 1


def _bracketings(operands: Sequence[Network[str]], joins: Sequence[Join]) -> tuple[str, str]:
    """Write the two readings of a mixed row: one with the || bound tighter, one with the +."""
    return _bound_by(Join.PARALLEL, operands, joins), _bound_by(Join.SERIES, operands, joins)


def _bound_by(tight: Join, operands: Sequence[Network[str]], joins: Sequence[Join]) -> str:
    runs: list[list[Network[str]]] = [[operands[0]]]
    for join, operand in zip(joins, operands[1:], strict=True):
        if join is tight:
            runs[-1].append(operand)
        else:
            runs.append([operand])
    children = tuple(run[0] if len(run) == 1 else Group(tight, tuple(run)) for run in runs)
    return write_network(Group(tight.dual, children), str)
