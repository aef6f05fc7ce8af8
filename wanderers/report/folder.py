"""The report folder: everything is built in a hidden folder beside it and renamed into place at the end."""

from __future__ import annotations

import json
import os
import secrets
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

import polars as pl

from wanderers import __version__
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.errors import OutputError
from wanderers.events.kinds import Kind
from wanderers.files import reported_as_output_error, require_writable
from wanderers.report import calendars
from wanderers.report.contents import Contents, Progress
from wanderers.report.dossier.pages import dossier_jobs, write_dossiers
from wanderers.report.page import page_of
from wanderers.report.page_data import packed, table_data
from wanderers.report.pictures import draw
from wanderers.report.render import rendered
from wanderers.site.zones import zone_named

PAGE: Final = "index.html"
MANIFEST: Final = "report.json"
"""Lists the files of a report; by it a folder is known as one."""
MADE_BY: Final = "wanderers report"


@dataclass(frozen=True, slots=True)
class Mark:
    """By what a folder is known as this program's: its list of files, and who made it."""

    manifest: str
    made_by: str


REPORT: Final = Mark(MANIFEST, MADE_BY)
CALENDAR: Final = "events.ics"
LITTER: Final = frozenset({".DS_Store", "Thumbs.db", "desktop.ini"})
"""Files that desktops leave in any folder they show."""
KEPT_OF_NAME: Final = 40
CALENDAR_AT_MOST: Final = 20_000
"""Entries of the report's calendar: far more than any calendar program takes at once."""
ENTRY: Final = Kind.CONSTELLATION_ENTRY.value


def require_replaceable(folder: Path, mark: Mark = REPORT) -> None:
    """Make sure, before long work starts, that a folder of that mark can be put there.

    Raises:
        OutputError: the place cannot be written, or holds anything that no earlier folder of the mark held.
    """
    require_writable(folder, folder=True)
    require_writable(folder.parent, folder=True)
    with reported_as_output_error(folder):
        if folder.is_dir():
            _require_own(folder, mark)


def _require_own(folder: Path, mark: Mark) -> None:
    """Refuse to replace a folder that holds what this program did not put there."""
    present = {path.relative_to(folder).as_posix() for path in folder.rglob("*") if not path.is_dir()}
    foreign = sorted(name for name in present - _listed(folder, mark) if Path(name).name not in LITTER)
    if foreign:
        some = ", ".join(foreign[:3]) + (f" and {len(foreign) - 3} more" if len(foreign) > 3 else "")
        raise OutputError(
            f"{folder} holds files that are not of a {mark.made_by.split()[-1]} ({some}): move them away, or "
            "choose another --out"
        )


def _listed(folder: Path, mark: Mark) -> set[str]:
    """Return the files that a folder's own list names; none where there is no such list."""
    manifest = manifest_of(folder, mark)
    return {*map(str, manifest.get("files", ())), mark.manifest} if manifest else set()


