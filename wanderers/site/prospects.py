"""When an event can best be watched: the best evening around its instant, its window, its best moment.

An event is a party of one or more targets that must all stand high enough, in a dark enough sky, at once.
What counts is the one that shows least.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.events.members import ABSENT
from wanderers.events.search import Brackets, refine
from wanderers.site.sightings import RASTER_STEPS, Sightings, Watch, headroom_deg, look, look_exactly
from wanderers.site.visibility import VERDICTS, merit, verdicts

CLIMB_STEPS: Final = tuple(1.0 / RASTER_STEPS / 2.0**halving for halving in (1, 2, 3))
"""From the best moment of the raster steps of 10, 5 and 2.5 minutes lead to the best there is."""
NO_ROW: Final = -1
NOT_VISIBLE: Final = len(VERDICTS) - 1


@dataclass(frozen=True, slots=True)
class Parties:
    """What must be seen together, event by event, n events.

    Attributes:
        jd: TT of the instants, shape (n,).
        reach_days: how far from the instant watching still makes sense, shape (n,).
        haste_mag_per_day: margin that a day away from the instant outweighs, shape (n,). Where there is any,
            the nearest evening on which something shows is taken, with whatever aid; else the best.
        member: target numbers, shape (n, most), those of an event first, else ABSENT.
    """

    jd: Floats
    reach_days: Floats
    haste_mag_per_day: Floats
    member: Ints

    def chosen(self, which: Bools | Ints) -> Parties:
        """Return some of them."""
        reach, haste = self.reach_days[which], self.haste_mag_per_day[which]
        return Parties(self.jd[which], reach, haste, self.member[which])


@dataclass(frozen=True, slots=True)
class Prospects:
    """The best evening of each event, arrays of shape (n,).

    Attributes:
        evening: which evening; where nothing can be watched the one nearest to the instant.
        start_jd: TT, when all are high and the sky is dark; NaN where that never is.
        best_jd: TT of the best moment; likewise.
        end_jd: TT; likewise.
        blocker: place among the event's members of one that is high in the dark on none of the evenings;
            NO_ROW where each is, though perhaps never together.
    """

    evening: Ints
    start_jd: Floats
    best_jd: Floats
    end_jd: Floats
    blocker: Ints


@dataclass(frozen=True, slots=True)
class _Rows:
    """Events on evenings, r rows: which event, which evening, and the places of its members' sightings."""

    event: Ints
    evening: Ints
    pair: Ints


@dataclass(frozen=True, slots=True)
class _Run:
    """Moments of rows, one row after another: place in the watch, whether all is high, verdict and merit.

    ``ever_high``: whether each member of each event is high at some moment within reach, shape (n, most).
    """

    row: Ints
    moment: Ints
    together: Bools
    verdict: Ints
    merit: Floats
    ever_high: Bools


def prospects(watched: Watch, parties: Parties, allowed: Bools | None = None) -> Prospects:
    """Find the best evening of each event and its best moment.

    The best verdict wins (with haste, any that is seen at all), then the evening nearest to the instant.

    Args:
        watched: the evenings and their dark moments.
        parties: the events.
        allowed: evenings that may be chosen, shape (evenings,); all when None.
    """
    rows, seen = _rows(watched, parties, allowed)
    run = _run(watched, parties, rows, seen)
    best = _best_of_rows(run, rows.event.size)
    chosen = _best_of_events(watched, parties, rows, run, best)
    found = chosen != NO_ROW
    start, middle, end = np.full((3, parties.jd.size), np.nan)
    if found.any():
        row = chosen[found]
        place = best[row]
        some = parties.chosen(found)
        start[found], end[found] = _window(watched, some, run, place)
        first_try = watched.jd[run.moment[place]]
        middle[found] = _climbed(watched, some, first_try, start[found], end[found])
    evening = _nearest_evenings(watched, parties.jd)
    evening[found] = rows.evening[chosen[found]]
    return Prospects(evening, start, middle, end, _blockers(parties, run.ever_high))


def candidate_evenings(start_jd: Floats, end_jd: Floats, jd: Floats, reach_days: Floats) -> tuple[Ints, Ints]:
    """Return event and evening of every evening that comes within reach of an event's instant, (k,) each."""
    first = np.searchsorted(end_jd, jd - reach_days, side="right")
    last = np.searchsorted(start_jd, jd + reach_days, side="left")
    count = np.maximum(last - first, 0)
    event = np.repeat(np.arange(jd.size), count)
    evening = np.arange(event.size) - np.repeat(np.cumsum(count) - count, count) + np.repeat(first, count)
    return event, evening


