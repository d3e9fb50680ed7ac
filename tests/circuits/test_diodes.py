"""The drops of steering diodes against known operating points, and bad input."""

from math import e

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.circuits.diodes import DIODES, diode_named, diode_names
from chooser.errors import BadRequestError, UnknownNameError

BUILT_IN = ("ideal", "silicon", "schottky")


def test_the_known_diodes():
    assert diode_names() == BUILT_IN


@pytest.mark.parametrize("name", BUILT_IN)
def test_every_figure_has_a_source(name):
    sources = dict(diode_named(name).sources)
    assert set(sources) == set(DIODES.keys)
    assert all(len(source) > 3 for source in sources.values())


@pytest.mark.parametrize(
    ("name", "current", "expected", "within"),
    [
        # From memory: operating points of a 1N4148 and of a BAT85.
        ("silicon", 50e-6, 0.45, 0.02),
        ("silicon", 1e-3, 0.6, 0.03),
        ("silicon", 10e-3, 0.72, 0.06),
        ("schottky", 1e-3, 0.3, 0.03),
        ("schottky", 0.1e-3, 0.24, 0.04),
        ("ideal", 1e-3, 0.0, 0.0),
    ],
)
def test_drop_at_a_current(name, current, expected, within):
    assert diode_named(name).drop_at(current) == pytest.approx(expected, abs=within + 1e-12)


def test_silicon_is_the_exponential_law_of_its_model():
    # From memory: Is 2.52 nA, n 1.75, at 27 C (25.85 mV), the model of a 1N4148.
    current = np.geomspace(1e-6, 10e-3, 20)
    law = 1.75 * 0.02585 * np.log(current / 2.52e-9)
    assert diode_named("silicon").drop_at(current) == pytest.approx(law, abs=1.5e-3)


@pytest.mark.parametrize("name", ["silicon", "schottky"])
def test_the_slope_is_what_e_times_the_current_adds(name):
    diode = diode_named(name)
    assert diode.drop_at(e * 1e-4) - diode.drop_at(1e-4) == pytest.approx(diode.slope)


@pytest.mark.parametrize("name", ["silicon", "schottky", "ideal", "0.6V"])
@given(current=st.lists(st.floats(0.0, 1.0), min_size=2, max_size=5))
def test_drops_are_never_negative_and_never_fall(name, current):
    drops = diode_named(name).drop_at(np.sort(current))
    assert drops.shape == (len(current),)
    assert np.all(drops >= 0.0)
    assert np.all(np.diff(drops) >= 0.0)


@pytest.mark.parametrize(
    ("typed", "volt"), [("0.6V", 0.6), ("0.6", 0.6), ("0,3 V", 0.3), ("600mV", 0.6), ("0V7", 0.7)]
)
def test_a_constant_drop_as_typed(typed, volt):
    diode = diode_named(typed)
    assert diode.drop_at([0.0, 1e-9, 1.0]).tolist() == [volt] * 3
    assert diode.slope == 0.0
    assert "constant" in diode.title


@pytest.mark.parametrize("typed", ["Silicon", " SCHOTTKY "])
def test_names_in_any_case(typed):
    assert diode_named(typed).name == typed.strip().lower()


@pytest.mark.parametrize(
    ("typed", "said"),
    [
        ("silcon", "did you mean silicon?"),
        ("5k", "neither a diode that is known nor a drop; write one of ideal, silicon, schottky"),
        ("-0.6V", "or a voltage such as 0.6V"),
        ("", "Known are ideal, silicon, schottky"),
    ],
)
def test_what_is_neither_is_refused(typed, said):
    with pytest.raises(UnknownNameError) as refused:
        diode_named(typed)
    assert said in str(refused.value)


def test_a_users_file_adds_kinds(tmp_path):
    file = tmp_path / "own.toml"
    file.write_text('[ours]\nlike = "silicon"\ndrop = 0.62\n', encoding="utf-8")
    assert diode_named("ours", file).drop_at(1e-3) == pytest.approx(0.62)
    assert diode_names(file) == (*BUILT_IN, "ours")
    with pytest.raises(UnknownNameError, match="schottky, ours"):
        diode_named("9k", file)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ('[x]\nlike = "silicon"\nreference_current = 0', "must be more than 0"),
        ('[x]\nlike = "silicon"\nslope = -1', "must be 0 or more"),
        ("[x]\ndrop = 0.5", 'start with like = "silicon"'),
    ],
)
def test_a_bad_file_is_refused(tmp_path, text, said):
    file = tmp_path / "own.toml"
    file.write_text(text, encoding="utf-8")
    with pytest.raises(BadRequestError, match=r"own\.toml \[x\]") as refused:
        diode_named("silicon", file)
    assert said in str(refused.value)


@given(st.text(max_size=100))
def test_any_text_is_a_diode_or_refused(text):
    try:
        diode = diode_named(text)
    except UnknownNameError as refused:
        assert str(refused).endswith(".")  # noqa: PT017 - either way is right
    else:
        assert diode.drop >= 0.0
