"""What is asked and what is answered, as frozen records."""

from __future__ import annotations

from dataclasses import dataclass

from chooser.cautions import Caution
from chooser.circuits.timers import Timer
from chooser.interval import Outlook
from chooser.networks import Network
from chooser.parts import Holding
from chooser.search.terms import Rank, Rule


@dataclass(frozen=True, slots=True)
class Request:
    """A monostable that is wanted.

    Attributes
    ----------
    target : interval in second, > 0.
    timer : the timer. supply : its supply in volt.
    within : half width of the accepted band, relative to the target.
    rank : the order. top : number of fits wanted.
    boards : boards to be built alike; all share the free counts.
    most_resistors, most_capacitors : parts a slot may have.
    lifted : the house rules that do not apply.
    """

    target: float
    timer: Timer
    supply: float
    within: float = 0.02
    rank: Rank = Rank.BALANCED
    top: int = 10
    boards: int = 1
    most_resistors: int = 3
    most_capacitors: int = 2
    lifted: frozenset[Rule] = frozenset()

    @property
    def band(self) -> tuple[float, float]:
        """Shortest and longest accepted interval in second."""
        return self.target * (1 - self.within), self.target * (1 + self.within)


@dataclass(frozen=True, slots=True)
class Refusal:
    """What a house rule kept out.

    Attributes
    ----------
    rule : the rule. why : one sentence that says what was kept out and for what reason.
    holdings : ids of the holdings kept out as a whole; empty where it is networks that are.
    """

    rule: Rule
    why: str
    holdings: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class Fit:
    """An answer: a network for each slot, and what it will really do.

    Attributes
    ----------
    resistor, capacitor : the networks of holdings.
    resistance, capacitance : their values in ohm and farad.
    error : (nominal interval - target) / target.
    outlook : nominal, corners, spread, chance.
    likely_miss : root of mean error squared plus spread squared.
    in_band : whether the nominal interval is inside the accepted band.
    cautions : the one that matters most first.
    why : why it ranks before the next fit, or "" for the last.
    """

    resistor: Network[Holding]
    capacitor: Network[Holding]
    resistance: float
    capacitance: float
    error: float
    outlook: Outlook
    likely_miss: float
    in_band: bool
    cautions: tuple[Caution, ...]
    why: str = ""


@dataclass(frozen=True, slots=True)
class Searched:
    """What the search covered.

    Attributes
    ----------
    combinations : circuits in the space, listed or covered by argument.
    complete : whether the answer is proven for the whole space.
    limit : what alone was weighed, or was not covered; "" where complete.
    seconds : time taken.
    """

    combinations: int
    complete: bool
    limit: str
    seconds: float


@dataclass(frozen=True, slots=True)
class Answer:
    """The ranked fits with all that is to be said about them.

    Attributes
    ----------
    request : what was asked. fits : best first. searched : what was covered.
    refusals : what the house rules kept out.
    advice : sentences that say what to do where nothing lies in the band; else empty.
    """

    request: Request
    fits: tuple[Fit, ...]
    searched: Searched
    refusals: tuple[Refusal, ...]
    advice: tuple[str, ...] = ()
