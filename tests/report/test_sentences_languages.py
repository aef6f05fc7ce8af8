"""Files of phrases: complete, consistent, replaceable; what is wrong with one is said in one line."""

from __future__ import annotations

import tomllib
from importlib.resources import files
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.ephemeris.constellations import ABBREVIATIONS
from wanderers.errors import UnknownNameError
from wanderers.events.kinds import Kind
from wanderers.report.phrases.language import LENGTHS, LanguageError, language, packaged_languages, templates
from wanderers.report.phrases.sentences import VARIANTS
from wanderers.report.phrases.templates import composed, field_names

ENGLISH = (files("wanderers.data") / "phrases" / "en.toml").read_text(encoding="utf-8")


def written(folder: Path, text: str) -> str:
    path = folder / "own.toml"
    path.write_text(text, encoding="utf-8")
    return str(path)


def test_english_and_german_are_packaged() -> None:
    assert packaged_languages() == ("de", "en")


@pytest.mark.parametrize("code", ["en", "de"])
def test_every_kind_and_variant_has_three_lengths(code: str) -> None:
    tables = language(code).table("event")
    assert set(tables) == {kind.value for kind in Kind}
    for kind, names in VARIANTS.items():
        assert set(tables[kind]) == set(names)
        assert all(set(tables[kind][name]) == set(LENGTHS) for name in names)


def test_no_german_sentence_was_left_in_english() -> None:
    english, german = ([*templates({"event": language(code).table("event")})] for code in ("en", "de"))
    assert {path for path, _ in english} == {path for path, _ in german}
    alike = {text for _, text in set(english) & set(german)}
    assert alike <= {"{body}–{other}", "{bodies} in {gap}"}


@pytest.mark.parametrize("code", ["en", "de"])
def test_constellations_named_by_a_language_exist_and_have_every_form(code: str) -> None:
    words = language(code)
    forms = set(words.table("forms", "constellation"))
    for abbreviation, names in words.table("constellations").items():
        assert abbreviation in ABBREVIATIONS
        assert set(names) == forms


def test_a_file_of_ones_own_is_a_language(tmp_path: Path) -> None:
    text = ENGLISH.replace('short = ["{body} at opposition"]', 'short = ["{body} opposite the Sun"]')
    own = language(written(tmp_path, text))
    assert own.code == "own"
    assert own.table("event", "opposition", "any")["short"] == ["{body} opposite the Sun"]


@pytest.mark.parametrize(
    ("before", "after", "word"),
    [
        ("[sides]\n", "[slides]\n", "no sides"),
        ('short = ["{body} at opposition"]\n', "", "no event.opposition.any.short"),
        ('short = ["{body} at opposition"]\n', "short = []\n", "no event.opposition.any.short"),
        ("{body} at opposition", "{planet} at opposition", "unknown field {planet}"),
        ("[numbers]", "[numbers", "is no TOML"),
    ],
)
def test_a_faulty_file_is_refused_in_one_line(before: str, after: str, word: str, tmp_path: Path) -> None:
    assert before in ENGLISH
    with pytest.raises(LanguageError) as raised:
        language(written(tmp_path, ENGLISH.replace(before, after, 1)))
    assert word in str(raised.value) and "own.toml" in str(raised.value)
    assert "\n" not in str(raised.value)


def test_an_unknown_language_gets_the_list(tmp_path: Path) -> None:
    with pytest.raises(UnknownNameError, match="unknown language 'xx': choose from de, en"):
        language("xx")
    with pytest.raises(LanguageError, match="cannot read the phrases in"):
        language(str(tmp_path / "missing.toml"))


def test_names_are_found_whatever_their_case() -> None:
    assert language(" DE ") == language("de")


@pytest.mark.parametrize("code", ["en", "de"])
def test_files_are_plain_toml_in_utf_8(code: str) -> None:
    octets = (files("wanderers.data") / "phrases" / f"{code}.toml").read_bytes()
    assert tomllib.loads(octets.decode("utf-8"))["language"] in ("English", "Deutsch")


FACTS = {"a": "alpha", "b": "beta", "none": None}


def test_the_first_template_that_fits_is_taken_as_full_as_it_fits() -> None:
    some = ["{a} and {b}[, {none}][, {b} again][, more]", "{a}"]
    assert composed(some, FACTS, 40) == "Alpha and beta, beta again, more"
    assert composed(some, FACTS, 31) == "Alpha and beta, beta again"
    assert composed(some, FACTS, 20) == "Alpha and beta, more"
    assert composed(some, FACTS, 14) == "Alpha and beta"
    assert composed(some, FACTS, 13) == "Alpha"


def test_a_template_with_an_unknown_fact_is_passed_over() -> None:
    assert composed(["{none} first", "{b}"], FACTS, 40) == "Beta"


def test_what_must_follow_is_kept_before_what_may_be_left_out() -> None:
    assert composed(["{a}[ {b}]", "{a}"], FACTS, 13, ["; then[ {b}]", "; then"]) == "Alpha; then"
    assert composed(["{a}[ {b}]"], FACTS, 16, ["; then[ {b}]"]) == "Alpha; then beta"
    assert composed(["{a} {a} {a}", "{a}"], FACTS, 12, ["; then", ""]) == "Alpha; then"


@given(st.integers(1, 60))
def test_no_text_is_longer_than_its_limit(limit: int) -> None:
    text = composed(["{a} {b} {a} {b}[ {a}][ {b}]", "{a} {b}"], FACTS, limit)
    assert 0 < len(text) <= limit


def test_fields_of_a_template_are_found_in_and_out_of_brackets() -> None:
    assert field_names("{a}[ x {b}] {a}") == {"a", "b"}
