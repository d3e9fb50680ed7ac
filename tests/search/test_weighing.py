"""The balanced order of circuits with two resistors: in the band, few alike, and truly scored."""

from __future__ import annotations

import math
import random
from itertools import product

import numpy as np
import pytest
from stocks import capacitor, random_stock, resistor

from chooser.chance import device_of
from chooser.circuits.astable import astable
from chooser.circuits.circuit import outputs_of
from chooser.circuits.diodes import diode_named
from chooser.circuits.leakage import leak_conductance
from chooser.circuits.steered import steered
from chooser.circuits.timers import timer_named
from chooser.networks import Join, Leaf, members
from chooser.parts import Kind, Tolerance
from chooser.search.find import find_fits
from chooser.search.request import Request, Target
from chooser.search.space import Space
from chooser.search.terms import Rank
from chooser.search.weighing import TwinWeigher
from chooser.uncertainty import limits_of

PER_PART = 1.10
SILICON = diode_named("silicon")
CIRCUITS = {
    "ideal": astable(timer_named("ideal"), 9.0),
    "bipolar": astable(timer_named("bipolar"), 9.0),
    "steered ideal": steered(timer_named("ideal"), 9.0, diode_named("ideal")),
    "steered": steered(timer_named("cmos"), 9.0, SILICON),
}


def only(output, value):
    return Target(output, value, value)


def wide_stock(rnd, resistors=8, capacitors=3):
    """Single values of three digits with the tolerances of real drawers."""
    tolerances = (Tolerance(0.01, 0.01), Tolerance(0.05, 0.05), Tolerance(0.2, 0.2), None)
    holdings = [
        resistor(
            number,
            float(f"{10 ** rnd.uniform(3.2, 5.5):.3g}"),
            rnd.choice((1, 2, 3)),
            tolerance=rnd.choice(tolerances),
        )
        for number in range(1, resistors + 1)
    ]
    for number in range(11, 11 + capacitors):
        farad = float(f"{10 ** rnd.uniform(-8, -5.5):.3g}")
        kind = rnd.choice(("polyester", "c0g", "electrolytic"))
        holdings.append(
            capacitor(number, farad, 2, technology=kind, tolerance=rnd.choice(tolerances))
        )
    return holdings


def random_targets(rnd, circuit, holdings):
    """What three parts of the stock nearly make."""
    ohms = [each for each in holdings if each.part.kind is Kind.RESISTOR]
    farads = [each for each in holdings if each.part.kind is Kind.CAPACITOR]
    ra, rb = (each.part.effective for each in rnd.sample(ohms, 2))
    high, low = circuit.twin.times((ra, rb), rnd.choice(farads).part.effective, 0.0)
    high, low = (float(time) * rnd.uniform(0.97, 1.03) for time in (high, low))
    duty = high / (high + low)
    if circuit.twin.through_both:
        duty = max(duty, circuit.twin.least_duty + 0.01)
    period = only("period", high + low)
    return rnd.choice(
        (
            (only("high", (high + low) * duty), only("low", (high + low) * (1 - duty))),
            (period, only("duty", duty)),
            (period, Target("duty", duty * 0.98, duty * 1.02)),
        )
    )


# Scores worked out by hand -----------------------------------------------------------------------


def leak_of(part, circuit):
    return 0.0 if circuit.lossless else leak_conductance(part, circuit.supply).typical


def single_parts(holdings, request):
    """Band and score of every circuit of one part a slot, by plain arithmetic; best first."""
    circuit, bounds = request.circuit, request.circuit.bounds
    ohms = [each for each in holdings if each.part.kind is Kind.RESISTOR]
    farads = [each for each in holdings if each.part.kind is Kind.CAPACITOR]
    chosen = [
        each for each in product(ohms, ohms, farads) if each[0] is not each[1] or each[0].free > 1
    ]
    values = np.array([[each.part.effective for each in way] for way in chosen]).T
    leak = np.array([leak_of(way[2].part, circuit) for way in chosen])
    both = values[0] + values[1]
    charging = both if circuit.twin.through_both else np.maximum(values[0], values[1])
    most = np.full(len(chosen), bounds.most)
    if not circuit.lossless:
        most = np.minimum(most, circuit.twin.leak_bound(leak, 3.0))
    kept = np.minimum(values[0], values[1]) >= bounds.least
    kept &= (charging <= most) & (values[2] >= 1e-9)
    parts = [[each.part for each in way] for way, keep in zip(chosen, kept, strict=True) if keep]
    if not parts:
        return []
    outside, score = scored(request, values[:, kept], parts, leak[kept])
    return sorted(zip(outside.tolist(), score.tolist(), strict=True))


