"""The nights of a campaign as an iCalendar file, RFC 5545: planned ones confirmed, spares tentative.

An entry lasts as long as the night's window, by the site's clock. Its UID is made of body, season and evening
date, so a plan made anew updates a calendar in place; see :mod:`wanderers.report.calendar_update`.
"""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from typing import Final

from icalendar import Event

from wanderers import __version__
from wanderers.errors import WanderersError
from wanderers.plans.replan import Status
from wanderers.report.calendar_entries import PROVENANCE, UID_ENDING, Entry, read_entry
from wanderers.report.calendar_update import Published, merged, read_calendar
from wanderers.report.calendars import CHECKSUM_DIGITS, FIRST_STAMP, ExactText, by_clock, calendar_file
from wanderers.report.campaign import cautions, words
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.campaign.words import Night

YEARS: Final = (1, 9999)
ALL_TIME: Final = (
    dt.datetime(1, 1, 1, tzinfo=dt.UTC),
    dt.datetime(9999, 12, 31, 23, 59, 59, tzinfo=dt.UTC),
)
STATUS: Final = {
    Status.PLANNED.value: "CONFIRMED",
    Status.DONE.value: "CONFIRMED",
    Status.LOST.value: "CANCELLED",
}
TENTATIVE: Final = "TENTATIVE"


def campaign_calendar(contents: CampaignContents, published: Published | None = None) -> bytes:
    """Return the nights of a campaign as a calendar.

    Args:
        contents: the campaign.
        published: an earlier issue of the same calendar; nights in it that are no longer planned are
            cancelled, changed ones are raised.
    """
    site, season = contents.campaign.site, contents.campaign.season
    name = f"{season.body.label} campaign from {site.name}"
    nights = [*contents.plan.iter_rows(named=True), *contents.spares.iter_rows(named=True)]
    entries = [_entry(contents, night) for night in nights if night["window_start_local"]]
    known = published or Published(name, ())
    return calendar_file(name, merged(known, entries, ALL_TIME).entries, known.zones)


def is_possible(contents: CampaignContents) -> bool:
    """Return whether a calendar can hold the campaign's years: RFC 5545, 3.3.4, gives a year four digits."""
    days = contents.campaign.nights["evening_date"]
    return all(
        day[:1].isdigit() and YEARS[0] < int(day.split("-")[0]) < YEARS[1] for day in (days[0], days[-1])
    )


def earlier_issue(contents: CampaignContents, path: Path) -> Published | None:
    """Return the calendar that stands at a path if it is one of the same season and site; else None."""
    try:
        published = read_calendar(path.read_bytes())
    except (OSError, WanderersError):
        return None
    own = [entry for entry in published.entries if entry.is_ours]
    prefix = uid(contents, "")
    place = contents.campaign.site.name
    same = all(entry.uid.startswith(prefix.removesuffix(UID_ENDING)) for entry in own)
    return published if own and same and own[0].value("LOCATION") == place else None


def uid(contents: CampaignContents, evening: str) -> str:
    """Return the name of a night's entry: whatever plan it stands in, it stays the same."""
    return f"campaign-{contents.campaign.season.row['season_id']}-{evening}{UID_ENDING}"


def _entry(contents: CampaignContents, night: Night) -> Entry:
    """Return the entry of one night."""
    site = contents.campaign.site
    component = Event()
    component.add("UID", uid(contents, str(night["evening_date"])))
    component.add("DTSTAMP", FIRST_STAMP)
    component.add("SEQUENCE", 0)
    for name, column in (("DTSTART", "window_start_local"), ("DTEND", "window_end_local")):
        component.add(name, by_clock(_minute(str(night[column])), site))
    is_spare = words.is_spare(night)
    component.add("STATUS", TENTATIVE if is_spare else STATUS[night["status"]])
    component.add("TRANSP", "TRANSPARENT")
    component.add("CATEGORIES", ExactText("spare night" if is_spare else "planned night"))
    component.add("SUMMARY", ExactText(_summary(contents, night)))
    component.add("DESCRIPTION", ExactText("\n".join(_description(contents, night))))
    component.add("LOCATION", ExactText(site.name))
    component.add("GEO", (site.latitude_deg, site.longitude_deg))
    return read_entry(component.to_ical(sorted=False))


def _minute(local: str) -> dt.datetime:
    """Return a local instant to the nearest minute."""
    moment = dt.datetime.fromisoformat(local) + dt.timedelta(seconds=30)
    return moment.replace(second=0, microsecond=0)


def _summary(contents: CampaignContents, night: Night) -> str:
    """Return the title of an entry."""
    name, time = contents.campaign.season.body.label, words.clock(night["recommended_local"])
    if words.is_spare(night):
        return f"{name}: spare for {words.short_day(night['spare_for'])}, {time}"
    count = contents.plan.height
    must = " (must)" if words.is_must(night) else ""
    became = "" if night["status"] == Status.PLANNED.value else f", {night['status']}"
    return f"{name}: night {night['night']} of {count}{must}, {time}{became}"


def _description(contents: CampaignContents, night: Night) -> list[str]:
    """Return the lines of an entry's text."""
    kernel = contents.kernel
    spares = "" if words.is_spare(night) else words.if_cloudy(contents, night)
    warned = [night["caution"]] if night["caution"] else []
    if cautions.is_near_sun(contents):
        warned.append(cautions.SUN)
    return [
        f"Recommended time {words.clock(night['recommended_local'])} ({night['zone']}), "
        f"{words.night_words(night)}: {words.place_words(night)}.",
        f"Why: {night['reasons']}.",
        f"Lens {words.lens(contents)}, magnitude {words.magnitude(night['magnitude'])}.",
        *([spares] if spares else []),
        *warned,
        f"{PROVENANCE}{kernel.name} (SHA-256 {kernel.sha256[:CHECKSUM_DIGITS]}) by wanderers {__version__}.",
    ]
