"""Blocks on disk that are damaged, or something else: noticed, told in one line, and built again."""

from __future__ import annotations

import pickle
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from tests.ephemeris.small_store import FIRST, SECOND, Told, answers, block_files
from wanderers.arrays import Floats
from wanderers.ephemeris import store as store_module
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.store import TrackStore


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
    directory = content.rindex(b"bodies.npy") - 50  # the archive's table of contents, up to the end
    places = [*range(200), *range(directory, len(content)), *random.integers(0, len(content), 200).tolist()]
    for place in places:
        spoilt = bytearray(content)
        spoilt[place] ^= 1 << int(random.integers(8))
        path.write_bytes(spoilt)
        with pytest.raises(ValueError):
            store_module.read_block(path, SECOND, store._stamp(), small.bodies)
