"""The calendar of a campaign, read back by two programs that know nothing of this one."""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from typing import Any

import ical.calendar_stream
import pytest
import vobject

from tests.report.campaign_samples import contents, reported
from wanderers.ephemeris.store import TrackStore
from wanderers.report.calendar_update import read_calendar
from wanderers.report.campaign.calendar import campaign_calendar, earlier_issue
from wanderers.report.campaign.contents import CameraChoice, gather_campaign
from wanderers.site.places import Site

CASES = [("mars", "hill"), ("saturn", "ridge"), ("venus", "atoll")]
HALF_MINUTE = dt.timedelta(seconds=30)


def events(content: bytes) -> dict[str, Any]:
    """Return the entries by UID, read by vobject."""
    calendar = vobject.readOne(content.decode())
    return {event.uid.value: event for event in calendar.vevent_list}


@pytest.mark.parametrize(("body", "site"), CASES)
def test_planned_nights_are_confirmed_and_spares_tentative(store: TrackStore, body: str, site: str) -> None:
    some = contents(store, body, site)
    found = events(campaign_calendar(some))
    season = some.campaign.season.row["season_id"]
    for table, status in ((some.plan, "CONFIRMED"), (some.spares, "TENTATIVE")):
        for night in table.iter_rows(named=True):
            event = found.pop(f"campaign-{season}-{night['evening_date']}@wanderers")
            assert event.status.value == status
            assert event.transp.value == "TRANSPARENT"
    assert not found


@pytest.mark.parametrize(("body", "site"), CASES)
def test_entries_last_as_long_as_the_window(store: TrackStore, body: str, site: str) -> None:
    some = contents(store, body, site)
    found = events(campaign_calendar(some))
    for night in some.plan.iter_rows(named=True):
        event = next(one for uid, one in found.items() if uid.endswith(f"-{night['evening_date']}@wanderers"))
        for name, column in (("dtstart", "window_start_utc"), ("dtend", "window_end_utc")):
            wanted = dt.datetime.fromisoformat(night[column].replace("Z", "+00:00"))
            assert abs(getattr(event, name).value.astimezone(dt.UTC) - wanted) <= HALF_MINUTE


def test_times_stand_in_the_zone_of_the_site_with_its_rules(store: TrackStore) -> None:
    content = campaign_calendar(contents(store, "saturn", "ridge"))
    text = content.decode()
    assert "DTSTART;TZID=Australia/Melbourne:" in text
    assert text.count("BEGIN:VTIMEZONE") == 1 and "BEGIN:DAYLIGHT" in text
    # RFC 5545, 3.1: lines of at most 75 octets, ended by CRLF.
    assert all(len(line) <= 75 for line in content.split(b"\r\n"))
    assert b"\n" not in content.replace(b"\r\n", b"")


def test_a_second_reader_finds_the_same_nights(store: TrackStore) -> None:
    some = contents(store, "mars", "hill")
    content = campaign_calendar(some)
    read = ical.calendar_stream.IcsCalendarStream.calendar_from_ics(content.decode())
    assert {event.uid for event in read.events} == set(events(content))
    assert len(read.events) == some.plan.height + some.spares.height


def test_an_entry_says_what_to_do_and_what_if_it_is_cloudy(store: TrackStore) -> None:
    some = contents(store, "mars", "hill")
    night = next(row for row in some.plan.iter_rows(named=True) if row["role"] == "must" and row["spares"])
    event = events(campaign_calendar(some))[
        f"campaign-{some.campaign.season.row['season_id']}-{night['evening_date']}@wanderers"
    ]
    assert event.summary.value.startswith(f"Mars: night {night['night']} of 31 (must), ")
    text = event.description.value
    assert "Recommended time" in text and "If it is cloudy, try" in text and "Lens 50 mm" in text
    assert "SHA-256" in text
    assert event.location.value == "hill"


def test_mercury_and_venus_carry_the_caution(store: TrackStore) -> None:
    for event in events(campaign_calendar(contents(store, "venus", "ridge"))).values():
        assert "never sweep with binoculars" in event.description.value


def test_the_same_plan_gives_the_same_octets_and_changes_nothing_published(store: TrackStore) -> None:
    some = contents(store, "mars", "hill")
    first = campaign_calendar(some)
    assert campaign_calendar(some) == first
    assert campaign_calendar(some, read_calendar(first)) == first


def test_a_plan_made_anew_raises_what_changed_and_cancels_what_is_gone(store: TrackStore) -> None:
    before = events(campaign_calendar(contents(store, "mars", "hill")))
    some = gather_campaign(store, reported(store), CameraChoice())
    after = events(campaign_calendar(some, read_calendar(campaign_calendar(contents(store, "mars", "hill")))))
    assert set(before) <= set(after)
    lost = [row["evening_date"] for row in some.plan.iter_rows(named=True) if row["status"] == "lost"]
    now = {row["evening_date"] for row in some.plan.vstack(some.spares).iter_rows(named=True)}
    raised = 0
    for uid, event in after.items():
        evening = uid.removesuffix("@wanderers")[-10:]
        gone = evening not in now or evening in lost
        assert (event.status.value == "CANCELLED") == gone
        if uid in before:
            # RFC 5545, 3.8.7.4: a revision has a higher SEQUENCE.
            changed = event.serialize() != before[uid].serialize()
            assert int(event.sequence.value) == int(changed)
            raised += changed
    assert raised >= len(lost) == 2


def test_only_the_same_campaign_of_the_same_site_is_taken_for_an_earlier_issue(
    store: TrackStore, tmp_path: Path
) -> None:
    mars = contents(store, "mars", "hill")
    path = tmp_path / "plan.ics"
    assert earlier_issue(mars, path) is None
    path.write_bytes(campaign_calendar(mars))
    assert earlier_issue(mars, path) is not None
    assert earlier_issue(contents(store, "mars", "ridge"), path) is None
    assert earlier_issue(contents(store, "saturn", "hill"), path) is None
    path.write_bytes(b"no calendar")
    assert earlier_issue(mars, path) is None


def test_a_site_far_from_its_clock_is_written_in_full(store: TrackStore) -> None:
    assert isinstance(contents(store, "venus", "atoll").campaign.site, Site)
    assert b"TZID=Etc/GMT+10" in campaign_calendar(contents(store, "venus", "atoll"))
