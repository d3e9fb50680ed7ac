"""The steered astable: a diode lets the capacitor charge through RA alone, past RB.

With a constant drop d (as a fraction of the supply), trip points a and b,

    high = RA C ln((1 - d - b) / (1 - d - a)),  low = RB C ln(a / b)

so that each time has a resistor of its own and the duty may lie below a half; but the drop
makes the high time, and with it the whole period, follow the supply. With a diode in the
discharging path too the low time has the same drop in it.

A real diode's drop follows its current by the exponential law, and while it conducts, RB
beside it carries a little as well. The current i into the node then solves

    (V - v - Vd) / RA = i + I_leak,  Vd = drop + s ln((i - Vd / RB) / i0),

and the time is the integral of C dv / (i - I - G v). The current left for the capacitor falls
nearly in a straight line from its first value to its last, so Gauss-Legendre quadrature is done
over the logarithm of that line, in which the integrand is nearly constant: five points give some
seven digits, up to the resistance where the last current vanishes and the time never ends.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import inf, log, sqrt
from typing import cast

import numpy as np
from numpy.typing import ArrayLike

from chooser.circuits.astable import AstableLaw, astable, trip_points
from chooser.circuits.charging import Array, swing_time
from chooser.circuits.circuit import Circuit
from chooser.circuits.diodes import Diode
from chooser.circuits.laws import TimesLaw, solved
from chooser.circuits.scattering import Figure, Scatter, off_usual
from chooser.circuits.timers import Timer
from chooser.errors import BadRequestError
from chooser.quantities import format_voltage
from chooser.temperature import REFERENCE_CELSIUS

DROP_ERROR = 0.05
"""Volt by which pieces and a few degrees move a diode's drop at most (common practice)."""

_ROOTS, _HALVES = np.polynomial.legendre.leggauss(5)
_NODES, _WEIGHTS = (1.0 - _ROOTS) / 2.0, _HALVES / 2.0  # from the end of the movement to its start
_LEVEL = 1e-9  # a logarithm that is as good as 0
_STEPS = 60  # four to six are usual
_SETTLED = 1e-6  # the step after is its square


