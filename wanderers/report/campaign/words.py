"""A campaign in words: dates, times and places of its nights as page, sheet and calendar print them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from itertools import zip_longest
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers.plans.replan import Status
from wanderers.plans.rows import GOOD, MUST, SPARE
from wanderers.report import facts
from wanderers.report.campaign.contents import CampaignContents, to_come
from wanderers.report.charts.timeaxis import MONTHS
from wanderers.report.facts import MINUS
from wanderers.site.compass import LETTERS, POINTS

Night = Mapping[str, Any]
"""A row of a plan or of a table of spares."""

MINUTES_A_DAY: Final = 1_440
ROLE_WORDS: Final = {MUST: "must", GOOD: "planned", SPARE: "spare"}
DOWN: Final = "down"


def clock(local: str | None) -> str:
    """Return the time of day of a local instant (ISO 8601) to the nearest minute; empty for none."""
    if not local:
        return ""
    hour, minute, second = local.partition("T")[2][:8].split(":")
    minutes = (int(hour) * 60 + int(minute) + (float(second) >= 30.0)) % MINUTES_A_DAY
    return f"{minutes // 60:02d}:{minutes % 60:02d}"


def is_after_midnight(night: Night) -> bool:
    """Return whether the recommended time lies on the date after the evening's."""
    local = night["recommended_local"]
    return bool(local) and not str(local).startswith(str(night["evening_date"]))


def short_day(evening: str) -> str:
    """Return a date as 3 Mar."""
    _, month, day = evening.rsplit("-", 2)
    return f"{int(day)}\N{NO-BREAK SPACE}{MONTHS[int(month) - 1]}"


def short_evening(night: Night) -> str:
    """Return a night's evening as Wed 3 Mar."""
    return f"{str(night['weekday'])[:3]} {short_day(night['evening_date'])}"


def _day_before(day: str, later: str) -> str:
    """Return a date that a later one follows, the month named only where it changes: 14, or 30 Nov."""
    month, _, number = day.rpartition("-")
    return str(int(number)) if month == later.rpartition("-")[0] else short_day(day)


def long_day(evening: str) -> str:
    """Return a date as 3 March 2027."""
    year, month, day = evening.rsplit("-", 2)
    return f"{int(day)} {facts.MONTHS[int(month) - 1]} {year.replace('-', MINUS).lstrip('0') or '0'}"


def next_day(evening: str) -> str:
    """Return the date after a date."""
    return str(np.datetime64(evening, "D") + 1)


def night_words(night: Night) -> str:
    """Return which night is meant, both dates named: the night of Friday 13 to 14 November 2026."""
    first, last = str(night["evening_date"]), next_day(str(night["evening_date"]))
    return f"the night of {night['weekday']} {_day_before(first, last)} to {long_day(last)}"


def window(night: Night) -> str:
    """Return from when to when a night's window lasts."""
    start, end = clock(night["window_start_local"]), clock(night["window_end_local"])
    return f"{start}–{end}" if start and end else ""


def moon(night: Night) -> str:
    """Return what the Moon does, in short: its lit part and how far it stands, or that it is down."""
    lit = night["moon_illuminated"]
    if lit is None:
        return ""
    if night["moon_altitude_deg"] is None or night["moon_altitude_deg"] <= 0.0:
        return DOWN
    return f"{lit * 100.0:.0f}% {night['moon_separation_deg']:.0f}°"


def moon_words(night: Night) -> str:
    """Return what the Moon does, in a sentence's words."""
    short = moon(night)
    if not short or short == DOWN:
        return "the Moon is below the horizon" if short else ""
    lit, apart = night["moon_illuminated"] * 100.0, night["moon_separation_deg"]
    return f"the Moon, {lit:.0f} % lit, stands {apart:.0f} degrees away"


def place(night: Night) -> str:
    """Return altitude and direction in short: 45° S."""
    return f"{night['altitude_deg']:.0f}° {letters(night['compass'])}"


