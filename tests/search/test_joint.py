"""Two resistors that share a capacitor and a stock: the exact orders against plain listing."""

from __future__ import annotations

import math
import random
from dataclasses import dataclass
from functools import partial
from itertools import product

import joint_oracle
import numpy as np
import oracle
import pytest
from pair_stocks import WISHES, exactly, leaky_stock, random_targets, random_times
from stocks import EVERY_RULE, capacitor, plain, random_stock, resistor, sides

from chooser.circuits.astable import astable
from chooser.circuits.circuit import Circuit
from chooser.circuits.diodes import diode_named
from chooser.circuits.leakage import leak_conductance
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.parts import Kind
from chooser.search import space, windows
from chooser.search.find import find_fits, search_choices
from chooser.search.house_rules import usable_parts
from chooser.search.request import Request
from chooser.search.space import combinations
from chooser.search.terms import Rank, Rule

IDEAL = timer_named("ideal")
PLAIN = astable(IDEAL, 9.0)
STEERED = steered(IDEAL, 9.0, diode_named("ideal"))
ORDERS = (Rank.ERROR, Rank.COUNT)


def random_request(rnd, circuit, holdings, wish, **options):
    high, low = random_times(rnd, holdings)
    chosen = {
        "rank": rnd.choice(ORDERS),
        "boards": rnd.choice((1, 1, 2, 3)),
        "most_resistors": rnd.choice((1, 2, 2)),
        "most_capacitors": rnd.choice((1, 2)),
        "top": rnd.choice((1, 3, 10, 25)),
        "lifted": EVERY_RULE,
    }
    return Request(circuit, random_targets(rnd, wish, high, low), **(chosen | options))


def wanted_of(request):
    return [(target.output, target.low, target.high) for target in request.targets]


def patch_to(patch, path, rnd):
    """Force one way through the windows; small limits make small stocks take the long way."""
    if path != "listed":
        patch.setattr(space, "MOST_LISTED", rnd.choice((0, 2, 5, 10)))
    if path == "sieved":
        patch.setattr(windows, "WORTH", 0)
    if path == "batches":
        patch.setattr(windows, "MOST_PAIRS", rnd.randint(1, 5))


# The textbook: all in fractions ------------------------------------------------------------------


def listed(holdings, request, *, is_steered):
    """Every circuit of the space, and the first places of it in order."""
    ohms, farads = sides(holdings)
    most = request.most_resistors, request.most_capacitors
    rows = joint_oracle.circuits(ohms, farads, most, request.boards)
    wanted = wanted_of(request)

    def rough(row):
        high, low = joint_oracle.textbook(row, steered=is_steered)
        return joint_oracle.miss((float(high), float(low)), wanted)

    def size(row):
        return joint_oracle.miss(joint_oracle.textbook(row, steered=is_steered), wanted)

    kept = joint_oracle.kept(rows, partial(joint_oracle.textbook, steered=is_steered), wanted)
    near = joint_oracle.shortlist(kept, rough, request.rank, request.top)
    uses = joint_oracle.all_uses(ohms, farads, request.boards)
    return rows, joint_oracle.ranked(near, size, uses, request.rank)[: request.top]


def compare(holdings, request, *, is_steered):
    """Hold the choices against the first places of the whole space, down to the holding ids."""
    rows, expected = listed(holdings, request, is_steered=is_steered)
    usable = usable_parts(holdings, request)
    found, not_listed = search_choices(usable, request)
    assert not not_listed
    assert combinations(usable.resistors, usable.capacitors, request) == len(rows)
    given = []
    for choice in found:
        resistors = sorted(id_ for each in choice.resistors for id_ in oracle.parts_of(plain(each)))
        capacitors = oracle.parts_of(plain(choice.capacitors[0]))
        pairing = choice.pairing
        given.append((pairing.ppm, pairing.parts, pairing.size, resistors, capacitors))
    assert given == [row[:3] + row[4:6] for row in expected]
    written = [(*map(plain, c.resistors), *map(plain, c.capacitors)) for c in found]
    assert len(set(written)) == len(written)


@pytest.mark.parametrize("wish", WISHES)
@pytest.mark.parametrize("circuit", [PLAIN, STEERED], ids=["plain", "steered"])
def test_the_first_answers_are_those_of_the_whole_space(monkeypatch, circuit, wish):
    rnd = random.Random(f"{circuit.family} {wish}")
    for _ in range(15):
        holdings = random_stock(rnd, 3, 2)
        with monkeypatch.context() as patch:
            patch_to(patch, rnd.choice(("listed", "split", "sieved", "batches")), rnd)
            request = random_request(rnd, circuit, holdings, wish)
            compare(holdings, request, is_steered=circuit is STEERED)


