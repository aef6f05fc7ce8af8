"""The user's own sites: ``sites.toml`` in the working folder, then in the user's configuration folder.

A file holds one table a site::

    [hilltop]
    latitude_deg = 52.13
    longitude_deg = 11.62
    elevation_m = 120
    zone = "Europe/Berlin"
    horizon = [[0, 2.0], [90, 5.5], [270, 1.0]]  # azimuth, altitude

Elevation and horizon may be left out. ``latitude``, ``longitude`` and ``elevation`` are understood too.
"""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

import platformdirs

from wanderers.errors import UsageProblem, WanderersError
from wanderers.files import write_output
from wanderers.site.places import HorizonProfile, Site, SiteError, horizon_of
from wanderers.site.zones import zone_named

FILE_NAME: Final = "sites.toml"
KEYS: Final = {
    "latitude_deg": "latitude_deg",
    "latitude": "latitude_deg",
    "longitude_deg": "longitude_deg",
    "longitude": "longitude_deg",
    "elevation_m": "elevation_m",
    "elevation": "elevation_m",
    "zone": "zone",
    "horizon": "horizon",
}
"""What may be written, and what it means."""
REQUIRED: Final = ("latitude_deg", "longitude_deg", "zone")
BARE_KEY: Final = re.compile(r"[A-Za-z0-9_-]+")


class SiteFileError(WanderersError):
    """A sites.toml that cannot be read or is no TOML."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One table of a sites file.

    Attributes:
        name: the site's name.
        path: the file.
        site: the site, or None if it cannot be understood.
        problem: what is wrong with it, else the empty text.
    """

    name: str
    path: Path
    site: Site | None
    problem: str = ""


def site_files() -> tuple[Path, ...]:
    """Return where sites are looked for, first the working folder; the files need not exist."""
    return (Path.cwd() / FILE_NAME, user_site_file())


def user_site_file() -> Path:
    """Return the file in the user's configuration folder."""
    return platformdirs.user_config_path("wanderers") / FILE_NAME


def read_entries(paths: Iterable[Path]) -> list[Entry]:
    """Return every site of some files, in order; a name met before hides later ones.

    Raises:
        SiteFileError: a file exists but is no TOML.
    """
    entries: dict[str, Entry] = {}
    for path in paths:
        for name, table in _tables(path).items():
            entries.setdefault(name.casefold(), _entry(name, path, table))
    return list(entries.values())


def site_in_files(name: str, paths: Iterable[Path]) -> Site | None:
    """Return the user's site of a name, in any case, or None.

    Raises:
        SiteError: there is one, but something is wrong with it.
        SiteFileError: a file exists but is no TOML.
    """
    wanted = name.strip().casefold()
    for entry in read_entries(paths):
        if entry.name.casefold() == wanted:
            if entry.site is None:
                raise SiteError(f"site '{entry.name}' in {entry.path}: {entry.problem}")
            return entry.site
    return None


def add_site(path: Path, site: Site) -> None:
    """Append a site to a file, making the file if need be; what stands in it stays as it is.

    Raises:
        SiteError: the file has a site of that name.
        SiteFileError: the file is no TOML.
        OutputError: it cannot be written.
    """
    if any(site.name.casefold() == known.casefold() for known in _tables(path)):
        raise SiteError(f"{path} has a site '{site.name}' already: choose another name or edit the file")
    before = path.read_text(encoding="utf-8") if path.exists() else ""
    gap = "" if not before else "\n" if before.endswith("\n") else "\n\n"
    write_output(path, (before + gap + as_toml(site)).encode())


def as_toml(site: Site) -> str:
    """Return the table of a site."""
    name = site.name if BARE_KEY.fullmatch(site.name) else json.dumps(site.name, ensure_ascii=False)
    lines = [
        f"[{name}]",
        f"latitude_deg = {site.latitude_deg!r}",
        f"longitude_deg = {site.longitude_deg!r}",
        f"elevation_m = {site.elevation_m!r}",
        f"zone = {json.dumps(site.zone)}",
    ]
    if not site.horizon.is_level:
        points = ", ".join(f"[{azimuth!r}, {altitude!r}]" for azimuth, altitude in site.horizon.points)
        lines.append(f"horizon = [{points}]  # azimuth, altitude in degrees")
    return "\n".join(lines) + "\n"


def _tables(path: Path) -> Mapping[str, Any]:
    """Return the tables of a file by site; none if there is no file."""
    try:
        document = tomllib.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError:
        return {}
    except OSError as error:
        raise SiteFileError(f"cannot read {path}: {error.strerror}; correct its permissions") from error
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise SiteFileError(f"{path} is no TOML file: {error}; correct it or move it away") from error
    nested = document.get("sites")
    if isinstance(nested, dict) and all(isinstance(table, dict) for table in nested.values()):
        return nested
    return document


def _entry(name: str, path: Path, table: object) -> Entry:
    try:
        return Entry(name, path, _site(name, table))
    except UsageProblem as error:
        return Entry(name, path, None, str(error))


def _site(name: str, table: object) -> Site:
    """Turn a table into a site.

    Raises:
        SiteError, UnknownNameError: it says something that is no site.
    """
    if not isinstance(table, dict):
        raise SiteError(f"it is no table: write [{name}] and below it {', '.join(REQUIRED)}")
    unknown = [key for key in table if key not in KEYS]
    if unknown:
        raise SiteError(f"'{unknown[0]}' is not known: write {', '.join(dict.fromkeys(KEYS.values()))}")
    values = {KEYS[key]: value for key, value in table.items()}
    missing = [key for key in REQUIRED if key not in values]
    if missing:
        raise SiteError(f"{missing[0]} is missing")
    numbers = {
        key: _number(key, values.get(key, 0.0)) for key in ("latitude_deg", "longitude_deg", "elevation_m")
    }
    zone = zone_named(str(values["zone"])).name
    return Site(name, **numbers, zone=zone, horizon=_horizon(values.get("horizon", [])))


def _number(key: str, value: object) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise SiteError(f"{key} must be a number, not {value!r}")
    return float(value)


def _horizon(value: object) -> HorizonProfile:
    """Read a list of pairs.

    Raises:
        SiteError: it is something else.
    """
    if not isinstance(value, list) or not all(_is_pair(pair) for pair in value):
        raise SiteError("horizon must be a list of [azimuth, altitude] pairs, as [[0, 2.0], [90, 5.5]]")
    return horizon_of(value)


def _is_pair(value: object) -> bool:
    return (
        isinstance(value, Sequence)
        and len(value) == 2
        and all(isinstance(number, int | float) and not isinstance(number, bool) for number in value)
    )
