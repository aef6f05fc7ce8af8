"""Options of every command that looks from a site, and the types that understand what is typed."""

from __future__ import annotations

import datetime as dt
import functools
import re
from collections.abc import Callable
from typing import Any, Final, TypeVar

import click
import numpy as np

from wanderers.cli.options import warn
from wanderers.constants import SECONDS_PER_DAY
from wanderers.ephemeris import timescales
from wanderers.ephemeris.dates import datetime64_from_jd, parse_date
from wanderers.errors import DateError, UsageProblem
from wanderers.site import site_files
from wanderers.site.finding import find_site
from wanderers.site.places import Site, SiteError
from wanderers.site.rules import Rules
from wanderers.site.visibility import Criteria
from wanderers.site.zones import Zone, zone_named

Dates = tuple[np.datetime64, np.datetime64]
Command = TypeVar("Command", bound=Callable[..., Any])

CLOCK: Final = re.compile(r"(?P<clock>.*?)\s*(?P<zone>Z|z|[+-]\d{2}:?\d{2})?")
TIME_OF_DAY: Final = re.compile(r"\d{1,2}:\d{2}(:\d{2})?")
WHERE_FROM: Final = (
    "Where to watch from: a name from sites.toml, a city, or coordinates, north and east positive."
)
WHICH_CLOCK: Final = "Time zone, as Europe/Berlin. [default: the site's own]"
HEIGHT: Final = click.FloatRange(0.0, 89.0)
ALTITUDE: Final = click.FloatRange(-90.0, 90.0)
LOSS: Final = click.FloatRange(0.0, 5.0, min_open=True)
BLACKNESS: Final = click.FloatRange(10.0, 23.0)
HOW_HIGH: Final = "Least altitude of a body. [default: 10]"
HOW_DARK: Final = "Highest altitude of the Sun."
HOW_CLEAR: Final = (
    "Magnitudes lost per air mass: 0.2 on a mountain, 0.4 and more in haze. "
    "[default: by elevation, 0.28 at sea level]"
)
HOW_BLACK: Final = "Night sky overhead, magnitudes a square arcsecond: 18 in a city, 21.6 far from lamps."
HOW_TO_NAME: Final = (
    "give --site: a name from sites.toml, a city, or LATITUDE,LONGITUDE[,ELEVATION_M] with --zone; "
    "'wanderers sites' lists yours"
)


def site_options(*, required: bool) -> Callable[[Command], Command]:
    """Add ``--site`` and ``--zone``; the command receives ``site``, None where none is given and needed.

    Where a site is required and the user's files hold just one, that is taken.
    """

    def decorate(command: Command) -> Command:
        @click.option("--site", "site_text", metavar="NAME|LAT,LON[,ELEVATION_M]", help=WHERE_FROM)
        @click.option("--zone", "zone_text", metavar="IANA_NAME", help=WHICH_CLOCK)
        @functools.wraps(command)
        def wrapped(*args: Any, site_text: str | None, zone_text: str | None, **kwargs: Any) -> Any:
            return command(*args, site=chosen_site(site_text, zone_text, required=required), **kwargs)

        return wrapped  # type: ignore[return-value]

    return decorate


def chosen_site(text: str | None, zone: str | None, *, required: bool) -> Site | None:
    """Return the site that was typed, and say what had to be assumed.

    Raises:
        SiteError: it does not exist, is ambiguous, or none is given where one is needed.
        UnknownNameError: the zone does not exist.
    """
    paths = site_files.site_files()
    if text is None:
        if zone is not None:
            zone_named(zone)  # a wrong name is said to be wrong even where it is not needed
        return _only_site(zone) if required else None
    found = find_site(text, zone, paths)
    if found.notice:
        click.echo(f"wanderers: {found.notice}", err=True)
    return found.site


def _only_site(zone: str | None) -> Site:
    entries = site_files.read_entries(site_files.site_files())
    if len(entries) != 1:
        raise SiteError(HOW_TO_NAME)
    return find_site(entries[0].name, zone, site_files.site_files()).site


