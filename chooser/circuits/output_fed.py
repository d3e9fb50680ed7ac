"""The output-fed astable: one resistor from the output to the node of both comparators.

    high = R C ln((Voh - b V) / (Voh - a V)),  low = R C ln((a V - Vol) / (b V - Vol))

with the output's real levels Voh and Vol; only where they reach the rails are both R C ln 2.
The output's own resistance stands in series with R. The levels scatter from piece to piece;
where Voh does not clear the upper trip point the circuit stalls: a bipolar output at 5 V is that
low.
"""

from __future__ import annotations

from math import inf, log

from chooser.circuits.astable import OUTPUTS, shortest_period
from chooser.circuits.charging import Phase, falling, rising
from chooser.circuits.circuit import Bounds, Circuit
from chooser.circuits.laws import Train
from chooser.circuits.monostable import LEAST_FARAD, MOST_OHM, TRIP_RATIO
from chooser.circuits.output import check_output
from chooser.circuits.scattering import Figure, Scatter, scattered_pair
from chooser.circuits.timers import Timer
from chooser.errors import BadRequestError
from chooser.parts import Tolerance
from chooser.quantities import format_current, format_voltage

_HARDLY = 1e-6  # of the supply: a source that hardly moves the node

LEAST_OHM = 1e3
"""Common practice, no source: below it R is a load of its own on the output."""

LEAST_RATIO = 10.0
"""Least R over the output's own resistance, which differs high and low and spoils the duty."""


def output_fed(timer: Timer, supply: float, load: float = 0.0) -> Circuit:
    """Return the circuit of a timer.

    Parameters
    ----------
    timer : the timer. supply : in volt.
    load : what else hangs between output and ground, in ampere while the output is high.

    Raises
    ------
    BadRequestError
        A load beyond what the output may source, or a high output that does not clear the upper
        trip point: the circuit would stall.
    """
    check_output(f"{timer.name} timer", timer.source_current_limit, load, "the load takes")
    typical = _high_level(timer, supply, load, timer.output_high_drop_typical)
    if typical <= timer.threshold:
        _refuse(timer, supply, load, typical)
    error = timer.astable_error_limit
    return Circuit(
        family="output-fed",
        title="Output-fed astable",
        device=f"{timer.name} timer",
        supply=supply,
        resistors=("R",),
        capacitor=True,
        outputs=OUTPUTS,
        typical=_train(timer, supply, typical, timer.output_low_typical, _usual(timer)),
        corners=_corners(timer, supply, load),
        error=Tolerance(error, error),
        scatter=_scatter(timer, supply, load),
        bounds=_bounds(timer, supply, typical),
        least_farad=LEAST_FARAD,
        lossless=timer.ideal,
        shortest=shortest_period(timer),
        timer=timer,
        first=Train((_high(timer, supply, typical, 0.0, _usual(timer)),)),
        temperature_drift=timer.astable_temperature_drift_limit,
        supply_drift=timer.astable_supply_drift_limit,
        setting=f"{format_current(load)} load on the high output" if load else "",
    )


def _high_level(timer: Timer, supply: float, load: float, drop: float) -> float:
    """Return the high output as a fraction of the supply."""
    return 1.0 - (drop + timer.output_high_resistance * load) / supply


def _usual(timer: Timer) -> float:
    return timer.threshold_current_typical


def _bounds(timer: Timer, supply: float, high: float) -> Bounds:
    if timer.ideal:
        return Bounds()
    current = timer.threshold_current_limit
    most = inf if current == 0.0 else supply * (high - timer.threshold) / (TRIP_RATIO * current)
    return Bounds(
        max(LEAST_OHM, LEAST_RATIO * timer.output_high_resistance),
        min(most, MOST_OHM),
        "load on the output",
        f"the {timer.name} timer's input current and board leakage",
    )


def _high(timer: Timer, supply: float, source: float, start: float, current: float) -> Phase:
    if timer.ideal:
        stop = timer.threshold
        return Phase(supply, stop, factor=log((1.0 - start) / (1.0 - stop)))
    series = timer.output_high_resistance
    source = max(source, start + _HARDLY)  # a level below the start never gets anywhere either
    return rising(supply, source, start, timer.threshold, current=current, series=series)


def _train(timer: Timer, supply: float, high: float, low_volt: float, current: float) -> Train:
    up = _high(timer, supply, high, timer.trigger, current)
    if timer.ideal:
        fall = log(timer.threshold / timer.trigger)
        return Train((up, Phase(supply, timer.threshold, factor=fall)))
    down = falling(
        supply,
        low_volt / supply,
        timer.threshold,
        timer.trigger,
        current=current,
        series=timer.output_low_resistance,
    )
    return Train((up, down))


def _corners(timer: Timer, supply: float, load: float) -> tuple[Train, ...]:
    """Return every combination of output levels and input currents."""
    if timer.ideal:
        return (_train(timer, supply, 1.0, 0.0, 0.0),)
    _, *drops = _drop(timer)
    return tuple(
        _train(timer, supply, _high_level(timer, supply, load, drop), low, current)
        for drop in drops
        for low in (0.0, timer.output_low_limit)
        for current in (0.0, timer.threshold_current_limit)
    )


def _drop(timer: Timer) -> Figure:
    """Return the drop of a high output in volt: typical, least, most.

    No sheet prints the least one; it is taken as far below the typical one as the limit is
    above it.
    """
    usual, most = timer.output_high_drop_typical, timer.output_high_drop_limit
    return usual, max(2.0 * usual - most, 0.0), most


def _scatter(timer: Timer, supply: float, load: float) -> Scatter:
    """Return pieces with all output levels that the limits allow, at typical input current."""
    if timer.ideal:
        return ()
    usual, most = timer.output_low_typical, timer.output_low_limit
    return scattered_pair(
        _drop(timer),
        (usual, max(2.0 * usual - most, 0.0), most),
        lambda drop, low: _train(
            timer, supply, _high_level(timer, supply, load, drop), low, _usual(timer)
        ),
    )


def _refuse(timer: Timer, supply: float, load: float, high: float) -> None:
    loaded = f" under {format_current(load)}" if load else ""
    way = "take a CMOS timer or a higher supply" if not load else "lighten the load"
    raise BadRequestError(
        f"The output of the {timer.name} timer at {format_voltage(supply)} only rises to "
        f"{format_voltage(max(high, 0.0) * supply, digits=3)}{loaded}, below the trip point of "
        f"{format_voltage(timer.threshold * supply, digits=3)}: this circuit would stall; {way}, "
        "or build it as `astable`."
    )
