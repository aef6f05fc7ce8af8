import hashlib
import json
import os

import pytest

from wanderers.ephemeris.checksums import CHECKSUMS_NAME, remembered_sha256, sha256_of

# NIST FIPS 180-4 examples, "SHA256.pdf": the one-block message "abc", and the empty message.
ABC = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
NOTHING = "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"


@pytest.fixture
def abc(tmp_path):
    path = tmp_path / "abc.bsp"
    path.write_bytes(b"abc")
    return path


@pytest.fixture
def cache(tmp_path):
    return tmp_path / "cache" / "deeper"


@pytest.fixture
def hashed(monkeypatch):
    """Return the list of names of files that are really hashed."""
    names = []
    original = hashlib.file_digest

    def counted(file, name):
        names.append(os.path.basename(file.name))
        return original(file, name)

    monkeypatch.setattr(hashlib, "file_digest", counted)
    return names


def test_checksums_are_those_of_the_standard(tmp_path, abc):
    (tmp_path / "empty").touch()
    assert sha256_of(abc) == ABC
    assert sha256_of(tmp_path / "empty") == NOTHING


def test_a_checksum_is_computed_once(abc, cache, hashed):
    assert [remembered_sha256(abc, cache) for _ in range(3)] == [ABC] * 3
    assert hashed == ["abc.bsp"]


def test_without_a_cache_folder_it_is_computed_each_time(abc, hashed):
    assert [remembered_sha256(abc, None) for _ in range(2)] == [ABC] * 2
    assert hashed == ["abc.bsp"] * 2


def test_two_files_are_remembered_side_by_side(tmp_path, abc, cache, hashed):
    (tmp_path / "empty").touch()
    for _ in range(2):
        assert remembered_sha256(abc, cache) == ABC
        assert remembered_sha256(tmp_path / "empty", cache) == NOTHING
    assert hashed == ["abc.bsp", "empty"]


def test_another_path_to_the_same_file_is_known(tmp_path, abc, cache, hashed, monkeypatch):
    remembered_sha256(abc, cache)
    monkeypatch.chdir(tmp_path)
    assert remembered_sha256(tmp_path / "cache" / ".." / "abc.bsp", cache) == ABC
    assert hashed == ["abc.bsp"]


def test_a_changed_size_is_noticed(abc, cache):
    remembered_sha256(abc, cache)
    abc.write_bytes(b"")
    assert remembered_sha256(abc, cache) == NOTHING


def test_changed_content_is_noticed_though_size_and_time_of_change_are_carried_over(abc, cache):
    remembered_sha256(abc, cache)
    found = abc.stat()
    other = abc.with_name("other.bsp")
    other.write_bytes(b"abd")
    os.utime(other, ns=(found.st_atime_ns, found.st_mtime_ns))
    other.replace(abc)
    assert abc.stat().st_mtime_ns == found.st_mtime_ns
    assert remembered_sha256(abc, cache) == hashlib.sha256(b"abd").hexdigest()


GOOD_ROW = [3, 0, 0, ABC]


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"\xff\xfe damaged",
        b"[" * 100_000,
        b"null",
        b"{}",
        b'{"version": 1, "kernels": []}',
        json.dumps({"version": 99, "kernels": {"x": GOOD_ROW}}).encode(),
        json.dumps({"version": 1, "kernels": {"x": GOOD_ROW[:3]}}).encode(),
        json.dumps({"version": 1, "kernels": {"x": [*GOOD_ROW[:3], "no checksum"]}}).encode(),
        json.dumps({"version": 1, "kernels": {"x": ["3", 0, 0, ABC]}}).encode(),
        json.dumps({"version": 1, "kernels": {"x": None}}).encode(),
    ],
)
def test_a_damaged_file_of_checksums_starts_anew_with_one_warning(abc, cache, hashed, content):
    cache.mkdir(parents=True)
    (cache / CHECKSUMS_NAME).write_bytes(content)
    warnings = []
    for _ in range(2):
        assert remembered_sha256(abc, cache, warnings.append) == ABC
    assert hashed == ["abc.bsp"]
    assert warnings == [f"cache file {cache / CHECKSUMS_NAME} is damaged or foreign: rebuilt"]


def test_a_missing_file_of_checksums_is_no_cause_for_a_warning(abc, cache):
    warnings = []
    remembered_sha256(abc, cache, warnings.append)
    assert warnings == []


def test_a_cache_folder_that_cannot_be_is_no_failure(tmp_path, abc):
    (tmp_path / "file").touch()
    assert remembered_sha256(abc, tmp_path / "file" / "cache") == ABC
    assert (tmp_path / "file").read_bytes() == b""


@pytest.mark.skipif(hasattr(os, "geteuid") and os.geteuid() == 0, reason="the superuser may write everywhere")
def test_a_cache_folder_that_cannot_be_written_is_no_failure(tmp_path, abc):
    closed = tmp_path / "closed"
    closed.mkdir(mode=0o500)
    assert remembered_sha256(abc, closed) == ABC
    assert os.listdir(closed) == []


def test_a_missing_file_is_an_error_of_the_system(tmp_path, cache):
    with pytest.raises(FileNotFoundError):
        remembered_sha256(tmp_path / "missing", cache)
