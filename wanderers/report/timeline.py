"""The lanes of the page's timeline: a planet each, with its retrograde stretches in words.

What happens in between - stations, oppositions, inferior conjunctions, meetings - the page's program finds
in the event table, so that nothing stands in the page twice.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers.ephemeris.bodies import INNER, Body
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.report import facts, words
from wanderers.report.contents import Contents
from wanderers.report.dossier.sources import address_in
from wanderers.site.clock import local_dates_and_minutes
from wanderers.site.places import Site
from wanderers.site.zones import zone_named

TURNS: Final = ("station_retrograde", "station_direct")
CAUTION: Final = f"In its middle the planet passes between Earth and Sun. {facts.NEAR_SUN_NOTE}"
"""Beside the stretches of Mercury and Venus, which hold the inferior conjunction."""


@dataclass(frozen=True, slots=True)
class Stretch:
    """The time in which a planet runs backwards.

    Attributes:
        ends: from station to station, UTC in milliseconds since 1970.
        what: one sentence.
        utc: from when to when, to the minute.
        local: the same by the site's clock, empty without a site.
        dossier: address of its dossier from the page, empty where there is none.
    """

    ends: tuple[int, int]
    what: str
    utc: str
    local: str
    dossier: str


@dataclass(frozen=True, slots=True)
class Lane:
    """A planet of the timeline.

    Attributes:
        body: its value in the tables.
        label: its name.
        note: what must be said beside each of its stretches, empty where nothing.
        stretches: in order of time, those that only reach into the span included.
    """

    body: str
    label: str
    note: str
    stretches: tuple[Stretch, ...]


@dataclass(frozen=True, slots=True)
class Timeline:
    """What the page's program draws.

    Attributes:
        lanes: a planet each, from the Sun outwards; none where no planet was asked for.
        span: the ends of the report's span, UTC in milliseconds since 1970.
        frame: in which stations and meetings are dated.
    """

    lanes: tuple[Lane, ...]
    span: tuple[int, ...]
    frame: str


def timeline_of(contents: Contents) -> Timeline:
    """Return the timeline of a report: every planet asked for, stretches in the leading frame."""
    request = contents.request
    frame = request.frames[0].value
    seasons = contents.seasons.filter(
        pl.col("frame") == frame, *(pl.col(f"{turn}_jd_tt").is_not_null() for turn in TURNS)
    )
    wanted = [body for body in request.planets if body in contents.kernel.bodies]
    return Timeline(
        tuple(_lane(contents, body, seasons.filter(pl.col("body") == body.value)) for body in wanted),
        tuple(_milliseconds(np.array([request.jd_from, request.jd_to]))),
        frame,
    )


def _lane(contents: Contents, body: Body, seasons: pl.DataFrame) -> Lane:
    utc = [_milliseconds(seasons[f"{turn}_jd_tt"].to_numpy()) for turn in TURNS]
    local = [_local_minutes(contents.request.site, seasons[f"{turn}_jd_tt"]) for turn in TURNS]
    stretches = tuple(
        Stretch(
            ends=(utc[0][number], utc[1][number]),
            what=_sentence(body, row),
            utc=_span(*(facts.minute(row[f"{turn}_utc"]) for turn in TURNS)),
            local=_span(local[0][number], local[1][number]),
            dossier=address_in(contents.study, row["season_id"]),
        )
        for number, row in enumerate(seasons.iter_rows(named=True))
    )
    return Lane(body.value, body.label, CAUTION if body in INNER else "", stretches)


def _sentence(body: Body, season: facts.Row) -> str:
    days, arc = season["retrograde_days"], season["arc_deg"]
    frame = words.FRAME_LABELS[season["frame"]]
    return f"{body.label} runs backwards for {days:.0f} days, over {arc:.1f}° {frame}"


def _span(start: str, end: str) -> str:
    return f"{start} to {end}" if start and end else ""


def _local_minutes(site: Site | None, jd_tt: pl.Series) -> list[str]:
    """Return instants by the site's clock to the minute, ``2027-01-10 13:59``; empty without a site."""
    if site is None:
        return [""] * jd_tt.len()
    return local_dates_and_minutes(zone_named(site.zone), jd_tt.to_numpy())[0].to_list()


def _milliseconds(jd_tt: Any) -> list[int]:
    """Return TT Julian dates as milliseconds of UTC since 1970."""
    milliseconds: list[int] = datetime64_from_jd(jd_utc_from_tt(jd_tt)).astype(np.int64).tolist()
    return milliseconds
