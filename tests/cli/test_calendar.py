"""``wanderers calendar`` as a user runs it, on JPL's DE421 (1899 to 2053)."""

from __future__ import annotations

import csv
import io
import os
import re
import subprocess
import sys
from collections.abc import Callable
from datetime import datetime, timedelta
from pathlib import Path

import pytest
import recurring_ical_events
import vobject
from ical.calendar_stream import IcsCalendarStream
from icalendar import Calendar

from tests.ephemeris.kernel_files import DE421
from tests.report.calendar_samples import nearest_minute

Run = Callable[..., subprocess.CompletedProcess[bytes]]
YEAR = ("--from", "2027", "--to", "2028")
FEW = ("--kind", "opposition", "--kind", "greatest_elongation")


@pytest.fixture(scope="module")
def cache(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("cache")


@pytest.fixture
def run(cache: Path, tmp_path: Path) -> Run:
    def program(*arguments: str, **variables: str) -> subprocess.CompletedProcess[bytes]:
        kernel = () if arguments[0] == "kernels" else ("--kernel", str(DE421))
        environment = {name: value for name, value in os.environ.items() if name != "SOURCE_DATE_EPOCH"}
        return subprocess.run(
            [sys.executable, "-m", "wanderers", *arguments, *kernel, "--cache", str(cache)],
            capture_output=True,
            check=False,
            cwd=tmp_path,
            env=environment | variables,
            timeout=300,
        )

    return program


def test_the_calendar_holds_what_the_almanac_holds(run: Run) -> None:
    calendar = run("calendar", *YEAR)
    assert calendar.returncode == 0
    rows = list(csv.DictReader(io.StringIO(run("almanac", *YEAR, "--format", "csv").stdout.decode())))
    read = {
        entry.uid: entry for entry in IcsCalendarStream.calendar_from_ics(calendar.stdout.decode()).events
    }
    assert len(rows) == len(read) > 300
    for row in rows:
        entry = read[f"{row['event_id']}@wanderers"]
        assert entry.dtstart == nearest_minute(row["utc"])
        assert entry.categories == [row["kind"].replace("_", " ").capitalize()]
        separation = float(row["separation_deg"] or 0.0)
        if row["kind"] in ("conjunction", "appulse") and separation >= 1.0:
            assert f"{separation:.1f}°" in entry.summary
            assert f"Separation: {separation:.1f} degrees." in entry.description
        risky = row["elongation_deg"] and float(row["elongation_deg"]) - separation < 20.0
        assert not risky or "CAUTION" in entry.description


def test_a_reader_that_asks_for_a_day_gets_the_events_of_that_day(run: Run) -> None:
    calendar = Calendar.from_ical(run("calendar", *YEAR, "--kind", "opposition").stdout)
    # Mars in 2027: opposition on 19 February, Astronomical Almanac and handbooks alike (from memory).
    found = recurring_ical_events.of(calendar).at((2027, 2, 19))
    assert [str(entry["SUMMARY"]) for entry in found] == ["Mars at opposition to the Sun"]


def test_the_same_request_gives_the_same_octets(run: Run, tmp_path: Path) -> None:
    first = run("calendar", *YEAR, *FEW)
    run("calendar", *YEAR, *FEW, "--out", "sky.ics")
    assert first.stdout == (tmp_path / "sky.ics").read_bytes()
    assert vobject.readOne(first.stdout.decode(), validate=True).contents["name"][0].value


def test_an_update_in_place_leaves_an_unchanged_file_alone(run: Run, tmp_path: Path) -> None:
    file = tmp_path / "sky.ics"
    run("calendar", *YEAR, *FEW, "--out", "sky.ics")
    content, written = file.read_bytes(), file.stat().st_mtime_ns
    again = run("calendar", *YEAR, *FEW, "--update", "sky.ics")
    assert again.returncode == 0
    assert again.stdout == b""
    assert re.fullmatch(rb"\d+ unchanged\n", again.stderr)
    assert (file.read_bytes(), file.stat().st_mtime_ns) == (content, written)


def test_an_update_lists_what_changed_and_raises_it(run: Run, tmp_path: Path) -> None:
    run("calendar", *YEAR, *FEW, "--out", "sky.ics", "--name", "Evening sky, north")
    published = (tmp_path / "sky.ics").read_bytes()
    start = re.search(rb"UID:opposition-ecliptic-mars.*?DTSTART:(\w+)", published, re.DOTALL)[1]
    told = datetime.strptime(start.decode(), "%Y%m%dT%H%M%SZ")
    wrong = f"{told - timedelta(minutes=7):%Y%m%dT%H%M%SZ}".encode()
    (tmp_path / "sky.ics").write_bytes(published.replace(start, wrong))

    asked = (*YEAR, "--kind", "opposition", "--kind", "season_point")
    now = run("calendar", *asked, "--update", "sky.ics", "--out", "next.ics")
    assert now.returncode == 0
    assert (tmp_path / "sky.ics").read_bytes() == published.replace(start, wrong)
    lines = now.stderr.decode().splitlines()
    assert f"moved by +7 min: {told:%Y-%m-%d %H:%M} UTC, Mars at opposition to the Sun" in lines
    assert sum(line.startswith("added: 2027-") for line in lines) == 4  # two equinoxes, two solstices
    withdrawn = sum(line.startswith("withdrawn: 2027-") for line in lines)
    assert {"1 moved", "4 added", f"{withdrawn} withdrawn"} < set(lines[-1].split(", "))
    calendar = vobject.readOne((tmp_path / "next.ics").read_bytes().decode(), validate=True)
    assert calendar.contents["name"][0].value == "Evening sky, north"
    entries = calendar.vevent_list
    states = {entry.uid.value: (entry.status.value, int(entry.sequence.value)) for entry in entries}
    assert states_of(states, "greatest_elongation") == {("CANCELLED", 1)}
    assert states_of(states, "opposition-ecliptic-mars") == {("CONFIRMED", 1)}
    assert states_of(states, "opposition-ecliptic-neptune") == {("CONFIRMED", 0)}
    assert states_of(states, "season_point") == {("CONFIRMED", 0)}


def states_of(states: dict[str, tuple[str, int]], beginning: str) -> set[tuple[str, int]]:
    return {state for uid, state in states.items() if uid.startswith(beginning)}


def test_quiet_says_nothing_of_changes(run: Run) -> None:
    run("calendar", *YEAR, *FEW, "--out", "sky.ics")
    assert run("calendar", *YEAR, "--kind", "opposition", "--update", "sky.ics", "--quiet").stderr == b""


def test_an_update_that_must_repeat_takes_its_stamp_from_outside(run: Run, tmp_path: Path) -> None:
    run("calendar", *YEAR, *FEW, "--out", "sky.ics")
    asked = ("calendar", *YEAR, "--kind", "opposition", "--update", "sky.ics", "--out")
    for name in ("a.ics", "b.ics"):
        assert run(*asked, name, SOURCE_DATE_EPOCH="1800000000").returncode == 0
    assert (tmp_path / "a.ics").read_bytes() == (tmp_path / "b.ics").read_bytes()
    assert b"LAST-MODIFIED:20270115T080000Z" in (tmp_path / "a.ics").read_bytes()


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"hello\n", b"no iCalendar file"),
        (b"BEGIN:VCALENDAR\r\nVERSION:2.0\r\nPRODID:-//Other//EN\r\nEND:VCALENDAR\r\n", b"another program"),
    ],
)
def test_a_file_that_cannot_be_updated_stays_untouched(
    run: Run, tmp_path: Path, content: bytes, said: bytes
) -> None:
    file = tmp_path / "sky.ics"
    file.write_bytes(content)
    refused = run("calendar", *YEAR, *FEW, "--update", "sky.ics")
    assert refused.returncode == 1
    assert said in refused.stderr and b"sky.ics" in refused.stderr
    assert refused.stderr.count(b"\n") == 1
    assert file.read_bytes() == content
    assert list(tmp_path.iterdir()) == [file]


