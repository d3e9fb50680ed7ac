"""From lots to holdings: which of several equal drawers a fit takes its parts from.

Tie-breaks between fits of equal error and parts: how many times the scarcest of the picked
holdings would allow the fit to be built (more is better), then the ids of the resistors and of
the capacitors (lower first), and at last the written form.
"""

from __future__ import annotations

from bisect import bisect_left
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from heapq import nsmallest
from itertools import combinations_with_replacement, islice, permutations, product
from typing import Any

from chooser.networks import Leaf, Network, canonical, members, replace, write_network
from chooser.search.pools import PLENTY, Lot, Pool
from chooser.search.ranking import Pairing, order_key
from chooser.search.request import Request


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
) -> list[Choice]:
    """Decide the holdings of the shortlisted pairings and sort them all.

    Parameters
    ----------
    pairings : the shortlist, ties at the last place included.
    resistors, capacitors : the holdings that the lots stand for.

    Returns
    -------
    The choices in strict order, at least the first `request.top` of the whole space.
    """
    key = order_key(request.rank)
    found: list[tuple[tuple[Any, ...], Choice]] = []
    for pairing in pairings:
        ways = ranked_ways(pairing, resistors, capacitors, request.top)
        found += [
            ((*key(pairing), *tie_break(choice, resistors, capacitors)), choice)
            for choice in islice(ways, request.top)
        ]
    found.sort(key=lambda pair: pair[0])
    return [choice for _, choice in found]


def best_choice(pairing: Pairing, resistors: Drawers, capacitors: Drawers) -> Choice:
    """Decide the holdings of one pairing by the tie-breaks."""
    return next(ranked_ways(pairing, resistors, capacitors, 1))


def tie_break(choice: Choice, resistors: Drawers, capacitors: Drawers) -> tuple[Any, ...]:
    """Return the part of the sort key that settles equal errors and parts."""
    ohms, farads = sorted(members(choice.resistor)), sorted(members(choice.capacitor))
    plenty = min(_plenty(ohms, resistors), _plenty(farads, capacitors))
    return (-plenty, ohms, farads, _written(choice.resistor), _written(choice.capacitor))


def ranked_ways(
    pairing: Pairing, resistors: Drawers, capacitors: Drawers, top: int
) -> Iterator[Choice]:
    """Yield the ways to take one pairing from the drawers, best first, at least `top` if there are.

    A hundred bags of one value make a million ways, so they are not listed and sorted: from the
    greatest plenty downwards, only holdings that allow it are looked at, and of these only the
    lowest ids, because a way through a higher id has enough better ones before it.
    """
    lots = [resistors.lots[lot] for lot in set(members(pairing.resistor))]
    lots += [capacitors.lots[lot] for lot in set(members(pairing.capacitor))]
    if all(len(lot.holdings) == 1 for lot in lots):
        yield _only_way(pairing, resistors, capacitors)
        return
    yielded = 0
    for plenty in _plenties(pairing, resistors, capacitors):
        sides = (
            _sides(pairing.resistor, resistors, plenty, 2 * top),
            _sides(pairing.capacitor, capacitors, plenty, 2 * top),
        )
        for ohms, farads in product(*sides):
            if min(ohms.plenty, farads.plenty) > plenty:
                continue  # yielded before
            ways = product(
                _arranged(pairing.resistor, ohms, resistors),
                _arranged(pairing.capacitor, farads, capacitors),
            )
            for resistor, capacitor in ways:
                yield Choice(pairing, resistor, capacitor)
                yielded += 1
            if yielded >= top:
                return


def _only_way(pairing: Pairing, resistors: Drawers, capacitors: Drawers) -> Choice:
    """Return the choice where every lot is one drawer."""
    return Choice(
        pairing, _in_only(pairing.resistor, resistors), _in_only(pairing.capacitor, capacitors)
    )


