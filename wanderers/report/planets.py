"""The section of each planet: its seasons with their fact sheets, its own events, its pictures."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, Final

import polars as pl

from wanderers.ephemeris.bodies import INNER, PLANETS, Body
from wanderers.events.kinds import Kind
from wanderers.report import facts, words
from wanderers.report.contents import Contents
from wanderers.report.dossier.sources import address_in
from wanderers.report.pictures import Picture

EVENTS_AT_MOST: Final = 120
"""Rows of a planet's own table; the rest is in the table of all events."""

MIDDLE_WORDS: Final = {"opposition": "Opposition", "inferior_conjunction": "Inferior conjunction"}
TURNS: Final = ("station_retrograde", "station_direct")
MIDDLE_CAUTION: Final = f"At inferior conjunction the planet stands beside the Sun. {facts.NEAR_SUN_NOTE}"


@dataclass(frozen=True, slots=True)
class EventRow:
    """An event as a planet's table prints it; every attribute is text, empty where it does not apply."""

    event_id: str
    when: str
    what: str
    constellation: str
    separation: str
    elongation: str
    magnitude: str
    note: str


@dataclass(frozen=True, slots=True)
class Fact:
    """A figure of a season in words, and the column it was read from."""

    name: str
    words: str
    source: str


@dataclass(frozen=True, slots=True)
class SeasonSheet:
    """A retrograde season in words.

    Attributes:
        season_id: the row it comes from.
        name: the month of its middle.
        title: from turn to turn.
        marks: the five instants: words, day and clock, empty where unknown.
        cells: the row of the season table, without the marks.
        facts: figures of spoken size, each with the column it was read from.
        caution: about optics near the Sun, empty where the planet is far from it.
        picture: its path, None where none was drawn.
        dossier: address of its dossier from the page, empty where there is none.
    """

    season_id: str
    name: str
    title: str
    marks: tuple[tuple[str, str, str], ...]
    cells: tuple[tuple[str, str], ...]
    facts: tuple[Fact, ...]
    caution: str
    picture: Picture | None
    dossier: str = ""


@dataclass(frozen=True, slots=True)
class PlanetSection:
    """What the page says about one planet.

    Attributes:
        name: its value in the tables.
        label: its name.
        summary: one sentence.
        seasons: in order of time.
        events: its own events and its meetings with planets, EVENTS_AT_MOST of them.
        event_count: how many such events there are.
        pictures: over the whole span.
    """

    name: str
    label: str
    summary: str
    seasons: tuple[SeasonSheet, ...]
    events: tuple[EventRow, ...]
    event_count: int
    pictures: tuple[Picture, ...]


def planet_sections(contents: Contents, pictures: Sequence[Picture]) -> tuple[PlanetSection, ...]:
    """Return a section for every planet that has a track."""
    return tuple(_section(contents, body, pictures) for body in contents.tracks)


def _section(contents: Contents, body: Body, pictures: Sequence[Picture]) -> PlanetSection:
    own = [picture for picture in pictures if picture.body is body]
    paths = {picture.season_id: picture for picture in own if "_path_" in picture.stem}
    rows = contents.seasons.filter(pl.col("body") == body.value)
    events = own_events(contents.events, body)
    return PlanetSection(
        name=body.value,
        label=body.label,
        summary=_summary(body, rows),
        seasons=tuple(
            replace(
                season_sheet(season, contents.paths.get(season["season_id"]), paths.get(season["season_id"])),
                dossier=address_in(contents.study, season["season_id"]),
            )
            for season in rows.iter_rows(named=True)
        ),
        events=tuple(event_row(event) for event in events.head(EVENTS_AT_MOST).iter_rows(named=True)),
        event_count=events.height,
        pictures=tuple(picture for picture in own if not picture.season_id),
    )


def own_events(events: pl.DataFrame, body: Body) -> pl.DataFrame:
    """Return a planet's events without its meetings with the Moon and with stars, which are many."""
    planets = [planet.value for planet in PLANETS]
    first = (pl.col("body") == body.value) & (pl.col("other").is_null() | pl.col("other").is_in(planets))
    second = (pl.col("other") == body.value) & pl.col("body").is_in(planets)
    gathering = pl.col("kind") == Kind.GATHERING.value
    among = pl.col("detail").str.split("+").list.contains(body.value).fill_null(False)
    return events.filter(first | second | (gathering & among))


def event_row(event: facts.Row) -> EventRow:
    """Return an event in words."""
    elongation = event["elongation_deg"]
    return EventRow(
        event_id=event["event_id"],
        when=facts.minute(event["utc"]),
        what=words.summary(event),
        constellation=facts.constellation(event["constellation"]),
        separation=facts.angle(event["separation_deg"]),
        elongation="" if elongation is None else f"{elongation:.1f}°",
        magnitude=facts.signed(event["magnitude"], 1),
        note=facts.note(event),
    )