def scored(request, values, parts, leak):
    """Likely miss x 1.1 ** 3 by differences, outside the band the error; and whether it is out."""
    circuit = request.circuit

    def made(moved):
        return outputs_of(circuit, circuit.twin.times(moved[:2], moved[2], leak))

    usual = made(values)
    limits = [[limits_of(part) for part in way] for way in parts]
    outside, worst = np.zeros(len(parts), dtype=bool), np.zeros(len(parts))
    errors = np.zeros(len(parts))
    for target in request.targets:
        mean = usual[target.output].copy()
        device = device_of(circuit, target.output).spread
        variance = np.full(len(parts), device**2 * (target.output != "duty"))
        for place in range(3):
            plus, minus = (
                np.array([getattr(each[place], side) for each in limits])
                for side in ("plus", "minus")
            )
            moved = values.copy()
            moved[place] *= 1 + 1e-6
            steep = (made(moved)[target.output] / usual[target.output] - 1) / 1e-6
            variance += (steep * (plus + minus) / math.sqrt(12)) ** 2
            mean *= 1 + steep * (plus - minus) / 2
        off = np.minimum(mean / target.low - 1, 0) + np.maximum(mean / target.high - 1, 0)
        worst = np.maximum(worst, np.hypot(off, np.sqrt(variance)))
        low, high = target.band(request.within)
        value = usual[target.output]
        outside |= (value < low * (1 - 1e-9)) | (value > high * (1 + 1e-9))
        errors = np.maximum(errors, np.maximum(1 - value / target.low, value / target.high - 1))
    return outside, np.where(outside, errors, worst * PER_PART**3)


def score_of(fit):
    # To ten digits: of what is equal in truth, rounding may put either first.
    score = fit.likely_miss * PER_PART**fit.parts if fit.in_band else abs(fit.error)
    return not fit.in_band, round(score, 10)


def values_of(fit):
    """The values of the parts in each slot, sorted."""
    return tuple(
        tuple(sorted(each.part.effective for each in members(slot.network))) for slot in fit.slots
    )


def check_list(holdings, request):
    """What the list promises: order, variety, and no worse than every circuit of three parts."""
    fits = find_fits(holdings, request).fits
    singles = single_parts(holdings, request)
    scores = [score_of(fit) for fit in fits]
    assert scores == sorted(scores)
    assert len(set(map(values_of, fits))) == len(fits)
    if singles:
        outside, best = singles[0]
        assert fits
        assert fits[0].in_band or outside
        # What a diode's drop does to each time is taken at usual parts, not at each circuit's.
        slack = 2e-3 if request.circuit.scatter else 1e-6
        assert scores[0][0] < outside or scores[0][1] <= best * (1 + slack)
    # Outside the band stands nothing before what is inside, and only where places were left.
    assert [fit.in_band for fit in fits] == sorted((fit.in_band for fit in fits), reverse=True)
    return bool(singles) and not singles[0][0]


@pytest.mark.parametrize("name", CIRCUITS)
def test_the_list_is_no_worse_than_all_circuits_of_three_parts(name):
    """Eight values: all of them are weighed, so nothing of one part a slot may be missed."""
    rnd, hits = random.Random(name), 0
    for _ in range(8):
        holdings = wide_stock(rnd)
        request = Request(
            CIRCUITS[name],
            random_targets(rnd, CIRCUITS[name], holdings),
            within=rnd.choice((0.02, 0.05)),
            most_resistors=rnd.choice((1, 2, 2)),
            most_capacitors=rnd.choice((1, 2)),
            top=rnd.choice((1, 5, 10)),
        )
        hits += check_list(holdings, request)
    assert hits >= 2