@pytest.mark.slow
@pytest.mark.parametrize("wish", WISHES)
@pytest.mark.parametrize("circuit", [PLAIN, STEERED], ids=["plain", "steered"])
@pytest.mark.parametrize("seed", range(1))
def test_the_first_answers_of_many_stocks(monkeypatch, circuit, wish, seed):
    rnd = random.Random(f"{circuit.family} {wish} {seed}")
    for _ in range(40):
        holdings = random_stock(rnd, rnd.choice((2, 3, 3, 4)), rnd.choice((1, 2, 3)))
        most = rnd.choice((1, 2, 2, 2)) if len(holdings) > 4 else rnd.choice((2, 3))
        with monkeypatch.context() as patch:
            patch_to(patch, rnd.choice(("listed", "split", "sieved", "batches")), rnd)
            request = random_request(rnd, circuit, holdings, wish, most_resistors=most)
            compare(holdings, request, is_steered=circuit is STEERED)


def test_one_drawer_is_shared_by_both_resistors():
    """Two 10k in all: RA and RB take one each, and none is left for a second in either."""
    holdings = [resistor(1, 1e4, 2), resistor(2, 1e5, 1), capacitor(11, 1e-6)]
    targets = (exactly("high", 2e4 * 1e-6 * math.log(2)), exactly("low", 1e-2 * math.log(2)))
    request = Request(PLAIN, targets, rank=Rank.ERROR, top=1)
    (best,) = find_fits(holdings, request).fits
    assert best.errors == {"high": 0.0, "low": 0.0}
    assert [plain(slot.network) for slot in best.slots] == [1, 1, 11]
    compare(holdings, request, is_steered=False)
    # For two boards there are only two 10k for four places: the same wish must be missed.
    twice = Request(PLAIN, targets, rank=Rank.ERROR, top=1, boards=2)
    assert find_fits([*holdings[:2], capacitor(11, 1e-6, 2)], twice).fits == ()


def test_equal_drawers_are_taken_from_by_plenty_and_then_by_number():
    """Six bags of one value: many ways to one circuit, the most plentiful bags first."""
    counts = (1, 2, 2, 5, None, 1)
    holdings = [resistor(number, 1e4, count) for number, count in enumerate(counts, 1)]
    holdings += [capacitor(11, 1e-6, 3), capacitor(12, 1e-6, None)]
    targets = (exactly("high", 2e-2 * math.log(2)), exactly("low", 1e-2 * math.log(2)))
    for rank, boards, top in product(ORDERS, (1, 2), (1, 5, 25)):
        options = {"boards": boards, "top": top, "most_resistors": 2, "most_capacitors": 1}
        request = Request(PLAIN, targets, rank=rank, lifted=EVERY_RULE, **options)
        compare(holdings, request, is_steered=False)
    (first, *_) = find_fits(holdings, Request(PLAIN, targets, rank=Rank.ERROR)).fits
    assert [plain(slot.network) for slot in first.slots] == [5, 5, 12]


def test_a_whole_answer_is_complete_and_counts_what_it_covered():
    rnd = random.Random("answers")
    for _ in range(15):
        holdings = random_stock(rnd, 3, 2)
        request = random_request(rnd, PLAIN, holdings, rnd.choice(WISHES), top=4)
        rows, expected = listed(holdings, request, is_steered=False)
        answer = find_fits(holdings, request)
        assert answer.searched.complete
        assert answer.searched.combinations == len(rows)
        assert len(answer.fits) == len(expected)
        for fit, row in zip(answer.fits, expected, strict=True):
            assert fit.parts == row[1]
            assert abs(fit.error) == pytest.approx(float(row[2]), rel=1e-9, abs=1e-12)
            assert abs(fit.error) == max(map(abs, fit.errors.values()))


# Real devices ------------------------------------------------------------------------------------

DROP = 0.6


def real_circuit(rnd):
    """A circuit with currents, and the oracle's description of it."""
    timer, supply = timer_named(rnd.choice(("bipolar", "cmos", "NE555", "TLC555"))), 9.0
    drop = rnd.choice((None, DROP))
    control = rnd.choice((None, None, 4.5))
    circuit = astable(timer, supply, control)
    if drop is not None:
        circuit = steered(timer, supply, diode_named(f"{DROP}V"), control=control)
    upper = 2 / 3 if control is None else control / supply
    figures = joint_oracle.Currents(
        supply,
        upper,
        upper / 2,
        timer.threshold_current_typical,
        timer.discharge_leakage_typical,
        timer.discharge_resistance_typical,
        drop,
    )
    return circuit, figures


