"""Cold and heat: the worst case against every combination, and who moves most."""

from __future__ import annotations

from itertools import product
from math import inf, log

import pytest

from chooser.circuits.astable import astable
from chooser.circuits.circuit import Variant
from chooser.circuits.diodes import diode_named
from chooser.circuits.leakage import leak_conductance_at
from chooser.circuits.monostable import monostable
from chooser.circuits.steered import steered, with_diode_at
from chooser.circuits.timers import timer_named
from chooser.climate import climates_of, outside_rating_text, widest
from chooser.networks import Group, Join, Leaf
from chooser.parts import Count, Holding, Kind, Part, Tolerance
from chooser.temperature import Warmth, change_of

FOLLOWS = (1.0, 1.0)
SUPPLY = 9.0


def held(number, kind, value, percent, technology, **traits):
    tolerance = Tolerance(percent / 100.0, percent / 100.0)
    part = Part(kind, value, tolerance=tolerance, technology=technology, **traits)
    return Holding(number, part, f"A{number}", Count(9))


FILM_R = held(1, Kind.RESISTOR, 100e3, 1, "metal-film")
CARBON = held(2, Kind.RESISTOR, 22e3, 5, "carbon-film")
ELECTROLYTIC = held(3, Kind.CAPACITOR, 47e-6, 20, "electrolytic", voltage=25.0)
POLYESTER = held(4, Kind.CAPACITOR, 4.7e-6, 10, "polyester", voltage=63.0)
MIXED = {
    "R": Group(Join.SERIES, (Leaf(FILM_R), Leaf(CARBON))),
    "C": Group(Join.PARALLEL, (Leaf(ELECTROLYTIC), Leaf(POLYESTER))),
}


def by_the_formula(r, c, g, *, threshold, current, switch):
    """Worked out anew with plain numbers: the Thevenin form of the charging equation."""
    source = (SUPPLY - r * current) / (1.0 + r * g)
    trip = threshold * SUPPLY
    if source <= trip:
        return inf
    start = SUPPLY * switch / (r + switch)
    return r / (1.0 + r * g) * c * log((source - start) / (source - trip))


def ends(holding, celsius):
    """Give all four corners of a part: tolerance and temperature, either way each."""
    part, change = holding.part, change_of(holding.part, celsius)
    return [
        part.value * (1.0 + tolerance) * (1.0 + moved)
        for tolerance in (-part.tolerance.minus, part.tolerance.plus)
        for moved in (change.least, change.most)
    ]


@pytest.mark.parametrize("name", ["bipolar", "cmos", "ICM7555"])
@pytest.mark.parametrize("celsius", [-20.0, 0.0, 20.0, 50.0])
def test_low_and_high_against_every_combination(name, celsius):
    timer = timer_named(name)
    limit = sum(
        leak_conductance_at(each.part, SUPPLY, celsius).limit for each in (ELECTROLYTIC, POLYESTER)
    )
    drift = timer.temperature_drift_limit * abs(celsius - 20.0)
    error = timer.timing_error_limit + drift
    times = [
        by_the_formula(
            one + two, big + small, g, threshold=timer.threshold, current=current, switch=switch
        )
        * (1.0 + off)
        for one, two, big, small, g, current, switch, off in product(
            ends(FILM_R, celsius),
            ends(CARBON, celsius),
            ends(ELECTROLYTIC, celsius),
            ends(POLYESTER, celsius),
            (0.0, limit),
            (0.0, timer.threshold_current_limit + timer.discharge_leakage_limit),
            (0.0, timer.discharge_resistance_limit),
            (-error, error),
        )
    ]
    circuit = monostable(timer, SUPPLY)
    (climate,) = climates_of(circuit, MIXED, Warmth(celsius, celsius), Variant(), FOLLOWS)
    chief = climate.outlook.chief
    assert chief.low == pytest.approx(min(times), rel=1e-12)
    assert chief.high == pytest.approx(max(times), rel=1e-12)


