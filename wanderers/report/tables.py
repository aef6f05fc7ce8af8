"""Tables for the terminal: at most 100 columns wide, rounded to what people read."""

from __future__ import annotations

import textwrap
from collections.abc import Callable, Iterator
from itertools import zip_longest
from typing import IO, Any, Final

import polars as pl

from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.report import outlook_table, site_tables
from wanderers.report.names import label
from wanderers.site.summary import counted

WIDTH: Final = 100
NARROWEST: Final = 12
GAP: Final = "  "
Cell = Callable[[Any], str]


def print_table(table: pl.DataFrame, heading: str, stream: IO[str]) -> None:
    """Print a table under its heading; which columns are shown follows from its kind.

    Laid out here: a library's table of two thousand rows would take longer than finding the events.
    """
    stream.write(textwrap.fill(heading, WIDTH) + "\n")
    if table.is_empty():
        stream.write("Nothing found.\n")
        return
    layout = _layout(table)
    columns = [[title, *cell(table)] for title, cell, _ in layout]
    numeric = [is_numeric for _, _, is_numeric in layout]
    stream.writelines(_lines(columns, numeric))


def _lines(columns: list[list[str]], numeric: list[bool]) -> Iterator[str]:
    """Yield the lines of a table: numbers to the right, words to the left, the widest words wrapped."""
    widths = [max(map(len, column)) for column in columns]
    excess = sum(widths) + len(GAP) * (len(widths) - 1) - WIDTH
    if excess > 0:
        widest = max((w, n) for n, w in enumerate(widths) if not numeric[n])[1]
        widths[widest] = max(widths[widest] - excess, NARROWEST)
    for row in zip(*columns, strict=True):
        wrapped = [
            [text] if len(text) <= width else textwrap.wrap(text, width)
            for text, width in zip(row, widths, strict=True)
        ]
        for line in zip_longest(*wrapped, fillvalue=""):
            cells = (
                text.rjust(width) if right else text.ljust(width)
                for text, width, right in zip(line, widths, numeric, strict=True)
            )
            yield GAP.join(cells).rstrip() + "\n"


def almanac_heading(table: pl.DataFrame, kernel: str) -> str:
    """Say what an event table is."""
    return (
        f"{counted(table.height, 'event')}, geocentric, apparent places from {kernel}; times in UTC; "
        "angles in degrees of date"
    )


def side_by_side_heading(table: pl.DataFrame, kernel: str) -> str:
    """Say what a table of definitions side by side is."""
    return (
        f"{counted(table.height, 'row')}, a station or an approach each, geocentric, from {kernel}: "
        "hours by which each other definition's instant is later than the one in longitude"
    )


def seasons_heading(table: pl.DataFrame, kernel: str) -> str:
    """Say what a season table is."""
    return f"{counted(table.height, 'retrograde season')}, geocentric, from {kernel}; dates in UTC"


def gatherings_heading(table: pl.DataFrame, kernel: str) -> str:
    """Say what a table of gatherings is."""
    return (
        f"{counted(table.height, 'gathering')}, geocentric, from {kernel}; times in UTC; Circle is the "
        "diameter of the smallest circle, Arc the stretch of longitude, Sun the least elongation, in degrees"
    )


def track_heading(table: pl.DataFrame, body: Body, kernel: str) -> str:
    """Say what a time series is."""
    rows = counted(table.height, "row")
    return f"{body.label}, {rows}, geocentric, apparent places from {kernel}; times in UTC"


Column = tuple[str, Callable[[pl.DataFrame], list[str]], bool]


def _layout(table: pl.DataFrame) -> list[Column]:
    """Return title, cells and whether the column is numeric, for the kind of table this is."""
    if "least_elongation_deg" in table.columns:
        return GATHERINGS + (STANDING if "better_before_utc" in table.columns else [])
    if "least_separation_utc" in table.columns:
        return SIDE_BY_SIDE
    if schema.conforms(table, schema.EVENT_COLUMNS) and "verdict" in table.columns:
        return SITE_EVENTS
    if schema.conforms(table, schema.EVENT_COLUMNS):
        return EVENTS if "better_before_utc" not in table.columns else [*EVENTS[:4], *STANDING]
    if "dark_hours_rank" in table.columns:
        return outlook_table.LAYOUT
    if schema.conforms(table, schema.SEASON_COLUMNS) and "verdict" in table.columns:
        return _with_frame(SITE_SEASONS, table)
    if schema.conforms(table, schema.SEASON_COLUMNS):
        return _with_frame(SEASONS, table)
    if schema.conforms(table, schema.TRACK_COLUMNS):
        return TRACK
    return [(name, _texts(name, str), table.schema[name].is_numeric()) for name in table.columns]


