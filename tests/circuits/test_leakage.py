"""Leak conductances against published leakage rows, and their order against technology."""

from math import inf, log

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.circuits.charging import Phase
from chooser.circuits.leakage import (
    CURRENT_LIMITS,
    INSULATION,
    SETTLED,
    leak_conductance,
    leak_conductance_at,
)
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
    time = float(Phase(9.0, 2.0 / 3.0).interval(time_constant / 100e-6, 100e-6, leak))
    assert time / (time_constant * log(3.0)) - 1.0 == pytest.approx(stretch, rel=0.02)


def test_at_its_limit_an_electrolytic_never_ends_beyond_fifty_seconds_of_rc():
    # Worked out: the leak resistance is then twice R.
    leak = leak_conductance(capacitor(100e-6, "electrolytic", voltage=16.0)).limit
    phase = Phase(9.0, 2.0 / 3.0)
    assert phase.interval(50.01 / 100e-6, 100e-6, leak) == inf
    assert phase.interval(49.99 / 100e-6, 100e-6, leak) < inf


def test_polyester_costs_little_at_a_hundred_seconds():
    # Worked out: +0.82 % at R C = 100 s with 10 000 s of insulation.
    leak = leak_conductance(capacitor(10e-6, "polyester")).typical
    time = float(Phase(9.0, 2.0 / 3.0).interval(10e6, 10e-6, leak))
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
    assert (technology in CURRENT_LIMITS) != (technology in INSULATION)
    for farad in (1e-9, 1e-6, 1e-3):
        for volt in (None, 6.3, 63.0):
            leak = leak_conductance(capacitor(farad, technology, voltage=volt))
            assert 0.0 < leak.typical < leak.limit


@pytest.mark.parametrize(
    ("technology", "celsius", "seconds"),
    [
        # A comparison table of film, ceramic and tantalum capacitors: R x C at 25 C and 85 C.
        ("polyester", 25.0, 10_000.0),
        ("polyester", 85.0, 1_000.0),
        ("polypropylene", 85.0, 10_000.0),
        ("x7r", 85.0, 500.0),
        # Worked out: half way in temperature is half way in the logarithm, sqrt(10) apart.
        ("polyester", 55.0, 3_162.28),
        ("x7r", 55.0, 707.107),
        # Worked out: 30 C beyond 85 C is another half decade.
        ("polyester", 115.0, 316.228),
        # No gain is published for the cold.
        ("polyester", -20.0, 10_000.0),
    ],
)
def test_insulation_falls_evenly_in_its_logarithm(technology, celsius, seconds):
    leak = leak_conductance_at(capacitor(1e-6, technology), None, celsius)
    assert 1e-6 / leak.typical == pytest.approx(seconds, rel=1e-5)


@pytest.mark.parametrize("celsius", [-20.0, 25.0, 60.0, 85.0])
def test_the_limit_of_insulation_is_the_hot_column_up_to_there(celsius):
    leak = leak_conductance_at(capacitor(1e-6, "polyester"), 9.0, celsius)
    assert leak.limit == pytest.approx(1e-6 / 1_000.0)


def test_beyond_the_hot_column_the_limit_goes_on_as_the_typical_figure_does():
    leak = leak_conductance_at(capacitor(1e-6, "polyester"), 9.0, 125.0)
    assert leak.limit == leak.typical > 1e-6 / 1_000.0


@pytest.mark.parametrize(
    ("technology", "celsius", "factor"),
    [
        # From memory: the leakage of aluminium electrolytics doubles for each 10 C.
        ("electrolytic", 40.0, 4.0),
        ("electrolytic-low-leakage", 30.0, 2.0),
        ("electrolytic-non-polar", 0.0, 0.25),
        # The comparison table: tantalum 100 s at 25 C and 10 s at 85 C, ten times in 60 K.
        ("tantalum", 80.0, 10.0),
        (None, 40.0, 4.0),
    ],
)
def test_both_figures_of_an_electrolytic_grow_alike(technology, celsius, factor):
    part = capacitor(100e-6, technology, voltage=16.0)
    cool, warm = leak_conductance(part), leak_conductance_at(part, None, celsius)
    assert warm.typical / cool.typical == pytest.approx(factor)
    assert warm.limit / cool.limit == pytest.approx(factor)


@pytest.mark.parametrize(
    ("technology", "factor"), [("electrolytic", 4.0), ("polyester", 10.0**0.25)]
)
def test_a_leakage_figure_of_its_own_grows_as_its_technology_does(technology, factor):
    part = capacitor(100e-6, technology, voltage=25.0, leakage=1e-6)
    leak = leak_conductance_at(part, None, 40.0)
    assert leak.typical == leak.limit == pytest.approx(1e-6 / 25.0 * factor)
    bare = capacitor(100e-6, technology, leakage=1e-6)
    assert leak_conductance_at(bare, 10.0, 40.0).limit == pytest.approx(1e-6 / 10.0 * factor)


@pytest.mark.parametrize("technology", [*CAPACITORS, None])
def test_at_the_temperature_of_the_specification_nothing_changes(technology):
    part = capacitor(1e-6, technology, voltage=16.0)
    assert leak_conductance_at(part, 9.0, 20.0) == leak_conductance(part, 9.0)
    if technology in INSULATION:
        assert leak_conductance_at(part, 9.0, 25.0) == leak_conductance(part, 9.0)


@pytest.mark.parametrize("technology", CAPACITORS)
@given(
    temperatures=st.tuples(st.floats(-55.0, 125.0), st.floats(-55.0, 125.0)),
    own=st.none() | st.floats(0.0, 1e-3),
)
def test_heat_never_makes_a_capacitor_tighter(technology, temperatures, own):
    part = capacitor(1e-6, technology, voltage=16.0, leakage=own)
    cold, warm = (leak_conductance_at(part, 9.0, celsius) for celsius in sorted(temperatures))
    assert cold.typical <= warm.typical
    assert cold.limit <= warm.limit
    assert 0.0 <= cold.typical <= cold.limit
    assert warm.typical <= warm.limit
