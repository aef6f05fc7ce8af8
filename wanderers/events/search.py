"""The one search behind every finder: roots of many smooth functions of time at once.

Knows no planets. A caller samples its functions, value and slope, on a grid; the search brackets every
change of sign and every turn toward zero that might hide two close roots, then refines all brackets
together with a safeguarded Newton iteration. The slope only steers: it may be approximate, the roots are
those of the value.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints

ValueAndSlope = Callable[[Ints, Floats], tuple[Floats, Floats]]
"""Takes function numbers and instants, shape (n,) each; returns value and slope per day, shape (n,) each."""

LAST_STEP_DAYS: Final = 2e-6
"""A Newton step as short as this, a sixth of a second, is the last: it lands within its square, or, where
the slope given is off by a thousandth, within two billionths of a day."""

BRACKET_DAYS: Final = 1e-9
"""Length at which a bracket that is only halved counts as its root: twice the spacing of Julian dates."""

MOST_STEPS: Final = 60
CUBIC_STEPS: Final = 6


@dataclass(frozen=True, slots=True)
class Brackets:
    """Intervals at whose ends a function has opposite signs, shape (n,) each."""

    function: Ints
    left: Floats
    right: Floats
    left_value: Floats
    right_value: Floats
    guess: Floats


@dataclass(frozen=True, slots=True)
class Roots:
    """Where functions pass through zero, sorted by time: shape (n,) each."""

    function: Ints
    jd: Floats
    rising: Bools

    def within(self, jd_from: float, jd_to: float) -> Roots:
        """Return the roots in a half-open span."""
        keep = (self.jd >= jd_from) & (self.jd < jd_to)
        return Roots(self.function[keep], self.jd[keep], self.rising[keep])


@dataclass(frozen=True, slots=True)
class Candidates:
    """Where roots must lie, and where two more might.

    Attributes:
        crossing: brackets of a root each.
        turning: intervals at whose ends a function has one sign, heading for zero and away again.
    """

    crossing: Brackets
    turning: Brackets


def find_roots(
    evaluate: ValueAndSlope,
    jd: Floats,
    values: Floats,
    slopes: Floats,
    *,
    period: float | None = None,
    usable: Bools | None = None,
) -> Roots:
    """Find every root of several functions sampled on one grid.

    Args:
        evaluate: the functions themselves.
        jd: the grid, rising, shape (n,).
        values: samples, shape (functions, n).
        slopes: their rates per day, shape (functions, n).
        period: for angles wrapped to plus or minus half a period: the jump that is no root.
        usable: shape (functions, n - 1), the intervals to look into; all when None.

    Returns:
        all roots between the first and last sample. Complete if no function turns twice within one step.
    """
    return solve(evaluate, [candidates(jd, values, slopes, period=period, usable=usable)])


def candidates(
    jd: Floats,
    values: Floats,
    slopes: Floats,
    *,
    period: float | None = None,
    usable: Bools | None = None,
    first_function: int = 0,
) -> Candidates:
    """Bracket what :func:`solve` refines; arguments as for :func:`find_roots`.

    Args:
        jd: the grid.
        values: samples.
        slopes: their rates.
        period: of wrapped angles.
        usable: the intervals to look into.
        first_function: number of the function in the first row.
    """
    usable = np.ones((values.shape[0], jd.size - 1), dtype=np.bool_) if usable is None else usable
    if period is not None:
        usable = usable & (np.abs(np.diff(values, axis=1)) < period / 2.0)
    crossing = sign_changes(jd, values, slopes, usable)
    turning = turns_toward_zero(jd, values, slopes, usable)
    return Candidates(_renumbered(crossing, first_function), _renumbered(turning, first_function))


def solve(evaluate: ValueAndSlope, found: Sequence[Candidates]) -> Roots:
    """Refine candidates into roots, sorted by time."""
    turning = split_turns(evaluate, _joined([one.turning for one in found]))
    brackets = _joined([*(one.crossing for one in found), turning])
    root = refine(evaluate, brackets)
    by_time = np.lexsort((brackets.function, root))
    rising = brackets.right_value > brackets.left_value
    return Roots(brackets.function[by_time], root[by_time], rising[by_time])


def level_crossings(jd: Floats, values: Floats, slopes: Floats, levels: Floats) -> Candidates:
    """Bracket every passage of one function through any of many levels.

    Args:
        jd: the grid, shape (n,).
        values: samples of the function, shape (n,).
        slopes: its rates, shape (n,).
        levels: sorted, shape (m,).

    Returns:
        candidates whose function is the number of the level, and whose values are counted from it.
    """
    cell = np.searchsorted(levels, values, side="right")
    crossing = _level_brackets(jd, values, slopes, levels, (cell[:-1], cell[1:]))
    turns = slopes[:-1] * slopes[1:] < 0.0
    extreme = _tangents_meet(jd, values, slopes)
    beyond = np.searchsorted(levels, np.where(turns, extreme, values[1:]), side="right")
    high = slopes[:-1] > 0.0
    nearest = np.where(high, np.maximum(cell[:-1], cell[1:]), np.minimum(cell[:-1], cell[1:]))
    spans = (np.where(turns, nearest, 0), np.where(turns, beyond, 0))
    return Candidates(crossing, _level_brackets(jd, values, slopes, levels, spans))


def _tangents_meet(jd: Floats, values: Floats, slopes: Floats) -> Floats:
    """Return where the tangents at neighbouring samples meet, shape (n - 1,): no turn between goes beyond."""
    bend = slopes[:-1] - slopes[1:]
    rise = values[1:] - values[:-1] - slopes[1:] * np.diff(jd)
    offset = np.divide(rise, bend, out=np.zeros_like(rise), where=bend != 0.0)
    return np.asarray(values[:-1] + slopes[:-1] * offset)


def _level_brackets(
    jd: Floats, values: Floats, slopes: Floats, levels: Floats, cells: tuple[Ints, Ints]
) -> Brackets:
    """Return one bracket for every level between two cells of each interval."""
    low, high = np.minimum(*cells), np.maximum(*cells)
    count = high - low
    column = np.repeat(np.arange(count.size), count)
    first = np.cumsum(count) - count
    level = np.arange(column.size) - np.repeat(first, count) + np.repeat(low, count)
    left_value, right_value = values[column] - levels[level], values[column + 1] - levels[level]
    left, right = jd[column], jd[column + 1]
    ends = (left_value, right_value, slopes[column], slopes[column + 1])
    return Brackets(level, left, right, left_value, right_value, left + cubic_root(*ends, right - left))


def sign_changes(jd: Floats, values: Floats, slopes: Floats, usable: Bools) -> Brackets:
    """Bracket every change of sign between neighbouring samples (zero counts as positive)."""
    positive = values >= 0.0
    changed = usable & (positive[:, :-1] != positive[:, 1:])
    return _brackets(jd, values, slopes, *np.nonzero(changed))


def turns_toward_zero(jd: Floats, values: Floats, slopes: Floats, usable: Bools) -> Brackets:
    """Bracket every interval inside which a function heads for zero and away again.

    Both ends have one sign. Intervals in which even the straight lines from both ends cannot reach zero are
    left out: between two samples of a function that turns once, the curve stays on the near side of both
    tangents' meeting point when it is convex toward zero.
    """
    sign = np.where(values >= 0.0, 1.0, -1.0)
    step = np.diff(jd)
    same = usable & (sign[:, :-1] == sign[:, 1:])
    inward = (sign * slopes)[:, :-1] < 0.0
    outward = (sign * slopes)[:, 1:] > 0.0
    row, column = np.nonzero(same & inward & outward)
    left, right = np.abs(values[row, column]), np.abs(values[row, column + 1])
    fall, rise = np.abs(slopes[row, column]), np.abs(slopes[row, column + 1])
    lowest = (left * rise + right * fall - fall * rise * step[column]) / (fall + rise)
    reachable = lowest <= 0.0
    return _brackets(jd, values, slopes, row[reachable], column[reachable])


def split_turns(evaluate: ValueAndSlope, turns: Brackets) -> Brackets:
    """Find each turn's extremum; where it reaches across zero, return the two brackets beside it."""
    if turns.function.size == 0:
        return turns
    extremum = _turning_points(evaluate, turns)
    value, _ = evaluate(turns.function, extremum)
    crosses = (value >= 0.0) != (turns.left_value >= 0.0)
    function, at, peak = turns.function[crosses], extremum[crosses], value[crosses]
    left, right = turns.left[crosses], turns.right[crosses]
    before = Brackets(function, left, at, turns.left_value[crosses], peak, (left + at) / 2.0)
    after = Brackets(function, at, right, peak, turns.right_value[crosses], (at + right) / 2.0)
    return _joined([before, after])


