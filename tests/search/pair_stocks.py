"""Wishes and stocks for the tests of circuits with two resistors."""

from __future__ import annotations

import math

from stocks import capacitor, resistor, sides

from chooser.search.request import Target

WISHES = ("both times", "period and duty", "period and range", "period alone")
ANY_DUTY = Target("duty", 1e-6, 1 - 1e-6)


def exactly(output, value):
    return Target(output, value, value)


def rounded(value, digits=6):
    return float(f"{value:.{digits}g}")


def random_targets(rnd, wish, high, low):
    """Targets near two times in second; of a duty, a value or a range around theirs."""
    high, low = (rounded(time * rnd.choice((1, 1, rnd.uniform(0.8, 1.25)))) for time in (high, low))
    if wish == "both times":
        return (exactly("high", high), exactly("low", low))
    period, duty = exactly("period", rounded(high + low)), rounded(high / (high + low))
    if wish == "period alone":
        return (period, ANY_DUTY)
    if wish == "period and duty":
        return (period, exactly("duty", duty))
    width = rnd.uniform(0.01, 0.1)
    ends = max(duty - width * rnd.random(), 0.01), min(duty + width, 0.99)
    return (period, Target("duty", *map(rounded, ends)))


def random_times(rnd, holdings):
    """Times of single parts of the stock, so that hits and near misses are common."""
    ohms, farads = ([value for value, _ in side.values()] for side in sides(holdings))
    farad = rnd.choice(farads)
    return tuple(rnd.choice(ohms) * farad * math.log(2) * rnd.choice((0.5, 1, 1, 2)) for _ in "HL")


def leaky_stock(rnd, top=7.0):
    """Three digits a value, capacitors that leak more or less, a few pieces each."""
    holdings = [
        resistor(number, rounded(10 ** rnd.uniform(2.5, top), 3), rnd.choice((1, 2, 3)))
        for number in range(1, rnd.randint(2, 5))
    ]
    kinds = ("polyester", "c0g", "electrolytic", "electrolytic-non-polar", "tantalum")
    for number in range(11, rnd.randint(12, 14)):
        farad = rounded(10 ** rnd.uniform(-9.3, -4), 3)
        kind = rnd.choice(kinds)
        holdings.append(capacitor(number, farad, rnd.choice((1, 2)), technology=kind))
    return holdings
