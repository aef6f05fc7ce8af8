import os
import stat
from pathlib import Path

import pytest

from wanderers.errors import OutputError
from wanderers.files import reported_as_output_error, require_writable, write_atomically

needs_ordinary_user = pytest.mark.skipif(
    hasattr(os, "geteuid") and os.geteuid() == 0, reason="the superuser may write everywhere"
)
needs_posix = pytest.mark.skipif(os.name != "posix", reason="POSIX files")


def put(content):
    def write(file):
        file.write(content)

    return write


def stop_half_way(error):
    def write(file):
        file.write(b"half")
        raise error

    return write


def message_of(caught):
    text = str(caught.value)
    assert "\n" not in text
    return text


def test_a_written_file_has_the_content_and_nothing_lies_beside_it(tmp_path):
    write_atomically(tmp_path / "out.csv", put(b"whole"))
    assert (tmp_path / "out.csv").read_bytes() == b"whole"
    assert os.listdir(tmp_path) == ["out.csv"]


def test_an_older_file_is_replaced(tmp_path):
    path = tmp_path / "out.csv"
    path.write_bytes(b"older and longer")
    write_atomically(path, put(b"new"))
    assert path.read_bytes() == b"new"


@pytest.mark.parametrize("error", [ValueError("no"), OSError("full"), KeyboardInterrupt(), SystemExit(3)])
def test_whatever_stops_the_writing_leaves_the_older_file_alone(tmp_path, error):
    path = tmp_path / "out.csv"
    path.write_bytes(b"older")
    with pytest.raises(type(error)):
        write_atomically(path, stop_half_way(error))
    assert path.read_bytes() == b"older"
    assert os.listdir(tmp_path) == ["out.csv"]


def test_a_stopped_first_write_leaves_nothing(tmp_path):
    with pytest.raises(KeyboardInterrupt):
        write_atomically(tmp_path / "out.csv", stop_half_way(KeyboardInterrupt()))
    assert os.listdir(tmp_path) == []


def test_readers_see_the_older_file_until_the_new_one_is_complete(tmp_path):
    path = tmp_path / "out.csv"
    path.write_bytes(b"older")
    seen = []

    def write(file):
        file.write(b"new")
        file.flush()
        seen.append(path.read_bytes())

    write_atomically(path, write)
    assert seen == [b"older"]


def test_no_temporary_name_ends_like_a_kernel(tmp_path):
    seen = []
    write_atomically(tmp_path / "de999.bsp", lambda file: seen.extend(tmp_path.iterdir()))
    assert [path.suffix for path in seen] == [".tmp"]
    assert seen[0].name.startswith(".")


def test_a_name_of_the_greatest_length_can_be_written(tmp_path):
    # 255 bytes: NAME_MAX of the usual file systems (POSIX.1-2017, limits.h, as an example; from memory).
    for name in ("x" * 255, "\N{GREEK SMALL LETTER ALPHA}" * 127):
        write_atomically(tmp_path / name, put(b"whole"))
        assert (tmp_path / name).read_bytes() == b"whole"


@needs_posix
def test_a_new_file_gets_the_ordinary_permissions_and_an_older_one_keeps_its_own(tmp_path):
    ordinary = tmp_path / "ordinary"
    ordinary.touch()
    write_atomically(tmp_path / "new", put(b""))
    assert (tmp_path / "new").stat().st_mode == ordinary.stat().st_mode
    ordinary.chmod(0o640)
    write_atomically(ordinary, put(b""))
    assert stat.S_IMODE(ordinary.stat().st_mode) == 0o640


@needs_posix
def test_a_symbolic_link_stays_and_its_target_is_written(tmp_path):
    (tmp_path / "elsewhere").mkdir()
    link = tmp_path / "out.csv"
    link.symlink_to(tmp_path / "elsewhere" / "real.csv")
    write_atomically(link, put(b"whole"))
    assert link.is_symlink()
    assert (tmp_path / "elsewhere" / "real.csv").read_bytes() == b"whole"


@needs_posix
def test_a_pipe_is_written_and_not_replaced(tmp_path):
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    reader = os.open(pipe, os.O_RDONLY | os.O_NONBLOCK)
    try:
        write_atomically(pipe, put(b"whole"))
        assert os.read(reader, 100) == b"whole"
    finally:
        os.close(reader)
    assert pipe.is_fifo()