def _in_only(network: Network[int], drawers: Drawers) -> Network[int]:
    return _settled(replace(network, lambda lot: drawers.lots[lot].holdings[0].id), drawers.value)


@dataclass(frozen=True, slots=True)
class _Side:
    """The holdings that one network takes.

    Attributes
    ----------
    ids : of all of them, rising. picks : by lot. plenty : how often they allow the network.
    """

    ids: tuple[int, ...]
    picks: Mapping[int, tuple[int, ...]]
    plenty: int


def _plenties(pairing: Pairing, resistors: Drawers, capacitors: Drawers) -> list[int]:
    """Return, falling, how often the scarcest holding of some way may allow the pairing."""
    needs = [
        (drawers.lots[lot].uses, pieces)
        for network, drawers in ((pairing.resistor, resistors), (pairing.capacitor, capacitors))
        for lot, pieces in Counter(members(network)).items()
    ]
    found = {_times(uses, k) for lot, pieces in needs for uses in lot for k in range(1, pieces + 1)}
    rising = sorted(found - {0})

    def too_much(plenty: int) -> bool:
        return any(
            sum(pieces if uses >= PLENTY else uses // plenty for uses in lot) < pieces
            for lot, pieces in needs
        )

    return rising[: bisect_left(rising, x=True, key=too_much)][::-1]


def _sides(network: Network[int], drawers: Drawers, plenty: int, count: int) -> list[_Side]:
    """Return the first sides, by ids, whose every holding allows the network `plenty` times."""
    leaves = list(members(network))
    different = sorted(set(leaves))
    by_lot = [_picks(drawers.lots[lot], leaves.count(lot), plenty, count) for lot in different]
    joined = (
        (tuple(sorted(number for pick in picks for number in pick)), picks)
        for picks in product(*by_lot)
    )
    return [
        _Side(ids, dict(zip(different, picks, strict=True)), _plenty(ids, drawers))
        for ids, picks in nsmallest(count, joined)
    ]


def _picks(lot: Lot, pieces: int, plenty: int, count: int) -> list[tuple[int, ...]]:
    """List the multisets of `pieces` holdings of a lot, of the lowest ids that can matter."""
    uses = {
        holding.id: most
        for holding, most in zip(lot.holdings, lot.uses, strict=True)
        if most >= plenty
    }
    return [
        pick
        for pick in combinations_with_replacement(list(uses)[: count + pieces], pieces)
        if all(_times(uses[number], pick.count(number)) >= plenty for number in set(pick))
    ]


def _arranged(network: Network[int], side: _Side, drawers: Drawers) -> list[Network[int]]:
    """Return the different ways to put picked holdings on the leaves of their lots, as written."""
    orders = [sorted(set(permutations(numbers))) for numbers in side.picks.values()]
    found: dict[str, Network[int]] = {}
    for arrangement in product(*orders):
        supply = {lot: iter(row) for lot, row in zip(side.picks, arrangement, strict=True)}
        settled = _settled(_filled(network, supply), drawers.value)
        found.setdefault(_written(settled), settled)
    return [found[text] for text in sorted(found)]


def _filled(network: Network[int], supply: Mapping[int, Iterator[int]]) -> Network[int]:
    return replace(network, lambda lot: next(supply[lot]))


def _settled(network: Network[int], value: Mapping[int, float]) -> Network[int]:
    """Return the canonical form: small values first, then low ids."""
    if isinstance(network, Leaf):
        return network
    return canonical(network, lambda number: (value[number], number))


def _plenty(ids: Sequence[int], drawers: Drawers) -> int:
    return min(_times(drawers.uses[number], ids.count(number)) for number in set(ids))


def _times(uses: int, pieces: int) -> int:
    """Tell how many times so many pieces can be taken; of a plenty always as often."""
    return PLENTY if uses >= PLENTY else uses // pieces


def _written(network: Network[int]) -> str:
    return write_network(network, str)
