"""What stands on which day of the wall, in which words and how important it is."""

from __future__ import annotations

import datetime as dt
from typing import Any

import polars as pl
import pytest
from skyfield import almanac as skyfield_almanac
from skyfield.api import load, load_file

from tests.ephemeris.kernel_files import DE421
from tests.report.calendar_samples import event
from tests.report.report_samples import MARS_SEASON, seasons_table
from tests.report.wall_samples import (
    HILL,
    MARS,
    NO_SEASONS,
    NOT_SEEN,
    from_site,
    geocentric,
    looked_at,
    moon_phase,
    pair,
)
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.report.wall.entries import Entry, State, Wall, clock_changes, wall_of
from wanderers.report.wall.importance import rank
from wanderers.report.wall.layout import months_between, weeks_of
from wanderers.report.wall.phrases import angle_text, with_look, wordings
from wanderers.site.zones import zone_named

YEAR = dt.date(2027, 1, 1), dt.date(2028, 1, 1)


def the_wall(events: pl.DataFrame, zone: str = "UTC", seasons: pl.DataFrame = NO_SEASONS) -> Wall:
    return wall_of(events, seasons, *YEAR, zone_named(zone))


def looking(row: dict[str, Any]) -> tuple[str, ...]:
    return with_look(row, wordings(row))


def the_entry(events: pl.DataFrame, zone: str = "UTC") -> Entry:
    entries = [entry for day in the_wall(events, zone).entries.values() for entry in day]
    (found,) = [entry for entry in entries if not entry.wordings[0].startswith("Clocks")]
    return found


@pytest.mark.parametrize("name", ["Europe/Berlin", "Australia/Sydney", "America/New_York"])
def test_phases_fall_on_the_dates_and_minutes_that_skyfield_finds_by_the_local_clock(
    de421_store: TrackStore, name: str
) -> None:
    opened, timescale = load_file(str(DE421)), load.timescale(builtin=True)
    start, end = timescale.utc(2027, 1, 1), timescale.utc(2027, 3, 1)
    times, phases = skyfield_almanac.find_discrete(start, end, skyfield_almanac.moon_phases(opened))
    opened.close()
    zone = zone_named(name)
    expected = [
        (time.utc_datetime().astimezone(zone.rules) + dt.timedelta(seconds=30), int(phase))
        for time, phase in zip(times, phases, strict=True)
    ]
    table = almanac(de421_store, Query(start.tt, end.tt, frozenset({Kind.MOON_PHASE})))
    found = the_wall(table, name).phases
    inside = [(f"{at:%Y-%m-%d %H:%M}", phase) for at, phase in expected if at.year == 2027]
    assert [(f"{day} {phase.clock}", phase.index) for day, phase in found.items()] == inside
    assert len(inside) >= 7


def test_a_phase_is_dated_by_the_zone_and_marked_near_midnight() -> None:
    full = geocentric(moon_phase("2027-03-22T10:44:00.000Z", "full"))
    ((day, phase),) = the_wall(full, "Pacific/Auckland").phases.items()
    # New Zealand Daylight Time, UTC+13 until the first Sunday of April: tz database.
    assert (day, phase.clock, phase.index) == (dt.date(2027, 3, 22), "23:44", 2)
    assert phase.near_midnight
    assert not the_wall(full).phases[dt.date(2027, 3, 22)].near_midnight


def test_one_approach_is_told_once_and_a_later_one_again() -> None:
    first = pair("2027-02-01T10:00:00.000Z", "venus", "saturn", 0.4)
    conjunction = event("conjunction", "2027-02-02T20:00:00.000Z", body="venus", other="saturn",
                        frame="equator", separation_deg=0.5, elongation_deg=60.0)  # fmt: skip
    again = pair("2027-06-01T10:00:00.000Z", "venus", "saturn", 0.9)
    wall = the_wall(geocentric(conjunction, first, again))
    assert list(wall.entries) == [dt.date(2027, 2, 1), dt.date(2027, 6, 1)]
    assert wall.unprinted[dt.date(2027, 2, 1)] == 1


def test_a_station_in_three_frames_is_told_once_in_longitude() -> None:
    rows = [
        event(
            "station", f"2027-01-{day}T12:00:00.000Z", detail="retrograde", frame=frame, elongation_deg=129.0
        )
        for day, frame in (("08", "equator"), ("10", "ecliptic"), ("11", "j2000"))
    ]
    assert the_entry(geocentric(*rows)).wordings == (
        "Mars turns retrograde in longitude",
        "Mars turns retrograde",
    )


