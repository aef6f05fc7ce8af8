"""Kept almanacs: what would be found anew, never another question's, another program's or damaged."""

from __future__ import annotations

import os
import shutil
from collections.abc import Callable
from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal

from wanderers import seals
from wanderers.ephemeris.blocks import BLOCK_DAYS, block_start_jd
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events import kept
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kept import kept_almanac
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits

SEAMS_JD = [block_start_jd(index) for index in (17, 18, 19)]
KINDS = frozenset({Kind.STATION, Kind.CONJUNCTION, Kind.TRANSIT, Kind.OPPOSITION})
QUERY = Query(SEAMS_JD[0] - 900.0, SEAMS_JD[1] + 900.0, KINDS, choice=Choice(PLANETS, stars_for=()))
"""Two pieces that are cut off and a whole one between them."""


@pytest.fixture
def told() -> list[str]:
    return []


@pytest.fixture
def own(kernel: Kernel, cache_folder: Path, tmp_path: Path, told: list[str]) -> TrackStore:
    """A store whose tracks are the suite's and whose events are its own."""
    (tmp_path / "tracks").symlink_to(cache_folder / "tracks", target_is_directory=True)
    return TrackStore(kernel, tmp_path, warn=told.append)


@pytest.fixture
def found(monkeypatch: pytest.MonkeyPatch) -> list[Query]:
    """What had to be found anew, in order."""
    asked: list[Query] = []

    def noted(store: TrackStore, query: Query) -> pl.DataFrame:
        asked.append(query)
        return almanac(store, query)

    monkeypatch.setattr(kept, "almanac", noted)
    return asked


def files(store: TrackStore) -> list[Path]:
    return sorted((store.folder / kept.FOLDER).glob("*"), key=lambda path: path.name)


def piece_file(store: TrackStore, jd_from: float, jd_to: float) -> Path:
    path = kept._path(store, replace(QUERY, jd_from=jd_from, jd_to=jd_to))
    assert path.is_file()
    return path


def ids(events: pl.DataFrame) -> list[str]:
    names: list[str] = events["event_id"].to_list()
    return names


# ---- the same events


def test_asked_again_everything_is_read_and_nothing_found(own: TrackStore, found: list[Query]) -> None:
    first = kept_almanac(own, QUERY)
    assert found == [QUERY]
    again = kept_almanac(own, QUERY)
    assert found == [QUERY]
    expected = almanac(own, QUERY)
    assert expected.height > 500
    assert_frame_equal(first, expected, check_exact=True)
    assert_frame_equal(again, expected, check_exact=True)


def test_every_kind_and_column_comes_back_as_it_was(own: TrackStore, found: list[Query]) -> None:
    every = Query(SEAMS_JD[0] - 30.0, SEAMS_JD[1] + 30.0, frames=frozenset(Frame))
    first, again = kept_almanac(own, every), kept_almanac(own, every)
    assert len(found) == 1
    assert set(first["kind"]) == {kind.value for kind in Kind}
    assert_frame_equal(again, first, check_exact=True)


def test_a_longer_span_finds_only_what_is_missing(own: TrackStore, found: list[Query]) -> None:
    middle = replace(QUERY, jd_from=SEAMS_JD[0], jd_to=SEAMS_JD[1])
    kept_almanac(own, middle)
    longer = replace(QUERY, jd_to=SEAMS_JD[2] + 50.0)
    events = kept_almanac(own, longer)
    before = replace(longer, jd_to=SEAMS_JD[0])
    after = replace(longer, jd_from=SEAMS_JD[1])
    assert found == [middle, before, after]  # neighbours are found together
    expected = almanac(own, longer)
    assert ids(events) == ids(expected)
    np.testing.assert_allclose(events["jd_tt"], expected["jd_tt"], rtol=0.0, atol=2e-9)
    assert_frame_equal(events.drop("jd_tt"), expected.drop("jd_tt"), abs_tol=1e-7)


