"""``wanderers seasons``: choices of bodies and frames."""

from __future__ import annotations

import io
from collections.abc import Callable
from pathlib import Path
from typing import Any

import polars as pl
import pytest

from tests.cli.site_program import Program
from wanderers import schema
from wanderers.ephemeris.bodies import PLANETS

YEARS = ("--from", "2027", "--to", "2030")

Rows = Callable[..., pl.DataFrame]


@pytest.fixture
def rows(monkeypatch: pytest.MonkeyPatch, capsys: Any, cache_folder: Path) -> Rows:
    """A function that runs the command in this process and reads back its CSV."""
    run = Program(monkeypatch, capsys, "--format", "csv", "--cache", str(cache_folder))

    def read(*arguments: str) -> pl.DataFrame:
        outcome = run("seasons", *arguments)
        assert (outcome.status, outcome.err) == (0, "")
        return pl.read_csv(io.StringIO(outcome.out), schema=schema.SEASON_COLUMNS)

    return read


def test_every_planet_has_its_seasons_in_longitude(rows: Rows) -> None:
    table = rows(*YEARS)
    assert set(table["body"]) == {planet.value for planet in PLANETS}
    assert set(table["frame"]) == {"ecliptic"}
    # In three years: Mercury 3 or 4 times a year, Venus every 584 days, the giants yearly (common practice).
    counts = dict(table["body"].value_counts().iter_rows())
    assert 9 <= counts["mercury"] <= 10
    assert counts["jupiter"] in (2, 3) and counts["pluto"] == 3


def test_a_season_belongs_to_the_span_that_holds_its_middle(rows: Rows) -> None:
    table = rows(*YEARS)
    assert table["middle_utc"].is_between(pl.lit("2027-01-01"), pl.lit("2030-01-01")).all()
    first, second = (
        rows("--from", one, "--to", two) for one, two in (("2027", "2028-06"), ("2028-06", "2030"))
    )  # fmt: skip
    assert sorted([*first["season_id"], *second["season_id"]]) == sorted(table["season_id"])


def test_bodies_and_frames_are_chosen(rows: Rows) -> None:
    asked = ("--body", "mars", "--body", "saturn", "--frame", "j2000", "--frame", "equator")
    table = rows(*YEARS, *asked)
    assert set(table["body"]) == {"mars", "saturn"}
    assert set(table["frame"]) == {"j2000", "equator"}


@pytest.mark.parametrize("body", ["sun", "moon"])
def test_bodies_that_never_turn_back_have_no_seasons(body: str, rows: Rows) -> None:
    assert rows(*YEARS, "--body", body).height == 0


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        ((), ("in longitude", "in RA", "against the")),
        (
            ("--format", "markdown", "--length", "short"),
            ("Jupiter retrograde <!--", "retrograde in RA", "retrograde J2000"),
        ),
        (
            ("--format", "markdown", "--length", "medium", "--language", "de"),
            (" rückläufig in RA ", " J2000 "),
        ),
    ],
)
def test_seasons_of_several_frames_are_told_apart(
    monkeypatch: pytest.MonkeyPatch,
    capsys: Any,
    cache_folder: Path,
    arguments: tuple[str, ...],
    told: tuple[str, ...],
) -> None:
    run = Program(monkeypatch, capsys, "--cache", str(cache_folder))
    frames = ("--frame", "ecliptic", "--frame", "equator", "--frame", "j2000")
    outcome = run("seasons", "--from", "2028", "--to", "2029", "--body", "jupiter", *frames, *arguments)
    assert outcome.status == 0
    assert all(words in " ".join(outcome.out.split()) for words in told)


def test_the_usual_frame_needs_no_column(
    monkeypatch: pytest.MonkeyPatch, capsys: Any, cache_folder: Path
) -> None:
    run = Program(monkeypatch, capsys, "--cache", str(cache_folder))
    assert "Frame" not in run("seasons", "--from", "2028", "--to", "2029", "--body", "jupiter").out
