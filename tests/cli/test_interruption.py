"""Ctrl-C while all cores work: one line, no traceback, nothing half-written."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest


@pytest.mark.skipif(sys.platform != "linux", reason="work is done by copies of the process on Linux only")
@pytest.mark.parametrize("after_s", [2.5, 4.0])
def test_an_interruption_ends_all_workers_with_one_line(after_s: float, tmp_path: Path) -> None:
    out = tmp_path / "x.csv"
    line = [sys.executable, "-m", "wanderers", "almanac", "--from", "1600", "--to", "2600"]
    run = subprocess.Popen(
        [*line, "--cache", str(tmp_path), "--out", str(out)],
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    time.sleep(after_s)
    assert run.poll() is None  # still at work
    os.killpg(run.pid, signal.SIGINT)
    _, said = run.communicate(timeout=60)
    assert run.returncode == 130
    assert said == "wanderers: interrupted: nothing half-written was kept\n"
    assert not out.exists()
    with pytest.raises(ProcessLookupError):
        os.killpg(run.pid, 0)  # nobody is left
