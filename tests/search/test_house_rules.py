"""Each house rule refuses, says so, and can be lifted."""

from __future__ import annotations

import math

import pytest
from stocks import asked, capacitor, farads_of, ohms_of, plain, resistor

from chooser.circuits.circuit import Bounds
from chooser.circuits.leakage import leak_conductance
from chooser.errors import BadRequestError
from chooser.search.find import find_fits
from chooser.search.house_rules import LEAK_RATIO, resistor_bounds
from chooser.search.terms import REASONS, USUAL_PARTS, Rank, Rule

RANKS = list(Rank)


def answer(holdings, target, *, timer="bipolar", lifted=(), **options):
    return find_fits(holdings, asked(target, timer, lifted=frozenset(lifted), **options))


def refused(got, rule):
    return [refusal for refusal in got.refusals if refusal.rule is rule]


def capacitors_of(got):
    return {number for fit in got.fits for number in farads_of(fit)}


def resistors_of(got):
    return {number for fit in got.fits for number in ohms_of(fit)}


def test_every_rule_has_its_reason():
    assert set(REASONS) == set(Rule)
    assert all(REASONS.values())


# Whole holdings ----------------------------------------------------------------------------------


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize(
    ("rule", "bad"),
    [
        (Rule.CERAMIC, {"technology": "x7r"}),
        (Rule.CERAMIC, {"technology": "y5v"}),
        (Rule.CERAMIC, {"technology": "ceramic"}),
        (Rule.VOLTAGE, {"voltage": 6.3}),
    ],
)
def test_holdings_kept_out_and_let_in(rule, bad, rank):
    holdings = [
        resistor(1, 1e4, 2),
        capacitor(11, 1e-6, 2, **bad),
        capacitor(12, 1e-7, 2, voltage=63.0),
    ]
    strict = answer(holdings, 0.011, rank=rank)
    assert capacitors_of(strict) == {12}
    (refusal,) = refused(strict, rule)
    assert refusal.holdings == (11,)
    assert REASONS[rule] in refusal.why
    assert refusal.why.endswith(".")
    lifted = answer(holdings, 0.011, rank=rank, lifted=[rule])
    assert 11 in capacitors_of(lifted)
    assert not refused(lifted, rule)
    assert lifted.fits[0].in_band


@pytest.mark.parametrize("technology", ["c0g", "polyester", "electrolytic-non-polar", None])
def test_what_is_no_class_2_ceramic_passes(technology):
    holdings = [resistor(1, 1e4), capacitor(11, 1e-7, technology=technology)]
    assert answer(holdings, 0.0011).fits


@pytest.mark.parametrize(("voltage", "passes"), [(8.9, False), (9.0, True), (None, True)])
def test_the_rating_must_reach_the_supply(voltage, passes):
    """An unknown rating is not refused: a caution says so instead."""
    holdings = [resistor(1, 1e4), capacitor(11, 1e-6, voltage=voltage)]
    assert bool(answer(holdings, 0.011, timer="ideal").fits) is passes


def test_every_kept_out_holding_is_named_once():
    holdings = [
        resistor(1, 1e4),
        capacitor(11, 1e-6, technology="x7r", voltage=5.0),
        capacitor(12, 1e-6, technology="x5r", voltage=50.0),
        capacitor(13, 1e-6, voltage=5.0),
    ]
    got = answer(holdings, 0.011)
    assert not got.fits
    assert sorted(number for refusal in got.refusals for number in refusal.holdings) == [11, 12, 13]


