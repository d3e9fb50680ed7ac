"""How far a part may be from the value that is calculated with."""

from __future__ import annotations

from chooser.parts import Kind, Part, Tolerance
from chooser.technologies import tolerance_of

METER_ACCURACY = {
    # A hand-held meter's manual gives 0.8 % and 2 digits on its ordinary resistance ranges.
    Kind.RESISTOR: 0.01,
    Kind.POT: 0.01,
    Kind.TRIMMER: 0.01,
    # Common practice, no source: capacitance ranges of hand-held meters are 1 to 5 %.
    Kind.CAPACITOR: 0.05,
}
"""Accuracy assumed of a reading whose meter is not named, as a fraction."""


def limits_of(part: Part) -> Tolerance:
    """Return the limits around `part.effective`: the meter's accuracy, else the tolerance.

    Returns
    -------
    Printed limits, or those assumed of the part's technology where none are printed.
    """
    if part.measured is not None:
        meter = METER_ACCURACY[part.kind] if part.meter is None else part.meter
        return Tolerance(meter, meter)
    return tolerance_of(part)[0]
