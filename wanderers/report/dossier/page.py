"""The dossier as a frozen value: all words and figures in place, nothing rendered yet."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers import __version__, schema
from wanderers.ephemeris.bodies import PLANETS
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.events.kinds import Kind
from wanderers.events.season_marks import BRIGHTEST, CLOSEST
from wanderers.events.season_stars import REACH_DEG, STAR_LIMIT_MAG
from wanderers.report import facts, words
from wanderers.report.dossier.facts import Figure, figures, middle_word
from wanderers.report.dossier.sentences import (
    RANKED,
    Sentence,
    ordinal,
    sentences,
    star_label,
)
from wanderers.report.dossier.sources import FILES, SEASONS_FILE, SeasonRows
from wanderers.report.pictures import Picture
from wanderers.report.planets import MIDDLE_CAUTION
from wanderers.site.clock import local_dates_and_minutes
from wanderers.site.zones import Zone, zone_data_version

MARK_NAMES: Final = {
    "first_pass_start": "First pass begins",
    "station_retrograde": "Turns retrograde",
    "station_direct": "Turns direct",
    "third_pass_end": "Third pass ends",
    CLOSEST: "Least distance",
    BRIGHTEST: "Greatest brightness",
}
FRAME_WORDS: Final = {
    Frame.ECLIPTIC: "ecliptic longitude of date",
    Frame.EQUATOR: "right ascension of date",
    Frame.J2000: "ecliptic longitude of J2000, against the stars",
}
CONSTELLATIONS: Final = (
    "Constellations by the boundaries of the IAU. The ecliptic crosses thirteen of them; the twelve signs of "
    "the zodiac are something else and are not used here."
)
STARS_LIMITS: Final = (
    f"Stars to magnitude {STAR_LIMIT_MAG:g} and listed clusters, within {REACH_DEG:g} degrees."
)


@dataclass(frozen=True, slots=True)
class Moment:
    """A dated moment as the page prints it; every attribute is text, empty where it does not apply."""

    number: str
    name: str
    utc: str
    local: str
    longitude: str
    constellation: str
    distance: str
    magnitude: str
    diameter: str
    speed: str
    elongation: str


@dataclass(frozen=True, slots=True)
class StarRow:
    """A star passed, in words."""

    name: str
    constellation: str
    magnitude: str
    when: str
    separation: str
    side: str
    note: str


@dataclass(frozen=True, slots=True)
class MeetingRow:
    """An event of the planet within the season, in words."""

    event_id: str
    when: str
    what: str
    separation: str
    elongation: str
    note: str


@dataclass(frozen=True, slots=True)
class StandingRow:
    """A rank in words."""

    name: str
    value: str
    rank: str
    before: str
    after: str
    searched: str


@dataclass(frozen=True, slots=True)
class Dossier:
    """Everything the template prints.

    Attributes:
        title: planet and month.
        lead: what the season is, one sentence.
        season_id: its row.
        body: the planet's value, the place on the report's page.
        label: the planet's name.
        basis: settings every reader should know.
        zone: the clock of the local times, empty without one.
        moments: dated moments in order of time.
        figures: spoken figures.
        sentences: ready sentences.
        path: the loop's chart.
        above: the view from above.
        curves: distance, brightness, size and speed.
        stars: stars passed.
        stars_limits: what was looked for.
        meetings: meetings within the season.
        entries: constellations entered.
        standing: ranks.
        caution: about optics near the Sun, empty where the planet stays far from it.
        constellations_note: what a constellation is here.
        provenance: where all comes from.
        generator: program and version.
    """

    title: str
    lead: str
    season_id: str
    body: str
    label: str
    basis: tuple[tuple[str, str], ...]
    zone: str
    moments: tuple[Moment, ...]
    figures: tuple[Figure, ...]
    sentences: tuple[Sentence, ...]
    path: Picture | None
    above: Picture | None
    curves: Picture | None
    stars: tuple[StarRow, ...]
    stars_limits: str
    meetings: tuple[MeetingRow, ...]
    entries: tuple[MeetingRow, ...]
    standing: tuple[StandingRow, ...]
    caution: str
    constellations_note: str
    provenance: tuple[tuple[str, str], ...]
    generator: str


def dossier_of(
    rows: SeasonRows, pictures: Mapping[str, Picture], kernel: Kernel, zone: Zone | None = None
) -> Dossier:
    """Compose the dossier of a season.

    Args:
        rows: the season's rows of every table.
        pictures: by ``path``, ``above`` and ``curves``, as far as they were drawn.
        kernel: what all was computed from.
        zone: the clock by which local times are given beside UTC.
    """
    season, label = rows.season, rows.body.label
    middle = season["middle_utc"] or season["station_retrograde_utc"]
    entry = pl.col("kind") == Kind.CONSTELLATION_ENTRY.value
    return Dossier(
        title=f"{label}: the retrograde season of {facts.spoken_month(middle)}",
        lead=_lead(rows),
        season_id=rows.season_id,
        body=rows.body.value,
        label=label,
        basis=_basis(rows, kernel, zone),
        zone="" if zone is None else zone.name,
        moments=moments(rows, zone),
        figures=figures(rows),
        sentences=sentences(rows),
        path=pictures.get("path"),
        above=pictures.get("above"),
        curves=pictures.get("curves"),
        stars=star_rows(rows),
        stars_limits=STARS_LIMITS,
        meetings=meeting_rows(rows.meetings.filter(~entry & ~_told_by_appulse())),
        entries=meeting_rows(rows.meetings.filter(entry)),
        standing=standing_rows(rows),
        caution=MIDDLE_CAUTION if rows.inner else "",
        constellations_note=CONSTELLATIONS,
        provenance=_provenance(rows, kernel, zone),
        generator=f"wanderers {__version__}",
    )


def _told_by_appulse() -> pl.Expr:
    """Return which events are conjunctions with the Moon or a star, beside whose appulse they say little."""
    planets = [planet.value for planet in PLANETS]
    pair_of_planets = pl.col("body").is_in(planets) & pl.col("other").is_in(planets)
    return (pl.col("kind") == Kind.CONJUNCTION.value) & ~pair_of_planets


def moments(rows: SeasonRows, zone: Zone | None) -> tuple[Moment, ...]:
    """Return the dated moments in words; the five marks are numbered as in the view from above."""
    jd = np.array([row["jd_tt"] for row in rows.marks.values()])
    local = [""] * jd.size
    if zone is not None:
        shown = zip(*local_dates_and_minutes(zone, jd), strict=True)
        local = [f"{minute} {offset}" for minute, offset in shown]
    names = MARK_NAMES | {"middle": middle_word(rows).capitalize()}
    numbers = {mark: str(number) for number, mark in enumerate(schema.SEASON_MARKS, 1)}
    return tuple(
        Moment(
            number=numbers.get(mark, ""),
            name=names[mark],
            utc=facts.minute(row["utc"]),
            local=text,
            longitude=f"{row['longitude_deg']:.2f}°",
            constellation=facts.constellation(row["constellation"]),
            distance=f"{row['distance_au']:.3f} au",
            magnitude=facts.signed(row["magnitude"], 1),
            diameter=f"{row['diameter_arcsec']:.{1 if row['diameter_arcsec'] >= 1.0 else 2}f}″",
            speed=speed_words(row["longitude_rate_deg_per_day"]),
            elongation=f"{row['elongation_deg']:.0f}°",
        )
        for (mark, row), text in zip(rows.marks.items(), local, strict=True)
    )


def speed_words(deg_per_day: float) -> str:
    """Return a daily motion, without a sign where it rounds to nothing."""
    text = f"{deg_per_day:+.3f}".replace("-", facts.MINUS)
    return "0°" if float(f"{deg_per_day:.3f}") == 0.0 else f"{text}°"


def star_rows(rows: SeasonRows) -> tuple[StarRow, ...]:
    """Return the stars passed, in words."""
    return tuple(
        StarRow(
            name=_starred(row),
            constellation=facts.constellation(row["constellation"]),
            magnitude=facts.signed(row["v_mag"], 1),
            when=facts.minute(row["closest_utc"]),
            separation=facts.angle(row["separation_deg"]),
            side=f"{rows.body.label} {row['planet_is']}",
            note="where the season begins or ends" if row["at_edge"] else "",
        )
        for row in rows.stars.iter_rows(named=True)
    )


def _starred(row: dict[str, Any]) -> str:
    """Return a star's name with its designation behind it."""
    name, designation = star_label(row).removeprefix("the "), row["designation"]
    return f"{name} ({designation})" if designation and designation != name else name


