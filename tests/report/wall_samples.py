"""Tables made up for tests of the printable year, and its pages as independent readers of PDF see them."""

from __future__ import annotations

import datetime as dt
import re
import subprocess
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import polars as pl

from tests.report.calendar_samples import KERNEL, event, table
from tests.report.report_samples import MARS_SEASON, seasons_table, with_instants
from wanderers import schema
from wanderers.report.wall import printable_year
from wanderers.site import columns
from wanderers.site.places import Site

HILL = Site("Lantern Hill", 52.13, 11.62, 80.0, "Europe/Berlin")
CAPE = Site("Cape Tern", -33.9, 18.4, 10.0, "Africa/Johannesburg")
NO_SEASONS = pl.DataFrame(schema=schema.SEASON_COLUMNS)
MARS = seasons_table(MARS_SEASON)
EXTRA = {"seen_separation_deg": pl.Float64, "seen_placement": pl.String}


def moon_phase(utc: str, detail: str) -> dict[str, Any]:
    return event("moon_phase", utc, body="moon", detail=detail, frame="ecliptic", elongation_deg=90.0)


def pair(utc: str, body: str, other: str, apart_deg: float, **cells: Any) -> dict[str, Any]:
    given = {"separation_deg": apart_deg, "elongation_deg": 60.0} | cells
    return event("appulse", utc, body=body, other=other, **given)


def geocentric(*rows: dict[str, Any]) -> pl.DataFrame:
    return with_instants(table(*rows))


def from_site(*rows: tuple[dict[str, Any], dict[str, Any]]) -> pl.DataFrame:
    """Return an event table with the columns of a site, from pairs of an event and what the site adds."""
    names: dict[str, Any] = dict(columns.SITE_COLUMNS) | EXTRA
    events = table(*(row for row, _ in rows))
    added = pl.DataFrame([dict.fromkeys(names) | cells for _, cells in rows], schema=names)
    return with_instants(events.hstack(added))


def looked_at(best_local: str, **cells: Any) -> dict[str, Any]:
    """Return what a site adds to an event that the bare eye can watch."""
    given = {"verdict": "naked_eye", "compass": "west-southwest", "altitude_deg": 12.2}
    return given | {"best_local": best_local} | cells


NOT_SEEN: dict[str, Any] = {"verdict": "not_visible", "verdict_reason": "up only by day"}


def drawn(events: pl.DataFrame, seasons: pl.DataFrame = NO_SEASONS, **more: Any) -> bytes:
    """Return the printable calendar of January 2027, or of what else is asked."""
    asked = {
        "first_day": dt.date(2027, 1, 1),
        "end_day": dt.date(2027, 2, 1),
        "kernel": KERNEL,
    } | more
    return printable_year(events, seasons, **asked)


@dataclass(frozen=True)
class Word:
    """One word on a page; points from the upper left corner, as poppler counts."""

    text: str
    left: float
    top: float
    right: float
    bottom: float

    @property
    def middle(self) -> float:
        return 0.5 * (self.left + self.right)


@dataclass(frozen=True)
class Page:
    """One page as poppler's pdftotext reads it."""

    width: float
    height: float
    words: tuple[Word, ...]

    @property
    def text(self) -> str:
        return " ".join(word.text for word in self.words)


def poppler(program: str, *arguments: str | Path) -> str:
    """Return what one of poppler's programs prints."""
    line = [program, *map(str, arguments)]
    return subprocess.run(line, capture_output=True, check=True, timeout=120).stdout.decode()


def read(content: bytes, folder: Path) -> list[Page]:
    """Return the pages of a PDF, read by poppler."""
    path = folder / "read.pdf"
    path.write_bytes(content)
    tree = ElementTree.fromstring(re.sub(' xmlns="[^"]*"', "", poppler("pdftotext", "-bbox", path, "-")))
    return [
        Page(float(page.attrib["width"]), float(page.attrib["height"]), tuple(map(_word, page.iter("word"))))
        for page in tree.iter("page")
    ]


def _word(element: ElementTree.Element) -> Word:
    edges = (float(element.attrib[name]) for name in ("xMin", "yMin", "xMax", "yMax"))
    return Word(element.text or "", *edges)


def text_of(content: bytes, folder: Path) -> str:
    """Return all text of a PDF in the order in which it was drawn, one space between words."""
    path = folder / "text.pdf"
    path.write_bytes(content)
    return " ".join(poppler("pdftotext", "-raw", path, "-").split())
