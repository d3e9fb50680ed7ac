"""The score of the balanced order, bounds to it, and which resistor networks are weighed.

The score of a circuit is its likely miss x PER_PART ** parts, the largest of its targets'. Where
it misses the accepted band it is its error plus OUTSIDE: nobody builds such a circuit, and what is
asked then is how near the stock comes.
"""

from __future__ import annotations

from dataclasses import replace
from math import inf
from typing import Protocol, TypeAlias

import numpy as np
from numpy.typing import NDArray

from chooser.chance import device_of
from chooser.circuits.circuit import charging_resistance, outputs_of
from chooser.interval import likely_miss, mean_of, spread_of, weight_of
from chooser.networks import Join
from chooser.search.boxes import Inverse
from chooser.search.front import OUTSIDE
from chooser.search.joint import errors_of, in_ranges, reach_windows
from chooser.search.nearest import Wish, nearest, reach
from chooser.search.pairs import SAME
from chooser.search.pools import Floats, Ints
from chooser.search.request import Target
from chooser.search.slots import CapacitorSlots, lot_tolerances
from chooser.search.space import Level, Space
from chooser.search.tables import Rows, allowed
from chooser.search.terms import NEAREST
from chooser.search.wanted import FAR_OHM, LEAST_OHM, aim_of, wanted_resistances

Several: TypeAlias = tuple[Rows, ...]

PER_PART = 1.10
"""Each extra part must cut the likely miss by this factor to earn its place."""

_STEP = 1e-5  # relative change of a resistor that tells how an output follows it


class Weigher(Protocol):
    """What the balanced search asks of one or of two resistor slots."""

    def least_score(self, slots: CapacitorSlots, level: Level) -> Floats:
        """Return a score that no circuit of a level on a capacitor network can be below."""
        ...

    def near(
        self, slots: CapacitorSlots, chosen: Ints, level: Level, last: float
    ) -> tuple[Ints, Several]:
        """Return the resistor networks to weigh for the chosen capacitor networks.

        Parameters
        ----------
        chosen : numbers of the capacitor networks. last : score of the last place; what surely
            stays behind it may be left out.

        Returns
        -------
        (n,) number of the capacitor network, and for each resistor slot the n networks.
        """
        ...

    def score(self, slot: Ints, rows: Several, slots: CapacitorSlots, parts: int) -> Floats:
        """Return the scores of some circuits of so many parts."""
        ...


def weigher_of(space: Space) -> Weigher:
    """Return the weigher for a space's circuit."""
    two = len(space.request.circuit.resistors) == 2  # noqa: PLR2004 - RA and RB
    return TwinWeigher(space) if two else SingleWeigher(space)


def settled(score: Floats, outside: NDArray[np.bool_], error: Floats) -> Floats:
    """Return scores with what is outside the band behind everything inside, by its error.

    They are told apart to twelve digits, so that rounding cannot order equal circuits.
    """
    score = np.where(outside, np.nan_to_num(error, nan=inf), score)
    score = np.where(np.isfinite(score), np.minimum(score, OUTSIDE / 2), OUTSIDE / 2)
    return np.asarray(np.round(score, 12) + OUTSIDE * outside)


class Lots:
    """The spreads and shifts of all lots as arrays."""

    def __init__(self, space: Space) -> None:
        self._ohm, self._farad = space.resistors.value, space.capacitors.value
        of_r, of_c = lot_tolerances(space.resistors), lot_tolerances(space.capacitors)
        self._r_spread = np.array([tolerance.spread for tolerance in of_r])
        self._r_shift = np.array([tolerance.shift for tolerance in of_r])
        self._c_spread = np.array([tolerance.spread for tolerance in of_c])
        self._c_shift = np.array([tolerance.shift for tolerance in of_c])

    @property
    def best(self) -> float:
        """Smallest spread of any resistor."""
        return float(self._r_spread.min())

    @property
    def shifted(self) -> bool:
        """Whether the mean of any part differs from its value."""
        return bool(self._r_shift.any() or self._c_shift.any())

    def of_resistors(self, rows: Rows) -> tuple[Floats, Floats]:
        """Return spread and shift of resistor networks, relative."""
        return (
            rows.evaluate_shares(self._ohm, self._r_spread, Join.SERIES),
            rows.evaluate_shares(self._ohm, self._r_shift, Join.SERIES),
        )

    def of_capacitors(self, rows: Rows) -> tuple[Floats, Floats]:
        """Return spread and shift of capacitor networks, relative."""
        return (
            rows.evaluate_shares(self._farad, self._c_spread, Join.PARALLEL),
            rows.evaluate_shares(self._farad, self._c_shift, Join.PARALLEL),
        )


