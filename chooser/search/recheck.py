"""Every answer is worked out once more, another way, before anybody sees it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from fractions import Fraction

from chooser.circuits.leakage import leak_conductance
from chooser.circuits.monostable import LN3, interval, typical
from chooser.errors import SelfCheckError
from chooser.networks import Join, Leaf, Network, members, parse_network, write_network
from chooser.parts import Holding
from chooser.search.request import Fit, Request

AGREEMENT = 1e-9
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
    ohm = _reread(fit.resistor, Join.SERIES, _effective)
    farad = _reread(fit.capacitor, Join.PARALLEL, _effective)
    for name, said, found in (("R", fit.resistance, ohm), ("C", fit.capacitance, farad)):
        if abs(Fraction(said) / found - 1) > AGREEMENT:
            raise _failed(f"{name} = {said} was to be {float(found)}")
    if request.timer.ideal:
        ratio = float(ohm * farad * Fraction(LN3) / Fraction(request.target))
    else:
        leak = float(_reread(fit.capacitor, Join.PARALLEL, _leak(request.supply)))
        drive = typical(request.timer, request.supply)
        ratio = float(interval(float(ohm), float(farad), leak, drive)) / request.target
    if abs(fit.error + 1 - ratio) > AGREEMENT * max(1.0, ratio):
        raise _failed(f"an error of {fit.error} was to be {ratio - 1}")
    _check_counts(fit, request)


def _failed(what: str) -> SelfCheckError:
    return SelfCheckError(
        f"chooser's own check failed: {what}; please report it with the command you gave."
    )


def _effective(holding: Holding) -> float:
    return holding.part.effective


def _leak(supply: float) -> Callable[[Holding], float]:
    return lambda holding: leak_conductance(holding.part, supply).typical


def _reread(network: Network[Holding], adds: Join, of: Callable[[Holding], float]) -> Fraction:
    text = write_network(network, lambda holding: repr(of(holding)).replace("+", ""))
    return _folded(parse_network(text, Fraction), adds)


def _folded(network: Network[Fraction], adds: Join) -> Fraction:
    if isinstance(network, Leaf):
        return network.member
    result, first = Fraction(0), True
    for child in network.children:
        value = _folded(child, adds)
        if first or network.join is adds:
            result += value
        elif result + value:
            result = result * value / (result + value)
        first = False
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
            raise _failed(
                f"{count * request.boards} pieces of holding {number} were picked "
                f"and {there} are free"
            )