def test_the_nominal_has_every_part_moved_as_is_typical():
    timer, celsius = timer_named("bipolar"), -20.0
    circuit = monostable(timer, SUPPLY)
    (climate,) = climates_of(circuit, MIXED, Warmth(celsius, celsius), Variant(), FOLLOWS)

    def moved(holding):
        return holding.part.value * (1.0 + change_of(holding.part, celsius).typical)

    leak = sum(
        leak_conductance_at(each.part, SUPPLY, celsius).typical
        for each in (ELECTROLYTIC, POLYESTER)
    )
    expected = by_the_formula(
        moved(FILM_R) + moved(CARBON),
        moved(ELECTROLYTIC) + moved(POLYESTER),
        leak,
        threshold=timer.threshold,
        current=timer.threshold_current_typical + timer.discharge_leakage_typical,
        switch=timer.discharge_resistance_typical,
    )
    assert climate.outlook.chief.nominal == pytest.approx(expected, rel=1e-12)


def test_an_electrolytic_in_the_cold_moves_most():
    circuit = monostable(timer_named("cmos"), SUPPLY)
    cold, _ = climates_of(circuit, MIXED, Warmth(-20.0, 20.0), Variant(), FOLLOWS)
    assert (cold.mover.slot, cold.mover.holding) == ("C", ELECTROLYTIC)
    # From memory: some 20 % less at -20 C, here of the ten elevenths it has in the slot.
    middle = (cold.mover.least + cold.mover.most) / 2.0
    assert middle == pytest.approx(-0.2 * 10.0 / 11.0, rel=0.05)


def test_at_room_temperature_nothing_moves():
    circuit = monostable(timer_named("cmos"), SUPPLY)
    (climate,) = climates_of(circuit, MIXED, Warmth(20.0, 20.0), Variant(), FOLLOWS)
    assert climate.mover is None
    assert climate.by_leakage == 0.0


def test_where_the_parts_keep_still_the_device_moves_most():
    networks = {
        "R": Leaf(held(1, Kind.RESISTOR, 1e5, 1, "metal-film", tempco=1e-7)),
        "C": Leaf(held(2, Kind.CAPACITOR, 1e-6, 1, "c0g", tempco=1e-7)),
    }
    timer = timer_named("bipolar")
    circuit = monostable(timer, SUPPLY)
    (climate,) = climates_of(circuit, networks, Warmth(60.0, 60.0), Variant(), FOLLOWS)
    assert climate.mover.holding is None
    assert climate.mover.most == pytest.approx(40.0 * timer.temperature_drift_limit)


def test_leakage_doubles_every_ten_kelvin():
    # From memory: aluminium leaks twice as much 10 K warmer, so four times at 40 C.
    networks = {"R": Leaf(held(1, Kind.RESISTOR, 1e6, 1, "metal-film")), "C": Leaf(ELECTROLYTIC)}
    timer = timer_named("cmos")
    circuit = monostable(timer, SUPPLY)
    (climate,) = climates_of(circuit, networks, Warmth(40.0, 40.0), Variant(), FOLLOWS)
    state = {
        "threshold": timer.threshold,
        "current": timer.threshold_current_typical + timer.discharge_leakage_typical,
        "switch": timer.discharge_resistance_typical,
    }
    g = leak_conductance_at(ELECTROLYTIC.part, SUPPLY, 20.0).typical
    cool, warm = (by_the_formula(1e6, 47e-6, leak, **state) for leak in (g, 4.0 * g))
    assert climate.by_leakage == pytest.approx(warm / cool - 1.0, rel=1e-9)


