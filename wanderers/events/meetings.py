"""Meetings: what a user calls one encounter of two bodies, however many conjunctions it has.

The rule. Two bodies that lap each other meet once a lap: all their conjunctions, in longitude and in right
ascension, and all their least separations that fall into one lap (counted by mean longitudes, see
:mod:`wanderers.events.cycles`) are one meeting. Retrograde motion makes it a triple, rarely a quintuple.
Mercury and Venus never lap each other; their conjunctions and approaches within 10 degrees are one meeting
while no more than 45 days pass from one to the next.

Conjunctions are numbered within a meeting, frame by frame; so are the least separations to which one
belongs. The greatest separations part one approach from the next: a least separation with no conjunction of
either frame between the greatest separations on both sides of it is ``quasi``.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import Body
from wanderers.events.approaches import APPULSE_DETAILS
from wanderers.events.kinds import Batch, Kind

FARTHEST: Final = APPULSE_DETAILS.index("farthest")
QUASI: Final = APPULSE_DETAILS.index("quasi")
INNER_GAP_DAYS: Final = 45.0
INNER_REACH_DEG: Final = 10.0


@dataclass(frozen=True, slots=True)
class Meeting:
    """Which meeting each event of a batch belongs to: shape (n,) each.

    Attributes:
        number: of the meeting among those of its pair.
        part: 1 for the meeting's first event of this kind and frame, ...
        parts: how many there are.
        approach: number of the stretch between two greatest separations in which the event falls.
    """

    number: Ints
    part: Ints
    parts: Ints
    approach: Ints

    def chosen(self, keep: Bools | slice) -> Meeting:
        """Return the entries where ``keep`` is true, or of a slice."""
        return Meeting(self.number[keep], self.part[keep], self.parts[keep], self.approach[keep])


def meetings_of(batch: Batch, laps: Ints, appulse: Batch) -> Meeting:
    """Number the parts of every meeting in one batch of conjunctions or of least separations.

    Args:
        batch: events of one kind and frame, every meeting whole.
        laps: the number of the lap of each; for Mercury with Venus, of the cluster.
        appulse: least and greatest separations of all pairs.

    Returns:
        the meetings; part and parts are 0 for least separations to which no conjunction belongs.
    """
    approach = _approach_keys(batch, appulse)
    counted = np.ones(batch.jd.size, dtype=np.bool_)
    if batch.kind is Kind.APPULSE:
        counted = batch.detail == 0
    part, parts = np.zeros_like(laps), np.zeros_like(laps)
    part[counted], parts[counted] = _counted(batch.chosen(counted), laps[counted])
    return Meeting(laps, part, parts, approach)


def _counted(batch: Batch, laps: Ints) -> tuple[Ints, Ints]:
    """Return each event's place in its meeting, from 1, and the number of events of the meeting."""
    keys = np.stack([batch.body, batch.other, laps])
    order = np.lexsort((batch.jd, *keys))
    placed = keys[:, order]
    starts = np.ones(batch.jd.size, dtype=np.bool_)
    starts[1:] = (placed[:, 1:] != placed[:, :-1]).any(axis=0)
    group = np.cumsum(starts) - 1
    position = np.arange(batch.jd.size)
    part, parts = np.empty_like(position), np.empty_like(position)
    part[order] = position - position[starts][group] + 1
    parts[order] = np.bincount(group, minlength=1)[group]
    return part, parts


def inner_clusters(conjunctions: list[Batch], appulse: Batch, rounds: list[Ints]) -> list[Ints]:
    """Replace the rounds of Mercury with Venus by numbers of clusters in time.

    Args:
        conjunctions: a batch a frame.
        appulse: least and greatest separations.
        rounds: the laps of each batch, conjunctions first.

    Returns:
        the rounds with every meeting of Mercury and Venus numbered by its first event's round, times ten,
        plus how many meetings began in that round before it.
    """
    batches = [*conjunctions, appulse]
    joins = [_inner(batch) for batch in batches]
    joins[-1] &= _within_reach(appulse)
    jd = np.concatenate([batch.jd[own] for batch, own in zip(batches, joins, strict=True)])
    lap = np.concatenate([numbers[own] for numbers, own in zip(rounds, joins, strict=True)])
    if jd.size == 0:
        return rounds
    number = np.empty_like(lap)
    order = np.argsort(jd, kind="stable")
    number[order] = _cluster_numbers(jd[order], lap[order])
    out, start = [numbers.copy() for numbers in rounds], 0
    for numbers, own in zip(out, joins, strict=True):
        count = int(own.sum())
        numbers[own] = number[start : start + count]
        start += count
    return out


def _cluster_numbers(jd: Floats, lap: Ints) -> Ints:
    """Number runs of events in order of time, shape (n,)."""
    begins = np.concatenate([[True], np.diff(jd) > INNER_GAP_DAYS])
    first_lap = lap[begins]
    same_lap = np.concatenate([[False], first_lap[1:] == first_lap[:-1]])
    return np.asarray((first_lap * 10 + same_lap)[np.cumsum(begins) - 1])


def marked_quasi(conjunctions: list[Batch], appulse: Batch) -> Batch:
    """Return least separations with those marked that no conjunction belongs to."""
    met = np.concatenate(
        [_approach_keys(batch, appulse) for batch in conjunctions] or [np.empty(0, dtype=np.int64)]
    )
    own = _approach_keys(appulse, appulse)
    lonely = ~np.isin(own, met) & (appulse.detail != FARTHEST)
    return replace(appulse, detail=np.where(lonely, QUASI, appulse.detail))


def _approach_keys(batch: Batch, appulse: Batch) -> Ints:
    """Number approaches: pair and count of their borders before each event, shape (n,)."""
    pair = batch.body * 1000 + batch.other
    return np.asarray(np.searchsorted(_borders(appulse), _pair_times(batch)) + pair * 10_000_000)


def _borders(appulse: Batch) -> Floats:
    """Return where one approach gives way to the next, as pair times, rising, shape (k,).

    That is at the greatest separations. Those from stars are not followed beyond their reach: where none is
    known between two least separations the middle between them stands in.
    """
    order = np.argsort(_pair_times(appulse), kind="stable")
    placed, farthest = _pair_times(appulse)[order], appulse.detail[order] == FARTHEST
    pair = (appulse.body * 1000 + appulse.other)[order]
    unparted = ~farthest[1:] & ~farthest[:-1] & (pair[1:] == pair[:-1])
    middles = (placed[1:] + placed[:-1])[unparted] / 2.0
    return np.sort(np.concatenate([placed[farthest], middles]))


def _pair_times(batch: Batch) -> Floats:
    """Set the times of different pairs apart, so that one sorted list serves them all, shape (n,)."""
    return np.asarray((batch.body * 1000 + batch.other) * 1e8 + batch.jd)


def _inner(batch: Batch) -> Bools:
    return np.asarray((batch.body == Body.MERCURY.order) & (batch.other == Body.VENUS.order))


def _within_reach(appulse: Batch) -> Bools:
    figure = np.zeros(appulse.jd.size) if appulse.figure_deg is None else appulse.figure_deg
    return np.asarray((figure < INNER_REACH_DEG) & (appulse.detail != FARTHEST))
