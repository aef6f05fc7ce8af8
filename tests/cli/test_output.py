"""What the commands write, read back: the same table in every format, narrow enough on the screen."""

from __future__ import annotations

import io
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import polars as pl
import pytest
from polars.testing import assert_frame_equal

from tests.cli.test_bad_input import program
from wanderers import schema
from wanderers.ephemeris.bodies import NAKED_EYE_PLANETS, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events import gathering_table, timeseries
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.seasons import seasons

FROM, TO = 2_461_406.5, 2_461_771.5  # 2027, TT
SPAN = ("--from", "2027", "--to", "2028", "--scale", "tt")
WIDEST = 100  # characters of a terminal line


@dataclass(frozen=True)
class Case:
    """A command line and the table that the same request gets from the package."""

    arguments: tuple[str, ...]
    table: Callable[[TrackStore], pl.DataFrame]
    columns: dict[str, type[pl.DataType]]


CASES = {
    "almanac": Case(
        ("almanac", *SPAN, "--stars", "none", "--frame", "j2000", "--frame", "ecliptic"),
        lambda store: almanac(
            store,
            Query(FROM, TO, frozenset(Kind), frozenset({Frame.ECLIPTIC, Frame.J2000}), Choice(stars_for=())),
        ),
        schema.EVENT_COLUMNS,
    ),
    "seasons": Case(
        ("seasons", *SPAN, "--frame", "equator"),
        lambda store: seasons(store, FROM, TO, bodies=PLANETS, frames=(Frame.EQUATOR,)),
        schema.SEASON_COLUMNS,
    ),
    "track": Case(
        ("track", "mars", *SPAN, "--step", "12h"),
        lambda store: timeseries.time_series(store, Body.MARS, FROM, TO, 0.5),
        schema.TRACK_COLUMNS,
    ),
    "gatherings": Case(
        ("gatherings", *SPAN, "--within", "40", "--quiet"),
        lambda store: gathering_table.gatherings(
            store, FROM, TO, gathering_table.FewestAndWidest(NAKED_EYE_PLANETS, 3, 40.0, 0.0)
        )[0],
        gathering_table.COLUMNS,
    ),
}


def read(form: str, path: Path, columns: dict[str, type[pl.DataType]]) -> pl.DataFrame:
    if form == "csv":
        return pl.read_csv(path, schema=columns)
    if form == "parquet":
        return pl.read_parquet(path)
    return pl.read_json(io.BytesIO(path.read_bytes()), schema=columns)


@pytest.mark.parametrize("form", ["csv", "parquet", "json"])
@pytest.mark.parametrize("name", CASES)
def test_files_read_back_as_the_table(
    name: str, form: str, store: TrackStore, cache_folder: Path, tmp_path: Path
) -> None:
    case, path = CASES[name], tmp_path / f"table.{form}"
    run = program(*case.arguments, "--out", str(path), cache=cache_folder)
    assert (run.returncode, run.stdout, run.stderr) == (0, "", "")
    assert [file.name for file in tmp_path.iterdir()] == [path.name]
    table = case.table(store)
    assert table.height > 0
    # CSV and JSON carry every digit: floats are written so that they read back exactly.
    assert_frame_equal(read(form, path, case.columns), table, check_exact=True)


@pytest.mark.parametrize("name", CASES)
def test_standard_output_carries_the_same_csv_and_nothing_else(
    name: str, cache_folder: Path, tmp_path: Path
) -> None:
    case, path = CASES[name], tmp_path / "table.csv"
    printed = program(*case.arguments, "--format", "csv", cache=cache_folder)
    program(*case.arguments, "--out", str(path), cache=cache_folder)
    assert printed.stderr == ""
    assert printed.stdout == path.read_text()


@pytest.mark.parametrize("name", CASES)
def test_printed_tables_fit_the_screen(name: str, cache_folder: Path) -> None:
    run = program(*CASES[name].arguments, cache=cache_folder)
    assert run.returncode == 0
    lines = run.stdout.splitlines()
    assert len(lines) > 3
    assert max(map(len, lines)) <= WIDEST


def test_format_wins_over_the_ending_of_the_file(cache_folder: Path, tmp_path: Path) -> None:
    path = tmp_path / "seasons.csv"
    run = program(*CASES["seasons"].arguments, "--format", "json", "--out", str(path), cache=cache_folder)
    assert run.returncode == 0
    assert path.read_text().startswith("[{")


def test_an_ending_that_names_no_format_is_refused(cache_folder: Path, tmp_path: Path) -> None:
    path = tmp_path / "seasons.xlsx"
    run = program(*CASES["seasons"].arguments, "--out", str(path), cache=cache_folder)
    assert run.returncode == 2 and ".xlsx" in run.stderr and ".parquet" in run.stderr
    assert not path.exists()
    given = program(*CASES["seasons"].arguments, "--format", "csv", "--out", str(path), cache=cache_folder)
    assert given.returncode == 0 and path.read_text().startswith("season_id,")


@pytest.mark.parametrize("name", CASES)
def test_help_has_an_example(name: str, cache_folder: Path) -> None:
    run = program(CASES[name].arguments[0], "--help", cache=cache_folder)
    assert run.returncode == 0
    assert "Example" in run.stdout and f"wanderers {name}" in run.stdout


@pytest.mark.parametrize(
    ("one", "two"),
    [
        (
            ("--body", "venus", "--body", "mars", "--body", "moon"),
            ("--body", "moon", "--body", "mars", "--body", "venus"),
        ),
        (("--kind", "node", "--kind", "station"), ("--kind", "station", "--kind", "node")),
        (("--frame", "equator", "--frame", "ecliptic"), ("--frame", "ecliptic", "--frame", "equator")),
    ],
)  # fmt: skip
def test_the_order_of_repeated_options_does_not_matter(
    one: tuple[str, ...], two: tuple[str, ...], cache_folder: Path
) -> None:
    tables = [
        program("almanac", *SPAN, *given, "--format", "csv", cache=cache_folder).stdout
        for given in (one, two)
    ]
    assert tables[0] == tables[1] != ""


def test_utc_is_the_scale_of_dates_unless_said(cache_folder: Path) -> None:
    # TT - UTC was 69.184 s from 2017 on (IERS Bulletin C): 37 leap seconds and 32.184 s.
    asked = ("track", "mars", "--from", "2020", "--to", "2020-01-03", "--format", "csv")
    utc, tt = (
        pl.read_csv(io.StringIO(program(*asked, *scale, cache=cache_folder).stdout))
        for scale in ((), ("--scale", "tt"))
    )
    assert utc["utc"][0] == "2020-01-01T00:00:00.000Z"
    assert tt["tt"][0] == "2020-01-01T00:00:00.000"
    assert (utc["jd_tt"][0] - tt["jd_tt"][0]) * 86_400.0 == pytest.approx(69.184, abs=1e-4)
