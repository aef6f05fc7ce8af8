"""The package's layers hold, and starting it loads little."""

from __future__ import annotations

import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
HEAVY = {"matplotlib", "polars", "jinja2", "skyfield", "numpy", "rich", "icalendar", "jplephem"}
MAIN = """
import sys
from wanderers.cli.main import main

sys.argv = {line!r}
try:
    main()
except SystemExit:
    pass
"""
"""Code that runs the program with a line of arguments and goes on."""


def python(code: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=False, timeout=120.0
    )


def loaded_by(code: str) -> set[str]:
    """Top-level modules that are loaded after some code."""
    run = python(
        f"{code}\nimport sys\nprint('loaded', *sorted({{name.split('.')[0] for name in sys.modules}}))"
    )
    assert run.returncode == 0, run.stderr
    return set(run.stdout.splitlines()[-1].split()[1:])


def test_the_import_contracts_of_the_project_file_are_kept() -> None:
    # The contracts themselves stand in pyproject.toml, section tool.importlinter.
    run = python(
        "import sys\n"
        "from importlinter.cli import lint_imports\n"
        "sys.exit(lint_imports(config_filename='pyproject.toml', no_cache=True))"
    )
    assert run.returncode == 0, run.stdout + run.stderr
    assert " KEPT" in run.stdout and "BROKEN" not in run.stdout


def test_every_package_and_module_has_its_place_in_the_layers() -> None:
    contracts = tomllib.loads((ROOT / "pyproject.toml").read_text())["tool"]["importlinter"]["contracts"]
    (layers,) = (one["layers"] for one in contracts if one["type"] == "layers")
    placed = {name.split(".")[1] for line in layers for name in line.replace("|", ":").split(":")}
    present = {
        path.stem
        for path in (ROOT / "wanderers").iterdir()
        if (path.suffix == ".py" or (path / "__init__.py").exists()) and not path.stem.startswith("__")
    }
    # data is packaged files and the script that made them.
    assert present - placed <= {"data"}


def test_importing_the_package_loads_nothing_heavy() -> None:
    assert loaded_by("import wanderers") & HEAVY == set()


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["no_such_command"]])
def test_help_version_and_a_misspelt_command_load_nothing_heavy(arguments: list[str]) -> None:
    assert loaded_by(MAIN.format(line=["wanderers", *arguments])) & HEAVY == set()


def test_help_lists_every_command_with_a_line_of_its_own() -> None:
    run = python(MAIN.format(line=["wanderers", "--help"]))
    from wanderers.cli.main import COMMANDS

    lines = [line.split(maxsplit=1) for line in run.stdout.splitlines()]
    listed = {words[0] for words in lines if len(words) == 2}
    assert set(COMMANDS) <= listed


def test_every_command_listed_has_a_module() -> None:
    from wanderers.cli.main import COMMANDS

    for name in COMMANDS:
        assert (ROOT / "wanderers" / "cli" / f"{name}.py").exists()


def test_the_almanac_command_draws_nothing() -> None:
    loaded = loaded_by(MAIN.format(line=["wanderers", "almanac", "--help"]))
    assert "polars" in loaded
    assert loaded & {"matplotlib", "jinja2"} == set()