OPPOSITION = {"kind": "opposition", "frame": "ecliptic"}
EQUINOX = {"kind": "season_point", "body": "sun", "detail": "equinox_march"}
BRILLIANCY = {"kind": "greatest_brilliancy", "body": "venus", "magnitude": -4.8}


@pytest.mark.parametrize(
    ("cells", "time", "clock"),
    [
        (OPPOSITION, "15:51:00", "16 h"),
        (OPPOSITION, "23:51:00", "23 h"),
        (EQUINOX, "20:24:41", "20:25"),
        (BRILLIANCY, "15:51:00", ""),
    ],
)
def test_an_instant_is_printed_as_coarsely_as_it_deserves(
    cells: dict[str, Any], time: str, clock: str
) -> None:
    # Official almanacs print oppositions and stations to the hour, equinoxes to the minute.
    given = {"elongation_deg": 120.0, **cells}
    entry = the_entry(geocentric(event(given.pop("kind"), f"2027-03-20T{time}.000Z", **given)))
    assert entry.clock.replace("\N{NO-BREAK SPACE}", " ") == clock


def test_what_can_be_watched_comes_first_and_what_cannot_is_set_apart() -> None:
    moon = pair("2027-02-01T10:00:00.000Z", "moon", "mars", 4.0)
    lost = pair("2027-02-01T10:00:00.000Z", "mercury", "venus", 1.0, elongation_deg=12.0)
    closest = event(
        "perigee", "2027-02-01T02:00:00.000Z", body="moon", distance_au=0.0024, elongation_deg=90.0
    )
    view = from_site((closest, looked_at("2027-02-01T23:00:00.000+01:00")), (lost, NOT_SEEN),
                     (moon, looked_at("2027-02-01T21:30:00.000+01:00", seen_separation_deg=4.6)))  # fmt: skip
    entries = the_wall(view, HILL.zone).entries[dt.date(2027, 2, 1)]
    assert [entry.state for entry in entries] == [State.WATCHED, State.FACT, State.HIDDEN]
    assert [entry.clock.replace("\N{NO-BREAK SPACE}", " ") for entry in entries] == ["21:30", "3 h", "11 h"]
    # A Moon's distance is nothing to look at; 0.0024 au of 149,597,870.7 km (IAU 2012 Resolution B2).
    assert entries[1].wordings[0] == "Moon closest, 359,000 km"
    assert entries[2].near_sun


def test_the_caution_of_the_site_marks_an_entry_too() -> None:
    low = pair("2027-02-01T10:00:00.000Z", "mercury", "mars", 1.0, elongation_deg=40.0)
    seen = looked_at("2027-02-01T21:30:00.000+01:00", caution="The Sun is up: no binoculars or telescope")
    assert the_entry(from_site((low, seen)), HILL.zone).near_sun
    assert not the_entry(from_site((low, looked_at("2027-02-01T21:30:00.000+01:00"))), HILL.zone).near_sun


@pytest.mark.parametrize(
    ("placement", "text"),
    [
        ("to the upper right", "Saturn 0.5° upper right of Venus, 12° up in the WSW"),
        ("above", "Saturn 0.5° above Venus, 12° up in the WSW"),
        ("to the left", "Saturn 0.5° left of Venus, 12° up in the WSW"),
    ],
)
def test_where_to_look_is_told_as_the_site_sees_it(placement: str, text: str) -> None:
    seen = looked_at("2027-01-13T18:45:00.000+01:00", seen_separation_deg=0.52, seen_placement=placement)
    row = pair("2027-01-13T10:00:00.000Z", "venus", "saturn", 0.4) | seen
    found = looking(row)
    assert found[0] == text
    assert looking(row | {"verdict": "binoculars"})[0] == f"{text} (binoculars)"
    assert found[-1] == "Venus, Saturn 0.5°"
    lengths = [len(wording) for wording in found]
    assert lengths == sorted(lengths, reverse=True)


