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
from wanderers.report.contents import Contents
from wanderers.report.glance import Glance, at_a_glance
from wanderers.report.glossary import glossary
from wanderers.report.pictures import Picture
from wanderers.report.planets import PlanetSection, planet_sections

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
    request = contents.request
    first, last = request.ends
    span = f"{first} to {last} {SCALE_WORDS[request.scale]}"
    overviews = [picture for picture in pictures if picture.body is None]
    return Page(
        title=f"The wandering planets, {first} to {last}",
        lead=(
            f"Stations, retrograde seasons and meetings of the planets from {span}, seen from the centre of "
            f"the Earth: {READERS}."
        ),
        stem=stem,
        first=first,
        last=last,
        span=span,
        basis=basis(contents),
        generator=f"wanderers {__version__}",
        kernel_line=f"kernel {contents.kernel.name}, SHA-256 {contents.kernel.sha256}",
        provenance=provenance(contents),
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
    )


def basis(contents: Contents) -> tuple[tuple[str, str], ...]:
    """Return the settings that every reader should know before the first figure."""
    request = contents.request
    first, last = request.ends
    return (
        ("Span", f"{first} to {last} {SCALE_WORDS[request.scale]}"),
        ("Frame", ", ".join(frame.value for frame in request.frames)),
        ("Seen from", "the centre of the Earth"),
        ("Times", "UTC"),
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
        ("Time scale", "UTC on this page; TT and UTC in the files. " + timescales.time_scale_facts().source),
        ("Kernel", f"{kernel.name} ({kernel.path.name}, {kernel.size_bytes / 1e6:.0f} MB)"),
        ("Kernel checksum", f"SHA-256 {kernel.sha256}"),
        ("Program", f"wanderers {__version__}"),
        *((term, ", ".join(names) if len(names) < of else "all") for term, names, of in wanted),
        ("Magnitudes", "model magnitudes (V), as for the whole disc; weather and dust on Mars are left out"),
    )


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
