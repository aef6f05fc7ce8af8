"""The program at home in a folder of its own, with the tracks that the whole suite shares."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.cli.site_program import Program, at_home


@pytest.fixture
def run(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str], tmp_path: Path, cache_folder: Path
) -> Program:
    """A function that runs one line of the program in this process."""
    at_home(monkeypatch, tmp_path)
    return Program(monkeypatch, capsys, "--cache", str(cache_folder))
