"""The choice of nights with all that follows from it: roles, spares, what became of each."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats, Ints
from wanderers.plans.choice import Problem, choose
from wanderers.plans.replan import Replan, Status, mend
from wanderers.plans.request import Aim, CampaignRequest
from wanderers.plans.season import CampaignSeason
from wanderers.plans.spares import Line, holders, spare_nights

MUST_WEIGHT: Final = 20.0
WISH_WEIGHT: Final = 2.0
"""What missing a moment by one step costs, in holes of one step. No source: a choice."""
POOR_NIGHT_COST: Final = 0.5
"""What a night of score 0 costs more than one of 100, in holes of one step. No source: a choice."""


@dataclass(frozen=True, slots=True)
class Draft:
    """A choice of nights with all that follows from it; nights are places in the table of all nights.

    Attributes:
        old: planned before anything happened.
        new: planned now, and how that differs.
        done: nights done.
        lost_past: planned nights that have passed and are lost: they stay in the plan as they were.
        held: night by name of the moment it serves.
        held_before: likewise, in the plan before anything happened.
        spares: nights that stand in, by planned night still to come.
        step_deg: the even step along the path that was aimed at.
        usable: nights that could be planned before anything happened.
    """

    old: Ints
    new: Replan
    done: Ints
    lost_past: Ints
    held: dict[str, int]
    held_before: dict[str, int]
    spares: dict[int, list[int]]
    step_deg: float
    usable: Ints

    def moments_of(self, night: int) -> list[str]:
        """Return the names of the moments that a night serves, or served before it was lost."""
        held = self.held_before if night in self.lost_past else self.held
        return [name for name, holder in held.items() if holder == night]

    def status_of(self, night: int) -> Status:
        """Return what became of a night."""
        if night in self.done:
            return Status.DONE
        return Status.LOST if night in self.lost_past else Status.PLANNED


def draft_of(season: CampaignSeason, nights: pl.DataFrame, request: CampaignRequest, aim: Aim) -> Draft:
    """Choose the nights, mend the plan where something happened, give each night its role and its spares."""
    problem, line = problem_of(season, nights, aim), line_of(nights, aim)
    days = nights["evening_date"].to_list()
    usable = nights["usable"].to_numpy()
    open_now = usable & _from(days, request.first_open)
    eligible = np.flatnonzero(usable if request.reports else open_now)
    old = eligible[choose(problem.only(eligible), aim.count).nights]
    done, lost, past = _happened(days, request, old)
    new = mend(problem, old, lost=lost, done=done, open_to_choice=open_now)
    held_before = holders(line, old, season.moments, season.moment_deg)
    settled = np.setdiff1d(np.intersect1d(done, old), new.added)
    held = _held(season, line, held_before, new, settled)
    to_come = set(np.setdiff1d(new.nights, done).tolist())
    musts = {
        held[moment.name]: place
        for moment, place in zip(season.moments, season.moment_deg.tolist(), strict=True)
        if moment.must and held.get(moment.name) in to_come
    }
    free = open_now.copy()
    free[lost] = False
    spares = spare_nights(line, new.nights, musts, free, request.spares)
    return Draft(
        old=old,
        new=new,
        done=done,
        lost_past=np.intersect1d(np.intersect1d(lost, old), past),
        held=held,
        held_before=held_before,
        spares={night: own for night, own in spares.items() if night in to_come},
        step_deg=aim.step_deg,
        usable=eligible,
    )


def _from(days: list[str], first: date | None) -> Bools:
    """Return which evenings lie on or after a date, shape (n,)."""
    if first is None:
        return np.ones(len(days), dtype=np.bool_)
    return np.asarray(np.array(days, dtype="datetime64[D]") >= np.datetime64(first))


def _happened(days: list[str], request: CampaignRequest, old: Ints) -> tuple[Ints, Ints, Ints]:
    """Return the places of nights done, of nights lost or skipped, and of all that have passed."""
    place = {day: index for index, day in enumerate(days)}
    done, lost = (
        {
            place[day]
            for day in (night.evening.isoformat() for night in request.log if night.status is status)
            if day in place
        }
        for status in (Status.DONE, Status.LOST)
    )
    past = set(np.flatnonzero(~_from(days, request.first_open)).tolist())
    skipped = {place[day.isoformat()] for day in request.skip if day.isoformat() in place}
    silent = (set(old.tolist()) & past) - done if request.reports else set()
    return tuple(  # type: ignore[return-value]
        np.array(sorted(some), dtype=np.int64)
        for some in (done, (lost | skipped | silent) - done, past | done | lost)
    )


def _held(
    season: CampaignSeason, line: Line, before: dict[str, int], new: Replan, settled: Ints
) -> dict[str, int]:
    """Return which night serves each moment: the one that did, else the nearest whose role is not settled."""
    now = holders(line, np.setdiff1d(new.nights, settled), season.moments, season.moment_deg)
    alive = set(new.nights.tolist())
    return {
        moment.name: before[moment.name] if before.get(moment.name) in alive else now[moment.name]
        for moment in season.moments
        if before.get(moment.name) in alive or moment.name in now
    }


def served(season: CampaignSeason, line: Line, draft: Draft) -> dict[str, bool]:
    """Return whether each moment that a campaign must have is had."""
    alive = draft.new.nights
    return {
        moment.name: bool(line.serves(moment, place)[alive].any())
        for moment, place in zip(season.moments, season.moment_deg.tolist(), strict=True)
        if moment.must
    }


def problem_of(season: CampaignSeason, nights: pl.DataFrame, aim: Aim) -> Problem:
    """Return the choice of nights as numbers, all nights of the campaign in it."""

    def position(along: Floats, turned: Floats) -> Floats:
        return np.asarray(along + aim.bend_deg * turned)

    jd = np.concatenate([[season.start_jd, season.end_jd], season.moment_jd])
    placed = position(season.path.along_at(jd), season.path.turned_at(jd))
    wanted = np.array([moment.must for moment in season.moments])
    quality = nights["score"].fill_null(0.0).to_numpy()
    return Problem(
        position=position(nights["path_deg"].to_numpy(), nights["turned_deg"].to_numpy()),
        start=float(placed[0]),
        end=float(placed[1]),
        step=float(placed[1] - placed[0]) * aim.step_deg / aim.length_deg,
        cost=POOR_NIGHT_COST * (1.0 - quality / 100.0),
        mark=placed[2:],
        weight=np.where(wanted, MUST_WEIGHT, WISH_WEIGHT),
    )


def line_of(nights: pl.DataFrame, aim: Aim) -> Line:
    """Return all nights by place and time."""
    jd = nights["nominal_jd"].to_numpy()
    return Line(jd, nights["path_deg"].to_numpy(), aim.near_deg, aim.step_deg / 2.0)
