"""Clocks against the IANA database as Python's own ``zoneinfo`` reads it."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.errors import UnknownNameError
from wanderers.site import zones

EPOCH = dt.datetime(1970, 1, 1, tzinfo=dt.UTC)
NAMES = ("Europe/Berlin", "Australia/Lord_Howe", "Asia/Kathmandu", "Pacific/Apia", "America/St_Johns", "UTC")
FROM_1900_TO_2100_S = st.integers(-2_208_988_800, 4_102_444_800)


def jd_of(instant: dt.datetime) -> float:
    return zones.UNIX_EPOCH_JD + (instant - EPOCH).total_seconds() / 86_400.0


@given(name=st.sampled_from(NAMES), unix_s=st.lists(FROM_1900_TO_2100_S, min_size=1, max_size=20))
def test_offsets_are_those_of_the_database(name: str, unix_s: list[int]) -> None:
    instants = [EPOCH + dt.timedelta(seconds=second) for second in unix_s]
    ours = zones.zone_named(name).offset_s(np.array([jd_of(instant) for instant in instants]))
    theirs = [instant.astimezone(ZoneInfo(name)).utcoffset() for instant in instants]
    expected = [60 * round(offset.total_seconds() / 60.0) for offset in theirs if offset is not None]
    assert ours.tolist() == expected


@pytest.mark.parametrize("name", NAMES)
def test_every_clock_change_of_two_decades_falls_on_its_second(name: str) -> None:
    rules = ZoneInfo(name)
    seconds = range(int(dt.datetime(2008, 1, 1, tzinfo=dt.UTC).timestamp()), 1_830_000_000, 3_600)
    offsets = [dt.datetime.fromtimestamp(second, rules).utcoffset() for second in seconds]
    changes = [
        second for second, old, new in zip(seconds[1:], offsets, offsets[1:], strict=False) if old != new
    ]
    zone = zones.zone_named(name)
    for hour in changes:
        exact = next(
            s for s in range(hour - 3_600, hour + 1) if _utcoffset(s, rules) == _utcoffset(hour, rules)
        )
        instants = zones.UNIX_EPOCH_JD + (exact + np.array([-1.0, 0.0])) / 86_400.0
        assert zone.offset_s(instants).tolist() == [_utcoffset(exact - 1, rules), _utcoffset(exact, rules)]
    assert changes or name in ("Asia/Kathmandu", "UTC")


def _utcoffset(unix_s: int, rules: ZoneInfo) -> int:
    offset = dt.datetime.fromtimestamp(unix_s, rules).utcoffset()
    assert offset is not None
    return int(offset.total_seconds())


def test_no_instant_has_the_offset_of_none() -> None:
    berlin = zones.zone_named("Europe/Berlin")
    assert berlin.offset_s(np.array([np.nan, jd_of(dt.datetime(2027, 7, 1, tzinfo=dt.UTC))])).tolist() == [
        3_600,
        7_200,
    ]


def test_years_that_python_does_not_know_keep_a_clock() -> None:
    # Local mean time of Berlin, 13 degrees 22 minutes east: 53 minutes 28 seconds, 53 minutes when rounded.
    berlin = zones.zone_named("Europe/Berlin")
    antiquity, far_future_july = 1_538_433.5, 2_451_545.0 + 8_000 * 365.2425 * 1.5 + 180.0
    assert berlin.offset_s(np.array([antiquity])).tolist() == [53 * 60]
    assert berlin.offset_s(np.array([far_future_july]))[0] in (3_600, 7_200)


def test_noon_is_when_the_clock_shows_twelve() -> None:
    days = np.arange("2027-03-25", "2027-04-02", dtype="datetime64[D]")  # clocks change on 28 March
    for name in ("Europe/Berlin", "Pacific/Kiritimati", "Asia/Kathmandu"):
        noons = zones.zone_named(name).noon_jd_utc(days)
        expected = [
            jd_of(dt.datetime.combine(day, dt.time(12), tzinfo=ZoneInfo(name)).astimezone(dt.UTC))
            for day in days.tolist()
        ]
        np.testing.assert_allclose(noons, expected, atol=1e-9)


def test_a_clock_reading_stands_for_no_one_or_two_instants() -> None:
    # 2027 in Berlin: 02:00 becomes 03:00 on 28 March, 03:00 becomes 02:00 on 31 October (EU directive
    # 2000/84/EC).
    berlin = zones.zone_named("Europe/Berlin")
    assert berlin.instants_jd_utc(dt.datetime(2027, 3, 28, 2, 30)) == ()
    (plain,) = berlin.instants_jd_utc(dt.datetime(2027, 3, 28, 3, 30))
    assert plain == pytest.approx(jd_of(dt.datetime(2027, 3, 28, 1, 30, tzinfo=dt.UTC)), abs=1e-9)
    twice = berlin.instants_jd_utc(dt.datetime(2027, 10, 31, 2, 30))
    expected = [jd_of(dt.datetime(2027, 10, 31, hour, 30, tzinfo=dt.UTC)) for hour in (0, 1)]
    assert twice == pytest.approx(expected, abs=1e-9)


def test_names_are_found_in_any_case() -> None:
    assert zones.zone_named(" europe/berlin ").name == "Europe/Berlin"
    assert zones.zone_named("america/new york").name == "America/New_York"


@pytest.mark.parametrize(
    ("name", "hint"),
    [
        ("Europe/Berlinn", "Europe/Berlin"),
        ("berlin", "Europe/Berlin"),
        ("qqq", "a name of the IANA database"),
    ],
)
def test_a_wrong_name_gets_the_nearest(name: str, hint: str) -> None:
    with pytest.raises(UnknownNameError, match=hint):
        zones.zone_named(name)


def test_nautical_zones_are_ahead_in_the_east() -> None:
    for longitude, hours in ((0.0, 0), (149.0, 10), (-150.0, -10), (180.0, 12), (7.4, 0), (7.6, 1)):
        zone = zones.zone_named(zones.nautical_zone_name(longitude))
        assert zone.offset_s(np.array([2_461_500.5])).tolist() == [hours * 3_600]


def test_version_of_the_database_is_a_year_and_a_letter() -> None:
    version = zones.zone_data_version()
    assert version[:4].isdigit() and len(version) == 5
