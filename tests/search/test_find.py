"""The whole way from a stock and a request to an answer."""

from __future__ import annotations

import math
import random
from dataclasses import replace

import oracle
import pytest
from stocks import (
    EVERY_RULE,
    asked,
    capacitor,
    farads_of,
    ohms_of,
    parts_of,
    plain,
    random_stock,
    resistor,
    sides,
)

from chooser.circuits.timers import timer_named
from chooser.networks import members
from chooser.parts import Kind, Tolerance
from chooser.search import space
from chooser.search.find import find_fits
from chooser.search.space import combinations
from chooser.search.terms import Rank, Rule

RANKS = list(Rank)
STOCK = [
    resistor(1, 1e4, 3, tolerance=Tolerance(0.01, 0.01)),
    resistor(2, 2.2e4, 2, measured=21.87e3, meter=0.005),
    resistor(3, 4.7e4, None, tolerance=Tolerance(0.05, 0.05)),
    capacitor(11, 1e-6, 2),
    capacitor(12, 4.7e-7, 2, measured=4.683e-7),
    capacitor(13, 2.2e-6, 1, technology="electrolytic", voltage=25.0),
    capacitor(14, 1e-7, 4, technology="x7r"),
]


def without_time(answer):
    return replace(answer, searched=replace(answer.searched, seconds=0.0))


# Determinism -------------------------------------------------------------------------------------


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("timer", ["ideal", "bipolar"])
def test_the_same_question_twice_has_the_same_answer(rank, timer):
    request = asked(0.05, timer, rank=rank, top=20)
    assert without_time(find_fits(STOCK, request)) == without_time(find_fits(STOCK, request))


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("seed", range(8))
def test_the_order_of_the_stock_does_not_matter(rank, seed):
    rnd = random.Random(seed)
    holdings = STOCK if seed == 0 else random_stock(rnd, 6, 4)
    holdings = [*holdings, capacitor(90, 1e-7, technology="x5r"), capacitor(91, 1e-7, voltage=1.0)]
    holdings += [capacitor(92, 1e-7, technology="y5v"), capacitor(93, 1e-7, voltage=2.0)]
    request = asked(
        0.0345, rnd.choice(("ideal", "cmos")), rank=rank, within=rnd.choice((1e-6, 0.1))
    )
    shuffled = rnd.sample(holdings, len(holdings))
    assert without_time(find_fits(shuffled, request)) == without_time(find_fits(holdings, request))


# What a fit says ---------------------------------------------------------------------------------


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("timer", ["ideal", "bipolar", "cmos"])
def test_every_fit_agrees_with_its_own_parts(rank, timer):
    request = asked(0.05, timer, rank=rank, within=0.05, lifted=frozenset({Rule.CERAMIC}))
    answer = find_fits(STOCK, request)
    assert answer.request == request
    assert len(answer.fits) == 10
    worth = {holding.id: oracle.fraction(holding.part.effective) for holding in STOCK}
    for fit in answer.fits:
        assert fit.slot("R").value == pytest.approx(
            float(oracle.value(plain(fit.slot("R").network), worth, "+"))
        )
        farad = float(oracle.value(plain(fit.slot("C").network), worth, "||"))
        assert fit.slot("C").value == pytest.approx(farad)
        assert fit.error == pytest.approx(fit.outlook.chief.nominal / 0.05 - 1)
        assert fit.errors == {"interval": fit.error}
        assert fit.spread == fit.outlook.chief.spread
        assert fit.parts == len(list(fit.holdings())) == sum(map(len, parts_of(fit)))
        assert [slot.name for slot in fit.slots] == ["R", "C"]
        assert fit.in_band is (abs(fit.error) <= 0.05)
        mean = fit.outlook.chief.mean / 0.05 - 1
        assert fit.likely_miss == pytest.approx(math.hypot(mean, fit.outlook.chief.spread))
        assert all(holding in STOCK for holding in members(fit.slot("R").network))
        assert {holding.part.kind for holding in members(fit.slot("C").network)} == {Kind.CAPACITOR}
        if timer == "ideal":
            nominal = fit.slot("R").value * fit.slot("C").value * math.log(3)
            assert fit.outlook.chief.nominal == pytest.approx(nominal)


def test_the_outlook_is_that_of_the_network():
    """10k 1 % in series with 47k 5 %, 1 uF 20 %: the slots worked out by hand."""
    request = asked(57e3 * 1e-6 * math.log(3), rank=Rank.ERROR, top=1)
    (fit,) = find_fits(STOCK, request).fits
    assert parts_of(fit) == ([1, 3], [11])
    r_low, r_high = 9.9e3 + 44.65e3, 10.1e3 + 49.35e3
    assert fit.outlook.chief.low == pytest.approx(r_low * 0.8e-6 * math.log(3))
    assert fit.outlook.chief.high == pytest.approx(r_high * 1.2e-6 * math.log(3))
    r_spread = (10 * 0.01 + 47 * 0.05) / 57 / math.sqrt(3)
    assert fit.outlook.chief.spread == pytest.approx(math.hypot(r_spread, 0.2 / math.sqrt(3)))
    assert 0 < fit.outlook.chance < 1


@pytest.mark.parametrize("rank", RANKS)
def test_every_row_but_the_last_says_why_it_stands_before_the_next(rank):
    fits = find_fits(STOCK, asked(0.05, rank=rank)).fits
    assert all(fit.why for fit in fits[:-1])
    assert fits[-1].why == ""