def letters(compass: str) -> str:
    """Return a point of the compass as letters."""
    return LETTERS[POINTS.index(compass)]


def place_words(night: Night) -> str:
    """Return altitude and direction in words."""
    return f"{night['altitude_deg']:.0f} degrees up in the {str(night['compass']).replace('-', ' ')}"


def magnitude(value: float | None) -> str:
    """Return a magnitude to a tenth; empty where unknown."""
    return "" if value is None or not np.isfinite(value) else f"{_rounded(value, 1):.1f}".replace("-", MINUS)


def signed(value: float | None, decimals: int = 1) -> str:
    """Return a number with its sign; empty where unknown."""
    if value is None or not np.isfinite(value):
        return ""
    return f"{_rounded(value, decimals):+.{decimals}f}".replace("-", MINUS)


def _rounded(value: float, decimals: int) -> float:
    """Return a number rounded, never minus zero."""
    return round(value, decimals) + 0.0


def sun_words(contents: CampaignContents, night: Night) -> str:
    """Return when the Sun goes, for an evening, or comes, for a morning: sets 18:02, rises 05:50."""
    known = contents.campaign.nights.filter(pl.col("evening_date") == night["evening_date"])
    name, verb = ("sunrise", "rises") if is_after_midnight(night) else ("sunset", "sets")
    at = known.item(0, f"{name}_clock") if known.height else None
    return f"{verb} {at}" if at else ""


def moment_names(night: Night) -> list[str]:
    """Return the names of the moments that a night serves."""
    return [name for name in str(night["moment"] or "").split("+") if name]


def moments_words(contents: CampaignContents, night: Night) -> list[str]:
    """Return what a night serves, in words."""
    told = {moment.name: moment.words for moment in contents.campaign.season.moments}
    return [told[name] for name in moment_names(night)]


def role(night: Night) -> str:
    """Return the role of a night, or what became of it."""
    if night["status"] != Status.PLANNED.value:
        return str(night["status"])
    return ROLE_WORDS[night["role"]]


def is_must(night: Night) -> bool:
    """Return whether a night must be had."""
    return bool(night["role"] == MUST)


def is_spare(night: Night) -> bool:
    """Return whether a night stands in for another."""
    return bool(night["role"] == SPARE)


def spares_of(contents: CampaignContents, night: Night) -> list[Night]:
    """Return a night's spares in the order in which to try them."""
    known = {row["evening_date"]: row for row in contents.spares.iter_rows(named=True)}
    return [known[day] for day in str(night["spares"] or "").split() if day in known]


def spare_days(night: Night) -> str:
    """Return the evening dates of a night's spares, months named where they change: 14, 15 Nov."""
    days = str(night["spares"] or "").split()
    return ", ".join(_day_before(day, later) for day, later in zip_longest(days, days[1:], fillvalue=""))


def next_night(contents: CampaignContents) -> Night | None:
    """Return the first planned night that is still to come; None if there is none."""
    open_now = to_come(contents.plan)
    if open_now.is_empty():
        return None
    since = as_of(contents).isoformat()
    later = open_now.filter(pl.Series([day >= since for day in open_now["evening_date"].to_list()]))
    return (open_now if later.is_empty() else later).row(0, named=True)


def as_of(contents: CampaignContents) -> date:
    """Return the date from which a plan looks ahead."""
    request = contents.campaign.request
    return request.first_open or request.now


def what_next(contents: CampaignContents) -> list[str]:
    """Return in sentences what to do on the next night, and what if it is cloudy."""
    night = next_night(contents)
    if night is None:
        return ["No planned night is left."] if contents.plan.height else [contents.campaign.notes[-1]]
    name = contents.campaign.season.body.label
    serves = moments_words(contents, night)
    head = f"Night {night['night']}, {night_words(night)}"
    head += f", a must-night for the {' and the '.join(serves)}." if is_must(night) else "."
    told = [head]
    if night["recommended_local"]:
        moonlight = moon_words(night)
        told.append(
            f"Be ready at {clock(night['recommended_local'])}: {name} then stands {place_words(night)}"
            + (f", and {moonlight}." if moonlight else ".")
        )
        told.append(
            f"The window lasts from {clock(night['window_start_local'])} to "
            f"{clock(night['window_end_local'])} ({night['zone']}); at another time within it the field only "
            "stands at another tilt."
        )
        told.append(lens_words(contents, night))
    return [*told, if_cloudy(contents, night)]