def test_a_short_span_is_found_anew_and_leaves_nothing(own: TrackStore, found: list[Query]) -> None:
    short = replace(QUERY, jd_to=QUERY.jd_from + BLOCK_DAYS - 1.0)
    assert_frame_equal(kept_almanac(own, short), kept_almanac(own, short))
    assert found == [short, short]
    assert files(own) == []


def test_pieces_without_events_are_kept_too(own: TrackStore, found: list[Query]) -> None:
    rare = replace(QUERY, kinds=frozenset({Kind.TRANSIT}), choice=Choice((Body.VENUS,), stars_for=()))
    # None between 1882 and 2004: Espenak, Six Millennium Catalog of Venus Transits.
    rare = replace(rare, jd_from=block_start_jd(14) - 9.0, jd_to=block_start_jd(16))
    assert kept_almanac(own, rare).is_empty() and kept_almanac(own, rare).is_empty()
    assert found == [rare]
    assert kept_almanac(own, rare).schema == almanac(own, rare).schema


def test_a_span_beyond_the_kernel_ends_with_it(own: TrackStore, found: list[Query]) -> None:
    low, _ = own.span_jd
    early = replace(QUERY, jd_from=low - 5_000.0, jd_to=low + BLOCK_DAYS + 10.0)
    first, again = kept_almanac(own, early), kept_almanac(own, early)
    assert len(found) == 1
    assert_frame_equal(again, first, check_exact=True)
    assert ids(first) == ids(almanac(own, early))


# ---- only what was asked, by this program


OTHERS: dict[str, Callable[[Query], Query]] = {
    "jd_from": lambda query: replace(query, jd_from=np.nextafter(query.jd_from, 0.0)),
    "jd_to": lambda query: replace(query, jd_to=np.nextafter(query.jd_to, np.inf)),
    "kinds": lambda query: replace(query, kinds=query.kinds - {Kind.TRANSIT}),
    "frames": lambda query: replace(query, frames=frozenset(Frame)),
    "choice": lambda query: replace(query, choice=replace(query.choice, limits=Limits(moon_deg=6.1))),
}


@pytest.mark.parametrize("name", [field.name for field in fields(Query)])
def test_another_question_has_another_file(own: TrackStore, name: str) -> None:
    assert kept._path(own, OTHERS[name](QUERY)) != kept._path(own, QUERY)


def test_the_order_in_which_a_set_was_made_does_not_matter(own: TrackStore) -> None:
    kinds = sorted(KINDS)
    names = {kept._path(own, replace(QUERY, kinds=frozenset(order))) for order in (kinds, kinds[::-1])}
    assert len(names) == 1


def test_another_kernel_has_another_file(own: TrackStore, de421_store: TrackStore) -> None:
    assert kept._path(own, QUERY).name != kept._path(de421_store, QUERY).name


@pytest.mark.parametrize(
    ("file", "decides"),
    [
        ("events/stations.py", True),
        ("ephemeris/nutation.py", True),
        ("data/ecliptic_stars.csv", True),
        ("constants.py", True),
        ("report/words.py", False),
        ("site/rules.py", False),
    ],
)
def test_a_changed_program_reads_nothing_of_its_forerunner(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, file: str, decides: bool
) -> None:
    package = tmp_path / "wanderers"
    shutil.copytree(kept.PACKAGE, package, ignore=shutil.ignore_patterns("__pycache__"))
    monkeypatch.setattr(kept, "PACKAGE", package)
    digest = kept.program_digest.__wrapped__
    before = digest()
    with (package / file).open("a", encoding="utf-8") as changed:
        changed.write("\n")
    assert (digest() != before) is decides


def test_the_digest_reads_finders_and_data_where_they_are() -> None:
    decisive = {path.relative_to(kept.PACKAGE).as_posix() for path in kept.decisive_files()}
    assert {"events/stations.py", "ephemeris/tracks.py", "data/ecliptic_stars.csv", "schema.py"} <= decisive


# ---- damage


