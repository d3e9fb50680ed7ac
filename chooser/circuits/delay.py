"""An RC delay: how long a node takes after switching on to reach a threshold.

    t = R C ln(1 / (1 - a)) to a fraction a of the supply

for a step of the supply and an unloaded node: power-on resets, slow enables.
"""

from __future__ import annotations

from math import log1p

from chooser.circuits.charging import Phase
from chooser.circuits.circuit import Bounds, Circuit
from chooser.circuits.monostable import LEAST_FARAD, MOST_OHM
from chooser.errors import BadRequestError
from chooser.parts import Tolerance
from chooser.quantities import format_percent

HIGHEST = 0.95
"""Of the supply: nearer, the last bit of the charge takes for ever (our limit)."""


def delay(supply: float, threshold: float, error: Tolerance) -> Circuit:
    """Return the circuit.

    Parameters
    ----------
    supply : in volt. threshold : where the input turns, as a fraction of the supply.
    error : of the threshold, relative.

    Raises
    ------
    BadRequestError
        A threshold that may not be reached in good time.
    """
    if not threshold > 0.0:
        raise BadRequestError(
            "A threshold at or below 0 V is reached at once; write one such as 50% or 2.5V."
        )
    most = threshold * (1.0 + error.plus)
    if most > HIGHEST:
        raise BadRequestError(
            f"A threshold that may be {format_percent(most, digits=3)} of the supply is not "
            f"reached in any dependable time; it has to stay below {format_percent(HIGHEST)}."
        )
    usual = _factor(threshold)
    least = _factor(threshold * (1.0 - error.minus))
    law = Phase(supply, threshold)
    return Circuit(
        family="delay",
        title="RC delay",
        device="",
        supply=supply,
        resistors=("R",),
        capacitor=True,
        outputs=("interval",),
        typical=law,
        corners=(law,),
        error=Tolerance(1.0 - least / usual, _factor(most) / usual - 1.0),
        bounds=Bounds(0.0, MOST_OHM, "", "leakage of the board"),
        least_farad=LEAST_FARAD,
    )


def _factor(threshold: float) -> float:
    """Return the delay over R C to a fraction of the supply."""
    return -log1p(-threshold)
