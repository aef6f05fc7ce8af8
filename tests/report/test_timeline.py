"""The lanes of the timeline as they reach the page, and the programs that the page lets run."""

from __future__ import annotations

import base64
import datetime as dt
import hashlib
import re
from dataclasses import replace
from zoneinfo import ZoneInfo

import pytest

from tests.report.report_samples import MARS_SEASON, made_up
from tests.site.places import HILL
from wanderers.ephemeris.bodies import Body
from wanderers.report.page import page_of
from wanderers.report.page_data import table_data
from wanderers.report.render import rendered
from wanderers.report.timeline import Stretch, timeline_of

VENUS_SEASON = MARS_SEASON | {"season_id": "venus-ecliptic-s3", "body": "venus"}
OTHER_FRAME = MARS_SEASON | {"season_id": "mars-j2000-s7", "frame": "j2000"}
CUT_OFF = MARS_SEASON | {"season_id": "mars-ecliptic-s8", "station_direct_utc": None}


def mars_stretches(*seasons: dict[str, object]) -> tuple[Stretch, ...]:
    contents = made_up(seasons=seasons or (MARS_SEASON,))
    (lane,) = (lane for lane in timeline_of(contents).lanes if lane.body == "mars")
    return lane.stretches


def milliseconds(utc: str) -> float:
    return dt.datetime.fromisoformat(utc).timestamp() * 1000.0


def test_lanes_are_the_planets_asked_for_from_the_sun_outwards() -> None:
    names = [lane.label for lane in timeline_of(made_up()).lanes]
    assert names == ["Mercury", "Venus", "Mars", "Jupiter", "Saturn", "Uranus", "Neptune", "Pluto"]


def test_ends_of_stretch_and_span_are_those_of_the_tables() -> None:
    (stretch,) = mars_stretches()
    wanted = [milliseconds(str(MARS_SEASON[f"station_{way}_utc"])) for way in ("retrograde", "direct")]
    assert stretch.ends == pytest.approx(wanted, abs=1.0)
    span = timeline_of(made_up()).span
    assert span == pytest.approx(
        [milliseconds("2027-01-01T00:00:00Z"), milliseconds("2029-01-01T00:00:00Z")], abs=1.0
    )


def test_a_stretch_says_how_long_how_far_and_from_when_to_when() -> None:
    (stretch,) = mars_stretches()
    assert stretch.what == "Mars runs backwards for 81 days, over 19.5° in longitude"
    assert stretch.utc == "2027-01-10 12:59 to 2027-04-01 14:08"
    assert stretch.local == ""


def test_local_times_are_those_of_the_sites_clock() -> None:
    contents = made_up(seasons=[MARS_SEASON])
    contents = replace(contents, request=replace(contents.request, site=HILL))
    (lane,) = (lane for lane in timeline_of(contents).lanes if lane.body == "mars")
    # The standard library's own reading of the same database; summer time begins between the two.
    ends = [
        dt.datetime.fromisoformat(str(MARS_SEASON[f"station_{way}_utc"])).astimezone(ZoneInfo(HILL.zone))
        for way in ("retrograde", "direct")
    ]
    assert lane.stretches[0].local == " to ".join(f"{end:%Y-%m-%d %H:%M}" for end in ends)


def test_other_frames_and_stretches_without_an_end_have_no_bar() -> None:
    assert len(mars_stretches(MARS_SEASON, OTHER_FRAME, CUT_OFF)) == 1


def test_stretches_of_inner_planets_carry_the_caution() -> None:
    notes = {lane.body: lane.note for lane in timeline_of(made_up(seasons=[VENUS_SEASON])).lanes}
    for body, note in notes.items():
        assert ("no optics" in note) == (body in {"mercury", "venus"})


def page_html(*bodies: Body) -> str:
    contents = made_up(seasons=[MARS_SEASON])
    contents = replace(contents, request=replace(contents.request, bodies=bodies))
    return rendered(page_of(contents, (), "sample"), table_data(contents.events), "")


def test_without_a_planet_there_is_no_timeline() -> None:
    assert 'id="timeline"' in page_html(Body.MARS)
    assert 'id="timeline"' not in page_html(Body.SUN, Body.MOON)
    assert 'href="#timeline"' not in page_html(Body.SUN, Body.MOON)


def test_the_page_lets_its_own_two_programs_run_and_no_other() -> None:
    # Content Security Policy Level 3 (W3C), 6.7.3.3: the SHA-256 of what stands between the tags.
    html = page_html(Body.MARS)
    programs = re.findall(r"<script>(.*?)</script>", html, re.DOTALL)
    assert len(programs) == 2
    digests = [base64.b64encode(hashlib.sha256(one.encode()).digest()).decode() for one in programs]
    allowed = re.search(r"script-src ([^;]*);", html)
    assert allowed
    assert allowed[1].split() == [f"'sha256-{digest}'" for digest in digests]
