"""From needs and a stock to what is taken from which drawer.

Every need takes its pieces for all boards from one holding. Needs with the fewest holdings to
choose from choose first, each the best that has pieces left; a need that finds none left has
earlier ones move to their next best where that makes room (augmenting paths, so that as many
needs are met as the stock can meet at once).
"""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import inf, log

from chooser.parts import Holding, Kind, Part, Sureness
from chooser.quantities import format_capacitance, format_power, format_resistance, format_voltage
from chooser.search.request import Fit
from chooser.supporting.needs import Need
from chooser.technologies import is_polarised, taken_for

POWER_MARGIN = 2.0
"""Rating over dissipation that a resistor must have (common practice, no source)."""

MANY = 10
"""Pieces left from which a drawer is not missed."""

PRECISE = {Kind.CAPACITOR: 0.025, Kind.RESISTOR: 0.005}
"""Tolerances up to which a part is kept for timing (ours)."""

_ELECTROLYTICS = ("electrolytic", "electrolytic-low-leakage", "electrolytic-non-polar")
_FINENESS = {
    **dict.fromkeys(("polyester", "pen", "electrolytic-low-leakage", "metal-film"), 1),
    **dict.fromkeys(("electrolytic-non-polar", "polypropylene", "polystyrene", "pps"), 2),
    **dict.fromkeys(("mica", "c0g", "thin-film", "metal-oxide", "wirewound"), 2),
}
"""By technology, how much it would be missed elsewhere; 0 for all others."""

_ROUNDING = 1e-9


@dataclass(frozen=True, slots=True)
class Picked:
    """A need and what meets it.

    Attributes
    ----------
    need : what for. holding : from where. count : pieces for all boards together.
    """

    need: Need
    holding: Holding
    count: int


@dataclass(frozen=True, slots=True)
class Supporting:
    """The parts beside the timing parts.

    Attributes
    ----------
    picks : needs that are met. missing : those that are not; both in the order of the needs.
    """

    picks: tuple[Picked, ...]
    missing: tuple[Need, ...]

    @property
    def cautions(self) -> tuple[str, ...]:
        """Sentences to go with them, each once."""
        needs = [*(pick.need for pick in self.picks), *self.missing]
        said = [need.caution for need in needs if need.caution]
        said += (text for pick in self.picks for text in _cautions(pick))
        return tuple(dict.fromkeys(said))


def pick(needs: Sequence[Need], fit: Fit, stock: Sequence[Holding], boards: int) -> Supporting:
    """Pick supporting parts from what a fit leaves of a stock.

    A need prefers parts that nobody measured and that are not of precision, then the better
    rating, the nearest to its preferred value (as a ratio), a drawer that holds many, the
    plainer technology, and the lowest id.

    Parameters
    ----------
    needs : what is needed on each board. fit : the timing parts, which come first.
    stock : all holdings. boards : boards to be built alike, >= 1.
    """
    used = Counter(holding.id for holding in fit.holdings())
    by_id = {holding.id: holding for holding in stock}
    room = {holding.id: _room(holding, boards) - used[holding.id] for holding in stock}
    choices = [[each.id for each in _candidates(need, stock, room, boards)] for need in needs]
    found = _Placing(choices, room).all()
    picks = tuple(
        Picked(need, by_id[found[number]], boards)
        for number, need in enumerate(needs)
        if number in found
    )
    missing = tuple(need for number, need in enumerate(needs) if number not in found)
    return Supporting(picks, missing)


class _Placing:
    """Needs being given to holdings, by their numbers."""

    def __init__(self, choices: Sequence[Sequence[int]], room: dict[int, float]) -> None:
        self.choices = choices
        self.room = room
        self.at: dict[int, list[int]] = defaultdict(list)

    def all(self) -> dict[int, int]:
        """Return the holding of every need that can be met."""
        fewest_first = sorted(range(len(self.choices)), key=lambda need: len(self.choices[need]))
        for need in fewest_first:
            self._place(need, set())
        return {need: holding for holding, needs in self.at.items() for need in needs}

    def _place(self, need: int, tried: set[int]) -> bool:
        """Give a need a holding, others making room where they must; False if none can."""
        for holding in self.choices[need]:
            if len(self.at[holding]) < self.room[holding]:
                self.at[holding].append(need)
                return True
        for holding in self.choices[need]:
            if holding in tried:
                continue
            tried.add(holding)
            for other in tuple(self.at[holding]):
                if self._place(other, tried):
                    self.at[holding].remove(other)
                    self.at[holding].append(need)
                    return True
        return False