def test_an_update_of_nothing_is_refused(run: Run, tmp_path: Path) -> None:
    refused = run("calendar", *YEAR, *FEW, "--update", "sky.ics")
    assert (refused.returncode, refused.stderr.count(b"\n")) == (1, 1)
    assert list(tmp_path.iterdir()) == []


def test_split_writes_one_file_a_part_and_updates_the_folder(run: Run, tmp_path: Path) -> None:
    whole = run("calendar", *YEAR, *FEW, "--split", "body")
    assert whole.returncode == 0
    folder = tmp_path / "reports" / "calendars"
    files = {file.name: file.read_bytes() for file in folder.iterdir()}
    assert set(files) >= {"mercury.ics", "venus.ics", "mars.ics", "neptune.ics"}
    calendars = {name: vobject.readOne(content.decode(), validate=True) for name, content in files.items()}
    assert calendars["mars.ics"].contents["name"][0].value == "Sun, Moon and planets: Mars"
    uids = [entry.uid.value for calendar in calendars.values() for entry in calendar.vevent_list]
    assert len(uids) == len(set(uids))
    assert sorted(uids) == sorted(re.findall(r"UID:(\S+)", run("calendar", *YEAR, *FEW).stdout.decode()))

    (folder / "notes.ics").write_bytes(b"mine")
    again = run("calendar", *YEAR, "--kind", "opposition", "--split", "body", "--update", str(folder))
    assert again.returncode == 0
    assert (folder / "mars.ics").read_bytes() == files["mars.ics"]
    assert (folder / "venus.ics").read_bytes().count(b"STATUS:CANCELLED") == files["venus.ics"].count(b"UID")
    assert (folder / "notes.ics").read_bytes() == b"mine"


