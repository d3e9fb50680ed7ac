"""A search so plain that it can be trusted: lists every network as a tree and sorts them all.

It shares nothing with the package but the records of the stock.  Networks are frozensets of
multisets, so that the order inside a group cannot matter; values are fractions.
"""

from __future__ import annotations

import math
from collections import Counter
from fractions import Fraction
from functools import lru_cache
from itertools import combinations_with_replacement

LN3 = Fraction(math.log(3.0))


@lru_cache(maxsize=None)
def networks(parts: tuple[int, ...]) -> frozenset:
    """Every network that uses all of a sorted tuple of part numbers.

    A network is a part number, or (sign, sorted tuple of (network text, network) children).
    """
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


def ppm(size: Fraction) -> int:
    """Whole parts per million, halves up."""
    return math.floor(size * 1_000_000 + Fraction(1, 2))


def ranked(
    ohms: dict[int, tuple[float, int]],
    farads: dict[int, tuple[float, int]],
    target: float,
    rank: str,
    most: tuple[int, int],
    boards: int,
) -> list[tuple]:
    """Sort the whole space of the ideal monostable.

    Parameters
    ----------
    ohms, farads : value and count of every holding, by id.
    most : parts that a resistor and a capacitor slot may have.

    Returns
    -------
    (ppm, parts, size of the error, plentiful, resistor ids, capacitor ids) of every fit.
    """
    r_uses = {part: count // boards for part, (_, count) in ohms.items() if count // boards}
    c_uses = {part: count // boards for part, (_, count) in farads.items() if count // boards}
    r_worth = {part: fraction(number) for part, (number, _) in ohms.items()}
    c_worth = {part: fraction(number) for part, (number, _) in farads.items()}
    uses = {**r_uses, **c_uses}
    resistors = [
        (value(network, r_worth, "+"), parts_of(network))
        for network in all_networks(r_uses, most[0])
    ]
    capacitors = [
        (value(network, c_worth, "||"), parts_of(network))
        for network in all_networks(c_uses, most[1])
    ]
    wanted = fraction(target)
    rows = []
    for ohm, r_parts in resistors:
        for farad, c_parts in capacitors:
            size = abs(ohm * farad * LN3 / wanted - 1)
            together = Counter(r_parts + c_parts)
            plentiful = min(uses[part] // count for part, count in together.items())
            rows.append((ppm(size), len(r_parts) + len(c_parts), size, plentiful, r_parts, c_parts))
    if rank == "error":
        rows.sort(key=lambda row: (row[0], row[1], row[2], -row[3], row[4], row[5]))
    else:
        rows.sort(key=lambda row: (row[1], row[2], -row[3], row[4], row[5]))
    return rows
