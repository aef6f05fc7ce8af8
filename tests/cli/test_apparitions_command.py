"""``wanderers apparitions``: what is printed and written, and what is refused."""

from __future__ import annotations

import json
from pathlib import Path

import polars as pl
import pytest

from tests.cli.site_program import HILL, RIDGE, Program, rows_of
from wanderers.cli import main
from wanderers.site import columns

YEAR = ("--from", "2027", "--to", "2028")


def test_csv_has_the_columns_documented(run: Program) -> None:
    outcome = run("apparitions", *HILL, *YEAR, "--format", "csv")
    assert outcome.status == 0 and outcome.err == ""
    rows = rows_of(outcome.out)
    assert list(rows[0]) == list(columns.APPARITION_COLUMNS)
    assert {row["body"] for row in rows} == {"mercury", "venus", "mars", "jupiter", "saturn"}


def test_all_formats_hold_the_same(run: Program, tmp_path: Path) -> None:
    line = ("apparitions", *RIDGE, *YEAR, "--body", "venus", "--body", "mercury")
    assert run(*line, "--out", "sights.parquet").status == 0
    table = pl.read_parquet(tmp_path / "sights.parquet")
    assert dict(table.schema) == columns.APPARITION_COLUMNS
    dates = table["first_sight_likely"].to_list()
    assert [row["first_sight_likely"] for row in json.loads(run(*line, "--format", "json").out)] == dates
    written = rows_of(run(*line, "--format", "csv").out)
    assert [row["first_sight_likely"] or None for row in written] == dates


@pytest.mark.parametrize("site", [HILL, RIDGE])
def test_when_mercury_is_easiest_and_what_haze_costs_is_answered(run: Program, site: tuple[str, ...]) -> None:
    out = run("apparitions", *site, *YEAR, "--body", "mercury").out
    assert max(map(len, out.splitlines())) <= 100
    words = " ".join(out.split())
    assert "Mercury is easiest in the " in words and "in haze " in words and " sooner" in words
    assert "above 10 degrees if it can" in words and "best until 22:00, in the morning from 05:00" in words


def test_hours_and_air_are_obeyed(run: Program) -> None:
    line = ("apparitions", *RIDGE, *YEAR, "--body", "venus", "--format", "csv")
    rows = rows_of(run(*line, "--until", "19:30", "--morning-from", "6").out)
    for row in rows:
        if row["best_at_civil_hour"] == "true":
            clock = row["best_local"][11:16]
            assert clock <= "19:30" if row["kind"] == "evening" else clock >= "06:00"
    hazy = rows_of(run(*line, "--extinction", "0.5").out)
    usual = rows_of(run(*line).out)
    assert {row["extinction_hazy_mag"] for row in hazy} == {"0.6"}
    assert hazy[-1]["first_sight_likely"] > usual[-1]["first_sight_likely"]


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ((), "give --site"),
        ((*HILL, "--body", "moon"), "Moon has no apparitions"),
        ((*HILL, "--body", "marss"), "mars"),
        ((*HILL, "--until", "25:00"), "no time of day"),
        ((*HILL, "--morning-from", "dawn"), "no time of day"),
        ((*HILL, "--from", "2027-02-30"), "does not exist"),
    ],
)
def test_wrong_requests_leave_with_two_and_one_line(
    run: Program, arguments: tuple[str, ...], words: str
) -> None:
    outcome = run("apparitions", *arguments)
    assert (outcome.status, outcome.out) == (2, "")
    assert words in outcome.err and outcome.err.count("\n") == 1


def test_outside_the_kernel_leaves_with_one_and_writes_nothing(run: Program, tmp_path: Path) -> None:
    outcome = run("apparitions", *HILL, "--from", "2700", "--to", "2701", "--out", "sights.csv")
    assert outcome.status == 1 and "DE440" in outcome.err and outcome.err.count("\n") == 1
    assert not (tmp_path / "sights.csv").exists()


def test_help_has_a_worked_example_and_the_program_lists_the_command(run: Program) -> None:
    outcome = run("apparitions", "--help")
    assert outcome.status == 0 and "Example" in outcome.out and "wanderers apparitions --site" in outcome.out
    assert "apparitions" in main.COMMANDS