def _with_frame(layout: list[Column], table: pl.DataFrame) -> list[Column]:
    """Return a layout of seasons that names the frame, unless all are of the usual one."""
    if (table["frame"] == Frame.ECLIPTIC.value).all():
        return layout
    return [layout[0], ("Frame", _texts("frame", FRAME_WORDS.__getitem__), False), *layout[1:]]


def _texts(name: str, cell: Cell) -> Callable[[pl.DataFrame], list[str]]:
    """Return a function that prints one column, nothing where it is null."""
    return lambda table: ["" if value is None else cell(value) for value in table[name].to_list()]


def _fixed(name: str, decimals: int) -> Callable[[pl.DataFrame], list[str]]:
    return _texts(name, lambda value: f"{value:.{decimals}f}".replace("-", "−"))


def _minutes(name: str) -> Callable[[pl.DataFrame], list[str]]:
    """Return a function that prints a column of ISO instants to the minute, rounded, nothing where null."""
    return lambda table: [text or "" for text in minutes(table[name])]


def minutes(instants: pl.Series) -> pl.Series:
    """Return ISO instants to the minute, rounded; years outside 0 to 9999 are cut instead."""
    plain = instants.str.strip_suffix("Z")
    parsed = plain.str.to_datetime("%Y-%m-%dT%H:%M:%S%.f", strict=False)
    rounded = parsed.dt.round("1m").dt.to_string("%Y-%m-%d %H:%M")
    cut = plain.str.replace("T", " ").str.replace(r":[0-9.]+$", "")
    return rounded.zip_with(rounded.is_not_null(), cut)


def _day(value: str) -> str:
    return value.split("T")[0]


def _what(table: pl.DataFrame) -> list[str]:
    return [describe(row) for row in table.select(*_DESCRIBED).iter_rows(named=True)]


def _what_from_site(table: pl.DataFrame) -> list[str]:
    """Return what happens, and what is seen of it."""
    seen = [site_tables.verdict_words(row) for row in table.iter_rows(named=True)]
    return [f"{what}: {words}" for what, words in zip(_what(table), seen, strict=True)]


_DESCRIBED: Final = ("kind", "detail", "body", "other", "frame")
FRAME_WORDS: Final = {"ecliptic": "in longitude", "equator": "in RA", "j2000": "against the stars"}


def describe(event: dict[str, Any]) -> str:
    """Return what happens, in a few words."""
    body, other = label(event["body"]), label(event["other"] or "")
    frame = FRAME_WORDS.get(event["frame"] or "", "")
    detail = (event["detail"] or "").replace("_", " ")
    kind = event["kind"]
    if kind == "station":
        return f"{body} turns {detail} {frame}"
    if kind == "conjunction":
        return f"{body} – {other} conjunction {frame}"
    if kind == "appulse":
        return f"{body} – {other} {'closest, no conjunction' if detail == 'quasi' else 'closest'}"
    if kind == "solar_conjunction":
        return " ".join(filter(None, (body, detail, "conjunction with the Sun")))
    if kind == "quadrature":
        return f"{body} quadrature {detail}"
    if kind == "greatest_elongation":
        return f"{body} greatest elongation {detail}"
    return _describe_rest(kind, body, other, detail)


def _gathered(detail: str) -> str:
    return ", ".join(label(name) for name in detail.split("+"))


def _describe_rest(kind: str, body: str, other: str, detail: str) -> str:
    """Return the words for kinds that need no frame."""
    words = {
        "moon_phase": f"{detail.capitalize()} Moon" if detail in ("new", "full") else detail.capitalize(),
        "season_point": " ".join(reversed(detail.split())).capitalize(),
        "gathering": f"Gathering of {_gathered(detail)}",
        "constellation_entry": f"{body} leaves {detail}",
        "node": f"{body} {detail} node",
        "occultation": f"{body} – {other} occultation",
        "transit": f"{body} transit of the Sun",
        "ring_plane_crossing": f"{body}'s ring plane crosses the {detail.capitalize()}",
    }
    return words.get(kind, " ".join(filter(None, (body, kind.replace("_", " "), other))))


