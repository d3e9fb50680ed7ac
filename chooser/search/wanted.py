"""What resistances a capacitor wants, to make the targets exactly."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from chooser.search.pools import Floats
from chooser.search.request import Request
from chooser.search.slots import charging_bounds

LEAST_OHM, FAR_OHM = 1e-3, 1e9
"""Ohm below and beyond which a resistor is as good as none, or as an open end."""

_ROUNDS = 3  # the two resistors of a circuit couple weakly


def aim_of(request: Request) -> tuple[float, float]:
    """Return the high and the low time in second that two-resistor targets mean.

    Of a range of duties its middle is meant.
    """
    wanted = {target.output: (target.low + target.high) / 2 for target in request.targets}
    if "high" in wanted:
        return wanted["high"], wanted["low"]
    least = request.circuit.twin.least_duty
    ends = next((t.low, t.high) for t in request.targets if t.output == "duty")
    duty = (max(ends[0], least) + ends[1]) / 2
    return wanted["period"] * duty, wanted["period"] * (1 - duty)


def wanted_resistances(request: Request, farad: ArrayLike, leak: ArrayLike) -> tuple[Floats, ...]:
    """Return what every resistor slot should be beside given capacitors.

    Parameters
    ----------
    request : what is asked. farad, leak : of the capacitors, in farad and siemens; broadcast.

    Returns
    -------
    Ohm for each slot; 0 or less, or infinite, where there is no such resistance. The first
    variant of the circuit counts.
    """
    circuit = request.circuit
    if not circuit.resistors:
        return ()
    if len(circuit.resistors) == 1:
        scale = circuit.variants[0].scale
        return (circuit.law.resistance(request.target / scale, farad, leak),)
    farad, leak = np.broadcast_arrays(*(np.asarray(x, np.float64) for x in (farad, leak)))
    return _pair(request, farad, leak)


def _pair(request: Request, farad: Floats, leak: Floats) -> tuple[Floats, Floats]:
    """Return RA and RB; infinite where more would be needed than the rules or the losses allow."""
    law, (high, low) = request.circuit.twin, aim_of(request)
    most = charging_bounds(leak, request)[1]
    rb = law.rb_for(low, np.full(farad.shape, FAR_OHM), farad, leak)
    ra = np.full(farad.shape, np.inf)
    ceiling = np.minimum(most, FAR_OHM)
    longest = law.times((ceiling, np.minimum(rb, ceiling)), farad, leak)[0]
    reached = np.flatnonzero((rb <= most) & (longest >= high))
    farad, leak = farad[reached], leak[reached]
    for _ in range(_ROUNDS):
        # What cannot be is cut off at a milliohm, so that the rest can still be worked out.
        ra[reached] = law.ra_for(high, np.maximum(rb[reached], LEAST_OHM), farad, leak)
        rb[reached] = law.rb_for(low, np.maximum(ra[reached], LEAST_OHM), farad, leak)
    return ra, rb
