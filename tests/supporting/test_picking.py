"""What is picked from which drawer: counts, preferences, and what is missing."""

from __future__ import annotations

from collections import Counter
from itertools import product

import pytest
from hypothesis import given
from hypothesis import strategies as st
from supporting_bench import capacitor, electrolytic, fit_of, one_shot, resistor, series, slow

from chooser.parts import Count, Kind, Sureness, Tolerance
from chooser.supporting.led import Led
from chooser.supporting.needs import Need, needs_of
from chooser.supporting.picking import pick

BYPASS = Need("bypass", Kind.CAPACITOR, 47e-9, 100e-9, 220e-9, "why", volt=9.0, volt_preferred=9.0)
RESERVOIR = Need(
    "reservoir",
    Kind.CAPACITOR,
    10e-6,
    47e-6,
    100e-6,
    "why",
    volt=12.0,
    volt_preferred=18.0,
    electrolytic=True,
)
PULL_UP = Need("pull-up", Kind.RESISTOR, 4.7e3, 10e3, 22e3, "why")
FIT = slow()


def chosen(need, *stock, fit=FIT, boards=1):
    """Id of the holding picked for a need, or None."""
    found = pick([need], fit, stock, boards)
    return found.picks[0].holding.id if found.picks else None


class TestPreference:
    def test_nearest_as_a_ratio(self):
        # 47n is a factor 2.13 away from 100n, 220n one of 2.2, 150n of 1.5.
        assert chosen(BYPASS, capacitor(1, 47e-9), capacitor(2, 220e-9)) == 1
        assert chosen(BYPASS, capacitor(1, 47e-9), capacitor(2, 150e-9)) == 2

    @pytest.mark.parametrize("farad", [46e-9, 221e-9, 1e-6])
    def test_never_outside_the_window(self, farad):
        assert chosen(BYPASS, capacitor(1, farad)) is None
        assert chosen(BYPASS, capacitor(1, 47e-9)) == chosen(BYPASS, capacitor(1, 220e-9)) == 1

    def test_the_measured_value_counts(self):
        assert chosen(BYPASS, capacitor(1, 220e-9, measured=230e-9)) is None

    def test_then_the_drawer_that_is_full(self):
        few, many, plenty = capacitor(1, 1e-7, 10), capacitor(2, 1e-7, 11), capacitor(3, 1e-7, None)
        assert chosen(BYPASS, few, many, plenty) == 3
        assert chosen(BYPASS, few, many) == 2
        assert chosen(BYPASS, few, capacitor(2, 1e-7, 2)) == 1

    def test_then_the_plainer_technology_then_the_lowest_id(self):
        film = capacitor(1, 1e-7, technology="polypropylene")
        cloth = capacitor(2, 1e-7, technology="polyester")
        assert chosen(BYPASS, film, cloth, capacitor(3, 1e-7), capacitor(4, 1e-7)) == 3
        assert chosen(BYPASS, film, cloth) == 2

    @pytest.mark.parametrize(
        "traits",
        [
            {"technology": "polyester", "measured": 100e-9},
            {"technology": "polypropylene", "tolerance": Tolerance(0.01, 0.01)},
        ],
    )
    def test_a_measured_or_precise_film_is_no_bypass_while_anything_else_will_do(self, traits):
        precious = capacitor(1, 100e-9, None, **traits)
        assert chosen(BYPASS, precious, capacitor(2, 220e-9, 1)) == 2
        assert chosen(BYPASS, precious) == 1

    def test_ordinary_metal_film_is_not_precious_a_half_percent_one_is(self):
        one, half = Tolerance(0.01, 0.01), Tolerance(0.005, 0.005)
        ordinary = resistor(1, 10e3, tolerance=one, technology="metal-film")
        assert chosen(PULL_UP, ordinary, resistor(2, 12e3)) == 1
        precise = resistor(1, 10e3, tolerance=half, technology="metal-film")
        assert chosen(PULL_UP, precise, resistor(2, 12e3)) == 2

    def test_ratings(self):
        low, enough, ample = (
            electrolytic(number, 47e-6, voltage=volt)
            for number, volt in ((1, 10.0), (2, 16.0), (3, 25.0))
        )
        unknown = electrolytic(4, 47e-6, voltage=None)
        assert chosen(RESERVOIR, low) is None
        assert chosen(RESERVOIR, low, unknown, enough, ample) == 3
        assert chosen(RESERVOIR, low, unknown, enough) == 2
        assert chosen(RESERVOIR, low, unknown) == 4

    def test_the_right_kind_of_capacitor(self):
        small = electrolytic(1, 100e-9)
        bead = capacitor(2, 47e-6, technology="tantalum")
        film = capacitor(3, 47e-6, technology="polyester")
        bare = capacitor(4, 47e-6, technology=None)
        assert chosen(BYPASS, small) is None
        assert chosen(BYPASS, capacitor(5, 1e-7, technology=None)) == 5
        assert chosen(RESERVOIR, bead) is None
        assert chosen(RESERVOIR, film) is None
        # A large one of unknown technology is taken for an electrolytic.
        assert chosen(RESERVOIR, bare) == 4
        assert chosen(PULL_UP, capacitor(6, 1e-7)) is None