def test_the_heat_alone_can_make_it_endless():
    # Field report: 909 k, 47 k, 470 uF at 5 V charges with 1.74 uA at the trip point.
    networks = {
        "RA": Leaf(held(1, Kind.RESISTOR, 909e3, 1, "metal-film")),
        "RB": Leaf(held(2, Kind.RESISTOR, 47e3, 1, "metal-film")),
        "C": Leaf(held(3, Kind.CAPACITOR, 470e-6, 20, "electrolytic", voltage=25.0)),
    }
    circuit = astable(timer_named("cmos"), 5.0)
    cold, warm = climates_of(circuit, networks, Warmth(0.0, 60.0), Variant(), (1.0, 1.0, 1.0))
    assert cold.outlook.chief.nominal < inf
    assert (warm.by_leakage, warm.outlook.chief.nominal) == (inf, inf)
    low, high = widest((cold, warm), "period")
    assert high is None
    assert low == min(cold.outlook.chief.low, warm.outlook.chief.low)


def test_a_dielectric_outside_its_rating_is_named_with_the_temperature():
    # EIA RS-198: Z5U is for +10 to +85 C.
    ceramic = held(7, Kind.CAPACITOR, 1e-6, 20, "z5u", voltage=50.0)
    networks = {"R": Leaf(FILM_R), "C": Leaf(ceramic)}
    circuit = monostable(timer_named("cmos"), SUPPLY)
    climates = climates_of(circuit, networks, Warmth(0.0, 40.0), Variant(), FOLLOWS)
    assert [climate.outside for climate in climates] == [(ceramic,), ()]
    text = outside_rating_text(climates)
    assert "At 0 C 1u in drawer A7" in text
    assert "40 C" not in text
    inside = climates_of(circuit, networks, Warmth(15.0, 40.0), Variant(), FOLLOWS)
    assert outside_rating_text(inside) is None


def test_an_ideal_timer_knows_no_leakage_and_no_drift():
    circuit = monostable(timer_named("ideal"), SUPPLY)
    (climate,) = climates_of(circuit, MIXED, Warmth(60.0, 60.0), Variant(), FOLLOWS)
    assert climate.by_leakage == 0.0
    r = sum(max(ends(each, 60.0)) for each in (FILM_R, CARBON))
    c = sum(max(ends(each, 60.0)) for each in (ELECTROLYTIC, POLYESTER))
    assert climate.outlook.chief.high == pytest.approx(r * c * log(3.0), rel=1e-12)


def test_a_diodes_drop_falls_in_the_heat():
    """From memory: 2 mV a kelvin, so 80 mV 40 K up; the high time by its formula with 0.52 V."""
    networks = {
        "RA": Leaf(held(1, Kind.RESISTOR, 1e5, 1, "metal-film", tempco=1e-9)),
        "RB": Leaf(held(2, Kind.RESISTOR, 1e5, 1, "metal-film", tempco=1e-9)),
        "C": Leaf(held(3, Kind.CAPACITOR, 1e-6, 1, "c0g", tempco=1e-9)),
    }
    circuit = steered(timer_named("ideal"), SUPPLY, diode_named("0.6V"), both=True)
    (warm,) = climates_of(circuit, networks, Warmth(60.0, 60.0), Variant(), (0.5, 0.5, 1.0))

    def times(drop):
        high = 0.1 * log((2.0 / 3.0 - drop / SUPPLY) / (1.0 / 3.0 - drop / SUPPLY))
        return high, 0.1 * log((2.0 / 3.0 - drop / SUPPLY) / (1.0 / 3.0 - drop / SUPPLY))

    assert warm.outlook.of("high").nominal == pytest.approx(times(0.52)[0], rel=1e-6)
    assert warm.outlook.of("low").nominal == pytest.approx(times(0.52)[1], rel=1e-6)
    assert (warm.mover.slot, warm.mover.holding) == ("", None)
    change = sum(times(0.52)) / sum(times(0.6)) - 1.0
    assert warm.mover.least == pytest.approx(change, rel=1e-4)
    assert with_diode_at(circuit, 20.0).typical == circuit.typical
    plain = astable(timer_named("ideal"), SUPPLY)
    assert with_diode_at(plain, 60.0) is plain