def _rows(watched: Watch, parties: Parties, allowed: Bools | None) -> tuple[_Rows, Sightings]:
    """Look at everything on every evening that matters, each target once an evening."""
    some = watched.evenings
    event, evening = candidate_evenings(some.start_jd, some.end_jd, parties.jd, parties.reach_days)
    if allowed is not None:
        event, evening = event[allowed[evening]], evening[allowed[evening]]
    member = parties.member[event]
    there = member != ABSENT
    evenings = np.broadcast_to(evening[:, None], member.shape)
    seen = look(watched, evenings[there], member[there])
    pair = np.full(member.shape, NO_ROW)
    pair[there] = seen.place_of(evenings[there], member[there])
    return _Rows(event, evening, pair), seen


def _run(watched: Watch, parties: Parties, rows: _Rows, seen: Sightings) -> _Run:
    """Judge every row at every moment of its evening by the member that shows least."""
    count = watched.count[rows.evening]
    row = np.repeat(np.arange(rows.event.size), count)
    step = np.arange(row.size) - np.repeat(np.cumsum(count) - count, count)
    moment = watched.first[rows.evening[row]] + step
    margin, altitude = np.full((2, row.size), np.inf)
    event = rows.event[row]
    away = np.abs(watched.jd[moment] - parties.jd[event])
    within = away <= parties.reach_days[event]
    together = np.ones(row.size, dtype=np.bool_)
    ever_high = np.zeros(parties.member.shape, dtype=np.bool_)
    for slot in range(parties.member.shape[1]):
        pair = rows.pair[row, slot]
        has = pair != NO_ROW
        at = seen.first[pair[has]] + step[has]
        together[has] &= seen.high[at]
        ever_high[event[has][seen.high[at] & within[has]], slot] = True
        margin[has] = np.fmin(margin[has], seen.margin[at])
        altitude[has] = np.minimum(altitude[has], seen.altitude_deg[at])
    criteria = watched.rules.criteria
    verdict = verdicts(margin, criteria, watched.moments.over.sun_altitude_deg[moment])
    worth = merit(margin, altitude, verdict, criteria) - parties.haste_mag_per_day[event] * away
    worth = np.where(together & within, worth, -np.inf)
    return _Run(row, moment, together, verdict, worth, ever_high)


def _best_of_rows(run: _Run, rows: int) -> Ints:
    """Return the place of each row's best moment, the earliest of equals, shape (rows,); NO_ROW without."""
    out = np.full(rows, NO_ROW)
    order = np.lexsort((run.moment, -run.merit, run.row))
    first = np.flatnonzero(np.diff(run.row[order], prepend=NO_ROW))
    best = order[first]
    best = best[np.isfinite(run.merit[best])]
    out[run.row[best]] = best
    return out


def _best_of_events(watched: Watch, parties: Parties, rows: _Rows, run: _Run, best: Ints) -> Ints:
    """Return the best row of each event, shape (n,); NO_ROW where none has a window."""
    out = np.full(parties.jd.size, NO_ROW)
    (row,) = np.nonzero(best != NO_ROW)
    event = rows.event[row]
    away = np.abs(watched.jd[run.moment[best[row]]] - parties.jd[event])
    verdict = run.verdict[best[row]]
    class_of = np.where(parties.haste_mag_per_day[event] > 0.0, verdict == NOT_VISIBLE, verdict)
    order = np.lexsort((away, class_of, event))
    first = np.diff(event[order], prepend=NO_ROW) != 0
    out[event[order][first]] = row[order][first]
    return out


def _window(watched: Watch, parties: Parties, run: _Run, place: Ints) -> tuple[Floats, Floats]:
    """Return when the windows around moments open and close, shape (k,) each, of k parties."""
    stretch = watched.stretch[run.moment]
    breaks = (np.diff(run.row) != 0) | (np.diff(stretch) != 0) | (np.diff(run.together) != 0)
    edge = np.concatenate([[0], np.flatnonzero(breaks) + 1, [run.row.size]])
    at = np.searchsorted(edge, place, side="right")
    first, last = edge[at - 1], edge[at] - 1
    return (
        _edge(watched, parties, run, first, -1),
        _edge(watched, parties, run, last, +1),
    )


