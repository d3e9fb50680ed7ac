"""The balanced order against a plain implementation of what it promises."""

from __future__ import annotations

import math
import random
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
import oracle
import pytest
from stocks import asked, capacitor, farads_of, ohms_of, parts_of, resistor, sides

from chooser.circuits.leakage import leak_conductance
from chooser.networks import Join, shares_of
from chooser.parts import Kind, Tolerance
from chooser.search import space
from chooser.search.find import find_fits
from chooser.search.request import Request
from chooser.search.slots import CapacitorSlots
from chooser.search.space import Space
from chooser.search.terms import Rank, Rule
from chooser.uncertainty import limits_of

# The rules of the order, as the design and the help state them.
NEAREST = 8
PER_PART = 1.10
PER_VARIATION = 1.50


@dataclass(frozen=True)
class Circuit:
    resistor: object
    capacitor: object
    main: int
    outside: bool
    score: float

    @property
    def parts(self):
        return tuple(oracle.parts_of(self.resistor)), tuple(oracle.parts_of(self.capacitor))


class Plain:
    """Weighs every circuit that the order has to weigh, one by one."""

    def __init__(self, holdings, request: Request):
        self.request = request
        self.ohms, self.farads = sides(holdings)
        self.parts = {holding.id: holding.part for holding in holdings}
        self.worth = {
            number: oracle.fraction(part.effective) for number, part in self.parts.items()
        }
        self.drive = request.circuit.law
        self.leaks = {
            number: oracle.fraction(leak_conductance(part, request.circuit.supply).typical)
            for number, part in self.parts.items()
            if part.kind is Kind.CAPACITOR and not request.circuit.timer.ideal
        }

    def circuits(self):
        request = self.request
        resistors = oracle.all_networks(
            oracle.uses_of(self.ohms, request.boards), request.most_resistors
        )
        valued = [
            (float(oracle.value(each, self.worth, "+")), len(oracle.parts_of(each)), each)
            for each in resistors
        ]
        for network in oracle.all_networks(
            oracle.uses_of(self.farads, request.boards), request.most_capacitors
        ):
            farad = float(oracle.value(network, self.worth, "||"))
            polar = {number for number in self.farads if self.polarised(number)}
            if farad < 1e-9 or oracle.polar_in_series(network, polar):
                continue
            leak = float(oracle.value(network, self.leaks, "||")) if self.leaks else 0.0
            wanted, least, most = self.resistance(farad, leak)
            for size in range(1, request.most_resistors + 1):
                near = sorted(
                    (abs(ohm / wanted - 1), ohm, each)
                    for ohm, parts, each in valued
                    if parts == size and least <= ohm <= most
                )
                for _, ohm, each in near[:NEAREST]:
                    yield self.weighed(each, ohm, network, farad, leak)

    def polarised(self, number):
        return self.parts[number].technology in ("electrolytic", "tantalum")

    def resistance(self, farad, leak):
        """The wanted resistance, by halving, and the ends that the rules allow."""
        bounds = self.request.circuit.bounds
        least, most = bounds.least, bounds.most
        end = 1e15
        if not self.request.circuit.timer.ideal:
            a = self.drive.threshold
            most = min(most, (1 - a) / (3 * a * leak))
            end = float(self.drive.endless_from(leak))
        low, high = 1e-3, end
        for _ in range(200):
            middle = math.sqrt(low * high)
            early = self.drive.interval(middle, farad, leak) < self.request.target
            low, high = (middle, high) if early else (low, middle)
        return low, least, most

    def weighed(self, resistors, ohm, capacitors, farad, leak):
        request = self.request
        r_spread, r_shift, _ = self.tolerance(resistors, "+")
        c_spread, c_shift, main = self.tolerance(capacitors, "||")
        steep = float(self.drive.sensitivity(ohm, farad, leak))
        time = float(self.drive.interval(ohm, farad, leak))
        mean = time * (1 + steep * r_shift) * (1 + c_shift)
        timer = request.circuit.timer.timing_error_limit / 3
        variance = (steep * r_spread) ** 2 + c_spread**2 + timer**2
        miss = math.sqrt((mean / request.target - 1) ** 2 + variance)
        count = len(oracle.parts_of(resistors)) + len(oracle.parts_of(capacitors))
        error = abs(time / request.target - 1)
        outside = error > request.within
        # Outside the band the nearest comes first, whatever else may be said of it.
        score = error if outside else miss * PER_PART**count
        return Circuit(resistors, capacitors, main, outside, score)

    def tolerance(self, network, adds):
        """Spread and shift of a slot, and the part with the greatest share."""
        spread = shift = 0.0
        totals: dict[int, Fraction] = {}
        for number, share in oracle.shares(network, self.worth, adds):
            tolerance = limits_of(self.parts[number])
            spread += float(share) * (tolerance.plus + tolerance.minus) / math.sqrt(12)
            shift += float(share) * (tolerance.plus - tolerance.minus) / 2
            totals[number] = max(totals.get(number, Fraction(0)), share)
        return spread, shift, max(totals, key=totals.__getitem__)

    def places(self):
        """Give away the places: band, then score with the handicap; then order by score."""
        seen, fits, times = set(), [], {}
        for circuit in sorted(self.circuits(), key=lambda each: (each.outside, each.score)):
            if circuit.parts in seen:
                continue
            seen.add(circuit.parts)
            variations = times[circuit.main] = times.get(circuit.main, -1) + 1
            fits.append((circuit.outside, circuit.score * PER_VARIATION**variations, circuit))
        fits.sort(key=lambda each: each[:2])
        chosen = [circuit for _, _, circuit in fits[: self.request.top]]
        return sorted(chosen, key=lambda each: (each.outside, each.score))