@pytest.mark.slow
@pytest.mark.parametrize("name", CIRCUITS)
@pytest.mark.parametrize("seed", range(1))
def test_many_lists_are_no_worse_than_all_circuits_of_three_parts(name, seed):
    rnd = random.Random(f"{name} {seed}")
    for _ in range(15):
        holdings = wide_stock(rnd, rnd.randint(2, 8), rnd.randint(1, 5))
        request = Request(
            CIRCUITS[name],
            random_targets(rnd, CIRCUITS[name], holdings),
            within=rnd.choice((0.005, 0.02, 0.05)),
            most_resistors=rnd.choice((1, 2, 3)),
            most_capacitors=rnd.choice((1, 2)),
            boards=1,
            top=rnd.choice((1, 5, 10)),
        )
        check_list(holdings, request)


@pytest.mark.parametrize("name", CIRCUITS)
def test_wide_stocks_with_a_hit_of_three_parts_start_in_the_band(name):
    """Forty values, where only the nearest eight are weighed for each capacitor."""
    rnd, hits = random.Random(f"wide {name}"), 0
    for _ in range(6):
        holdings = [resistor(n, round(1e3 * 10 ** (n / 20), 0), 2) for n in range(1, 41)]
        holdings += [capacitor(101, 1e-7), capacitor(102, 4.7e-7), capacitor(103, 1e-6)]
        targets = random_targets(rnd, CIRCUITS[name], holdings)
        request = Request(CIRCUITS[name], targets, most_resistors=rnd.choice((1, 2)))
        if any(not outside for outside, _ in single_parts(holdings, request)):
            hits += 1
            assert find_fits(holdings, request).fits[0].in_band
    assert hits >= 3


# Likely miss -------------------------------------------------------------------------------------


def folded(network, adds, of):
    """The value of a network of arrays, by Kirchhoff's laws."""
    if isinstance(network, Leaf):
        return of(network.member)
    values = [folded(child, adds, of) for child in network.children]
    return sum(values) if network.join is adds else 1 / sum(1 / value for value in values)


def simulated(fit, request, rnd):
    """Root mean square miss of builds whose parts lie anywhere within their tolerances."""
    circuit, builds = request.circuit, 100_000
    built, leak = [], 0.0
    for slot in fit.slots:
        # The parts of a slot err together: one draw moves all of them.
        draw = rnd.random(builds)
        adds = Join.PARALLEL if slot.name == "C" else Join.SERIES

        def made_of(holding, draw=draw):
            limits = limits_of(holding.part)
            return holding.part.effective * (1 - limits.minus + (limits.plus + limits.minus) * draw)

        built.append(folded(slot.network, adds, made_of))
        if slot.name == "C" and not circuit.lossless:
            leak = folded(slot.network, adds, lambda each: leak_of(each.part, circuit))
    device = 1 + circuit.error.plus / 3 * rnd.standard_normal(builds)
    times = [time * device for time in circuit.twin.times(built[:2], built[2], leak)]
    made = outputs_of(circuit, times)
    misses = []
    for target in request.targets:
        values = made[target.output]
        error = np.minimum(values / target.low - 1, 0) + np.maximum(values / target.high - 1, 0)
        if target.is_range:
            # Off a range is counted from the mean; the scatter about it always counts.
            off, spread = target.error(float(values.mean())), values.std() / values.mean()
            misses.append(math.hypot(off, spread))
        else:
            misses.append(math.sqrt(float(np.mean(error**2))))
    return max(misses)


@pytest.mark.parametrize("name", CIRCUITS)
def test_the_likely_miss_is_that_of_simulated_builds(name):
    """To first order of the tolerances: five percent of it are left to the higher ones."""
    rnd, draws = random.Random(f"miss {name}"), np.random.default_rng(7)
    compared = 0
    for _ in range(4):
        holdings = wide_stock(rnd)
        targets = random_targets(rnd, CIRCUITS[name], holdings)
        request = Request(CIRCUITS[name], targets, within=0.05, most_resistors=2, top=3)
        for fit in find_fits(holdings, request).fits:
            assert fit.likely_miss == pytest.approx(simulated(fit, request, draws), rel=0.05)
            compared += 1
    assert compared >= 4


