"""The shared search on functions whose roots are known beforehand."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from wanderers.arrays import Floats, Ints
from wanderers.events.search import (
    Brackets,
    Candidates,
    Roots,
    candidates,
    find_roots,
    level_crossings,
    refine,
    solve,
)

BASE_JD = 2_451_544.5
STEP_DAYS = 2.0
END_DAYS = 40.0
GRID_DAYS = np.arange(0.0, END_DAYS + STEP_DAYS, STEP_DAYS)
CLOSE_DAYS = 2e-8  # two milliseconds; Julian dates are half a billionth of a day apart
SECOND_DAYS = 1.0 / 86_400.0
EDGE_DAYS = 1e-6  # a root this near an end of the grid may be in or out

Curve = Callable[[Floats], Floats]


@dataclass(frozen=True)
class Known:
    """A function of days since BASE_JD and its derivatives."""

    value: Curve
    slope: Curve
    bend: Curve = np.zeros_like


def parabola(first: float, second: float, depth: float = 0.0) -> Known:
    """A parabola through two roots, lifted by ``depth``."""
    return Known(lambda t: (t - first) * (t - second) + depth, lambda t: 2.0 * t - first - second)


def wave(period: float, phase: float, level: float) -> Known:
    """A sine of unit height, lifted by ``level``."""
    w = 2.0 * np.pi / period
    return Known(
        lambda t: np.sin(w * (t - phase)) + level,
        lambda t: w * np.cos(w * (t - phase)),
        lambda t: -(w**2) * np.sin(w * (t - phase)),
    )


def wrapped(angle: Floats) -> Floats:
    return angle - 360.0 * np.ceil((angle - 180.0) / 360.0)


def evaluator(functions: Sequence[Known], slope_error: float = 0.0) -> Callable[..., tuple[Floats, Floats]]:
    def evaluate(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        days = jd - BASE_JD
        value, slope = np.empty(jd.size), np.empty(jd.size)
        for number, function in enumerate(functions):
            own = row == number
            value[own] = function.value(days[own])
            slope[own] = function.slope(days[own]) * (1.0 + slope_error)
        return value, slope

    return evaluate


def search(*functions: Known, grid: Floats = GRID_DAYS, slope_error: float = 0.0, **options: object) -> Roots:
    values = np.stack([function.value(grid) for function in functions])
    slopes = np.stack([function.slope(grid) for function in functions]) * (1.0 + slope_error)
    return find_roots(evaluator(functions, slope_error), BASE_JD + grid, values, slopes, **options)


def days(roots: Roots) -> Floats:
    return roots.jd - BASE_JD


def roots_of_wave(period: float, phase: float, level: float, beyond_days: float = 0.0) -> Floats:
    """Where a wave passes through zero inside the grid and so far beyond, rising in time."""
    up = phase - np.arcsin(level) * period / (2.0 * np.pi)
    down = phase + period / 2.0 + np.arcsin(level) * period / (2.0 * np.pi)
    turns = period * np.arange(-200, 200)
    found = np.sort(np.concatenate([up + turns, down + turns]))
    return found[(found > -beyond_days) & (found < END_DAYS + beyond_days)]


def near_an_end(expected: Floats) -> bool:
    return bool((np.abs(expected) < EDGE_DAYS).any() or (np.abs(expected - END_DAYS) < EDGE_DAYS).any())


def pair_tolerance_days(apart: float) -> float:
    """The last step, two millionths of a day, lands within its square over the distance of the two roots."""
    return CLOSE_DAYS + 4e-12 / apart


# ---- roots that are there


@given(
    st.floats(4 * STEP_DAYS, 30 * STEP_DAYS),
    st.floats(0.0, 60.0),
    st.floats(-0.999, 0.999),
    st.booleans(),
)
def test_every_root_of_a_sine_is_found(period: float, phase: float, level: float, bent: bool) -> None:
    expected = roots_of_wave(period, phase, level)
    assume(not near_an_end(roots_of_wave(period, phase, level, beyond_days=1.0)))
    known = wave(period, phase, level)
    options = {"bends": known.bend(GRID_DAYS)[None]} if bent else {}
    found = search(known, **options)
    assert found.jd.size == expected.size
    np.testing.assert_allclose(days(found), expected, rtol=0.0, atol=CLOSE_DAYS)
    np.testing.assert_array_equal(found.rising, known.slope(expected) > 0.0)


@given(st.floats(0.5, 39.0), st.floats(SECOND_DAYS, 0.9))
def test_two_roots_close_together_are_both_found(first: float, apart: float) -> None:
    found = search(parabola(first, first + apart))
    np.testing.assert_allclose(days(found), [first, first + apart], rtol=0.0, atol=pair_tolerance_days(apart))
    assert found.rising.tolist() == [False, True]


@given(st.floats(0.5, 39.0), st.floats(SECOND_DAYS, 0.9))
def test_two_roots_close_together_of_a_falling_curve_are_both_found(first: float, apart: float) -> None:
    rising = parabola(first, first + apart)
    found = search(Known(lambda t: -rising.value(t), lambda t: -rising.slope(t)))
    np.testing.assert_allclose(days(found), [first, first + apart], rtol=0.0, atol=pair_tolerance_days(apart))
    assert found.rising.tolist() == [True, False]


@pytest.mark.parametrize("sign", [1.0, -1.0])
@pytest.mark.parametrize("at", GRID_DAYS[1:-1].tolist())
def test_a_root_on_a_grid_point_is_found_once(at: float, sign: float) -> None:
    found = search(Known(lambda t: sign * (t - at), lambda t: np.full_like(t, sign)))
    np.testing.assert_allclose(days(found), [at], rtol=0.0, atol=CLOSE_DAYS)
    assert found.rising.tolist() == [sign > 0.0]


@pytest.mark.parametrize(("first", "second"), [(4.0, 6.0), (4.0, 4.5), (3.5, 4.0), (4.0, 12.0)])
def test_pairs_of_roots_on_grid_points_are_found_once_each(first: float, second: float) -> None:
    np.testing.assert_allclose(days(search(parabola(first, second))), [first, second], atol=CLOSE_DAYS)


@given(st.lists(st.floats(0.5, 39.5), min_size=1, max_size=6, unique=True))
def test_roots_of_several_functions_come_in_order_of_time_each_with_its_number(at: list[float]) -> None:
    lines = [Known(lambda t, a=a: t - a, np.ones_like) for a in at]
    found = search(*lines)
    np.testing.assert_allclose(days(found), np.sort(at), rtol=0.0, atol=CLOSE_DAYS)
    np.testing.assert_allclose(np.array(at)[found.function], days(found), rtol=0.0, atol=CLOSE_DAYS)


# ---- roots that are not there


@given(st.floats(0.5, 39.0), st.floats(1e-12, 10.0))
def test_a_curve_that_nearly_touches_zero_has_no_root(turn: float, clearance: float) -> None:
    near = parabola(turn, turn, clearance)
    assert search(near).jd.size == 0
    assert search(Known(lambda t: -near.value(t), lambda t: -near.slope(t))).jd.size == 0


@given(st.floats(4 * STEP_DAYS, 30 * STEP_DAYS), st.floats(0.0, 60.0), st.floats(1e-9, 3.0))
def test_a_sine_lifted_off_zero_has_no_root(period: float, phase: float, clearance: float) -> None:
    for level in (1.0 + clearance, -1.0 - clearance):
        assert search(wave(period, phase, level)).jd.size == 0


def test_a_curve_that_touches_zero_on_a_grid_point_and_turns_away_has_no_root() -> None:
    assert search(parabola(8.0, 8.0)).jd.size == 0


def test_no_functions_have_no_roots() -> None:
    nothing = np.empty((0, GRID_DAYS.size))
    found = find_roots(evaluator([]), BASE_JD + GRID_DAYS, nothing, nothing)
    assert found.jd.size == found.function.size == found.rising.size == 0


# ---- angles


@given(st.floats(0.3, 80.0), st.floats(0.0, 360.0), st.sampled_from([1.0, -1.0]))
def test_an_angle_passes_zero_once_a_turn_and_the_jump_is_no_root(
    rate: float, start: float, sign: float
) -> None:
    known = Known(lambda t: wrapped(sign * (rate * t - start)), lambda t: np.full_like(t, sign * rate))
    expected = (start % 360.0 + 360.0 * np.arange(12)) / rate
    assume(not near_an_end(expected))
    expected = expected[expected < END_DAYS]
    found = search(known, period=360.0)
    np.testing.assert_allclose(days(found), expected, rtol=0.0, atol=CLOSE_DAYS)
    assert (found.rising == (sign > 0.0)).all()


@given(st.floats(10.0, 30.0), st.floats(0.0, 30.0), st.floats(-360.0, 360.0))
def test_an_angle_that_turns_back_passes_zero_as_often_as_it_does_unwrapped(
    period: float, phase: float, start: float
) -> None:
    # Moves on and back like a planet: 6 degrees a day with a swing of 40.
    w = 2.0 * np.pi / period

    def angle(t: Floats) -> Floats:
        return 6.0 * t + 40.0 * np.sin(w * (t - phase)) + start

    fine = angle(np.linspace(0.0, END_DAYS, 40_001))
    level = 360.0 * np.arange(-3, 4)[:, None]
    expected = int((np.diff(np.sign(fine - level), axis=1) != 0.0).sum())
    turning = np.flatnonzero(np.diff(np.sign(np.diff(fine))) != 0.0) + 1
    closest = np.abs(wrapped(fine[[0, *turning, -1]])).min()
    assume(closest > 1e-3)  # what the fine sampling resolves
    known = Known(lambda t: wrapped(angle(t)), lambda t: 6.0 + 40.0 * w * np.cos(w * (t - phase)))
    found = search(known, period=360.0)
    assert found.jd.size == expected
    np.testing.assert_allclose(wrapped(angle(days(found))), 0.0, atol=1e-6)


# ---- what steers


@given(st.floats(-1e-3, 1e-3), st.floats(0.5, 38.0), st.floats(0.1, 0.9))
def test_slopes_off_by_a_thousandth_move_no_root(error: float, first: float, apart: float) -> None:
    found = search(parabola(first, first + apart), slope_error=error)
    np.testing.assert_allclose(days(found), [first, first + apart], rtol=0.0, atol=CLOSE_DAYS)


@pytest.mark.parametrize("factor", [0.0, 0.5, 3.0, -1.0])
def test_a_useless_slope_costs_time_but_no_root(factor: float) -> None:
    def evaluate(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        t = jd - BASE_JD
        return t**3 - 20.0, factor * 3.0 * t**2

    ends = np.array([0.0, 8.0])
    left, right = BASE_JD + ends[:, None]
    middle = (left + right) / 2.0
    bracket = Brackets(np.zeros(1, dtype=np.int64), left, right, *(ends[:, None] ** 3 - 20.0), middle)
    found = refine(evaluate, bracket)
    # The last step may be as long as two millionths of a day; a slope three times too steep makes it short.
    assert found[0] - BASE_JD == pytest.approx(20.0 ** (1.0 / 3.0), abs=4e-6)


# ---- where to look


def test_intervals_that_are_not_usable_are_passed_over() -> None:
    usable = np.ones((1, GRID_DAYS.size - 1), dtype=np.bool_)
    usable[0, 6] = False  # days 12 to 14
    period = 4 * STEP_DAYS
    expected = roots_of_wave(period, 0.5, 0.1)
    kept = expected[(expected < 12.0) | (expected > 14.0)]
    assert kept.size == expected.size - 1
    found = search(wave(period, 0.5, 0.1), usable=usable)
    np.testing.assert_allclose(days(found), kept, atol=CLOSE_DAYS)


def test_candidates_of_several_samplings_are_solved_together() -> None:
    functions = [wave(20.0, 1.0, 0.2), wave(13.0, 2.0, -0.4), parabola(7.1, 7.2)]
    parts = [
        candidates(
            BASE_JD + GRID_DAYS, f.value(GRID_DAYS)[None], f.slope(GRID_DAYS)[None], first_function=number
        )
        for number, f in enumerate(functions)
    ]
    together, alone = solve(evaluator(functions), parts), search(*functions)
    np.testing.assert_array_equal(together.function, alone.function)
    np.testing.assert_array_equal(together.jd, alone.jd)
    np.testing.assert_array_equal(together.rising, alone.rising)


@given(
    st.floats(4 * STEP_DAYS, 30 * STEP_DAYS),
    st.floats(0.0, 60.0),
    st.lists(st.floats(-1.2, 1.2), min_size=1, max_size=12, unique=True),
)
def test_level_crossings_are_the_roots_of_the_function_less_each_level(
    period: float, phase: float, given_levels: list[float]
) -> None:
    levels = np.sort(given_levels)
    levels = levels[np.abs(np.abs(levels) - 1.0) > 1e-6]
    known = wave(period, phase, 0.0)

    def evaluate(row: Ints, jd: Floats) -> tuple[Floats, Floats]:
        return known.value(jd - BASE_JD) - levels[row], known.slope(jd - BASE_JD)

    found = solve(
        evaluate,
        [level_crossings(BASE_JD + GRID_DAYS, known.value(GRID_DAYS), known.slope(GRID_DAYS), levels)],
    )
    for number, level in enumerate(levels.tolist()):
        expected = roots_of_wave(period, phase, -level) if abs(level) < 1.0 else np.empty(0)
        own = days(found)[found.function == number]
        own, expected = (at[(at > EDGE_DAYS) & (at < END_DAYS - EDGE_DAYS)] for at in (own, expected))
        np.testing.assert_allclose(own, expected, atol=1e-7)


def test_roots_are_cut_to_a_half_open_span() -> None:
    roots = Roots(np.arange(3), np.array([1.0, 2.0, 3.0]), np.array([True, False, True]))
    cut = roots.within(1.0, 3.0)
    assert cut.function.tolist() == [0, 1]
    assert cut.rising.tolist() == [True, False]


def test_renumbering_moves_every_candidate() -> None:
    part = candidates(
        BASE_JD + GRID_DAYS,
        np.stack([GRID_DAYS - 5.0, (GRID_DAYS - 9.0) ** 2 - 0.01]),
        np.stack([np.ones_like(GRID_DAYS), 2.0 * (GRID_DAYS - 9.0)]),
    )
    moved: Candidates = part.renumbered(10)
    assert (moved.crossing.function - part.crossing.function == 10).all()
    assert (moved.turning.function - part.turning.function == 10).all()
    assert part.crossing.function.tolist() == [0]
    assert part.turning.function.tolist() == [1]
