"""What an output may carry: the same refusal wherever something hangs on one."""

from __future__ import annotations

from chooser.errors import BadRequestError
from chooser.quantities import format_current


def check_output(
    device: str, most: float, wanted: float, what: str, *, verb: str = "source", way: str = ""
) -> None:
    """Refuse a current that an output may not carry.

    Parameters
    ----------
    device : whose output it is. most, wanted : in ampere.
    what : what wants the current, up to the figure, such as "the load takes".
    verb : source or sink. way : another way out, after "drive it by a transistor".

    Raises
    ------
    BadRequestError
        More is wanted than the output may carry.
    """
    if wanted > most:
        raise BadRequestError(
            f"The output of the {device} can {verb} {format_current(most, digits=3)}, and {what} "
            f"{format_current(wanted, digits=3)}; drive it by a transistor{way}."
        )
