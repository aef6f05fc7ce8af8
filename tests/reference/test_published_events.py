"""The event table against published figures; sources, settings and tolerances stand in the data files."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import polars as pl
import pytest

from tests.reference.published import EventFigure, event_figures, jd_of_date, rows
from wanderers.ephemeris.bodies import BODIES
from wanderers.events.catalogue import FINDERS

Almanac = Callable[[float, float, list[str], list[str], list[str]], pl.DataFrame]

FILES = (
    "meeus_1998",
    "astronomical_phenomena",
    "mars_oppositions",
    "great_conjunctions",
    "transits",
    "mutual_occultations",
    "apsides",
    "gatherings",
)
FIGURES = sorted(
    (figure for name in FILES for figure in event_figures(name)), key=lambda figure: figure.jd_tt
)
TRIPLE_GROUPS = ("JS1980 longitude", "JS1980 right ascension", "MS1945 longitude", "UN1993 longitude")
GEOCENTRIC_MISSES = [figure for figure in event_figures("mutual_occultations") if figure.kind == "appulse"]

OFFERED_KINDS = {kind.value for kinds, _ in FINDERS for kind in kinds}

MARGIN_DAYS = 60.0
GAP_DAYS = 1500.0  # figures closer than this are asked for together
NEAREST_DAYS = 20.0  # no kind of event of one body or pair comes twice so soon, Moon and Mercury apart


@dataclass(frozen=True, slots=True)
class Stretch:
    """A stretch of time with all that is published about it."""

    figures: tuple[EventFigure, ...]

    def table(self, almanac: Almanac) -> pl.DataFrame:
        """Ask for every event that a figure may concern."""
        names = {name for figure in self.figures for name in (figure.body, figure.other)}
        return almanac(
            self.figures[0].jd_tt - MARGIN_DAYS,
            self.figures[-1].jd_tt + MARGIN_DAYS,
            sorted({figure.kind for figure in self.figures} | {"occultation"}),
            sorted({figure.frame for figure in self.figures} - {""} | {"ecliptic"}),
            [body.value for body in BODIES if body.value in names | {"sun"}],
        )


def stretches() -> list[Stretch]:
    """Cut the figures, in order of time, where the years between are empty."""
    groups: list[list[EventFigure]] = []
    for figure in FIGURES:
        if not groups or figure.jd_tt - groups[-1][-1].jd_tt > GAP_DAYS:
            groups.append([])
        groups[-1].append(figure)
    return [Stretch(tuple(group)) for group in groups]


@pytest.fixture(scope="module")
def table_of(published_almanac: Almanac) -> Callable[[EventFigure], pl.DataFrame]:
    """Give the event table of the stretch in which a figure lies; each stretch is asked for once."""
    stretch_of = {figure.id: stretch for stretch in stretches() for figure in stretch.figures}
    tables: dict[Stretch, pl.DataFrame] = {}

    def table(figure: EventFigure) -> pl.DataFrame:
        stretch = stretch_of[figure.id]
        if stretch not in tables:
            tables[stretch] = stretch.table(published_almanac)
        return tables[stretch]

    return table


def require_kind(kind: str) -> None:
    """Skip, visibly, where this version has no finder of the kind."""
    if kind not in OFFERED_KINDS:
        pytest.skip(f"this version finds no {kind}")


def alike(table: pl.DataFrame, figure: EventFigure) -> pl.DataFrame:
    """Return the events of the figure's kind, bodies and frame."""
    for column in ("kind", "detail", "body", "other", "frame"):
        wanted = getattr(figure, column)
        table = table.filter(pl.col(column) == wanted) if wanted else table
    return table.sort("jd_tt")


def nearest(table: pl.DataFrame, figure: EventFigure) -> dict[str, object]:
    """Return the event nearest to the figure's instant."""
    away_days = (pl.col("jd_tt") - figure.jd_tt).abs()
    candidates = alike(table, figure).filter(away_days < NEAREST_DAYS).sort(away_days)
    if candidates.is_empty():
        pytest.fail(f"no {figure.kind} of {figure.body} {figure.other} near {figure.jd_tt}")
    return candidates.row(0, named=True)


@pytest.mark.parametrize("figure", FIGURES, ids=str)
def test_published_figure(figure: EventFigure, table_of: Callable[[EventFigure], pl.DataFrame]) -> None:
    require_kind(figure.kind)
    found = nearest(table_of(figure), figure)[figure.column]
    value = jd_of_date(found.removesuffix("Z")) if isinstance(found, str) else found
    assert value == pytest.approx(figure.value, rel=0.0, abs=figure.tolerance), figure.reason


@pytest.mark.parametrize("group", TRIPLE_GROUPS)
def test_triple_conjunctions_have_three_parts(
    group: str, table_of: Callable[[EventFigure], pl.DataFrame]
) -> None:
    parts = [figure for figure in FIGURES if figure.group == group]
    assert len(parts) == 3
    meeting = alike(table_of(parts[0]), parts[0]).filter(
        pl.col("jd_tt").is_between(parts[0].jd_tt - MARGIN_DAYS, parts[2].jd_tt + MARGIN_DAYS)
    )
    assert meeting.height == 3


@pytest.mark.parametrize("figure", GEOCENTRIC_MISSES, ids=str)
def test_occultations_seen_from_part_of_the_earth_are_not_geocentric(
    figure: EventFigure, table_of: Callable[[EventFigure], pl.DataFrame]
) -> None:
    require_kind("occultation")
    hidden = table_of(figure).filter(
        pl.col("kind") == "occultation",
        pl.col("body") == figure.body,
        pl.col("other") == figure.other,
        (pl.col("jd_tt") - figure.jd_tt).abs() < 2.0,
    )
    assert hidden.height == 0


def test_sun_enters_thirteen_constellations_on_the_handbooks_days(published_almanac: Almanac) -> None:
    require_kind("constellation_entry")
    span = (jd_of_date("2021-01-01"), jd_of_date("2022-01-01"))
    entries = published_almanac(*span, ["constellation_entry"], ["ecliptic"], ["sun"])
    found = dict(zip(entries["constellation"], entries["jd_tt"], strict=True))
    noons = {
        row["constellation"]: f"2021-{row['month']:0>2}-{row['day']:0>2}T12:00"
        for row in rows("sun_constellations")
    }
    assert entries.height == 13
    assert found == pytest.approx({name: jd_of_date(noon) for name, noon in noons.items()}, rel=0.0, abs=1.5)
