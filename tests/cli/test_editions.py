"""``wanderers calendar --editions``: several places, clocks and languages, the same ids."""

from __future__ import annotations

from pathlib import Path

import icalendar
import polars as pl
import pytest

from tests.cli.site_program import Program

EDITIONS = """
[north]
site = "52.13,11.62,120"
zone = "Europe/Berlin"
language = "de"

[south]
site = "-35.3,149.1,780"
zone = "Australia/Sydney"

[harbour]
zone = "Asia/Tokyo"
"""
SPAN = ("calendar", "--from", "2027-01", "--to", "2027-03", "--stars", "none", "--kind", "appulse")


@pytest.fixture
def run(run: Program, tmp_path: Path) -> Program:
    (tmp_path / "editions.toml").write_text(EDITIONS, encoding="utf-8")
    return run


def entries(path: Path) -> dict[str, icalendar.Event]:
    calendar = icalendar.Calendar.from_ical(path.read_bytes())
    return {str(event["UID"]): event for event in calendar.walk("VEVENT")}


def test_one_run_writes_every_edition_under_the_same_ids(run: Program, tmp_path: Path) -> None:
    outcome = run(*SPAN, "--editions", "editions.toml", "--out", "sold")
    assert (outcome.status, outcome.out) == (0, "sold\n")
    written = {name: entries(tmp_path / "sold" / f"{name}.ics") for name in ("north", "south", "harbour")}
    assert set(written["north"]) == set(written["south"]) == set(written["harbour"])
    assert len(written["north"]) > 10
    titles = [{str(event["SUMMARY"]) for event in written[name].values()} for name in ("north", "south")]
    assert not titles[0] & titles[1]  # one is German
    assert any("Mond" in title for title in titles[0])
    places = {name: {str(event.get("LOCATION")) for event in written[name].values()} for name in written}
    assert places["north"] == {"52.13,11.62,120"} and places["harbour"] == {"None"}


def test_dates_are_those_of_each_edition(run: Program, tmp_path: Path) -> None:
    run(*SPAN, "--editions", "editions.toml", "--out", "sold")
    tables = {name: pl.read_csv(tmp_path / "sold" / f"{name}.csv") for name in ("north", "south", "harbour")}
    assert tables["harbour"]["zone"].unique().to_list() == ["Asia/Tokyo"]
    joined = tables["north"].join(tables["harbour"], on="event_id", suffix="_harbour")
    # Tokyo's clock is 8 hours ahead of Berlin's in winter: a third of the events fall on the next date.
    later = (joined["local_date"] != joined["local_date_harbour"]).mean()
    assert later is not None and 0.1 < later < 0.6
    assert (tmp_path / "sold" / "north.md").read_text(encoding="utf-8").startswith("# ")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "holds no edition"),
        ("[a]\nsite = 'nowhere at all'\n", "nowhere at all"),
        ("[a]\nzone = 'Mars/Tharsis'\n", "Mars/Tharsis"),
        ("[a]\nzone = 'UTC'\nlanguage = 'xx'\n", "xx"),
    ],
)
def test_editions_that_name_nothing_get_one_line(run: Program, tmp_path: Path, text: str, words: str) -> None:
    (tmp_path / "editions.toml").write_text(text, encoding="utf-8")
    outcome = run(*SPAN, "--editions", "editions.toml")
    assert outcome.status == 2
    assert words in outcome.err and outcome.err.count("\n") == 1
    assert not (tmp_path / "reports").exists()


def test_editions_stand_alone(run: Program) -> None:
    outcome = run(*SPAN, "--editions", "editions.toml", "--split", "year")
    assert outcome.status == 2 and "--editions stands alone" in outcome.err
