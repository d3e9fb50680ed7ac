"""How the figures of devices scatter: a few pieces that stand for all that are sold.

A figure is its usual value with a limit to either side. Half of the pieces lie on each side,
as one half of a normal law with a third of the limit as one sigma, and none beyond the limit:
pieces beyond it are not sold. The pieces are chosen without chance, so that the same question
always has the same answer.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from itertools import pairwise
from statistics import NormalDist

from chooser.circuits.laws import TimesLaw

SIGMAS = 3.0
"""The data-sheet limit of a device's figure, counted in its sigmas."""

Figure = tuple[float, float, float]
"""A figure's usual value, its low and its high limit."""

Scatter = tuple[tuple[float, TimesLaw], ...]
"""Laws of the same circuit with different pieces of the device, each with its probability."""

_PIECES = 20  # for one figure; even, so that none straddles the usual value
_PAIRS, _STRIDE = 55, 34  # Fibonacci numbers: these points fill a square most evenly
_START = 2  # makes the two figures of a pair least correlated


@lru_cache(maxsize=8)
def sigmas(pieces: int) -> tuple[float, ...]:
    """Return the means of so many equally likely cells of a normal law cut at its limits."""
    law = NormalDist()
    outside = law.cdf(-SIGMAS)
    shares = [outside + (1.0 - 2.0 * outside) * n / pieces for n in range(pieces + 1)]
    edges = [law.inv_cdf(share) for share in shares]
    within = (1.0 - 2.0 * outside) / pieces
    return tuple((law.pdf(low) - law.pdf(high)) / within for low, high in pairwise(edges))


def off_usual(figure: Figure, z: float) -> float:
    """Return a figure z sigmas off its usual value, each side with a sigma of its own."""
    usual, low, high = figure
    return usual + z / SIGMAS * (usual - low if z < 0.0 else high - usual)


def scattered(figure: Figure, law: Callable[[float], TimesLaw]) -> Scatter:
    """Return the laws of the pieces that stand for one scattering figure.

    Parameters
    ----------
    figure : usual value and limits. law : makes the law of a piece with such a figure.

    Returns
    -------
    Nothing where the figure does not scatter.
    """
    usual, low, high = figure
    if low == usual == high:
        return ()
    return tuple((1.0 / _PIECES, law(off_usual(figure, z))) for z in sigmas(_PIECES))


def scattered_pair(
    first: Figure,
    second: Figure,
    law: Callable[[float, float], TimesLaw],
    can_be: Callable[[float, float], bool] = lambda _first, _second: True,
) -> Scatter:
    """Return the laws of the pieces that stand for two figures that scatter independently.

    Parameters
    ----------
    first, second : usual values and limits. law : makes the law of a piece with such figures.
    can_be : whether there are such pieces; the others' probabilities then add up to 1.
    """
    z = sigmas(_PAIRS)
    pairs = [
        (off_usual(first, z[n]), off_usual(second, z[(n * _STRIDE + _START) % _PAIRS]))
        for n in range(_PAIRS)
    ]
    sold = [pair for pair in pairs if can_be(*pair)]
    return tuple((1.0 / len(sold), law(*pair)) for pair in sold)
