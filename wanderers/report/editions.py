"""Editions of one calendar: several places, clocks and languages from one set of events in one run.

A file of editions holds one table an edition::

    [north]
    site = "Lantern Hill"  # a site's name or LATITUDE,LONGITUDE[,ELEVATION_M]
    language = "de"

    [harbour]
    zone = "Australia/Adelaide"  # a clock alone: local dates, but nothing about what can be seen

Each names a ``site`` or a ``zone``, or both (then the zone's clock is used at the site). ``language`` may be
left out. Ids of events never depend on the edition.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

from wanderers.errors import UsageProblem, WanderersError
from wanderers.files import why_unreadable
from wanderers.report.phrases.language import REFERENCE, Language, language
from wanderers.site.zones import Zone, zone_named

KEYS: Final = ("site", "zone", "language")
NAME: Final = re.compile(r"[A-Za-z0-9][A-Za-z0-9_-]*")
"""Names become parts of file names."""
EXAMPLE: Final = 'write [NAME] and below it site = "..." or zone = "Europe/Berlin"'


class EditionError(UsageProblem, LookupError):
    """An edition that cannot be understood."""


class EditionFileError(WanderersError):
    """A file of editions that cannot be read or is no TOML."""


@dataclass(frozen=True, slots=True)
class Edition:
    """One edition.

    Attributes:
        name: what it is called; no two of a file differ only in case.
        site: the site as written, to be looked up where sites are known; None without one.
        zone: the clock asked for; None takes the site's own.
        words: the language.
    """

    name: str
    site: str | None
    zone: Zone | None
    words: Language


def read_editions(path: Path) -> tuple[Edition, ...]:
    """Return the editions of a TOML file, in the order written.

    Raises:
        EditionFileError: the file cannot be read or is no TOML.
        EditionError: there is none, or one cannot be understood.
        UnknownNameError: a zone or a language does not exist.
    """
    try:
        tables = tomllib.loads(path.read_text(encoding="utf-8"))
    except (OSError, UnicodeDecodeError) as error:
        raise EditionFileError(f"cannot read the editions in {path}: {why_unreadable(error)}") from error
    except tomllib.TOMLDecodeError as error:
        raise EditionFileError(f"{path} is no TOML: {error}; {EXAMPLE}") from error
    return editions(tables, str(path))


def editions(tables: Mapping[str, Any], source: str) -> tuple[Edition, ...]:
    """Return the editions of tables already read; ``source`` names them in messages.

    Raises:
        EditionError: there is none, or one cannot be understood.
        UnknownNameError: a zone or a language does not exist.
    """
    if not tables:
        raise EditionError(f"{source} holds no edition: {EXAMPLE}")
    found = tuple(_edition(name, table, source) for name, table in tables.items())
    seen: dict[str, str] = {}
    for name in tables:
        if seen.setdefault(name.casefold(), name) != name:
            first = seen[name.casefold()]
            raise EditionError(f"{source}: editions '{first}' and '{name}' would share files: rename one")
    return found


def _edition(name: str, table: Any, source: str) -> Edition:
    where = f"{source}: edition '{name}'"
    if not NAME.fullmatch(name):
        raise EditionError(f"{where} needs a name of letters, digits, - and _, for it names files")
    if not isinstance(table, Mapping):
        raise EditionError(f"{where} is no table: {EXAMPLE}")
    for key, value in table.items():
        if key not in KEYS:
            raise EditionError(f"{where} has an unknown key '{key}': use {', '.join(KEYS)}")
        if not isinstance(value, str) or not value.strip():
            raise EditionError(f"{where}: {key} must be a text in quotes")
    site, zone = table.get("site"), table.get("zone")
    if site is None and zone is None:
        raise EditionError(f"{where} has neither site nor zone: give one of them")
    words = language(table.get("language", REFERENCE))
    return Edition(name, site, None if zone is None else zone_named(zone), words)