def compare(holdings, request):
    expected = Plain(holdings, request).places()
    fits = find_fits(holdings, request).fits
    got = [parts_of(fit) for fit in fits]
    assert got == [(list(each.parts[0]), list(each.parts[1])) for each in expected]
    for fit, circuit in zip(fits, expected, strict=True):
        # Two arrangements of the same parts may be equal: a + a on c + c is a || a on c || c.
        count = sum(map(len, circuit.parts))
        assert fit.in_band is not circuit.outside
        score = fit.likely_miss * PER_PART**count if fit.in_band else abs(fit.error)
        assert score == pytest.approx(circuit.score, rel=1e-9)


def drawn(rnd, low, high, digits):
    return float(f"{10 ** rnd.uniform(low, high):.{digits}g}")


def random_tolerance(rnd):
    return rnd.choice(
        (None, Tolerance(0.01, 0.01), Tolerance(0.05, 0.05), Tolerance(0.1, 0.1))
        + (Tolerance(0.2, 0.8),) * (rnd.random() < 0.3)
    )


def random_stock(rnd, least_r=3.0, most_r=5.5):
    """Values of five digits, so that no two circuits score alike by chance."""
    holdings = [
        resistor(
            number,
            drawn(rnd, least_r, most_r, 5),
            rnd.choice((1, 1, 2, 3)),
            tolerance=random_tolerance(rnd),
        )
        for number in range(1, rnd.randint(2, 6))
    ]
    kinds = ("polyester", "c0g", "electrolytic", "tantalum", "mica")
    for number in range(11, rnd.randint(12, 15)):
        measured = drawn(rnd, -8, -5, 5) if rnd.random() < 0.2 else None
        holdings.append(
            capacitor(
                number,
                drawn(rnd, -8, -5, 5),
                rnd.choice((1, 2)),
                technology=rnd.choice(kinds),
                tolerance=random_tolerance(rnd),
                measured=measured,
                meter=None if measured is None else rnd.choice((None, 0.01)),
            )
        )
    return holdings


def random_request(rnd):
    timer = rnd.choice(("ideal", "bipolar", "cmos", "ICM7555"))
    return asked(
        drawn(rnd, -4, 0.5, 4),
        timer,
        9.0,
        rank=Rank.BALANCED,
        boards=rnd.choice((1, 1, 2)),
        within=rnd.choice((0.005, 0.02, 0.1)),
        most_resistors=rnd.choice((1, 2, 3)),
        most_capacitors=rnd.choice((1, 2)),
        top=rnd.choice((1, 4, 10)),
    )


@pytest.mark.parametrize("seed", range(6))
def test_random_stocks(monkeypatch, seed):
    rnd = random.Random(seed)
    for _ in range(15):
        with monkeypatch.context() as patch:
            patch.setattr(space, "MOST_LISTED", rnd.choice((150_000, 150_000, 0, 5, 40)))
            compare(random_stock(rnd), random_request(rnd))


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(100, 120))
def test_many_random_stocks(monkeypatch, seed):
    rnd = random.Random(seed)
    for _ in range(50):
        with monkeypatch.context() as patch:
            patch.setattr(space, "MOST_LISTED", rnd.choice((150_000, 0, 5, 40)))
            compare(random_stock(rnd), random_request(rnd))


# Single promises ---------------------------------------------------------------------------------


def balanced(holdings, target, timer="ideal", **options):
    return find_fits(holdings, asked(target, timer, rank=Rank.BALANCED, **options))


def test_inside_the_band_comes_first_however_loose_its_parts():
    loose = capacitor(11, 1e-6, tolerance=Tolerance(0.2, 0.2))
    exact = capacitor(12, 1.05e-6, tolerance=Tolerance(0.001, 0.001))
    answer = balanced([resistor(1, 1e4), loose, exact], 1e-2 * math.log(3), most_capacitors=1)
    assert [farads_of(fit) for fit in answer.fits] == [[11], [12]]
    assert [fit.in_band for fit in answer.fits] == [True, False]
    assert not answer.searched.complete


