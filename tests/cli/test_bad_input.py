"""What a wrong request gets: an exit status, one line on standard error, and nothing else."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from tests.ephemeris.kernel_files import DE421

YEAR = ("--from", "2027", "--to", "2028")
COMMANDS = (("almanac",), ("seasons",), ("track", "mars"), ("gatherings",))


def program(*arguments: str, cache: Path, timeout: float = 300.0) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "wanderers", *arguments, "--cache", str(cache)],
        capture_output=True,
        check=False,
        text=True,
        timeout=timeout,
    )


def refused(run: subprocess.CompletedProcess[str], status: int, *words: str) -> None:
    """Check the exit status, the single line, and that nothing was printed or traced."""
    assert run.returncode == status, run.stderr
    assert run.stdout == ""
    lines = run.stderr.splitlines()
    assert len(lines) == 1, run.stderr
    assert "Traceback" not in run.stderr and "unexpected failure" not in run.stderr
    assert all(word in lines[0] for word in words), lines[0]


@pytest.mark.parametrize("command", COMMANDS, ids=lambda command: command[0])
@pytest.mark.parametrize(
    ("span", "words"),
    [
        (("--from", "2027-02-30", "--to", "2028"), ("2027-02-30", "YYYY-MM-DD")),
        (("--from", "2027-13", "--to", "2028"), ("2027-13", "YYYY-MM-DD")),
        (("--from", "soon"), ("soon", "YYYY-MM-DD")),
        (("--from", "2028", "--to", "2027"), ("2027", "2028", "YYYY-MM-DD")),
        (("--from", "2028", "--to", "2028"), ("2028", "YYYY-MM-DD")),
    ],
)
def test_impossible_dates_are_usage_errors_that_show_the_form(
    command: tuple[str, ...], span: tuple[str, ...], words: tuple[str, ...], cache_folder: Path
) -> None:
    refused(program(*command, *span, cache=cache_folder), 2, *words)


@pytest.mark.parametrize("command", COMMANDS, ids=lambda command: command[0])
@pytest.mark.parametrize("span", [("1400", "1410"), ("2640", "2700")])
def test_spans_outside_the_kernel_fail_and_leave_nothing(
    command: tuple[str, ...], span: tuple[str, str], cache_folder: Path, tmp_path: Path
) -> None:
    out = tmp_path / "table.csv"
    request = (*command, "--from", span[0], "--to", span[1], "--out", str(out))
    refused(program(*request, cache=cache_folder), 1, "1550", "2650", "--kernel")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("request_", "words"),
    [
        (("almanac", *YEAR, "--body", "jupitr"), ("jupitr", "jupiter")),
        (("seasons", *YEAR, "--body", "satrun"), ("satrun", "saturn")),
        (("track", "venu", *YEAR), ("venu", "venus")),
        (("gatherings", *YEAR, "--bodies", "venus,mars,merkury"), ("merkury", "mercury")),
        (("almanac", *YEAR, "--kind", "stations"), ("stations", "station")),
        (("almanac", *YEAR, "--frame", "eclipitc"), ("eclipitc", "ecliptic")),
        (("seasons", *YEAR, "--frame", "equatorial"), ("equatorial", "equator")),
        (("track", "mars", *YEAR, "--frame", "j200"), ("j200", "j2000")),
        (("track", *YEAR), ("BODY",)),
        (("track", "mars", *YEAR, "--step", "0d"), ("0d", "6h")),
        (("track", "mars", *YEAR, "--step", "1 week"), ("1 week", "6h")),
        (("gatherings", *YEAR, "--bodies", "venus,mars"), ("three",)),
        (("gatherings", *YEAR, "--at-least", "6"), ("6", "5")),
        (("almanac", *YEAR, "--within", "-1"), ("--within",)),
        (("almanac", *YEAR, "--format", "yaml"), ("yaml", "parquet")),
        (("almanac", *YEAR, "--nonsense"), ("--nonsense",)),
    ],
    ids=lambda value: "-".join(value).replace("--", "") if isinstance(value, tuple) else None,
)
def test_unknown_names_and_values_are_usage_errors_with_what_was_meant(
    request_: tuple[str, ...], words: tuple[str, ...], cache_folder: Path
) -> None:
    refused(program(*request_, cache=cache_folder), 2, *words)


@pytest.mark.parametrize("command", COMMANDS, ids=lambda command: command[0])
@pytest.mark.parametrize("fault", ["missing", "foreign", "truncated"])
def test_unusable_kernels_fail_and_are_named(
    command: tuple[str, ...], fault: str, cache_folder: Path, tmp_path: Path
) -> None:
    path = tmp_path / "my_kernel.bsp"
    if fault == "foreign":
        path.write_text("this is no kernel\n" * 200)
    elif fault == "truncated":
        path.write_bytes(DE421.read_bytes()[:100_000])
    refused(program(*command, *YEAR, "--kernel", str(path), cache=cache_folder), 1, "my_kernel.bsp")


@pytest.mark.parametrize("command", COMMANDS, ids=lambda command: command[0])
def test_a_place_that_cannot_be_written_fails_before_any_work(
    command: tuple[str, ...], tmp_path: Path
) -> None:
    cache = tmp_path / "cache"
    out = tmp_path / "no_such_folder" / "table.csv"
    refused(program(*command, *YEAR, "--out", str(out), cache=cache), 1, str(out))
    assert not (cache / "tracks").exists()


def test_a_folder_in_place_of_the_file_is_refused(tmp_path: Path) -> None:
    folder = tmp_path / "table.csv"
    folder.mkdir()
    refused(program("almanac", *YEAR, "--out", str(folder), cache=tmp_path / "cache"), 1, str(folder))


def test_seasons_of_a_body_that_has_none_are_not_a_crash(cache_folder: Path) -> None:
    run = program("seasons", *YEAR, "--body", "sun", "--format", "csv", cache=cache_folder)
    assert "unexpected failure" not in run.stderr
    assert (run.returncode, len(run.stdout.splitlines())) in {(0, 1), (2, 0)}


@pytest.mark.parametrize("harm", ["cut", "foreign", "empty", "flipped"])
def test_a_damaged_cache_file_is_rebuilt_with_one_warning(tmp_path: Path, harm: str) -> None:
    request = ("almanac", *YEAR, "--kind", "opposition", "--kernel", str(DE421), "--format", "csv")
    whole = program(*request, cache=tmp_path)
    assert whole.returncode == 0 and whole.stderr == ""
    path = max((tmp_path / "tracks").rglob("*.npz"), key=lambda file: file.stat().st_size)
    content = path.read_bytes()
    middle = len(content) // 2
    harmed = {
        "cut": content[:middle],
        "foreign": b"PK not ours" * 100,
        "empty": b"",
        "flipped": content[:middle] + bytes(byte ^ 255 for byte in content[middle : middle + 8])
        + content[middle + 8 :],
    }  # fmt: skip
    path.write_bytes(harmed[harm])
    again = program(*request, cache=tmp_path)
    assert again.returncode == 0
    assert again.stdout == whole.stdout
    warnings = again.stderr.splitlines()
    assert len(warnings) == 1 and "warning" in warnings[0] and path.name in warnings[0]
    third = program(*request, cache=tmp_path)
    assert (third.stdout, third.stderr) == (whole.stdout, "")


@pytest.mark.skipif(os.name == "nt", reason="SIGINT cannot be sent to a child there")
def test_an_interrupted_run_leaves_no_partial_output_and_the_next_succeeds(tmp_path: Path) -> None:
    out, cache = tmp_path / "table.csv", tmp_path / "cache"
    request = [sys.executable, "-m", "wanderers", "almanac", "--from", "1900", "--to", "2050"]
    request += ["--kernel", str(DE421), "--cache", str(cache), "--out", str(out)]
    running = subprocess.Popen(request, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
    deadline = time.monotonic() + 60.0
    while not any(cache.rglob("*.npz")) and time.monotonic() < deadline and running.poll() is None:
        time.sleep(0.02)
    running.send_signal(signal.SIGINT)
    printed, said = running.communicate(timeout=60.0)
    assert running.returncode not in (0, None)
    assert printed == "" and "Traceback" not in said
    assert len(said.splitlines()) == 1
    assert [path.name for path in tmp_path.iterdir()] == ["cache"]
    assert not list(cache.rglob("*.tmp"))
    short = ("almanac", *YEAR, "--kind", "opposition", "--kernel", str(DE421), "--out", str(out))
    assert program(*short, cache=cache).returncode == 0
    assert out.read_text().startswith("event_id,")
