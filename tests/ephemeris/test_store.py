"""Tracks on disk: built once, kept, checked when read, and never trusted blindly."""

from __future__ import annotations

import multiprocessing
import pickle
import sys
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from wanderers.arrays import Floats
from wanderers.ephemeris import store as store_module
from wanderers.ephemeris.blocks import block_start_jd
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.kernels import Kernel, inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.tracks import POSITION, ROTATION

FIRST, SECOND = 17, 18
"""The two blocks that the small kernel reaches into; the seam is at JD 2451920.5."""
SEAM_JD = 2_451_920.5
SIX_BLOCKS = range(15, 21)
"""1926 to 2076: more than stay in memory, and wanted by other tests too."""
JD_TT = np.linspace(SEAM_JD - 200.0, SEAM_JD + 200.0, 333)


@pytest.fixture(scope="module")
def small(small_kernel: Path) -> Kernel:
    return inspect_kernel(small_kernel)


@pytest.fixture(scope="module")
def expected(small: Kernel, tmp_path_factory: pytest.TempPathFactory) -> Floats:
    """What every store of the small kernel must give."""
    return answers(TrackStore(small, tmp_path_factory.mktemp("expected")))


def answers(store: TrackStore) -> Floats:
    """Positions and rotations on both sides of the seam, as one array."""
    tracks = store.tracks(float(JD_TT[0]), float(JD_TT[-1]))
    parts = [tracks.evaluate(body, JD_TT, POSITION, 2) for body in store.kernel.bodies]
    return np.concatenate([*parts, tracks.observer.evaluate(0, JD_TT, ROTATION, 2)], axis=1)


def block_files(folder: Path) -> list[Path]:
    return sorted(folder.glob("tracks/*/*"))


@pytest.fixture
def filled(small: Kernel, tmp_path: Path) -> Path:
    """A cache folder with both blocks in it."""
    TrackStore(small, tmp_path).ensure([FIRST, SECOND])
    assert len(block_files(tmp_path)) == 2
    return tmp_path


class Told:
    """Collects warnings."""

    def __init__(self) -> None:
        self.lines: list[str] = []

    def __call__(self, line: str) -> None:
        self.lines.append(line)


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


# ---- damage


def flipped(path: Path, place: float) -> None:
    content = bytearray(path.read_bytes())
    content[int(place * len(content))] ^= 0x10
    path.write_bytes(content)


def truncated(path: Path) -> None:
    path.write_bytes(path.read_bytes()[:-5000])


def half(path: Path) -> None:
    content = path.read_bytes()
    path.write_bytes(content[: len(content) // 2])


def emptied(path: Path) -> None:
    path.write_bytes(b"")


def text(path: Path) -> None:
    path.write_text("not a block\n" * 100)


def zeros(path: Path) -> None:
    path.write_bytes(bytes(path.stat().st_size))


def foreign_archive(path: Path) -> None:
    with path.open("wb") as file:
        np.savez(file, stamp=np.array("somebody else's"), data=np.arange(5.0))


def archive_without_stamp(path: Path) -> None:
    with path.open("wb") as file:
        np.savez(file, data=np.arange(5.0))


def single_array(path: Path) -> None:
    with path.open("wb") as file:
        np.save(file, np.arange(5.0))


def pickled(path: Path) -> None:
    path.write_bytes(pickle.dumps({"stamp": "anything"}))


def neighbour(path: Path) -> None:
    """The other block under this one's name."""
    (other,) = (one for one in path.parent.iterdir() if one != path)
    path.write_bytes(other.read_bytes())


DAMAGES: list[Callable[[Path], None]] = [
    *(lambda path, place=place: flipped(path, place) for place in (0.2, 0.5, 0.8)),
    truncated,
    half,
    emptied,
    text,
    zeros,
    foreign_archive,
    archive_without_stamp,
    single_array,
    pickled,
    neighbour,
]


def assert_rebuilt(small: Kernel, folder: Path, damaged: Path, expected: Floats) -> None:
    """One warning that names the file, the right answers, and a good file in its place."""
    told = Told()
    found = answers(TrackStore(small, folder, warn=told))
    assert np.array_equal(found, expected)
    assert len(told.lines) == 1
    assert str(damaged) in told.lines[0] and "\n" not in told.lines[0]
    after = Told()
    assert np.array_equal(answers(TrackStore(small, folder, warn=after)), expected)
    assert after.lines == []


@pytest.mark.parametrize("damage", DAMAGES, ids=lambda damage: damage.__name__)
def test_a_damaged_or_foreign_block_is_rebuilt_with_one_warning(
    small: Kernel, filled: Path, expected: Floats, damage: Callable[[Path], None]
) -> None:
    damaged = block_files(filled)[1]
    damage(damaged)
    assert_rebuilt(small, filled, damaged, expected)


@pytest.mark.parametrize("wrong", ["bodies", "kernel", "number"])
def test_a_whole_block_of_something_else_is_rebuilt_with_one_warning(
    small: Kernel, filled: Path, expected: Floats, wrong: str
) -> None:
    store, damaged = TrackStore(small, filled), block_files(filled)[1]
    block = store_module.read_block(damaged, SECOND, store._stamp(), small.bodies)
    changed = {
        "bodies": replace(block, bodies=block.bodies[:-1]),
        "kernel": block,
        "number": replace(block, index=FIRST),
    }[wrong]
    stamp = f"{'0' * 64} v1" if wrong == "kernel" else store._stamp()
    store_module.write_block(damaged, changed, stamp)
    assert_rebuilt(small, filled, damaged, expected)


def test_no_flipped_bit_gets_through(small: Kernel, filled: Path) -> None:
    store, path = TrackStore(small, filled), block_files(filled)[1]
    content = path.read_bytes()
    random = np.random.default_rng(11)
    directory = content.rindex(b"stamp.npy") - 50  # the archive's table of contents, up to the end
    places = [*range(200), *range(directory, len(content)), *random.integers(0, len(content), 200).tolist()]
    for place in places:
        spoilt = bytearray(content)
        spoilt[place] ^= 1 << int(random.integers(8))
        path.write_bytes(spoilt)
        with pytest.raises(ValueError):
            store_module.read_block(path, SECOND, store._stamp(), small.bodies)


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
    def refuse(path: Path, write: object) -> None:
        raise PermissionError(13, "Permission denied", str(path))

    monkeypatch.setattr(store_module, "write_atomically", refuse)
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
