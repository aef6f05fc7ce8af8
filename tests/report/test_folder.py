"""The report folder: what it holds, and that a half of it never stands under the final name."""

from __future__ import annotations

import filecmp
import json
import struct
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import polars as pl
import pytest
from icalendar import Calendar
from polars.testing import assert_frame_equal

from tests.report.calendar_samples import ONE_OF_EVERY_KIND, event, table
from tests.report.report_samples import HALF_A_YEAR, MARS_SEASON, REQUEST, half_a_year, made_up, with_instants
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.errors import OutputError
from wanderers.events.kinds import Kind
from wanderers.report import folder, pictures
from wanderers.report.contents import Contents, track_step_days
from wanderers.report.folder import LITTER, MANIFEST, PAGE, calendar_events, require_replaceable, write_report


@pytest.fixture(scope="module")
def cache(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("cache")


@pytest.fixture(scope="module")
def contents(cache: Path) -> Contents:
    return half_a_year(cache)


@pytest.fixture(scope="module")
def report(contents: Contents, tmp_path_factory: pytest.TempPathFactory) -> Path:
    place = tmp_path_factory.mktemp("reports") / "half_a_year"
    write_report(contents, place)
    return place


def names(place: Path) -> set[str]:
    return {path.relative_to(place).as_posix() for path in place.rglob("*") if path.is_file()}


def test_it_holds_page_tables_pictures_calendar_and_its_own_list(report: Path) -> None:
    planets = ("venus", "mars", "jupiter")
    tables = ["events", "seasons", "side_by_side", *(f"track_{planet}" for planet in planets)]
    drawn = [
        "overview",
        *(f"{p}_{what}" for p in planets for what in ("longitude", "distance_magnitude_diameter")),
    ]
    days = {"jupiter": "2026-12-13", "mars": "2027-01-10"}
    drawn += [f"{planet}_{what}_{day}" for planet, day in days.items() for what in ("path", "above")]
    expected = {f"{stem}.{kind}" for stem in tables for kind in ("csv", "parquet")}
    expected |= {f"pictures/{stem}.{kind}" for stem in drawn for kind in ("png", "svg", "pdf")}
    expected |= {f"pictures/{planet}_curves_{day}.svg" for planet, day in days.items()}
    expected |= {
        f"seasons/{season_id}.html" for season_id in pl.read_csv(report / "seasons.csv")["season_id"]
    }
    expected |= {f"seasons/{stem}.csv" for stem in ("marks", "stars", "meetings", "standing")}
    assert names(report) == expected | {PAGE, MANIFEST, "events.ics"}


def test_its_list_names_every_file_and_what_it_was_made_from(report: Path, contents: Contents) -> None:
    manifest = json.loads((report / MANIFEST).read_text())
    assert set(manifest["files"]) == names(report) - {MANIFEST}
    assert manifest["kernel_sha256"] == contents.kernel.sha256
    assert (manifest["from"], manifest["to"], manifest["scale"]) == ("2027-01-01", "2027-07-01", "utc")


def test_csv_and_parquet_hold_the_same(report: Path, contents: Contents) -> None:
    for stem, columns, table_of in (
        ("events", schema.EVENT_COLUMNS, contents.events),
        ("seasons", schema.SEASON_COLUMNS, contents.seasons),
        ("track_mars", schema.TRACK_COLUMNS, contents.tracks[Body.MARS]),
    ):
        written = pl.read_parquet(report / f"{stem}.parquet")
        assert_frame_equal(written, table_of)
        assert_frame_equal(pl.read_csv(report / f"{stem}.csv", schema_overrides=columns), written)
        assert written.height > 1


def test_every_event_is_in_the_calendar(report: Path, contents: Contents) -> None:
    entries = Calendar.from_ical((report / "events.ics").read_bytes()).walk("VEVENT")
    found = {str(entry["UID"]).partition("@")[0] for entry in entries}
    assert found == set(contents.events["event_id"])


def test_pictures_are_whole_and_the_page_holds_the_drawings(report: Path) -> None:
    for path in (report / "pictures").iterdir():
        head = path.read_bytes()[:24]
        if path.suffix == ".png":
            assert head[:8] == b"\x89PNG\r\n\x1a\n"
            assert struct.unpack(">I", head[16:20])[0] >= 1200  # PNG, 11.2.2: the width in IHDR
        else:
            assert head.startswith({".svg": b"<svg", ".pdf": b"%PDF-1."}[path.suffix])
    drawings = [
        path
        for path in (report / "pictures").glob("*.svg")
        if not {"above", "curves"} & set(path.stem.split("_"))  # those stand in the dossiers
    ]
    assert (report / PAGE).read_text().count("data:image/svg+xml,") == len(drawings)


def test_the_same_contents_give_the_same_folder(report: Path, contents: Contents, tmp_path: Path) -> None:
    again = tmp_path / report.name
    write_report(contents, again)
    assert names(again) == names(report)
    _, differing, unreadable = filecmp.cmpfiles(report, again, names(report), shallow=False)
    assert (differing, unreadable) == ([], [])


def test_the_track_follows_the_span_and_the_frame(contents: Contents) -> None:
    track = contents.tracks[Body.MARS]
    assert track["jd_tt"][0] == HALF_A_YEAR.jd_from
    assert track["jd_tt"][-1] < HALF_A_YEAR.jd_to
    own = contents.seasons.filter(pl.col("body") == Body.MARS.value)
    assert contents.courses[Body.MARS]["jd_tt"][0] < own["first_pass_start_jd_tt"].min()  # type: ignore[operator]


def test_seasons_that_only_reach_into_the_span_are_there(contents: Contents) -> None:
    # Jupiter turned retrograde on 2026-12-13 (skyfield 1.55 on DE421, measured)
    assert contents.seasons["body"].to_list() == ["jupiter", "mars"]


@pytest.mark.parametrize(
    ("days", "step"), [(730.0, 1.0), (100.0, 1.0), (30.0, 0.25), (5.0, 1.0 / 24.0), (0.01, 1 / 1440)]
)
def test_short_spans_have_finer_tracks(days: float, step: float) -> None:
    assert track_step_days(days) == step


# A made-up report: no pictures, quick to write


def test_an_older_report_is_replaced_as_a_whole(tmp_path: Path) -> None:
    place = tmp_path / "reports" / "one"
    write_report(made_up(), place)
    (place / "events.csv").write_text("stale")
    (place / ".DS_Store").write_bytes(b"")
    write_report(made_up(seasons=[MARS_SEASON]), place)
    assert "stale" not in (place / "events.csv").read_text()
    assert not (place / ".DS_Store").exists()
    assert [path.name for path in place.parent.iterdir()] == ["one"]


@pytest.mark.parametrize("file", ["notes.txt", "pictures/mine.png", ".git/config"])
def test_a_folder_that_holds_anything_else_is_left_alone(tmp_path: Path, file: str) -> None:
    place = tmp_path / "one"
    write_report(made_up(), place)
    (place / file).parent.mkdir(exist_ok=True)
    (place / file).write_text("dear")
    before = {name: (place / name).read_bytes() for name in names(place)}
    with pytest.raises(OutputError, match=file):
        write_report(made_up(seasons=[MARS_SEASON]), place)
    assert {name: (place / name).read_bytes() for name in names(place)} == before
    assert [path.name for path in tmp_path.iterdir()] == ["one"]


@pytest.mark.parametrize("manifest", ["", "[]", "{", '{"made_by": "another", "files": ["events.csv"]}'])
def test_a_list_of_another_program_proves_nothing(tmp_path: Path, manifest: str) -> None:
    (tmp_path / "events.csv").write_text("dear")
    (tmp_path / MANIFEST).write_text(manifest)
    with pytest.raises(OutputError, match=r"events\.csv"):
        require_replaceable(tmp_path)


def test_an_empty_folder_and_desktop_litter_may_be_replaced(tmp_path: Path) -> None:
    place = tmp_path / "empty"
    place.mkdir()
    (place / sorted(LITTER)[0]).write_bytes(b"")
    write_report(made_up(), place)
    assert (place / PAGE).is_file()


def test_a_file_in_the_way_is_told(tmp_path: Path) -> None:
    (tmp_path / "report").write_text("")
    with pytest.raises(OutputError, match="file, not a folder"):
        require_replaceable(tmp_path / "report")
    with pytest.raises(OutputError, match="file, not a folder"):
        require_replaceable(tmp_path / "report" / "deeper")


@pytest.mark.parametrize("failure", [KeyboardInterrupt, OSError("disk full"), RuntimeError("bug")])
@pytest.mark.parametrize("older", [False, True])
def test_an_interrupted_report_leaves_what_was_there(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, failure: BaseException, older: bool
) -> None:
    place = tmp_path / "one"
    if older:
        write_report(made_up(), place)
    before = {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()}

    def fail(*arguments: object, **options: object) -> str:
        raise failure

    monkeypatch.setattr(folder, "rendered", fail)
    with pytest.raises((KeyboardInterrupt, OutputError, RuntimeError)):
        write_report(made_up(seasons=[MARS_SEASON]), place)
    assert {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()} == before
    assert len(list(tmp_path.iterdir())) == older
    monkeypatch.undo()
    write_report(made_up(), place)
    assert (place / PAGE).is_file()


def test_an_interruption_between_the_two_renames_brings_the_older_report_back(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    place = tmp_path / "one"
    write_report(made_up(), place)
    before = (place / PAGE).read_bytes()
    rename: Callable[[Path, Path], Path] = Path.rename

    def interrupted(source: Path, target: Path) -> Path:
        if target == place and (source / MANIFEST).is_file() and "tmp" in source.name and calls:
            calls.pop()
            raise KeyboardInterrupt
        return rename(source, target)

    calls = ["once"]
    monkeypatch.setattr(Path, "rename", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_report(made_up(seasons=[MARS_SEASON]), place)
    assert calls == []
    assert (place / PAGE).read_bytes() == before
    assert [path.name for path in tmp_path.iterdir()] == ["one"]


def test_a_symbolic_link_is_followed(tmp_path: Path) -> None:
    real, link = tmp_path / "real", tmp_path / "link"
    real.mkdir()
    link.symlink_to(real)
    write_report(made_up(), link)
    assert link.is_symlink()
    assert (real / PAGE).is_file()


# The calendar of a report


def test_years_that_no_calendar_holds_are_left_out() -> None:
    rows = [
        event("station", f"{year}-03-01T00:00:00.000Z", detail="direct", frame="ecliptic")
        for year in ("-0500", "0000", "0001", "+12027")
    ]
    kept, _ = calendar_events(table(*rows))
    assert kept["utc"].to_list() == ["0001-03-01T00:00:00.000Z"]


def test_a_calendar_too_large_drops_stars_first_then_the_moon(monkeypatch: pytest.MonkeyPatch) -> None:
    def row(number: int, body: str, other: str | None = None, kind: str = "conjunction") -> dict[str, object]:
        return event(
            kind, f"2027-01-{number:02d}T00:00:00.000Z", body=body, other=other, event_id=f"{number}"
        )

    rows = [
        row(1, "moon", "Spica"),
        row(2, "moon", "mars"),
        row(3, "venus", "mars"),
        row(4, "moon", kind="moon_phase"),
    ]
    rows += [row(5, "mars", kind="constellation_entry")]
    for most, kept_ids, words in (
        (5, "12345", ""),
        (4, "234", "stars"),
        (2, "34", "Moon"),
        (1, "3", "after the first 1"),
    ):
        monkeypatch.setattr(folder, "CALENDAR_AT_MOST", most)
        kept, holds = calendar_events(table(*rows))
        assert "".join(kept["event_id"]) == kept_ids
        assert words in holds
        assert ("left out" in holds) == (most < 5)


# Names and pictures


def test_a_report_is_named_by_its_span_and_what_else_was_chosen() -> None:
    assert REQUEST.stem == "2027-01-01_to_2029-01-01"
    assert replace(REQUEST, bodies=(Body.MARS,)).stem == "2027-01-01_to_2029-01-01_mars"
    assert replace(REQUEST, kinds=(Kind.STATION, Kind.NODE)).stem.endswith("_station+node")
    assert HALF_A_YEAR.stem == "2027-01-01_to_2027-07-01_5-bodies"
    assert replace(REQUEST, frames=(Frame.ECLIPTIC, Frame.EQUATOR)).stem.endswith("_ecliptic+equator")
    tt = replace(REQUEST, scale="tt").stem
    assert tt.endswith("_tt")
    assert ":" not in tt


def test_pictures_beyond_the_pages_room_stand_in_their_files_only(
    contents: Contents, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    wanted = pictures.jobs(contents)[:2]
    monkeypatch.setattr(pictures, "jobs", lambda contents: wanted)
    first = len(pictures.drawn_into(tmp_path, wanted[0]).source)
    monkeypatch.setattr(pictures, "INLINE_BYTES", first)
    drawn = pictures.draw(contents, tmp_path / "pictures")
    assert [bool(picture.svg) for picture in drawn] == [True, False]
    assert len(list((tmp_path / "pictures").iterdir())) == 2 * len(wanted[0].formats)


def test_no_planet_no_picture(tmp_path: Path) -> None:
    write_report(made_up(), tmp_path / "one")
    assert list((tmp_path / "one" / "pictures").iterdir()) == []


def test_the_made_up_events_are_all_written(tmp_path: Path) -> None:
    write_report(made_up(), tmp_path / "one")
    assert_frame_equal(pl.read_parquet(tmp_path / "one" / "events.parquet"), with_instants(ONE_OF_EVERY_KIND))
