"""``wanderers track``: rows at regular steps, and what a kernel cannot give."""

from __future__ import annotations

import io
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import polars as pl
import pytest

from tests.cli.site_program import Program
from tests.cli.test_bad_input import program, refused
from tests.direct import Direct, wrapped_deg
from wanderers.ephemeris.bodies import BODIES, Body

MONTH = ("--from", "2027", "--to", "2027-02")
IN_SMALL = ("--from", "2001", "--to", "2001-02")

Rows = Callable[..., pl.DataFrame]


@pytest.fixture
def rows(monkeypatch: pytest.MonkeyPatch, capsys: Any, cache_folder: Path) -> Rows:
    """A function that runs the command in this process and reads back its CSV."""
    run = Program(monkeypatch, capsys, "--format", "csv", "--cache", str(cache_folder))

    def read(*arguments: str) -> pl.DataFrame:
        outcome = run("track", *arguments)
        assert (outcome.status, outcome.err) == (0, "")
        return pl.read_csv(io.StringIO(outcome.out))

    return read


@pytest.mark.parametrize(
    ("step", "days", "count"),
    [("1d", 1.0, 31), ("6h", 0.25, 124), ("90min", 0.0625, 496), ("0.5d", 0.5, 62), ("100d", 100.0, 1)],
)
def test_steps_are_counted_from_the_first_date_and_the_last_is_left_out(
    step: str, days: float, count: int, rows: Rows
) -> None:
    table = rows("mars", *MONTH, "--step", step)
    assert table.height == count
    np.testing.assert_allclose(np.diff(table["jd_tt"]), days, atol=1e-9)
    assert table["utc"][0] == "2027-01-01T00:00:00.000Z"
    assert table["utc"][-1] < "2027-02-01"


@pytest.mark.parametrize("body", BODIES)
def test_places_are_skyfields(direct: Direct, body: Body, rows: Rows) -> None:
    table = rows(body.value, *MONTH, "--step", "5d")
    jd = table["jd_tt"].to_numpy()
    longitude, latitude = direct.place_deg(body, jd)
    np.testing.assert_allclose(wrapped_deg(table["longitude_deg"].to_numpy() - longitude), 0.0, atol=1e-7)
    np.testing.assert_allclose(table["latitude_deg"], latitude, atol=1e-7)
    np.testing.assert_allclose(table["distance_au"] * 149_597_870.7, direct.distance_km(body, jd), atol=0.1)


def test_what_does_not_apply_to_the_sun_is_empty(rows: Rows) -> None:
    assert rows("sun", *MONTH)["elongation_deg"].null_count() == 31


def test_names_are_read_in_any_case(rows: Rows) -> None:
    one, two = (rows(name, *MONTH) for name in ("Mars", "mars"))
    assert one.equals(two)


@pytest.mark.parametrize("body", ["moon", "pluto"])
def test_a_body_that_the_kernel_lacks_is_named_with_those_it_holds(
    body: str, small_kernel: Path, cache_folder: Path
) -> None:
    request = ("track", body, *IN_SMALL, "--kernel", str(small_kernel))
    refused(program(*request, cache=cache_folder), 1, body, "DE421", "jupiter", "--kernel")


def test_a_small_kernel_serves_the_bodies_it_holds(small_kernel: Path, rows: Rows) -> None:
    small = rows("mars", *IN_SMALL, "--kernel", str(small_kernel))
    whole = rows("mars", *IN_SMALL)
    # DE421 and DE440 put Mars less than a hundredth of an arcsecond apart in these years.
    np.testing.assert_allclose(small["longitude_deg"], whole["longitude_deg"], atol=3e-6)


def test_more_rows_than_fit_are_refused(cache_folder: Path) -> None:
    request = ("track", "mars", "--from", "1550", "--to", "2650", "--step", "1s")
    refused(program(*request, cache=cache_folder), 2, "--step", "rows", "shorter span")