def _room(holding: Holding, boards: int) -> float:
    """Return how often a holding can give a piece to every board."""
    return inf if holding.free is None else max(holding.free, 0) // boards


def _candidates(
    need: Need, stock: Sequence[Holding], room: dict[int, float], boards: int
) -> list[Holding]:
    """Return what would do for a need and is there, best first."""
    fine = [each for each in stock if room[each.id] >= 1 and _will_do(need, each.part)]
    return sorted(fine, key=lambda each: _preference(need, each, room[each.id], boards))


def _will_do(need: Need, part: Part) -> bool:
    """Tell whether a part is of the right kind, value and rating; an unknown rating may be."""
    if part.kind is not need.kind:
        return False
    if not need.least * (1 - _ROUNDING) <= part.effective <= need.most * (1 + _ROUNDING):
        return False
    if need.kind is Kind.RESISTOR:
        watt = POWER_MARGIN * need.drive.watt(part.effective) if need.drive else 0.0
        return part.power is None or part.power >= watt
    technology = taken_for(part)
    if (technology in _ELECTROLYTICS) is not need.electrolytic or technology == "tantalum":
        return False
    return part.voltage is None or part.voltage >= need.volt


def _preference(
    need: Need, holding: Holding, room: float, boards: int
) -> tuple[bool, int, float, int, int, int]:
    """Return what a need sorts its candidates by."""
    part = holding.part
    return (
        _is_precious(part),
        _rating(need, part),
        round(abs(log(part.effective / need.preferred)), 9),
        _scarcity((room - 1) * boards),
        _FINENESS.get(part.technology or "", 0),
        holding.id,
    )


def _scarcity(left: float) -> int:
    """Return 0 for a holding that never limits, 1 where many pieces are left over, else 2."""
    return 0 if left == inf else 1 if left >= MANY else 2


def _is_precious(part: Part) -> bool:
    """Tell whether a part is measured or of precision, and so better kept for timing."""
    tolerance = part.tolerance
    precise = tolerance is not None and max(tolerance.minus, tolerance.plus) <= PRECISE[part.kind]
    return part.measured is not None or precise


def _rating(need: Need, part: Part) -> int:
    """Return 0 for a comfortable rating, 1 for one that is enough, 2 for an unknown one."""
    known = part.power if part.kind is Kind.RESISTOR else part.voltage
    if known is None:
        return 2 if need.volt or need.drive else 0
    return 0 if part.kind is Kind.RESISTOR or known >= need.volt_preferred else 1


def _cautions(pick: Picked) -> Iterator[str]:
    """Say what is to be looked at before a pick is used."""
    need, part = pick.need, pick.holding.part
    write = format_capacitance if part.kind is Kind.CAPACITOR else format_resistance
    name = f"{write(part.value)} in drawer {pick.holding.drawer}"
    if is_polarised(part):
        yield (
            f"The {name} is polarised: its plus goes to the supply, its minus, the stripe, to "
            "ground; the other way round it may burst."
        )
    if part.kind is Kind.CAPACITOR and part.voltage is None:
        rated = format_voltage(need.volt)
        yield f"No rated voltage is written down for the {name}; see that it says {rated} or more."
    if need.drive and part.power is None:
        watt = POWER_MARGIN * need.drive.watt(part.effective)
        least = format_power(watt, digits=2)
        yield f"No power rating is written down for the {name}; see that it stands {least}."
    if pick.holding.count.sureness is Sureness.ROUGH:
        yield f"The count of the {name} is rough; look before you start."
