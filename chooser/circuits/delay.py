"""An RC delay: how long a node takes after switching on to reach a threshold.

    t = R C ln(1 / (1 - a)) to a fraction a of the supply

for a step of the supply and an unloaded node: power-on resets, slow enables. A threshold that
is only known within limits scatters between them; a leak may keep the node below a high one.
"""

from __future__ import annotations

from chooser.circuits.charging import Phase
from chooser.circuits.circuit import EXACT, Bounds, Circuit, limits_text
from chooser.circuits.monostable import LEAST_FARAD, MOST_OHM
from chooser.circuits.scattering import scattered
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
    least = threshold * (1.0 - error.minus)
    ends = (threshold,) if error == EXACT else (least, most)
    return Circuit(
        family="delay",
        title="RC delay",
        device="",
        supply=supply,
        resistors=("R",),
        capacitor=True,
        outputs=("interval",),
        typical=Phase(supply, threshold),
        corners=tuple(Phase(supply, end) for end in ends),
        scatter=scattered((threshold, least, most), lambda trip: Phase(supply, trip)),
        bounds=Bounds(0.0, MOST_OHM, "", "leakage of the board"),
        least_farad=LEAST_FARAD,
        setting=f"until {format_percent(threshold, digits=4)} of the supply{limits_text(error)}",
    )