# The timing resistor -----------------------------------------------------------------------------


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("timer", ["bipolar", "cmos", "NE555", "LMC555", "ICM7555"])
def test_the_resistor_stays_between_the_timers_limits(timer, rank):
    """The limits themselves are held against data sheets in the tests of the monostable."""
    bounds = asked(1, timer).circuit.bounds
    ohms = {1: bounds.least * 0.98, 2: bounds.least, 3: bounds.most, 4: bounds.most * 1.02}
    holdings = [resistor(number, ohm) for number, ohm in ohms.items()]
    holdings += [capacitor(11, 1e-9, technology="polystyrene")]
    options = {"timer": timer, "rank": rank, "most_resistors": 1, "most_capacitors": 1}
    strict = answer(holdings, 1e-3, **options)
    assert resistors_of(strict) == {2, 3}
    (refusal,) = refused(strict, Rule.RESISTOR_LIMITS)
    assert refusal.holdings == ()
    assert timer in refusal.why
    lifted = answer(holdings, 1e-3, lifted=[Rule.RESISTOR_LIMITS], **options)
    assert resistors_of(lifted) == {1, 2, 3, 4}
    assert not refused(lifted, Rule.RESISTOR_LIMITS)


def test_networks_are_held_to_the_limits_not_their_parts():
    holdings = [resistor(1, 600.0, 2), resistor(2, 1e7, 3), capacitor(11, 1e-9)]
    ohms = {fit.slot("R").value for fit in answer(holdings, 1e-6, rank=Rank.COUNT, top=99).fits}
    bounds = asked(1, "bipolar").circuit.bounds
    # 600 + 600 passes; 10M || 10M || 10M is still beyond the 857k of 9 V.
    assert 1200.0 in ohms
    assert all(bounds.least <= ohm <= bounds.most for ohm in ohms)


@pytest.mark.parametrize("rank", RANKS)
def test_a_leaky_capacitor_bounds_the_resistance(rank):
    """By hand: (1/3) V / R = 3 x (2/3) V G, so R = 1 / (6 G)."""
    holdings = [capacitor(11, 1e-3, technology="electrolytic", voltage=16.0)]
    leak = leak_conductance(holdings[0].part, 9.0).typical
    bound = 1 / (6 * leak)
    assert LEAK_RATIO == 3
    circuit = asked(1, "bipolar").circuit
    assert bound == pytest.approx(float(circuit.law.leak_bound(leak, LEAK_RATIO)))
    assert bound < circuit.bounds.most
    holdings += [resistor(1, bound * 0.99), resistor(2, bound * 1.01)]
    options = {"rank": rank, "most_resistors": 1, "most_capacitors": 1}
    assert resistors_of(answer(holdings, 600.0, **options)) == {1}
    lifted = answer(holdings, 600.0, lifted=[Rule.RESISTOR_LIMITS], **options)
    assert resistors_of(lifted) == {1, 2}


@pytest.mark.parametrize("rank", RANKS)
def test_an_interval_that_never_ends_is_refused_whatever_is_lifted(rank):
    holdings = [capacitor(11, 1e-4, technology="electrolytic", voltage=16.0)]
    law = asked(1, "bipolar").circuit.law
    leak = leak_conductance(holdings[0].part, 9.0).typical
    end = float(law.endless_from(leak))
    holdings += [resistor(1, end * 0.999), resistor(2, end), resistor(3, end * 1.001)]
    assert math.isinf(float(law.interval(end * 1.001, 1e-4, leak)))
    got = answer(
        holdings, 1e3, rank=rank, lifted=list(Rule), most_resistors=1, most_capacitors=1, top=99
    )
    assert resistors_of(got) == {1}
    assert all(math.isfinite(fit.outlook.chief.nominal) for fit in got.fits)


def test_the_ideal_timer_has_no_limits():
    assert resistor_bounds(asked(1.0)) == Bounds(0.0, math.inf)
    holdings = [resistor(1, 1.0), resistor(2, 1e9), capacitor(11, 1e-6)]
    got = answer(holdings, 1.0, timer="ideal", most_resistors=1)
    assert resistors_of(got) == {1, 2}
    assert not got.refusals


# Networks of capacitors --------------------------------------------------------------------------


def has_series(network):
    return isinstance(network, tuple) and (
        network[0] == "+" or any(has_series(child) for child in network[1])
    )


