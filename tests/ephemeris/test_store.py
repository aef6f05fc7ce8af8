"""Tracks on disk: built once, kept, and the same from any executor."""

from __future__ import annotations

import multiprocessing
import sys
from collections.abc import Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from pathlib import Path

import numpy as np
import pytest

from tests.ephemeris.small_store import FIRST, SEAM_JD, SECOND, Told, answers, block_files
from wanderers import seals
from wanderers.arrays import Floats
from wanderers.ephemeris import store as store_module
from wanderers.ephemeris.blocks import block_start_jd
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.kernels import Kernel, inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.tracks import POSITION

SIX_BLOCKS = range(15, 21)
"""1926 to 2076: more than stay in memory, and wanted by other tests too."""


# ---- building and keeping


def test_blocks_are_built_on_demand_and_progress_is_told(small: Kernel, tmp_path: Path) -> None:
    told: list[tuple[int, int]] = []
    store = TrackStore(small, tmp_path, progress=lambda done, total: told.append((done, total)))
    store.tracks(SEAM_JD - 100.0, SEAM_JD - 50.0)
    assert [path.name for path in block_files(tmp_path)] == ["block+017.npz"]
    assert told == [(1, 1)]
    store.tracks(SEAM_JD - 100.0, SEAM_JD + 50.0)
    assert [path.name for path in block_files(tmp_path)] == ["block+017.npz", "block+018.npz"]
    assert told == [(1, 1), (1, 1)]
    store.tracks(SEAM_JD - 100.0, SEAM_JD + 50.0)
    assert told == [(1, 1), (1, 1)]


def test_progress_counts_up_to_all_missing_blocks(small: Kernel, tmp_path: Path) -> None:
    told: list[tuple[int, int]] = []
    store = TrackStore(small, tmp_path, progress=lambda done, total: told.append((done, total)))
    store.ensure([FIRST, SECOND])
    assert told == [(1, 2), (2, 2)]


def test_a_warm_store_answers_like_a_cold_one_to_the_last_bit(
    small: Kernel, tmp_path: Path, expected: Floats
) -> None:
    told = Told()
    cold = answers(TrackStore(small, tmp_path, warn=told))
    warm = answers(TrackStore(small, tmp_path, warn=told))
    assert np.array_equal(cold, expected)
    assert np.array_equal(warm, expected)
    assert told.lines == []


def test_blocks_are_not_written_again(small: Kernel, filled: Path) -> None:
    before = [(path.name, path.stat().st_mtime_ns, path.stat().st_ino) for path in block_files(filled)]
    answers(TrackStore(small, filled))
    assert [(p.name, p.stat().st_mtime_ns, p.stat().st_ino) for p in block_files(filled)] == before


def test_span_and_blocks_are_cut_to_the_kernel(small: Kernel, tmp_path: Path) -> None:
    store = TrackStore(small, tmp_path)
    low, high = store.span_jd
    assert low == small.jd_tdb_start + 0.5
    assert high == small.jd_tdb_end - 0.1
    assert list(store.block_indices(0.0, 1e7)) == [FIRST, SECOND]
    assert list(store.block_indices(SEAM_JD, SEAM_JD)) == [SECOND]
    assert list(store.block_indices(0.0, 1.0)) == [FIRST]
    assert list(store.block_indices(1e7, 2e7)) == [SECOND]


def test_only_a_few_blocks_stay_in_memory_and_all_are_answered(store: TrackStore) -> None:
    fresh = TrackStore(store.kernel, store.folder)
    start, end = block_start_jd(SIX_BLOCKS[0]), block_start_jd(SIX_BLOCKS[-1] + 1)
    tracks = fresh.tracks(start, end - 1.0)
    assert len(fresh._recent) <= store_module.BLOCKS_IN_MEMORY
    assert (tracks.start_jd, tracks.end_jd) == pytest.approx((start, end), abs=1e-6)


# ---- which folder


def test_another_kernel_has_another_folder(small: Kernel, de421_store: TrackStore, tmp_path: Path) -> None:
    TrackStore(small, tmp_path).ensure([SECOND])
    TrackStore(de421_store.kernel, tmp_path).ensure([SECOND])
    one, two = block_files(tmp_path)
    assert one.parent != two.parent
    assert one.name == two.name


def test_a_copy_of_a_kernel_shares_its_tracks(small: Kernel, small_kernel: Path, filled: Path) -> None:
    copy = filled / "renamed.bsp"
    copy.write_bytes(small_kernel.read_bytes())
    told: list[tuple[int, int]] = []
    store = TrackStore(inspect_kernel(copy), filled, progress=lambda done, total: told.append((done, total)))
    store.ensure([FIRST, SECOND])
    assert told == []


# ---- who builds


class Immediately(Executor):
    """Runs what it is given at once, in the caller's thread."""

    def __init__(self) -> None:
        self.count = 0

    def submit(self, fn, /, *args, **kwargs):  # type: ignore[no-untyped-def]
        self.count += 1
        future: Future[object] = Future()
        try:
            future.set_result(fn(*args, **kwargs))
        except BaseException as error:
            future.set_exception(error)
        return future


@pytest.fixture(params=["process", "thread", "immediate"])
def executor(request: pytest.FixtureRequest) -> Iterator[Executor]:
    if request.param == "immediate":
        yield Immediately()
    elif request.param == "thread":
        with ThreadPoolExecutor(2) as pool:
            yield pool
    else:
        with ProcessPoolExecutor(2, mp_context=multiprocessing.get_context("spawn")) as pool:
            yield pool


