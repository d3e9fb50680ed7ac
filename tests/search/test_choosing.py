"""Which of several equal drawers a fit takes its parts from."""

from __future__ import annotations

import math
import random

import oracle
import pytest
from stocks import EVERY_RULE, asked, capacitor, parts_of, plain, resistor, sides

from chooser.networks import Group, Join, Leaf, members
from chooser.search.choosing import Drawers, best_choice, ranked_ways, tie_break
from chooser.search.find import find_fits
from chooser.search.pools import gather
from chooser.search.ranking import Pairing
from chooser.search.terms import Rank

ONE = 1e4 * 1e-6 * math.log(3)
"""The interval of 10k and 1 uF with the ideal timer, in second."""


def drawers(holdings):
    return Drawers.of(gather(holdings, 1, lambda holding: holding.part.effective))


def series(*lots):
    return Group(Join.SERIES, tuple(Leaf(lot) for lot in lots))


def ranked_ids(holdings, target, **options):
    request = asked(target, rank=options.pop("rank", Rank.ERROR), lifted=EVERY_RULE, **options)
    return [parts_of(fit) for fit in find_fits(holdings, request).fits]


def test_the_more_plentiful_drawer_comes_first():
    holdings = [resistor(1, 1e4, 2), resistor(2, 1e4, 5), capacitor(11, 1e-6, 9)]
    assert ranked_ids(holdings, ONE, top=2, most_resistors=1) == [([2], [11]), ([1], [11])]


def test_the_scarcest_part_decides():
    """The one capacitor allows one board whatever the resistors do, so the lower id decides."""
    holdings = [resistor(1, 1e4, 2), resistor(2, 1e4, 5), capacitor(11, 1e-6, 1)]
    assert ranked_ids(holdings, ONE, top=2, most_resistors=1) == [([1], [11]), ([2], [11])]


def test_two_from_one_drawer_or_one_each():
    """Of two pieces, both from one drawer allow one board and one from each drawer allow two."""
    holdings = [resistor(1, 5e3, 2), resistor(2, 5e3, 2), capacitor(11, 1e-6, 9)]
    found = ranked_ids(holdings, ONE, top=3, most_resistors=2, most_capacitors=1)
    assert found == [([1, 2], [11]), ([1, 1], [11]), ([2, 2], [11])]


def test_boards_divide_what_is_plentiful():
    """Five pieces on two boards are two each, no more than the four of the other drawer."""
    holdings = [resistor(1, 1e4, 4), resistor(2, 1e4, 5), capacitor(11, 1e-6, 99)]
    assert ranked_ids(holdings, ONE, top=1, most_resistors=1, boards=2) == [([1], [11])]


def test_plenty_is_more_than_any_count():
    holdings = [
        resistor(1, 1e4, 1_000_000),
        resistor(2, 1e4, None),
        capacitor(11, 1e-6, None),
    ]
    assert ranked_ids(holdings, ONE, top=1, most_resistors=1) == [([2], [11])]


def test_one_plentiful_drawer_is_as_plentiful_as_two():
    """Plenty never limits, so taking both pieces from the first such drawer is no scarcer."""
    holdings = [resistor(1, 5e3, None), resistor(2, 5e3, None), capacitor(11, 1e-6, None)]
    found = ranked_ids(holdings, ONE, top=1, most_resistors=2, most_capacitors=1)
    assert found == [([1, 1], [11])]


def test_lower_ids_settle_the_rest_whatever_the_drawers_are_called():
    holdings = [
        resistor(7, 1e4, drawer="A1"),
        resistor(3, 1e4, drawer="Z9"),
        capacitor(11, 1e-6),
    ]
    assert ranked_ids(holdings, ONE, top=1, most_resistors=1) == [([3], [11])]


