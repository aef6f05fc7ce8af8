"""``wanderers almanac``: choices of bodies and kinds, and how it behaves as a part of a pipeline."""

from __future__ import annotations

import io
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import polars as pl
import pytest

from tests.cli.site_program import Program
from tests.cli.test_bad_input import program, refused
from wanderers.ephemeris.bodies import BODIES
from wanderers.events.kinds import Kind

YEAR = ("--from", "2027", "--to", "2028")
IN_SMALL = ("--from", "2001", "--to", "2001-06")

Rows = Callable[..., pl.DataFrame]


@pytest.fixture
def rows(monkeypatch: pytest.MonkeyPatch, capsys: Any, cache_folder: Path) -> Rows:
    """A function that runs the command in this process and reads back its CSV."""
    run = Program(monkeypatch, capsys, "--format", "csv", "--cache", str(cache_folder))

    def read(*arguments: str) -> pl.DataFrame:
        outcome = run("almanac", *arguments)
        assert (outcome.status, outcome.err) == (0, "")
        return pl.read_csv(io.StringIO(outcome.out), infer_schema_length=None)

    return read


@pytest.mark.parametrize("body", BODIES)
def test_any_body_alone_has_an_almanac(body: str, rows: Rows) -> None:
    table = rows(*YEAR, "--body", body, "--stars", "none")
    assert table.height > 0
    concerned = (
        (pl.col("body") == body)
        | (pl.col("other") == body)
        | pl.col("detail").str.contains(body).fill_null(False)  # one of those gathered
        | (pl.col("kind") == "gathering")
    )
    assert table.filter(~concerned).is_empty()


@pytest.mark.parametrize("kind", list(Kind))
def test_any_kind_alone_is_a_table_of_that_kind(kind: str, rows: Rows) -> None:
    table = rows(*YEAR, "--kind", kind, "--stars", "none")
    assert set(table["kind"]) <= {kind}


def test_several_bodies_meet_each_other_only(rows: Rows) -> None:
    two = ("--body", "mars", "--body", "jupiter", "--kind", "conjunction", "--kind", "appulse")
    table = rows("--from", "2020", "--to", "2030", *two, "--stars", "none")
    assert table.height > 2
    assert set(zip(table["body"], table["other"], strict=True)) == {("mars", "jupiter")}


def test_nothing_found_is_a_header_and_no_error(cache_folder: Path) -> None:
    run = program("almanac", *YEAR, "--kind", "transit", "--format", "csv", cache=cache_folder)
    assert (run.returncode, run.stderr) == (0, "")
    assert run.stdout.startswith("event_id,kind,detail,body,other,frame,jd_tt,tt,utc,")
    assert len(run.stdout.splitlines()) == 1


def test_instants_carry_the_digits_that_are_promised(cache_folder: Path) -> None:
    run = program("almanac", *YEAR, "--kind", "station", "--format", "csv", cache=cache_folder)
    table = pl.read_csv(io.StringIO(run.stdout), infer_schema=False)
    assert table["utc"].str.contains(r"^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z$").all()
    assert table["tt"].str.contains(r"^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}$").all()
    assert table["jd_tt"].str.contains(r"^\d{7}\.\d{1,10}$").all()
    assert table["jd_tt"].str.len_chars().max() >= 7 + 1 + 8


@pytest.mark.parametrize("command", ["almanac", "seasons"])
def test_a_body_that_the_kernel_lacks_is_named_with_those_it_holds(
    command: str, small_kernel: Path, cache_folder: Path
) -> None:
    request = (command, *IN_SMALL, "--body", "pluto", "--kernel", str(small_kernel))
    refused(program(*request, cache=cache_folder), 1, "pluto", "DE421", "jupiter", "--kernel")


def test_without_a_choice_a_small_kernel_gives_the_bodies_it_holds(small_kernel: Path, rows: Rows) -> None:
    table = rows(*IN_SMALL, "--kernel", str(small_kernel))
    assert set(table["body"]) == {"sun", "mercury", "venus", "mars", "jupiter"}


# ---- as a part of a pipeline


def command_line(*arguments: str, cache: Path) -> list[str]:
    return [sys.executable, "-m", "wanderers", "almanac", *arguments, "--cache", str(cache)]


@pytest.mark.parametrize("form", ["table", "csv", "json", "parquet"])
def test_a_reader_that_goes_away_is_no_failure_worth_a_word(form: str, cache_folder: Path) -> None:
    line = command_line("--from", "2020", "--to", "2030", "--format", form, cache=cache_folder)
    with subprocess.Popen(line, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as running:
        assert running.stdout is not None and running.stderr is not None
        assert running.stdout.read(10)
        running.stdout.close()
        assert running.stderr.read() == b""
        assert running.wait(60.0) in (0, 1)


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="this system has no device that is always full")
@pytest.mark.parametrize("form", ["table", "csv"])
def test_a_full_disk_is_one_line_and_status_1(form: str, cache_folder: Path) -> None:
    line = command_line(*YEAR, "--kind", "node", "--format", form, cache=cache_folder)
    with Path("/dev/full").open("wb") as full:
        run = subprocess.run(line, stdout=full, stderr=subprocess.PIPE, check=False, text=True)
    assert run.returncode == 1
    assert len(run.stderr.splitlines()) == 1
    assert "No space left" in run.stderr and "Traceback" not in run.stderr


@pytest.mark.skipif(os.name == "nt", reason="there are no pseudo-terminals")
@pytest.mark.parametrize(("options", "shown"), [((), True), (("--quiet",), False)])
def test_long_work_shows_progress_on_a_terminal_unless_told_to_be_quiet(
    options: tuple[str, ...], shown: bool, small_kernel: Path, tmp_path: Path
) -> None:
    controller, terminal = os.openpty()
    kernel = ("--kernel", str(small_kernel))
    line = command_line(*IN_SMALL, "--kind", "node", *kernel, *options, cache=tmp_path)
    run = subprocess.run([*line, "--format", "csv"], stdout=subprocess.PIPE, stderr=terminal, check=False)
    os.close(terminal)
    try:
        said = os.read(controller, 10_000).decode()
    except OSError:  # how Linux says that nothing was written before the other end closed
        said = ""
    os.close(controller)
    assert run.returncode == 0
    assert run.stdout.startswith(b"event_id,")
    assert ("computing tracks" in said) is shown
    if not shown:
        assert said == ""


def test_no_progress_is_shown_where_standard_error_is_no_terminal(small_kernel: Path, tmp_path: Path) -> None:
    request = ("almanac", *IN_SMALL, "--kind", "node", "--kernel", str(small_kernel))
    run = program(*request, cache=tmp_path)
    assert (run.returncode, run.stderr) == (0, "")