class TestTheLed:
    def resistors(self, *stock, volt=9.0, led=None):
        circuit = one_shot("ideal", volt)
        needs = needs_of(circuit, FIT, led or Led(2.0, 10e-3))
        return chosen(needs[-1], *stock)

    def test_the_nearest_of_a_kit(self):
        # 700 ohm at 9 V: 680 gives 10.3 mA; 620 would be 11.3 mA, over by more than a tenth.
        kit = [resistor(number, ohm) for number, ohm in ((1, 560.0), (2, 620.0), (3, 680.0))]
        assert self.resistors(*kit, resistor(4, 820.0)) == 3
        assert self.resistors(*kit[:2]) is None
        assert self.resistors(*kit[:2], resistor(4, 1000.0), resistor(5, 1100.0)) == 4

    def test_it_must_stand_twice_what_it_dissipates(self):
        # 30 mA through 330 ohm are 0.3 W: not for a quarter watt, nor for a half.
        led = Led(2.1, 30e-3)
        quarter, half, one = (
            resistor(number, 330.0, power=watt) for number, watt in ((1, 0.25), (2, 0.5), (3, 1.0))
        )
        assert self.resistors(quarter, half, one, volt=12.0, led=led) == 3
        assert self.resistors(quarter, half, volt=12.0, led=led) is None

    def test_an_unknown_rating_will_do_last_and_is_told(self):
        unknown = resistor(1, 680.0, power=None)
        assert self.resistors(unknown, resistor(2, 820.0)) == 2
        needs = needs_of(one_shot("ideal"), FIT, Led(2.0, 10e-3))[-1:]
        # 7 V / 680 ohm = 10.29 mA: 72 mW, twice that 144 mW.
        (said,) = pick(needs, FIT, [unknown], 1).cautions
        assert said == (
            "No power rating is written down for the 680R in drawer A1; see that it stands 140 mW."
        )


class TestCounts:
    def test_what_the_fit_uses_is_gone(self):
        shared = resistor(1, 10e3, 3)
        film = capacitor(2, 10e-6, technology="polyester")
        twice = fit_of(one_shot(), series(shared, shared), film)
        assert chosen(PULL_UP, shared, film, fit=twice) == 1
        thrice = fit_of(one_shot(), series(shared, shared, shared), film)
        assert chosen(PULL_UP, shared, film, fit=thrice) is None

    def test_for_all_boards_from_one_holding(self):
        assert chosen(PULL_UP, resistor(1, 10e3, 2), resistor(2, 10e3, 2), boards=3) is None
        two = [resistor(1, 10e3, 2), resistor(2, 22e3, 3)]
        found = pick([PULL_UP], FIT, two, 3)
        assert (found.picks[0].holding.id, found.picks[0].count) == (2, 3)

    def test_the_fit_takes_its_pieces_for_every_board(self):
        shared = resistor(1, 10e3, 5)
        film = capacitor(2, 10e-6, technology="polyester")
        fit = fit_of(one_shot(), shared, film)
        assert chosen(PULL_UP, shared, film, fit=fit, boards=2) == 1
        assert chosen(PULL_UP, shared, film, fit=fit, boards=3) is None

    def test_claimed_pieces_are_not_free(self):
        holding = resistor(1, 10e3, 3)
        assert chosen(PULL_UP, type(holding)(1, holding.part, "A1", Count(3), claimed=3)) is None

    def test_plenty_never_runs_out(self):
        found = pick([PULL_UP] * 5, FIT, [resistor(1, 10e3, None)], 1000)
        assert [each.count for each in found.picks] == [1000] * 5
        assert found.missing == ()

    def test_needs_do_not_take_the_same_piece(self):
        found = pick([PULL_UP, PULL_UP], FIT, [resistor(1, 10e3, 1)], 1)
        assert len(found.picks) == len(found.missing) == 1

    def test_the_one_with_less_choice_goes_first(self):
        wide = Need("wide", Kind.RESISTOR, 1e3, 10e3, 100e3, "why")
        narrow = Need("narrow", Kind.RESISTOR, 9e3, 10e3, 11e3, "why")
        # Both would rather have the 10k, and either could do with the 11k.
        stock = [resistor(1, 10e3, 1), resistor(2, 11e3, 1), resistor(3, 50e3, 1)]
        found = pick([wide, narrow], FIT, stock, 1)
        assert [(each.need.use, each.holding.id) for each in found.picks] == [
            ("wide", 2),
            ("narrow", 1),
        ]

    def test_earlier_needs_make_room(self):
        # Each has two to choose from, so the order is as given; the first two prefer 10k, which
        # is all that the last may have beside the 12k.
        low = Need("low", Kind.RESISTOR, 8e3, 10e3, 10e3, "why")
        mid = Need("mid", Kind.RESISTOR, 10e3, 10e3, 12e3, "why")
        last = Need("last", Kind.RESISTOR, 10e3, 11e3, 12e3, "why")
        stock = [resistor(1, 8.2e3, 1), resistor(2, 10e3, 1), resistor(3, 12e3, 1)]
        found = pick([low, mid, last], FIT, stock, 1)
        assert {each.need.use: each.holding.id for each in found.picks} in (
            {"low": 1, "mid": 2, "last": 3},
            {"low": 1, "mid": 3, "last": 2},
        )


