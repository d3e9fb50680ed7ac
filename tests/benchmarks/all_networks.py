"""The baseline: list and sort every network of up to three resistors, then look each one up."""

from __future__ import annotations

import math

import numpy as np


def ten_best(ohms: np.ndarray, farads: np.ndarray, target: float) -> list[tuple[int, int, float]]:
    """The ten best (ppm, parts, |error|) of the ideal monostable, up to 3 R and 2 C.

    Parameters
    ----------
    ohms, farads : rising values; more pieces of each than a network can use.
    """
    value, parts = _all_resistors(ohms)
    order = np.argsort(value, kind="stable")
    value, parts = value[order], parts[order]
    i, j = np.triu_indices(len(farads))
    a, b = farads[i], farads[j]
    c_value = np.concatenate([farads, a + b, 1 / (1 / a + 1 / b)])
    c_parts = np.repeat([1, 2], [len(farads), 2 * len(i)])
    wanted = target / (c_value * math.log(3))
    width = 0.5e-6
    while True:
        first = np.searchsorted(value, wanted * (1 - width))
        last = np.searchsorted(value, wanted * (1 + width), "right")
        if (last - first).sum() >= 10:
            break
        width *= 8
    rows = []
    for slot in np.flatnonzero(last > first):
        here = slice(first[slot], last[slot])
        errors = np.abs(value[here] / wanted[slot] - 1)
        ppm = np.floor(errors * 1e6 + 0.5).astype(int)
        total = parts[here] + c_parts[slot]
        rows += zip(ppm.tolist(), total.tolist(), errors.tolist(), strict=True)
    return sorted(rows)[:10]


def _all_resistors(ohms: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The value and number of parts of every network of one, two or three resistors."""
    count = len(ohms)
    i, j = np.triu_indices(count)
    series, parallel = ohms[i] + ohms[j], 1 / (1 / ohms[i] + 1 / ohms[j])
    one = ohms[:, None]
    lowest = i[None, :] >= np.arange(count)[:, None]
    threes = [
        (one + parallel).ravel(),
        (1 / (1 / one + 1 / series)).ravel(),
        (one + series)[lowest],
        (1 / (1 / one + 1 / parallel))[lowest],
    ]
    value = np.concatenate([ohms, series, parallel, *threes])
    pairs = 2 * len(series)
    parts = np.repeat(
        np.array([1, 2, 3], dtype=np.int8), [count, pairs, len(value) - count - pairs]
    )
    return value, parts