# Bounds and single promises ----------------------------------------------------------------------


@pytest.mark.parametrize("name", CIRCUITS)
def test_no_score_is_below_its_bound(name):
    """The bound lets whole capacitor networks go unseen, so it must never be too high."""
    rnd = random.Random(f"bound {name}")
    for _ in range(10):
        holdings = wide_stock(rnd)
        request = Request(
            CIRCUITS[name], random_targets(rnd, CIRCUITS[name], holdings), most_resistors=2
        )
        opened = Space(
            [h for h in holdings if h.id < 11], [h for h in holdings if h.id > 10], request
        )
        weigher = TwinWeigher(opened)
        for level in opened.levels():
            slots = opened.slots(level.capacitors)
            everything = np.arange(len(slots))
            owner, rows = weigher.near(slots, everything, level, math.inf)
            score = weigher.score(owner, rows, slots, level.parts)
            assert (score >= weigher.least_score(slots, level)[owner]).all()


@pytest.mark.parametrize("name", CIRCUITS)
def test_the_same_question_gets_the_same_answer(name):
    rnd = random.Random(f"same {name}")
    holdings = wide_stock(rnd)
    request = Request(CIRCUITS[name], random_targets(rnd, CIRCUITS[name], holdings))
    first = find_fits(holdings, request).fits
    assert first
    shuffled = holdings[:]
    rnd.shuffle(shuffled)
    assert find_fits(shuffled, request).fits == first


def test_counts_are_shared_by_both_resistors():
    """One 10k and many 22k, wanted 10k twice: the 10k never stands in both places."""
    for boards in (1, 2):
        holdings = [resistor(1, 1e4, boards), resistor(2, 2.2e4, 20), capacitor(11, 1e-6, 9)]
        targets = (only("high", 2e-2 * math.log(2)), only("low", 1e-2 * math.log(2)))
        fits = find_fits(holdings, Request(CIRCUITS["ideal"], targets, boards=boards)).fits
        assert fits
        for fit in fits:
            assert sum(holding.id == 1 for holding in fit.holdings()) <= 1


def test_a_range_of_duties_is_used_to_its_ends():
    """10k and 30k, 70 % and 90 % of the way: any duty inside is as good, none outside is shown."""
    holdings = [resistor(1, 1e4), resistor(2, 3e4), resistor(3, 5e3, 4), capacitor(11, 1e-6)]
    period = (1e4 + 2 * 3e4) * 1e-6 * math.log(2)
    targets = (only("period", period), Target("duty", 0.55, 0.6))
    fits = find_fits(holdings, Request(CIRCUITS["ideal"], targets, most_resistors=1, top=3)).fits
    # By hand: (10 + 30) / (10 + 60) is 57.1 %, inside, and the period is met exactly.
    assert fits[0].in_band
    assert fits[0].errors == {"period": pytest.approx(0.0, abs=1e-12), "duty": 0.0}
    narrow = (only("period", period), Target("duty", 0.58, 0.6))
    request = Request(CIRCUITS["ideal"], narrow, most_resistors=1, top=3)
    assert not any(fit.in_band for fit in find_fits(holdings, request).fits)


@pytest.mark.parametrize("seed", range(2))
def test_small_stocks_of_any_kind_get_an_answer(seed):
    """Whatever is in the drawers: no fault, and an answer or the reason why there is none."""
    rnd = random.Random(f"any {seed}")
    for _ in range(5):
        circuit = CIRCUITS[rnd.choice(list(CIRCUITS))]
        high = 10 ** rnd.uniform(-4, 2)
        targets = (only("high", high), only("low", high / rnd.uniform(1.05, 3)))
        request = Request(circuit, targets, boards=rnd.choice((1, 2)), rank=Rank.BALANCED)
        answer = find_fits(random_stock(rnd), request)
        assert any(fit.in_band for fit in answer.fits) or answer.advice
