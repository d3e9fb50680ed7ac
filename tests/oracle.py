"""A search so plain that it can be trusted: lists every network as a tree and sorts them all.

It shares nothing with the package.  A network is a part number, or (sign, sorted children), so
that the order inside a group cannot matter; values are fractions.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable
from fractions import Fraction
from functools import cache
from itertools import combinations_with_replacement

LN3 = Fraction(math.log(3.0))


PLENTY = 10**9
"""Stands for the count of a drawer that never limits."""


@cache
def networks(parts: tuple[int, ...]) -> frozenset:
    """Every network that uses all of a sorted tuple of part numbers."""
    if len(parts) == 1:
        return frozenset(parts)
    found = set()
    for left, right in splits(parts):
        for one in networks(left):
            for other in networks(right):
                for sign in ("+", "||"):
                    found.add(join(sign, one, other))
    return frozenset(found)


def splits(parts: tuple[int, ...]):
    """Every way to part a multiset in two non-empty multisets."""
    seen = set()
    for bits in range(1, 2 ** len(parts) - 1):
        left = tuple(part for place, part in enumerate(parts) if bits >> place & 1)
        right = tuple(part for place, part in enumerate(parts) if not bits >> place & 1)
        if (left, right) not in seen:
            seen.add((left, right))
            yield left, right


def join(sign: str, one, other):
    """Join two networks; a group of the same sign dissolves into the new one."""
    children = []
    for network in (one, other):
        if isinstance(network, tuple) and network[0] == sign:
            children += network[1]
        else:
            children.append(network)
    return (sign, tuple(sorted(children, key=repr)))


def value(network, worth: dict[int, Fraction], adds: str) -> Fraction:
    """The value of a network; `adds` is the sign under which values add up."""
    if not isinstance(network, tuple):
        return worth[network]
    values = [value(child, worth, adds) for child in network[1]]
    return sum(values) if network[0] == adds else 1 / sum(1 / each for each in values)


def parts_of(network) -> list[int]:
    """The part numbers of a network, sorted, repeats included."""
    if not isinstance(network, tuple):
        return [network]
    return sorted(part for child in network[1] for part in parts_of(child))


def all_networks(uses: dict[int, int], most: int) -> list:
    """Every network of at most `most` parts in which no part occurs more often than it may."""
    found = []
    for size in range(1, most + 1):
        for parts in combinations_with_replacement(sorted(uses), size):
            if all(count <= uses[part] for part, count in Counter(parts).items()):
                found += networks(parts)
    return found


def fraction(number: float) -> Fraction:
    """The decimal number that a float was read from."""
    return Fraction(repr(number))


def ppm(size: Fraction | float) -> int:
    """Whole parts per million, halves up."""
    return math.floor(Fraction(size) * 1_000_000 + Fraction(1, 2))


def shares(network, worth: dict[int, Fraction], adds: str) -> list[tuple[int, Fraction]]:
    """Each part with (x / X) dX/dx, by differentiating sums and sums of reciprocals."""
    if not isinstance(network, tuple):
        return [(network, Fraction(1))]
    whole = value(network, worth, adds)
    found = []
    for child in network[1]:
        part = value(child, worth, adds)
        weight = part / whole if network[0] == adds else whole / part
        found += [(number, weight * share) for number, share in shares(child, worth, adds)]
    return found


def polar_in_series(network, polar: set[int], *, inside: bool = False) -> bool:
    """Whether one of the polar parts stands anywhere in a series group."""
    if not isinstance(network, tuple):
        return inside and network in polar
    inside = inside or network[0] == "+"
    return any(polar_in_series(child, polar, inside=inside) for child in network[1])


def uses_of(stock: dict[int, tuple[float, int | None]], boards: int) -> dict[int, int]:
    """Pieces of each part that one of so many boards may use; None counts as plenty."""
    uses = {
        part: PLENTY if count is None else count // boards for part, (_, count) in stock.items()
    }
    return {part: most for part, most in uses.items() if most}


def plentiful(uses: dict[int, int], taken: list[int]) -> float:
    """How many times over the scarcest of the taken parts is there; plenty is without end."""
    return min(
        math.inf if uses[part] == PLENTY else uses[part] // count
        for part, count in Counter(taken).items()
    )


def ranked(  # noqa: PLR0917 - the question has six parts
    ohms: dict[int, tuple[float, int | None]],
    farads: dict[int, tuple[float, int | None]],
    target: float,
    rank: str,
    most: tuple[int, int],
    boards: int,
) -> list[tuple]:
    """Sort the whole space of the ideal monostable.

    Parameters
    ----------
    ohms, farads : value and count (None: plenty) of every holding, by id.
    most : parts that a resistor and a capacitor slot may have.

    Returns
    -------
    (ppm, parts, size of the error, plentiful, resistor ids, capacitor ids) of every fit.
    """
    wanted = fraction(target)

    def size(ohm: Fraction, farad: Fraction, _: object) -> Fraction:
        return abs(ohm * farad * LN3 / wanted - 1)

    return in_order(space(ohms, farads, most, boards, size), rank)


def space(
    ohms: dict[int, tuple[float, int | None]],
    farads: dict[int, tuple[float, int | None]],
    most: tuple[int, int],
    boards: int,
    size: Callable,
) -> list[tuple]:
    """List every circuit; `size(ohm, farad, capacitor network)` is its error, None: not allowed.

    The rows are those of `ranked`, unsorted.
    """
    r_uses, c_uses = uses_of(ohms, boards), uses_of(farads, boards)
    r_worth = {part: fraction(number) for part, (number, _) in ohms.items()}
    c_worth = {part: fraction(number) for part, (number, _) in farads.items()}
    uses = {**r_uses, **c_uses}
    resistors = [
        (value(network, r_worth, "+"), parts_of(network))
        for network in all_networks(r_uses, most[0])
    ]
    rows = []
    for network in all_networks(c_uses, most[1]):
        farad, c_parts = value(network, c_worth, "||"), parts_of(network)
        for ohm, r_parts in resistors:
            error = size(ohm, farad, network)
            if error is not None:
                parts = len(r_parts) + len(c_parts)
                many = plentiful(uses, r_parts + c_parts)
                rows.append((ppm(error), parts, error, many, r_parts, c_parts))
    return rows


def in_order(rows: list[tuple], rank: str) -> list[tuple]:
    """Sort rows by `error` or `count`; the stock's order of ids settles the rest."""
    if rank == "error":
        return sorted(rows, key=lambda row: (row[0], row[1], row[2], -row[3], row[4], row[5]))
    return sorted(rows, key=lambda row: (row[1], row[2], -row[3], row[4], row[5]))