def series_of(got, numbers):
    """Whether one of some holdings stands in series with anything, in any fit."""

    def inside(network, *, chained=False):
        if not isinstance(network, tuple):
            return chained and network in numbers
        return any(inside(child, chained=chained or network[0] == "+") for child in network[1])

    return any(inside(plain(fit.slot("C").network)) for fit in got.fits)


POLAR = [
    resistor(1, 1e4),
    capacitor(11, 1e-5, 2, technology="electrolytic", voltage=25.0),
    capacitor(12, 4.7e-6, technology="tantalum", voltage=25.0),
    capacitor(13, 2.2e-6, 2),
]


@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("timer", ["ideal", "bipolar"])
def test_polarised_capacitors_are_never_in_series(timer, rank):
    options = {"timer": timer, "rank": rank, "most_capacitors": 3, "top": 500}
    strict = answer(POLAR, 0.1, **options)
    assert not series_of(strict, {11, 12})
    assert series_of(strict, {13})
    assert {11, 12} <= capacitors_of(strict)
    lifted = answer(POLAR, 0.1, lifted=[Rule.POLARISED_SERIES], **options)
    assert series_of(lifted, {11})
    assert series_of(lifted, {12})


def test_polarised_capacitors_may_stand_side_by_side():
    got = answer(POLAR, 0.1, rank=Rank.COUNT, most_capacitors=2, top=500, most_resistors=1)
    assert ("||", (11, 11)) in {plain(fit.slot("C").network) for fit in got.fits}


@pytest.mark.parametrize("rank", RANKS)
def test_strays_rule_out_small_timing_capacitances(rank):
    """A network of small ones passes when it is 1 nF or more, and a small one of large ones not."""
    holdings = [resistor(1, 1e5), capacitor(11, 4.7e-10, 3), capacitor(12, 1e-9, 2)]
    options = {"timer": "ideal", "rank": rank, "most_capacitors": 3, "top": 500}
    strict = answer(holdings, 1e-4, **options)
    assert min(fit.slot("C").value for fit in strict.fits) == 1e-9
    assert ("||", (11, 11, 11)) in {plain(fit.slot("C").network) for fit in strict.fits}
    lifted = answer(holdings, 1e-4, lifted=[Rule.STRAYS], **options)
    assert 4.7e-10 in {fit.slot("C").value for fit in lifted.fits}


@pytest.mark.parametrize(
    ("rule", "holdings"),
    [
        (Rule.STRAYS, [resistor(1, 1e5), capacitor(11, 1e-10), capacitor(12, 1e-6)]),
        (Rule.POLARISED_SERIES, POLAR),
    ],
)
def test_refused_networks_are_said_too(rule, holdings):
    """A house rule explains every refusal, of networks as well as of holdings."""
    assert refused(answer(holdings, 0.1), rule)
    assert not refused(answer(holdings, 0.1, lifted=[rule]), rule)


# Number of parts ---------------------------------------------------------------------------------


@pytest.mark.parametrize("slot", ["most_resistors", "most_capacitors"])
def test_more_than_four_parts_only_on_request(slot):
    holdings = [resistor(1, 1e3, 1), capacitor(11, 1e-6, 1)]
    assert USUAL_PARTS == 4
    assert answer(holdings, 0.01, **{slot: 4}).fits
    with pytest.raises(BadRequestError, match="5 parts") as refusal:
        answer(holdings, 0.01, **{slot: 5})
    assert Rule.MANY_PARTS in str(refusal.value)
    assert answer(holdings, 0.01, lifted=[Rule.MANY_PARTS], **{slot: 5}).fits


def test_five_resistors_are_searched_when_asked_for():
    holdings = [resistor(1, 1e3, 5), capacitor(11, 1e-6)]
    got = answer(
        holdings, 5e-3 * math.log(3), timer="ideal", rank=Rank.ERROR,
        lifted=[Rule.MANY_PARTS], most_resistors=5, top=1,
    )  # fmt: skip
    assert ohms_of(got.fits[0]) == [1] * 5
    assert got.fits[0].error == pytest.approx(0, abs=1e-12)
