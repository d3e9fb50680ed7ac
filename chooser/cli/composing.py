"""Commands made from parts: a function whose options are put together from shared ones.

Typer reads a command's options from the signature of its function; ten families with two
commands each would repeat the same twenty options twenty times, so the signature is composed.
"""

from __future__ import annotations

import inspect
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True, slots=True)
class Parameter:
    """One option or argument.

    Attributes
    ----------
    name : under which the command receives it. kind : its annotated type, as Typer wants it.
    default : value where it is not given; `REQUIRED` where it must be.
    """

    name: str
    kind: Any
    default: Any = None


REQUIRED = inspect.Parameter.empty


def composed(
    run: Callable[[dict[str, Any]], None], parameters: Sequence[Parameter], text: str
) -> Callable[..., None]:
    """Return a function for Typer that hands all its options over as one mapping.

    Parameters
    ----------
    run : receives the options by name. parameters : the options, in the order of the help.
    text : the help.
    """

    def command(**options: Any) -> None:
        run(options)

    command.__doc__ = text
    command.__annotations__ = {}
    command.__signature__ = inspect.Signature(  # type: ignore[attr-defined]
        [
            inspect.Parameter(
                each.name,
                inspect.Parameter.KEYWORD_ONLY,
                default=each.default,
                annotation=each.kind,
            )
            for each in parameters
        ]
    )
    return command
