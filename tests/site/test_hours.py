"""Weekdays and hours at which there is anybody to watch, by the calendar's rules.

Held against zoneinfo on the machine's own rules (clocks) and datetime (weekdays).
"""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.site.places import HILL, POLE
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.site.evenings import evenings
from wanderers.site.hours import WEEKDAYS, Opening
from wanderers.site.places import Site


@given(st.dates(dt.date(1551, 1, 1), dt.date(2649, 12, 31)), st.sets(st.integers(0, 6), min_size=1))
def test_weekdays_are_those_of_the_calendar(first: dt.date, weekdays: set[int]) -> None:
    dates = [first + dt.timedelta(days=step) for step in range(9)]
    allowed = Opening(frozenset(weekdays)).allows(np.array(dates, dtype="datetime64[D]"))
    assert allowed.tolist() == [date.weekday() in weekdays for date in dates]


def test_weekdays_are_written_in_the_order_of_datetime() -> None:
    monday = dt.date(2027, 3, 1)
    names = [(monday + dt.timedelta(days=step)).strftime("%a").lower() for step in range(7)]
    assert list(WEEKDAYS) == names


def test_nothing_asked_is_always_open() -> None:
    assert Opening().is_always
    assert Opening().allows(np.array(["2027-03-01"], dtype="datetime64[D]")).tolist() == [True]
    assert Opening().stretches(evenings(HILL, *days("2027-03-01", 3))) is None


def days(first: str, count: int) -> tuple[np.datetime64, np.datetime64]:
    start = np.datetime64(first, "D")
    return start, start + np.timedelta64(count, "D")


def utc(jd_tt: float) -> dt.datetime:
    stamp: dt.datetime = datetime64_from_jd(jd_utc_from_tt(np.array([jd_tt])))[0].item()
    return stamp.replace(tzinfo=dt.UTC)


CHANGES = {
    # zone, longitude, the dates around which clocks change (from the IANA database, by zoneinfo)
    "Berlin, back": ("Europe/Berlin", 11.0, "2027-10-29"),
    "Berlin, ahead": ("Europe/Berlin", 11.0, "2027-03-26"),
    "New York, back": ("America/New_York", -74.0, "2027-11-05"),
    "New York, ahead": ("America/New_York", -74.0, "2027-03-12"),
    "Sydney, back": ("Australia/Sydney", 151.0, "2027-04-02"),
    "Sydney, ahead": ("Australia/Sydney", 151.0, "2027-10-01"),
    "half an hour back": ("Australia/Lord_Howe", 159.0, "2027-04-02"),
    "half an hour ahead": ("Australia/Lord_Howe", 159.0, "2027-10-01"),
}
TIMES = [
    "12:01",
    "18:30",
    "23:59",
    "00:00",
    "00:30",
    "01:00",
    "01:30",
    "01:45",
    "02:00",
    "02:15",
    "02:30",
    "03:00",
    "03:30",
    "11:59",
]


@pytest.mark.parametrize("change", CHANGES.values(), ids=CHANGES.keys())
@pytest.mark.parametrize("time", TIMES)
def test_hours_are_those_of_the_clock_the_first_where_it_shows_them_twice(
    change: tuple[str, float, str], time: str
) -> None:
    zone, longitude, first = change
    some = evenings(Site("a", 40.0, longitude, 0.0, zone), *days(first, 5))
    clock = dt.time.fromisoformat(time)
    stretches = Opening(after=clock).stretches(some)
    assert stretches is not None
    for evening, start_jd, end_jd in zip(
        stretches.evening, stretches.start_jd, stretches.end_jd, strict=True
    ):
        date: dt.date = some.days[evening].item()
        date += dt.timedelta(days=clock < dt.time(12))
        # fold 0 is the first of two; in a skipped hour, the reading of the clock before (PEP 495)
        expected = dt.datetime.combine(date, clock, tzinfo=ZoneInfo(zone)).astimezone(dt.UTC)
        assert abs(utc(start_jd) - expected) < dt.timedelta(milliseconds=2), (zone, time, date)
        assert end_jd == some.end_jd[evening]


@pytest.mark.parametrize("longitude", [180.0, -179.0, 150.0, -150.0, 95.0, -95.0])
@pytest.mark.parametrize("time", ["00:30", "04:00", "09:00", "11:00", "18:30", "23:30"])
def test_where_the_clock_is_far_off_the_sun_hours_still_lie_in_the_evening(
    longitude: float, time: str
) -> None:
    # Noon of the mean Sun is at 12 h UT less longitude / 15 degrees an hour: by definition.
    site = Site("a", 10.0, longitude, 0.0, "UTC")
    some = evenings(site, *days("2027-03-01", 3))
    clock = dt.time.fromisoformat(time)
    stretches = Opening(after=clock).stretches(some)
    assert stretches is not None
    noon_hours = (12.0 - longitude / 15.0) % 24.0
    for evening in range(some.count):
        start = utc(stretches.start_jd[evening])
        assert (start.hour, start.minute) == (clock.hour, clock.minute)
        assert some.start_jd[evening] <= stretches.start_jd[evening] < some.end_jd[evening]
        after_noon = (clock.hour + clock.minute / 60.0 - noon_hours) % 24.0
        expected_jd = some.start_jd[evening] + after_noon / 24.0
        assert stretches.start_jd[evening] == pytest.approx(expected_jd, abs=1e-6)


def test_hours_that_end_before_they_begin_leave_no_time() -> None:
    stretches = Opening(after=dt.time(22), by=dt.time(20)).stretches(evenings(HILL, *days("2027-03-01", 2)))
    assert stretches is not None
    assert (stretches.end_jd == stretches.start_jd).all()


def test_at_the_pole_any_clock_has_its_hours() -> None:
    some = evenings(POLE, *days("2027-12-20", 3))
    stretches = Opening(after=dt.time(18), by=dt.time(6)).stretches(some)
    assert stretches is not None
    np.testing.assert_allclose(stretches.end_jd - stretches.start_jd, 0.5, atol=1e-8)
