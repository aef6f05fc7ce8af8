"""What a plan can hope for under clouds."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.plans.clouds import (
    chance_of_all,
    chance_of_any,
    expected_count,
    expected_longest_hole,
    longest_hole,
)
from wanderers.plans.draft import Draft
from wanderers.plans.season import TURNS, CampaignSeason
from wanderers.plans.spares import Line


@dataclass(frozen=True, slots=True)
class MomentChance:
    """How likely a moment is got.

    Attributes:
        name: of the moment.
        words: what it is called.
        tries: planned and spare nights near enough to it that are still to come.
        chance: that one of them is clear; 1 where it is done.
    """

    name: str
    words: str
    tries: int
    chance: float


@dataclass(frozen=True, slots=True)
class Chances:
    """What clouds leave of a plan, each night being lost by itself.

    Attributes:
        cloudy: share of nights lost.
        planned: nights in the plan, done ones included.
        expected_frames: nights expected clear, without spares.
        expected_frames_with_spares: nights expected got when spares are used.
        moments: chances of the moments that a campaign must have.
        both_turns: chance that both turns are got.
        longest_hole_deg: longest stretch of path without a night if all are clear, from the first night of
            the campaign that can be used to the last.
        expected_longest_hole_deg: the same as expected under clouds, without spares.
        longest_hole_days: longest time without a night if all are clear.
        expected_longest_hole_days: likewise.
    """

    cloudy: float
    planned: int
    expected_frames: float
    expected_frames_with_spares: float
    moments: tuple[MomentChance, ...]
    both_turns: float
    longest_hole_deg: float
    expected_longest_hole_deg: float
    longest_hole_days: float
    expected_longest_hole_days: float


def chances_of(season: CampaignSeason, line: Line, draft: Draft, cloudy: float) -> Chances:
    """Return what clouds leave of a plan."""
    alive = draft.new.nights
    is_done = np.isin(alive, draft.done)
    clear = np.where(is_done, 1.0, 1.0 - cloudy)
    tries = np.array([1 + len(draft.spares.get(night, [])) for night in alive.tolist()], dtype=np.int64)
    with_spares = np.where(is_done, 1.0, chance_of_any(cloudy, tries))
    groups = _groups(season, line, draft)
    reach = np.union1d(draft.usable, draft.done).astype(np.int64)
    reach = reach[[0, -1]] if reach.size else reach
    hole_deg, expected_hole_deg = _holes(line.along_deg, alive, clear, reach)
    hole_days, expected_hole_days = _holes(line.jd, alive, clear, reach)
    return Chances(
        cloudy=cloudy,
        planned=int(alive.size),
        expected_frames=expected_count(clear),
        expected_frames_with_spares=expected_count(with_spares),
        moments=tuple(
            MomentChance(moment.name, moment.words, *_tries_and_chance(groups[moment.name], cloudy))
            for moment in season.moments
            if moment.must
        ),
        both_turns=_chance_of([groups[name] for name in TURNS], cloudy),
        longest_hole_deg=hole_deg,
        expected_longest_hole_deg=expected_hole_deg,
        longest_hole_days=hole_days,
        expected_longest_hole_days=expected_hole_days,
    )


def _groups(season: CampaignSeason, line: Line, draft: Draft) -> dict[str, frozenset[str] | None]:
    """Return the nights that may serve each moment, None where it is done already."""
    spare = [night for own in draft.spares.values() for night in own]
    to_come = np.union1d(np.setdiff1d(draft.new.nights, draft.done), np.array(spare, dtype=np.int64))
    out: dict[str, frozenset[str] | None] = {}
    for moment, place in zip(season.moments, season.moment_deg.tolist(), strict=True):
        near = line.serves(moment, place)
        able = frozenset(str(night) for night in to_come[near[to_come.astype(np.int64)]].tolist())
        out[moment.name] = None if near[draft.done].any() else able
    return out


def _tries_and_chance(nights: frozenset[str] | None, cloudy: float) -> tuple[int, float]:
    return (0 if nights is None else len(nights)), _chance_of([nights], cloudy)


def _chance_of(groups: list[frozenset[str] | None], cloudy: float) -> float:
    """Return the chance that all moments are got that are not done yet."""
    open_groups = [nights for nights in groups if nights is not None]
    return chance_of_all(cloudy, open_groups) if all(open_groups) else 0.0


def _holes(position: Floats, alive: Ints, clear: Floats, reach: Ints) -> tuple[float, float]:
    """Return the longest hole if all planned nights are clear, and as expected; 0 where none can be used."""
    if reach.size == 0:
        return 0.0, 0.0
    start, end = position[reach].tolist()
    planned = position[alive]
    return longest_hole(planned, start, end), expected_longest_hole(planned, clear, start, end)
