"""Sealed files: what was written comes back, and nothing else does."""

from __future__ import annotations

import zlib
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.seals import SEAL_BYTES, read_sealed, write_sealed


@given(st.binary(max_size=2_000), st.text(max_size=60))
def test_what_was_written_comes_back(
    tmp_path_factory: pytest.TempPathFactory, content: bytes, made_from: str
) -> None:
    path = tmp_path_factory.mktemp("sealed") / "made" / "here"
    write_sealed(path, content, made_from)
    assert read_sealed(path, made_from) == content


def test_the_seal_is_the_crc_of_both_in_a_row(tmp_path: Path) -> None:
    write_sealed(tmp_path / "one", b"content", "made from")
    whole = (tmp_path / "one").read_bytes()
    assert whole[:-SEAL_BYTES] == b"content"
    assert int.from_bytes(whole[-SEAL_BYTES:], "big") == zlib.crc32(b"made fromcontent")


@pytest.mark.parametrize("made_from", ["", "another", "made from "])
def test_something_made_from_something_else_is_refused(tmp_path: Path, made_from: str) -> None:
    write_sealed(tmp_path / "one", b"content", "made from")
    with pytest.raises(ValueError, match="something else"):
        read_sealed(tmp_path / "one", made_from)


def test_no_flipped_bit_and_no_cut_gets_through(tmp_path: Path) -> None:
    path = tmp_path / "one"
    write_sealed(path, b"some content", "made from")
    whole = path.read_bytes()
    for bit in range(8 * len(whole)):
        changed = bytearray(whole)
        changed[bit // 8] ^= 1 << bit % 8
        path.write_bytes(changed)
        with pytest.raises(ValueError):
            read_sealed(path, "made from")
    for length in range(len(whole)):
        path.write_bytes(whole[:length])
        with pytest.raises(ValueError):
            read_sealed(path, "made from")
