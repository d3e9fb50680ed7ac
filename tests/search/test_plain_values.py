"""Plain resistances and capacitances: every network there is, in fractions."""

from __future__ import annotations

import random
from fractions import Fraction

import oracle
import pytest
from stocks import EVERY_RULE, capacitor, ids, plain, random_stock, resistor, sides

from chooser.circuits.plain import capacitance, resistance
from chooser.search import space, windows
from chooser.search.find import find_fits
from chooser.search.request import Request, Target
from chooser.search.terms import Rank, Rule

ORDERS = (Rank.ERROR, Rank.COUNT)
POLAR = ("electrolytic", "tantalum")


def asked_for(circuit, wanted, **options):
    return Request(circuit, (Target(circuit.outputs[0], wanted, wanted),), **options)


def value_of(fit, name):
    """The exact value of a fit, by the oracle from its network and the parts alone."""
    slot = fit.slot(name)
    worth = {each.id: oracle.fraction(each.part.effective) for each in fit.holdings()}
    return oracle.value(plain(slot.network), worth, "+" if name == "R" else "||")


# Counts and values that are published ------------------------------------------------------------


def test_seventeen_values_of_three_resistors():
    """100, 220 and 470 ohm, any subset; the values are fractions worked out by brute force."""
    holdings = [resistor(number, ohm) for number, ohm in ((1, 100.0), (2, 220.0), (3, 470.0))]
    answer = find_fits(holdings, asked_for(resistance(), 200.0, rank=Rank.COUNT, top=100))
    expected = [
        *(Fraction(25850, 431), Fraction(275, 4), Fraction(4700, 57), Fraction(6900, 79), 100),
        *(Fraction(10340, 69), Fraction(12540, 79), Fraction(15040, 79), 220),
        *(Fraction(17240, 69), Fraction(17240, 57), 320, 470, Fraction(2155, 4), 570, 690, 790),
    ]
    assert sorted(value_of(fit, "R") for fit in answer.fits) == expected
    assert answer.searched.combinations == len(answer.fits) == 17
    assert sum(fit.parts == 3 for fit in answer.fits) == 8


@pytest.mark.parametrize(
    ("most", "networks", "values"),
    # OEIS A000084, summed, and A153588: networks and values of so many equal resistors or fewer.
    [(1, 1, 1), (2, 3, 3), (3, 7, 7), (4, 17, 15), (5, 41, 35), (6, 107, 77)],
)
@pytest.mark.parametrize("count", [None, 6])
def test_equal_resistors(most, networks, values, count):
    request = asked_for(
        resistance(),
        1.0,
        rank=Rank.ERROR,
        top=1000,
        most_resistors=most,
        lifted=frozenset({Rule.MANY_PARTS}),
    )
    answer = find_fits([resistor(1, 1.0, count)], request)
    assert answer.searched.combinations == len(answer.fits) == networks
    assert len({value_of(fit, "R") for fit in answer.fits}) == values


@pytest.mark.parametrize(
    ("parts", "networks"),
    # OEIS A006351 summed over subsets: 1, 4, 17, 100 networks of so many different parts.
    [(1, 1), (2, 4), (3, 17), (4, 100)],
)
def test_different_capacitors(parts, networks):
    holdings = [capacitor(number, farad) for number, farad in enumerate((1e-8, 3e-8, 7e-8, 2e-7))]
    request = asked_for(capacitance(), 1e-7, rank=Rank.COUNT, top=1000, most_capacitors=4)
    answer = find_fits(holdings[:parts], request)
    assert answer.searched.combinations == len(answer.fits) == networks


# Random stocks ---------------------------------------------------------------------------------


def expected_rows(stock, request, name, polar=frozenset()):
    uses = oracle.uses_of(stock, request.boards)
    worth = {part: oracle.fraction(value) for part, (value, _) in stock.items()}
    most = request.most_resistors if name == "R" else request.most_capacitors
    rows = []
    for network in oracle.all_networks(uses, most):
        if oracle.polar_in_series(network, polar):
            continue
        value = oracle.value(network, worth, "+" if name == "R" else "||")
        size, parts = abs(value / oracle.fraction(request.target) - 1), oracle.parts_of(network)
        many = oracle.plentiful(uses, parts)
        rows.append((oracle.ppm(size), len(parts), size, many, parts, []))
    return oracle.in_order(rows, request.rank)


