"""A campaign in words: dates, clocks, spares, chances."""

from __future__ import annotations

from typing import Any

import pytest

from tests.report.campaign_samples import contents, reported
from wanderers.ephemeris.store import TrackStore
from wanderers.plans.camera import sensor_named
from wanderers.report.campaign import numbers, words
from wanderers.report.campaign.contents import CameraChoice, gather_campaign, to_come


@pytest.mark.parametrize(
    ("local", "shown"),
    [
        ("2026-11-09T06:20:31.252+01:00", "06:21"),
        ("2026-11-09T06:20:29.999+01:00", "06:20"),
        ("2026-11-09T23:59:45.000+01:00", "00:00"),
        (None, ""),
    ],
)
def test_clocks_are_rounded_to_the_minute(local: str | None, shown: str) -> None:
    assert words.clock(local) == shown


def test_both_dates_of_a_night_are_named() -> None:
    night: dict[str, Any] = {"weekday": "Saturday", "evening_date": "2027-02-13"}
    assert words.night_words(night) == "the night of Saturday 13 to 14 February 2027"
    night["evening_date"] = "2026-10-31"
    said = words.night_words(night).replace("\N{NO-BREAK SPACE}", " ")
    assert said == "the night of Saturday 31 Oct to 1 November 2026"


def test_months_are_named_where_they_change() -> None:
    said = words.spare_days({"spares": "2026-10-30 2026-10-31 2026-11-01"})
    assert said.replace("\N{NO-BREAK SPACE}", " ") == "30, 31 Oct, 1 Nov"
    assert words.spare_days({"spares": None}) == ""


@pytest.mark.parametrize(
    ("chance", "said"),
    [(0.0, "0 %"), (0.004, "under 1 %"), (0.94, "94 %"), (0.9995, "over 99 %"), (1.0, "100 %")],
)
def test_certainty_is_claimed_only_where_there_is(chance: float, said: str) -> None:
    assert words.percent(chance) == said


def test_the_next_night_is_the_first_that_is_neither_done_nor_lost(store: TrackStore) -> None:
    some = gather_campaign(store, reported(store), CameraChoice())
    night = words.next_night(some)
    assert night is not None and night["status"] == "planned"
    assert night["evening_date"] == to_come(some.plan)["evening_date"].min()
    assert night["evening_date"] > some.plan.filter(some.plan["status"] == "done")["evening_date"].max()


def test_every_spare_is_named_with_its_time_or_the_next_night_is(store: TrackStore) -> None:
    some = contents(store, "saturn", "hill")
    for night in some.plan.iter_rows(named=True):
        said = words.if_cloudy(some, night)
        for spare in words.spares_of(some, night):
            assert f"{spare['weekday']} {words.short_day(spare['evening_date'])}" in said
            assert words.clock(spare["recommended_local"]) in said
        if not night["spares"]:
            assert "go on with night" in said or "it is the last" in said


def test_the_camera_leans_to_the_side_that_the_angles_tell(store: TrackStore) -> None:
    # The zenith lies at the parallactic angle (Meeus, Astronomical Algorithms, ch. 14). Position angles run
    # to the left, so an upper edge at a larger one leans to the left.
    for site in ("hill", "ridge"):
        some = contents(store, "mars", site)
        for night in some.plan.iter_rows(named=True):
            off = (some.frame.position_angle_deg - night["parallactic_angle_deg"] + 180.0) % 360.0 - 180.0
            assert night["camera_tilt_deg"] == pytest.approx(off, abs=1e-6)
            if abs(off) >= 0.5:
                assert ("to the left" if off > 0.0 else "to the right") in words.lens_words(some, night)


def test_exposures_are_those_of_the_sidereal_rate(store: TrackStore) -> None:
    some = contents(store, "mars", "hill")
    # Stars at declination 0 pass at 15.041 arcseconds a second (any handbook); a 6 micrometre pixel behind
    # 50 mm is 24.75 arcseconds. The path reaches down to declination 6: 1.65 s and three times that.
    facts = dict(numbers.exposure_facts(some))
    assert facts["Stars trail by a pixel after"] == "1.7 s"
    assert facts["Stars trail by 3 pixels after"] == "5.0 s"
    assert facts["Rule of 500, generous"] == "10 s"


def test_a_lens_too_long_says_on_how_many_days_the_path_lies_outside(store: TrackStore) -> None:
    plan = contents(store, "mars", "hill").campaign
    some = gather_campaign(store, plan, CameraChoice(sensor_named("full frame"), lens_mm=200.0))
    told = dict(numbers.frame_facts(some))["Does the path fit"]
    assert told.startswith("no: on ") and "shorter lens" in told
    assert dict(numbers.frame_facts(contents(store, "mars", "hill")))["Does the path fit"].startswith(
        "yes, on every"
    )
