"""What temperature does to a part: how far its value moves, and how fast leakage grows.

Conventions
-----------
Temperatures in degree Celsius, those of the part itself; changes are fractions of the value at
`REFERENCE_CELSIUS`. Resistors and electrolytics are specified at 20 C, most film and ceramic
capacitors and the timers at 25 C; no tempco here makes those five kelvin matter beside the
tolerances, so one constant stands for both.

A technology follows one of three laws. Where a tempco is published, the change is a straight
line. Where only limits over a range are (class 2 ceramics), the part may be anywhere inside
them as soon as it leaves room temperature: the codes promise nothing about the way there, and
the real curves are steep where nobody expects it. Aluminium electrolytics follow two straight
lines. How parts of one slot combine is the same as for tolerances: they move together.
"""

from __future__ import annotations

from dataclasses import dataclass

from chooser.errors import BadRequestError
from chooser.parts import Kind, Part
from chooser.technologies import taken_for, technology_of

REFERENCE_CELSIUS = 20.0
"""Temperature at which a part has the value that is calculated with."""

ROOM_CELSIUS = 25.0
"""Upper end of room temperature: IEC limits count from 20 C, EIA limits from 25 C."""

COLDEST, HOTTEST = -55.0, 125.0
"""Ends of what is calculated with; the widest range usual parts are made for."""

LARGEST_LOSS = 0.95
"""No part is said to lose more than this fraction, whatever tempco was typed for it."""


@dataclass(frozen=True, slots=True)
class Warmth:
    """The temperatures a circuit has to work at.

    Attributes
    ----------
    low, high : in degree Celsius, -55 <= low <= high <= 125.

    Raises
    ------
    BadRequestError
        They are not in that order, or are not numbers.
    """

    low: float
    high: float

    def __post_init__(self) -> None:
        if not self.low <= self.high:
            raise BadRequestError(
                f"A temperature range from {self.low:g} C to {self.high:g} C runs backwards; "
                "give the lower end first."
            )
        if not (self.low >= COLDEST and self.high <= HOTTEST):
            raise BadRequestError(
                f"Temperatures from {self.low:g} C to {self.high:g} C leave what parts are made "
                f"for; stay within {COLDEST:g} C and {HOTTEST:g} C."
            )


@dataclass(frozen=True, slots=True)
class Change:
    """How far a value moves with temperature.

    Attributes
    ----------
    least, typical, most : fractions of the value at the reference temperature,
        -1 < least <= typical <= most.
    """

    least: float
    typical: float
    most: float


@dataclass(frozen=True, slots=True)
class Tempco:
    """A straight line through the reference.

    Attributes
    ----------
    least, most : temperature coefficient in 1/K, least <= most; typical is the middle.
    """

    least: float
    most: float

    def change(self, celsius: float) -> Change:
        """Return the change at a temperature in degree Celsius."""
        warmer = celsius - REFERENCE_CELSIUS
        least, most = sorted((self.least * warmer, self.most * warmer))
        return Change(max(least, -LARGEST_LOSS), max((least + most) / 2, -LARGEST_LOSS), most)


@dataclass(frozen=True, slots=True)
class Envelope:
    """Limits over a range, and nothing about the way there; typically no change.

    Attributes
    ----------
    minus, plus : fractions >= 0, minus < 1.
    over : kelvin from room temperature in which the limits are reached in a straight line, or 0
        where they may be reached at once.
    """

    minus: float
    plus: float
    over: float = 0.0

    def change(self, celsius: float) -> Change:
        """Return the limits at a temperature in degree Celsius."""
        away = max(REFERENCE_CELSIUS - celsius, celsius - ROOM_CELSIUS, 0.0)
        reached = 1.0 if away > self.over else away / self.over if self.over else 0.0
        return Change(0.0 - reached * self.minus, 0.0, reached * self.plus)


@dataclass(frozen=True, slots=True)
class Bend:
    """Two straight lines that meet at the reference.

    Attributes
    ----------
    below, above : the line in the cold, the line in the heat.
    """

    below: Tempco
    above: Tempco

    def change(self, celsius: float) -> Change:
        """Return the change at a temperature in degree Celsius."""
        return (self.below if celsius < REFERENCE_CELSIUS else self.above).change(celsius)


@dataclass(frozen=True, slots=True)
class Behaviour:
    """What temperature does to parts of one technology.

    Attributes
    ----------
    law : how the value moves; beyond the rated range it goes on as before, at the least.
    coldest, hottest : the range that parts of this technology are usually rated for, in degree
        Celsius.
    """

    law: Tempco | Envelope | Bend
    coldest: float = COLDEST
    hottest: float = HOTTEST


def _either_way(ppm: float) -> Tempco:
    return Tempco(-ppm * 1e-6, ppm * 1e-6)


def _from_to(least: float, most: float) -> Tempco:
    return Tempco(least * 1e-6, most * 1e-6)


_ROUGHLY = 1.0 / 3.0
"""How far an electrolytic may be from its usual line, as a fraction of the change.

Chosen so that the line's 30 % at -40 C becomes 20 to 40 %, which is told of them (from memory).
"""


def _about(change: float, kelvin: float) -> Tempco:
    """Make the line of a change that is only known roughly, reached in so many kelvin."""
    ends = sorted((change / kelvin * (1 - _ROUGHLY), change / kelvin * (1 + _ROUGHLY)))
    return Tempco(*ends)