def meeting_rows(events: pl.DataFrame) -> tuple[MeetingRow, ...]:
    """Return events in words."""
    return tuple(
        MeetingRow(
            event_id=event["event_id"],
            when=facts.minute(event["utc"]),
            what=words.summary(event),
            separation=facts.angle(event["separation_deg"]),
            elongation="" if event["elongation_deg"] is None else f"{event['elongation_deg']:.0f}°",
            note=facts.note(event),
        )
        for event in events.iter_rows(named=True)
    )


def standing_rows(rows: SeasonRows) -> tuple[StandingRow, ...]:
    """Return ranks in words."""
    units = {"arc_deg": "{:.2f}°", "closest_au": "{:.3f} au", "peak_magnitude": "magnitude {:.1f}"}
    return tuple(
        StandingRow(
            name=RANKED[figure].capitalize(),
            value=units[figure].format(row["value"]).replace("-", facts.MINUS),
            rank=f"{ordinal(row['rank'])} of {row['of']}",
            before=facts.spoken_month(row["better_before_utc"]) if row["better_before_utc"] else "none",
            after=facts.spoken_month(row["better_after_utc"]) if row["better_after_utc"] else "none",
            searched=f"{facts.day(row['searched_from_utc'])} to {facts.day(row['searched_to_utc'])}",
        )
        for figure, row in rows.standing.items()
    )


def _lead(rows: SeasonRows) -> str:
    season = rows.season
    return (
        f"{rows.body.label} runs backwards from {facts.spoken_day(season['station_retrograde_utc'])} to "
        f"{facts.spoken_day(season['station_direct_utc'])}: what a script or a campaign needs, each figure "
        "with the table row it comes from."
    )


def _basis(rows: SeasonRows, kernel: Kernel, zone: Zone | None) -> tuple[tuple[str, str], ...]:
    times = "UTC" if zone is None else f"UTC, and the clocks of {zone.name}"
    return (
        ("Season", rows.season_id),
        ("Stations in", FRAME_WORDS[Frame(rows.season["frame"])]),
        ("Seen from", "the centre of the Earth"),
        ("Times", times),
        ("Kernel", kernel.name),
    )


def _provenance(rows: SeasonRows, kernel: Kernel, zone: Zone | None) -> tuple[tuple[str, str], ...]:
    clock = () if zone is None else (("Time zones", f"IANA database {zone_data_version()}"),)
    return (
        ("Season table", f"{SEASONS_FILE}, row {rows.season_id}"),
        *((file, holds) for file, _, holds in FILES),
        ("Kernel", f"{kernel.name} ({kernel.path.name}), SHA-256 {kernel.sha256}"),
        ("Program", f"wanderers {__version__}"),
        ("Magnitudes", "model magnitudes (V), as for the whole disc; weather and dust are left out"),
        *clock,
    )
