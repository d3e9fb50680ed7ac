"""What is asked and what is answered, as frozen records."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from typing import TypeVar

from chooser.cautions import Caution
from chooser.circuits.circuit import Circuit, Variant
from chooser.interval import Outlook
from chooser.networks import Network, members
from chooser.parts import Holding
from chooser.search.terms import Rank, Rule

V = TypeVar("V", float, Fraction)

_ROUNDING = 1e-12

ANY_DUTY = 1e-6
"""From so little to one less so little a duty may be anything."""


@dataclass(frozen=True, slots=True)
class Target:
    """What one output is to be.

    Attributes
    ----------
    output : its name.
    low, high : the accepted range, both ends included; equal where one value is wanted. Second,
        a fraction for a duty, ohm or farad.
    frequency : in hertz, where a period was asked for by its frequency.
    called : what the output is called by who asked, such as "on"; "" for its own name.
    """

    output: str
    low: float
    high: float
    frequency: float | None = None
    called: str = ""

    @property
    def is_range(self) -> bool:
        """Whether anything between two ends is as good."""
        return self.low < self.high

    @property
    def is_free(self) -> bool:
        """Whether it is a duty that may be anything: then nothing was asked of it."""
        return self.output == "duty" and self.low <= ANY_DUTY and self.high >= 1 - ANY_DUTY

    def error(self, value: V) -> V:
        """Return how far a value is from the target, relative; 0 inside a range."""
        low, high = type(value)(self.low), type(value)(self.high)
        if value < low:
            return value / low - 1
        return value / high - 1 if value > high else type(value)(0)

    def band(self, within: float) -> tuple[float, float]:
        """Return the least and the most that is accepted; a range is meant as it is written."""
        if self.is_range:
            return self.low, self.high
        return self.low * (1 - within), self.high * (1 + within)


@dataclass(frozen=True, slots=True)
class Request:
    """A timing circuit that is wanted.

    Attributes
    ----------
    circuit : the circuit, everything fixed but its timing parts.
    targets : what its outputs are to be, one or two.
    within : half width of the accepted band, relative to the target.
    rank : the order. top : number of fits wanted.
    boards : boards to be built alike; all share the free counts.
    most_resistors, most_capacitors : parts a slot may have.
    lifted : the house rules that do not apply.
    ranges_hold : whether a circuit outside a wanted range is no answer at all; the search lifts
        it where no circuit is inside, to show the nearest.
    """

    circuit: Circuit
    targets: tuple[Target, ...]
    within: float = 0.02
    rank: Rank = Rank.BALANCED
    top: int = 10
    boards: int = 1
    most_resistors: int = 3
    most_capacitors: int = 2
    lifted: frozenset[Rule] = frozenset()
    ranges_hold: bool = True

    @property
    def target(self) -> float:
        """The value wanted of the chief output, where it alone has a target."""
        return self.targets[0].low

    @property
    def bands(self) -> dict[str, tuple[float, float]]:
        """Least and most accepted value by output."""
        return {target.output: target.band(self.within) for target in self.targets}

    def accepts(self, values: dict[str, float]) -> bool:
        """Tell whether outputs lie inside every band."""
        return all(
            low * (1 - _ROUNDING) <= values[output] <= high * (1 + _ROUNDING)
            for output, (low, high) in self.bands.items()
        )


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
class Slot:
    """A slot of a fit: its name, the network in it, and the network's value (ohm or farad)."""

    name: str
    network: Network[Holding]
    value: float


@dataclass(frozen=True, slots=True)
class Fit:
    """An answer: a network for each slot, and what it will really do.

    Attributes
    ----------
    slots : in the order of the circuit, the capacitor last. variant : how the output is taken.
    outlook : nominal, corners, spread, chance.
    errors : (nominal - target) / target by output with a target; error : the largest of them.
    spread : one sigma of the chief output, relative.
    likely_miss : root of mean error squared plus spread squared, the largest of any target.
    in_band : whether every nominal output is inside its accepted band.
    cautions : the one that matters most first.
    why : why it ranks before the next fit, or "" for the last.
    """

    slots: tuple[Slot, ...]
    variant: Variant
    outlook: Outlook
    errors: dict[str, float]
    error: float
    spread: float
    likely_miss: float
    in_band: bool
    cautions: tuple[Caution, ...]
    why: str = ""

    @property
    def parts(self) -> int:
        """Parts in all."""
        return sum(1 for _ in self.holdings())

    def slot(self, name: str) -> Slot:
        """Return a slot by its name."""
        return next(slot for slot in self.slots if slot.name == name)

    def holdings(self) -> Iterator[Holding]:
        """Yield the holding of every part, repeats included."""
        for slot in self.slots:
            yield from members(slot.network)


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
    ways_out : sentences that name a circuit of the same stock that surely ends, where the first
        fit may not; else empty.
    """

    request: Request
    fits: tuple[Fit, ...]
    searched: Searched
    refusals: tuple[Refusal, ...]
    advice: tuple[str, ...] = ()
    ways_out: tuple[str, ...] = ()
