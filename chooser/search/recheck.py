"""Every answer is worked out once more, another way, before anybody sees it."""

from __future__ import annotations

from collections import Counter
from fractions import Fraction

from chooser.circuits.monostable import LN3
from chooser.errors import SelfCheckError
from chooser.networks import Join, Leaf, Network, members, parse_network, write_network
from chooser.parts import Holding
from chooser.search.request import Fit, Request

AGREEMENT = Fraction(1, 10**9)
"""Relative difference between the search's floats and fractions that rounding may explain."""


def recheck(fit: Fit, request: Request) -> None:
    """Compare a fit with its own written form, calculated in fractions.

    The networks are written out in decimal, read back, and folded in ohms and farads from the
    bottom up, sharing no number with the search.

    Raises
    ------
    SelfCheckError
        A value, the error or a count does not agree: our fault, and the fit is not shown.
    """
    ohm = _reread(fit.resistor, Join.SERIES)
    farad = _reread(fit.capacitor, Join.PARALLEL)
    for name, said, found in (("R", fit.resistance, ohm), ("C", fit.capacitance, farad)):
        if abs(Fraction(said) / found - 1) > AGREEMENT:
            raise SelfCheckError(
                f"chooser's own check failed: {name} = {said} was to be {float(found)}; "
                "please report it with the command you gave."
            )
    if request.timer.ideal:
        error = float(ohm * farad * Fraction(LN3) / Fraction(request.target) - 1)
        if abs(error - fit.error) > float(AGREEMENT):
            raise SelfCheckError(
                f"chooser's own check failed: an error of {fit.error} was to be {error}; "
                "please report it with the command you gave."
            )
    _check_counts(fit, request)


def _reread(network: Network[Holding], adds: Join) -> Fraction:
    text = write_network(network, lambda holding: repr(holding.part.effective).replace("+", ""))
    return _folded(parse_network(text, Fraction), adds)


def _folded(network: Network[Fraction], adds: Join) -> Fraction:
    if isinstance(network, Leaf):
        return network.member
    result = Fraction(0)
    for child in network.children:
        value = _folded(child, adds)
        if network.join is adds or not result:
            result += value
        else:
            result = result * value / (result + value)
    return result


def _check_counts(fit: Fit, request: Request) -> None:
    taken = Counter(holding.id for holding in members(fit.resistor))
    taken.update(holding.id for holding in members(fit.capacitor))
    free = {
        holding.id: holding.free for holding in (*members(fit.resistor), *members(fit.capacitor))
    }
    for number, count in taken.items():
        there = free[number]
        if there is not None and count * request.boards > there:
            raise SelfCheckError(
                f"chooser's own check failed: {count * request.boards} pieces of holding {number} "
                f"were picked and {there} are free; please report it with the command you gave."
            )