def lens(contents: CampaignContents) -> str:
    """Return the focal length."""
    return f"{contents.framing.lens_mm:.4g} mm"


def lens_on_sensor(contents: CampaignContents) -> str:
    """Return the lens and what it sits on."""
    return f"Lens {lens(contents)} on {contents.framing.sensor.name}"


def lens_words(contents: CampaignContents, night: Night) -> str:
    """Return with which lens a night is taken, and how the camera then leans."""
    lean = night["camera_tilt_deg"]
    text = f"{lens_on_sensor(contents)}, aimed and turned as on the chart"
    if lean is None or abs(lean) < 0.5:
        return f"{text}." if lean is None else f"{text}: upright at that time."
    return f"{text}: at that time its upper side leans {abs(lean):.0f} degrees to the {side(lean)}."


def side(lean_deg: float) -> str:
    """Return to which side a camera leans, as seen from behind it."""
    return "left" if lean_deg > 0.0 else "right"


def percent(chance: float) -> str:
    """Return a chance in per cent; certainty and impossibility only where they are."""
    if 0.0 < chance < 0.01 or 0.99 < chance < 1.0:
        return "under 1 %" if chance < 0.5 else "over 99 %"
    return f"{chance * 100.0:.0f} %"


def if_cloudy(contents: CampaignContents, night: Night) -> str:
    """Return what to do if a night is clouded out."""
    spares = spares_of(contents, night)
    later = [one for one in spares if one["evening_date"] > night["evening_date"]]
    earlier = [one for one in spares if one["evening_date"] < night["evening_date"]]
    told = []
    if later:
        told.append(f"If it is cloudy, try {_listed(later)}.")
    if earlier:
        told.append(f"If clouds are forecast, go before it: {_listed(earlier)}.")
    if not spares:
        following = to_come(contents.plan).filter(pl.col("night") > night["night"])
        told.append("If it is cloudy, no night stands in for it: " + _go_on(following))
    return " ".join(told)


def _go_on(following: pl.DataFrame) -> str:
    """Return with which planned night to go on."""
    if following.is_empty():
        return "it is the last."
    night = following.row(0, named=True)
    return f"go on with night {night['night']}, {_listed([night])}."


def _listed(nights: Sequence[Night]) -> str:
    return ", then ".join(
        f"{night['weekday']} {short_day(night['evening_date'])} at {clock(night['recommended_local'])}"
        for night in nights
    )


def chances_words(contents: CampaignContents) -> list[str]:
    """Return what clouds leave of the plan, in sentences."""
    chances = contents.campaign.chances
    if contents.campaign.is_empty:
        return []
    share = f"With {chances.cloudy * 100.0:.0f} % of nights lost to clouds"
    return [
        f"{share}, the chance of getting both turns is {percent(chances.both_turns)}.",
        f"Of {chances.planned} frames, {chances.expected_frames:.0f} are to be expected without spares and "
        f"{chances.expected_frames_with_spares:.0f} with them.",
        f"The longest hole is {chances.longest_hole_deg:.1f} degrees of path "
        f"({chances.longest_hole_days:.0f} days) if all nights are clear, and "
        f"{chances.expected_longest_hole_deg:.1f} degrees ({chances.expected_longest_hole_days:.0f} days) "
        "to be expected under clouds, without spares.",
        "Each night counts as lost by itself; clouds come in spells, so neighbouring nights fare worse.",
    ]