def compare(holdings, request, name, polar=frozenset()):
    ohms, farads = sides(holdings)
    expected = expected_rows(ohms if name == "R" else farads, request, name, polar)
    answer = find_fits(holdings, request)
    assert answer.searched.complete
    assert answer.searched.combinations == len(expected)
    found = []
    for fit in answer.fits:
        size = abs(value_of(fit, name) / oracle.fraction(request.target) - 1)
        assert abs(fit.error) == pytest.approx(float(size), rel=1e-9, abs=1e-12)
        numbers = ids(fit.slot(name).network)
        found.append((oracle.ppm(size), len(numbers), size, numbers))
    assert found == [(*row[:3], row[4]) for row in expected[: request.top]]
    assert len({plain(fit.slot(name).network) for fit in answer.fits}) == len(found)


def random_options(rnd):
    return {
        "rank": rnd.choice(ORDERS),
        "boards": rnd.choice((1, 1, 2, 3)),
        "top": rnd.choice((1, 3, 10, 25)),
        "most_resistors": rnd.choice((1, 2, 3, 4)),
        "most_capacitors": rnd.choice((1, 2, 3, 4)),
    }


def run(monkeypatch, rnd, trials):
    for _ in range(trials):
        holdings = random_stock(rnd)
        ohms, farads = ([value for value, _ in side.values()] for side in sides(holdings))
        name = rnd.choice("RC")
        circuit, values = (resistance(), ohms) if name == "R" else (capacitance(), farads)
        wanted = float(f"{rnd.choice(values) * rnd.choice((0.5, 1, 1, 2, 1.37, 0.77)):.5g}")
        request = asked_for(circuit, wanted, **random_options(rnd), lifted=EVERY_RULE)
        with monkeypatch.context() as patch:
            if rnd.random() < 0.5:
                patch.setattr(space, "MOST_LISTED", rnd.choice((0, 2, 5, 10)))
                patch.setattr(windows, "WORTH", rnd.choice((0, windows.WORTH)))
            compare(holdings, request, name)


@pytest.mark.parametrize("seed", range(4))
def test_the_first_answers_are_those_of_the_whole_space(monkeypatch, seed):
    run(monkeypatch, random.Random(f"values {seed}"), 40)


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(100, 103))
def test_the_first_answers_of_many_stocks(monkeypatch, seed):
    run(monkeypatch, random.Random(f"values {seed}"), 100)


@pytest.mark.parametrize("seed", range(3))
def test_polarised_capacitors_only_stand_side_by_side(seed):
    rnd = random.Random(f"polar {seed}")
    for _ in range(12):
        holdings = [
            capacitor(
                number,
                float(f"{10 ** rnd.uniform(-7, -4):.2g}"),
                rnd.choice((1, 2, 3)),
                technology=rnd.choice((*POLAR, "polyester", "electrolytic-non-polar")),
            )
            for number in range(1, rnd.randint(2, 5))
        ]
        polar = {each.id for each in holdings if each.part.technology in POLAR}
        wanted = rnd.choice(holdings).part.value * rnd.choice((0.5, 1.0, 1.5))
        options = random_options(rnd) | {"most_capacitors": rnd.choice((2, 3))}
        compare(holdings, asked_for(capacitance(), wanted, **options), "C", polar)
        lifted = asked_for(capacitance(), wanted, **options, lifted=EVERY_RULE)
        compare(holdings, lifted, "C")


def test_a_plain_capacitance_may_be_rated():
    holdings = [capacitor(1, 1e-6, voltage=10.0), capacitor(2, 1.1e-6, voltage=63.0)]
    free = find_fits(holdings, asked_for(capacitance(), 1e-6, rank=Rank.ERROR, top=1))
    assert ids(free.fits[0].slot("C").network) == [1]
    rated = find_fits(holdings, asked_for(capacitance(12.0), 1e-6, rank=Rank.ERROR, top=1))
    assert ids(rated.fits[0].slot("C").network) == [2]
    assert [refusal.rule for refusal in rated.refusals] == [Rule.VOLTAGE]


def test_no_timing_rule_keeps_a_plain_value_out():
    """A picofarad and a hundred megohm are values like others where nothing is timed."""
    answer = find_fits([capacitor(1, 1e-12)], asked_for(capacitance(), 1e-12))
    assert [fit.error for fit in answer.fits][:1] == [0.0]
    answer = find_fits([resistor(1, 1e8)], asked_for(resistance(), 1e8))
    assert answer.fits[0].error == 0.0


@pytest.mark.parametrize("rank", list(Rank))
def test_the_other_kind_is_not_asked_for(rank):
    only = find_fits([resistor(1, 1e4)], asked_for(resistance(), 1e4, rank=rank))
    assert only.fits[0].in_band
    none = find_fits([resistor(1, 1e4)], asked_for(capacitance(), 1e-7, rank=rank))
    assert none.fits == ()
    assert "no capacitors" in none.advice[0]
