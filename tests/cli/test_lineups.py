"""``wanderers lineups``: what is printed and written, and what is refused."""

from __future__ import annotations

import json
from pathlib import Path

import polars as pl
import pytest

from tests.cli.site_program import HILL, RIDGE, Program, rows_of
from wanderers.cli import main
from wanderers.site import columns

AUTUMN = ("--from", "2028-10-01", "--to", "2028-11-15")


def test_csv_has_the_columns_documented(run: Program) -> None:
    outcome = run("lineups", *HILL, *AUTUMN, "--at-least", "4", "--format", "csv")
    assert outcome.status == 0 and outcome.err == ""
    rows = rows_of(outcome.out)
    assert list(rows[0]) == list(columns.LINEUP_COLUMNS)
    assert rows and all(row["bodies"].count("+") >= 3 for row in rows)
    assert rows[0]["best_utc"].endswith("Z") and rows[0]["best_local"].endswith("+02:00")


def test_all_formats_hold_the_same(run: Program, tmp_path: Path) -> None:
    line = ("lineups", *RIDGE, *AUTUMN)
    assert run(*line, "--out", "lineups.parquet").status == 0
    table = pl.read_parquet(tmp_path / "lineups.parquet")
    assert dict(table.schema) == columns.LINEUP_COLUMNS and table.height > 0
    assert [row["places"] for row in json.loads(run(*line, "--format", "json").out)] == table[
        "places"
    ].to_list()
    written = rows_of(run(*line, "--format", "csv").out)
    assert [row["best_utc"] for row in written] == table["best_utc"].to_list()


def test_the_printed_table_fits_and_says_what_was_asked(run: Program) -> None:
    out = run("lineups", *HILL, "--from", "2027", "--to", "2029", "--at-least", "3").out
    assert max(map(len, out.splitlines())) <= 100
    words = " ".join(out.split())
    assert "at least 3 of Mercury, Venus, Mars, Jupiter, Saturn at one moment above 10 degrees" in words
    assert "each for the bare eye, the Sun 6 degrees or more below the horizon" in words
    assert "may begin earlier" in words


def test_nothing_found_is_no_failure_and_has_a_reason(run: Program) -> None:
    outcome = run("lineups", *HILL, *AUTUMN, "--at-least", "5", "--format", "csv")
    assert outcome.status == 0 and rows_of(outcome.out) == []
    assert outcome.out.startswith("first_evening,last_evening,evenings,bodies")
    assert "no evening of 45 has 5 of these bodies up at one moment; with 4: " in outcome.err
    assert outcome.err.count("\n") == 1
    printed = run("lineups", *HILL, *AUTUMN, "--at-least", "5")
    assert printed.status == 0 and "Nothing found." in printed.out


def test_limits_bodies_and_parts_are_obeyed(run: Program) -> None:
    line = ("lineups", *HILL, "--from", "2027", "--to", "2029", "--format", "csv")
    rows = rows_of(
        run(*line, "--bodies", "moon,jupiter,saturn", "--at-least", "2", "--min-altitude", "25").out
    )
    assert rows and all(set(row["bodies"].split("+")) <= {"moon", "jupiter", "saturn"} for row in rows)
    assert all(float(row["lowest_altitude_deg"]) >= 25.0 - 1e-6 for row in rows)
    one_by_one = ("--body", "moon", "--body", "saturn", "--body", "jupiter", "--at-least", "2")
    assert rows_of(run(*line, *one_by_one, "--min-altitude", "25").out) == rows
    evening = rows_of(run(*line, "--part", "evening").out)
    assert evening and {row["morning_or_evening"] for row in evening} == {"evening"}
    deep = rows_of(run(*line, "--sun-below", "-18").out)
    assert deep and all(float(row["sun_altitude_deg"]) < -18.0 + 1e-6 for row in deep)
    eye, any_aid = (
        sum(int(row["evenings"]) for row in rows_of(run(*line, "--aid", aid).out))
        for aid in ("naked_eye", "any")
    )
    assert eye < any_aid


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ((), "give --site"),
        ((*HILL, "--at-least", "6"), "more than the 5 bodies"),
        ((*HILL, "--at-least", "1"), "--at-least"),
        ((*HILL, "--bodies", "sun,moon"), "at least two different bodies"),
        ((*HILL, "--bodies", "venus"), "at least two different bodies"),
        ((*HILL, "--bodies", "venus,marss"), "mars"),
        ((*HILL, "--aid", "spectacles"), "--aid"),
        ((*HILL, "--from", "2027-02-30"), "does not exist"),
        ((*HILL, "--from", "2028", "--to", "2027"), "is not after"),
    ],
)
def test_wrong_requests_leave_with_two_and_one_line(
    run: Program, arguments: tuple[str, ...], words: str
) -> None:
    outcome = run("lineups", *arguments)
    assert (outcome.status, outcome.out) == (2, "")
    assert words in outcome.err and outcome.err.count("\n") == 1


def test_outside_the_kernel_leaves_with_one_and_writes_nothing(run: Program, tmp_path: Path) -> None:
    outcome = run("lineups", *HILL, "--from", "2700", "--to", "2701", "--out", "lineups.csv")
    assert outcome.status == 1 and "DE440" in outcome.err and outcome.err.count("\n") == 1
    assert not (tmp_path / "lineups.csv").exists()


def test_help_has_a_worked_example_and_the_program_lists_the_command(run: Program) -> None:
    outcome = run("lineups", "--help")
    assert outcome.status == 0 and "Example" in outcome.out and "wanderers lineups --site" in outcome.out
    assert "lineups" in main.COMMANDS
