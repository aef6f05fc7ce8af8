"""``wanderers campaign``: the folder written, what is told, what is refused."""

from __future__ import annotations

from pathlib import Path

import polars as pl
import pytest

from tests.cli.site_program import HILL, Program

EQUATOR = ("--site", "0.1,37.2,1100", "--zone", "Africa/Nairobi")
LOOP = ("campaign", "jupiter", *EQUATOR, "--season", "2027", "--nights", "8")


def test_a_plan_is_a_folder_and_is_mended_where_it_tore(run: Program, tmp_path: Path) -> None:
    first = run(*LOOP, "--lens", "100", "--out", "plan")
    assert (first.status, first.out) == (0, "plan/index.html\n")
    assert "8 nights from 20" in first.err
    for name in ("index.html", "plan.csv", "plan.parquet", "plan.ics", "stars.csv", "field_sheet_a4.pdf"):
        assert (tmp_path / "plan" / name).stat().st_size > 0, name
    before = pl.read_csv(tmp_path / "plan" / "plan.csv")
    lost = before["evening_date"][3]
    second = run(*LOOP, "--lens", "100", "--skip", lost, "--out", "mended")
    assert second.status == 0
    assert f"dropped: {lost}" in second.err
    after = pl.read_csv(tmp_path / "mended" / "plan.csv")
    assert lost not in after["evening_date"].to_list()
    kept = set(before["evening_date"]) - {lost}
    assert kept <= set(after["evening_date"])


def test_a_plan_that_no_night_can_serve_says_why_and_what_would_help(run: Program) -> None:
    outcome = run("campaign", "mars", *HILL, "--season", "2033", "--out", "none")
    assert outcome.status == 0
    assert "no night can serve this plan" in outcome.err
    assert "no higher than 10 degrees" in outcome.err
    assert "A least altitude of" in outcome.err


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("campaign", "sun", *HILL), "never turns back"),
        (("campaign", "mras", *HILL), "mars"),
        (("campaign", "mars"), "--site"),
        (("campaign", "mars", *HILL, "--season", "someday"), "names no season"),
        (("campaign", "mars", *HILL, "--sensor", "huge"), "full frame"),
        (("campaign", "mars", *HILL, "--nights", "3", "--every", "1"), "not both"),
        (("campaign", "mars", *HILL, "--skip", "2027-02-30"), "2027-02-30"),
        (("campaign", "mars", *HILL, "--cloudy", "1"), "--cloudy"),
    ],
)
def test_what_cannot_be_planned_gets_one_line(
    run: Program, tmp_path: Path, arguments: tuple[str, ...], words: str
) -> None:
    outcome = run(*arguments)
    assert outcome.status == 2
    assert words in outcome.err and outcome.err.count("\n") == 1
    assert not (tmp_path / "reports").exists()


def test_a_log_that_cannot_be_read_changes_nothing(run: Program, tmp_path: Path) -> None:
    log = tmp_path / "nights.csv"
    log.write_text("evening_date\n2027-13-01\n", encoding="utf-8")
    outcome = run("campaign", "mars", *HILL, "--season", "2027", "--done", "nights.csv")
    assert outcome.status == 2
    assert "nights.csv, line 2" in outcome.err
    missing = run("campaign", "mars", *HILL, "--done", "no_such.csv")
    assert missing.status == 1 and missing.err.count("\n") == 1
