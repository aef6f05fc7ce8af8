"""``wanderers nights``: what is printed and written, and what is refused."""

from __future__ import annotations

import json
from pathlib import Path

import polars as pl
import pytest

from tests.cli.site_program import HILL, RIDGE, Program, rows_of
from wanderers.site import columns

WEEK = ("--from", "2027-03-01", "--to", "2027-03-08")


def test_csv_has_the_columns_promised(run: Program) -> None:
    outcome = run("nights", *HILL, *WEEK, "--format", "csv")
    assert outcome.status == 0 and outcome.err == ""
    rows = rows_of(outcome.out)
    assert list(rows[0]) == list(columns.NIGHT_COLUMNS)
    promised = (
        "site zone local_date local_time evening_date window_start_utc best_utc window_end_utc "
        "window_start_local best_local window_end_local altitude_deg airless_altitude_deg azimuth_deg "
        "compass airmass sun_altitude_deg dimmed_magnitude moon_illuminated moon_separation_deg "
        "moon_altitude_deg verdict verdict_reason sunset_utc civil_dusk_utc nautical_dusk_utc "
        "astronomical_dusk_utc astronomical_dawn_utc nautical_dawn_utc civil_dawn_utc sunrise_utc "
        "rise_utc culmination_utc set_utc"
    )
    assert set(promised.split()) <= set(rows[0])
    assert len(rows) == 7 * 8
    jupiter = rows[4]
    assert (jupiter["body"], jupiter["evening_date"], jupiter["site"]) == (
        "jupiter",
        "2027-03-01",
        "52.13,11.62,120",
    )
    assert jupiter["best_utc"].endswith("Z") and jupiter["best_local"].endswith("+01:00")


def test_all_formats_hold_the_same(run: Program, tmp_path: Path) -> None:
    line = ("nights", *RIDGE, *WEEK, "--body", "venus", "--body", "mars")
    assert run(*line, "--out", "nights.parquet").status == 0
    table = pl.read_parquet(tmp_path / "nights.parquet")
    assert table["body"].to_list() == ["venus", "mars"] * 7
    for index, row in enumerate(json.loads(run(*line, "--format", "json").out)):
        assert row["verdict_reason"] == table["verdict_reason"][index]
    assert run(*line, "--out", "nights.csv").status == 0
    written = rows_of((tmp_path / "nights.csv").read_text(encoding="utf-8"))
    assert [row["set_utc"] for row in written] == table["set_utc"].to_list()


def test_the_printed_table_opens_with_place_clock_and_limits(run: Program) -> None:
    out = run("nights", *HILL, *WEEK).out
    assert out.startswith(
        "7 evenings at 52.13,11.62,120 (52.13 N, 11.62 E, 120 m); local times Europe/Berlin"
    )
    assert "above 10 degrees with the Sun 6 degrees or more below the horizon" in " ".join(out.split())
    assert "Sun sets" in out and "Jupiter" in out and "easy to see" in out
    assert max(map(len, out.splitlines())) <= 100


def test_limits_are_obeyed(run: Program) -> None:
    line = ("nights", *HILL, *WEEK, "--body", "jupiter", "--format", "csv")
    rows = rows_of(run(*line, "--min-altitude", "40", "--sun-below", "-18").out)
    for row in rows:
        assert float(row["altitude_deg"]) > 40.0 and float(row["sun_altitude_deg"]) < -18.0
    dull = rows_of(run(*line, "--extinction", "1.5").out)
    assert all(
        float(a["dimmed_magnitude"]) > float(b["dimmed_magnitude"]) for a, b in zip(dull, rows, strict=True)
    )


def test_the_telephone_is_answered(run: Program) -> None:
    outcome = run("nights", *HILL, "--at", "2027-03-05T20:00")
    assert outcome.status == 0
    assert "2027-03-05 20:00 (UTC+01:00)" in " ".join(outcome.out.split())
    for word in ("Jupiter", "Mars", "Sirius", "near:"):
        assert word in outcome.out
    rows = rows_of(run("nights", *HILL, "--at", "2027-03-05T20:00", "--format", "csv").out)
    assert list(rows[0]) == list(columns.MOMENT_COLUMNS)
    assert {row["utc"] for row in rows} == {"2027-03-05T19:00:00.000Z"}
    assert "Mars 7.0 degrees" in rows[0]["neighbours"]