@pytest.mark.parametrize(("error", "winner"), [(0.0438, [1]), (0.0478, [2, 3])])
def test_a_part_more_must_cut_the_likely_miss_by_a_tenth(error, winner):
    """By hand: with 1 sigma of 10 %, sqrt(e^2 + 0.1^2) is 1.1 x 0.1 at an error e of 4.58 %."""
    exact, rough = Tolerance(0.0, 0.0), Tolerance(0.1 * math.sqrt(3), 0.1 * math.sqrt(3))
    holdings = [
        resistor(1, 1e4 * (1 + error), tolerance=exact),
        resistor(2, 4e3, tolerance=exact),
        resistor(3, 6e3, tolerance=exact),
        capacitor(11, 1e-6, tolerance=rough),
    ]
    answer = balanced(holdings, 1e-2 * math.log(3), within=0.2, most_resistors=2)
    assert ohms_of(answer.fits[0]) == winner


def test_no_two_places_with_the_same_parts():
    holdings = [resistor(number, 1e3 * number, 2) for number in (1, 2, 3)]
    holdings.append(capacitor(11, 1e-6, 2))
    answer = balanced(holdings, 2.2e-3, top=50)
    parts = [(tuple(ohms_of(fit)), tuple(farads_of(fit))) for fit in answer.fits]
    assert len(parts) == len(set(parts)) > 10


def test_other_capacitors_get_places_when_they_do_nearly_as_well():
    """Ten resistors within the band on the better capacitor, one on the slightly worse."""
    good, fair = Tolerance(0.02, 0.02), Tolerance(0.025, 0.025)
    holdings = [resistor(n, 1e4 + n, tolerance=Tolerance(0.001, 0.001)) for n in range(1, 11)]
    holdings += [capacitor(21, 1e-6, tolerance=good), capacitor(22, 1.001e-6, tolerance=fair)]
    answer = balanced(holdings, 1e-2 * math.log(3), top=4, most_resistors=1, most_capacitors=1)
    mains = [farads_of(fit) for fit in answer.fits]
    assert mains.count([22]) == 2
    scores = [fit.likely_miss for fit in answer.fits]
    assert scores == sorted(scores)


@pytest.mark.parametrize("top", [10, 40, 80])
def test_no_place_outside_the_band_before_the_last_one_inside(top):
    """Eight fits in the band on each of seven networks with one main capacitor, others far off."""
    holdings = [resistor(number, 1e4 + 7 * number) for number in range(1, 31)]
    holdings += [capacitor(61, 1e-6), capacitor(62, 3e-6)]
    holdings += [capacitor(70 + place, (1 + place / 10) * 1e-9) for place in range(6)]
    answer = balanced(holdings, 1e-2 * math.log(3), top=top, most_resistors=1)
    in_band = [fit.in_band for fit in answer.fits]
    assert in_band.count(True) == min(7 * NEAREST, top)
    assert in_band == sorted(in_band, reverse=True)


def test_equal_drawers_with_unequal_tolerances_are_told_apart():
    holdings = [
        resistor(1, 1e4, tolerance=Tolerance(0.05, 0.05)),
        resistor(2, 1e4, tolerance=Tolerance(0.01, 0.01)),
        capacitor(11, 1e-6, tolerance=Tolerance(0.2, 0.2)),
        capacitor(12, 1e-6, tolerance=Tolerance(0.05, 0.05)),
    ]
    answer = balanced(holdings, 1e-2 * math.log(3), most_resistors=1, most_capacitors=1)
    assert (ohms_of(answer.fits[0]), farads_of(answer.fits[0])) == ([2], [12])


def main_capacitors(holdings, most):
    request = asked(1e-2, most_capacitors=most, lifted=frozenset(Rule))
    opened = Space([resistor(1, 1e4)], holdings, request)
    for size in range(1, most + 1):
        slots = opened.slots(size)
        assert isinstance(slots, CapacitorSlots)
        yield opened, slots


@pytest.mark.parametrize("most", [2, 3])
def test_the_main_capacitor_has_the_greatest_share(most):
    """The share of the stored energy: large ones rule side by side, small ones in series."""
    holdings = [capacitor(11, 10e-6), capacitor(12, 1e-6), capacitor(13, 2.2e-6)]
    for opened, slots in main_capacitors(holdings, most):
        farad = opened.capacitors.value
        for row in range(len(slots)):
            network = slots.rows.network(row)
            shares = dict(shares_of(network, Join.PARALLEL, farad.__getitem__))
            assert slots.main[row] == max(shares, key=shares.__getitem__), network


def test_scores_of_endless_intervals_never_win():
    """Near its end the interval stretches without limit; such fits must sort last or be gone."""
    holdings = [resistor(1, 1e6), resistor(2, 5e6), resistor(3, 1e7)]
    holdings.append(capacitor(11, 10e-6, technology="electrolytic", voltage=16.0))
    answer = balanced(holdings, 30.0, "bipolar", lifted=frozenset({Rule.RESISTOR_LIMITS}), top=30)
    assert answer.fits
    assert all(np.isfinite(fit.outlook.chief.nominal) for fit in answer.fits)