class SingleWeigher:
    """One resistor, or none."""

    def __init__(self, space: Space) -> None:
        self._request = space.request
        self._law = space.request.circuit.law
        self._device = device_of(space.request.circuit)
        self._tables = space.resistor_tables
        self._lots = Lots(space)

    def least_score(self, slots: CapacitorSlots, level: Level) -> Floats:
        """Return a score that no circuit of a level on a capacitor network can be below.

        The spread is at least that of the capacitors and the best resistor. Where the wanted
        resistance lies outside what may be or can be, the time misses by at least as much as
        the one at the limit, because the time grows with R.
        """
        request = self._request
        c_spread, _ = self._lots.of_capacitors(slots.rows)
        best = self._lots.best if level.resistors and self._law.proportional else 0.0
        spread = spread_of((1.0, 1.0), (best, c_spread), self._device.spread)
        if not level.resistors:
            error = np.abs(slots.farad / request.target - 1)
            outside = error > request.within + SAME
            inside = spread * PER_PART**level.parts
            return np.asarray(np.where(outside, OUTSIDE + error, inside) * (1 - SAME))
        # Longest and shortest time that the resistors in reach can make, over the target.
        lowest, highest = reach(self._tables, level.resistors[0])
        short = self._share(np.minimum(slots.most, highest), slots)
        long = self._share(np.maximum(slots.least, lowest), slots)
        outside = (short < 1 - request.within - SAME) | (long > 1 + request.within + SAME)
        if self._lots.shifted or self._device.shift:
            miss: Floats = spread  # the mean may be nearer than the nominal interval
        else:
            miss = likely_miss(np.maximum(np.maximum(1 - short, long - 1), 0.0), spread)
        error = np.maximum(np.maximum(1 - short, long - 1), 0.0)
        floor = np.where(outside, error, miss * PER_PART**level.parts)
        floor = np.minimum(floor, OUTSIDE / 2) * (1 - SAME)
        return np.where(long > short, inf, floor + OUTSIDE * outside)

    def _share(self, ohm: Floats, slots: CapacitorSlots) -> Floats:
        times = self._law.interval(ohm, slots.farad, slots.leak)
        return np.asarray(slots.scale * times / self._request.target)

    def near(
        self,
        slots: CapacitorSlots,
        chosen: Ints,
        level: Level,
        last: float,  # noqa: ARG002 - one resistor is weighed as fast as left out
    ) -> tuple[Ints, Several]:
        """Return the resistor networks to weigh for the chosen capacitor networks."""
        if not level.resistors:
            return chosen, ()
        wish = Wish(slots.wanted[chosen], slots.least[chosen], slots.most[chosen])
        near = nearest(self._tables, level.resistors[0], wish, NEAREST)
        return chosen[near.owner], (near.rows,)

    def score(self, slot: Ints, rows: Several, slots: CapacitorSlots, parts: int) -> Floats:
        """Return the scores of some circuits of so many parts."""
        farad, leak = slots.farad[slot], slots.leak[slot]
        ohm = rows[0].value if rows else np.ones(len(slot))
        nominal = slots.scale[slot] * self._law.interval(ohm, farad, leak)
        steep = self._law.sensitivity(ohm, farad, leak)
        r_spread, r_shift = self._lots.of_resistors(rows[0]) if rows else (0.0, 0.0)
        c_spread, c_shift = (each[slot] for each in self._lots.of_capacitors(slots.rows))
        target = self._request.target
        with np.errstate(invalid="ignore"):
            mean = mean_of(nominal, (steep, 1.0), (r_shift, c_shift), self._device.shift)
            spread = spread_of((steep, 1.0), (r_spread, c_spread), self._device.spread)
            score = likely_miss(mean / target - 1, spread) * PER_PART**parts
        outside = np.abs(nominal / target - 1) > self._request.within + SAME
        return settled(score, outside, np.abs(nominal / target - 1))