# About -20 % at -20 C and +5 % at +85 C (from memory); that the way there is straight is an
# assumption. Rated -40 to +85 C: the usual general-purpose series (from memory).
_ALUMINIUM = Behaviour(Bend(_about(0.2, 40.0), _about(0.05, 65.0)), -40.0, 85.0)

BEHAVIOURS = {
    # Resistors. Metal film: a catalogue of leaded resistors, the standard grade; the others from
    # memory. They are usable over all the temperatures that are calculated with (from memory).
    "carbon-film": Behaviour(_from_to(-1000.0, -150.0)),
    "metal-film": Behaviour(_either_way(100.0)),
    "carbon-composition": Behaviour(_either_way(1200.0)),
    "metal-oxide": Behaviour(_either_way(350.0)),
    "wirewound": Behaviour(_either_way(200.0)),
    "thick-film": Behaviour(_either_way(200.0)),
    "thin-film": Behaviour(_either_way(25.0)),
    # Pots. Cermet: data sheets of three trimmer series, +-100 ppm/K; the others from memory.
    "cermet": Behaviour(_either_way(100.0)),
    "carbon": Behaviour(_from_to(-1000.0, -300.0)),
    "conductive-plastic": Behaviour(_either_way(500.0)),
    # Films. Tempcos from memory; they stay inside the +-5 % (polyester) and +-2.5 %
    # (polypropylene) over the range of a table comparing dielectrics. Ranges from memory.
    "polyester": Behaviour(_from_to(400.0, 600.0), -55.0, 100.0),
    "polypropylene": Behaviour(_from_to(-250.0, -200.0), -55.0, 105.0),
    "polystyrene": Behaviour(_from_to(-150.0, -100.0), -40.0, 70.0),
    # The same table has +-5 % and +-1.5 % and no tempco. Films move evenly, so these limits are
    # taken to be reached in a straight line at the nearer end of the range (assumed).
    "pen": Behaviour(Envelope(0.05, 0.05, over=75.0)),
    "pps": Behaviour(Envelope(0.015, 0.015, over=75.0)),
    # From memory.
    "mica": Behaviour(_from_to(0.0, 70.0)),
    # A ceramic maker's table of EIA RS-198 codes: ranges and limits.
    "c0g": Behaviour(_either_way(30.0)),
    "x7r": Behaviour(Envelope(0.15, 0.15), -55.0, 125.0),
    "x5r": Behaviour(Envelope(0.15, 0.15), -55.0, 85.0),
    "y5v": Behaviour(Envelope(0.82, 0.22), -30.0, 85.0),
    "z5u": Behaviour(Envelope(0.56, 0.22), 10.0, 85.0),
    # The class was not said: the wider limits and the narrower range of Y5V and Z5U.
    "ceramic": Behaviour(Envelope(0.82, 0.22), 10.0, 85.0),
    "electrolytic": _ALUMINIUM,
    "electrolytic-low-leakage": _ALUMINIUM,
    "electrolytic-non-polar": _ALUMINIUM,
    # The table comparing dielectrics: +-10 % over the range; the range from memory.
    "tantalum": Behaviour(Envelope(0.1, 0.1), -55.0, 85.0),
}
"""Technology -> what temperature does to its parts."""

# A resistor may be of carbon or metal film, a pot of carbon or cermet: anything between.
_ANY_RESISTANCE = Behaviour(_from_to(-1000.0, 100.0))


def behaviour_of(part: Part) -> Behaviour:
    """Return what is known of a part; its own tempco, taken as +-, goes before its technology's.

    A part of unknown technology is taken for the worse of the usual ones of its kind.
    """
    technology = technology_of(part)
    if part.kind is Kind.CAPACITOR:
        known = BEHAVIOURS[taken_for(part)]
    else:
        known = _ANY_RESISTANCE if technology is None else BEHAVIOURS[technology.name]
    if part.tempco is None:
        return known
    own = abs(part.tempco)
    return Behaviour(Tempco(-own, own), known.coldest, known.hottest)


def change_of(part: Part, celsius: float) -> Change:
    """Return how far a part's value moves from the reference to a temperature.

    Parameters
    ----------
    part : any part. celsius : its temperature in degree Celsius.

    Returns
    -------
    Fractions of the value at 20 C, all 0 at 20 C. Typical is the middle of the tempco's range;
    0 where only limits are known. Beyond the rated range the law of the technology goes on.
    """
    return behaviour_of(part).law.change(celsius)


def outside_rating(part: Part, celsius: float) -> bool:
    """Tell whether parts of this technology are usually not rated for a temperature.

    Parameters
    ----------
    part : any part. celsius : its temperature in degree Celsius.
    """
    behaviour = behaviour_of(part)
    return not behaviour.coldest <= celsius <= behaviour.hottest


KELVIN_PER_DOUBLING = 10.0
"""Kelvin in which the leakage of an aluminium electrolytic doubles (from memory, rough)."""


def leak_factor(celsius: float, doubling: float = KELVIN_PER_DOUBLING) -> float:
    """Return how much more an electrolytic leaks than at 20 C.

    Parameters
    ----------
    celsius : temperature in degree Celsius. doubling : kelvin in which leakage doubles.

    Returns
    -------
    Dimensionless, 1 at 20 C and below 1 in the cold: 2^((T - 20 C) / doubling).
    """
    return float(2.0 ** ((celsius - REFERENCE_CELSIUS) / doubling))
