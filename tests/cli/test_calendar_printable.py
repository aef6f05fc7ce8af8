"""``wanderers calendar --printable`` as a user runs it; the PDF is read by poppler."""

from __future__ import annotations

import csv
import io
import os
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from tests.ephemeris.kernel_files import DE421
from tests.report.wall_samples import poppler, read, text_of

pytestmark = pytest.mark.skipif(shutil.which("pdftotext") is None, reason="needs Debian's poppler-utils")

Run = Callable[..., subprocess.CompletedProcess[str]]
FEBRUARY = ("--from", "2027-02", "--to", "2027-03")
HILL = ("--site", "52.13,11.62,80", "--zone", "Europe/Berlin")


@pytest.fixture
def run(cache_folder: Path, tmp_path: Path) -> Run:
    def program(*arguments: str) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            [
                sys.executable,
                "-m",
                "wanderers",
                *arguments,
                "--kernel",
                str(DE421),
                "--cache",
                str(cache_folder),
            ],
            capture_output=True,
            text=True,
            check=False,
            cwd=tmp_path,
            env=os.environ | {"XDG_CONFIG_HOME": str(tmp_path / "config")},
            timeout=300,
        )

    return program


def test_a_month_is_a_page_and_no_icalendar_file_is_printed(run: Run, tmp_path: Path) -> None:
    outcome = run("calendar", *FEBRUARY, "--printable", "walls/wall.pdf")
    assert (outcome.returncode, outcome.stdout, outcome.stderr) == (0, "", "")
    content = (tmp_path / "walls" / "wall.pdf").read_bytes()
    (page,) = read(content, tmp_path)
    assert (page.width, page.height) == pytest.approx((841.89, 595.28), abs=0.01)
    text = text_of(content, tmp_path)
    # Mars in 2027: opposition on 19 February, handbooks alike (from memory); Full Moon the day after.
    assert "16 h Mars at opposition" in text
    assert "Full Moon 23:24" in text  # 20 February; the whole calendar is held against skyfield elsewhere
    assert text.count("Mars retrograde") == 4


def test_from_a_site_it_shows_what_the_almanac_says_can_be_seen(run: Run, tmp_path: Path) -> None:
    assert run("calendar", *FEBRUARY, *HILL, "--printable", "wall.pdf", "--paper", "letter").returncode == 0
    content = (tmp_path / "wall.pdf").read_bytes()
    (page,) = read(content, tmp_path)
    assert (page.width, page.height) == pytest.approx((792.0, 612.0), abs=0.01)
    text = text_of(content, tmp_path)
    assert "local time of Europe/Berlin" in text
    table = run("almanac", *FEBRUARY, *HILL, "--kind", "opposition", "--format", "csv").stdout
    seen = [row for row in csv.DictReader(io.StringIO(table)) if row["verdict"] == "naked_eye"]
    assert {row["body"] for row in seen} == {"mars", "jupiter"}
    for row in seen:
        hour, minute, second = row["best_local"][11:19].split(":")
        whole = int(hour) * 60 + int(minute) + (float(second) >= 30.0)
        assert f"{whole // 60:02d}:{whole % 60:02d} {row['body'].capitalize()} at opposition" in text


def test_limits_for_an_audience_leave_the_moon_and_the_seasons(run: Run, tmp_path: Path) -> None:
    limits = ("--visible", "--after", "20:00", "--by", "20:05")
    outcome = run(
        "calendar", "--from", "2027-03", "--to", "2027-04", *HILL, *limits, "--printable", "wall.pdf"
    )
    assert outcome.returncode == 0
    text = text_of((tmp_path / "wall.pdf").read_bytes(), tmp_path)
    assert all(name in text for name in ("New Moon 10:2", "Full Moon 11:4", "March equinox"))
    assert "left out: " in outcome.stderr


def test_both_files_are_written_if_both_are_asked_for(run: Run, tmp_path: Path) -> None:
    outcome = run("calendar", *FEBRUARY, "--kind", "opposition", "--printable", "w.pdf", "--out", "sky.ics")
    assert outcome.returncode == 0
    assert (tmp_path / "sky.ics").read_bytes().startswith(b"BEGIN:VCALENDAR")
    assert "Pages:           1" in poppler("pdfinfo", tmp_path / "w.pdf")


@pytest.mark.parametrize(
    ("line", "status", "words"),
    [
        (("--paper", "a4"), 2, "--paper is for --printable"),
        (("--printable", "w.pdf", "--paper", "a5"), 2, "'a5' is not one of"),
        (("--printable", "w.png"), 2, "name it w.pdf"),
        (("--printable", "."), 1, "it is a folder"),
        (("--printable", "w.pdf", "--from", "2027", "--to", "2040"), 2, "at most 120 months"),
    ],
)
def test_what_cannot_be_done_is_said_in_one_line(
    run: Run, tmp_path: Path, line: tuple[str, ...], status: int, words: str
) -> None:
    outcome = run("calendar", *FEBRUARY, "--kind", "opposition", *line)
    assert outcome.returncode == status
    assert words in outcome.stderr
    assert len(outcome.stderr.splitlines()) == 1
    assert not (tmp_path / "w.pdf").exists()