def test_an_occultation_is_claimed_for_the_site_only_where_it_happens_there() -> None:
    row = event("occultation", "2027-06-17T14:31:59.000Z", body="moon", other="Antares", detail="star",
                separation_deg=0.2, elongation_deg=150.0)  # fmt: skip
    seen = row | looked_at("2027-06-18T01:00:00.000+10:00", seen_separation_deg=4.0, seen_placement="below")
    contacts = {f"local_contact{n}_local": None for n in (1, 4)}
    assert wordings(row) == ("Moon hides Antares for parts of the Earth", "Moon hides Antares (in places)")
    assert rank(row) == 0
    assert looking(seen | contacts)[0].startswith("Antares 4.0° below the Moon")
    assert rank(seen | contacts) == 4
    times = {"local_contact1_local": "2027-06-18T00:59:10.000+10:00",
             "local_contact4_local": "2027-06-18T01:52:10.000+10:00",
             "local_contact1_altitude_deg": 60.0, "local_contact4_altitude_deg": 50.0}  # fmt: skip
    assert looking(seen | times)[0].startswith("Moon hides Antares 00:59–01:52")
    later = times | {"local_contact1_local": "2027-06-18T00:59:40.000+10:00"}
    assert looking(seen | later)[0].startswith("Moon hides Antares 01:00–01:52")  # rounded, not cut
    set_by_then = times | {"local_contact4_altitude_deg": -2.0}
    assert looking(seen | set_by_then)[0].startswith("Moon hides Antares from 00:59")
    assert rank(seen | times) == 0


@pytest.mark.parametrize(
    ("angle_deg", "text"), [(12.34, "12.3°"), (0.42, "0.4°"), (0.07, "4′"), (0.01, "36″")]
)
def test_angles_are_printed_in_the_unit_that_suits_them(angle_deg: float, text: str) -> None:
    assert angle_text(angle_deg) == text


def test_stations_oppositions_and_close_pairs_outrank_the_rest() -> None:
    station = event("station", "2027-01-10T12:00:00.000Z", detail="direct", frame="ecliptic")
    ranks = [
        rank(station),
        rank(event("opposition", "2027-01-10T12:00:00.000Z", body="uranus")),
        rank(pair("2027-01-10T12:00:00.000Z", "moon", "jupiter", 4.0)),
        rank(pair("2027-01-10T12:00:00.000Z", "moon", "Regulus", 4.0)),
    ]
    assert ranks == [0, 1, 2, 4]
    assert rank(pair("2027-01-10T12:00:00.000Z", "venus", "jupiter", 1.9)) == 0
    assert rank(pair("2027-01-10T12:00:00.000Z", "venus", "HIP 93085", 0.02)) is None
    assert rank(event("node", "2027-01-10T12:00:00.000Z", body="moon", detail="ascending")) is None
    assert rank(station | {"verdict": "telescope"}) == 1


def test_the_days_on_which_clocks_are_moved_are_named() -> None:
    # European Union: last Sundays of March and October (Directive 2000/84/EC).
    changes = clock_changes(zone_named("Europe/Berlin"), *YEAR)
    assert [(entry.day, entry.wordings[0]) for entry in changes] == [
        (dt.date(2027, 3, 28), "Clocks go forward 1 h"),
        (dt.date(2027, 10, 31), "Clocks go back 1 h"),
    ]
    # Lord Howe Island moves its clocks by half an hour, first Sundays of April and October: tz database.
    assert [entry.wordings[0] for entry in clock_changes(zone_named("Australia/Lord_Howe"), *YEAR)] == [
        "Clocks go back 0.5 h",
        "Clocks go forward 0.5 h",
    ]
    assert clock_changes(zone_named("UTC"), *YEAR) == []


def test_retrograde_stretches_run_from_station_to_station_by_the_local_clock() -> None:
    (stretch,) = the_wall(geocentric(), "Asia/Tokyo", MARS).stretches
    assert stretch.body is Body.MARS
    # 12:59:03 and 14:08 UTC; Japan keeps UTC+9 (tz database).
    start = dt.datetime(2027, 1, 10, 21, 59, 3)
    end = dt.datetime(2027, 4, 1, 23, 8)
    for day, expected in ((stretch.start, start), (stretch.end, end)):
        seconds = (day - expected.date().toordinal()) * 86_400.0
        assert seconds == pytest.approx(
            (expected - dt.datetime.combine(expected, dt.time())).seconds, abs=0.1
        )


def test_a_station_outside_the_kernel_leaves_the_bar_open() -> None:
    cut = seasons_table(MARS_SEASON | {"station_retrograde_utc": None, "frame": "ecliptic"})
    (stretch,) = the_wall(geocentric(), seasons=cut).stretches
    assert stretch.start == float("-inf")


def test_months_and_weeks() -> None:
    assert months_between(dt.date(2027, 11, 30), dt.date(2028, 2, 1)) == [
        dt.date(2027, 11, 1),
        dt.date(2027, 12, 1),
        dt.date(2028, 1, 1),
    ]
    february = weeks_of(dt.date(2027, 2, 1))  # begins on a Monday and has four whole weeks
    assert len(february) == 4
    assert all(day is not None for week in february for day in week)
    assert len(weeks_of(dt.date(2027, 5, 1))) == 6