@dataclass
class Rules:
    """What may be built: the device's limits from its record, the leakage rule from its words."""

    circuit: Circuit
    figures: joint_oracle.Currents
    strict: bool

    def allow(self, row, leak, times):
        if not all(math.isfinite(time) and time > 0 for time in times):
            return False
        if not self.strict:
            return True
        (ra, rb), bounds = map(float, row.ohms), self.circuit.bounds
        charging = ra if self.circuit.family == "steered" else ra + rb
        # At the trip point three times the leak must still flow through the resistor.
        trip = self.figures.supply * self.figures.upper
        left = self.figures.supply - trip - (self.figures.drop or 0.0)
        switch = self.figures.into_switch if self.circuit.family == "steered" else 0.0
        # A board leaks past the resistor that only discharges as well, so its limit is the same.
        largest = max(charging, rb)
        leaked = largest * (3 * leak * trip + switch) <= left
        return min(ra, rb) >= bounds.least and largest <= bounds.most and leaked


def real_rows(holdings, request, figures):
    """Every allowed circuit with the error that the charging equation gives it."""
    ohms, farads = sides(holdings)
    strict = Rule.RESISTOR_LIMITS not in request.lifted
    polar = {
        holding.id
        for holding in holdings
        if strict and holding.part.technology in ("electrolytic", "tantalum")
    }
    leaks = {
        holding.id: (leak_conductance(holding.part, 9.0).typical, None)
        for holding in holdings
        if holding.part.kind is Kind.CAPACITOR
    }
    most = request.most_resistors, request.most_capacitors
    rules, wanted = Rules(request.circuit, figures, strict), wanted_of(request)
    found = {}
    rows = joint_oracle.circuits(ohms, farads, most, request.boards, polar)
    for row in rows:
        leak = float(joint_oracle.value_of(row.c, leaks, "||"))
        times = figures.times(row, leak)
        if row.farad >= oracle.fraction(1e-9) and rules.allow(row, leak, times):
            found[row] = times
    kept = joint_oracle.kept(list(found), found.__getitem__, wanted)
    return rows, {row: joint_oracle.miss(found[row], wanted) for row in kept}


def compare_real(holdings, request, figures):
    """Hold errors and parts, place by place, and the parts themselves where nothing is tied."""
    rows, errors = real_rows(holdings, request, figures)
    uses = joint_oracle.all_uses(*sides(holdings), request.boards)
    expected = joint_oracle.ranked(list(errors), errors.__getitem__, uses, request.rank)
    answer = find_fits(holdings, request)
    assert answer.searched.combinations == len(rows)
    assert len(answer.fits) == min(request.top, len(expected))
    same = 0
    for fit, row in zip(answer.fits, expected, strict=False):
        assert fit.parts == row[1]
        assert abs(fit.error) == pytest.approx(row[2], rel=1e-8, abs=1e-10)
        same += sorted(holding.id for holding in fit.holdings()) == sorted(row[4] + row[5])
    return same, len(answer.fits)


def run_real(monkeypatch, rnd, trials):
    same = total = 0
    for _ in range(trials):
        circuit, figures = real_circuit(rnd)
        holdings = leaky_stock(rnd)
        lifted = rnd.choice((frozenset(), EVERY_RULE - {Rule.STRAYS}))
        request = random_request(
            rnd, circuit, holdings, rnd.choice(WISHES), lifted=lifted, top=rnd.choice((1, 3, 6))
        )
        with monkeypatch.context() as patch:
            patch_to(patch, rnd.choice(("listed", "split", "sieved")), rnd)
            one, of = compare_real(holdings, request, figures)
        same, total = same + one, total + of
    return same, total


@pytest.mark.parametrize("seed", range(3))
def test_real_timers_against_every_circuit(monkeypatch, seed):
    same, total = run_real(monkeypatch, random.Random(f"real {seed}"), 10)
    assert total > 10
    assert same > 0.9 * total  # but for the rare pair that only rounding tells apart


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(2))
def test_real_timers_on_many_stocks(monkeypatch, seed):
    run_real(monkeypatch, random.Random(f"many real {seed}"), 40)


def test_a_time_that_never_ends_is_no_answer():
    """90M beside what a bipolar switch leaks: the node never reaches the trip point."""
    holdings = [resistor(1, 9e7), resistor(2, 1e6), capacitor(11, 1e-7)]
    circuit = astable(timer_named("NE555"), 9.0)
    targets = (exactly("high", 10.0), exactly("low", 0.1))
    endless = circuit.twin.times((9e7, 1e6), 1e-7, 0.0)[0]
    assert np.isinf(endless)
    for rank in Rank:
        fits = find_fits(holdings, Request(circuit, targets, rank=rank, lifted=EVERY_RULE)).fits
        assert all(math.isfinite(fit.outlook.of("high").nominal) for fit in fits)
        assert all(math.isfinite(fit.error) for fit in fits)