def rules_options(command: Command) -> Command:
    """Add what counts as watchable; the command receives ``rules``."""

    @click.option("--min-altitude", type=HEIGHT, metavar="DEG", help=HOW_HIGH)
    @click.option("--sun-below", type=ALTITUDE, metavar="DEG", default=-6.0, show_default=True, help=HOW_DARK)
    @click.option("--extinction", type=LOSS, metavar="MAG", help=HOW_CLEAR)
    @click.option(
        "--dark-sky", type=BLACKNESS, metavar="MAG", default=21.0, show_default=True, help=HOW_BLACK
    )
    @functools.wraps(command)
    def wrapped(
        *args: Any,
        min_altitude: float | None,
        sun_below: float,
        extinction: float | None,
        dark_sky: float,
        **kwargs: Any,
    ) -> Any:
        criteria = Criteria(extinction_mag=extinction, dark_zenith_mag=dark_sky)
        lowest = Rules().min_altitude_deg if min_altitude is None else min_altitude
        return command(*args, rules=Rules(lowest, sun_below, criteria), **kwargs)

    return wrapped  # type: ignore[return-value]


def parse_evenings(from_text: str | None, to_text: str | None, zone: Zone, default_days: int) -> Dates:
    """Return the first local date and the one after the last.

    Raises:
        DateError: a date that does not exist, or an end not after the beginning.
    """
    first = np.datetime64(today(zone), "D") if from_text is None else _date(from_text)
    end = first + np.timedelta64(default_days, "D") if to_text is None else _date(to_text, up=True)
    if end <= first:
        later = first + np.timedelta64(1, "D")
        raise DateError(f"--to {to_text} is not after --from {first}: give a later date, as {later}")
    return first, end


def today(zone: Zone) -> dt.date:
    """Return the date that the clock shows now."""
    return dt.datetime.now(zone.rules).date()


def parse_moment(text: str, zone: Zone) -> float:
    """Return the TT Julian date of a time typed by the local clock, or with Z or an offset.

    Args:
        text: an ISO 8601 date and time; a bare hh:mm is today's.
        zone: the clock meant where nothing follows the time.

    Raises:
        DateError: there is no such date or time of day.
        UsageProblem: the clock skipped that time.
    """
    match = CLOCK.fullmatch(text.strip())
    clock, offset = (match["clock"], match["zone"]) if match else (text, None)
    jd = _of_today(clock, zone) if TIME_OF_DAY.fullmatch(clock) else parse_date(clock)
    if offset is None:
        return float(timescales.jd_tt_from_utc(_from_clock(text, jd, zone)))
    return float(timescales.jd_tt_from_utc(jd - _offset_s(offset) / SECONDS_PER_DAY))


def _of_today(time: str, zone: Zone) -> float:
    """Return the Julian date of a bare time of day, by the clock.

    Raises:
        DateError: no day has it.
    """
    try:
        return parse_date(f"{today(zone)}T{time.zfill(5)}")
    except DateError as error:
        raise DateError(f"there is no time of day '{time}': write 00:00 to 23:59") from error


def _from_clock(text: str, jd: float, zone: Zone) -> float:
    """Return the UTC Julian date at which the clock shows a reading."""
    reading = datetime64_from_jd(jd).astype("datetime64[ms]").item()
    if not isinstance(reading, dt.datetime):  # a year that Python's clocks do not know
        return float(jd - zone.offset_s(np.array([jd]))[0] / SECONDS_PER_DAY)
    instants = zone.instants_jd_utc(reading)
    if not instants:
        raise UsageProblem(
            f"{text} does not exist in {zone.name}: clocks were put forward; give another time or an offset"
        )
    if len(instants) > 1:
        warn(f"{text} comes twice in {zone.name}: the first is taken; an offset, as +01:00, tells them apart")
    return instants[0]


def _offset_s(text: str) -> int:
    if text in "Zz":
        return 0
    hours, minutes = int(text[1:3]), int(text[-2:])
    return (-1 if text[0] == "-" else 1) * (hours * 3_600 + minutes * 60)


def _date(text: str, *, up: bool = False) -> np.datetime64:
    """Return the calendar date of a text, the next one for a time within a day where ``up``."""
    stamp = datetime64_from_jd(parse_date(text)).reshape(1)
    day = stamp.astype("datetime64[D]")
    later = np.array(up & (day != stamp), dtype=np.int64)
    date: np.datetime64 = (day + later)[0]
    return date
