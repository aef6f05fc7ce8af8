"""At a glance: the few facts of a span that most readers look for first."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import polars as pl

from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.events.kinds import Kind
from wanderers.report import facts, site_words, words
from wanderers.site.visibility import Verdict

CLOSE_DEG: Final = 1.0
NONE_FOUND: Final = "none in this span"


@dataclass(frozen=True, slots=True)
class Glance:
    """One line of the list.

    Attributes:
        label: what was looked for.
        what: what was found, or that nothing was.
        when: instant in UTC to the minute, empty when nothing was found.
        figures: separation, elongation, magnitude in words.
        caution: what must be said beside it.
        event_id: the row it comes from.
        local: the instant by the site's clock, and when to watch; empty without a site.
    """

    label: str
    what: str
    when: str = ""
    figures: str = ""
    caution: str = ""
    event_id: str = ""
    local: str = ""


def at_a_glance(
    events: pl.DataFrame, seasons: pl.DataFrame, jd_from: float, kinds: tuple[Kind, ...]
) -> tuple[Glance, ...]:
    """Return the list for the events and seasons of a span that begins at ``jd_from``.

    Lines about kinds of events that were not asked for are left out.
    """
    meetings = Kind.CONJUNCTION in kinds or Kind.APPULSE in kinds
    seen = "verdict" in events.columns
    return (
        _turned_back(seasons, jd_from),
        *(_line(first.title, events.filter(first.rule)) for first in FIRSTS if first.kind in kinds),
        *([_closest(events)] if meetings else []),
        *(_watchable_pairs(events) if meetings and seen else []),
        *(_stations(events) if seen else []),
    )


def _watchable_pairs(events: pl.DataFrame) -> list[Glance]:
    """Return the lines for the closest pairs that a site can watch."""
    seen = events.filter(pl.col("verdict") != Verdict.NOT_VISIBLE.value)
    pairs = seen.filter(IS_MEETING, OTHER_IS_PLANET).sort("seen_separation_deg", "jd_tt", nulls_last=True)
    return [
        _line("Closest pair to watch from here", pairs.head(1)),
        _line("Closest two planets to watch from here", pairs.filter(IS_PLANET).head(1)),
    ]


def _stations(events: pl.DataFrame) -> list[Glance]:
    """Return the lines for each planet's next station, with what a site sees of it."""
    next_ones = ((body, events.filter(IS_STATION, pl.col("body") == body.value)) for body in PLANETS)
    return [_line(f"Next station of {body.label}", own) for body, own in next_ones if not own.is_empty()]


@dataclass(frozen=True, slots=True)
class First:
    """A line that tells the earliest event that fits a rule."""

    title: str
    kind: Kind
    rule: pl.Expr


IS_PLANET: Final = pl.col("body").is_in([body.value for body in PLANETS])
OTHER_IS_PLANET: Final = pl.col("other").is_in([body.value for body in PLANETS])
IS_CLOSE: Final = (pl.col("kind") == Kind.CONJUNCTION) & (pl.col("separation_deg") < CLOSE_DEG)
IS_INFERIOR: Final = (pl.col("kind") == Kind.SOLAR_CONJUNCTION) & (pl.col("detail") == "inferior")
IS_STATION: Final = pl.col("kind") == Kind.STATION
IS_OCCULTATION: Final = pl.col("kind") == Kind.OCCULTATION
IS_MEETING: Final = pl.col("kind").is_in([Kind.CONJUNCTION, Kind.APPULSE])
DARK: Final = pl.col("elongation_deg") - pl.col("separation_deg").fill_null(0.0) >= words.NEAR_SUN_DEG

FIRSTS: Final = (
    First("Next station", Kind.STATION, IS_STATION),
    First("Next opposition", Kind.OPPOSITION, pl.col("kind") == Kind.OPPOSITION),
    First("Next greatest elongation", Kind.GREATEST_ELONGATION, pl.col("kind") == Kind.GREATEST_ELONGATION),
    First("Next inferior conjunction", Kind.SOLAR_CONJUNCTION, IS_INFERIOR),
    First("Next conjunction under 1 degree", Kind.CONJUNCTION, IS_CLOSE),
    First("Next of two planets under 1 degree", Kind.CONJUNCTION, IS_CLOSE & IS_PLANET & OTHER_IS_PLANET),
    First("Next transit", Kind.TRANSIT, pl.col("kind") == Kind.TRANSIT),
    First("Next occultation of a planet", Kind.OCCULTATION, IS_OCCULTATION & OTHER_IS_PLANET),
)


def _turned_back(seasons: pl.DataFrame, jd_from: float) -> Glance:
    """Say which planets are retrograde when the span begins."""
    now = seasons.filter(
        (pl.col("station_retrograde_jd_tt") <= jd_from) & (pl.col("station_direct_jd_tt") > jd_from)
    )
    names = tuple(body.label for body in Body if body.value in now["body"].to_list())
    return Glance("Retrograde as the span begins", words.listed(names) or "no planet")


def _closest(events: pl.DataFrame) -> Glance:
    """Return the line for the closest meeting of two planets that the Sun's glare does not hide."""
    met = events.filter(IS_MEETING & IS_PLANET & OTHER_IS_PLANET & DARK)
    title = f"Closest pair of planets, {words.NEAR_SUN_DEG:.0f} degrees or more from the Sun"
    return _line(title, met.sort("separation_deg", "jd_tt").head(1))


def _line(title: str, found: pl.DataFrame) -> Glance:
    if found.is_empty():
        return Glance(title, NONE_FOUND)
    event = found.row(0, named=True)
    figures = (
        f"{event['elongation_deg']:.1f}° from the Sun" if event["elongation_deg"] is not None else "",
        f"magnitude {facts.signed(event['magnitude'], 1)}" if event["magnitude"] is not None else "",
    )
    return Glance(
        title,
        words.summary(event),
        facts.minute(event["utc"]),
        ", ".join(filter(None, figures)),
        facts.note(event),
        event["event_id"],
        _local(event),
    )


def _local(event: words.Event) -> str:
    """Return an instant by the site's clock, and when to watch."""
    if not site_words.has_view(event):
        return ""
    local_time = words.minute(f"{event['local_date']}T{event['local_time']}")
    instant = f"{local_time} local"
    if not site_words.is_watchable(event):
        return f"{instant}; not to be seen from {event['site']}: {event['verdict_reason']}"
    best = site_words.local(event["best_local"])
    night = site_words.night_words(event["evening_date"], best)
    return f"{instant}; watch {night} at {site_words.clock(best)}"
