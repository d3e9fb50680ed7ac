"""A counter with several pins: the best over all of them, as if each pin had been asked alone."""

from __future__ import annotations

import math
import random

import oracle
import pytest
from stocks import EVERY_RULE, capacitor, ids, resistor, sides

from chooser.circuits.circuit import outputs_of
from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.circuits.leakage import leak_conductance
from chooser.parts import Kind
from chooser.search.find import find_fits
from chooser.search.request import Request, Target
from chooser.search.terms import Rank, Rule

CHIP = counter_named("HEF4060B")
SUPPLY = 9.0
ORDERS = (Rank.ERROR, Rank.COUNT)


def asked_for(seconds, circuit, **options):
    return Request(circuit, (Target("interval", seconds, seconds),), **options)


def period(ohm, farad, leak):
    """Period of two inverters: the node jumps by the supply and decays through half of it.

    From 1.5 to 0.5 of the supply, towards the middle of what R and the leak pull at; scaled to
    the maker's k where nothing leaks, which the theory makes 2 ln 3.
    """
    rest = 1 / (1 + ohm * leak)
    tau = farad * ohm / (1 + ohm * leak)
    # Upside down: from -0.5 up to +0.5 of the supply, with the rail at 1.
    if rest <= 0.5:
        return math.inf
    return CHIP.period_factor / math.log(3) * tau * math.log((rest + 0.5) / (rest - 0.5))


def of_each_pin(holdings, request):
    """Merge the brute force of every pin: (ppm, parts, error, plenty, R ids, C ids, pin)."""
    circuit = request.circuit
    leaks = {
        each.id: oracle.fraction(leak_conductance(each.part, SUPPLY).typical)
        for each in holdings
        if each.part.kind is Kind.CAPACITOR
    }
    most = request.most_resistors, request.most_capacitors
    rows = []
    for variant in circuit.variants:

        def size(ohm, farad, network, scale=variant.scale):
            leak = float(oracle.value(network, leaks, "||"))
            time = scale * period(float(ohm), float(farad), leak)
            strict = Rule.RESISTOR_LIMITS not in request.lifted
            if strict and not CHIP.smallest_resistor <= ohm <= CHIP.largest_resistor:
                return None
            strict = Rule.STRAYS not in request.lifted
            if (strict and farad < circuit.least_farad) or math.isinf(time):
                return None
            return abs(time / request.target - 1)

        pin = oracle.space(*sides(holdings), most, request.boards, size)
        rows += [(*row, variant.name) for row in pin]
    return oracle.in_order(rows, request.rank)


def random_stock(rnd):
    """Values of five digits: no two circuits are equal by chance, but pins differ by octaves."""
    holdings = [
        resistor(number, float(f"{10 ** rnd.uniform(3.5, 6):.5g}"), rnd.choice((1, 2, 3)))
        for number in range(1, rnd.randint(2, 5))
    ]
    for number in range(11, rnd.randint(12, 14)):
        farad = float(f"{10 ** rnd.uniform(-9, -5.5):.5g}")
        kind = rnd.choice(("polyester", "c0g", "mica", "electrolytic-non-polar"))
        holdings.append(capacitor(number, farad, rnd.choice((1, 2)), technology=kind))
    return holdings


def compare(holdings, request):
    everything = of_each_pin(holdings, request)
    answer = find_fits(holdings, request)
    assert answer.searched.complete
    assert len(answer.fits) == min(request.top, len(everything))
    same = 0
    for fit, row in zip(answer.fits, everything, strict=False):
        assert fit.parts == row[1]
        assert abs(fit.error) == pytest.approx(row[2], rel=1e-8, abs=1e-10)
        found = ids(fit.slot("R").network), ids(fit.slot("C").network), fit.variant.name
        same += found == (row[4], row[5], row[6])
    return same, len(answer.fits)


def run(rnd, trials):
    same = total = 0
    for _ in range(trials):
        holdings = random_stock(rnd)
        whole = rnd.random() < 0.3
        outputs = None if rnd.random() < 0.7 else tuple(rnd.sample(CHIP.outputs, 2))
        circuit = counter(CHIP, SUPPLY, outputs, whole_period=whole)
        request = asked_for(
            float(f"{10 ** rnd.uniform(-1, 4):.5g}"),
            circuit,
            rank=rnd.choice(ORDERS),
            boards=rnd.choice((1, 1, 2)),
            top=rnd.choice((1, 3, 10)),
            most_resistors=rnd.choice((1, 2, 3)),
            most_capacitors=rnd.choice((1, 2)),
            lifted=rnd.choice((frozenset(), EVERY_RULE)),
        )
        one, of = compare(holdings, request)
        same, total = same + one, total + of
    return same, total


