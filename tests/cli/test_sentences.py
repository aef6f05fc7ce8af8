"""``--format markdown`` with its lengths and languages, as users type them."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.cli.test_bad_input import program, refused

SPAN = ("--from", "2027", "--to", "2027-02", "--body", "mars", "--stars", "none")


def test_the_almanac_as_sentences(cache_folder: Path) -> None:
    run = program("almanac", *SPAN, "--format", "markdown", cache=cache_folder)
    assert run.returncode == 0 and run.stderr == ""
    assert "\nMars turns retrograde\n" in run.stdout
    assert (
        "On 10 January 2027 about 13h UTC Mars stands still in longitude and turns retrograde in Leo"
        in run.stdout
    )
    assert "<!-- station-ecliptic-mars-retrograde-c13-1 -->" in run.stdout


def test_one_length_and_another_language_into_a_file(cache_folder: Path, tmp_path: Path) -> None:
    path = tmp_path / "events.md"
    run = program(
        "almanac", *SPAN, "--length", "short", "--language", "de", "--out", str(path), cache=cache_folder
    )
    assert (run.returncode, run.stdout, run.stderr) == (0, "", "")
    assert "- **10. Januar 2027, 13 Uhr UTC:** Mars wird rückläufig <!--" in path.read_text(encoding="utf-8")


def test_seasons_as_sentences(cache_folder: Path) -> None:
    run = program(
        "seasons",
        "--from",
        "2027",
        "--to",
        "2028",
        "--body",
        "mars",
        "--format",
        "markdown",
        cache=cache_folder,
    )
    assert run.returncode == 0
    assert "Mars retrograde 81 days" in run.stdout


def test_gatherings_as_sentences(cache_folder: Path) -> None:
    run = program(
        "gatherings", "--from", "2027", "--to", "2028", "--quiet", "--format", "markdown", cache=cache_folder
    )
    assert run.returncode == 0 and run.stderr == ""
    assert "Mercury, Venus and Jupiter within 6.3°, 23h UTC" in run.stdout


def test_an_almanac_from_a_site_tells_local_time_and_where_to_look(cache_folder: Path) -> None:
    site = ("--site", "52.13,11.62", "--zone", "Europe/Berlin", "--quiet")
    run = program("almanac", *SPAN, *site, "--format", "markdown", cache=cache_folder)
    assert run.returncode == 0
    assert "Dates and times are local: " in run.stdout and "Europe/Berlin (zone data " in run.stdout
    assert (
        "On 10 January 2027 about 14h local time Mars stands still in longitude and turns retrograde"
        in run.stdout
    )
    assert " Look at " in run.stdout


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("track", "mars", "--format", "markdown"), ("'markdown' is not one of",)),
        (("seasons", "--length", "short"), ("--length", "--format markdown")),
        (("almanac", "--language", "de", "--format", "csv"), ("--language", "--format markdown")),
        (("almanac", "--format", "markdown", "--length", "tiny"), ("--length", "'tiny'")),
        (("almanac", "--format", "markdown", "--language", "xx"), ("unknown language 'xx'", "de, en")),
        (("almanac", "--format", "markdown", "--side-by-side", *SPAN), ("--side-by-side",)),
        (("seasons", "--format", "markdown", "--site", "52.1,11.6", "--zone", "UTC"), ("--site", "--format")),
    ],
)  # fmt: skip
def test_what_cannot_be_is_refused_in_one_line(
    arguments: tuple[str, ...], words: tuple[str, ...], cache_folder: Path
) -> None:
    refused(program(*arguments, cache=cache_folder), 2, *words)
