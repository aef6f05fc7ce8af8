"""The choice of nights, as pure numbers.

Nights stand on a line at their *position*: the distance travelled along the path, to which every bend adds,
so that equal steps of position are even steps along the path, denser where it bends. With one *step* the even
distance aimed at, the burden of a choice ``i_1 < ... < i_k`` of nights is

    sum over the holes of (length / step)^2
    + sum over the marks of weight * (distance to the nearest night chosen / step)^2
    + sum over the nights chosen of their cost,

where the holes are those between neighbouring nights and those at both ends. Of all choices with as many
nights as are wanted (or all there are, if fewer), the one of least burden is taken; of equals the one found
first, which is always the same. Squares make even steps best and the longest hole dearest; marks are the
moments that a campaign must not miss; costs prefer the better of two nights at nearly the same place.

Marks are weighted rather than tied to their nearest night so that one more usable night never makes the best
burden of the nights wanted greater: every choice there was is still there. Nights that lack to the number
wanted count before the burden.

A hole and the marks in it depend only on the two nights at its ends, so the least burden of all choices is
found exactly by dynamic programming over (nights chosen so far, last night): Bellman 1957, Dynamic
Programming.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from wanderers.arrays import Bools, Floats, Ints


@dataclass(frozen=True, slots=True)
class Problem:
    """Nights to choose from, in order of time.

    Attributes:
        position: of each night, never falling, shape (n,).
        start: position of the beginning of the campaign.
        end: of its end.
        step: length of one ideal step, above zero.
        cost: of each night, in squares of a step, never below zero, shape (n,).
        mark: positions of the moments wanted, rising, shape (m,).
        weight: how much each counts, above zero, shape (m,).
    """

    position: Floats
    start: float
    end: float
    step: float
    cost: Floats
    mark: Floats
    weight: Floats

    def only(self, allowed: Bools | Ints) -> Problem:
        """Return the problem with some of the nights."""
        return replace(self, position=self.position[allowed], cost=self.cost[allowed])


@dataclass(frozen=True, slots=True)
class Choice:
    """A choice of nights.

    Attributes:
        nights: their places in the problem, rising, shape (k,).
        burden: what the module's docstring defines; lower is better.
    """

    nights: Ints
    burden: float


def choose(problem: Problem, count: int, fixed: Ints | None = None) -> Choice:
    """Choose the nights of least burden.

    Args:
        problem: what to choose from.
        count: nights wanted; fewer are chosen only where there are fewer.
        fixed: places of nights that are chosen in any case; they count.

    Returns:
        exactly the choice of least burden among those of ``min(max(count, fixed), n)`` nights.
    """
    size = problem.position.size
    held = np.zeros(size, dtype=np.bool_)
    if fixed is not None:
        held[fixed] = True
    count = min(max(count, int(held.sum())), size)
    if count <= 0:
        return Choice(np.zeros(0, dtype=np.int64), burden(problem, np.zeros(0, dtype=np.int64)))
    nights = _least(problem, _forbid_skips(hole_burdens(problem), held), count)
    return Choice(nights, burden(problem, nights))


def burden(problem: Problem, nights: Ints) -> float:
    """Return the burden of a choice, straight from its definition."""
    chosen = problem.position[nights]
    ends = np.concatenate([[problem.start], chosen, [problem.end]])
    holes = np.sum((np.diff(ends) / problem.step) ** 2)
    # Without a night every mark is missed by the whole campaign.
    nearest = np.full(problem.mark.size, abs(problem.end - problem.start))
    if chosen.size:
        nearest = np.min(np.abs(problem.mark[:, None] - chosen), axis=1)
    marks = np.sum(problem.weight * (nearest / problem.step) ** 2)
    return float(holes + marks + np.sum(problem.cost[nights]))


def hole_burdens(problem: Problem) -> Floats:
    """Return the burden of every hole with the marks in it, shape (n + 2, n + 2).

    Row and column 0 are the beginning, ``k + 1`` night ``k``, the last the end; infinite unless the column
    comes after the row. A mark at a night is in the hole before it, at no cost.
    """
    stops = np.concatenate([[problem.start], problem.position, [problem.end]])
    count = stops.size
    out = ((stops[None, :] - stops[:, None]) / problem.step) ** 2
    for mark, weight in zip(problem.mark.tolist(), problem.weight.tolist(), strict=True):
        off = np.abs(stops - mark) / problem.step
        before, after = off[:, None].repeat(count, axis=1), off[None, :].repeat(count, axis=0)
        before[0, :], after[:, -1] = np.inf, np.inf  # the ends are no nights
        missed = np.minimum(before, after) ** 2 * weight
        out += np.where(_holds(stops, mark), missed, 0.0)
    out[np.tril_indices(count)] = np.inf
    return np.asarray(out)


def _holds(stops: Floats, mark: float) -> Bools:
    """Return which holes a mark lies in; one before the first stop or after the last is in the outermost."""
    first = np.zeros(stops.size, dtype=np.bool_)
    last = first.copy()
    first[0], last[-1] = True, True
    return np.asarray(((stops < mark) | first)[:, None] & ((stops >= mark) | last)[None, :])


def _forbid_skips(holes: Floats, held: Bools) -> Floats:
    """Make every hole infinite that a night chosen in any case lies in."""
    before = np.concatenate([[0, 0], np.cumsum(held)])  # such nights before each stop
    up_to = before + np.concatenate([[0], held.astype(np.int64), [0]])
    return np.where(before[None, :] > up_to[:, None], np.inf, holes)


def _least(problem: Problem, holes: Floats, count: int) -> Ints:
    """Return the chain of ``count`` nights of least sum, shape (count,)."""
    between = holes[1:-1, 1:-1] + problem.cost[None, :]
    reached = holes[0, 1:-1] + problem.cost
    came_from = np.zeros((count, problem.position.size), dtype=np.int64)
    for turn in range(1, count):
        sums = reached[:, None] + between
        came_from[turn] = np.argmin(sums, axis=0)
        reached = np.take_along_axis(sums, came_from[turn][None, :], axis=0)[0]
    last = int(np.argmin(reached + holes[1:-1, -1]))
    out = np.empty(count, dtype=np.int64)
    for turn in range(count - 1, -1, -1):
        out[turn] = last
        last = int(came_from[turn, last])
    return out