def _edge(watched: Watch, parties: Parties, run: _Run, inside: Ints, side: int) -> Floats:
    """Return when a window opens (side -1) or closes (+1), given its outermost moments of the raster."""
    stretch = watched.stretch[run.moment]
    outside = np.clip(inside + side, 0, run.row.size - 1)
    cut_by_dark = (
        (outside == inside) | (run.row[outside] != run.row[inside]) | (stretch[outside] != stretch[inside])
    )
    jd = watched.jd[run.moment[inside]].copy()
    (cut,) = np.nonzero(~cut_by_dark)
    if cut.size:
        jd[cut] = _crossed(watched, parties.chosen(cut), watched.jd[run.moment[outside[cut]]], jd[cut])
    return jd


def _crossed(watched: Watch, parties: Parties, low_jd: Floats, high_jd: Floats) -> Floats:
    """Return when the last member of each party passes its least altitude, between being low and high."""
    ends = np.stack([low_jd, high_jd])
    value = np.stack([_headroom(watched, parties, jd) for jd in ends])
    slope = np.diff(value, axis=0)[0] / np.diff(ends, axis=0)[0]
    left = np.argmin(ends, axis=0)
    column = np.arange(low_jd.size)
    guess = low_jd - value[0] / slope

    def evaluate(number: Ints, jd: Floats) -> tuple[Floats, Floats]:
        return _headroom(watched, parties.chosen(number), jd), slope[number]

    brackets = Brackets(
        column,
        ends[left, column],
        ends[1 - left, column],
        value[left, column],
        value[1 - left, column],
        guess,
    )
    return refine(evaluate, brackets)


def _headroom(watched: Watch, parties: Parties, jd: Floats) -> Floats:
    """Return how far the lowest member stands above the least altitude, shape (k,)."""
    there = parties.member != ABSENT
    instants = np.broadcast_to(jd[:, None], there.shape)[there]
    return _least(there, headroom_deg(watched, parties.member[there], instants))


def _least(there: Bools, values: Floats) -> Floats:
    """Return the least of each party's values, shape (k,), given where members are, shape (k, most)."""
    out = np.full(there.shape, np.inf)
    out[there] = values
    return np.asarray(out.min(axis=1))


def _climbed(watched: Watch, parties: Parties, jd: Floats, start_jd: Floats, end_jd: Floats) -> Floats:
    """Return the best moments that short steps reach within the windows, shape (k,)."""
    best, value = jd, _merits(watched, parties, jd)
    for step in CLIMB_STEPS:
        for tried in (np.maximum(best - step, start_jd), np.minimum(best + step, end_jd)):
            worth = _merits(watched, parties, tried)
            better = worth > value
            best, value = np.where(better, tried, best), np.where(better, worth, value)
    return best


def _merits(watched: Watch, parties: Parties, jd: Floats) -> Floats:
    """Return the merit of the member that shows least, at one moment a party, shape (k,)."""
    there = parties.member != ABSENT
    instants = np.broadcast_to(jd[:, None], there.shape)[there]
    over, seen, margins, _ = look_exactly(watched, parties.member[there], instants)
    sun = _least(there, over.sun_altitude_deg)
    margin = _least(there, margins.least)
    criteria = watched.rules.criteria
    worth = merit(margin, _least(there, seen.altitude_deg), verdicts(margin, criteria, sun), criteria)
    return np.asarray(worth - parties.haste_mag_per_day * np.abs(jd - parties.jd))


def _nearest_evenings(watched: Watch, jd: Floats) -> Ints:
    """Return the evening that holds each instant, else the nearest, shape (n,)."""
    middle = watched.evenings.middle_jd
    after = np.clip(np.searchsorted(middle, jd), 1, max(middle.size - 1, 1))
    if middle.size == 1:
        return np.zeros(jd.size, dtype=np.int64)
    return np.asarray(after - (jd - middle[after - 1] < middle[after] - jd))


def _blockers(parties: Parties, ever_high: Bools) -> Ints:
    """Return of each event the member that never is high in the dark, shape (n,); NO_ROW for none."""
    blocked = (parties.member != ABSENT) & ~ever_high
    return np.where(blocked.any(axis=1), np.argmax(blocked, axis=1), NO_ROW)