@pytest.mark.parametrize("seed", range(3))
def test_the_best_of_all_pins(seed):
    same, total = run(random.Random(f"pins {seed}"), 12)
    assert total > 30
    assert same >= 0.95 * total  # but for the rare pair that only rounding tells apart


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(2))
def test_the_best_of_all_pins_of_many_stocks(seed):
    run(random.Random(f"many pins {seed}"), 60)


@pytest.mark.parametrize("rank", ORDERS)
def test_all_pins_are_as_good_as_the_best_pin_asked_alone(rank):
    rnd = random.Random(f"alone {rank}")
    for _ in range(3):
        holdings, seconds = random_stock(rnd), 10 ** rnd.uniform(1, 4)
        alone = [
            fit
            for output in CHIP.outputs
            for fit in find_fits(
                holdings, asked_for(seconds, counter(CHIP, SUPPLY, (output,)), rank=rank, top=5)
            ).fits
        ]
        together = find_fits(holdings, asked_for(seconds, counter(CHIP, SUPPLY), rank=rank, top=5))
        places = sorted(
            (oracle.ppm(abs(fit.error)) if rank is Rank.ERROR else 0, fit.parts, abs(fit.error))
            for fit in alone
        )
        for fit, place in zip(together.fits, places, strict=False):
            assert (fit.parts, abs(fit.error)) == pytest.approx(place[1:], rel=1e-9, abs=1e-12)


def test_the_pin_is_named_and_its_ratio_counts():
    """By hand: 100k x 100 nF x k = T; the first rise of stage 14 comes after 2^13 T."""
    wanted = 2.0**13 * CHIP.period_factor * 1e5 * 1e-7
    holdings = [resistor(1, 1e5), capacitor(11, 1e-7)]
    request = asked_for(wanted, counter(CHIP, SUPPLY), rank=Rank.ERROR, top=1)
    (best,) = find_fits(holdings, request).fits
    assert best.variant.scale == 2.0**13
    # Only what a polyester capacitor leaks at 100k is off: some parts per million.
    assert abs(best.error) < 1e-4
    whole = asked_for(2 * wanted, counter(CHIP, SUPPLY, whole_period=True), rank=Rank.ERROR, top=1)
    (again,) = find_fits(holdings, whole).fits
    assert again.variant.name == best.variant.name
    assert again.variant.scale == 2.0**14


def test_the_count_of_the_space_holds_every_pin():
    """By hand: 10k twice makes 3 networks, one capacitor 1; times the pins of the chip."""
    request = asked_for(60.0, counter(CHIP, SUPPLY), rank=Rank.ERROR, most_resistors=2)
    answer = find_fits([resistor(1, 1e4, 2), capacitor(11, 1e-7)], request)
    assert answer.searched.combinations == 3 * len(CHIP.outputs)


@pytest.mark.parametrize("top", [3, 10])
def test_balanced_never_shows_one_circuit_on_two_pins(top):
    """The same parts on another pin make another interval, and only one of them is meant."""
    rnd = random.Random("balanced pins")
    for _ in range(5):
        request = asked_for(10 ** rnd.uniform(1, 4), counter(CHIP, SUPPLY), top=top)
        fits = find_fits(random_stock(rnd), request).fits
        parts = [tuple(sorted(each.id for each in fit.holdings())) for fit in fits]
        assert len(set(parts)) == len(parts)
        assert [fit.in_band for fit in fits] == sorted((f.in_band for f in fits), reverse=True)


def test_the_outputs_of_a_fit_are_those_of_its_pin():
    rnd = random.Random("outputs")
    holdings = random_stock(rnd)
    circuit = counter(CHIP, SUPPLY)
    for fit in find_fits(holdings, asked_for(600.0, circuit, rank=Rank.COUNT)).fits:
        leak = sum(
            leak_conductance(each.part, SUPPLY).typical
            for each in fit.holdings()
            if each.part.kind is Kind.CAPACITOR
        )
        times = circuit.typical.times([fit.slot("R").value], fit.slot("C").value, leak)
        made = outputs_of(circuit, [fit.variant.scale * float(time) for time in times])
        # Leaks add only side by side; a series leaks less, and the interval is shorter by that.
        assert fit.outlook.chief.nominal == pytest.approx(made["interval"], rel=1e-3)