EVENTS: Final[list[Column]] = [
    ("UTC", _minutes("utc"), False),
    ("What", _what, False),
    ("In", _texts("constellation", str), False),
    ("Separation", _fixed("separation_deg", 2), True),
    ("Elongation", _fixed("elongation_deg", 1), True),
    ("Mag", _fixed("magnitude", 1), True),
]

SITE_EVENTS: Final[list[Column]] = [
    ("Local", site_tables.local_instants, False),
    ("What", lambda table: _what_from_site(table), False),
    ("Evening", site_tables.evenings, False),
    ("Watch", site_tables.windows, False),
    ("Best", site_tables.best_times, False),
    ("Alt", site_tables.places, False),
]

STANDING: Final[list[Column]] = [
    ("Better before", _texts("better_before_utc", _day), False),
    ("Better after", _texts("better_after_utc", _day), False),
]

GATHERINGS: Final[list[Column]] = [
    ("UTC", _minutes("utc"), False),
    ("What", lambda table: [_gathered(detail) for detail in table["detail"]], False),
    ("In", _texts("constellation", str), False),
    ("Circle", _fixed("separation_deg", 2), True),
    ("Arc", _fixed("longitude_arc_deg", 2), True),
    ("Sun", _fixed("least_elongation_deg", 0), True),
]


def _compared(table: pl.DataFrame) -> list[str]:
    return [
        f"{label(row['body'])} turns {row['detail']}"
        if row["kind"] == "station"
        else f"{label(row['body'])} – {label(row['other'])}"
        for row in table.iter_rows(named=True)
    ]


def _later(name: str) -> Callable[[pl.DataFrame], list[str]]:
    """Return a function that prints how much later a definition's instant is, in hours."""
    return _texts(name, lambda hours: f"{hours:+.1f} h".replace("-", "−"))


SIDE_BY_SIDE: Final[list[Column]] = [
    ("What", _compared, False),
    ("In longitude, UTC", _minutes("longitude_utc"), False),
    ("In RA", _later("right_ascension_minus_longitude_hours"), True),
    ("J2000", _later("j2000_minus_longitude_hours"), True),
    ("Closest", _later("least_separation_minus_longitude_hours"), True),
    ("Least sep.", _fixed("least_separation_deg", 2), True),
]

SEASONS: Final[list[Column]] = [
    ("Planet", _texts("body", label), False),
    ("First pass", _texts("first_pass_start_utc", _day), False),
    ("Retrograde", _texts("station_retrograde_utc", _day), False),
    ("Middle", _texts("middle_utc", _day), False),
    ("Direct", _texts("station_direct_utc", _day), False),
    ("Last pass", _texts("third_pass_end_utc", _day), False),
    ("Arc", _fixed("arc_deg", 1), True),
    ("Days", _fixed("retrograde_days", 0), True),
    ("Path", _texts("path_shape", str), False),
    ("Mag", _fixed("peak_magnitude", 1), True),
]

SITE_SEASONS: Final[list[Column]] = [
    SEASONS[0],
    *SEASONS[2:5],
    ("Evening", site_tables.evenings, False),
    ("Best", site_tables.best_times, False),
    ("Alt", site_tables.places, False),
    (
        "What",
        site_tables.verdicts_and_cautions,
        False,
    ),
]

TRACK: Final[list[Column]] = [
    ("UTC", _minutes("utc"), False),
    ("Longitude", _fixed("longitude_deg", 3), True),
    ("Latitude", _fixed("latitude_deg", 3), True),
    ("Deg/day", _fixed("longitude_rate_deg_per_day", 3), True),
    ("au", _fixed("distance_au", 4), True),
    ("Elong", _fixed("elongation_deg", 1), True),
    ("Mag", _fixed("magnitude", 1), True),
    ("Size", _fixed("diameter_arcsec", 1), True),
    ("Lit", _fixed("illuminated_fraction", 2), True),
    ("In", _texts("constellation", str), False),
]
