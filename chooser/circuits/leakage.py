"""How much a capacitor leaks: a conductance across it, typical and at the limit.

Near the trip point real capacitors lie between a constant current and a constant resistance;
a resistance is the model taken here, because limits that grow with C x V (electrolytics) and
insulation given as R x C in second (films, ceramics) both are one: 0.01 C V at the rated
voltage V is a conductance of C / 100 s whatever V is.

Electrolytics are specified at 20 C and insulation at 25 C; `leak_conductance` is for either.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import log2

from chooser.parts import Part
from chooser.technologies import taken_for
from chooser.temperature import KELVIN_PER_DOUBLING, leak_factor

__all__ = [
    "CURRENT_LIMITS",
    "DOUBLING",
    "INSULATION",
    "SETTLED",
    "CurrentLimit",
    "Insulation",
    "LeakConductance",
    "leak_conductance",
    "leak_conductance_at",
    "taken_for",
]


@dataclass(frozen=True, slots=True)
class LeakConductance:
    """What a capacitor leaks per volt across it.

    Attributes
    ----------
    typical, limit : in siemens, 0 <= typical <= limit.
    """

    typical: float
    limit: float


COOL_CELSIUS, HOT_CELSIUS = 25.0, 85.0
"""Temperatures of the two columns of insulation tables."""


@dataclass(frozen=True, slots=True)
class Insulation:
    """Insulation of a dielectric: leak resistance times capacitance, in second (ohm farad).

    Attributes
    ----------
    cool : at 25 C, the typical state of a part. hot : at 85 C, taken as the limit.
    """

    cool: float
    hot: float

    def growth(self, celsius: float) -> float:
        """Return by how much the typical leakage exceeds the one at 25 C (dimensionless, >= 1).

        The logarithm of the insulation is taken to fall evenly from 25 C to 85 C and on beyond;
        below 25 C no gain is counted, for none was published.
        """
        warmer = (celsius - COOL_CELSIUS) / (HOT_CELSIUS - COOL_CELSIUS)
        return float((self.cool / self.hot) ** max(0.0, warmer))


@dataclass(frozen=True, slots=True)
class CurrentLimit:
    """Leakage limit of an electrolytic at its rated voltage, after some minutes.

    The limit is the greater of per_cv x C V and floor, or their sum.

    Attributes
    ----------
    per_cv : ampere per farad and volt (1/s). floor : ampere. added : True for the sum.
    """

    per_cv: float
    floor: float
    added: bool = False


INSULATION = {
    # A comparison table of film, ceramic and tantalum capacitors: 25 C and 85 C columns.
    "polyester": Insulation(10e3, 1e3),
    "polypropylene": Insulation(100e3, 10e3),
    "pen": Insulation(10e3, 1e3),
    "pps": Insulation(10e3, 1e3),
    "c0g": Insulation(10e3, 1e3),
    "x7r": Insulation(1e3, 500.0),
    # The same dielectric family as X7R; no figure of its own was found.
    "x5r": Insulation(1e3, 500.0),
    # From memory: better than 100 000 s and 10 000 s; hot taken a decade lower, as for the films.
    "polystyrene": Insulation(100e3, 10e3),
    "mica": Insulation(10e3, 1e3),
    # Technical data of leaded and chip ceramics: at least 500 s, older and smaller parts 100 s.
    "y5v": Insulation(500.0, 100.0),
    "z5u": Insulation(500.0, 100.0),
    "ceramic": Insulation(500.0, 100.0),
}
"""Insulation of the dielectrics that do not need forming."""

CURRENT_LIMITS = {
    # Leakage rows of a standard, a low-leakage and a non-polar aluminium series.
    "electrolytic": CurrentLimit(0.01, 3e-6),
    "electrolytic-low-leakage": CurrentLimit(0.002, 0.4e-6),
    "electrolytic-non-polar": CurrentLimit(0.03, 3e-6, added=True),
    # About 10 nA per uF and V; the floor of 0.5 uA is common practice, from memory.
    "tantalum": CurrentLimit(0.01, 0.5e-6),
}
"""Leakage limits of the electrolytics."""

DOUBLING = {
    # The same table gives tantalum 100 s at 25 C and 10 s at 85 C: ten times as much in 60 K.
    "tantalum": (HOT_CELSIUS - COOL_CELSIUS) / log2(10.0),
}
"""Kelvin in which leakage doubles, for the electrolytics that have a figure of their own."""

SETTLED = 30.0
"""Limit over settled leakage of electrolytics.

A maker's answer puts settled leakage one to two decades below the limit; this is about the
geometric mean of 10 and 100, an assumption and no more. A measured leakage replaces it.
"""


def leak_conductance(part: Part, supply: float | None = None) -> LeakConductance:
    """Return what a capacitor leaks, from its own figure or else from its technology.

    Parameters
    ----------
    part : a capacitor. Its leakage current, where given, counts at its rated voltage, as both
        the typical figure and the limit.
    supply : voltage in volt that stands in for an unknown rating of a part whose leakage
        current is given; without either the technology decides.

    Returns
    -------
    Conductances in siemens, at the effective (measured, else nominal) capacitance.
    """
    voltage = part.voltage or supply
    if part.leakage is not None and voltage:
        own = part.leakage / voltage
        return LeakConductance(own, own)
    farad = part.effective
    technology = taken_for(part)
    if technology in INSULATION:
        insulation = INSULATION[technology]
        return LeakConductance(farad / insulation.cool, farad / insulation.hot)
    limit = _limit(CURRENT_LIMITS[technology], farad, part.voltage)
    return LeakConductance(limit / SETTLED, limit)


def leak_conductance_at(part: Part, supply: float | None, celsius: float) -> LeakConductance:
    """Return what a capacitor leaks at a temperature.

    Parameters
    ----------
    part, supply : as for `leak_conductance`; a leakage figure of the part's own is taken to hold
        at the temperature its technology is specified at, and to grow as that technology does.
    celsius : temperature of the part in degree Celsius.

    Returns
    -------
    Conductances in siemens. Of films and ceramics the limit is the 85 C figure up to there; of
    electrolytics both figures grow alike, from 20 C on, and shrink alike in the cold.
    """
    specified = leak_conductance(part, supply)
    technology = taken_for(part)
    if technology in INSULATION:
        typical = specified.typical * INSULATION[technology].growth(celsius)
        return LeakConductance(typical, max(specified.limit, typical))
    factor = leak_factor(celsius, DOUBLING.get(technology, KELVIN_PER_DOUBLING))
    return LeakConductance(specified.typical * factor, specified.limit * factor)


def _limit(row: CurrentLimit, farad: float, voltage: float | None) -> float:
    """Return the limit of an electrolytic in siemens; a floor needs the rating to count."""
    by_size = row.per_cv * farad
    if not voltage:
        return by_size
    by_floor = row.floor / voltage
    return by_size + by_floor if row.added else max(by_size, by_floor)
