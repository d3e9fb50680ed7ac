from __future__ import annotations

from collections import Counter

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.errors import UnknownNameError
from chooser.parts import Kind, Part, Tolerance
from chooser.technologies import (
    LARGE_FARAD,
    TECHNOLOGIES,
    find_technology,
    nearest_technologies,
    taken_for,
    technology_named,
    technology_names,
    technology_of,
    tolerance_of,
)

_R, _P, _T, _C = Kind.RESISTOR, Kind.POT, Kind.TRIMMER, Kind.CAPACITOR


@pytest.mark.parametrize(
    ("written", "kind", "name"),
    [
        ("metal-film", _R, "metal-film"),
        ("Metal Film", _R, "metal-film"),
        ("METAL_FILM", _R, "metal-film"),
        ("metalfilm", _R, "metal-film"),
        ("cf", _R, "carbon-film"),
        ("wire wound", _R, "wirewound"),
        ("wirewound", _T, "wirewound"),
        ("carbon", _P, "carbon"),
        ("cermet", _T, "cermet"),
        ("conductive plastic", _P, "conductive-plastic"),
        # MKT is the usual code of metallised polyester (PET), MKP of polypropylene; NP0 is the
        # older name of C0G, written with a zero or an O (common practice, no source).
        ("MKT", _C, "polyester"),
        ("PET", _C, "polyester"),
        ("MKP", _C, "polypropylene"),
        ("NP0", _C, "c0g"),
        ("NPO", _C, "c0g"),
        ("C0G", _C, "c0g"),
        ("COG", _C, "c0g"),
        ("X7R", _C, "x7r"),
        ("elko", _C, "electrolytic"),
        ("low leakage", _C, "electrolytic-low-leakage"),
        ("non-polar", _C, "electrolytic-non-polar"),
        ("bipolar", _C, "electrolytic-non-polar"),
        ("tant.", _C, "tantalum"),
    ],
)
def test_a_technology_is_found_by_what_people_write(written, kind, name):
    assert technology_named(written, kind).name == name


@pytest.mark.parametrize(
    ("written", "kind", "near"),
    [
        ("metal", _R, ("metal-film", "metal-oxide")),
        ("carbon", _R, ("carbon-film", "carbon-composition")),
        ("polyestr", _C, ("polyester",)),
        ("tantalium", _C, ("tantalum",)),
        ("cermt", _T, ("cermet",)),
    ],
)
def test_an_unknown_technology_names_the_near_ones(written, kind, near):
    with pytest.raises(UnknownNameError) as caught:
        technology_named(written, kind)
    assert written in str(caught.value)
    assert nearest_technologies(written, kind)[: len(near)] == near
    for name in near:
        assert name in str(caught.value)


def test_where_none_is_near_all_of_the_kind_are_named():
    with pytest.raises(UnknownNameError) as caught:
        technology_named("qqqq", Kind.POT)
    for name in technology_names(Kind.POT):
        assert name in str(caught.value)
    assert "polyester" not in str(caught.value)


def test_a_technology_of_another_kind_is_unknown():
    with pytest.raises(UnknownNameError):
        technology_named("polyester", Kind.RESISTOR)
    with pytest.raises(UnknownNameError):
        technology_named("metal-film", Kind.CAPACITOR)


@given(st.text(), st.sampled_from(Kind))
def test_any_text_is_found_or_refused(text, kind):
    found = find_technology(text, kind)
    if found is None:
        with pytest.raises(UnknownNameError):
            technology_named(text, kind)
    else:
        assert kind in found.kinds


def test_no_spelling_means_two_technologies_of_one_kind():
    spellings = Counter(
        (kind, "".join(filter(str.isalnum, spelling.casefold())))
        for technology in TECHNOLOGIES
        for kind in technology.kinds
        for spelling in {technology.name, *technology.synonyms}
    )
    assert {spelling for spelling, times in spellings.items() if times > 1} == set()


def test_names_are_unique_and_every_one_finds_itself():
    names = [technology.name for technology in TECHNOLOGIES]
    assert len(set(names)) == len(names)
    for technology in TECHNOLOGIES:
        for kind in technology.kinds:
            assert technology_named(technology.name, kind) is technology


def test_only_electrolytics_and_tantalums_are_polarised():
    # Aluminium and tantalum electrolytics have a plus end; non-polar types are made without one
    # (common practice, no source).
    polarised = {technology.name for technology in TECHNOLOGIES if technology.polarised}
    assert polarised == {"electrolytic", "electrolytic-low-leakage", "tantalum"}


def test_ceramic_classes_follow_the_code_of_the_dielectric():
    # EIA RS-198: C0G is class 1; X7R, X5R, Y5V and Z5U are letter-digit-letter codes of class 2.
    classes = {each.name: each.ceramic_class for each in TECHNOLOGIES if each.ceramic_class}
    assert classes == {"c0g": 1, "x7r": 2, "x5r": 2, "y5v": 2, "z5u": 2, "ceramic": 2}


def test_a_printed_tolerance_goes_before_an_assumed_one():
    printed = Part(_C, 1e-6, tolerance=Tolerance(0.1, 0.5), technology="electrolytic")
    assert tolerance_of(printed) == (Tolerance(0.1, 0.5), False)
    bare = Part(_C, 1e-6, technology="electrolytic")
    # Aluminium electrolytics are sold as +-20 % (letter M) today; makers' series sheets.
    assert tolerance_of(bare) == (Tolerance(0.2, 0.2), True)
    assert tolerance_of(Part(_R, 1e3)) == (Tolerance(0.05, 0.05), True)
    assert technology_of(Part(_R, 1e3)) is None
    assert technology_of(bare) is technology_named("electrolytic", _C)


def test_a_capacitor_of_unknown_technology_is_taken_for_one_by_its_size():
    # Common practice, no source: loose parts of 1 uF and more are mostly electrolytics.
    assert taken_for(Part(_C, LARGE_FARAD)) == "electrolytic"
    assert taken_for(Part(_C, 0.9 * LARGE_FARAD)) == "ceramic"
    assert taken_for(Part(_C, 0.9 * LARGE_FARAD, measured=LARGE_FARAD)) == "electrolytic"
    for technology in technology_names(_C):
        assert taken_for(Part(_C, LARGE_FARAD, technology=technology)) == technology
