"""The self-check lets right fits through and stops every wrong one."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from stocks import EVERY_RULE, asked, capacitor, found, resistor, with_slot

from chooser.errors import Exit, SelfCheckError
from chooser.networks import Group, Join, Leaf
from chooser.search import find
from chooser.search.find import find_fits
from chooser.search.recheck import recheck
from chooser.search.terms import Rank

HOLDINGS = [
    resistor(1, 1e4, 2),
    resistor(2, 2.2e4, 1, measured=21.87e3),
    capacitor(11, 1e-6, 2),
    capacitor(12, 4.7e-7, 1),
]
OTHER = replace(HOLDINGS[0], part=replace(HOLDINGS[0].part, value=9e3))
REQUEST = asked(0.02, rank=Rank.ERROR)


def with_error(fit, error):
    return replace(fit, error=error, errors={"interval": error})


def fits(timer="ideal", **options):
    return find_fits(HOLDINGS, asked(0.02, timer, rank=Rank.ERROR, **options)).fits


@pytest.mark.parametrize("timer", ["ideal", "bipolar", "cmos"])
def test_right_fits_pass(timer):
    for fit in fits(timer):
        recheck(fit, asked(0.02, timer))


@pytest.mark.parametrize(
    "wrong",
    [
        lambda fit: with_slot(fit, "R", value=fit.slot("R").value * (1 + 1e-6)),
        lambda fit: with_slot(fit, "C", value=fit.slot("C").value * (1 - 1e-6)),
        lambda fit: with_slot(fit, "R", network=Leaf(OTHER)),
        lambda fit: with_error(fit, fit.error + 1e-6),
        lambda fit: with_error(fit, -fit.error),
        # The error that places the fit and the one of its output must both be right.
        lambda fit: replace(fit, error=fit.error + 1e-6),
        lambda fit: replace(fit, errors={"interval": fit.error + 1e-6}),
    ],
)
def test_wrong_figures_are_stopped(wrong):
    fit = fits()[3]
    with pytest.raises(SelfCheckError, match="own check failed") as stopped:
        recheck(wrong(fit), REQUEST)
    assert stopped.value.status is Exit.OUR_FAULT


def test_a_wrong_error_of_a_real_timer_is_stopped():
    fit = fits("bipolar")[0]
    with pytest.raises(SelfCheckError):
        recheck(with_error(fit, fit.error + 0.1), asked(0.02, "bipolar"))


@pytest.mark.parametrize(("boards", "fine"), [(1, True), (2, False)])
def test_parts_that_are_not_there_are_stopped(boards, fine):
    """Two of holding 1 are there: enough for one board of two, not for two."""
    resistors = Group(Join.SERIES, (Leaf(HOLDINGS[0]), Leaf(HOLDINGS[0])))
    fit = with_slot(fits()[0], "R", network=resistors, value=2e4)
    fit = with_slot(fit, "C", network=Leaf(HOLDINGS[2]), value=1e-6)
    fit = with_error(fit, 2e4 * 1e-6 * math.log(3) / 0.02 - 1)
    if fine:
        recheck(fit, asked(0.02, boards=boards))
    else:
        with pytest.raises(SelfCheckError, match="4 pieces of holding 1"):
            recheck(fit, asked(0.02, boards=boards))


def test_claimed_parts_are_not_there():
    claimed = replace(HOLDINGS[0], claimed=2)
    fit = with_slot(fits(most_resistors=1)[0], "R", network=Leaf(claimed), value=1e4)
    error = 1e4 * fit.slot("C").value * math.log(3) / 0.02 - 1
    with pytest.raises(SelfCheckError):
        recheck(with_error(fit, error), REQUEST)


def test_a_wrong_fit_never_reaches_anybody(monkeypatch):
    right = find.fit_of

    def wrong(*given):
        fit = right(*given)
        return with_slot(fit, "R", value=fit.slot("R").value * 1.001)

    monkeypatch.setattr(find, "fit_of", wrong)
    with pytest.raises(SelfCheckError):
        find_fits(HOLDINGS, REQUEST)


@pytest.mark.parametrize("target", [1e-12, 1e-9, 1e-6, 1e3, 1e9])
def test_right_fits_pass_however_far_from_the_target(target):
    """An error of a thousand million percent has a rounding of its own size."""
    assert len(found(HOLDINGS, target, rank=Rank.ERROR, lifted=EVERY_RULE)) == 10


@pytest.mark.parametrize("value", [1e-3, 0.1, 1e16, 1.2345678901234567e-5, 3.3e20])
def test_any_value_that_can_be_written(value):
    """Exponents are part of how very large and very small floats are written."""
    holdings = [resistor(1, value, 2), capacitor(2, 1e-12, 2)]
    assert found(holdings, value * 1e-12, rank=Rank.ERROR, lifted=EVERY_RULE)