def refine(evaluate: ValueAndSlope, brackets: Brackets) -> Floats:
    """Shrink every bracket onto its root by Newton steps that never leave the bracket, shape (n,).

    Where Newton would leave it, or halves too slowly, the bracket is bisected.
    Source: Press et al., Numerical Recipes, 3rd ed., section 9.4 (rtsafe), for all brackets at once.
    """
    low, high = brackets.left.copy(), brackets.right.copy()
    low_is_positive = brackets.left_value >= 0.0
    root = brackets.guess.copy()
    last_step = high - low
    active = np.arange(root.size)
    for _ in range(MOST_STEPS):
        if active.size == 0:
            break
        at = root[active]
        value, slope = evaluate(brackets.function[active], at)
        beyond_low = (value >= 0.0) == low_is_positive[active]
        low[active] = np.where(beyond_low, at, low[active])
        high[active] = np.where(beyond_low, high[active], at)
        step = np.divide(-value, slope, out=np.full_like(value, np.inf), where=slope != 0.0)
        newton = at + step
        safe = (newton >= low[active]) & (newton <= high[active])
        safe &= np.abs(step) <= 0.5 * np.abs(last_step[active])
        target = np.where(safe, newton, (low[active] + high[active]) / 2.0)
        last_step[active] = target - at
        root[active] = target
        done = (safe & (np.abs(step) <= LAST_STEP_DAYS)) | (value == 0.0)
        done |= high[active] - low[active] <= BRACKET_DAYS
        root[active] = np.where(value == 0.0, at, root[active])
        active = active[~done]
    return root


