"""The report command, run as the installed program."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import polars as pl
import pytest

WEEKS = ("--from", "2027-02-10", "--to", "2027-02-24", "--body", "mars")


def wanderers(*arguments: str | Path, cwd: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "wanderers", *map(str, arguments)]
    return subprocess.run(command, cwd=cwd, capture_output=True, text=True, timeout=300, check=False)


def refused(done: subprocess.CompletedProcess[str], status: int) -> str:
    """Return the one line of a refusal."""
    assert done.returncode == status, done.stderr
    assert done.stdout == ""
    assert done.stderr.count("\n") == 1
    assert "Traceback" not in done.stderr
    return done.stderr


def test_a_report_is_written_and_its_page_named(cache_folder: Path, tmp_path: Path) -> None:
    done = wanderers("report", *WEEKS, "--cache", cache_folder, cwd=tmp_path)
    assert (done.returncode, done.stderr) == (0, "")
    page = tmp_path / done.stdout.strip()
    assert page == tmp_path / "reports" / "2027-02-10_to_2027-02-24_mars" / "index.html"
    text = page.read_text(encoding="utf-8")
    assert "DE440" in text and "a4ce9bf9b328" in text
    events = pl.read_parquet(page.parent / "events.parquet")
    opposition = events.filter(pl.col("kind") == "opposition")["utc"][0]
    # Opposition of Mars on 2027 February 19: ALPO figures, as published by several observers' groups.
    assert opposition.startswith("2027-02-19")
    assert pl.read_csv(page.parent / "events.csv", infer_schema_length=None).height == events.height
    assert (page.parent / "events.ics").read_bytes().startswith(b"BEGIN:VCALENDAR\r\n")


def test_a_span_outside_the_kernel_leaves_nothing(cache_folder: Path, tmp_path: Path) -> None:
    done = wanderers(
        "report", "--from", "2700", "--to", "2701", "--cache", cache_folder, "--out", "r", cwd=tmp_path
    )
    line = refused(done, 1)
    assert "2650" in line and "--kernel" in line
    assert not (tmp_path / "r").exists()


@pytest.mark.parametrize("occupied", ["a file", "another folder"])
def test_what_is_no_report_is_not_replaced(cache_folder: Path, tmp_path: Path, occupied: str) -> None:
    place = tmp_path / "mine"
    if occupied == "a file":
        place.write_text("keep me")
    else:
        place.mkdir()
        (place / "notes.txt").write_text("keep me")
    refused(wanderers("report", *WEEKS, "--cache", cache_folder, "--out", place, cwd=tmp_path), 1)
    kept = place if place.is_file() else place / "notes.txt"
    assert kept.read_text() == "keep me"


def test_an_interrupted_report_leaves_nothing_under_its_name(cache_folder: Path, tmp_path: Path) -> None:
    command = [sys.executable, "-m", "wanderers", "report", "--from", "2027", "--to", "2029"]
    command += ["--cache", str(cache_folder), "--out", str(tmp_path / "r")]
    running = subprocess.Popen(
        command, cwd=tmp_path, stderr=subprocess.PIPE, text=True, start_new_session=True
    )
    time.sleep(3.0)
    os.killpg(running.pid, signal.SIGINT)
    _, errors = running.communicate(timeout=60)
    assert running.returncode != 0
    assert "Traceback" not in errors
    assert not (tmp_path / "r").exists()
