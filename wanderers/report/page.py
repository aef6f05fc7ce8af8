"""The page of a report as a frozen value: all words and figures in place, nothing rendered yet."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import polars as pl

from wanderers import __version__
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.events.kinds import Kind
from wanderers.report import facts
from wanderers.report.comparison import Compared, compared
from wanderers.report.contents import Contents, Request
from wanderers.report.glance import Glance, at_a_glance
from wanderers.report.glossary import glossary
from wanderers.report.pictures import Picture
from wanderers.report.planets import PlanetSection, planet_sections
from wanderers.report.site_list import SightGroup, sight_groups
from wanderers.report.timeline import Timeline, timeline_of
from wanderers.site.places import Site
from wanderers.site.reasons import depth_words
from wanderers.site.summary import place_words, zone_words
from wanderers.site.visibility import Verdict

FRAME_WORDS: Final = {
    Frame.ECLIPTIC: "true ecliptic and equinox of date",
    Frame.EQUATOR: "true equator and equinox of date (longitude means right ascension)",
    Frame.J2000: "fixed mean ecliptic of J2000 (motion against the stars)",
}
SCALE_WORDS: Final = {"utc": "UTC", "tt": "TT"}
PLACES: Final = (
    "geocentric and apparent: light-time, light deflection by the Sun and annual aberration applied"
)
READERS: Final = "for planetarium producers, observers and calendar editors"


@dataclass(frozen=True, slots=True)
class Choice:
    """One tick box of a filter: the value in the tables and its words."""

    value: str
    label: str


@dataclass(frozen=True, slots=True)
class Page:
    """Everything the template prints.

    Attributes:
        title: of the page.
        lead: what it is and for whom, one sentence.
        stem: of the files that the page lets people save.
        first: beginning of the span.
        last: its end.
        span: the span in words.
        basis: the settings every reader should know: terms and words.
        generator: program and version.
        kernel_line: kernel and checksum in one line.
        provenance: terms and what they stand for: kernel, checksum, version, frame, time scale, ...
        timeline: the planets' lanes, which the page's program draws.
        overview: the picture of all longitudes, None where no planet was asked for.
        glance: the list at the top.
        sections: one a planet.
        definitions: stations and meetings of planets by every definition, the first of ``definition_count``.
        bodies: tick boxes of the body filter.
        kinds: tick boxes of the kind filter.
        event_count: rows of the event table.
        glossary: terms and their meanings.
        caution: what holds for the whole page.
        files: names of the data files beside the page, and what they hold.
        site: name of the site, empty where there is none.
        sights: what it can watch, easiest first.
        verdicts: tick boxes of the filter by verdict.
    """

    title: str
    lead: str
    stem: str
    first: str
    last: str
    span: str
    basis: tuple[tuple[str, str], ...]
    generator: str
    kernel_line: str
    provenance: tuple[tuple[str, str], ...]
    timeline: Timeline
    overview: Picture | None
    glance: tuple[Glance, ...]
    sections: tuple[PlanetSection, ...]
    definitions: tuple[Compared, ...]
    definition_count: int
    bodies: tuple[Choice, ...]
    kinds: tuple[Choice, ...]
    event_count: int
    glossary: tuple[tuple[str, str], ...]
    caution: str
    files: tuple[tuple[str, str], ...]
    site: str
    sights: tuple[SightGroup, ...]
    verdicts: tuple[Choice, ...]


def page_of(
    contents: Contents, pictures: Sequence[Picture], stem: str, files: Sequence[tuple[str, str]] = ()
) -> Page:
    """Compose the page of a report.

    Args:
        contents: its tables.
        pictures: drawn from them.
        stem: name of the report, for the files the page lets people save.
        files: names of the files beside the page, and what they hold.
    """
    request, site = contents.request, contents.request.site
    first, last = request.ends
    span = f"{first} to {last} {SCALE_WORDS[request.scale]}"
    overviews = [picture for picture in pictures if picture.body is None]
    return Page(
        title=f"The wandering planets, {first} to {last}{f', from {site.name}' if site else ''}",
        lead=f"Stations, retrograde seasons and meetings from {span}, {_seen_from(site)}: {READERS}.",
        stem=stem,
        first=first,
        last=last,
        span=span,
        basis=basis(contents),
        generator=f"wanderers {__version__}",
        kernel_line=f"kernel {contents.kernel.name}, SHA-256 {contents.kernel.sha256}",
        provenance=provenance(contents),
        timeline=timeline_of(contents),
        overview=overviews[0] if overviews else None,
        glance=at_a_glance(contents.events, contents.seasons, request.jd_from, request.kinds),
        sections=planet_sections(contents, pictures),
        definitions=compared(contents.definitions),
        definition_count=contents.definitions.height,
        bodies=body_choices(contents.events),
        kinds=kind_choices(contents.events),
        event_count=contents.events.height,
        glossary=glossary(kind for kind in Kind if kind.value in set(contents.events["kind"])),
        caution=facts.PAGE_CAUTION,
        files=tuple(files),
        site=site.name if site else "",
        sights=sight_groups(contents.events) if site else (),
        verdicts=verdict_choices() if site else (),
    )


def basis(contents: Contents) -> tuple[tuple[str, str], ...]:
    """Return the settings that every reader should know before the first figure."""
    request = contents.request
    first, last = request.ends
    return (
        ("Span", f"{first} to {last} {SCALE_WORDS[request.scale]}"),
        ("Frame", ", ".join(frame.value for frame in request.frames)),
        ("Seen from", place_words(request.site) if request.site else "the centre of the Earth"),
        ("Times", f"UTC, and local: {zone_words(request.site)}" if request.site else "UTC"),
        ("Kernel", contents.kernel.name),
        ("Events", f"{contents.events.height}"),
    )


def provenance(contents: Contents) -> tuple[tuple[str, str], ...]:
    """Return what another editor needs to explain a difference: sources, versions, frames, scales."""
    request, kernel = contents.request, contents.kernel
    first, last = request.ends
    wanted = [
        ("Bodies", [body.label for body in request.bodies], len(BODIES)),
        ("Kinds of events", [kind_label(kind) for kind in request.kinds], len(Kind)),
    ]
    return (
        ("Span", f"{first} to {last} ({SCALE_WORDS[request.scale]}), the end itself not included"),
        ("Frame", "; ".join(f"{frame.value}: {FRAME_WORDS[frame]}" for frame in request.frames)),
        ("Places", PLACES),
        *_site_terms(request),
        ("Time scale", "UTC on this page; TT and UTC in the files. " + timescales.time_scale_facts().source),
        ("Kernel", f"{kernel.name} ({kernel.path.name}, {kernel.size_bytes / 1e6:.0f} MB)"),
        ("Kernel checksum", f"SHA-256 {kernel.sha256}"),
        ("Program", f"wanderers {__version__}"),
        *((term, ", ".join(names) if len(names) < of else "all") for term, names, of in wanted),
        ("Magnitudes", "model magnitudes (V), as for the whole disc; weather and dust on Mars are left out"),
    )


def _seen_from(site: Site | None) -> str:
    if site is None:
        return "seen from the centre of the Earth"
    return f"for the whole Earth, and what can be seen of them from {place_words(site)}"


def _site_terms(request: Request) -> tuple[tuple[str, str], ...]:
    """Return from where and by which rules it is said what can be seen."""
    site, rules = request.site, request.rules
    if site is None:
        return ()
    extinction = rules.criteria.extinction_at(site.elevation_m)
    return (
        ("Site", f"{place_words(site)}, {zone_words(site)}"),
        (
            "Watchable",
            f"above {rules.min_altitude_deg:g} degrees with the Sun {depth_words(rules.sun_below_deg)}; "
            f"{extinction:.2f} magnitudes lost per air mass; night sky of {rules.criteria.dark_zenith_mag:g} "
            "magnitudes a square arcsecond overhead; a forecast of geometry and light, not of weather",
        ),
    )


def verdict_choices() -> tuple[Choice, ...]:
    """Return the verdicts from best to worst."""
    return tuple(Choice(verdict.value, verdict.value.replace("_", " ")) for verdict in Verdict)


def kind_label(kind: str) -> str:
    """Return a kind of event as people write it."""
    return kind.replace("_", " ").capitalize()


def body_choices(events: pl.DataFrame) -> tuple[Choice, ...]:
    """Return the bodies that occur in an event table, in the written order."""
    present = set(events["body"]) | set(events["other"])
    return tuple(Choice(body.value, body.label) for body in Body if body.value in present)


def kind_choices(events: pl.DataFrame) -> tuple[Choice, ...]:
    """Return the kinds that occur in an event table, in the order of documentation."""
    present = set(events["kind"])
    return tuple(Choice(kind.value, kind_label(kind)) for kind in Kind if kind.value in present)
