"""Pieces that stand for all that are sold, against the normal law they are taken from."""

import numpy as np
import pytest

from chooser.circuits.charging import Phase
from chooser.circuits.scattering import off_usual, scattered, scattered_pair, sigmas


@pytest.mark.parametrize("pieces", [4, 20, 55])
def test_sigmas_are_those_of_a_normal_law_cut_at_three(pieces):
    found = np.array(sigmas(pieces))
    assert list(found) == sorted(found)
    assert found + found[::-1] == pytest.approx(0.0, abs=1e-12)
    rng = np.random.default_rng(3)
    drawn = rng.standard_normal(400_000)
    drawn = np.sort(drawn[np.abs(drawn) <= 3.0])
    cells = np.array_split(drawn, pieces)
    assert found == pytest.approx([float(cell.mean()) for cell in cells], abs=0.02)


def test_each_side_has_a_third_of_its_limit_as_sigma():
    figure = (10.0, 7.0, 16.0)
    assert [off_usual(figure, z) for z in (-3.0, -1.0, 0.0, 1.0, 3.0)] == [
        7.0,
        9.0,
        10.0,
        12.0,
        16.0,
    ]


def trips(scatter):
    return np.array([law.threshold for _, law in scatter]), np.array([w for w, _ in scatter])


def test_one_figure():
    assert scattered((0.5, 0.5, 0.5), lambda trip: Phase(5.0, trip)) == ()
    found, weights = trips(scattered((0.5, 0.44, 0.56), lambda trip: Phase(5.0, trip)))
    assert weights.sum() == pytest.approx(1.0)
    assert weights @ found == pytest.approx(0.5)
    assert np.sqrt(weights @ (found - 0.5) ** 2) == pytest.approx(0.02, rel=0.04)


def test_two_figures_are_independent_and_what_cannot_be_is_left_out():
    def pair(first, second):
        return Phase(first, second)

    def of(scatter):
        return np.array([(law.swing, law.threshold) for _, law in scatter])

    whole = of(scattered_pair((5.0, 4.4, 5.6), (0.5, 0.44, 0.56), pair))
    assert np.std(whole[:, 0]) == pytest.approx(0.2, rel=0.04)
    assert np.std(whole[:, 1]) == pytest.approx(0.02, rel=0.04)
    assert abs(np.corrcoef(whole.T)[0, 1]) < 0.05
    less = scattered_pair((5.0, 4.4, 5.6), (0.5, 0.44, 0.56), pair, lambda a, _b: a < 5.2)
    assert sum(weight for weight, _ in less) == pytest.approx(1.0)
    assert of(less)[:, 0].max() < 5.2
    # From memory: 84 % of a normal law lie below one sigma.
    assert len(less) / len(whole) == pytest.approx(0.84, abs=0.02)