def _turning_points(evaluate: ValueAndSlope, turns: Brackets) -> Floats:
    """Bisect on the sign of the slope, shape (n,): few candidates, so the plain method will do."""
    low, high = turns.left.copy(), turns.right.copy()
    inward = np.where(turns.left_value >= 0.0, -1.0, 1.0)
    for _ in range(36):
        middle = (low + high) / 2.0
        _, slope = evaluate(turns.function, middle)
        still_inward = slope * inward > 0.0
        low = np.where(still_inward, middle, low)
        high = np.where(still_inward, high, middle)
    return np.asarray((low + high) / 2.0)


def _brackets(jd: Floats, values: Floats, slopes: Floats, row: Ints, column: Ints) -> Brackets:
    left, right = jd[column], jd[column + 1]
    left_value, right_value = values[row, column], values[row, column + 1]
    ends = (left_value, right_value, slopes[row, column], slopes[row, column + 1])
    return Brackets(row, left, right, left_value, right_value, left + cubic_root(*ends, right - left))


def cubic_root(
    left_value: Floats, right_value: Floats, left_slope: Floats, right_slope: Floats, step: Floats
) -> Floats:
    """Return the offset at which the cubic through both ends' values and slopes is zero, shape (n,).

    Newton steps from the chord's root, bisecting where one would leave the bracket. Where the ends agree in
    sign there is no bracket, and any offset within the step may come out.
    """
    rise = right_value - left_value
    chord = np.divide(-left_value, rise, out=np.full_like(rise, 0.5), where=rise != 0.0)
    s = np.where((chord >= 0.0) & (chord <= 1.0), chord, 0.5)
    low, high = np.zeros_like(s), np.ones_like(s)
    a, b = step * left_slope, step * right_slope
    quadratic, cubic = 3.0 * rise - 2.0 * a - b, a + b - 2.0 * rise
    positive_left = left_value >= 0.0
    for _ in range(CUBIC_STEPS):
        value = left_value + s * (a + s * (quadratic + s * cubic))
        slope = a + s * (2.0 * quadratic + 3.0 * s * cubic)
        beyond_low = (value >= 0.0) == positive_left
        low, high = np.where(beyond_low, s, low), np.where(beyond_low, high, s)
        newton = s - np.divide(value, slope, out=np.full_like(s, np.inf), where=slope != 0.0)
        s = np.where((newton > low) & (newton < high), newton, (low + high) / 2.0)
    return np.asarray(s * step)


def _renumbered(brackets: Brackets, first_function: int) -> Brackets:
    return replace(brackets, function=brackets.function + first_function)


def _joined(parts: list[Brackets]) -> Brackets:
    return Brackets(
        np.concatenate([part.function for part in parts]),
        np.concatenate([part.left for part in parts]),
        np.concatenate([part.right for part in parts]),
        np.concatenate([part.left_value for part in parts]),
        np.concatenate([part.right_value for part in parts]),
        np.concatenate([part.guess for part in parts]),
    )