def test_any_executor_builds_the_same_blocks(
    small: Kernel, tmp_path: Path, expected: Floats, executor: Executor
) -> None:
    told: list[tuple[int, int]] = []
    store = TrackStore(small, tmp_path, executor, progress=lambda done, total: told.append((done, total)))
    assert np.array_equal(answers(store), expected)
    assert told == [(1, 2), (2, 2)]
    assert len(block_files(tmp_path)) == 2


def test_the_executor_given_is_used_for_missing_blocks_alone(small: Kernel, tmp_path: Path) -> None:
    executor = Immediately()
    store = TrackStore(small, tmp_path, executor)
    store.ensure([FIRST])
    store.ensure([FIRST, SECOND])
    store.ensure([FIRST, SECOND])
    assert executor.count == 2


# ---- interruptions and folders that cannot be written


class Interrupted(Immediately):
    """Finishes the first piece of work; then the user presses Ctrl-C."""

    def submit(self, fn, /, *args, **kwargs):  # type: ignore[no-untyped-def]
        if self.count == 0:
            return super().submit(fn, *args, **kwargs)
        future: Future[object] = Future()
        future.set_exception(KeyboardInterrupt())
        return future


def test_an_interrupted_build_keeps_what_was_finished(
    small: Kernel, tmp_path: Path, expected: Floats
) -> None:
    finished: list[int] = []
    store = TrackStore(small, tmp_path, Interrupted(), progress=lambda done, total: finished.append(done))
    with pytest.raises(KeyboardInterrupt):
        store.ensure([FIRST, SECOND])
    kept = block_files(tmp_path)
    assert [path.suffix for path in kept] == [".npz"] * len(finished)  # and no temporary files
    executor, told = Immediately(), Told()
    assert np.array_equal(answers(TrackStore(small, tmp_path, executor, warn=told)), expected)
    assert executor.count == 2 - len(kept)
    assert told.lines == []


def test_a_write_that_breaks_off_leaves_no_file_behind(
    small: Kernel, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def breaks_off(file: object, **members: object) -> None:
        file.write(b"half a block")  # type: ignore[attr-defined]
        raise KeyboardInterrupt

    monkeypatch.setattr(store_module.np, "savez", breaks_off)
    with pytest.raises(KeyboardInterrupt):
        TrackStore(small, tmp_path).ensure([SECOND])
    assert block_files(tmp_path) == []


def assert_works_with_warnings(store: TrackStore, told: Told, expected: Floats) -> None:
    assert np.array_equal(answers(store), expected)
    assert told.lines
    assert all("cannot be written" in line and "\n" not in line for line in told.lines)
    assert all(str(store.folder) in line for line in told.lines)


def test_a_cache_folder_that_is_a_file_only_warns(small: Kernel, tmp_path: Path, expected: Floats) -> None:
    folder, told = tmp_path / "file", Told()
    folder.write_text("in the way")
    assert_works_with_warnings(TrackStore(small, folder, warn=told), told, expected)
    assert folder.read_text() == "in the way"


def test_a_full_or_protected_cache_folder_only_warns(
    small: Kernel, tmp_path: Path, expected: Floats, monkeypatch: pytest.MonkeyPatch
) -> None:
    # The superuser may write anywhere, hence by hand.
    def refuse(path: Path, content: bytes) -> None:
        raise PermissionError(13, "Permission denied", str(path))

    monkeypatch.setattr(seals, "write_bytes_atomically", refuse)
    told = Told()
    assert_works_with_warnings(TrackStore(small, tmp_path, warn=told), told, expected)
    assert "Permission denied" in told.lines[0]


# ---- threads


def test_threads_may_share_a_store(store: TrackStore, monkeypatch: pytest.MonkeyPatch) -> None:
    # Reading is made quick and threads change often, so that what is rare shows at once.
    store.ensure(SIX_BLOCKS)
    fresh = TrackStore(store.kernel, store.folder)
    held = {index: store_module.read_block(store._path(index), index, store._stamp(), store.kernel.bodies)
            for index in SIX_BLOCKS}  # fmt: skip
    monkeypatch.setattr(store_module, "read_block", lambda path, index, stamp, bodies: held[index])
    before = sys.getswitchinterval()
    sys.setswitchinterval(1e-6)

    def read_all(seed: int) -> None:
        for index in np.random.default_rng(seed).choice(list(held), 3000).tolist():
            assert fresh._block(index).index == index

    try:
        with ThreadPoolExecutor(8) as pool:
            for _ in range(5):
                list(pool.map(read_all, range(16)))
    finally:
        sys.setswitchinterval(before)


def test_bodies_of_a_store_are_those_of_its_kernel(small: Kernel, filled: Path) -> None:
    tracks = TrackStore(small, filled).tracks(SEAM_JD, SEAM_JD + 1.0)
    assert tracks.bodies == small.bodies
    with pytest.raises(LookupError):
        tracks.evaluate(Body.MOON, np.array([SEAM_JD]), POSITION)


def test_a_body_that_the_kernel_lacks_has_no_place(small: Kernel, filled: Path) -> None:
    tracks = TrackStore(small, filled).tracks(SEAM_JD, SEAM_JD + 1.0)
    with pytest.raises(LookupError):
        tracks.evaluate_each(np.array([Body.PLUTO.order]), np.array([SEAM_JD]), POSITION)
