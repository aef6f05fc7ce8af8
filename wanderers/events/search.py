"""The one search behind every finder: roots of many smooth functions of time at once.

Knows no planets. A caller samples its functions, value and slope, on a grid; the search brackets every
change of sign and every turn toward zero that might hide two close roots, then refines all brackets
together with a safeguarded Newton iteration. The slope only steers: it may be approximate, the roots are
those of the value.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Final, TypeVar

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.events.hermite import hermite_root

ValueAndSlope = Callable[[Ints, Floats], tuple[Floats, Floats]]
"""Takes function numbers and instants, shape (n,) each; returns value and slope per day, shape (n,) each."""

LAST_STEP_DAYS: Final = 2e-6
"""A Newton step as short as this, a sixth of a second, is the last: it lands within its square, or, where
the slope given is off by a thousandth, within two billionths of a day."""

BRACKET_DAYS: Final = 1e-9
"""Length at which a bracket that is only halved counts as its root: twice the spacing of Julian dates."""

MOST_STEPS: Final = 60
FOREIGN_ROOT_NUDGE: Final = 1e-6
"""Part of a step by which an end that is another interval's root is moved inward."""

TANGENT_SLACK: Final = 1e-3
"""By how much, relatively, the tangents' reach may be short: slopes may be off by as much."""


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
class Turns:
    """Intervals at whose ends a function has one sign, heading for zero and away again, shape (n,) each."""

    function: Ints
    left: Floats
    right: Floats
    left_value: Floats
    right_value: Floats
    left_slope: Floats
    right_slope: Floats

    def chosen(self, keep: Bools) -> Turns:
        """Return the intervals where ``keep`` is true."""
        return Turns(*(getattr(self, name)[keep] for name in self.__slots__))


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
        turning: where two more might be.
    """

    crossing: Brackets
    turning: Turns

    def renumbered(self, first_function: int) -> Candidates:
        """Return the same candidates with their functions counted from another number."""
        return Candidates(
            replace(self.crossing, function=self.crossing.function + first_function),
            replace(self.turning, function=self.turning.function + first_function),
        )


def find_roots(
    evaluate: ValueAndSlope,
    jd: Floats,
    values: Floats,
    slopes: Floats,
    *,
    period: float | None = None,
    usable: Bools | None = None,
    bends: Floats | None = None,
) -> Roots:
    """Find every root of several functions sampled on one grid.

    Args:
        evaluate: the functions themselves.
        jd: the grid, rising, shape (n,).
        values: samples, shape (functions, n).
        slopes: their rates per day, shape (functions, n).
        period: for angles wrapped to plus or minus half a period: the jump that is no root.
        usable: shape (functions, n - 1), the intervals to look into; all when None.
        bends: second derivatives per day squared, shape (functions, n), for better first guesses.

    Returns:
        all roots between the first and last sample. Complete if, wherever a function turns, its curvature
        keeps one sign throughout that step: a step of a fifth of its shortest period is short enough.
    """
    return solve(evaluate, [candidates(jd, values, slopes, period=period, usable=usable, bends=bends)])


def candidates(
    jd: Floats,
    values: Floats,
    slopes: Floats,
    *,
    period: float | None = None,
    usable: Bools | None = None,
    bends: Floats | None = None,
    first_function: int = 0,
) -> Candidates:
    """Bracket what :func:`solve` refines; arguments as for :func:`find_roots`.

    Args:
        jd: the grid.
        values: samples.
        slopes: their rates.
        period: of wrapped angles.
        usable: the intervals to look into.
        bends: second derivatives.
        first_function: number of the function in the first row.
    """
    usable = np.ones((values.shape[0], jd.size - 1), dtype=np.bool_) if usable is None else usable
    if period is not None:
        usable = usable & (np.abs(np.diff(values, axis=1)) < period / 2.0)
    crossing = sign_changes(jd, values, slopes, usable, bends)
    turning = turns_toward_zero(jd, values, slopes, usable)
    return Candidates(crossing, turning).renumbered(first_function)


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
    column, level = _levels_between(cell[:-1], cell[1:])
    ends = tuple(np.stack([values[at] - levels[level], slopes[at]]) for at in (column, column + 1))
    left, right = jd[column], jd[column + 1]
    guess = left + hermite_root(ends[0], ends[1], right - left)
    crossing = Brackets(level, left, right, ends[0][0], ends[1][0], guess)
    return Candidates(crossing, _level_turns(jd, values, slopes, levels))


def _level_turns(jd: Floats, values: Floats, slopes: Floats, levels: Floats) -> Turns:
    """Return, wherever the function turns, the levels that its tangents reach beyond both ends."""
    turns = np.flatnonzero(slopes[:-1] * slopes[1:] < 0.0)
    bend = slopes[turns] - slopes[turns + 1]
    offset = (values[turns + 1] - values[turns] - slopes[turns + 1] * np.diff(jd)[turns]) / bend
    extreme = values[turns] + slopes[turns] * offset
    high = slopes[turns] > 0.0
    ends = np.stack([values[turns], values[turns + 1]])
    nearest = np.where(high, ends.max(axis=0), ends.min(axis=0))
    cells = [np.searchsorted(levels, bound, side="right") for bound in (nearest, extreme)]
    row, level = _levels_between(*cells)
    column = turns[row]
    return Turns(
        level,
        jd[column],
        jd[column + 1],
        values[column] - levels[level],
        values[column + 1] - levels[level],
        slopes[column],
        slopes[column + 1],
    )


def _levels_between(one: Ints, two: Ints) -> tuple[Ints, Ints]:
    """Return row and level number of every level that separates two cells, shape (k,) each."""
    low, high = np.minimum(one, two), np.maximum(one, two)
    count = high - low
    row = np.repeat(np.arange(count.size), count)
    first = np.cumsum(count) - count
    return row, np.arange(row.size) - np.repeat(first, count) + np.repeat(low, count)


def sign_changes(
    jd: Floats, values: Floats, slopes: Floats, usable: Bools, bends: Floats | None = None
) -> Brackets:
    """Bracket every change of sign between neighbouring samples (zero counts as positive)."""
    positive = values >= 0.0
    row, column = _places(usable & (positive[:, :-1] != positive[:, 1:]))
    derivatives = [values, slopes] if bends is None else [values, slopes, bends]
    ends = [np.stack([stack[row, column + side] for stack in derivatives]) for side in (0, 1)]
    left, right = jd[column], jd[column + 1]
    guess = left + hermite_root(ends[0], ends[1], right - left)
    left, right = _off_foreign_roots(left, right, ends)
    return Brackets(row, left, right, ends[0][0], ends[1][0], guess.clip(left, right))


def _places(flags: Bools) -> tuple[Ints, Ints]:
    """Return row and column of every true value; quicker than numpy's own for two axes."""
    return np.divmod(np.flatnonzero(flags), flags.shape[1])


