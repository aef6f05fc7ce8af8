"""Events of long spans that were kept: the program answers alike, asked for the first time or again."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

QUESTIONS = {
    "almanac": ("almanac", "--from", "1980", "--to", "2020", "--kind", "station", "--format", "csv"),
    "gatherings": ("gatherings", "--from", "1980", "--to", "2020", "--standing", "--format", "csv"),
    "from a site": (
        *("almanac", "--from", "1990", "--to", "2016", "--kind", "occultation", "--stars", "none"),
        *("--site", "52.13,11.62,120", "--zone", "Europe/Berlin", "--format", "csv"),
    ),
}


@pytest.fixture
def own_cache(cache_folder: Path, tmp_path: Path) -> Path:
    """A cache folder with the suite's tracks and no events."""
    (tmp_path / "tracks").symlink_to(cache_folder / "tracks", target_is_directory=True)
    return tmp_path


def program(cache: Path, *arguments: str) -> tuple[bytes, list[str]]:
    """Return what the installed program printed, and the lines it warned with."""
    done = subprocess.run(
        [sys.executable, "-m", "wanderers", *arguments, "--cache", str(cache), "--quiet"],
        capture_output=True,
        check=True,
        timeout=300.0,
    )
    return done.stdout, done.stderr.decode().splitlines()


@pytest.mark.parametrize("question", QUESTIONS.values(), ids=QUESTIONS.keys())
def test_the_same_octets_come_again(own_cache: Path, question: tuple[str, ...]) -> None:
    first, _ = program(own_cache, *question)
    kept = {path: path.stat().st_ino for path in (own_cache / "events").iterdir()}
    assert first.count(b"\n") > 10 and len(kept) >= 2
    again, _ = program(own_cache, *question)
    assert again == first
    assert {
        path: path.stat().st_ino for path in (own_cache / "events").iterdir()
    } == kept  # none written again


def test_a_damaged_file_gets_one_line_and_the_same_answer(own_cache: Path) -> None:
    first, silent = program(own_cache, *QUESTIONS["almanac"])
    damaged = next((own_cache / "events").iterdir())
    damaged.write_bytes(damaged.read_bytes()[:-1])
    again, lines = program(own_cache, *QUESTIONS["almanac"])
    assert again == first and silent == []
    assert len(lines) == 1 and str(damaged) in lines[0] and "rebuilt" in lines[0]