def _summary(body: Body, seasons: pl.DataFrame) -> str:
    """Say how often and how long a planet runs backwards in the span."""
    if seasons.is_empty():
        return f"{body.label} does not run backwards in this span."
    first = seasons.filter(pl.col("frame") == seasons["frame"][0])
    count = "once" if first.height == 1 else f"{first.height} times"
    days, arc = facts.spread(first["retrograde_days"], "day"), facts.spread(first["arc_deg"], "degree", 1)
    return f"{body.label} runs backwards {count}, for {days}, over {arc}."


def season_sheet(season: facts.Row, path: pl.DataFrame | None, picture: Picture | None) -> SeasonSheet:
    """Return a season in words.

    Args:
        season: its row.
        path: the planet's track through it, for the magnitudes at the stations.
        picture: its path.
    """
    start, end = season["station_retrograde_utc"], season["station_direct_utc"]
    inner = season["body"] in INNER
    return SeasonSheet(
        season_id=season["season_id"],
        name=facts.spoken_month(season["middle_utc"] or start),
        title=f"{facts.spoken_day(start)} to {facts.spoken_day(end)}, {words.FRAME_LABELS[season['frame']]}",
        marks=_marks(season),
        cells=_cells(season),
        facts=(*_size_facts(season), *_light_facts(season, path)),
        caution=MIDDLE_CAUTION if inner else "",
        picture=picture,
    )


def _marks(season: facts.Row) -> tuple[tuple[str, str, str], ...]:
    columns = (
        ("First pass begins", "first_pass_start_utc"),
        ("Turns retrograde", "station_retrograde_utc"),
        (MIDDLE_WORDS[season["middle_kind"]], "middle_utc"),
        ("Turns direct", "station_direct_utc"),
        ("Third pass ends", "third_pass_end_utc"),
    )
    instants = [(name, facts.minute(season[column])) for name, column in columns]
    return tuple((name, when[:-6], when[-5:]) for name, when in instants)


def _cells(season: facts.Row) -> tuple[tuple[str, str], ...]:
    threefold = season["threefold_days"]
    return (
        ("Arc", f"{season['arc_deg']:.1f}°"),
        ("Days back", f"{season['retrograde_days']:.0f}"),
        ("Days threefold", "" if threefold is None else f"{threefold:.0f}"),
        ("Path", season["path_shape"]),
        ("Closest", f"{season['closest_au']:.3f} au"),
        ("Brightest", facts.signed(season["peak_magnitude"], 1)),
        ("Largest", f"{season['peak_diameter_arcsec']:.1f}″"),
        ("In", ", ".join(facts.constellation(name) for name in season["constellations"].split("+"))),
    )


def _size_facts(season: facts.Row) -> tuple[Fact, ...]:
    arc, closest = season["arc_deg"], season["closest_au"]
    return (
        Fact("Backwards", f"{season['retrograde_days']:.0f} days", "retrograde_days"),
        Fact("Moves back", f"{arc:.1f}°, about {facts.moon_widths(arc)}", "arc_deg"),
        Fact("Path", f"a {season['path_shape']}", "path_shape"),
        Fact(
            "Closest",
            f"{closest:.3f} au: {facts.million_km(closest)}, {facts.light_time(closest)}",
            "closest_au",
        ),
    )


def _light_facts(season: facts.Row, path: pl.DataFrame | None) -> tuple[Fact, ...]:
    """Return how bright and how large the planet is: at the stations from the track, else from the row."""
    peak = season["peak_magnitude"]
    at_turns = [] if path is None else [nearest(path, season[f"{turn}_jd_tt"])["magnitude"] for turn in TURNS]
    found = []
    if peak is not None:
        brightest = f"magnitude {facts.signed(peak, 1)}"
        if at_turns and at_turns[0] is not None:
            brightest += f", {facts.times_brighter(at_turns[0] - peak)} as bright as at the first turn"
        found.append(Fact("Brightest", brightest, "peak_magnitude"))
    if at_turns and None not in at_turns:
        words = " and ".join(facts.signed(value, 1) for value in at_turns)
        found.append(Fact("At the turns", f"magnitude {words}", "magnitude of the track"))
    largest = f"{season['peak_diameter_arcsec']:.1f}″ across"
    return (*found, Fact("Largest", largest, "peak_diameter_arcsec"))


def nearest(path: pl.DataFrame, jd_tt: float) -> dict[str, Any]:
    """Return the row of a track nearest to an instant."""
    place = (path["jd_tt"] - jd_tt).abs().arg_min()
    return path.row(place or 0, named=True)
