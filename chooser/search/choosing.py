"""From lots to holdings: which of several equal drawers a fit takes its parts from.

Tie-breaks between fits of equal error and parts: how many times the scarcest of the picked
holdings would allow the fit to be built (more is better), then the ids of the resistors and of
the capacitors (lower first), the written form, and at last the variant of the circuit.
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
    pairing : the lots.
    resistors, capacitors : the networks of holding ids of each slot, canonical.
    """

    pairing: Pairing
    resistors: tuple[Network[int], ...]
    capacitors: tuple[Network[int], ...]


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
    ohms, farads = sorted(_leaves(choice.resistors)), sorted(_leaves(choice.capacitors))
    plenty = min(_plenty(ohms, resistors), _plenty(farads, capacitors))
    written = [_written(network) for network in (*choice.resistors, *choice.capacitors)]
    return (-plenty, ohms, farads, written, choice.pairing.variant)


def ranked_ways(
    pairing: Pairing, resistors: Drawers, capacitors: Drawers, top: int
) -> Iterator[Choice]:
    """Yield the ways to take one pairing from the drawers, best first, at least `top` if there are.

    A hundred bags of one value make a million ways, so they are not listed and sorted: from the
    greatest plenty downwards, only holdings that allow it are looked at, and of these only the
    lowest ids, because a way through a higher id has enough better ones before it.
    """
    lots = [resistors.lots[lot] for lot in set(_leaves(pairing.resistors))]
    lots += [capacitors.lots[lot] for lot in set(_leaves(pairing.capacitors))]
    if all(len(lot.holdings) == 1 for lot in lots):
        yield _only_way(pairing, resistors, capacitors)
        return
    yielded = 0
    for plenty in _plenties(pairing, resistors, capacitors):
        sides = (
            _sides(pairing.resistors, resistors, plenty, 2 * top),
            _sides(pairing.capacitors, capacitors, plenty, 2 * top),
        )
        for ohms, farads in product(*sides):
            if min(ohms.plenty, farads.plenty) > plenty:
                continue  # yielded before
            ways = product(
                _arranged(pairing.resistors, ohms, resistors),
                _arranged(pairing.capacitors, farads, capacitors),
            )
            for resistor, capacitor in ways:
                yield Choice(pairing, resistor, capacitor)
                yielded += 1
            if yielded >= top:
                return


def _only_way(pairing: Pairing, resistors: Drawers, capacitors: Drawers) -> Choice:
    """Return the choice where every lot is one drawer."""
    return Choice(
        pairing,
        tuple(_in_only(network, resistors) for network in pairing.resistors),
        tuple(_in_only(network, capacitors) for network in pairing.capacitors),
    )


def _in_only(network: Network[int], drawers: Drawers) -> Network[int]:
    return _settled(replace(network, lambda lot: drawers.lots[lot].holdings[0].id), drawers.value)


@dataclass(frozen=True, slots=True)
class _Side:
    """The holdings that the networks of one kind take.

    Attributes
    ----------
    ids : of all of them, rising. picks : by lot. plenty : how often they allow the networks.
    """

    ids: tuple[int, ...]
    picks: Mapping[int, tuple[int, ...]]
    plenty: int


def _plenties(pairing: Pairing, resistors: Drawers, capacitors: Drawers) -> list[int]:
    """Return, falling, how often the scarcest holding of some way may allow the pairing."""
    needs = [
        (drawers.lots[lot].uses, pieces)
        for networks, drawers in ((pairing.resistors, resistors), (pairing.capacitors, capacitors))
        for lot, pieces in Counter(_leaves(networks)).items()
    ]
    found = {_times(uses, k) for lot, pieces in needs for uses in lot for k in range(1, pieces + 1)}
    rising = sorted(found - {0})

    def too_much(plenty: int) -> bool:
        return any(
            sum(pieces if uses >= PLENTY else uses // plenty for uses in lot) < pieces
            for lot, pieces in needs
        )

    return rising[: bisect_left(rising, x=True, key=too_much)][::-1]


def _sides(
    networks: Sequence[Network[int]], drawers: Drawers, plenty: int, count: int
) -> list[_Side]:
    """Return the first sides, by ids, whose every holding allows the networks `plenty` times."""
    leaves = _leaves(networks)
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


def _arranged(
    networks: Sequence[Network[int]], side: _Side, drawers: Drawers
) -> list[tuple[Network[int], ...]]:
    """Return the different ways to put picked holdings on the leaves of their lots, as written."""
    orders = [sorted(set(permutations(numbers))) for numbers in side.picks.values()]
    found: dict[tuple[str, ...], tuple[Network[int], ...]] = {}
    for arrangement in product(*orders):
        supply = {lot: iter(row) for lot, row in zip(side.picks, arrangement, strict=True)}
        settled = tuple(_settled(_filled(each, supply), drawers.value) for each in networks)
        found.setdefault(tuple(_written(each) for each in settled), settled)
    return [found[texts] for texts in sorted(found)]


def _filled(network: Network[int], supply: Mapping[int, Iterator[int]]) -> Network[int]:
    return replace(network, lambda lot: next(supply[lot]))


def _settled(network: Network[int], value: Mapping[int, float]) -> Network[int]:
    """Return the canonical form: small values first, then low ids."""
    if isinstance(network, Leaf):
        return network
    return canonical(network, lambda number: (value[number], number))


def _plenty(ids: Sequence[int], drawers: Drawers) -> int:
    times = (_times(drawers.uses[number], ids.count(number)) for number in set(ids))
    return min(times, default=PLENTY)


def _leaves(networks: Sequence[Network[int]]) -> list[int]:
    return [leaf for network in networks for leaf in members(network)]


def _times(uses: int, pieces: int) -> int:
    """Tell how many times so many pieces can be taken; of a plenty always as often."""
    return PLENTY if uses >= PLENTY else uses // pieces


def _written(network: Network[int]) -> str:
    return write_network(network, str)
