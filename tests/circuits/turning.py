"""A timing node followed step by step: dv/dt from Kirchhoff's laws, comparators as events."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import inf

from scipy.integrate import solve_ivp


@dataclass(frozen=True)
class Turn:
    """One movement: its slope in V/s at a voltage, where a comparator turns, and a kick there."""

    slope: Callable[[float], float]
    stop: float
    kick: float = 0.0


def follow(turns: Sequence[Turn], node: float, longest: float) -> list[float]:
    """Return how long each movement takes in second, one after the other, from a voltage on.

    The list stops with an infinity where a movement is not over after `longest` second.
    """
    times: list[float] = []
    for turn in turns:

        def slope(_time, volt, turn=turn):
            return [turn.slope(volt[0])]

        def tripped(_time, volt, turn=turn):
            return volt[0] - turn.stop

        tripped.terminal = True
        run = solve_ivp(
            slope, (0.0, longest), [node], "LSODA", events=tripped, rtol=1e-10, atol=1e-12
        )
        if not len(run.t_events[0]):
            return [*times, inf]
        times.append(float(run.t_events[0][0]))
        node = turn.stop + turn.kick
    return times
