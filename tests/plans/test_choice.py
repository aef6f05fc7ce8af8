"""The choice of nights against exhaustive search and against what its objective promises."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations, pairwise
from math import inf

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.plans.choice import Problem, burden, choose
from wanderers.plans.clouds import longest_hole

PLACES = st.lists(st.floats(0.0, 20.0), min_size=1, max_size=11)
COSTS = st.lists(st.floats(0.0, 1.0), min_size=12, max_size=12)
MARKS = st.lists(st.tuples(st.floats(-1.0, 21.0), st.floats(0.1, 30.0)), max_size=3)


def problem(places: list[float], costs: list[float], marks: list[tuple[float, float]]) -> Problem:
    marks = sorted(marks)
    return Problem(
        position=np.array(sorted(places)),
        start=0.0,
        end=20.0,
        step=1.7,
        cost=np.array(costs[: len(places)]),
        mark=np.array([place for place, _ in marks], dtype=np.float64),
        weight=np.array([weight for _, weight in marks], dtype=np.float64),
    )


def burden_by_hand(some: Problem, nights: tuple[int, ...]) -> float:
    """The definition once more, one term after the other."""
    places = [float(some.position[night]) for night in nights]
    stops = [some.start, *places, some.end]
    total = sum(((b - a) / some.step) ** 2 for a, b in pairwise(stops))
    for mark, weight in zip(some.mark, some.weight, strict=True):
        total += weight * (min(abs(mark - place) for place in places) / some.step) ** 2
    return float(total + sum(float(some.cost[night]) for night in nights))


def least_of_all(some: Problem, count: int, fixed: tuple[int, ...] = ()) -> float:
    size = some.position.size
    count = min(max(count, len(fixed)), size)
    return min(
        (
            burden_by_hand(some, nights)
            for nights in combinations(range(size), count)
            if {*fixed} <= {*nights}
        ),
        default=inf,
    )


@given(PLACES, COSTS, MARKS, st.integers(1, 12))
def test_the_choice_equals_exhaustive_search(
    places: list[float], costs: list[float], marks: list[tuple[float, float]], count: int
) -> None:
    some = problem(places, costs, marks)
    chosen = choose(some, count)
    assert chosen.nights.size == min(count, len(places))
    assert np.all(np.diff(chosen.nights) > 0)
    assert chosen.burden == pytest.approx(least_of_all(some, count), rel=1e-9)
    assert chosen.burden == pytest.approx(burden_by_hand(some, tuple(chosen.nights.tolist())), rel=1e-12)


@given(PLACES, COSTS, MARKS, st.integers(1, 8), st.sets(st.integers(0, 10), max_size=3))
def test_with_nights_fixed_it_still_equals_exhaustive_search(
    places: list[float], costs: list[float], marks: list[tuple[float, float]], count: int, fixed: set[int]
) -> None:
    some = problem(places, costs, marks)
    held = tuple(sorted(night for night in fixed if night < len(places)))
    chosen = choose(some, count, np.array(held, dtype=np.int64))
    assert {*held} <= {*chosen.nights.tolist()}
    assert chosen.burden == pytest.approx(least_of_all(some, count, held), rel=1e-9)


@given(PLACES, COSTS, MARKS, st.integers(1, 8), st.floats(0.0, 20.0), st.floats(0.0, 1.0))
def test_one_more_usable_night_never_worsens_the_objective(
    places: list[float],
    costs: list[float],
    marks: list[tuple[float, float]],
    count: int,
    more: float,
    cost: float,
) -> None:
    some = problem(places, costs, marks)
    at = int(np.searchsorted(some.position, more))
    richer = replace(some, position=np.insert(some.position, at, more), cost=np.insert(some.cost, at, cost))
    poor, rich = choose(some, count), choose(richer, count)
    # Nights that lack count before the burden.
    assert rich.nights.size > poor.nights.size or rich.burden <= poor.burden * (1.0 + 1e-12) + 1e-12


def test_without_marks_and_costs_steps_are_even() -> None:
    some = problem(np.linspace(0.0, 20.0, 41).tolist(), [0.0] * 41, [])
    np.testing.assert_allclose(some.position[choose(some, 3).nights], [5.0, 10.0, 15.0])
    assert longest_hole(some.position[choose(some, 3).nights], some.start, some.end) == pytest.approx(5.0)


def test_a_mark_draws_a_night_to_it() -> None:
    some = problem(np.linspace(0.0, 20.0, 41).tolist(), [0.0] * 41, [(7.0, 1_000.0)])
    assert 7.0 in some.position[choose(some, 3).nights]


def test_the_better_of_two_nights_at_one_place_is_taken() -> None:
    some = problem([10.0, 10.0], [0.4, 0.3], [])
    assert choose(some, 1).nights.tolist() == [1]
    assert choose(replace(some, cost=np.array([0.3, 0.3])), 1).nights.tolist() == [0]


def test_nothing_to_choose_from_is_no_error() -> None:
    assert choose(problem([], [], []), 5).nights.size == 0
    assert choose(problem([1.0], [0.0], [(3.0, 2.0)]), 0).nights.size == 0


def test_a_whole_year_of_nights_is_chosen_alike_each_time() -> None:
    places = np.sort(np.random.default_rng(4).uniform(0.0, 20.0, 350))
    some = problem(places.tolist(), [0.1] * 350, [(4.0, 20.0), (11.0, 20.0)])
    first, second = choose(some, 50), choose(some, 50)
    assert first.nights.tolist() == second.nights.tolist() and first.nights.size == 50
    # No single exchange of a night for its neighbour improves it.
    for night in first.nights.tolist():
        for other in (night - 1, night + 1):
            if 0 <= other < 350 and other not in first.nights:
                swapped = np.sort(np.append(np.setdiff1d(first.nights, [night]), other))
                assert burden(some, swapped) >= first.burden - 1e-9