@dataclass(frozen=True, slots=True)
class SteeredLaw:
    """One state of timer and diode in this circuit.

    Attributes
    ----------
    timer : the timer, as in the plain astable. diode : its forward drop.
    both : whether a second diode keeps the charging current out of RB altogether.
    """

    timer: AstableLaw
    diode: Diode
    both: bool = False

    @property
    def through_both(self) -> bool:
        """The capacitor charges through RA alone."""
        return False

    @property
    def least_duty(self) -> float:
        """Either time may be as short as one likes."""
        return 0.0

    @property
    def _factors(self) -> tuple[float, float] | None:
        return self.timer.factors if self.diode.drop == 0.0 else None

    def lossless(self) -> SteeredLaw:
        """Return the same law with a timer that draws no current."""
        return replace(self, timer=self.timer.lossless())

    def times(self, rs: Sequence[ArrayLike], c: ArrayLike, g: ArrayLike) -> tuple[Array, ...]:
        """Return the high and the low time in second; RA and RB in ohm, farad, siemens."""
        ra, rb, c, g = np.broadcast_arrays(*(np.asarray(x, dtype=np.float64) for x in (*rs, c, g)))
        if self._factors is not None:
            high, low = self._factors
            return np.asarray(ra * c * high), np.asarray(rb * c * low)
        return self._high(ra, rb, c, g), self._low(ra, rb, c, g)

    def exactly(self, rs: Sequence[Fraction], c: Fraction) -> tuple[Fraction, ...] | None:
        """Return the same in fractions where they are plain products, else None."""
        if self._factors is None:
            return None
        high, low = (Fraction(factor) for factor in self._factors)
        return rs[0] * c * high, rs[1] * c * low

    def ra_for(self, high: ArrayLike, rb: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the RA in ohm that makes a high time beside RB."""
        high, rb, c, g = np.broadcast_arrays(
            *(np.asarray(x, dtype=np.float64) for x in (high, rb, c, g))
        )
        if self._factors is not None:
            return np.asarray(high / (c * self._factors[0]))
        most = self.endless_from(g)
        guess = np.minimum(self._by_constant_drop(high / c), 0.9 * most)
        return solved(lambda ra: self._high(ra, rb, c, g), high, guess, most)

    def rb_for(self, low: ArrayLike, ra: ArrayLike, c: ArrayLike, g: ArrayLike) -> Array:
        """Return the RB in ohm that makes a low time beside RA; 0 or less if there is none."""
        low, ra, c, g = np.broadcast_arrays(
            *(np.asarray(x, dtype=np.float64) for x in (low, ra, c, g))
        )
        if self._factors is not None:
            return np.asarray(low / (c * self._factors[1]))
        guess = self.timer.rb_for(low, ra, c, g)
        if not self.both:
            return guess
        return solved(lambda rb: self._low(ra, rb, c, g), low, np.maximum(guess, 1.0) / 1.3)

    def endless_from(self, g: ArrayLike) -> Array:
        """Return the RA in ohm from which on the high time never ends, whatever RB is.

        Past one diode RB goes on charging where the diode's drop is all that is left, so only
        what stops the plain astable stops the circuit for any RB.
        """
        timer = self.timer
        if self._factors is not None:
            return np.full(np.shape(g), inf)
        if not self.both:
            return timer.endless_from(g)
        loss = timer.input_current + timer.upper * timer.supply * np.asarray(g, dtype=np.float64)
        return self._charging_with(loss)

    def leak_bound(self, g: ArrayLike, ratio: float) -> Array:
        """Return the RA in ohm that still charges with `ratio` times the leak."""
        timer = self.timer
        lost = timer.upper * timer.supply * np.asarray(g, dtype=np.float64)
        return self._charging_with(ratio * lost)

    def trip_ratio(self, r: float, g: float) -> float:
        """Return the charging current through r ohm over all losses at the upper trip point.

        That is through the diode; what RB passes by one diode is left out, so at 1 or below the
        time may still end there.
        """
        timer = self.timer
        lost = timer.input_current + timer.switch_leak + timer.upper * timer.supply * g
        if self._factors is not None or lost == 0.0:
            return inf
        left = timer.supply * (1.0 - timer.upper)
        current = max((left - float(self.diode.drop_at(left / r))) / r, 0.0)
        return current / lost

    def _charging_with(self, current: Array) -> Array:
        """Return the RA in ohm through which so much (ampere) flows at the upper trip point."""
        timer = self.timer
        left = timer.supply * (1.0 - timer.upper) - self.diode.drop_at(current)
        with np.errstate(divide="ignore"):
            return np.asarray(np.maximum(left, 0.0) / (current + timer.switch_leak))

    def _by_constant_drop(self, ratio: Array) -> Array:
        """Return the RA in ohm for a high time over C, the drop being that of the mean current."""
        timer = self.timer
        ra, drop = ratio, np.asarray(self.diode.drop)
        for _ in range(3):
            part = np.minimum(drop / timer.supply, 0.9 * (1.0 - timer.upper))
            factor = np.log((1.0 - part - timer.lower) / (1.0 - part - timer.upper))
            ra = ratio / factor
            drop = self.diode.drop_at((timer.upper - timer.lower) * timer.supply / ratio)
        return np.asarray(ra)

    def _high(self, ra: Array, rb: Array, c: Array, g: Array) -> Array:
        timer = self.timer
        source = 1.0 - ra * timer.switch_leak / timer.supply
        if self.diode.slope == 0.0:
            return self._with_constant_drop((ra, rb), c, g, source)
        shunt = np.zeros_like(rb) if self.both else 1.0 / rb
        return self._through_diode(ra, shunt, c, g, (source, timer.lower, timer.upper))

    def _with_constant_drop(
        self, rs: tuple[Array, Array], c: Array, g: Array, source: Array
    ) -> Array:
        """Return the high time of a diode that conducts while RB alone would drop more than it.

        That is below V' - Vd (RA + RB) / RB; above it the capacitor charges through both.
        """
        timer, (ra, rb) = self.timer, rs
        drop, loss = self.diode.drop / timer.supply, timer.input_current / timer.supply
        turn = np.full(np.shape(source), timer.upper)
        if not self.both:
            turn = np.clip(source - drop * (ra + rb) / rb, timer.lower, timer.upper)
        through = swing_time(
            ra, c, g, source=source - drop, start=timer.lower, stop=turn, loss=loss
        )
        past = swing_time(ra + rb, c, g, source=source, start=turn, stop=timer.upper, loss=loss)
        return np.asarray(through + past)

    def _low(self, ra: Array, rb: Array, c: Array, g: Array) -> Array:
        timer = self.timer
        if not self.both:
            return timer.times((ra, rb), c, g)[1]
        rest = timer.switch / (ra + timer.switch)
        r = rb + rest * ra
        if self.diode.slope == 0.0:
            source = rest + self.diode.drop / timer.supply
            loss = timer.input_current / timer.supply
            return swing_time(
                r, c, g, source=source, start=timer.upper, stop=timer.lower, loss=loss
            )
        return self._through_diode(r, np.zeros_like(r), c, g, (rest, timer.upper, timer.lower))

    def _through_diode(
        self, r: Array, shunt: Array, c: Array, g: Array, way: tuple[ArrayLike, float, float]
    ) -> Array:
        """Return the time from one fraction of the supply to another, through r and the diode.

        Parameters
        ----------
        r : resistance in ohm. shunt : conductance beside the diode in siemens.
        way : source, start and stop as fractions of the supply.
        """
        source, start, stop = way
        supply, sign = self.timer.supply, 1.0 if stop > start else -1.0
        u: Array | None = None

        def moving(part: Array) -> Array:
            nonlocal u
            volt = supply * (start + (stop - start) * part)
            push = sign * (np.asarray(source) * supply - volt)
            current, u = self._current(push, r, shunt, u)
            return current - sign * (self.timer.input_current + g * volt)

        first, last = moving(np.asarray(0.0)), moving(np.asarray(1.0))
        ends = (last > 0.0) & (first > 0.0)
        fall = np.log(np.where(ends, last, 1.0) / np.where(ends, first, 1.0))
        fall = np.where(np.abs(fall) < _LEVEL, _LEVEL, fall)
        total = np.zeros_like(fall)
        for node, weight in zip(_NODES, _WEIGHTS, strict=True):
            # The line has fallen by exp(node fall) where this part of the voltage has gone by.
            left = moving(np.expm1(node * fall) / np.expm1(fall))
            total = total + weight * np.exp(node * fall) / np.where(ends, left, 1.0)
        time = c * supply * abs(stop - start) * fall / np.expm1(fall) * total
        return np.asarray(np.where(ends, time, inf))

    def _current(
        self, push: Array, r: Array, shunt: Array, near: Array | None
    ) -> tuple[Array, Array]:
        """Return the current through r, and diode and shunt side by side, that a voltage drives.

        Newton's method for u = ln(diode current); from above it comes down without fail, and
        from below its first step leads there. `near` is the u of a voltage nearby, and the second
        value returned is that of this one.
        """
        slope, drop = self.diode.slope, self.diode.drop
        offset = drop - slope * log(self.diode.reference_current)
        push = np.maximum(push, 1e-12)
        # What is left after the drop of that current, or a little of it, lies near and above.
        left = np.maximum(push - self.diode.drop_at(push / r), 0.05 * push) if near is None else 0
        u = np.log(left / r) if near is None else near
        per_volt = 1.0 / r + shunt
        driven = push / r - offset * per_volt
        for _ in range(_STEPS):
            current = np.exp(u)
            step = (driven - slope * u * per_volt - current) / (slope * per_volt + current)
            u = u + step
            if np.max(np.abs(step), initial=0.0) < _SETTLED:
                break
        volt = np.maximum(offset + slope * u, 0.0)
        return np.asarray(np.maximum((push - volt) / r, 0.0)), u


def steered(
    timer: Timer, supply: float, diode: Diode, *, both: bool = False, control: float | None = None
) -> Circuit:
    """Return the circuit of a timer and a diode.

    Parameters
    ----------
    timer : the timer. supply : in volt. diode : across RB, or one in each path.
    both : whether there is one in each path.
    control : voltage in volt forced on the control pin, the upper trip point; or None.

    Raises
    ------
    BadRequestError
        A supply that the drop leaves too little of, or a control voltage that cannot be.
    """
    upper, lower = trip_points(timer, supply, control)
    drops = (diode.drop, max(diode.drop - DROP_ERROR, 0.0), diode.drop + DROP_ERROR)
    if drops[2] >= supply * min(1.0 - upper, lower if both else 1.0):
        raise BadRequestError(
            f"At {format_voltage(supply)} a diode that drops {format_voltage(diode.drop)} leaves "
            "nothing to charge with at the trip point; take a Schottky diode or a higher supply."
        )
    plain = astable(timer, supply, control)
    laws = [cast("AstableLaw", law) for law in plain.corners]
    corners = tuple(
        SteeredLaw(law, replace(diode, drop=drop), both)
        for law in laws
        for drop in (drops[1:] if diode.drop else drops[:1])
    )
    usual = SteeredLaw(cast("AstableLaw", plain.typical), diode, both)
    return replace(
        plain,
        family="steered",
        title="Steered astable",
        typical=usual,
        corners=corners,
        scatter=_scatter(usual, drops),
        setting=", ".join(filter(None, (_setting(diode, both=both), plain.setting))),
        first=SteeredLaw(cast("AstableLaw", plain.first), diode, both),
    )


def with_diode_at(circuit: Circuit, celsius: float) -> Circuit:
    """Return a circuit with its diodes at a temperature; any without a diode as it is.

    Parameters
    ----------
    circuit : any circuit. celsius : temperature in degree Celsius.
    """
    usual = circuit.typical
    if not isinstance(usual, SteeredLaw) or not usual.diode.fall_per_kelvin:
        return circuit
    fall = usual.diode.fall_per_kelvin * (celsius - REFERENCE_CELSIUS)

    def moved(law: TimesLaw) -> TimesLaw:
        diode = cast("SteeredLaw", law).diode
        drop = max(diode.drop - fall, 0.0)
        return replace(cast("SteeredLaw", law), diode=replace(diode, drop=drop))

    return replace(
        circuit,
        typical=moved(usual),
        corners=tuple(moved(law) for law in circuit.corners),
        scatter=tuple((weight, moved(law)) for weight, law in circuit.scatter),
        first=None if circuit.first is None else moved(circuit.first),
    )


def _scatter(usual: SteeredLaw, drops: Figure) -> Scatter:
    """Return pieces of the diode, its drop as usual and to either side; a pair is of one make.

    Three of them have the mean and the sigma of a normal law (Gauss-Hermite quadrature).
    """
    if usual.diode.drop == 0.0:
        return ()
    far, beside = sqrt(3.0), 1.0 / 6.0
    return tuple(
        (weight, replace(usual, diode=replace(usual.diode, drop=off_usual(drops, z))))
        for weight, z in ((beside, -far), (1.0 - 2.0 * beside, 0.0), (beside, far))
    )


def _setting(diode: Diode, *, both: bool) -> str:
    """Say which diodes there are, and where."""
    named = f"{diode.name} diode" if diode.slope or not diode.drop else f"diode of {diode.name}"
    return f"a {named} in each path" if both else f"{named} past RB"
