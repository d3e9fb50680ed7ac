"""Where an interval may never end, the same stock is asked for a circuit that does."""

from __future__ import annotations

import pytest
from stocks import asked, capacitor, resistor

from chooser.circuits.counter import counter
from chooser.circuits.counters import counter_named
from chooser.search.find import find_fits
from chooser.search.request import Request, Target
from chooser.search.terms import Rank

LEAKY = capacitor(21, 470e-6, 5, technology="electrolytic", voltage=16.0)
FILM = capacitor(22, 1e-6, 5, technology="polyester", voltage=63.0)
OHMS = [resistor(number, ohm, 5) for number, ohm in enumerate((1e4, 4.7e4, 1e5, 4.7e5, 1e6), 1)]


def ways(holdings, seconds, timer="cmos", **options):
    return find_fits(holdings, asked(seconds, timer, **options)).ways_out


def test_a_long_interval_is_divided_down_from_the_same_stock():
    (said,) = ways([*OHMS, LEAKY, FILM], 300.0)
    assert "oscillator and counter (HEF4060B" in said
    assert said.endswith("see `chooser fit counter 5min`.")
    # What is promised is what the counter's own command answers first.
    circuit = counter(counter_named("HEF4060B"), 9.0)
    best = find_fits(
        [*OHMS, LEAKY, FILM], Request(circuit, (Target("interval", 300.0, 300.0),))
    ).fits[0]
    assert best.in_band
    assert best.variant.name in said


def test_a_fit_that_surely_ends_is_named():
    """A measured leakage is no guess: 0.1 uA at 16 V is 160 Mohm, far beyond R."""
    good = capacitor(23, 470e-6, 5, technology="electrolytic", voltage=16.0, leakage=1e-7)
    few = {"within": 0.05, "most_resistors": 1, "most_capacitors": 1}
    answer = find_fits([*OHMS, LEAKY, good], asked(255.0, "cmos", rank=Rank.ERROR, **few))
    codes = [{str(caution.code) for caution in fit.cautions} for fit in answer.fits]
    assert "may-never-end" in codes[0]
    assert "may-never-end" not in codes[1]
    assert answer.fits[1].in_band
    assert answer.ways_out == ("Fit 2 surely ends: its capacitor leaks less.",)


@pytest.mark.parametrize(
    ("holdings", "seconds", "timer"),
    [
        ([*OHMS, FILM], 0.1, "cmos"),  # short
        ([*OHMS, FILM], 1.1, "cmos"),  # sound
        ([*OHMS, LEAKY], 300.0, "cmos"),  # no capacitor that a counter's oscillator can use
        ([*OHMS, LEAKY, FILM], 300.0, "ideal"),  # the textbook knows no leaks
    ],
)
def test_where_there_is_nothing_to_say(holdings, seconds, timer):
    assert ways(holdings, seconds, timer) == ()


def test_no_counter_is_offered_at_a_supply_it_does_not_work_at():
    assert not any("counter" in said for said in ways([*OHMS, LEAKY, FILM], 300.0, supply=16.0))
