"""What a dossier is made of: one season's rows of every table, and where each row stands."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import polars as pl

from wanderers.ephemeris.bodies import INNER, Body
from wanderers.events.season_study import Study

FOLDER: Final = "seasons"
SEASONS_FILE: Final = "seasons.csv"
MARKS_FILE: Final = f"{FOLDER}/marks.csv"
STARS_FILE: Final = f"{FOLDER}/stars.csv"
MEETINGS_FILE: Final = f"{FOLDER}/meetings.csv"
STANDING_FILE: Final = f"{FOLDER}/standing.csv"

FILES: Final = (
    (MARKS_FILE, "marks", "each season's dated moments, least distance and greatest brightness"),
    (STARS_FILE, "stars", "bright stars and clusters that each season passes"),
    (MEETINGS_FILE, "meetings", "meetings within each season, and constellations entered"),
    (STANDING_FILE, "standing", "each season's rank among the planet's seasons"),
)
"""Files beside the dossiers, the table of the study that each holds, and what it is."""


def address(season_id: str) -> str:
    """Return where a season's dossier lies, from the report's folder and its page."""
    return f"{FOLDER}/{season_id}.html"


def address_in(study: Study, season_id: str) -> str:
    """Return the address of a season's dossier, empty where it has none."""
    return address(season_id) if season_id in study.tracks else ""


@dataclass(frozen=True, slots=True)
class Origin:
    """The table row and column that a figure was read from.

    Attributes:
        file: of the report folder.
        row: what names the row: season_id, and what else is needed.
        column: the column.
    """

    file: str
    row: str
    column: str


def printed(origins: tuple[Origin, ...]) -> tuple[str, ...]:
    """Return origins in words, one text a table row: ``seasons.csv, mars-ecliptic-s13: arc_deg``."""
    columns: dict[tuple[str, str], list[str]] = {}
    for origin in origins:
        columns.setdefault((origin.file, origin.row), []).append(origin.column)
    return tuple(f"{file}, {row}: {', '.join(names)}" for (file, row), names in columns.items())


@dataclass(frozen=True, slots=True)
class SeasonRows:
    """One season's rows.

    Attributes:
        season: its row of the season table.
        marks: its dated moments by name: rows of the table of marks.
        stars: stars passed, in order of time.
        meetings: events of the planet within the season.
        standing: its rank by figure.
    """

    season: dict[str, Any]
    marks: dict[str, dict[str, Any]]
    stars: pl.DataFrame
    meetings: pl.DataFrame
    standing: dict[str, dict[str, Any]]

    @property
    def season_id(self) -> str:
        """Its name in every table."""
        return str(self.season["season_id"])

    @property
    def body(self) -> Body:
        """The planet."""
        return Body(self.season["body"])

    @property
    def inner(self) -> bool:
        """Whether the planet's middle is an inferior conjunction."""
        return self.body in INNER

    def in_season(self, column: str) -> Origin:
        """Return the origin of a column of the season table."""
        return Origin(SEASONS_FILE, self.season_id, column)

    def in_marks(self, mark: str, column: str) -> Origin:
        """Return the origin of a column of the table of marks."""
        return Origin(MARKS_FILE, f"{self.season_id} {mark}", column)

    def in_standing(self, figure: str, column: str) -> Origin:
        """Return the origin of a column of the table of standings."""
        return Origin(STANDING_FILE, f"{self.season_id} {figure}", column)

    def in_stars(self, star: str, column: str) -> Origin:
        """Return the origin of a column of the table of stars."""
        return Origin(STARS_FILE, f"{self.season_id} {star}", column)

    def of_mark(self, mark: str, column: str) -> Any:
        """Return a value of a dated moment, None where it is not known."""
        return self.marks[mark][column] if mark in self.marks else None


def season_rows(study: Study, season: dict[str, Any]) -> SeasonRows:
    """Return one season's rows of every table."""
    season_id = season["season_id"]
    marks = {row["mark"]: row for row in study.of(study.marks, season_id).iter_rows(named=True)}
    standing = {row["figure"]: row for row in study.of(study.standing, season_id).iter_rows(named=True)}
    return SeasonRows(
        season, marks, study.of(study.stars, season_id), study.of(study.meetings, season_id), standing
    )
