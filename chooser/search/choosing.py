"""From lots to holdings: which of several equal drawers a fit takes its parts from.

Tie-breaks between fits of equal error and parts: how many times the scarcest of the picked
holdings would allow the fit to be built (more is better), then the ids of the resistors and of
the capacitors (lower first), and at last the written form.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations_with_replacement, islice, permutations, product
from typing import Any

from chooser.networks import Leaf, Network, canonical, members, replace, write_network
from chooser.search.pools import PLENTY, Lot, Pool
from chooser.search.ranking import Pairing, order_key
from chooser.search.request import Request

MOST_WAYS = 20_000
"""Ways to take one pairing from the drawers that are weighed; far beyond any real drawer."""


@dataclass(frozen=True, slots=True)
class Choice:
    """A pairing with the holdings decided.

    Attributes
    ----------
    pairing : the lots. resistor, capacitor : the networks of holding ids, canonical.
    """

    pairing: Pairing
    resistor: Network[int]
    capacitor: Network[int]


@dataclass(frozen=True, slots=True)
class Drawers:
    """What the tie-breaks need to know of the holdings of a pool, by id.

    Attributes
    ----------
    lots : the lots of the pool.
    value : effective value, ohm or farad. uses : pieces that one board may use.
    """

    lots: tuple[Lot, ...]
    value: Mapping[int, float]
    uses: Mapping[int, int]

    @classmethod
    def of(cls, pool: Pool) -> Drawers:
        """Index a pool."""
        value: dict[int, float] = {}
        uses: dict[int, int] = {}
        for lot in pool.lots:
            for holding, most in zip(lot.holdings, lot.uses, strict=True):
                value[holding.id] = holding.part.effective
                uses[holding.id] = most
        return cls(pool.lots, value, uses)


def choices(
    pairings: Sequence[Pairing], resistors: Drawers, capacitors: Drawers, request: Request
) -> tuple[list[Choice], bool]:
    """Decide the holdings of the shortlisted pairings and sort them all.

    Parameters
    ----------
    pairings : the shortlist, ties at the last place included.
    resistors, capacitors : the holdings that the lots stand for.

    Returns
    -------
    The choices in strict order, at least the first `request.top` of the whole space, and True;
    or False beside them where a pairing had more than MOST_WAYS and the rest was not weighed.
    """
    key = order_key(request.rank)
    complete = True
    found: list[tuple[tuple[Any, ...], Choice]] = []
    for pairing in pairings:
        ways = product(
            assignments(pairing.resistor, resistors, request.top),
            assignments(pairing.capacitor, capacitors, request.top),
        )
        for ohms, farads in islice(ways, MOST_WAYS):
            choice = Choice(pairing, ohms, farads)
            found.append(((*key(pairing), *tie_break(choice, resistors, capacitors)), choice))
        complete = complete and next(ways, None) is None
    found.sort(key=lambda pair: pair[0])
    return [choice for _, choice in found], complete


def best_choice(
    pairing: Pairing, resistors: Drawers, capacitors: Drawers, request: Request
) -> Choice:
    """Decide the holdings of one pairing by the tie-breaks."""
    return choices([pairing], resistors, capacitors, request)[0][0]


def tie_break(choice: Choice, resistors: Drawers, capacitors: Drawers) -> tuple[Any, ...]:
    """Return the part of the sort key that settles equal errors and parts."""
    ohms, farads = sorted(members(choice.resistor)), sorted(members(choice.capacitor))
    plenty = min(
        *(_times(resistors.uses[number], ohms.count(number)) for number in ohms),
        *(_times(capacitors.uses[number], farads.count(number)) for number in farads),
    )
    return (-plenty, ohms, farads, _written(choice.resistor), _written(choice.capacitor))


def _times(uses: int, pieces: int) -> int:
    """Tell how many times so many pieces can be taken; of a plenty always as often."""
    return uses if uses >= PLENTY else uses // pieces


def _written(network: Network[int]) -> str:
    return write_network(network, str)


def assignments(network: Network[int], drawers: Drawers, top: int) -> Iterator[Network[int]]:
    """Yield the different ways to take a network of lots from holdings.

    Of holdings that are equally many only the first few ids can be among the first `top`, so
    that a lot of a hundred bags does not make a million ways.

    Parameters
    ----------
    network : leaves are numbers of lots.
    drawers : the holdings. top : how many ways the caller can use at most.
    """
    leaves = list(members(network))
    different = sorted(set(leaves))
    if all(len(drawers.lots[lot].holdings) == 1 for lot in different):
        yield _settled(
            replace(network, lambda lot: drawers.lots[lot].holdings[0].id), drawers.value
        )
        return
    ways = [_ways(drawers.lots[lot], leaves.count(lot), top) for lot in different]
    seen: set[Network[int]] = set()
    for picked in product(*ways):
        for arranged in _arranged(network, dict(zip(different, picked, strict=True)), drawers):
            if arranged not in seen:
                seen.add(arranged)
                yield arranged


def _ways(lot: Lot, pieces: int, top: int) -> list[tuple[int, ...]]:
    """List the multisets of `pieces` holdings of a lot that the counts allow, as rising ids."""
    alike: dict[int, int] = {}
    uses_of: dict[int, int] = {}
    for holding, uses in zip(lot.holdings, lot.uses, strict=True):
        alike[uses] = alike.get(uses, 0) + 1
        if alike[uses] <= top + pieces:
            uses_of[holding.id] = min(uses, PLENTY)
    return [
        picked
        for picked in combinations_with_replacement(uses_of, pieces)
        if all(picked.count(number) <= uses_of[number] for number in set(picked))
    ]


def _arranged(
    network: Network[int], picked: Mapping[int, tuple[int, ...]], drawers: Drawers
) -> Iterator[Network[int]]:
    """Yield the different ways to put picked holdings on the leaves of their lots."""
    orders = [sorted(set(permutations(numbers))) for numbers in picked.values()]
    for arrangement in product(*orders):
        supply = {lot: iter(row) for lot, row in zip(picked, arrangement, strict=True)}
        yield _settled(_filled(network, supply), drawers.value)


def _filled(network: Network[int], supply: Mapping[int, Iterator[int]]) -> Network[int]:
    return replace(network, lambda lot: next(supply[lot]))


def _settled(network: Network[int], value: Mapping[int, float]) -> Network[int]:
    """Return the canonical form: small values first, then low ids."""
    if isinstance(network, Leaf):
        return network
    return canonical(network, lambda number: (value[number], number))