def manifest_of(folder: Path, mark: Mark = REPORT) -> dict[str, Any]:
    """Return a folder's own list of files with what stands beside it; empty where there is none."""
    try:
        manifest = json.loads((folder / mark.manifest).read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return {}
    return manifest if isinstance(manifest, dict) and manifest.get("made_by") == mark.made_by else {}


def write_report(
    contents: Contents,
    folder: Path,
    progress: Progress = lambda words: None,
) -> None:
    """Write the report folder of a span; an older report there is replaced as a whole.

    Args:
        contents: its tables.
        folder: where it shall stand; folders above it are made.
        progress: told what is being done.

    Raises:
        OutputError: it cannot be written, or is in the way; nothing half-written stays.
    """
    require_replaceable(folder)
    final = Path(os.path.realpath(folder))
    with reported_as_output_error(folder), built_beside(final) as building:
        tables = _write_tables(contents, building)
        calendar, holds = _write_calendar(contents, building)
        progress("drawing")
        pictures = draw(contents, building / "pictures", progress, dossier_jobs(contents))
        progress("composing the pages")
        site = contents.request.site
        behind = write_dossiers(contents, pictures, building, zone_named(site.zone) if site else None)
        files = (*tables, *behind, (CALENDAR, holds))
        page = page_of(contents, pictures, final.name, files)
        html = rendered(page, table_data(contents.events), packed(calendar))
        (building / PAGE).write_text(html, encoding="utf-8")
        _write_manifest(contents, building)


@contextmanager
def built_beside(final: Path, mark: Mark = REPORT) -> Iterator[Path]:
    """Give a fresh hidden folder that takes the final name when all went well, and vanishes otherwise."""
    final.parent.mkdir(parents=True, exist_ok=True)
    building = _hidden(final)
    building.mkdir()
    try:
        yield building
        _put_in_place(building, final, mark)
    finally:
        shutil.rmtree(building, ignore_errors=True)


def _put_in_place(building: Path, final: Path, mark: Mark) -> None:
    """Rename a finished folder; what stood there goes only after that, or comes back."""
    if not final.exists():
        building.rename(final)
        return
    _require_own(final, mark)  # something may have been put there meanwhile
    older = _hidden(final)
    final.rename(older)
    try:
        building.rename(final)
    except BaseException:
        older.rename(final)
        raise
    shutil.rmtree(older, ignore_errors=True)


def _hidden(final: Path) -> Path:
    return final.parent / f".{final.name[:KEPT_OF_NAME]}.{secrets.token_hex(8)}.tmp"


@dataclass(frozen=True, slots=True)
class TableFile:
    """A table to be written: stem of its file, what it holds, its rows."""

    stem: str
    holds: str
    table: pl.DataFrame


def _write_tables(contents: Contents, folder: Path) -> tuple[tuple[str, str], ...]:
    """Write every table as CSV and Parquet; return the files' names and what they hold."""
    lead = contents.request.frames[0].value
    tables = (
        TableFile("events", "every event of the span, in full precision", contents.events),
        TableFile("seasons", "the retrograde seasons that reach into the span", contents.seasons),
        TableFile("side_by_side", "stations and meetings by each definition", contents.definitions),
        *(
            TableFile(f"track_{body.value}", f"{body.label} at regular steps, frame {lead}", track)
            for body, track in contents.tracks.items()
        ),
    )
    for one in tables:
        one.table.write_csv(folder / f"{one.stem}.csv")
        one.table.write_parquet(folder / f"{one.stem}.parquet")
    return tuple((f"{one.stem}.{kind}", one.holds) for one in tables for kind in ("csv", "parquet"))


def _write_calendar(contents: Contents, folder: Path) -> tuple[bytes, str]:
    """Write the calendar; return it, and what it holds in words."""
    events, holds = calendar_events(contents.events)
    first, last = contents.request.ends
    name = f"Wandering planets {first} to {last}"
    style = calendars.Style(name, contents.kernel, site=contents.request.site)
    content = calendars.issue(events, style).content
    (folder / CALENDAR).write_bytes(content)
    return content, holds


def calendar_events(events: pl.DataFrame) -> tuple[pl.DataFrame, str]:
    """Return the events that a calendar can and should hold, and which those are in words.

    Years outside 1 to 9999 cannot stand in one; where more than CALENDAR_AT_MOST are left, meetings with
    stars and changes of constellation go first, then meetings with the Moon, then what lies latest.
    """
    possible = events.filter(pl.col("utc").str.contains(r"^\d{4}-") & ~pl.col("utc").str.starts_with("0000"))
    holds = "the events as a calendar, iCalendar (RFC 5545)"
    bodies = [body.value for body in BODIES]
    starless = pl.col("other").is_null() | pl.col("other").is_in(bodies)
    rules = (
        ("meetings with stars and changes of constellation", starless & (pl.col("kind") != ENTRY)),
        ("meetings with the Moon", pl.col("other").is_null() | (pl.col("body") != Body.MOON.value)),
    )
    left_out = []
    for words, rule in rules:
        if possible.height > CALENDAR_AT_MOST:
            possible = possible.filter(rule)
            left_out.append(words)
    if possible.height > CALENDAR_AT_MOST:
        possible = possible.head(CALENDAR_AT_MOST)
        left_out.append(f"what comes after the first {CALENDAR_AT_MOST}")
    return possible, "; left out, to keep it fit for use: ".join(filter(None, (holds, ", ".join(left_out))))


def _write_manifest(contents: Contents, folder: Path) -> None:
    """Write the list of files, with what they were made from."""
    request, kernel = contents.request, contents.kernel
    first, last = request.ends
    files = sorted(path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file())
    manifest: dict[str, Any] = {
        "made_by": MADE_BY,
        "version": __version__,
        "from": first,
        "to": last,
        "scale": request.scale,
        "bodies": request.bodies,
        "kinds": request.kinds,
        "frames": request.frames,
        "site": request.site.name if request.site else None,
        "kernel": kernel.name,
        "kernel_sha256": kernel.sha256,
        "files": files,
    }
    (folder / MANIFEST).write_text(json.dumps(manifest, indent=1) + "\n", encoding="utf-8")
