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
        A threshold that is not reached in good time.
    """
    if not 0.0 < threshold <= HIGHEST:
        raise BadRequestError(
            f"A threshold of {format_percent(threshold, digits=3)} of the supply is not reached "
            f"in any dependable time; write one below {format_percent(HIGHEST)}."
        )
    usual = _factor(threshold)
    least = _factor(threshold * (1.0 - error.minus))
    most = _factor(min(threshold * (1.0 + error.plus), HIGHEST))
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
        error=Tolerance(1.0 - least / usual, most / usual - 1.0),
        bounds=Bounds(0.0, MOST_OHM, "", "leakage of the board"),
        least_farad=LEAST_FARAD,
    )


def _factor(threshold: float) -> float:
    """Return the delay over R C to a fraction of the supply."""
    return -log1p(-threshold)
