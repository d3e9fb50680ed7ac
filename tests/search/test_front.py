"""Places of the balanced order: variations of one capacitor count as worse, equals count once."""

from __future__ import annotations

import random

import numpy as np
import pytest
from stocks import asked, capacitor, resistor

from chooser.search.front import OUTSIDE, PER_VARIATION, Front, Weighed, front_of
from chooser.search.space import Space


def opened(ohms, farads):
    holdings = [resistor(number, ohm) for number, ohm in enumerate(ohms, 1)]
    capacitors = [capacitor(100 + number, farad) for number, farad in enumerate(farads)]
    return Space(holdings, capacitors, asked(1e-2, most_resistors=1, most_capacitors=1))


def weighed(space, chosen):
    """Circuits of single parts: (resistor, capacitor, score) of each."""
    slots = space.slots(1)
    numbers = [np.array(column, dtype=np.int64) for column in list(zip(*chosen, strict=True))[:2]]
    scores = np.array([float(score) for _, _, score in chosen])
    rows = (space.resistor_tables.singles.take(numbers[0]),)
    return Weighed(slots, scores, numbers[1], rows, space)


def by_hand(circuits, wanted):
    """Give away the places one by one, as the words of the order say it."""
    seen, times, fits = set(), {}, []
    for circuit in sorted(circuits, key=lambda each: each[2]):
        if circuit[:2] in seen:
            continue
        seen.add(circuit[:2])
        better = times[circuit[1]] = times.get(circuit[1], -1) + 1
        whole = circuit[2] // OUTSIDE * OUTSIDE
        fits.append((whole + (circuit[2] - whole) * PER_VARIATION**better, circuit))
    fits.sort(key=lambda each: each[0])
    return sorted((circuit for _, circuit in fits[:wanted]), key=lambda each: each[2]), fits


def random_circuits(rnd, number):
    return [
        (
            rnd.randrange(6),
            rnd.randrange(4),
            rnd.uniform(0.01, 0.05) + OUTSIDE * (rnd.random() < 0.2),
        )
        for _ in range(number)
    ]


def named(front, levels, places):
    return [
        (
            int(levels[front.level[place]].rows[0].leaves[front.row[place]][0]),
            int(levels[front.level[place]].slot[front.row[place]]),
            float(front.score[place]),
        )
        for place in places
    ]


@pytest.mark.parametrize("seed", range(40))
def test_places_are_given_as_by_hand(seed):
    rnd = random.Random(seed)
    space = opened((1e3, 2e3, 3e3, 4e3, 5e3, 6e3), (4e-8, 3e-8, 2e-8, 1e-8))
    circuits, wanted = random_circuits(rnd, rnd.randint(1, 60)), rnd.choice((1, 3, 10))
    half = rnd.randint(0, len(circuits))
    levels = [weighed(space, part) for part in (circuits[:half], circuits[half:]) if part]
    front = front_of(levels, wanted)
    places, fits = by_hand(circuits, wanted)
    assert named(front, levels, front.places(wanted)) == places
    if len(fits) >= wanted:
        assert front.last(wanted) == pytest.approx(fits[wanted - 1][0], rel=1e-12)
    else:
        assert front.last(wanted) == np.inf


@pytest.mark.parametrize("seed", range(10))
def test_a_handicap_beside_the_front_is_that_of_its_place_in_it(seed):
    """What would have so many better ones on its capacitor, were it let in."""
    rnd = random.Random(seed)
    space = opened((1e3, 2e3, 3e3, 4e3, 5e3, 6e3), (4e-8, 3e-8, 2e-8, 1e-8))
    levels = [weighed(space, random_circuits(rnd, 30))]
    front = front_of(levels, 30)
    main, score = rnd.randrange(4), rnd.uniform(0.01, 0.05)
    better = sum(
        1
        for held, mine in zip(front.score, front.main, strict=True)
        if mine == main and held < score
    )
    beside = front.beside(np.array([main], dtype=np.int32), np.array([score]))
    assert beside[0] == pytest.approx(score * PER_VARIATION**better, rel=1e-12)


def test_equal_values_from_other_drawers_are_no_other_answer():
    space = opened((1e3, 1e3 + 1e-9, 2e3), (1e-8,))
    assert len(space.resistors.lots) == 3
    same = Space(
        [resistor(1, 1e3), resistor(2, 2e3)],
        [capacitor(11, 1e-8), capacitor(12, 1e-8, technology="c0g")],
        asked(1e-2, "bipolar", most_resistors=1, most_capacitors=1),
    )
    assert len(same.capacitors.lots) == 2
    levels = [weighed(same, [(0, 0, 0.02), (0, 1, 0.01), (1, 0, 0.03)])]
    front = front_of(levels, 10)
    assert front.score.tolist() == [0.01, 0.03]


def test_dropped_rows_are_numbered_anew():
    space = opened((1e3, 2e3, 3e3), (1e-8, 2e-8))
    whole = weighed(space, [(0, 0, 0.5), (1, 0, 0.1), (2, 1, 0.2)])
    front = front_of([whole], 2)
    kept = whole.score <= front.last(2)
    renumbered = front.renumbered([np.cumsum(kept) - 1])
    left = whole.only(kept)
    assert left.score[renumbered.row].tolist() == front.score.tolist()


def test_a_front_of_nothing_has_free_places():
    front = Front.none()
    assert front.last(1) == np.inf
    assert front.places(3).tolist() == []
