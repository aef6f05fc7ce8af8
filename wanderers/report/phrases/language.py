"""Languages: one file of phrases each, found by its name, checked when read."""

from __future__ import annotations

import functools
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path
from typing import Any, Final

from wanderers.errors import UnknownNameError, WanderersError
from wanderers.files import why_unreadable
from wanderers.report.phrases.templates import field_names

SUFFIX: Final = ".toml"
LENGTHS: Final = {"short": 25, "medium": 60, "long": 140}
"""Names of the lengths and the most characters of each: what a day's box, a line and a short paragraph hold.
Common practice, no source."""


class LanguageError(WanderersError):
    """A file of phrases that cannot be read or lacks something."""


@dataclass(frozen=True, slots=True)
class Language:
    """The phrases of one language.

    Attributes:
        code: its name, as ``en``.
        words: the file's tables.
    """

    code: str
    words: Mapping[str, Any]

    def phrase(self, *path: str) -> str:
        """Return a text by the names of its tables."""
        return str(self.table(*path[:-1])[path[-1]])

    def table(self, *path: str) -> Mapping[str, Any]:
        """Return a table by its names."""
        found: Mapping[str, Any] = self.words
        for name in path:
            found = found[name]
        return found

    def counted(self, unit: str, number: str) -> str:
        """Return a number with its unit in the right form: one form for ``1``, another for all else."""
        return self.phrase("units", unit, "one" if number == "1" else "many").format(n=number)

    def listed(self, names: tuple[str, ...]) -> str:
        """Return names as a list in a sentence."""
        last = self.phrase("document", "and").join(names[-2:])
        return ", ".join((*names[:-2], last))

    def number(self, value: float, decimals: int) -> str:
        """Return a number with the language's decimal sign and a real minus, never minus zero."""
        plain = f"{round(value, decimals) + 0.0:,.{decimals}f}".replace("-", "\N{MINUS SIGN}")
        signs = {",": self.phrase("numbers", "thousands"), ".": self.phrase("numbers", "decimal")}
        return "".join(signs.get(sign, sign) for sign in plain)


def packaged_languages() -> tuple[str, ...]:
    """Return the names of the languages that come with the program."""
    folder = files("wanderers.data") / "phrases"
    return tuple(
        sorted(item.name.removesuffix(SUFFIX) for item in folder.iterdir() if _is_phrases(item.name))
    )


@functools.cache
def language(name: str) -> Language:
    """Return a language by its name, or from a file of phrases of the user's own.

    Args:
        name: one of :func:`packaged_languages`, in any case, or the path of a TOML file.

    Raises:
        UnknownNameError: there is no such language.
        LanguageError: the file cannot be read or lacks something.
    """
    if _is_phrases(name):
        return _checked(_read(Path(name).stem, name, _text_of(Path(name))), name)
    code = name.strip().lower()
    if code not in packaged_languages():
        advice = f"choose from {', '.join(packaged_languages())}, or give a TOML file of phrases"
        raise UnknownNameError("language", name, packaged_languages(), advice=advice)
    file = files("wanderers.data") / "phrases" / f"{code}{SUFFIX}"
    read = _read(code, file.name, file.read_text(encoding="utf-8"))
    return read if code == REFERENCE else _checked(read, file.name)


def templates(tables: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    """Yield every list of templates below a table, each template with the names of its tables."""
    for name, value in tables.items():
        if isinstance(value, Mapping):
            yield from ((f"{name}.{path}", text) for path, text in templates(value))
        elif isinstance(value, list):
            yield from ((name, str(text)) for text in value)


def _is_phrases(name: str) -> bool:
    return name.endswith(SUFFIX)


def _text_of(path: Path) -> str:
    try:
        return path.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        raise LanguageError(f"cannot read the phrases in {path}: {why_unreadable(error)}") from error


def _read(code: str, source: str, text: str) -> Language:
    """Return the language of a file's text."""
    try:
        return Language(code, tomllib.loads(text))
    except tomllib.TOMLDecodeError as error:
        raise LanguageError(f"{source} is no TOML: {error}") from error


def _checked(read: Language, source: str) -> Language:
    """Hold a language against the English one."""
    _require_all_of(language(REFERENCE).words, read.words, source, "")
    _require_known_fields(read.words, source)
    return read


REFERENCE: Final = "en"
"""The language whose file says what every file must have."""
FREE: Final = frozenset({"names", "constellations"})
"""Tables whose rows a language chooses itself."""


def _require_all_of(wanted: Mapping[str, Any], given: Mapping[str, Any], source: str, path: str) -> None:
    for name, value in wanted.items():
        if name not in given or type(given[name]) is not type(value) or (value and given[name] in ([], {})):
            raise LanguageError(f"{source} has no {path}{name}: translate it from {REFERENCE}{SUFFIX}")
        if isinstance(value, Mapping) and not (path == "" and name in FREE):
            _require_all_of(value, given[name], source, f"{path}{name}.")


def _require_known_fields(words: Mapping[str, Any], source: str) -> None:
    """Refuse a template with a field that neither the English ones nor the language's forms have."""
    known = {field for _, text in templates(language(REFERENCE).words) for field in field_names(text)}
    forms = words["forms"]
    known |= {f"{role}_{form}" for role in ("body", "other") for form in forms["name"]}
    known |= {f"{role}_{form}" for role in ("constellation", "left") for form in forms["constellation"]}
    for path, text in templates(words):
        unknown = field_names(text) - known
        if unknown:
            raise LanguageError(f"{source}: {path} has an unknown field {{{min(unknown)}}} in '{text}'")
