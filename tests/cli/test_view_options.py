"""Events chosen for an audience, and seasons from a site: what is printed, written, told and refused."""

from __future__ import annotations

import datetime as dt
import io
import json
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import polars as pl
import pytest
from polars.testing import assert_frame_equal

from tests.cli.site_program import HILL, Outcome, Program
from wanderers import schema
from wanderers.plans.outlook import OUTLOOK_COLUMNS
from wanderers.site import columns

INSTALLED = Path(sys.executable).with_name("wanderers")
SPRING = ("--from", "2027", "--to", "2027-05")
PAIRS = ("almanac", *SPRING, "--kind", "appulse", "--stars", "none")
ALL_LIMITS = (
    *("--visible", "--after", "18:30", "--by", "23:00", "--weekdays", "thu-sat"),
    *("--brighter", "3", "--least-elongation", "20", "--within", "5"),
)
TOLD = re.compile(r"(\d+) (fainter|within|not to be seen|not on|not after|farther)")


def csv(run: Program, *arguments: str) -> tuple[pl.DataFrame, str]:
    outcome = run(*arguments, "--format", "csv")
    assert outcome.status == 0, outcome.err
    return pl.read_csv(io.StringIO(outcome.out), infer_schema_length=None), outcome.err


def told(text: str) -> list[int]:
    return [int(count) for count, _ in TOLD.findall(" ".join(text.split()))]


def refused(outcome: Outcome, *words: str) -> None:
    assert outcome.status == 2, outcome.err
    assert outcome.out == ""
    (line,) = outcome.err.splitlines()
    assert line.startswith("wanderers: ") and "Traceback" not in line
    assert all(word in line for word in words), line


# ---- events from a site


def test_a_site_adds_the_promised_columns_and_takes_nothing_away(run: Program) -> None:
    bare, _ = csv(run, *PAIRS)
    seen, err = csv(run, *PAIRS, *HILL)
    assert err == ""
    assert seen.columns[: len(schema.EVENT_COLUMNS)] == list(schema.EVENT_COLUMNS)
    promised = (
        "site zone local_date local_time evening_date window_start_utc best_utc window_end_utc "
        "window_start_local best_local window_end_local altitude_deg airless_altitude_deg azimuth_deg "
        "compass airmass sun_altitude_deg dimmed_magnitude moon_illuminated moon_separation_deg "
        "moon_altitude_deg verdict verdict_reason"
    )
    assert set(promised.split()) <= set(seen.columns)
    assert set(columns.EVENT_VIEW_COLUMNS) <= set(seen.columns)
    assert_frame_equal(seen.select(bare.columns), bare)


def test_all_limits_hold_in_what_is_left(run: Program) -> None:
    table, err = csv(run, *PAIRS, *HILL, *ALL_LIMITS)
    assert table.height > 0
    for row in table.iter_rows(named=True):
        assert row["verdict"] != "not_visible"
        assert dt.date.fromisoformat(row["evening_date"]).weekday() in (3, 4, 5)
        for name in ("window_start_local", "best_local", "window_end_local"):
            assert "18:29:59" <= row[name][11:19] <= "23:00:01"
        assert row["seen_separation_deg"] <= 5.0
    assert len(told(err)) == 6
    assert err.startswith("wanderers: left out: ") and err.count("\n") == 1


def test_what_was_left_out_and_what_is_left_add_up(run: Program) -> None:
    whole, _ = csv(run, *PAIRS)
    for limits in (
        ("--visible",),
        ("--weekdays", "fri,sat"),
        ("--after", "18:30", "--by", "21:00"),
        ("--brighter", "2", "--least-elongation", "25", "--visible"),
    ):
        table, err = csv(run, *PAIRS, *HILL, *limits)
        assert 0 < table.height < whole.height
        assert table.height + sum(told(err)) == whole.height, limits


def test_brightness_and_elongation_need_no_site(run: Program) -> None:
    whole, _ = csv(run, *PAIRS)
    table, err = csv(run, *PAIRS, "--brighter", "1.5", "--least-elongation", "30")
    fainter, nearer = told(err)
    assert table.height == whole.height - fainter - nearer
    assert fainter > 0 and nearer > 0
    assert table["elongation_deg"].min() >= 30.0  # type: ignore[operator]
    assert not table["body"].is_in(["uranus", "neptune", "pluto"]).any()
    assert not table["other"].is_in(["uranus", "neptune", "pluto"]).any()


def test_the_order_of_options_changes_nothing(run: Program) -> None:
    one, _ = csv(run, *PAIRS, *HILL, "--brighter", "2", "--weekdays", "fri,sat", "--after", "19:00")
    two, _ = csv(run, *PAIRS, "--after", "19:00", *HILL, "--weekdays", "sat,fri", "--brighter", "2")
    assert_frame_equal(one, two)


@pytest.mark.parametrize(
    ("text", "days"),
    [("fri", {4}), ("Friday,SAT", {4, 5}), ("fri-mon", {4, 5, 6, 0}), ("mon-sun", set(range(7)))],
)
def test_weekdays_may_be_lists_and_stretches(run: Program, text: str, days: set[int]) -> None:
    table, _ = csv(run, *PAIRS, *HILL, "--weekdays", text)
    found = {dt.date.fromisoformat(date).weekday() for date in table["evening_date"]}
    assert found and found <= days


