"""Files of editions: what is understood, and what is refused in one line."""

from __future__ import annotations

from pathlib import Path

import pytest

from wanderers.errors import UnknownNameError
from wanderers.report.editions import EditionError, EditionFileError, read_editions

SOUND = """
[north]
site = "Lantern Hill"
language = "de"

[harbour]
zone = "australia/adelaide"

[both]
site = "52.1,11.6"
zone = "UTC"
"""


def written(folder: Path, text: str) -> Path:
    path = folder / "editions.toml"
    path.write_text(text, encoding="utf-8")
    return path


def test_editions_are_read_in_their_order(tmp_path: Path) -> None:
    north, harbour, both = read_editions(written(tmp_path, SOUND))
    assert [edition.name for edition in (north, harbour, both)] == ["north", "harbour", "both"]
    assert (north.site, north.zone, north.words.code) == ("Lantern Hill", None, "de")
    assert harbour.zone is not None and both.zone is not None
    assert (harbour.site, harbour.zone.name, harbour.words.code) == (None, "Australia/Adelaide", "en")
    assert (both.site, both.zone.name) == ("52.1,11.6", "UTC")


@pytest.mark.parametrize(
    ("text", "word"),
    [
        ("", "holds no edition"),
        ("[empty]\n", "neither site nor zone"),
        ('[a]\nzone = "UTC"\nlang = "de"\n', "unknown key 'lang'"),
        ("[a]\nzone = 1\n", "zone must be a text"),
        ('[a]\nzone = " "\n', "zone must be a text"),
        ('name = "a"\n', "'name' is no table"),
        ('["../a"]\nzone = "UTC"\n', "names files"),
        ('[a]\nzone = "UTC"\n[A]\nzone = "UTC"\n', "would share files"),
    ],
)
def test_what_cannot_be_understood_is_refused(text: str, word: str, tmp_path: Path) -> None:
    with pytest.raises(EditionError, match=r"editions\.toml") as raised:
        read_editions(written(tmp_path, text))
    assert word in str(raised.value) and "\n" not in str(raised.value)


@pytest.mark.parametrize(
    ("line", "what"), [('zone = "Europe/Berlim"', "zone"), ('zone = "UTC"\nlanguage = "xx"', "language")]
)
def test_unknown_zones_and_languages_get_the_nearest(line: str, what: str, tmp_path: Path) -> None:
    with pytest.raises(UnknownNameError, match=f"unknown {what}"):
        read_editions(written(tmp_path, f"[a]\n{line}\n"))


def test_files_that_are_none_are_refused(tmp_path: Path) -> None:
    with pytest.raises(EditionFileError, match="cannot read the editions"):
        read_editions(tmp_path / "missing.toml")
    with pytest.raises(EditionFileError, match="is no TOML"):
        read_editions(written(tmp_path, "[a\n"))