class TwinWeigher:
    """Two resistors that share the capacitor.

    Beside each capacitor network the NEAREST networks to the wanted RB are taken, and beside each
    of those the NEAREST to the RA that then completes the circuit.
    """

    def __init__(self, space: Space) -> None:
        self._space = space
        self._request = space.request
        self._law = space.request.circuit.twin
        self._device = device_of(space.request.circuit)
        self._tables = space.resistor_tables
        self._lots = Lots(space)
        self._aims: dict[int, tuple[Floats, ...]] = {}

    def least_score(self, slots: CapacitorSlots, level: Level) -> Floats:
        """Return a score that no circuit of a level on a capacitor network can be below.

        The spread of any time is at least that of the capacitors and the device; where nothing
        in reach comes into the band, the error is at least that of what comes nearest.
        """
        c_spread, _ = self._lots.of_capacitors(slots.rows)
        spread = spread_of((1.0,), (c_spread,), self._device.spread)
        reach = reach_windows(self._space, level.resistors, slots)
        error = Inverse(self._law, slots, reach).least_errors(self._request.targets, reach)
        outside = error > self._request.within + SAME
        floor = np.where(outside, error, spread * PER_PART**level.parts)
        floor = np.minimum(floor, OUTSIDE / 2) * (1 - SAME)
        return np.asarray(np.where(error == inf, inf, floor + OUTSIDE * outside))

    def near(
        self, slots: CapacitorSlots, chosen: Ints, level: Level, last: float
    ) -> tuple[Ints, Several]:
        """Return RA and RB networks to weigh for the chosen capacitor networks."""
        size_a, size_b = level.resistors
        least, most = np.maximum(slots.least[chosen], LEAST_OHM), slots.most[chosen]
        aims = tuple(each[chosen] for each in self._aims_of(slots))
        room = self._room(slots, level, last)[chosen]
        wish = Wish(np.clip(aims[1], least, most), least, most)
        near_b = nearest(self._tables, size_b, wish, NEAREST)
        owner, rows_b = near_b.owner, near_b.rows
        if not any(target.is_range for target in self._request.targets):
            kept = np.abs(rows_b.value / aims[1][owner] - 1) <= room[owner]
            owner, rows_b = owner[kept], rows_b.take(kept)
        mine = tuple(aim[owner] for aim in aims)
        ra = self._completing(rows_b.value, chosen[owner], mine, slots)
        wish = Wish(np.clip(ra, least[owner], most[owner]), least[owner], most[owner])
        near_a = nearest(self._tables, size_a, wish, NEAREST)
        rows_a, rows_b = near_a.rows, rows_b.take(near_a.owner)
        owner, ra = owner[near_a.owner], ra[near_a.owner]
        charging = charging_resistance(self._request.circuit, (rows_a.value, rows_b.value))
        kept = allowed(np.concatenate([rows_a.leaves, rows_b.leaves], axis=1), self._tables.uses)
        kept &= charging <= most[owner] * (1 + SAME)
        kept &= np.abs(rows_a.value - ra) <= room[owner] * charging
        return chosen[owner[kept]], (rows_a.take(kept), rows_b.take(kept))

    def _aims_of(self, slots: CapacitorSlots) -> tuple[Floats, ...]:
        """Return the RA and RB that each capacitor network wants, worked out once."""
        size = slots.rows.size
        if size not in self._aims:
            self._aims[size] = wanted_resistances(self._request, slots.farad, slots.leak)
        return self._aims[size]

    def _room(self, slots: CapacitorSlots, level: Level, last: float) -> Floats:
        """Return how far a resistance may be off before its error alone costs the last place.

        Twice the error that the score leaves room for: high and low times follow the charging
        resistance nearly in proportion. Where a duty is wanted as well, or parts shift the mean,
        no such room is known, and everything is weighed.
        """
        times = all(target.output in ("high", "low") for target in self._request.targets)
        if last >= OUTSIDE or not times or self._lots.shifted or self._device.shift:
            return np.full(len(slots), inf)
        c_spread, _ = self._lots.of_capacitors(slots.rows)
        floor = spread_of((1.0,), (c_spread,), self._device.spread)
        allowed_miss = last / PER_PART**level.parts
        return np.asarray(2 * np.sqrt(np.maximum(allowed_miss**2 - floor**2, 0.0)) + SAME)

    def _completing(
        self, rb: Floats, slot: Ints, aims: tuple[Floats, ...], slots: CapacitorSlots
    ) -> Floats:
        """Return the RA in ohm that completes each RB: to the high time, or to the period.

        One step in proportion from the RA wanted beside the RB wanted: good to some parts in
        ten thousand, which is enough to tell the nearest networks.
        """
        circuit = self._request.circuit
        farad, leak = slots.farad[slot], slots.leak[slot]
        ra = np.maximum(aims[0] + (aims[1] - rb if self._law.through_both else 0.0), LEAST_OHM)
        ra = np.minimum(ra, FAR_OHM)
        high, low = self._law.times((ra, rb), farad, leak)
        wanted: Floats | float = aim_of(self._request)[0]
        if any(target.output == "period" for target in self._request.targets):
            wanted = np.maximum(sum(aim_of(self._request)) - low, 1e-3 * wanted)
        charging = charging_resistance(circuit, (ra, rb))
        with np.errstate(invalid="ignore"):
            return np.asarray(ra + np.nan_to_num(charging * (wanted / high - 1)))

    def score(self, slot: Ints, rows: Several, slots: CapacitorSlots, parts: int) -> Floats:
        """Return the scores of some circuits of so many parts."""
        farad, leak = slots.farad[slot], slots.leak[slot]
        rs = tuple(each.value for each in rows)
        times = self._law.times(rs, farad, leak)
        with np.errstate(invalid="ignore"):
            made = outputs_of(self._request.circuit, times)
        figures = [self._lots.of_resistors(each) for each in rows]
        c_spread, c_shift = (each[slot] for each in self._lots.of_capacitors(slots.rows))
        spreads = [*(spread for spread, _ in figures), c_spread]
        shifts = [*(shift for _, shift in figures), c_shift]
        miss = np.zeros(len(slot))
        for target in self._request.targets:
            weight = weight_of(target.output)
            steep: list[Floats | float] = [
                *self._follows(target.output, rs, farad, leak),
                float(abs(weight)),
            ]
            with np.errstate(invalid="ignore", over="ignore"):
                device = device_of(self._request.circuit, target.output)
                mean = mean_of(made[target.output], steep, shifts, weight * device.shift)
                spread = spread_of(steep, spreads, weight * device.spread)
                miss = np.maximum(miss, likely_miss(_error(target, mean), spread))
        error = errors_of(replace(self._request, ranges_hold=False), times)
        outside = (error > self._request.within + SAME) | ~in_ranges(self._request, times)
        found = settled(miss * PER_PART**parts, outside, error)
        return np.asarray(np.where(np.isfinite(error), found, inf))

    def _follows(
        self, output: str, rs: tuple[Floats, ...], farad: Floats, leak: Floats
    ) -> list[Floats]:
        """Return d ln output / d ln R for RA and RB, by central differences."""
        found = []
        for place in range(len(rs)):
            made = []
            for sign in (1.0, -1.0):
                moved = [r * (1.0 + sign * _STEP * (n == place)) for n, r in enumerate(rs)]
                times = self._law.times(moved, farad, leak)
                with np.errstate(invalid="ignore"):
                    made.append(outputs_of(self._request.circuit, times)[output])
            with np.errstate(invalid="ignore", divide="ignore"):
                found.append(np.asarray(np.log(made[0] / made[1]) / (2.0 * _STEP)))
        return found


def _error(target: Target, value: Floats) -> Floats:
    """Return how far values are from a target, relative; 0 inside a range."""
    below, above = np.minimum(value / target.low - 1, 0.0), np.maximum(value / target.high - 1, 0.0)
    return np.asarray(below + above)
