"""``wanderers sites``: list, add, check, find."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path

import pytest

from tests.cli.site_program import Program, at_home


@pytest.fixture
def run(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> Program:
    at_home(monkeypatch, tmp_path)
    return Program(monkeypatch, capsys)


ADD = ("sites", "add", "terrace", "-35.3,149.1,780", "--zone", "Australia/Sydney", "--horizon", "90:6,270:1")


def test_a_site_is_added_to_the_configuration_folder_and_listed(run: Program, tmp_path: Path) -> None:
    added = run(*ADD)
    assert (added.status, added.out) == (0, "")
    file = tmp_path / "config" / "wanderers" / "sites.toml"
    assert str(file) in added.err
    assert tomllib.loads(file.read_text(encoding="utf-8")) == {
        "terrace": {
            "latitude_deg": -35.3,
            "longitude_deg": 149.1,
            "elevation_m": 780.0,
            "zone": "Australia/Sydney",
            "horizon": [[90.0, 6.0], [270.0, 1.0]],
        }
    }
    for line in (("sites",), ("sites", "list")):
        listed = run(*line)
        assert listed.status == 0 and "terrace" in listed.out and "Australia/Sydney" in listed.out
    (row,) = json.loads(run("sites", "list", "--format", "json").out)
    assert (row["site"], row["latitude_deg"], row["horizon"], row["problem"]) == (
        "terrace",
        -35.3,
        "90:6,270:1",
        None,
    )


def test_the_working_folder_is_written_when_asked_for_and_from_then_on(run: Program, tmp_path: Path) -> None:
    assert run("sites", "add", "mill", "52,11", "--zone", "Europe/Berlin", "--here").status == 0
    assert run("sites", "add", "quay", "53.5,10", "--zone", "Europe/Berlin").status == 0
    assert list(tomllib.loads((tmp_path / "sites.toml").read_text(encoding="utf-8"))) == ["mill", "quay"]


def test_a_city_may_be_added_under_a_name(run: Program) -> None:
    assert run("sites", "add", "home", "Hamburg", "--elevation", "25").status == 0
    (row,) = json.loads(run("sites", "list", "--format", "json").out)
    assert (row["zone"], row["elevation_m"]) == ("Europe/Berlin", 25.0)
    assert row["latitude_deg"] == pytest.approx(53.55, abs=0.05)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("mill", "95,11", "--zone", "UTC"), "beyond 90 degrees"),
        (("mill", "52,11"), "give --zone"),
        (("mill", "52,11", "--zone", "Europe/Berlinn"), "Europe/Berlin"),
        (("mill", "52,11", "--zone", "UTC", "--horizon", "north:2"), "AZIMUTH:ALTITUDE"),
        (("mill", "Springfield"), "ambiguous"),
        (("52,11", "52,11", "--zone", "UTC"), "no name for a site"),
    ],
)
def test_what_cannot_be_added_is_said_in_one_line(
    run: Program, tmp_path: Path, arguments: tuple[str, ...], words: str
) -> None:
    outcome = run("sites", "add", *arguments)
    assert (outcome.status, outcome.out) == (2, "")
    assert words in outcome.err and outcome.err.count("\n") == 1
    assert not (tmp_path / "config").exists()


def test_a_name_is_given_once(run: Program) -> None:
    assert run(*ADD).status == 0
    again = run(*ADD)
    assert again.status == 2 and "already" in again.err


def test_checking_finds_what_is_wrong(run: Program, tmp_path: Path) -> None:
    assert run("sites", "check").status == 0
    run(*ADD)
    assert run("sites", "check", "TERRACE").status == 0
    (tmp_path / "sites.toml").write_text(
        "[mill]\nlatitude_deg = 99\nlongitude_deg = 1\nzone = 'UTC'\n", encoding="utf-8"
    )
    wrong = run("sites", "check")
    assert wrong.status == 1
    assert "1 wrong" in wrong.out and "mill" in wrong.err and "beyond 90 degrees" in wrong.err
    assert run("sites", "check", "terrace").status == 0
    unknown = run("sites", "check", "attic")
    assert unknown.status == 2 and "terrace" in unknown.err


def test_a_file_that_is_no_toml_fails_and_is_named(run: Program, tmp_path: Path) -> None:
    (tmp_path / "sites.toml").write_text("[mill\n", encoding="utf-8")
    outcome = run("sites")
    assert outcome.status == 1 and "no TOML file" in outcome.err and outcome.err.count("\n") == 1


def test_cities_are_found_by_the_beginning_of_their_name(run: Program) -> None:
    rows = json.loads(run("sites", "find", "Springfield,", "US", "--format", "json").out)
    assert len(rows) > 8 and {row["country"] for row in rows} == {"United States"}
    assert {"city", "population", "latitude_deg", "longitude_deg", "zone"} < set(rows[0])
    printed = run("sites", "find", "Springfield")
    assert printed.status == 0 and "GeoNames" in printed.out
    assert run("sites", "find", "Xqzzyw").status == 2


@pytest.mark.parametrize("line", [(), ("list",), ("add",), ("check",), ("find",)])
def test_help_has_a_worked_example(run: Program, line: tuple[str, ...]) -> None:
    outcome = run("sites", *line, "--help")
    assert outcome.status == 0 and "Example" in outcome.out
