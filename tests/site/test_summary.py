"""Tables as people read them."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest

from tests.site.places import CAPE, HILL, RIDGE
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.site import summary
from wanderers.site.compass import LETTERS, POINTS
from wanderers.site.moment import everything_up
from wanderers.site.nights import nights
from wanderers.site.places import Site
from wanderers.site.reasons import depth_words
from wanderers.site.rules import Rules
from wanderers.site.zones import zone_data_version


def evening(store: TrackStore, site: Site, day: str, *bodies: Body) -> pl.DataFrame:
    first = np.datetime64(day, "D")
    return nights(store, site, (first, first + np.timedelta64(1, "D")), bodies)


def test_each_evening_opens_with_the_night_itself(store: TrackStore) -> None:
    table = evening(store, HILL, "2027-03-05", Body.JUPITER, Body.SATURN)
    printed = summary.nights_summary(table)
    assert printed["Body"].to_list() == ["Night", "Jupiter", "Saturn"]
    night = printed["What"][0]
    assert night.startswith("Sun sets 18:00; dark from 19:52; dawn 04:57; Sun rises 06:49")


def test_times_are_rounded_to_the_local_minute(store: TrackStore) -> None:
    table = evening(store, HILL, "2027-03-05", Body.SATURN)
    printed = summary.nights_summary(table).row(1, named=True)
    start, end = table["window_start_local"][0][11:19], table["window_end_local"][0][11:19]
    assert printed["Watch"] == f"{rounded(start)}–{rounded(end)}"
    assert printed["Best"] == rounded(table["best_local"][0][11:19])
    assert POINTS[LETTERS.index(printed["Toward"])] == table["compass"][0] == "west-southwest"
    assert printed["Alt"] == f"{table['altitude_deg'][0]:.0f}"


def rounded(clock: str) -> str:
    hours, minutes, seconds = (int(part) for part in clock.split(":"))
    total = hours * 60 + minutes + (seconds >= 30)
    return f"{total // 60 % 24:02d}:{total % 60:02d}"


def test_a_minute_before_midnight_rounds_to_midnight() -> None:
    texts = pl.DataFrame({"t": ["2027-03-05T23:59:45.000+01:00", "2027-03-05T23:59:15.000+01:00", None]})
    assert texts.select(summary._minute("t")).to_series().to_list() == ["00:00", "23:59", None]


def test_nothing_to_watch_is_a_dash_and_a_reason(store: TrackStore) -> None:
    row = summary.nights_summary(evening(store, HILL, "2027-03-05", Body.NEPTUNE)).row(1, named=True)
    assert {row[name] for name in ("Watch", "Best", "Alt", "Toward", "Mag")} == {"–"}
    assert "no higher than" in row["What"] and "Within 20 degrees of the Sun" in row["What"]


def test_polar_day_and_night_are_said_in_the_line_of_the_night(store: TrackStore) -> None:
    june = summary.nights_summary(evening(store, CAPE, "2027-06-20", Body.VENUS))["What"][0]
    december = summary.nights_summary(evening(store, CAPE, "2027-12-20", Body.VENUS))["What"][0]
    assert june == "the Sun does not set" and december.endswith("the Sun does not rise")


def test_magnitudes_are_printed_to_the_tenth_without_a_negative_zero() -> None:
    table = pl.DataFrame(
        {"magnitude": [-2.46, -0.04, 0.04, 5.649, None], "altitude_deg": [1.0] * 5, "compass": ["north"] * 5}
    )
    printed = table.select(summary._place())["Mag"].to_list()
    assert printed == ["−2.5", "0.0", "0.0", "5.6", "–"]


def test_a_moment_names_neighbours_or_the_nearest_star(store: TrackStore) -> None:
    jd = float(jd_tt_from_utc(parse_date("2027-03-05T19:00")))
    table = everything_up(store, HILL, jd)
    words = dict(zip(table["body"], summary.moment_summary(table)["What"], strict=True))
    assert "near: " in words["jupiter"] and "Mars" in words["jupiter"]
    assert "nearest bright star" in words["Procyon"]
    heading = summary.moment_heading(table, summary.local_moment(HILL, jd), HILL, "DE440")
    assert "2027-03-05 20:00 (UTC+01:00)" in heading and zone_data_version() in heading


def test_the_heading_says_place_clock_and_limits(store: TrackStore) -> None:
    table = evening(store, RIDGE, "2027-03-05", Body.VENUS)
    heading = summary.nights_heading(table, RIDGE, Rules(5.0, -9.0), "DE440", by_sun=True)
    for words in ("1 evening at ridge (35.30 S, 149.10 E, 780 m)", "Australia/Sydney", "above 5 degrees"):
        assert words in heading
    assert "9 degrees or more below the horizon" in heading and "mean Sun's noon" in heading


@pytest.mark.parametrize(
    ("altitude", "words"),
    [
        (-6.0, "6 degrees or more below the horizon"),
        (-0.5, "0.5 degrees or more below the horizon"),
        (0.0, "below the horizon"),
        (5.0, "less than 5 degrees high"),
    ],
)
def test_depths_of_the_sun_are_put_in_words(altitude: float, words: str) -> None:
    assert depth_words(altitude) == words