@pytest.mark.parametrize(("update", "more"), [("sky.ics", ("--split", "year")), ("folder", ())])
def test_a_file_and_a_folder_are_not_mixed_up(
    run: Run, tmp_path: Path, update: str, more: tuple[str, ...]
) -> None:
    (tmp_path / "sky.ics").touch()
    (tmp_path / "folder").mkdir()
    refused = run("calendar", *YEAR, *FEW, "--update", update, *more)
    assert (refused.returncode, refused.stderr.count(b"\n")) == (2, 1)


def test_alarms_are_shown_so_many_minutes_before(run: Run) -> None:
    content = run("calendar", *YEAR, "--kind", "season_point", "--alarm", "60", "--alarm", "10080").stdout
    entries = IcsCalendarStream.calendar_from_ics(content.decode()).events
    before = {timedelta(minutes=-60), timedelta(days=-7)}
    assert all({alarm.trigger for alarm in entry.alarm} == before for entry in entries)
    assert len(entries) == 4


def test_frames_are_chosen_as_in_the_almanac(run: Run) -> None:
    content = run("calendar", *YEAR, "--kind", "station", "--body", "mars", "--frame", "equator").stdout
    assert re.findall(rb"UID:station-(\w+)-mars", content) == [b"equator", b"equator"]
    assert b"in right ascension" in content


def test_meetings_with_stars_and_wide_ones_can_be_left_out(run: Run) -> None:
    asked = ("calendar", *YEAR, "--kind", "appulse", "--body", "venus")
    every = run(*asked).stdout
    few = run(*asked, "--stars", "none", "--within", "2.0").stdout
    assert every.count(b"regulus") > 0 and few.count(b"regulus") == 0
    stated = [float(angle) for angle in re.findall(rb"Separation: ([\d.]+) degrees", few)]
    assert 0 < len(stated) and max(stated) <= 2.0
    assert max(float(angle) for angle in re.findall(rb"Separation: ([\d.]+) degrees", every)) > 2.0


def test_a_stamp_that_is_no_time_is_refused(run: Run, tmp_path: Path) -> None:
    run("calendar", *YEAR, *FEW, "--out", "sky.ics")
    for stamp in ("yesterday", "9" * 30):
        refused = run("calendar", *YEAR, *FEW, "--update", "sky.ics", SOURCE_DATE_EPOCH=stamp)
        assert (refused.returncode, refused.stderr.count(b"\n")) == (2, 1)


def test_a_date_from_before_many_calendar_programs_is_warned_of(run: Run) -> None:
    old = run("calendar", "--from", "1950", "--to", "1951", "--kind", "season_point")
    assert (old.returncode, old.stdout.count(b"BEGIN:VEVENT")) == (0, 4)
    assert b"4 events outside the years 1970 to 2100" in old.stderr


@pytest.mark.parametrize(
    ("arguments", "status"),
    [
        (("--from", "2028", "--to", "2027"), 2),
        (("--from", "2027-02-30"), 2),
        ((*YEAR, "--kind", "oposition"), 2),
        ((*YEAR, "--body", "vulcan"), 2),
        ((*YEAR, "--alarm", "-5"), 2),
        ((*YEAR, "--split", "month"), 2),
        (("--from", "2200", "--to", "2201"), 1),
        ((*YEAR, "--out", "missing.ics/sky.ics/"), 1),
    ],
)
def test_bad_requests_end_in_one_line_and_write_nothing(
    run: Run, tmp_path: Path, arguments: tuple[str, ...], status: int
) -> None:
    (tmp_path / "missing.ics").write_bytes(b"")
    refused = run("calendar", *FEW, *arguments)
    assert refused.returncode == status
    assert refused.stderr.count(b"\n") == 1
    assert b"Traceback" not in refused.stderr
    assert refused.stdout == b""
    assert [file.name for file in tmp_path.iterdir()] == ["missing.ics"]


def test_help_shows_a_worked_example(run: Run) -> None:
    shown = subprocess.run(
        [sys.executable, "-m", "wanderers", "calendar", "--help"], capture_output=True, check=True, timeout=60
    ).stdout.decode()
    assert shown.count("Example:") >= 1
    assert "wanderers calendar --from 2027" in shown
