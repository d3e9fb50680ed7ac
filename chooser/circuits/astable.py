"""The astable: charged through RA + RB, discharged through RB, between two trip points.

    high = (RA + RB) C ln((1 - b) / (1 - a)),  low = RB C ln(a / b)

with a and b the upper and lower trip point as fractions of the supply; at 2/3 and 1/3 both
logarithms are ln 2 (data sheets print 0.693). A real discharge switch has a resistance r: while
it is on it sinks V / (RA + r) from the supply as well, so the capacitor discharges through
RB + RA || r towards V r / (RA + r), not to ground. What leaks into the switch while it is off
comes through RA alone, what leaks into the threshold input through both.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import inf, log

import numpy as np
from numpy.typing import ArrayLike

from chooser.circuits.charging import Array, rising, swing_time
from chooser.circuits.circuit import Circuit
from chooser.circuits.control import check_control, control_text
from chooser.circuits.laws import solved
from chooser.circuits.monostable import LEAST_FARAD, timer_bounds
from chooser.circuits.timers import Timer
from chooser.parts import Tolerance

OUTPUTS = ("period", "frequency", "high", "low", "duty")
"""What every oscillator puts out."""

ROUNDING = 1e-12

LN2 = log(2.0)
"""Either time of the textbook astable over its R C, tripping at one and two thirds."""


@dataclass(frozen=True, slots=True)
class AstableLaw:
    """One state of the timer in this circuit.

    Attributes
    ----------
    supply : volt. upper, lower : trip points as fractions of the supply, lower < upper.
    input_current : into the threshold input in ampere.
    switch_leak : into the discharge switch while it is off, in ampere.
    switch : resistance of the discharge switch while it is on, in ohm.
    factors : high and low time over their R C where they are plain products; all else is then
        nothing, and the capacitor's leak is ignored.
    """

    supply: float
    upper: float
    lower: float
    input_current: float = 0.0
    switch_leak: float = 0.0
    switch: float = 0.0
    factors: tuple[float, float] | None = None

    @property
    def through_both(self) -> bool:
        """The capacitor charges through RA and RB."""
        return True

    @property
    def least_duty(self) -> float:
        """The duty that RA = 0 would make."""
        high = log((1.0 - self.lower) / (1.0 - self.upper))
        return high / (high + log(self.upper / self.lower))

    def times(self, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike) -> tuple[Array, ...]:
        """Return the high and the low time in second; RA and RB in ohm, farad, siemens."""
        ra, rb, c, g = (np.asarray(x, dtype=np.float64) for x in (*rs, c, g))
        if self.factors is not None:
            high, low = self.factors
            return np.asarray((ra + rb) * c * high + 0.0 * g), np.asarray(
                rb * c * low + 0.0 * g + 0.0 * ra
            )
        return self._high(ra, rb, c, g), self._low(ra, rb, c, g)

    def exactly(self, rs: Sequence[Fraction], c: Fraction) -> tuple[Fraction, ...] | None:
        """Return the same in fractions where they are plain products, else None."""
        if self.factors is None:
            return None
        high, low = (Fraction(factor) for factor in self.factors)
        return (rs[0] + rs[1]) * c * high, rs[1] * c * low

    def lossless(self) -> AstableLaw:
        """Return the same law with a timer that draws no current."""
        return replace(self, input_current=0.0, switch_leak=0.0)

    def ra_for(self, high: ArrayLike, rb: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the RA in ohm that makes a high time beside RB; 0 or less where RB is too much."""
        high, rb, c, g = np.broadcast_arrays(
            *(np.asarray(x, dtype=np.float64) for x in (high, rb, c, g))
        )
        if self.factors is not None:
            return np.asarray(high / (c * self.factors[0]) - rb)
        phase = rising(self.supply, 1.0, self.lower, self.upper, current=self.input_current)
        both = phase.resistance(high, c, g)
        if self.switch_leak == 0.0:
            return np.asarray(both - rb)
        # With RA = 0 the switch's leak costs nothing, so `both` is the most that RA + RB can be.
        guess = np.where(both > rb, both - rb, 1.0)
        found = solved(lambda ra: self._high(ra, rb, c, g), high, guess, self.endless_from(g))
        return np.asarray(np.where(both > rb, found, both - rb))

    def rb_for(self, low: ArrayLike, ra: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the RB in ohm that makes a low time beside RA; 0 or less if there is none."""
        low, ra, c, g = np.broadcast_arrays(
            *(np.asarray(x, dtype=np.float64) for x in (low, ra, c, g))
        )
        if self.factors is not None:
            return np.asarray(low / (c * self.factors[1]))
        rest = self._rest(ra)

        def time(r: Array) -> Array:
            return swing_time(
                r, c, g, source=rest, start=self.upper, stop=self.lower, loss=self._loss
            )

        with np.errstate(all="ignore"):
            guess = low / (c * np.log((self.upper - rest) / (self.lower - rest)))
        # A switch that cannot pull its pin below the lower trip point never discharges anything.
        whole = np.where(rest < self.lower, solved(time, low, guess), 0.0)
        return np.asarray(whole - self._switched(ra))

    def endless_from(self, g: ArrayLike) -> Array:
        """Return the RA + RB in ohm from which on the high time never ends."""
        if self.factors is not None:
            return np.full(np.shape(g), inf)
        phase = rising(self.supply, 1.0, self.lower, self.upper, current=self.input_current)
        return phase.endless_from(g)

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:
        """Return the RA + RB in ohm that still charges with `ratio` times the leak."""
        return rising(self.supply, 1.0, self.lower, self.upper).leak_bound(g, ratio)

    def trip_ratio(self, r: float, g: float) -> float:
        """Return the charging current through r ohm over all losses at the upper trip point."""
        if self.factors is not None:
            return inf
        current = self.input_current + self.switch_leak
        phase = rising(self.supply, 1.0, self.lower, self.upper, current=current)
        return phase.trip_ratio(r, g)

    @property
    def _loss(self) -> float:
        return self.input_current / self.supply

    def _rest(self, ra: Array) -> Array:
        """Return where the discharge switch holds its pin, as a fraction of the supply."""
        return np.asarray(self.switch / (ra + self.switch))

    def _switched(self, ra: Array) -> Array:
        """Return the resistance of the switch and RA side by side."""
        return np.asarray(self._rest(ra) * ra)

    def _high(self, ra: Array, rb: Array, c: Array, g: Array) -> Array:
        source = 1.0 - ra * self.switch_leak / self.supply
        return swing_time(
            ra + rb, c, g, source=source, start=self.lower, stop=self.upper, loss=self._loss
        )

    def _low(self, ra: Array, rb: Array, c: Array, g: Array) -> Array:
        return swing_time(
            rb + self._switched(ra),
            c,
            g,
            source=self._rest(ra),
            start=self.upper,
            stop=self.lower,
            loss=self._loss,
        )


def astable(timer: Timer, supply: float, control: float | None = None) -> Circuit:
    """Return the circuit of a timer.

    Parameters
    ----------
    timer : the timer. supply : in volt.
    control : voltage in volt forced on the control pin, the upper trip point; or None.

    Raises
    ------
    BadRequestError
        A control voltage that the timer cannot work with.
    """
    upper, lower = trip_points(timer, supply, control)
    error = timer.astable_error_limit
    return Circuit(
        family="astable",
        title="Astable",
        device=f"{timer.name} timer",
        supply=supply,
        resistors=("RA", "RB"),
        capacitor=True,
        outputs=OUTPUTS,
        typical=_typical(timer, supply, upper, lower),
        corners=_corners(timer, supply, upper, lower),
        error=Tolerance(error, error),
        bounds=timer_bounds(timer, supply, upper),
        least_farad=LEAST_FARAD,
        lossless=timer.ideal,
        shortest=shortest_period(timer),
        timer=timer,
        first=_typical(timer, supply, upper, 0.0),
        temperature_drift=timer.astable_temperature_drift_limit,
        supply_drift=timer.astable_supply_drift_limit,
        setting=control_text(control),
        control=control,
    )


def trip_points(timer: Timer, supply: float, control: float | None) -> tuple[float, float]:
    """Return the upper and the lower trip point as fractions of the supply (volt).

    The timer's own divider makes the lower one from the upper one, so it goes with it.
    """
    if control is None:
        return timer.threshold, timer.trigger
    upper = check_control(timer, supply, control) / supply
    return upper, upper * (timer.trigger / timer.threshold)


def shortest_period(timer: Timer) -> float:
    """Return the period in second below which the timer's delays rule."""
    return 0.0 if timer.ideal else 1.0 / timer.highest_frequency


def _typical(timer: Timer, supply: float, upper: float, lower: float) -> AstableLaw:
    """Return the timer as its typical figures describe it."""
    if timer.ideal:
        return _textbook(supply, upper, lower)
    return AstableLaw(
        supply,
        upper,
        lower,
        timer.threshold_current_typical,
        timer.discharge_leakage_typical,
        timer.discharge_resistance_typical,
    )


def _corners(timer: Timer, supply: float, upper: float, lower: float) -> tuple[AstableLaw, ...]:
    """Return every combination of no and most loss in input and switch, full and poor discharge."""
    if timer.ideal:
        return (_textbook(supply, upper, lower),)
    return tuple(
        AstableLaw(supply, upper, lower, current, leak, switch)
        for current in (0.0, timer.threshold_current_limit)
        for leak in (0.0, timer.discharge_leakage_limit)
        for switch in (0.0, timer.discharge_resistance_limit)
    )


def _textbook(supply: float, upper: float, lower: float) -> AstableLaw:
    """Return the two plain products; from 0 V there is only a high time."""
    high = log((1.0 - lower) / (1.0 - upper))
    low = log(upper / lower) if lower > 0.0 else 0.0
    thirds = abs(upper - 2.0 / 3.0) < ROUNDING and abs(lower - 1.0 / 3.0) < ROUNDING
    return AstableLaw(supply, upper, lower, factors=(LN2, LN2) if thirds else (high, low))
