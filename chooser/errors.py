"""The error family, the exit statuses, and the finding.

Every error is one plain sentence that names what was seen and what to do about it.
The command line turns an error into that sentence on stderr and its exit status;
nothing else in the program prints an error.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum


class Exit(IntEnum):
    """What the process tells its caller."""

    ANSWERED = 0
    """The question was answered."""
    OUR_FAULT = 1
    """A fault in chooser itself."""
    BAD_INPUT = 2
    """The words, the file or the database were wrong."""
    STOCK_SHORT = 3
    """Answered, but the stock cannot do it."""


@dataclass(frozen=True, slots=True)
class Finding:
    """One fault in a file: where it is, what was seen, what to do.

    Attributes
    ----------
    file : name of the file, as the user gave it.
    row : row number as a spreadsheet shows it (the heading is row 1), or None for the whole file.
    column : the heading of the column, or None for the whole row.
    seen : the offending text, or "" where there is none.
    problem : what is wrong with it, without a closing full stop.
    advice : what to do, without a closing full stop, or "".
    """

    file: str
    row: int | None
    column: str | None
    seen: str
    problem: str
    advice: str = ""

    def __str__(self) -> str:
        place = self.file
        if self.row is not None:
            place += f" row {self.row}"
        if self.column is not None:
            place += f", column {self.column}"
        seen = f"{self.seen!r} " if self.seen else ""
        advice = f"; {self.advice}" if self.advice else ""
        return f"{place}: {seen}{self.problem}{advice}."


class ChooserError(Exception):
    """Root of the family: a sentence for the user and an exit status."""

    status: Exit = Exit.BAD_INPUT


class BadRequestError(ChooserError, ValueError):
    """The options contradict each other or ask for something that cannot be."""


class UnreadableValueError(ChooserError, ValueError):
    """A text that is no value of the kind asked for.

    Attributes
    ----------
    text : what was read.
    problem : why it was refused, without the text and without a full stop.
    advice : what to write instead, or "".
    """

    def __init__(self, text: str, problem: str, advice: str = "") -> None:
        self.text = text
        self.problem = problem
        self.advice = advice
        super().__init__(f"{text!r} {problem}{'; ' + advice if advice else ''}.")


class AmbiguousValueError(UnreadableValueError):
    """A text with more than one reading; it is refused with all of them.

    Attributes
    ----------
    readings : what the text could mean, each as the user could type it.
    """

    def __init__(self, text: str, readings: Sequence[str], problem: str = "") -> None:
        self.readings = tuple(readings)
        super().__init__(
            text,
            problem or "can be read in more than one way",
            "write " + " or ".join(self.readings),
        )


class UnknownNameError(ChooserError, LookupError):
    """A name (a timer, a rule, a drawer) that nobody knows."""


class SheetError(ChooserError, ValueError):
    """One or more faults in the sheets; nothing was loaded.

    Attributes
    ----------
    findings : every fault, in file and row order.
    """

    def __init__(self, findings: Sequence[Finding]) -> None:
        self.findings = tuple(findings)
        super().__init__("\n".join(str(finding) for finding in self.findings))


class StockError(ChooserError):
    """The stock refuses: too few free parts, no such holding, or an unusable database."""


class StockShortError(ChooserError):
    """The stock cannot do what was asked; the sentence says what is missing."""

    status = Exit.STOCK_SHORT


class SelfCheckError(ChooserError):
    """An answer failed its own re-check: a fault of chooser, never of the user."""

    status = Exit.OUR_FAULT
