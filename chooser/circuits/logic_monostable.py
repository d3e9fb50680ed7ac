"""Logic one-shots: an interval of K R C, with K by type, maker's edition and supply.

The capacitor's leak is taken into account as in a node that charges from 0 V to 1 - exp(-K) of
the supply, which takes K R C without a leak: what goes on inside such a chip is not printed,
but every one of them charges its capacitor through R (an assumption, and no more). Some rules
add a fixed resistance to R, as 0.28 R C (1 + 0.7 kohm / R) does.
"""

from __future__ import annotations

from math import expm1

from chooser.circuits.charging import Phase
from chooser.circuits.circuit import Circuit, sheet_bounds
from chooser.circuits.one_shots import OneShot, factor
from chooser.circuits.schmitt import MEASURED, measured_text
from chooser.parts import Tolerance


def logic_monostable(
    one_shot: OneShot,
    supply: float,
    measured: float | None = None,
    accuracy: Tolerance | None = None,
) -> Circuit:
    """Return the circuit of a one-shot chip.

    Parameters
    ----------
    one_shot : the chip. supply : in volt.
    measured : K as measured on the piece that is owned, or None.
    accuracy : of that factor; two percent where it is not known.

    Raises
    ------
    BadRequestError
        A supply that the chip does not work at.
    """
    published = factor(one_shot, supply)
    error = Tolerance(one_shot.factor_minus, one_shot.factor_plus)
    if measured is not None:
        error = accuracy or MEASURED
    k = published if measured is None else measured
    law = Phase(supply, -expm1(-k), series=one_shot.extra_ohm)
    return Circuit(
        family="logic-monostable",
        title="Logic one-shot",
        device=one_shot.name,
        supply=supply,
        resistors=("R",),
        capacitor=True,
        outputs=("interval",),
        typical=law,
        corners=(law,),
        error=error,
        bounds=sheet_bounds(one_shot.smallest_resistor, one_shot.largest_resistor),
        least_farad=one_shot.smallest_capacitor,
        most_farad=one_shot.largest_capacitor,
        alternating=one_shot.alternating,
        setting="" if measured is None else measured_text(k, error),
    )