@pytest.mark.parametrize("time", ["2027-03-05T20:00+01:00", "2027-03-05T19:00Z", "2027-03-05 14:00-0500"])
def test_a_time_may_carry_its_own_offset(run: Program, time: str) -> None:
    rows = rows_of(run("nights", *HILL, "--at", time, "--format", "csv").out)
    assert {row["local"] for row in rows} == {"2027-03-05T20:00:00.000+01:00"}


def test_an_hour_that_the_clock_skips_or_repeats_is_said(run: Program) -> None:
    skipped = run("nights", *HILL, "--at", "2027-03-28T02:30")
    assert skipped.status == 2 and "put forward" in skipped.err and skipped.err.count("\n") == 1
    twice = run("nights", *HILL, "--at", "2027-10-31T02:30", "--format", "csv")
    assert twice.status == 0 and "comes twice" in twice.err
    assert {row["local"] for row in rows_of(twice.out)} == {"2027-10-31T02:30:00.000+02:00"}


def test_a_time_of_day_alone_is_todays(run: Program) -> None:
    rows = rows_of(run("nights", *HILL, "--at", "21:00", "--format", "csv").out)
    assert rows and all(row["local"][11:19] == "21:00:00" for row in rows)


def test_dates_are_local_evenings_and_the_end_is_not_included(run: Program) -> None:
    line = ("nights", *RIDGE, "--body", "venus", "--format", "csv")
    days = [row["evening_date"] for row in rows_of(run(*line, "--from", "2027-03", "--to", "2027-04").out)]
    assert (days[0], days[-1], len(days)) == ("2027-03-01", "2027-03-31", 31)
    assert len(rows_of(run(*line, "--from", "2027-03-01").out)) == 7
    assert len(rows_of(run(*line).out)) == 7  # from today


def test_the_only_site_of_the_user_needs_no_name(run: Program, tmp_path: Path) -> None:
    text = "[terrace]\nlatitude_deg = -35.3\nlongitude_deg = 149.1\nzone = 'Australia/Sydney'\n"
    (tmp_path / "sites.toml").write_text(text, encoding="utf-8")
    rows = rows_of(run("nights", *WEEK, "--body", "mars", "--format", "csv").out)
    assert {row["site"] for row in rows} == {"terrace"}
    (tmp_path / "sites.toml").write_text(text + text.replace("terrace", "attic"), encoding="utf-8")
    assert run("nights", *WEEK).status == 2


def test_a_city_is_found_and_what_is_assumed_goes_to_standard_error(run: Program) -> None:
    outcome = run("nights", "--site", "Hamburg", *WEEK, "--body", "mars", "--format", "csv")
    assert outcome.status == 0 and "sea level assumed" in outcome.err
    assert {row["zone"] for row in rows_of(outcome.out)} == {"Europe/Berlin"}


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("--site", "Springfield"), "inhabitants"),
        (("--site", "Hamburgg"), "did you mean Hamburg"),
        (("--site", "91,0", "--zone", "UTC"), "beyond 90 degrees"),
        (("--site", "52,11", "--zone", "Europe/Nowhere"), "unknown zone 'Europe/Nowhere'"),
        ((), "give --site"),
        ((*HILL, "--body", "marss"), "mars"),
        ((*HILL, "--from", "2027-02-30"), "does not exist"),
        ((*HILL, "--from", "2027-03-08", "--to", "2027-03-08"), "is not after"),
        ((*HILL, "--at", "2027-03-05T20:00", "--from", "2027-03-01"), "leave out --from"),
        ((*HILL, "--at", "yesterday"), "is not a date"),
        ((*HILL, "--at", "25:00"), "no time of day '25:00'"),
        ((*HILL, "--min-altitude", "95"), "min-altitude"),
        ((*HILL, "--sun-below", "-100"), "sun-below"),
    ],
)
def test_wrong_requests_leave_with_two_and_one_line(
    run: Program, arguments: tuple[str, ...], words: str
) -> None:
    outcome = run("nights", *arguments)
    assert (outcome.status, outcome.out) == (2, "")
    assert words in outcome.err and outcome.err.count("\n") == 1


def test_outside_the_kernel_leaves_with_one_and_writes_nothing(run: Program, tmp_path: Path) -> None:
    outcome = run("nights", *HILL, "--from", "2700-01-01", "--out", "nights.csv")
    assert outcome.status == 1 and "DE440" in outcome.err and outcome.err.count("\n") == 1
    assert not (tmp_path / "nights.csv").exists()


def test_help_has_a_worked_example(run: Program) -> None:
    outcome = run("nights", "--help")
    assert outcome.status == 0 and "Example" in outcome.out and "wanderers nights --site" in outcome.out