def flipped(path: Path, store: TrackStore) -> None:
    content = bytearray(path.read_bytes())
    content[len(content) // 2] ^= 0x10
    path.write_bytes(content)


def truncated(path: Path, store: TrackStore) -> None:
    path.write_bytes(path.read_bytes()[:-100])


def emptied(path: Path, store: TrackStore) -> None:
    path.write_bytes(b"")


def neighbour(path: Path, store: TrackStore) -> None:
    path.write_bytes(next(one for one in files(store) if one != path).read_bytes())


def bare_table(path: Path, store: TrackStore) -> None:
    pl.DataFrame({"kind": ["station"]}).write_parquet(path)


def folder(path: Path, store: TrackStore) -> None:
    path.unlink()
    path.mkdir()


@pytest.mark.parametrize("damage", [flipped, truncated, emptied, neighbour, bare_table])
def test_a_damaged_or_foreign_file_is_found_anew_with_one_warning(
    own: TrackStore, found: list[Query], told: list[str], damage: Callable[[Path, TrackStore], None]
) -> None:
    expected = kept_almanac(own, QUERY)
    path = piece_file(own, SEAMS_JD[0], SEAMS_JD[1])
    damage(path, own)
    assert ids(kept_almanac(own, QUERY)) == ids(expected)
    assert len(told) == 1 and str(path) in told[0] and "\n" not in told[0]
    assert found == [QUERY, replace(QUERY, jd_from=SEAMS_JD[0], jd_to=SEAMS_JD[1])]
    assert ids(kept_almanac(own, QUERY)) == ids(expected)
    assert len(told) == 1 and len(found) == 2


def test_many_damaged_files_get_one_warning(own: TrackStore, told: list[str]) -> None:
    expected = kept_almanac(own, QUERY)
    for path in files(own):
        truncated(path, own)
    assert ids(kept_almanac(own, QUERY)) == ids(expected)
    assert len(told) == 1 and "and 2 more" in told[0]


def test_a_folder_in_the_way_only_warns(own: TrackStore, told: list[str]) -> None:
    expected = kept_almanac(own, QUERY)
    folder(piece_file(own, SEAMS_JD[0], SEAMS_JD[1]), own)
    assert ids(kept_almanac(own, QUERY)) == ids(expected)
    assert len(told) == 2 and "cannot be read (Is a directory)" in told[0] and "not kept" in told[1]


def test_a_protected_folder_only_warns(
    own: TrackStore, told: list[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    # The superuser may write anywhere, hence by hand.
    def refuse(path: Path, content: bytes) -> None:
        raise PermissionError(13, "Permission denied", str(path))

    monkeypatch.setattr(seals, "write_bytes_atomically", refuse)
    assert ids(kept_almanac(own, QUERY)) == ids(almanac(own, QUERY))
    assert len(told) == 1 and "Permission denied" in told[0]


# ---- room


def aged(paths: list[Path]) -> None:
    """Make files as old as their place: the first was read first."""
    for place, path in enumerate(paths):
        os.utime(path, (1e9 + place, 1e9 + place))


def test_what_was_not_read_for_longest_goes_first(own: TrackStore, monkeypatch: pytest.MonkeyPatch) -> None:
    kept_almanac(own, QUERY)
    kept_almanac(own, replace(QUERY, kinds=frozenset({Kind.STATION})))
    oldest_first = files(own)
    assert len(oldest_first) == 6
    aged(oldest_first)
    monkeypatch.setattr(kept, "MOST_BYTES", sum(path.stat().st_size for path in oldest_first))
    kept_almanac(own, replace(QUERY, kinds=frozenset({Kind.OPPOSITION})))
    left = files(own)
    assert sum(path.stat().st_size for path in left) <= kept.MOST_BYTES
    gone = [path not in left for path in oldest_first]
    assert 0 < sum(gone) < 6 and gone == sorted(gone, reverse=True)
    assert {path.suffix for path in left} == {kept.ENDING}


def test_reading_makes_a_file_young_again(own: TrackStore) -> None:
    kept_almanac(own, QUERY)
    aged(files(own))
    kept_almanac(own, QUERY)
    assert all(path.stat().st_mtime > 1.7e9 for path in files(own))
