"""What temperature does to parts, against published ranges of tempco and dielectric codes."""

from __future__ import annotations

from math import nan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import BadRequestError
from chooser.parts import Kind, Part
from chooser.technologies import LARGE_FARAD, TECHNOLOGIES
from chooser.temperature import (
    BEHAVIOURS,
    COLDEST,
    HOTTEST,
    LARGEST_LOSS,
    REFERENCE_CELSIUS,
    ROOM_CELSIUS,
    Change,
    Warmth,
    change_of,
    leak_factor,
    outside_rating,
)

_R, _C = Kind.RESISTOR, Kind.CAPACITOR
_NOTHING = Change(0.0, 0.0, 0.0)

EVERY = [Part(kind, 1e-6, technology=each.name) for each in TECHNOLOGIES for kind in each.kinds]
EVERY += [Part(kind, 1e-9) for kind in Kind] + [Part(_C, LARGE_FARAD)]
NAMES = [f"{part.kind.value}-{part.technology}" for part in EVERY]


def part_of(technology, kind=_C, **traits):
    return Part(kind, 1e-6, technology=technology, **traits)


@pytest.mark.parametrize(
    ("kind", "technology", "celsius", "least", "most"),
    [
        # A catalogue of leaded resistors: metal film of the standard grade, 100 ppm/K.
        (_R, "metal-film", 70.0, -0.005, 0.005),
        (_R, "metal-film", -30.0, -0.005, 0.005),
        # Data sheets of three trimmer series: +-100 ppm/K.
        (Kind.TRIMMER, "cermet", 120.0, -0.01, 0.01),
        # A ceramic maker's table of EIA RS-198 codes.
        (_C, "c0g", 120.0, -0.003, 0.003),
        (_C, "x7r", -55.0, -0.15, 0.15),
        (_C, "x7r", 125.0, -0.15, 0.15),
        (_C, "x5r", 85.0, -0.15, 0.15),
        (_C, "y5v", -30.0, -0.82, 0.22),
        (_C, "z5u", 10.0, -0.56, 0.22),
        (_C, "z5u", 85.0, -0.56, 0.22),
        # A table comparing dielectrics: PEN +-5 %, PPS +-1.5 %, tantalum +-10 % over the range.
        (_C, "pen", 125.0, -0.05, 0.05),
        (_C, "pen", -55.0, -0.05, 0.05),
        (_C, "pps", -55.0, -0.015, 0.015),
        (_C, "tantalum", 85.0, -0.1, 0.1),
        # From memory.
        (_R, "carbon-film", 40.0, -0.02, -0.003),
        (_R, "carbon-film", 0.0, 0.003, 0.02),
        (_R, "carbon-composition", 70.0, -0.06, 0.06),
        (_R, "thin-film", 120.0, -0.0025, 0.0025),
        (Kind.POT, "carbon", 40.0, -0.02, -0.006),
        (_C, "polyester", 70.0, 0.02, 0.03),
        (_C, "polypropylene", 70.0, -0.0125, -0.01),
        (_C, "polystyrene", 0.0, 0.002, 0.003),
        (_C, "mica", 70.0, 0.0, 0.0035),
        (_C, "electrolytic", -40.0, -0.4, -0.2),
    ],
)
def test_what_a_technology_is_published_to_do(kind, technology, celsius, least, most):
    change = change_of(part_of(technology, kind), celsius)
    assert (change.least, change.most) == (pytest.approx(least), pytest.approx(most))


@pytest.mark.parametrize(
    ("technology", "within"),
    # The table comparing dielectrics: change over the range; the ranges from memory.
    [("polyester", 0.05), ("polypropylene", 0.025), ("c0g", 0.0032)],
)
def test_tempcos_stay_inside_the_published_change_over_the_range(technology, within):
    for celsius in (BEHAVIOURS[technology].coldest, BEHAVIOURS[technology].hottest):
        change = change_of(part_of(technology), celsius)
        assert max(abs(change.least), abs(change.most)) <= within


@pytest.mark.parametrize(
    # From memory: about -20 % at -20 C and +5 % at +85 C.
    ("celsius", "typical"),
    [(-20.0, -0.2), (0.0, -0.1), (20.0, 0.0), (85.0, 0.05)],
)
@pytest.mark.parametrize(
    "technology", ["electrolytic", "electrolytic-low-leakage", "electrolytic-non-polar"]
)
def test_an_electrolytic_loses_in_the_cold_and_gains_little_in_the_heat(
    technology, celsius, typical
):
    change = change_of(part_of(technology), celsius)
    assert change.typical == pytest.approx(typical)
    assert change.least <= change.typical <= change.most
    assert not outside_rating(part_of(technology), celsius)


def test_typical_is_the_middle_of_a_tempco_and_nothing_for_mere_limits():
    # Worked out from the ranges above: 500 ppm/K and -225 ppm/K, 50 K away.
    assert change_of(part_of("polyester"), 70.0).typical == pytest.approx(0.025)
    assert change_of(part_of("polypropylene"), 70.0).typical == pytest.approx(-0.01125)
    for technology in ("x7r", "y5v", "ceramic", "tantalum"):
        assert change_of(part_of(technology), 70.0).typical == 0.0


def test_class_2_may_be_anywhere_inside_its_limits_once_it_leaves_room_temperature():
    part = part_of("x7r")
    for celsius in (REFERENCE_CELSIUS, 22.0, ROOM_CELSIUS):
        assert change_of(part, celsius) == _NOTHING
    for celsius in (19.9, 25.1, 40.0, 0.0):
        assert change_of(part, celsius) == Change(-0.15, 0.0, 0.15)