def test_a_missing_folder_is_an_error_of_the_system(tmp_path):
    with pytest.raises(FileNotFoundError):
        write_atomically(tmp_path / "missing" / "out.csv", put(b""))


def test_places_that_can_be_written_pass_and_are_left_as_they_were(tmp_path):
    (tmp_path / "old.csv").write_bytes(b"old")
    require_writable(tmp_path / "old.csv")
    require_writable(tmp_path / "new.csv")
    require_writable(tmp_path / "a" / "b" / "new.csv")
    require_writable(tmp_path, folder=True)
    require_writable(tmp_path / "a" / "reports", folder=True)
    assert os.listdir(tmp_path) == ["old.csv"]
    assert (tmp_path / "old.csv").read_bytes() == b"old"


def test_the_current_folder_by_its_short_names_passes(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    require_writable(Path("."), folder=True)
    require_writable(Path("reports/../reports"), folder=True)
    require_writable(Path("out.csv"))
    assert os.listdir(tmp_path) == []


@needs_posix
def test_a_pipe_passes(tmp_path):
    os.mkfifo(tmp_path / "pipe")
    require_writable(tmp_path / "pipe")
    assert (tmp_path / "pipe").is_fifo()


def test_a_folder_where_a_file_is_meant_is_refused(tmp_path):
    with pytest.raises(OutputError) as caught:
        require_writable(tmp_path)
    assert message_of(caught) == f"cannot write {tmp_path}: it is a folder; name a file in it"


def test_a_file_where_a_folder_is_meant_is_refused(tmp_path):
    path = tmp_path / "reports"
    path.touch()
    with pytest.raises(OutputError) as caught:
        require_writable(path, folder=True)
    assert "it is a file, not a folder" in message_of(caught)


@pytest.mark.parametrize("folder", [False, True])
def test_a_file_in_the_way_of_a_folder_above_is_named(tmp_path, folder):
    (tmp_path / "reports").touch()
    with pytest.raises(OutputError) as caught:
        require_writable(tmp_path / "reports" / "year" / "out", folder=folder)
    assert f"{tmp_path / 'reports'} is a file, not a folder" in message_of(caught)


def test_a_name_that_is_too_long_is_refused(tmp_path):
    with pytest.raises(OutputError) as caught:
        require_writable(tmp_path / ("x" * 256))
    assert "too long" in message_of(caught)


@pytest.mark.skipif(not Path("/proc/self").is_dir(), reason="needs a /proc file system")
def test_a_file_system_that_takes_no_files_is_refused():
    with pytest.raises(OutputError) as caught:
        require_writable(Path("/proc/out.csv"))
    assert message_of(caught).startswith("cannot write /proc/out.csv: ")


@needs_ordinary_user
def test_a_folder_without_permission_is_refused(tmp_path):
    closed = tmp_path / "closed"
    closed.mkdir(mode=0o500)
    for path, folder in ((closed / "out.csv", False), (closed, True), (closed / "a" / "b", True)):
        with pytest.raises(OutputError) as caught:
            require_writable(path, folder=folder)
        assert "Permission denied" in message_of(caught)


@needs_ordinary_user
@needs_posix
def test_a_pipe_passes_whatever_its_folder_allows(tmp_path):
    closed = tmp_path / "closed"
    closed.mkdir()
    os.mkfifo(closed / "pipe")
    closed.chmod(0o500)
    require_writable(closed / "pipe")


@needs_ordinary_user
def test_a_folder_that_cannot_be_entered_is_refused(tmp_path):
    closed = tmp_path / "closed"
    closed.mkdir(mode=0o000)
    with pytest.raises(OutputError) as caught:
        require_writable(closed / "a" / "out.csv")
    assert "Permission denied" in message_of(caught)


@needs_ordinary_user
def test_a_file_made_read_only_is_respected(tmp_path):
    path = tmp_path / "out.csv"
    path.touch(mode=0o400)
    with pytest.raises(OutputError) as caught:
        require_writable(path)
    assert "read-only" in message_of(caught)


def test_what_the_system_says_becomes_one_line(tmp_path):
    path = tmp_path / "missing" / "out.csv"
    with pytest.raises(OutputError) as caught, reported_as_output_error(path):
        write_atomically(path, put(b""))
    assert message_of(caught).startswith(f"cannot write {path}: No such file or directory; ")
