"""A plan in words: why each night, what changed, what the observer should know."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
import polars as pl

from wanderers.plans.columns import CHANGE_COLUMNS, arranged
from wanderers.plans.draft import Draft
from wanderers.plans.replan import Status
from wanderers.plans.request import Aim, CampaignRequest
from wanderers.plans.rules import CampaignRules
from wanderers.plans.season import NEXT, CampaignSeason, Moment
from wanderers.site import reasons as sky_words
from wanderers.site.hours import WEEKDAY_NAMES
from wanderers.site.summary import counted

BENT: Final = 6.0
"""Degrees of turning a degree of path from which a stretch is called a bend."""
LONG_BREAK_DAYS: Final = 4
"""Days without a usable night from which a break is mentioned."""
SORTS_TOLD: Final = 3
EDGE_NIGHTS: Final = 3
"""Unusable nights at the beginning or end of a campaign from which they are mentioned."""
CLOSER: Final = 0.8
"""Part of the even step below which a step is called closer."""
TOLD_DEG: Final = 0.05
MOVED_MINUTES: Final = 15.0


def reasons(season: CampaignSeason, nights: pl.DataFrame, draft: Draft, night: int) -> str:
    """Return why a night is in the plan, in words."""
    row = nights.row(night, named=True)
    moments = {moment.name: moment for moment in season.moments}
    told = [_at_moment(season, moments[name], row) for name in draft.moments_of(night)]
    if not told:
        told = [_along_path(nights, draft, night)]
    return "; ".join([*told, *_conditions(row)])


def spare_reasons(nights: pl.DataFrame, spare: int, night: int) -> str:
    """Return what a spare night is for, in words."""
    planned = nights["evening_date"][night]
    clouds = f"if {planned} is cloudy" if spare > night else f"instead of {planned}, if clouds are forecast"
    return "; ".join([f"to be used {clouds}", *_conditions(nights.row(spare, named=True))])


def changes(nights: pl.DataFrame, draft: Draft, plan: pl.DataFrame, skipped: set[str]) -> pl.DataFrame:
    """List the nights added, dropped and kept; a night lost in the past stays in the plan, yet is dropped."""
    days = nights["evening_date"].to_list()
    role = dict(zip(plan["evening_date"].to_list(), plan["role"].to_list(), strict=True))
    told: list[dict[str, Any]] = []
    for night in np.union1d(np.union1d(draft.old, draft.new.nights), draft.new.dropped).tolist():
        day = days[night]
        before = [name for name, holder in draft.held_before.items() if holder == night]
        now = draft.moments_of(night)
        if night in draft.new.dropped:
            what, why = "dropped", "skipped as asked" if day in skipped else "lost"
        elif night in draft.new.added:
            what, why = "added", "fills the hole that a lost night leaves"
        elif night not in draft.old:
            what, why = "added", "done beside the plan"
        else:
            what, why = "kept", _kept(draft, night, before, now)
        told.append({"evening_date": day, "change": what, "role": role.get(day), "reason": why})
    return arranged(pl.DataFrame(told, schema=CHANGE_COLUMNS), CHANGE_COLUMNS)


def notes(
    season: CampaignSeason,
    nights: pl.DataFrame,
    draft: Draft,
    rules: CampaignRules,
    request: CampaignRequest,
    aim: Aim,
    had: dict[str, bool],
) -> tuple[str, ...]:
    """Return what the observer should know, in sentences."""
    count = int(nights["usable"].sum())
    lines = [
        rules_sentence(season, rules),
        f"{count} of {nights.height} nights can be used; {draft.new.nights.size} are planned"
        + (f", of {aim.count} wanted." if draft.new.nights.size < aim.count else "."),
        *season.notes,
    ]
    if count == 0:
        return (*lines, f"No night can be used: {_all_sorts(nights)}.")
    lines += _edges(nights)
    lines += [
        f"No night for the {moment.words} on {_day(nights, moment)}: {_why_not(nights, moment, request)}."
        for moment in season.moments
        if moment.must and not had[moment.name]
    ]
    return (*lines, *_reported(nights, draft, request))


def rules_sentence(season: CampaignSeason, rules: CampaignRules) -> str:
    """Return what a night had to offer."""
    days = ""
    if rules.weekdays_asked:
        days = ", on a " + " or ".join(WEEKDAY_NAMES[day] for day in rules.weekdays_asked)
    return (
        f"A night is usable with {season.body.label} {rules.min_altitude_deg:g} degrees up or more and "
        f"the Sun {sky_words.depth_words(rules.sun_below_deg)} for {rules.min_window_minutes:g} minutes or "
        f"more, and the Moon down or {rules.moon_bright_deg:g} degrees away ({rules.moon_faint_deg:g} if "
        f"it is lit {rules.moon_half * 100.0:g} % or less){days}."
    )


def _at_moment(season: CampaignSeason, moment: Moment, row: dict[str, Any]) -> str:
    """Return how near a night comes to a moment."""
    later_days = row["nominal_jd"] - moment.jd_tt
    hours = abs(later_days) * 24.0
    side = "after" if later_days > 0.0 else "before"
    apart = counted(hours, "hour") if hours < 36.0 else counted(abs(later_days), "day")
    when = "within the hour" if hours < 1.0 else f"{apart} {side} it"
    off = abs(row["path_deg"] - season.path.reached_deg(moment.jd_tt))
    place = f", {off:.1f} degrees from it along the path" if off >= TOLD_DEG else ""
    return f"{moment.words}, {when}{place}"


def _along_path(nights: pl.DataFrame, draft: Draft, night: int) -> str:
    """Return what a night without a moment is good for."""
    if night in draft.done and night not in draft.old:
        return "done beside the plan"
    planned = draft.new.nights
    before = planned[planned < night]
    step = float(nights["path_deg"][night] - nights["path_deg"][int(before[-1])]) if before.size else np.inf
    word = "step along the path"
    if float(nights["bend"][night]) >= BENT and step < CLOSER * draft.step_deg:
        word = "closer step in the bend"
    usable = np.flatnonzero(nights["usable"].to_numpy())
    earlier = usable[usable < night]
    apart = night - int(earlier[-1]) if earlier.size else 0
    if apart > LONG_BREAK_DAYS:
        word += f", the first usable night after {apart - 1} that are not"
    return word


def _conditions(row: dict[str, Any]) -> list[str]:
    """Return where the planet stands, in what light, and what the Moon does."""
    if row["recommended_jd"] is None:
        return ["outside what was asked of a night"]
    told = [str(row["verdict_reason"])]
    lit, apart = row["moon_illuminated"], row["moon_separation_deg"]
    if lit is not None and row["moon_altitude_deg"] > 0.0:
        told.append(f"Moon {lit * 100.0:.0f} % lit, {apart:.0f} degrees away")
    elif lit is not None:
        told.append("Moon down")
    upright = row["culmination_jd"] or row["window_start_jd"]
    upright = min(max(upright, row["window_start_jd"]), row["window_end_jd"])
    if abs(row["recommended_jd"] - upright) * sky_words.MINUTES_PER_DAY > MOVED_MINUTES:
        told.append("the field stands tilted: the hour is chosen away from the Moon")
    return told


def _kept(draft: Draft, night: int, before: list[str], now: list[str]) -> str:
    if night in draft.done:
        return Status.DONE.value
    gained = [name for name in now if name not in before]
    return f"as planned, now also for {'+'.join(gained)}" if gained else "as planned"


def _edges(nights: pl.DataFrame) -> list[str]:
    """Return what keeps the first and the last nights of a campaign from being used."""
    usable = np.flatnonzero(nights["usable"].to_numpy())
    first, last = int(usable[0]), int(usable[-1])
    days = nights["evening_date"]
    told = []
    if first >= EDGE_NIGHTS:
        told.append(
            f"The first night that can be used is {days[first]}: before it, {_commonest(nights[:first])}."
        )
    if nights.height - 1 - last >= EDGE_NIGHTS:
        told.append(
            f"The last night that can be used is {days[last]}: after it, {_commonest(nights[last + 1 :])}."
        )
    return told


def _commonest(nights: pl.DataFrame) -> str:
    """Return the reason of the night in the middle of the commonest sort of reasons."""
    return _sorts(nights)[0][0]


def _all_sorts(nights: pl.DataFrame) -> str:
    """Return the commonest sorts of reasons with how many nights each spoils."""
    return ", or ".join(f"{reason} ({count} nights)" for reason, count in _sorts(nights)[:SORTS_TOLD])


def _sorts(nights: pl.DataFrame) -> list[tuple[str, int]]:
    """Return the sorts of reasons (reasons but for their numbers), commonest first, and their counts."""
    told = nights.filter(pl.col("reason").is_not_null())
    sorts = (
        told.group_by(pl.col("reason").str.replace_all(r"\d+", "#").alias("sort"), maintain_order=True)
        .agg(pl.len().alias("count"), pl.col("reason").get(pl.len() // 2))
        .sort("count", descending=True, maintain_order=True)
    )
    return list(zip(sorts["reason"].to_list(), sorts["count"].to_list(), strict=True))


def _day(nights: pl.DataFrame, moment: Moment) -> str:
    return str(nights["evening_date"][_nearest(nights, moment)])


def _why_not(nights: pl.DataFrame, moment: Moment, request: CampaignRequest) -> str:
    """Return what spoils the night of a moment."""
    first_open = request.first_open
    if first_open is not None and np.datetime64(_day(nights, moment)) < np.datetime64(first_open):
        return "it is past"
    reason = nights["reason"][_nearest(nights, moment)]
    return str(reason) if reason else "the nights near it are skipped or lost, or fewer nights are wanted"


def _nearest(nights: pl.DataFrame, moment: Moment) -> int:
    return int(np.argmin(np.abs(nights["nominal_jd"].to_numpy() - moment.jd_tt)))


def _reported(nights: pl.DataFrame, draft: Draft, request: CampaignRequest) -> list[str]:
    """Return what became of the nights reported and skipped."""
    days = nights["evening_date"].to_list()
    told = []
    if request.season == NEXT and not request.reports and np.datetime64(days[0]) < np.datetime64(request.now):
        told.append(
            f"Nights before {request.now} are past: give the season's id to plan the season as a whole."
        )
    strange = [night.evening for night in request.log] + list(request.skip)
    outside = sorted({day.isoformat() for day in strange} - set(days))
    if outside:
        told.append(f"Not within this campaign and left aside: {', '.join(outside)}.")
    told += [
        f"{day} was not planned: leaving it out changes no planned night."
        for day in request.skip
        if day.isoformat() in days and days.index(day.isoformat()) not in draft.old
    ]
    return told
