"""The monostable: after a trigger one capacitor charges through one resistor until the timer trips.

    t = R C ln(V / (V - a V)), at a = 2/3: R C ln 3 (data sheets print 1.1 R C)

with what the discharge switch leaves at the start, what the timer draws and what the capacitor
leaks taken into account as `chooser.circuits.charging` does.
"""

from __future__ import annotations

from math import inf, log, log1p

from chooser.circuits.charging import Phase
from chooser.circuits.circuit import Bounds, Circuit
from chooser.circuits.control import check_control, control_text
from chooser.circuits.timers import Timer
from chooser.parts import Tolerance

LN3 = log(3.0)
"""Interval over R C of the textbook monostable, which trips at two thirds of the supply."""

LEAST_OHM = 1e3
"""Smallest timing resistor of the fixtures that data sheets give their timing error for."""

MOST_OHM = 10e6
"""Common practice, no source: above it the surface of the board is part of the circuit."""

TRIP_RATIO = 10.0
"""Charging current at the trip point over the timer's own currents that must remain."""

LEAST_FARAD = 1e-9
"""Least timing capacitance: 10 pF of strays, a usual figure, are then 1 %."""


def monostable(timer: Timer, supply: float, control: float | None = None) -> Circuit:
    """Return the circuit of a timer.

    Parameters
    ----------
    timer : the timer. supply : in volt.
    control : voltage in volt forced on the control pin, which is then the trip point; or None.

    Raises
    ------
    BadRequestError
        A control voltage that the timer cannot work with.
    """
    trip = timer.threshold
    if control is not None:
        trip = check_control(timer, supply, control) / supply
    return Circuit(
        family="monostable",
        title="One-shot",
        device=f"{timer.name} timer",
        supply=supply,
        resistors=("R",),
        capacitor=True,
        outputs=("interval",),
        typical=_typical(timer, supply, trip),
        corners=(_earliest(timer, supply, trip), _latest(timer, supply, trip)),
        error=Tolerance(timer.timing_error_limit, timer.timing_error_limit),
        bounds=timer_bounds(timer, supply, trip),
        least_farad=LEAST_FARAD,
        lossless=timer.ideal,
        shortest=timer.shortest_interval,
        timer=timer,
        temperature_drift=timer.temperature_drift_limit,
        supply_drift=timer.supply_drift_limit,
        setting=control_text(control),
        control=control,
    )


def timer_bounds(timer: Timer, supply: float, trip: float) -> Bounds:
    """Return the resistances that the house rule allows for a timing resistor.

    While the timer rests its discharge switch carries supply / R, so R must keep that below
    the current the switch is specified for, and it must not be below the 1 kohm at which the
    data sheets' timing-error fixtures start. At the trip point only supply x (1 - a) / R is
    left for charging; where that equals the timer's own currents the interval never ends
    (15 V and 250 nA make 20 Mohm, as LM555 and HA17555 sheets print), and a tenth of that
    resistance keeps the currents' part of the interval below 7 %. Above 10 Mohm ordinary
    boards leak as much as the parts do (common practice, no source).

    Parameters
    ----------
    timer : the timer. supply : supply voltage in volt, > 0. trip : its fraction a that counts.

    Returns
    -------
    Bounds in ohm; none for the ideal timer.
    """
    if timer.ideal:
        return Bounds()
    least = max(LEAST_OHM, supply / timer.discharge_current_limit)
    current = timer.threshold_current_limit + timer.discharge_leakage_limit
    most = inf if current == 0.0 else supply * (1.0 - trip) / (TRIP_RATIO * current)
    return Bounds(
        least,
        min(most, MOST_OHM),
        "discharge-pin current",
        f"the {timer.name} timer's own currents and board leakage",
    )


def _typical(timer: Timer, supply: float, trip: float) -> Phase:
    """Return the timer as its typical figures describe it."""
    if timer.ideal:
        return _textbook(supply, trip)
    current = timer.threshold_current_typical + timer.discharge_leakage_typical
    return Phase(supply, trip, current, timer.discharge_resistance_typical)


def _earliest(timer: Timer, supply: float, trip: float) -> Phase:
    """Return the corner of shortest intervals: no currents, poorest discharge."""
    if timer.ideal:
        return _textbook(supply, trip)
    return Phase(supply, trip, 0.0, timer.discharge_resistance_limit)


def _latest(timer: Timer, supply: float, trip: float) -> Phase:
    """Return the corner of longest intervals: limit currents, full discharge."""
    if timer.ideal:
        return _textbook(supply, trip)
    return Phase(supply, trip, timer.threshold_current_limit + timer.discharge_leakage_limit)


def _textbook(supply: float, trip: float) -> Phase:
    """Return R C ln 3, or what another trip point makes of it."""
    return Phase(supply, trip, factor=LN3 if trip == 2.0 / 3.0 else -log1p(-trip))