def test_a_tempco_of_its_own_goes_before_the_technology_and_counts_both_ways():
    for tempco in (50e-6, -50e-6):
        for technology in ("metal-film", "carbon-film", None):
            part = part_of(technology, _R, tempco=tempco)
            assert change_of(part, 120.0) == Change(-0.005, 0.0, 0.005)
    assert change_of(part_of("x7r", tempco=0.0), 120.0) == _NOTHING
    assert outside_rating(part_of("x5r", tempco=1e-4), 120.0)


@given(st.floats(-0.01, 0.01), st.floats(COLDEST, HOTTEST))
def test_no_tempco_turns_a_value_round(tempco, celsius):
    # 10 000 ppm/K is the most that is read from a sheet.
    change = change_of(part_of("metal-film", _R, tempco=tempco), celsius)
    assert -LARGEST_LOSS <= change.least <= change.typical <= change.most


@pytest.mark.parametrize("celsius", [-55.0, -10.0, 0.0, 50.0, 85.0, 125.0])
@pytest.mark.parametrize(
    ("unknown", "might_be"),
    [
        (Part(_R, 1e3), ("metal-film", "carbon-film")),
        (Part(Kind.POT, 1e3), ("cermet", "carbon")),
        (Part(Kind.TRIMMER, 1e3), ("cermet", "carbon")),
        (part_of("ceramic"), ("x7r", "x5r", "y5v", "z5u", "c0g")),
        (Part(_C, 1e-9), ("x7r", "y5v", "z5u", "c0g")),
        (Part(_C, 1e-5), ("electrolytic", "electrolytic-low-leakage")),
    ],
)
def test_an_unknown_technology_is_no_better_than_the_usual_ones(unknown, might_be, celsius):
    change = change_of(unknown, celsius)
    for technology in might_be:
        known = change_of(part_of(technology, unknown.kind), celsius)
        assert change.least <= known.least
        assert change.most >= known.most


@pytest.mark.parametrize(
    ("technology", "inside", "outside"),
    [
        # A ceramic maker's table of EIA RS-198 codes.
        ("x7r", (-55.0, 125.0), ()),
        ("x5r", (-55.0, 85.0), (86.0, 125.0)),
        ("y5v", (-30.0, 85.0), (-31.0, 86.0)),
        ("z5u", (10.0, 85.0), (9.0, 86.0)),
        ("ceramic", (10.0, 85.0), (9.0, 86.0)),
        # From memory.
        ("electrolytic", (-40.0, 85.0), (-41.0, 86.0)),
        ("polystyrene", (-40.0, 70.0), (75.0,)),
    ],
)
def test_the_rated_range_has_both_its_ends(technology, inside, outside):
    part = part_of(technology)
    assert not any(outside_rating(part, celsius) for celsius in inside)
    assert all(outside_rating(part, celsius) for celsius in outside)


def test_beyond_the_rated_range_the_limits_still_hold_at_the_least():
    assert change_of(part_of("z5u"), -55.0) == change_of(part_of("z5u"), 10.0)
    assert change_of(part_of("electrolytic"), -55.0).least < -0.4


def test_every_technology_has_a_behaviour_and_no_other_has():
    assert set(BEHAVIOURS) == {technology.name for technology in TECHNOLOGIES}


@pytest.mark.parametrize("part", EVERY, ids=NAMES)
def test_nothing_changes_at_the_reference(part):
    assert change_of(part, REFERENCE_CELSIUS) == _NOTHING
    assert not outside_rating(part, REFERENCE_CELSIUS)


@pytest.mark.parametrize("part", EVERY, ids=NAMES)
@given(data=st.data())
def test_limits_are_in_order_and_widen_away_from_the_reference(part, data):
    end = data.draw(st.sampled_from((COLDEST, HOTTEST)))
    near, far = sorted((data.draw(st.floats(0.0, 1.0)), data.draw(st.floats(0.0, 1.0))))
    nearer, further = (
        change_of(part, REFERENCE_CELSIUS + share * (end - REFERENCE_CELSIUS))
        for share in (near, far)
    )
    for change in (nearer, further):
        assert -1.0 < change.least <= change.typical <= change.most
    assert abs(nearer.least) <= abs(further.least)
    assert abs(nearer.typical) <= abs(further.typical)
    assert abs(nearer.most) <= abs(further.most)


@pytest.mark.parametrize(
    # From memory: the leakage of an electrolytic doubles for each 10 C.
    ("celsius", "factor"),
    [(20.0, 1.0), (30.0, 2.0), (40.0, 4.0), (0.0, 0.25), (85.0, 90.5)],
)
def test_leakage_doubles_for_each_ten_degrees(celsius, factor):
    assert leak_factor(celsius) == pytest.approx(factor, rel=1e-3)


def test_warmth_is_a_range_that_parts_are_made_for():
    assert Warmth(COLDEST, HOTTEST) == Warmth(-55.0, 125.0)
    assert Warmth(25.0, 25.0).low == 25.0


@pytest.mark.parametrize(
    ("low", "high", "words"),
    [
        (40.0, 0.0, "from 40 C to 0 C runs backwards"),
        (-56.0, 0.0, "stay within -55 C and 125 C"),
        (0.0, 126.0, "stay within -55 C and 125 C"),
        (nan, 0.0, "runs backwards"),
        (0.0, nan, "runs backwards"),
    ],
)
def test_other_warmth_is_refused(low, high, words):
    with pytest.raises(BadRequestError, match=words):
        Warmth(low, high)
