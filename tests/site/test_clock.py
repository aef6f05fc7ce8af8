"""Local times as text, against ``zoneinfo``."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

import numpy as np
import pytest

from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.site import clock
from wanderers.site.zones import UNIX_EPOCH_JD, zone_named

UNIX_S = np.array([1_803_000_000.25, 1_806_000_000.0, 1_811_500_000.5, 1_825_000_000.125])
JD_TT = jd_tt_from_utc(UNIX_EPOCH_JD + UNIX_S / 86_400.0)


@pytest.mark.parametrize("name", ["Europe/Berlin", "Asia/Kathmandu", "America/St_Johns", "UTC", "Etc/GMT+3"])
def test_local_texts_are_iso_with_the_offset_of_the_database(name: str) -> None:
    ours = [dt.datetime.fromisoformat(text) for text in clock.local_texts(zone_named(name), JD_TT)]
    for mine, unix_s in zip(ours, UNIX_S.tolist(), strict=True):
        theirs = dt.datetime.fromtimestamp(unix_s, ZoneInfo(name))
        assert abs(mine - theirs) <= dt.timedelta(milliseconds=1)
        assert mine.utcoffset() == theirs.utcoffset()


def test_nothing_stays_nothing() -> None:
    jd = np.array([np.nan, JD_TT[0]])
    berlin = zone_named("Europe/Berlin")
    assert clock.utc_texts(jd).to_list()[0] is None
    assert clock.local_texts(berlin, jd).to_list()[0] is None
    assert [column.to_list()[0] for column in clock.local_dates_and_times(berlin, jd)] == [None, None]
    assert clock.local_minutes(berlin, jd).to_list()[0] is None


def test_date_and_time_are_rounded_together() -> None:
    # 2027-03-05T22:59:59.700Z is 23:59:59.7 in Berlin: the next second belongs to the next day.
    jd_tt = jd_tt_from_utc(
        UNIX_EPOCH_JD
        + np.array([dt.datetime(2027, 3, 5, 22, 59, 59, 700_000, dt.UTC).timestamp()]) / 86_400.0
    )
    date, time = clock.local_dates_and_times(zone_named("Europe/Berlin"), jd_tt)
    assert (date[0], time[0]) == ("2027-03-06", "00:00:00")
    assert clock.local_minutes(zone_named("Europe/Berlin"), jd_tt)[0] == "00:00"


def test_offsets_are_written_with_a_sign() -> None:
    texts = clock.offset_texts(np.array([0, 3_600, -12_600, 20_700, -43_200]))
    assert texts.to_list() == ["+00:00", "+01:00", "-03:30", "+05:45", "-12:00"]


def test_antiquity_is_printed_too() -> None:
    (text,) = clock.local_texts(zone_named("Europe/Berlin"), np.array([1_538_433.5]))
    assert text.startswith("-0501-") and text.endswith("+00:53")
