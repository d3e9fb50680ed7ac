"""The one part to buy that would bring the interval into the band."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from chooser.circuits.leakage import leak_conductance
from chooser.circuits.monostable import interval, resistance, typical
from chooser.parts import Holding, Kind, Part
from chooser.preferred import nearest
from chooser.quantities import (
    format_capacitance,
    format_duration,
    format_percent,
    format_resistance,
)
from chooser.search.house_rules import LEAST_FARAD, leak_bound, resistor_limits
from chooser.search.request import Request
from chooser.search.terms import Rule

BIGGEST_FILM = 4.7e-6
"""Farad up to which film capacitors are commonly sold (common practice, no source)."""

BIGGEST_CAPACITOR = 2.2e-3
"""Farad beyond which no capacitor is suggested: it would load the discharge pin."""


@dataclass(frozen=True, slots=True)
class Purchase:
    """A part to buy and the holding it works with.

    Attributes
    ----------
    bought : the part. series : the E-series it is from. owned : the holding used beside it.
    interval : what they make, in second. error : relative to the target.
    boards : how many are built, each with one of the bought parts.
    """

    bought: Part
    series: str
    owned: Holding
    interval: float
    error: float
    boards: int = 1

    def __str__(self) -> str:
        write = {Kind.CAPACITOR: format_capacitance, Kind.RESISTOR: format_resistance}
        bought, owned = self.bought, self.owned.part
        what = f"{write[bought.kind](bought.value)} {bought.technology or ''}".rstrip()
        number = "One" if self.boards == 1 else f"{self.boards} of"
        return (
            f"{number} {what} {bought.kind} ({self.series}) bought for the "
            f"{write[owned.kind](owned.effective)} in drawer {self.owned.drawer} would make "
            f"{format_duration(self.interval, digits=4)} "
            f"({format_percent(self.error, digits=2, signed=True)})."
        )


def one_purchase(
    resistors: Iterable[Holding], capacitors: Iterable[Holding], request: Request
) -> Purchase | None:
    """Find the single purchase that gets into the band, a resistor before a capacitor.

    Parameters
    ----------
    resistors, capacitors : usable holdings; one of them pairs with the bought part.
    request : what is asked.

    Returns
    -------
    The purchase with the smallest error, from E24, else from E96 for resistors; E6 for
    capacitors. None where no single part helps.
    """
    enough = [h for h in capacitors if h.free is None or h.free >= request.boards]
    for series in ("E24", "E96"):
        found = _best(_resistors_to_buy(enough, series, request), request)
        if found is not None:
            return found
    enough = [h for h in resistors if h.free is None or h.free >= request.boards]
    return _best(_capacitors_to_buy(enough, request), request)


def _best(purchases: Iterable[Purchase], request: Request) -> Purchase | None:
    inside = [each for each in purchases if abs(each.error) <= request.within]
    return min(
        inside,
        key=lambda each: (round(abs(each.error), 4), each.bought.value, each.owned.id),
        default=None,
    )


def _resistors_to_buy(
    capacitors: Iterable[Holding], series: str, request: Request
) -> Iterator[Purchase]:
    drive = typical(request.timer, request.supply)
    for holding in capacitors:
        leak = _leak(holding.part, request)
        wanted = float(resistance(request.target, holding.part.effective, leak, drive))
        if not 0.1 <= wanted <= 1e9:  # noqa: PLR2004 - beyond what is sold
            continue
        part = Part(Kind.RESISTOR, nearest(series, wanted))
        if _allowed(part.value, holding.part, leak, request):
            yield _purchase(part, series, holding, request)


def _capacitors_to_buy(resistors: Iterable[Holding], request: Request) -> Iterator[Purchase]:
    for holding in resistors:
        ohm = holding.part.effective
        wanted = request.target / (ohm * 1.1)
        if not LEAST_FARAD <= wanted <= BIGGEST_CAPACITOR:
            continue
        value = nearest("E6", wanted)
        technology = "polyester" if value <= BIGGEST_FILM else "electrolytic"
        part = Part(Kind.CAPACITOR, value, technology=technology)
        if _allowed(ohm, part, _leak(part, request), request):
            yield _purchase(part, "E6", holding, request)


def _purchase(bought: Part, series: str, owned: Holding, request: Request) -> Purchase:
    pair = sorted((bought, owned.part), key=lambda part: part.kind is Kind.CAPACITOR)
    ohm, farad = pair[0].effective, pair[1].effective
    drive = typical(request.timer, request.supply)
    time = float(interval(ohm, farad, _leak(pair[1], request), drive))
    return Purchase(bought, series, owned, time, time / request.target - 1, request.boards)


def _allowed(ohm: float, capacitor: Part, leak: float, request: Request) -> bool:
    if capacitor.effective < LEAST_FARAD and Rule.STRAYS not in request.lifted:
        return False
    least, most = resistor_limits(request)
    if Rule.RESISTOR_LIMITS not in request.lifted:
        most = min(most, float(leak_bound(leak, typical(request.timer, request.supply))))
    return least <= ohm <= most


def _leak(part: Part, request: Request) -> float:
    return 0.0 if request.timer.ideal else leak_conductance(part, request.supply).typical