@pytest.mark.parametrize("rank", [Rank.ERROR, Rank.COUNT])
@pytest.mark.parametrize("seed", range(12))
def test_many_equal_drawers_against_the_oracle(seed, rank):
    """Up to six drawers of one value; all ways to take parts from them are told apart."""
    rnd = random.Random(seed)
    counts = (1, 1, 2, 2, 3)
    holdings = [
        resistor(number, rnd.choice((5e3, 5e3, 1e4)), rnd.choice(counts)) for number in range(1, 7)
    ]
    holdings += [
        capacitor(number, 1e-6, rnd.choice(counts)) for number in range(11, rnd.randint(12, 14))
    ]
    top, boards = rnd.choice((1, 7, 40)), rnd.choice((1, 2))
    expected = oracle.ranked(*sides(holdings), ONE, rank, (2, 2), boards)[:top]
    found = ranked_ids(holdings, ONE, rank=rank, top=top, boards=boards, most_resistors=2)
    assert found == [(row[4], row[5]) for row in expected]


def pairing(network):
    """The pairing of a resistor network with a lot of capacitors, without any error."""
    parts = sum(1 for _ in members(network)) + 1
    return Pairing((network,), Leaf(0), variant=0, parts=parts, size=0.0, ppm=0)


def ways(network, held, top):
    """The ways to fill a resistor network beside one plentiful capacitor, as plain networks."""
    caps = drawers([capacitor(11, 1e-6, None)])
    return [
        choice.resistors[0] for choice in ranked_ways(pairing(network), drawers(held), caps, top)
    ]


def test_every_way_to_fill_a_network_once():
    """Two pieces of a lot of three drawers in series: three doubles and three mixed, by hand."""
    held = [resistor(number, 5e3, 2) for number in (1, 2, 3)]
    found = [oracle.parts_of(plain(each)) for each in ways(series(0, 0), held, 99)]
    assert found == [[1, 2], [1, 3], [2, 3], [1, 1], [2, 2], [3, 3]]


def test_places_in_the_network_matter():
    """In a + (a || a) it matters which drawer stands alone: 3 x 6 ways less those too scarce."""
    held = [resistor(1, 5e3, 2), resistor(2, 5e3, 1)]
    network = Group(Join.SERIES, (Leaf(0), Group(Join.PARALLEL, (Leaf(0), Leaf(0)))))
    found = {plain(each) for each in ways(network, held, 99)}
    # By hand: the multiset is 1, 1, 2; the single one is either the 1 or the 2.
    assert found == {("+", (("||", (1, 2)), 1)), ("+", (("||", (1, 1)), 2))}


@pytest.mark.parametrize("bags", [100, 1000])
def test_a_hundred_bags_do_not_make_a_million_ways(bags):
    held = [resistor(number, 5e3, 1) for number in range(1, bags + 1)]
    found = [oracle.parts_of(plain(each)) for each in ways(series(0, 0, 0), held, 10)]
    assert found == [[1, 2, last] for last in range(3, 13)]


@pytest.mark.parametrize("top", [1, 3, 10, 40])
@pytest.mark.parametrize("seed", range(6))
def test_the_first_ways_are_the_first_of_all_ways(seed, top):
    """Eight drawers with counts of their own: against listing everything and sorting it."""
    rnd = random.Random(seed)
    held = [resistor(number, 5e3, rnd.choice((1, 2, 3, 5, 9, None))) for number in range(1, 9)]
    pool, caps = drawers(held), drawers([capacitor(11, 1e-6, rnd.choice((1, 2, 7, None)))])
    given = pairing(series(0, 0, 0))
    everything = sorted(
        ranked_ways(given, pool, caps, 10**6), key=lambda choice: tie_break(choice, pool, caps)
    )
    assert len(set(everything)) == len(everything) > 60
    assert list(ranked_ways(given, pool, caps, top))[:top] == everything[:top]


def test_the_best_choice_is_the_first():
    held = [resistor(1, 5e3, 2), resistor(2, 5e3, 7), resistor(3, 5e3, 7)]
    caps = [capacitor(11, 1e-6, 9)]
    given = drawers(held), drawers(caps)
    best = best_choice(pairing(series(0, 0)), *given)
    assert oracle.parts_of(plain(best.resistors[0])) == [2, 3]
    assert tie_break(best, *given)[:3] == (-7, [2, 3], [11])
