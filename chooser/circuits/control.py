"""A voltage forced on the control pin: it is the upper trip point.

The lower one follows it through the timer's own divider, so their ratio stays what it is.
"""

from __future__ import annotations

from chooser.circuits.timers import Timer
from chooser.errors import BadRequestError
from chooser.quantities import format_voltage

HIGHEST = 0.9
"""Of the supply: nearer, the last of the charging current drowns in the losses (our limit)."""

LOWEST_VOLT = 1.0
"""Common practice, no source: below it the comparators of a bipolar timer stop working."""


def check_control(timer: Timer, supply: float, control: float) -> float:
    """Return a control voltage (volt), if the timer can work with it.

    Raises
    ------
    BadRequestError
        Below about a volt, or so near to the supply that the interval would hardly end.
    """
    most = HIGHEST * supply
    if most < LOWEST_VOLT:
        raise BadRequestError(
            f"A supply of {format_voltage(supply)} leaves no room for a control voltage; "
            "take a higher supply or leave the control pin alone."
        )
    if LOWEST_VOLT <= control <= most:
        return control
    raise BadRequestError(
        f"The {timer.name} timer cannot trip at {format_voltage(control)} with a supply of "
        f"{format_voltage(supply)}; choose a control voltage between {format_voltage(LOWEST_VOLT)} "
        f"and {format_voltage(most, digits=3)}."
    )


def control_text(control: float | None) -> str:
    """Say what is forced on the control pin, "" where it is open."""
    return "" if control is None else f"control pin at {format_voltage(control)}"