def test_hours_past_midnight_are_of_the_same_night(run: Program) -> None:
    table, _ = csv(run, *PAIRS, *HILL, "--after", "22:00", "--by", "02:00")
    clocks = table["best_local"].str.slice(11, 5)
    assert table.height > 3
    assert ((clocks >= "22:00") | (clocks <= "02:00")).all()
    late = table.filter(clocks <= "02:00")
    next_day = late["best_local"].str.slice(0, 10).str.to_date() - late["evening_date"].str.to_date()
    assert late.height > 0 and (next_day.dt.total_days() == 1).all()


# ---- formats


def test_every_format_holds_the_same_rows(run: Program, tmp_path: Path) -> None:
    line = (*PAIRS, *HILL, *ALL_LIMITS)
    table, said = csv(run, *line)
    packed = run(*line, "--out", "pairs.parquet")
    assert (packed.status, packed.out, packed.err) == (0, "", said)
    parquet = pl.read_parquet(tmp_path / "pairs.parquet")
    written = run(*line, "--format", "json")
    assert written.err == said
    rows = json.loads(written.out)
    ids = table["event_id"].to_list()
    assert parquet["event_id"].to_list() == [row["event_id"] for row in rows] == ids
    for name in ("verdict_reason", "window_start_local", "seen_separation_deg"):
        assert parquet[name].to_list() == [row[name] for row in rows] == table[name].to_list()


def test_the_heading_of_the_printed_table_tells_what_was_left_out(run: Program) -> None:
    table, said = csv(run, *PAIRS, *HILL, *ALL_LIMITS)
    outcome = run(*PAIRS, *HILL, *ALL_LIMITS)
    assert (outcome.status, outcome.err) == (0, "")
    heading = " ".join(outcome.out.partition("Local  ")[0].split())
    assert heading.startswith(f"{table.height} event")
    assert f"{table.height} to be seen from 52.13,11.62,120 (52.13 N, 11.62 E, 120 m)" in heading
    assert "local times Europe/Berlin" in heading
    assert "above 10 degrees with the Sun 6 degrees or more below the horizon" in heading
    left_out = heading.partition("Left out: ")[2]
    assert left_out == said.strip().removeprefix("wanderers: left out: ")
    for words in ("fainter than magnitude 3", "within 20 degrees of the Sun", "not on Thu, Fri, Sat"):
        assert words in left_out
    assert "not after 18:30 and by 23:00" in left_out
    assert "farther apart than 5 degrees when best seen" in left_out


def test_the_heading_without_a_site_tells_it_too(run: Program) -> None:
    outcome = run(*PAIRS, "--brighter", "1.5")
    assert outcome.err == ""
    assert re.search(r"\. Left out: \d+ fainter than magnitude 1\.5 ", " ".join(outcome.out.split()))


def test_a_quiet_run_says_nothing_beside_its_data(run: Program) -> None:
    outcome = run(*PAIRS, *HILL, "--visible", "--format", "csv", "--quiet")
    assert (outcome.status, outcome.err) == (0, "")
    assert outcome.out.startswith("event_id,")


def test_nothing_left_is_a_header_and_no_error(run: Program) -> None:
    table, err = csv(run, *PAIRS, *HILL, "--brighter", "-9")
    assert table.is_empty() and "verdict" in table.columns
    assert sum(told(err)) > 20


@pytest.mark.skipif(not INSTALLED.exists(), reason="the program is not installed beside its Python")
def test_the_installed_program_keeps_data_and_remarks_apart(cache_folder: Path, tmp_path: Path) -> None:
    line = [str(INSTALLED), *PAIRS, *HILL, "--visible", "--format", "csv", "--cache", str(cache_folder)]
    done = subprocess.run(line, capture_output=True, check=False, text=True, cwd=tmp_path)
    assert done.returncode == 0
    assert done.stdout.startswith("event_id,") and "left out" not in done.stdout
    assert re.fullmatch(r"wanderers: left out: \d+ not to be seen from here\n", done.stderr)


# ---- what is refused


@pytest.mark.parametrize(
    "limit", [("--visible",), ("--after", "18:30"), ("--by", "21:00"), ("--weekdays", "fri")]
)
def test_what_must_be_seen_needs_a_site(run: Program, limit: tuple[str, ...]) -> None:
    refused(run(*PAIRS, *limit), limit[0], "--site")


@pytest.mark.parametrize("time", ["25:00", "18.30", "half past six", "18:60", ""])
def test_a_time_that_is_none_is_refused_with_the_form(run: Program, time: str) -> None:
    refused(run(*PAIRS, *HILL, "--after", time), f"'{time}'", "18:30")


@pytest.mark.parametrize("days", ["fri,foo", "someday", "fri-", "-fri", ","])
def test_a_day_that_is_none_is_refused_with_the_names(run: Program, days: str) -> None:
    refused(run(*PAIRS, *HILL, f"--weekdays={days}"), "is no weekday", "mon, tue, wed, thu, fri, sat, sun")