# Counts and boards -------------------------------------------------------------------------------


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("boards", [1, 2, 3])
def test_no_board_goes_short(rank, boards):
    fits = find_fits(STOCK, asked(0.05, rank=rank, boards=boards, top=200)).fits
    free = {holding.id: holding.free for holding in STOCK}
    for fit in fits:
        taken = ohms_of(fit) + farads_of(fit)
        for number in set(taken):
            assert free[number] is None or taken.count(number) * boards <= free[number]
    used = {number for fit in fits for number in ohms_of(fit) + farads_of(fit)}
    # By hand: three boards leave 10k (3) and 47k (plenty), but no capacitor of two pieces.
    assert used == {1: {1, 2, 3, 11, 12, 13}, 2: {1, 2, 3, 11, 12}, 3: set()}[boards]


def test_more_boards_than_anything_is_there_for():
    answer = find_fits(STOCK, asked(0.05, boards=1000))
    assert answer.fits == ()
    assert answer.advice


def test_claimed_parts_are_left_alone():
    claimed = [replace(STOCK[0], claimed=3), *STOCK[1:]]
    fits = find_fits(claimed, asked(0.011, rank=Rank.ERROR, top=100)).fits
    assert all(1 not in ohms_of(fit) for fit in fits)
    over = [replace(STOCK[0], claimed=5), *STOCK[1:]]
    assert find_fits(over, asked(0.011, rank=Rank.ERROR, top=100)).fits == fits


def test_measured_values_count_instead_of_printed_ones():
    fits = find_fits(STOCK, asked(0.0112, rank=Rank.COUNT, top=100, most_resistors=1)).fits
    (fit,) = [fit for fit in fits if parts_of(fit) == ([2], [12])]
    assert (fit.slot("R").value, fit.slot("C").value) == (21.87e3, 4.683e-7)


# What was searched -------------------------------------------------------------------------------


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("seed", range(10))
def test_the_number_of_combinations_is_that_of_the_space(rank, seed):
    rnd = random.Random(seed)
    holdings = random_stock(rnd)
    holdings.append(capacitor(77, 1e-5, 2, technology="electrolytic", voltage=25.0))
    boards, lifted = rnd.choice((1, 2)), rnd.choice((frozenset(), EVERY_RULE))
    request = asked(0.01, rank=rank, boards=boards, most_capacitors=3, lifted=lifted)
    ohms, farads = (oracle.uses_of(side, boards) for side in sides(holdings))
    polar = set() if lifted else {77}
    capacitors = [
        each for each in oracle.all_networks(farads, 3) if not oracle.polar_in_series(each, polar)
    ]
    expected = len(oracle.all_networks(ohms, 3)) * len(capacitors)
    searched = find_fits(holdings, request).searched
    assert searched.combinations == expected
    assert searched.complete is (rank is not Rank.BALANCED)
    assert ("8 nearest" in searched.limit) is (rank is Rank.BALANCED)
    assert bool(searched.limit) is not searched.complete
    assert searched.seconds > 0


def test_the_combinations_of_a_large_stock():
    """168 resistor values and 42 capacitors without end, up to 3 + 2 parts: 1.2e10."""
    ohms = [resistor(number, 1e3 + number, None) for number in range(1, 169)]
    farads = [capacitor(number, 1e-7 + number * 1e-9, None) for number in range(201, 243)]
    # By hand: n kinds without end make n(n+1) pairs and 8C(n,3) + 6n(n-1) + 4n triples.
    n, m = 168, 42
    triples = 8 * math.comb(n, 3) + 6 * n * (n - 1) + 4 * n
    expected = (n + n * (n + 1) + triples) * (m + m * (m + 1))
    assert combinations(ohms, farads, asked(1.0)) == expected


@pytest.mark.parametrize("rank", RANKS)
def test_a_limit_that_was_hit_is_said(monkeypatch, rank):
    monkeypatch.setattr(space, "MOST_CAPACITOR_NETWORKS", 5)
    answer = find_fits(STOCK, asked(0.0512345, rank=rank, top=500))
    assert not answer.searched.complete
    assert "2 capacitors" in answer.searched.limit
    assert {len(farads_of(fit)) for fit in answer.fits} == {1}


# What cannot be asked ----------------------------------------------------------------------------


@pytest.mark.parametrize("rank", RANKS)
def test_an_empty_stock_has_an_empty_answer(rank):
    answer = find_fits([], asked(1.0, rank=rank))
    assert answer.fits == ()
    assert answer.searched.combinations == 0
    assert answer.advice


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("target", [1e-12, 1e-6, 1e6, 1e15])
@pytest.mark.parametrize("timer", ["ideal", "bipolar", "cmos"])
def test_any_target_gets_an_answer(rank, target, timer):
    """Nothing is near; the nearest there is, or nothing, and a sentence."""
    for lifted in (frozenset(), EVERY_RULE):
        answer = find_fits(STOCK, asked(target, timer, rank=rank, lifted=lifted))
        assert not any(fit.in_band for fit in answer.fits)
        assert answer.advice


@pytest.mark.parametrize("rank", RANKS)
def test_every_timer_answers(rank):
    for name in ("NE555", "SE555", "SA555", "LM555", "TLC555", "LMC555", "ICM7555", "TS555"):
        answer = find_fits(STOCK, asked(0.05, name, rank=rank))
        assert timer_named(name) == answer.request.circuit.timer
        assert answer.fits
