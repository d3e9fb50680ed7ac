"""Reading what is typed into the slot of a circuit: parts, networks of them, holdings by id.

"820k 1%", "100u 20% electrolytic 25V", "10k + (22k 1% || 47k)", "#17 + #20". A part that is only
typed becomes a holding of its own, in no drawer, with an id below zero.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator
from contextlib import suppress
from itertools import count

from chooser.causes import kind_in
from chooser.circuits.circuit import Circuit
from chooser.cli.quick_entry import read_part
from chooser.cli.stock_view import describe
from chooser.errors import BadRequestError, ChooserError, UnreadableValueError
from chooser.networks import Leaf, Network, members, parse_network
from chooser.parts import Count, Holding, Kind, Sureness
from chooser.quantities import parse_capacitance, parse_resistance

LONGEST = 500
"""Characters of what is typed into a slot."""

MOST_PARTS = 50
"""Parts of a network that is typed; real ones have a handful."""

_HOLDING = re.compile(r"#\s?(\d{1,9})")
_SIGNS = re.compile(r"[+|()]")
# The + of a tolerance joins nothing: -20/+80%, +80/-20%, -20%+80%, +/-5%, +-5%.
_TOLERANCE = re.compile(
    r"-\s?[\d.,]+\s?%?\s?/?\s?\+\s?[\d.,]+\s?%|\+\s?[\d.,]+\s?%?\s?/?\s?-\s?[\d.,]+\s?%"
    r"|\+\s?/?\s?-\s?[\d.,]+\s?%"
)
_NO_JOIN = "\N{DOT PLUS}"


def read_slot(
    text: str, slot: str, circuit: Circuit, stock: Callable[[], Iterable[Holding]]
) -> Network[Holding]:
    """Read what is typed into a slot.

    Parameters
    ----------
    text : a part in words, holdings by id, or an expression of them with + and ||.
    slot : its name; parts of slot C are capacitors, of all others resistors.
    circuit : the circuit that has the slot.
    stock : gives the holdings; called only where the text speaks of one.

    Returns
    -------
    The network. Typed parts have made-up ids below zero, which differ from slot to slot, no
    drawer, and never run out.

    Raises
    ------
    BadRequestError
        In one sentence with the slot and the text: what is wrong, and what to write.
    StockError, SheetError
        The stock cannot be read.
    """
    if len(text) > LONGEST:
        raise BadRequestError(
            f"--{slot}: {len(text)} characters are no network; write one like 10k + (22k || 47k)."
        )
    ids = count(-1 - circuit.slots.index(slot), -len(circuit.slots))
    return _Reader(text, slot, circuit, ids, stock).network()


class _Reader:
    """What is needed to read one slot."""

    def __init__(
        self,
        text: str,
        slot: str,
        circuit: Circuit,
        ids: Iterator[int],
        stock: Callable[[], Iterable[Holding]],
    ) -> None:
        self.text = text
        self.slot = slot
        self.kind = kind_in(slot)
        self.has_both = circuit.capacitor and bool(circuit.resistors)
        self.ids = ids
        self.stock = stock

    def network(self) -> Network[Holding]:
        """Read the whole text as one part first, for a tolerance may hold a plus."""
        single = self.text.strip()
        if not _SIGNS.search(single) or _SIGNS.search(_TOLERANCE.sub("", single)) is None:
            return Leaf(self._member(single))
        try:
            network = parse_network(_TOLERANCE.sub(_unjoined, single), self._member)
        except UnreadableValueError as error:
            raise self._refused(error) from error
        if sum(1 for _ in members(network)) > MOST_PARTS:
            raise BadRequestError(
                f"--{self.slot}: a network of more than {MOST_PARTS} parts is none that anybody "
                "builds; write fewer."
            )
        return network

    def _member(self, text: str) -> Holding:
        """Read one part, typed or in the stock."""
        text = text.replace(_NO_JOIN, "+")
        if text.startswith("#"):
            return self._held(text)
        try:
            part = read_part(text, self.kind)
        except ChooserError as error:
            raise self._refused(error) from error
        return Holding(next(self.ids), part, "", Count(0, Sureness.PLENTY))

    def _held(self, text: str) -> Holding:
        """Find a holding by its id."""
        match = _HOLDING.fullmatch(text)
        if match is None:
            raise self._wrong(text, "is no holding; write # and its number alone, such as #17")
        number = int(match[1])
        found = next((each for each in self.stock() if each.id == number), None)
        if found is None:
            raise self._wrong(text, "is not in the stock; `chooser stock list` shows the numbers")
        kind = found.part.kind
        if kind in (Kind.POT, Kind.TRIMMER) and self.kind is Kind.RESISTOR:
            raise self._wrong(
                text, f"is a {describe(found.part)}; type the resistance that it is set to"
            )
        if kind is not self.kind:
            raise self._wrong(text, f"is a {describe(found.part)}, and no {self.kind}")
        return found

    def _refused(self, error: ChooserError) -> BadRequestError:
        """Say in one sentence, with the slot and the whole text, what another reader found."""
        swapped = "" if not isinstance(error, UnreadableValueError) else self._swapped(error)
        sentence = (swapped or str(error)).replace(_NO_JOIN, "+").replace("\n", " ")
        if any(sentence.startswith(f"{seen!r} ") for seen in (self.text, self.text.strip())):
            return BadRequestError(f"--{self.slot}: {sentence}")
        return BadRequestError(f"--{self.slot} {self.text!r}: {sentence}")

    def _swapped(self, error: UnreadableValueError) -> str:
        """Ask whether a value of the other kind belongs into the other slot; "" if it is none."""
        mine, other, parse = ("resistance", "capacitance", parse_capacitance)
        if self.kind is Kind.CAPACITOR:
            mine, other, parse = ("capacitance", "resistance", parse_resistance)
        if not self.has_both or not error.problem.startswith((f"is not a {mine}", f"is a {other}")):
            return ""
        with suppress(UnreadableValueError):
            parse(error.text)
            resistors = self.slot if self.kind is Kind.RESISTOR else "R"
            return f"{error.text!r} is a {other}, not a {mine}; are {resistors} and C swapped?"
        return ""

    def _wrong(self, seen: str, problem: str) -> BadRequestError:
        whole = "" if seen == self.text.strip() else f" {self.text!r}"
        return BadRequestError(f"--{self.slot}{whole}: {seen!r} {problem}.")


def _unjoined(match: re.Match[str]) -> str:
    return match[0].replace("+", _NO_JOIN)