@pytest.mark.parametrize(
    ("site", "words"),
    [
        ("nowhereatall", ("nowhereatall", "LATITUDE,LONGITUDE")),
        ("springfield", ("ambiguous", "Springfield, MO, US", "Springfield, IL, US")),
        ("91,0", ("91", "beyond 90")),
        ("-90.01,0", ("90.01", "beyond 90")),
        ("10,400", ("400", "-180 to 360")),
    ],
)
@pytest.mark.parametrize(
    "command", [PAIRS, ("seasons", "--from", "2027", "--to", "2028")], ids=["almanac", "seasons"]
)
def test_a_site_that_is_none_is_refused(
    run: Program, command: tuple[str, ...], site: str, words: tuple[str, ...]
) -> None:
    refused(run(*command, "--site", site), *words)


def test_a_zone_that_is_none_is_refused_with_the_nearest(run: Program) -> None:
    refused(run(*PAIRS, "--site", "52.13,11.62", "--zone", "Europe/Berlim"), "Berlim", "Europe/Berlin")


@pytest.mark.parametrize("limits", [("--brighter", "2"), (*HILL, "--visible")])
def test_definitions_side_by_side_know_no_audience(run: Program, limits: tuple[str, ...]) -> None:
    refused(run("almanac", *SPRING, "--side-by-side", *limits), "--side-by-side", "--site")


# ---- seasons


def test_seasons_from_a_site_say_how_the_middle_is_seen(run: Program) -> None:
    line = ("seasons", "--from", "2027", "--to", "2029", "--body", "mars", "--body", "jupiter")
    bare, _ = csv(run, *line)
    seen, err = csv(run, *line, *HILL)
    assert err == ""
    assert_frame_equal(seen.select(bare.columns), bare)
    assert {"evening_date", "best_local", "altitude_deg", "compass", "verdict", "verdict_reason"} <= set(
        seen.columns
    )
    for row in seen.iter_rows(named=True):
        # At opposition a planet is up all night: common knowledge, best seen about midnight, in the south.
        middle = dt.datetime.fromisoformat(row["middle_utc"]).date()
        assert abs((dt.date.fromisoformat(row["evening_date"]) - middle).days) <= 1
        assert row["compass"].startswith("south") and row["verdict"] == "naked_eye"
        assert int(row["best_local"][11:13]) in (22, 23, 0, 1, 2)
    heading = " ".join(run(*line, *HILL).out.partition("Planet ")[0].split())
    assert "as seen from 52.13,11.62,120" in heading and "local times Europe/Berlin" in heading


OUTLOOK = ("seasons", "--from", "2027", "--to", "2028", "--body", "mars", "--outlook", "5")


def test_an_outlook_sets_the_season_beside_those_around_it(run: Program) -> None:
    table, err = csv(run, *OUTLOOK, *HILL)
    assert err == ""
    assert table.columns == list(OUTLOOK_COLUMNS)
    assert table["middle_utc"].str.slice(0, 4).to_list() == [
        "2022",
        "2025",
        "2027",
        "2029",
        "2031",
    ]  # any handbook
    assert table.filter("asked_for")["middle_utc"].str.slice(0, 4).to_list() == ["2027"]
    outcome = run(*OUTLOOK, *HILL)
    lines = outcome.out.splitlines()
    (asked,) = [line for line in lines if line.startswith("*")]
    assert "2027-02-19" in asked and "of 5" in asked
    heading = " ".join(outcome.out.partition("   Planet")[0].split())
    assert "Retrograde seasons of 2022 to 2031 from 52.13,11.62,120" in heading and "* asked for" in heading


def test_an_outlook_is_the_same_in_every_format(run: Program, tmp_path: Path) -> None:
    table, _ = csv(run, *OUTLOOK, *HILL)
    assert run(*OUTLOOK, *HILL, "--out", "outlook.parquet").status == 0
    parquet = pl.read_parquet(tmp_path / "outlook.parquet")
    rows: list[dict[str, Any]] = json.loads(run(*OUTLOOK, *HILL, "--format", "json").out)
    for name in ("season_id", "dark_hours", "dark_hours_rank", "culmination_altitude_deg"):
        assert parquet[name].to_list() == [row[name] for row in rows] == table[name].to_list()


def test_an_outlook_needs_a_site_and_a_span(run: Program) -> None:
    refused(run(*OUTLOOK), "--outlook", "--site")
    refused(run(*OUTLOOK[:-1], "0", *HILL), "--outlook", "0")
    refused(run(*OUTLOOK, *HILL, "--format", "markdown"), "--outlook")


@pytest.mark.parametrize(
    "option",
    [
        ("--min-altitude", "5"),
        ("--sun-below", "-18"),
        ("--extinction", "0.3"),
        ("--dark-sky", "19.5"),
        ("--frame", "j2000"),
    ],
    ids=lambda option: option[0],
)
def test_an_outlook_refuses_what_it_would_not_heed(run: Program, option: tuple[str, str]) -> None:
    refused(run(*OUTLOOK, *HILL, *option), "--outlook", option[0])