def _off_foreign_roots(left: Floats, right: Floats, ends: Sequence[Floats]) -> tuple[Floats, Floats]:
    """Move ends that are themselves roots, but another interval's, a little inward.

    Zero counts as positive: a function that leaves a zero upward, or comes down to one, changes its sign
    somewhere else in between.
    """
    nudge = FOREIGN_ROOT_NUDGE * (right - left)
    left = np.where((ends[0][0] == 0.0) & (ends[0][1] > 0.0), left + nudge, left)
    right = np.where((ends[1][0] == 0.0) & (ends[1][1] < 0.0), right - nudge, right)
    return left, right


def turns_toward_zero(jd: Floats, values: Floats, slopes: Floats, usable: Bools) -> Turns:
    """Bracket every interval inside which a function may head across zero and back.

    Both ends have one sign, slopes lead toward zero from both, and their tangents reach it.
    """
    positive, falling, rising = values >= 0.0, slopes < 0.0, slopes > 0.0
    toward, away = np.where(positive, falling, rising), np.where(positive, rising, falling)
    turning = usable & (positive[:, :-1] == positive[:, 1:]) & toward[:, :-1] & away[:, 1:]
    row, column = _places(turning)
    turns = Turns(
        row,
        jd[column],
        jd[column + 1],
        values[row, column],
        values[row, column + 1],
        slopes[row, column],
        slopes[row, column + 1],
    )
    return turns.chosen(_may_reach_zero(turns))


def split_turns(evaluate: ValueAndSlope, turns: Turns) -> Brackets:
    """Follow each turn to where it reaches across zero, and return the two brackets beside that point.

    The interval around the turn is halved until the function is seen on the other side of zero, or until the
    tangents at its ends meet short of zero: a curve that is convex toward zero stays on the near side of
    both.
    """
    interval, found = turns, [_no_brackets()]
    for _ in range(MOST_STEPS):
        if interval.function.size == 0:
            break
        middle = (interval.left + interval.right) / 2.0
        value, slope = evaluate(interval.function, middle)
        crossed = (value >= 0.0) != (interval.left_value >= 0.0)
        found.append(_beside(interval.chosen(crossed), middle[crossed], value[crossed]))
        interval = _halved(interval, middle, value, slope).chosen(~crossed)
        wide = interval.right - interval.left > BRACKET_DAYS
        interval = interval.chosen(wide & _may_reach_zero(interval))
    return _joined(found)


def _beside(interval: Turns, at: Floats, peak: Floats) -> Brackets:
    """Return the brackets on both sides of a point beyond zero."""
    left, right = interval.left, interval.right
    before = Brackets(interval.function, left, at, interval.left_value, peak, (left + at) / 2.0)
    after = Brackets(interval.function, at, right, peak, interval.right_value, (at + right) / 2.0)
    return _joined([before, after])


def _halved(interval: Turns, middle: Floats, value: Floats, slope: Floats) -> Turns:
    """Return the halves that hold the turns: beyond the middle where the function still heads for zero."""
    inward = np.where(interval.left_value >= 0.0, -1.0, 1.0)
    later = slope * inward > 0.0
    return Turns(
        interval.function,
        np.where(later, middle, interval.left),
        np.where(later, interval.right, middle),
        np.where(later, value, interval.left_value),
        np.where(later, interval.right_value, value),
        np.where(later, slope, interval.left_slope),
        np.where(later, interval.right_slope, slope),
    )


def _may_reach_zero(interval: Turns) -> Bools:
    """Return where the tangents at both ends meet at or beyond zero, or come close to it."""
    left, right = np.abs(interval.left_value), np.abs(interval.right_value)
    fall, rise = np.abs(interval.left_slope), np.abs(interval.right_slope)
    step = interval.right - interval.left
    return np.asarray(left * rise + right * fall <= fall * rise * step * (1.0 + TANGENT_SLACK))


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


def _no_brackets() -> Brackets:
    nothing = np.empty(0)
    return Brackets(np.empty(0, dtype=np.int64), nothing, nothing, nothing, nothing, nothing)


Several = TypeVar("Several", Brackets, Turns)


def _joined(parts: Sequence[Several]) -> Several:
    kind = type(parts[0])
    return kind(*(np.concatenate([getattr(part, name) for part in parts]) for name in kind.__slots__))
