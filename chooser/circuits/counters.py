"""The figures of oscillator + ripple counter chips, read from one table; a user's file adds.

The oscillator's period is k Rt Ct, with a second resistor Rs of a few times Rt in series with
its input. An output behind n stages has a period of 2^n of the oscillator's; after a reset it
rises for the first time at half of that, after 2^(n-1).
"""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from chooser.circuits.figure_values import Number, Rows, Text
from chooser.circuits.figures import Catalogue, check_order
from chooser.errors import BadRequestError

_MOST_STAGES = 32


@dataclass(frozen=True, slots=True)
class Output:
    """One way to take a divided frequency from a counter.

    Attributes
    ----------
    name : of the output, counted by its stages (Q4 is behind four); or the pins that select it.
    stages : number of divider stages n. pin : pin number, 0 where it is not known.
    printed : the name in the maker's own sheet where that differs, or "".
    source : where the row is from.
    """

    name: str
    stages: int
    pin: int
    printed: str
    source: str

    @property
    def ratio(self) -> int:
        """Oscillator periods in a whole period of this output."""
        return int(2**self.stages)

    @property
    def first_rise(self) -> int:
        """Oscillator periods from the end of a reset to the first rise."""
        return int(2 ** (self.stages - 1))


@dataclass(frozen=True, slots=True)
class Counter:
    """What the data sheet of one oscillator + ripple counter says; T = period_factor Rt Ct.

    Attributes
    ----------
    name : type. title : what it is, in words. number : bare number, or "".
    supply_min, supply_max : supply voltage in volt.
    period_factor : k of the oscillator's period.
    rule_minus, rule_plus : how far a period may lie below and above the rule, fractions of it.
    smallest_resistor, largest_resistor : timing resistor Rt, ohm.
    smallest_capacitor : timing capacitor Ct, farad.
    series_least, series_most : second resistor Rs, in multiples of Rt.
    highest_frequency : of the oscillator by the rule, hertz.
    outputs : in ascending order of their stages.
    sources : (figure, where it is from) pairs; not part of equality.
    """

    name: str
    title: str
    number: str
    supply_min: float
    supply_max: float
    period_factor: float
    rule_minus: float
    rule_plus: float
    smallest_resistor: float
    largest_resistor: float
    smallest_capacitor: float
    series_least: float
    series_most: float
    highest_frequency: float
    outputs: tuple[Output, ...]
    sources: tuple[tuple[str, str], ...] = field(default=(), compare=False, repr=False)


def counter_named(name: str, file: Path | None = None) -> Counter:
    """Return the counter of a name, in any mixture of upper and lower case.

    Parameters
    ----------
    name : a type; a bare number only where one type alone has it.
    file : a file of the form of counters.toml with more types, or None.

    Raises
    ------
    UnknownNameError
        No such counter, or a number whose makers differ; the sentence names them.
    BadRequestError
        The file cannot be read or a figure in it cannot be; the sentence names file and key.
    """
    return COUNTERS.named(name, file)


def counter_names(file: Path | None = None) -> tuple[str, ...]:
    """Return the names of all counters, those of the file last (errors as in `counter_named`)."""
    return tuple(COUNTERS.known(file))


def check_counter_supply(counter: Counter, supply: float) -> None:
    """Refuse a supply voltage (volt) that the counter does not work at.

    Raises
    ------
    BadRequestError
        Outside the counter's supply range.
    """
    COUNTERS.check_supply(counter, supply)


def check_ratio(counter: Counter, ratio: int) -> Output:
    """Return the output that divides by a ratio.

    Raises
    ------
    BadRequestError
        No pin divides by it; the sentence names the next ones.
    """
    for output in counter.outputs:
        if output.ratio == ratio:
            return output
    below = [output for output in counter.outputs if output.ratio < ratio][-1:]
    above = [output for output in counter.outputs if output.ratio > ratio][:1]
    near = " and ".join(f"{output.ratio} ({output.name})" for output in (*below, *above))
    verb = "are" if below and above else "is"
    raise BadRequestError(
        f"The division by {ratio} has no pin on a {counter.name}; next {verb} {near}."
    )


def _check(counter: Counter, place: str) -> None:
    """Refuse figures that contradict each other."""
    pairs = (
        ("supply_min", "supply_max"),
        ("smallest_resistor", "largest_resistor"),
        ("series_least", "series_most"),
    )
    check_order(counter, pairs, place)
    where = f"{place}, key outputs"
    stages = [output.stages for output in counter.outputs]
    if stages != sorted(set(stages)):
        raise BadRequestError(
            f"{where}: the stages are {', '.join(f'{n:g}' for n in stages)}; "
            "write each once, the fewest first."
        )
    if stages[-1] > _MOST_STAGES:
        raise BadRequestError(f"{where}: {stages[-1]:g} stages are more than {_MOST_STAGES}.")
    names = [output.name for output in counter.outputs]
    if "" in names or len(set(names)) < len(names):
        raise BadRequestError(f"{where}: give each output a name of its own.")


_POSITIVE = Number(above_zero=True)

COUNTERS = Catalogue(
    record=Counter,
    noun="counter",
    file="counters.toml",
    model="MC14060B",
    keys={
        "number": Text(),
        "supply_min": _POSITIVE,
        "supply_max": _POSITIVE,
        "period_factor": _POSITIVE,
        "rule_minus": Number(below_one=True),
        "rule_plus": Number(),
        "smallest_resistor": _POSITIVE,
        "largest_resistor": Number(above_zero=True, may_be_endless=True),
        "smallest_capacitor": _POSITIVE,
        "series_least": _POSITIVE,
        "series_most": _POSITIVE,
        "highest_frequency": _POSITIVE,
        "outputs": Rows(
            Output,
            {
                "name": Text(),
                "stages": Number(above_zero=True, whole=True),
                "pin": Number(whole=True, default=lambda _key, _values: (0, "default: not known")),
                "printed": Text(),
            },
        ),
    },
    check=_check,
)
"""The counters, from counters.toml."""
