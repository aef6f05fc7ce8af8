"""A plan after some of it happened: what was done stays, what was lost is made good next to its place.

The plan is first made as if nothing had happened, which gives the same plan every time. Then only the holes
that lost nights leave are filled again; every other night stays as it was.
"""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Ints
from wanderers.errors import UsageProblem
from wanderers.plans.choice import Problem, burden, choose

DATE_COLUMN: Final = "evening_date"
STATUS_COLUMN: Final = "status"


class Status(StrEnum):
    """What became of a night."""

    PLANNED = "planned"
    DONE = "done"
    LOST = "lost"


STATUS_WORDS: Final = {"done": Status.DONE, "lost": Status.LOST, "cloudy": Status.LOST}


class LogError(UsageProblem):
    """A list of nights that cannot be read."""


@dataclass(frozen=True, slots=True)
class LoggedNight:
    """A night that has passed.

    Attributes:
        evening: its evening date.
        status: done or lost.
    """

    evening: date
    status: Status = Status.DONE


def read_log(text: str, name: str = "the list of nights") -> tuple[LoggedNight, ...]:
    """Read the nights of a campaign that have passed.

    Args:
        text: CSV with a column ``evening_date`` (ISO 8601) and, if wanted, ``status``: ``done`` (also where
            it is empty or not there), ``lost`` or ``cloudy``, or ``planned`` for nights of which nothing is
            reported. Other columns are ignored, so a plan whose status was filled in can be read as it is.
        name: what the text is called in an error.

    Returns:
        the nights in order of date.

    Raises:
        LogError: no such column, a date that does not exist, another status, a night twice.
    """
    rows = csv.DictReader(io.StringIO(text.removeprefix("\N{ZERO WIDTH NO-BREAK SPACE}")))
    if rows.fieldnames is None or DATE_COLUMN not in rows.fieldnames:
        raise LogError(f"{name} has no column {DATE_COLUMN}: its first line must name the columns")
    found: dict[date, LoggedNight] = {}
    for row in rows:
        night = _logged(row, f"{name}, line {rows.line_num}")
        if night is None:
            continue
        if night.evening in found:
            raise LogError(f"{name}, line {rows.line_num}: {night.evening} stands there twice; leave one")
        found[night.evening] = night
    return tuple(found[day] for day in sorted(found))


def _logged(row: dict[str, str | None], where: str) -> LoggedNight | None:
    """Return the night of a row; None if nothing is reported of it."""
    text = (row.get(DATE_COLUMN) or "").strip()
    status = (row.get(STATUS_COLUMN) or Status.DONE.value).strip().lower() or Status.DONE.value
    if not text or status == Status.PLANNED.value:
        return None
    if status not in STATUS_WORDS:
        raise LogError(f"{where}: status '{status}' is not known: write {', '.join(STATUS_WORDS)} or planned")
    return LoggedNight(parse_evening(text, where), STATUS_WORDS[status])


def parse_evening(text: str, where: str = "the evening") -> date:
    """Return the evening date of a text.

    Raises:
        LogError: it is none.
    """
    try:
        return date.fromisoformat(text.strip())
    except ValueError:
        raise LogError(f"{where}: '{text}' is no date: write it as 2027-03-05") from None


@dataclass(frozen=True, slots=True)
class Replan:
    """What a plan turns into.

    Attributes:
        nights: places of the nights that are planned now, done ones included, rising.
        added: of them, those that were not planned before and are still to come.
        dropped: places of the nights that were planned and are lost or skipped.
    """

    nights: Ints
    added: Ints
    dropped: Ints


def mend(problem: Problem, old: Ints, *, lost: Ints, done: Ints, open_to_choice: Bools) -> Replan:
    """Fill the holes that lost nights leave in a plan, and nothing else.

    A hole reaches from the last night kept before a run of lost ones to the first kept after it. In it as
    many nights are chosen, at most, as were lost there, and only as many as lower the burden; the nights kept
    on either side stay. A night done that was not planned counts as kept, so it may make a lost one good.

    Args:
        problem: all nights, usable or not.
        old: places of the nights planned before, rising.
        lost: places of nights lost or skipped; those that were not planned change nothing.
        done: places of nights done, planned or not.
        open_to_choice: which nights may be newly planned, shape (n,).
    """
    dropped = np.setdiff1d(np.intersect1d(old, lost), done)
    kept = np.union1d(np.setdiff1d(old, lost), done).astype(np.int64)
    free = open_to_choice.copy()
    free[lost] = False
    holes, counts = np.unique(np.searchsorted(kept, dropped), return_counts=True)
    added = [
        _fill(problem, kept, int(hole), int(count), free) for hole, count in zip(holes, counts, strict=True)
    ]
    new = np.concatenate([np.zeros(0, dtype=np.int64), *added])
    return Replan(np.union1d(kept, new).astype(np.int64), new, dropped)


def _fill(problem: Problem, kept: Ints, hole: int, count: int, free: Bools) -> Ints:
    """Return the nights, at most ``count``, that best fill the hole before the kept night of that number."""
    size = problem.position.size
    left = int(kept[hole - 1]) if hole > 0 else -1
    right = int(kept[hole]) if hole < kept.size else size
    inside = np.arange(left + 1, right)
    inside = inside[free[inside]]
    fixed = np.array([night for night in (left, right) if 0 <= night < size], dtype=np.int64)
    candidates = np.union1d(inside, fixed).astype(np.int64)
    part = problem.only(candidates)
    held = np.searchsorted(candidates, fixed)
    best, least = fixed, burden(problem, kept)
    for wanted in range(1, min(count, inside.size) + 1):
        chosen = candidates[choose(part, fixed.size + wanted, held).nights]
        whole = burden(problem, np.union1d(kept, chosen).astype(np.int64))
        if whole < least:
            best, least = chosen, whole
    return np.setdiff1d(best, fixed)
