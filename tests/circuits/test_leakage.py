"""Leak conductances against published leakage rows, and their order against technology."""

from math import inf, log

import pytest

from chooser.circuits.leakage import SETTLED, leak_conductance
from chooser.circuits.monostable import Drive, interval
from chooser.parts import Kind, Part
from chooser.technologies import TECHNOLOGIES

CAPACITORS = [found.name for found in TECHNOLOGIES if Kind.CAPACITOR in found.kinds]


def capacitor(farad, technology=None, **traits):
    return Part(Kind.CAPACITOR, farad, technology=technology, **traits)


@pytest.mark.parametrize(
    ("technology", "farad", "volt", "ampere"),
    [
        # Rows of published leakage tables: 0.01 C V at the rated voltage.
        ("electrolytic", 47e-6, 40.0, 18.8e-6),
        ("electrolytic", 2200e-6, 35.0, 770e-6),
        ("tantalum", 33e-6, 10.0, 3.3e-6),
        # A standard aluminium series: 3 uA where 0.01 C V is less.
        ("electrolytic", 1e-6, 50.0, 3e-6),
        # A low-leakage series: 0.002 C V or 0.4 uA.
        ("electrolytic-low-leakage", 100e-6, 25.0, 5e-6),
        ("electrolytic-low-leakage", 1e-6, 16.0, 0.4e-6),
        # A non-polar series: 0.03 C V + 3 uA.
        ("electrolytic-non-polar", 10e-6, 25.0, 10.5e-6),
        # From memory: a floor of 0.5 uA is common for tantalums.
        ("tantalum", 1e-6, 16.0, 0.5e-6),
    ],
)
def test_limit_currents_at_the_rated_voltage(technology, farad, volt, ampere):
    leak = leak_conductance(capacitor(farad, technology, voltage=volt))
    assert leak.limit * volt == pytest.approx(ampere, rel=1e-12)
    assert leak.typical == pytest.approx(leak.limit / SETTLED)


@pytest.mark.parametrize(
    ("technology", "cool", "hot"),
    [
        # A comparison table of film, ceramic and tantalum capacitors: R x C at 25 C and 85 C.
        ("polyester", 10_000.0, 1_000.0),
        ("polypropylene", 100_000.0, 10_000.0),
        ("pen", 10_000.0, 1_000.0),
        ("pps", 10_000.0, 1_000.0),
        ("c0g", 10_000.0, 1_000.0),
        ("x7r", 1_000.0, 500.0),
        # Technical data of leaded and chip ceramics: 500 s, older and smaller parts 100 s.
        ("ceramic", 500.0, 100.0),
    ],
)
def test_insulation_of_dielectrics(technology, cool, hot):
    leak = leak_conductance(capacitor(1e-6, technology, voltage=63.0))
    assert 1e-6 / leak.typical == pytest.approx(cool)
    assert 1e-6 / leak.limit == pytest.approx(hot)


@pytest.mark.parametrize(
    ("technology", "seconds"), [("electrolytic", 100.0), ("electrolytic-low-leakage", 500.0)]
)
def test_without_a_rating_the_limit_is_a_time(technology, seconds):
    # Worked out: 0.01 C V is C / 100 s whatever the rating, 0.002 C V is C / 500 s.
    leak = leak_conductance(capacitor(220e-6, technology))
    assert 220e-6 / leak.limit == pytest.approx(seconds)
    rated = leak_conductance(capacitor(220e-6, technology, voltage=16.0))
    assert rated.limit == pytest.approx(leak.limit)


@pytest.mark.parametrize(
    ("time_constant", "stretch"),
    [(1.0, 0.0083), (5.0, 0.044), (10.0, 0.094), (20.0, 0.22), (30.0, 0.41), (45.0, 1.14)],
)
def test_what_the_limit_of_an_electrolytic_costs(time_constant, stretch):
    # Worked out: at 0.01 C V the stretch depends on R C alone.
    leak = leak_conductance(capacitor(100e-6, "electrolytic", voltage=16.0)).limit
    time = float(interval(time_constant / 100e-6, 100e-6, leak, Drive(9.0, 2.0 / 3.0)))
    assert time / (time_constant * log(3.0)) - 1.0 == pytest.approx(stretch, rel=0.02)


def test_at_its_limit_an_electrolytic_never_ends_beyond_fifty_seconds_of_rc():
    # Worked out: the leak resistance is then twice R.
    leak = leak_conductance(capacitor(100e-6, "electrolytic", voltage=16.0)).limit
    drive = Drive(9.0, 2.0 / 3.0)
    assert interval(50.01 / 100e-6, 100e-6, leak, drive) == inf
    assert interval(49.99 / 100e-6, 100e-6, leak, drive) < inf


def test_polyester_costs_little_at_a_hundred_seconds():
    # Worked out: +0.82 % at R C = 100 s with 10 000 s of insulation.
    leak = leak_conductance(capacitor(10e-6, "polyester")).typical
    time = float(interval(10e6, 10e-6, leak, Drive(9.0, 2.0 / 3.0)))
    assert time / (100.0 * log(3.0)) - 1.0 == pytest.approx(0.0082, rel=0.02)


def test_a_leakage_figure_of_its_own_counts_at_the_rated_voltage():
    own = capacitor(100e-6, "electrolytic", voltage=25.0, leakage=1e-6)
    assert leak_conductance(own).typical == leak_conductance(own).limit == 1e-6 / 25.0
    tight = capacitor(100e-6, "electrolytic", voltage=25.0, leakage=0.0)
    assert leak_conductance(tight).limit == 0.0


def test_a_leakage_figure_without_a_rating():
    own = capacitor(100e-6, "electrolytic", leakage=1e-6)
    assert leak_conductance(own, supply=10.0).limit == 1e-6 / 10.0
    assert leak_conductance(own) == leak_conductance(capacitor(100e-6, "electrolytic"))


def test_an_unknown_technology_is_taken_for_the_leakier_kind():
    assert leak_conductance(capacitor(1e-6, voltage=16.0)) == leak_conductance(
        capacitor(1e-6, "electrolytic", voltage=16.0)
    )
    assert leak_conductance(capacitor(0.47e-6)) == leak_conductance(capacitor(0.47e-6, "ceramic"))


def test_the_measured_capacitance_counts():
    part = capacitor(1e-6, "polyester", measured=1.1e-6)
    assert leak_conductance(part).typical == pytest.approx(1.1e-6 / 10e3)


@pytest.mark.parametrize("technology", CAPACITORS)
def test_every_technology_has_its_own_figures_in_order(technology):
    from chooser.circuits.leakage import CURRENT_LIMITS, INSULATION

    assert (technology in CURRENT_LIMITS) != (technology in INSULATION)
    for farad in (1e-9, 1e-6, 1e-3):
        for volt in (None, 6.3, 63.0):
            leak = leak_conductance(capacitor(farad, technology, voltage=volt))
            assert 0.0 < leak.typical < leak.limit