OHMS = (1e3, 2e3, 3e3, 4e3)
WINDOWS = st.tuples(st.sampled_from(OHMS), st.sampled_from(OHMS)).map(sorted)
STOCKS = st.lists(
    st.tuples(st.sampled_from(OHMS), st.sampled_from((0, 1, 2, 3, 5, None))), min_size=1, max_size=4
)


def most_met(needs, stock, taken, boards):
    """Count needs that can be met at once, by trying every way to give them holdings."""
    best = 0
    for way in product([None, *stock], repeat=len(needs)):
        used = Counter({number: count * boards for number, count in taken.items()})
        for need, holding in zip(needs, way, strict=True):
            if holding is None:
                continue
            if not need.least <= holding.part.value <= need.most:
                break
            used[holding.id] += boards
        else:
            if all(each.free is None or used[each.id] <= each.free for each in stock):
                best = max(best, sum(holding is not None for holding in way))
    return best


@given(st.lists(WINDOWS, min_size=1, max_size=4), STOCKS, st.integers(1, 3), st.integers(0, 2))
def test_as_many_needs_are_met_as_can_be_and_no_piece_is_used_twice(
    windows, drawers, boards, fit_uses
):
    needs = [
        Need(f"need {number}", Kind.RESISTOR, low, low, high, "why")
        for number, (low, high) in enumerate(windows)
    ]
    stock = [resistor(number, *drawer) for number, drawer in enumerate(drawers, start=1)]
    first = stock[0]
    taken = {}
    fit = FIT
    if fit_uses and (first.free is None or first.free >= fit_uses * boards):
        taken = {first.id: fit_uses}
        network = series(*[first] * fit_uses) if fit_uses > 1 else first
        fit = fit_of(one_shot(), network, capacitor(99, 1e-6, technology="polyester"))
    found = pick(needs, fit, stock, boards)
    assert len(found.picks) == most_met(needs, stock, taken, boards)
    assert sorted([each.need.use for each in found.picks] + [n.use for n in found.missing]) == [
        need.use for need in needs
    ]
    used = Counter({number: count * boards for number, count in taken.items()})
    for each in found.picks:
        assert each.count == boards
        assert each.need.least <= each.holding.part.value <= each.need.most
        used[each.holding.id] += each.count
    assert all(each.free is None or used[each.id] <= each.free for each in stock)


class TestWhatIsSaid:
    def test_which_end_of_a_polarised_one_is_plus(self):
        (said,) = pick([RESERVOIR], FIT, [electrolytic(1, 47e-6)], 1).cautions
        assert said.startswith("The 47u in drawer E1 is polarised: its plus goes to the supply")
        plain = electrolytic(1, 47e-6, technology="electrolytic-non-polar")
        assert pick([RESERVOIR], FIT, [plain], 1).cautions == ()

    def test_an_unknown_voltage(self):
        (said,) = pick([BYPASS], FIT, [capacitor(1, 1e-7, voltage=None)], 1).cautions
        assert said.endswith("see that it says 9 V or more.")

    def test_a_rough_count_once(self):
        rough = resistor(1, 10e3, Count(30, Sureness.ROUGH))
        (said,) = pick([PULL_UP, PULL_UP], FIT, [rough], 1).cautions
        assert said == "The count of the 10k in drawer A1 is rough; look before you start."

    def test_a_need_brings_its_own_whether_met_or_not(self):
        odd = Need("odd", Kind.RESISTOR, 1.0, 1.0, 1.0, "why", caution="Mind the step.")
        assert pick([odd], FIT, [], 1).cautions == ("Mind the step.",)

    def test_order_is_that_of_the_needs(self):
        stock = [capacitor(1, 1e-7), resistor(2, 10e3), electrolytic(3, 47e-6)]
        needs = [RESERVOIR, PULL_UP, BYPASS]
        assert [each.need for each in pick(needs, FIT, stock, 1).picks] == needs
        assert pick(needs, FIT, [], 1).missing == tuple(needs)
