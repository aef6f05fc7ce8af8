"""``wanderers sites``: list, add and check the user's sites; find a city."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import Final

import click
import polars as pl

from wanderers.cli.output import Destination, output_options, write_table
from wanderers.errors import UsageProblem
from wanderers.files import require_writable
from wanderers.site import gazetteer, site_files
from wanderers.site.columns import CITY_COLUMNS, SITE_LIST_COLUMNS
from wanderers.site.places import Site, SiteError, looks_like_coordinates, parse_coordinates, parse_horizon
from wanderers.site.site_files import Entry, SiteFileError, add_site, read_entries, user_site_file
from wanderers.site.summary import place_words
from wanderers.site.zones import zone_data_version, zone_named

MOST_CITIES: Final = 50
HILLS: Final = "How high hills and roofs stand, by azimuth from north through east. [default: level]"
WHICH_FILE: Final = (
    "Write sites.toml in the working folder. [default: there if it exists, else in your configuration folder]"
)
COORDINATES_MAY_BE_NEGATIVE: Final = {"ignore_unknown_options": True}


@click.group("sites", invoke_without_command=True)
@click.pass_context
def command(context: click.Context) -> None:
    """List, add and check your sites, and find cities.

    Sites are kept in sites.toml, in the working folder or in your configuration folder.

    \b
    Example: add a site in the southern hemisphere, then list all
        wanderers sites add ridge -35.3,149.1,780 --zone Australia/Sydney --horizon 0:2,90:6,270:1
        wanderers sites
    """  # noqa: D301  click reads the mark
    if context.invoked_subcommand is None:
        context.invoke(list_sites, form=None, path=None)


@command.command("list")
@output_options
def list_sites(*, destination: Destination) -> None:
    """List your sites.

    \b
    Example:
        wanderers sites list --format csv
    """  # noqa: D301  click reads the mark
    entries = read_entries(site_files.site_files())
    places = " and ".join(str(path) for path in site_files.site_files())
    heading = f"{len(entries)} site{'' if len(entries) == 1 else 's'} of your own, from {places}"
    table = _listed(entries)
    write_table(table if destination.format != "table" else _to_print(table), destination, heading)


@command.command("add", context_settings=COORDINATES_MAY_BE_NEGATIVE)
@click.argument("name")
@click.argument("place", metavar="LAT,LON[,ELEVATION_M]|CITY")
@click.option("--zone", metavar="IANA_NAME", help="Time zone, as Europe/Berlin; a city brings its own.")
@click.option("--elevation", type=float, metavar="M", help="Elevation in metres, where PLACE has none.")
@click.option("--horizon", default="", metavar="AZ:ALT,...", help=HILLS)
@click.option("--here", is_flag=True, help=WHICH_FILE)
def add(name: str, place: str, zone: str | None, elevation: float | None, horizon: str, here: bool) -> None:
    """Add a site.

    \b
    Example: a terrace in the north, with hills in the east
        wanderers sites add terrace 52.13,11.62,120 --zone Europe/Berlin --horizon 0:1,90:6,180:2
    """  # noqa: D301  click reads the mark
    site = _new_site(name, place, zone, elevation, horizon)
    path = _file_to_write(here)
    require_writable(path)
    add_site(path, site)
    click.echo(f"{place_words(site)}, {site.zone}: added to {path}", err=True)


@command.command("check")
@click.argument("names", nargs=-1, metavar="[NAME]...")
@output_options
def check(*, names: tuple[str, ...], destination: Destination) -> None:
    """Check your sites: place, zone, horizon. Exits with 1 if one is wrong.

    \b
    Example:
        wanderers sites check terrace
    """  # noqa: D301  click reads the mark
    entries = read_entries(site_files.site_files())
    known = {entry.name.casefold(): entry for entry in entries}
    unknown = [name for name in names if name.casefold() not in known]
    if unknown:
        raise SiteError(
            f"no site '{unknown[0]}' of your own: {', '.join(e.name for e in entries) or 'there is none'}"
        )
    chosen = [known[name.casefold()] for name in names] or entries
    table = _listed(chosen)
    wrong = [entry for entry in chosen if entry.problem]
    heading = f"{len(chosen)} checked, {len(wrong)} wrong; zone data {zone_data_version()}"
    write_table(table if destination.format != "table" else _to_print(table), destination, heading)
    if wrong:
        raise SiteFileError(f"site '{wrong[0].name}' in {wrong[0].path}: {wrong[0].problem}")


@command.command("find")
@click.argument("text", nargs=-1, required=True, metavar="CITY[,REGION][,COUNTRY]")
@output_options
def find(*, text: tuple[str, ...], destination: Destination) -> None:
    """Find cities by the beginning of their name, most inhabitants first.

    \b
    Example:
        wanderers sites find Springfield, US
    """  # noqa: D301  click reads the mark
    wanted = " ".join(text)
    cities = gazetteer.cities_like(wanted)
    if not cities:
        raise SiteError(
            f"no city is called '{wanted}': write the beginning of its name, and a country after a comma"
        )
    rows = [
        (city.full_name, city.country_name, city.population, city.latitude_deg, city.longitude_deg, city.zone)
        for city in (cities if destination.format != "table" else cities[:MOST_CITIES])
    ]
    table = pl.DataFrame(rows, schema=CITY_COLUMNS, orient="row")
    more = f", the {MOST_CITIES} largest of {len(cities)}" if table.height < len(cities) else ""
    write_table(table, destination, f"{table.height} places{more}; GeoNames, CC BY 4.0")


def _new_site(name: str, place: str, zone: str | None, elevation: float | None, horizon: str) -> Site:
    """Return the site described.

    Raises:
        SiteError: it is no place, or a name that could not be asked for.
        UsageProblem: the zone is missing.
    """
    if not name.strip() or looks_like_coordinates(name):
        raise SiteError(f"'{name}' is no name for a site: use letters")
    profile = parse_horizon(horizon)
    if looks_like_coordinates(place):
        if zone is None:
            raise UsageProblem("give --zone, the site's time zone, as Europe/Berlin")
        latitude, longitude, height = parse_coordinates(place)
        return Site(
            name,
            latitude,
            longitude,
            height if elevation is None else elevation,
            zone_named(zone).name,
            profile,
        )
    city = gazetteer.city_named(place)
    clock = zone_named(zone or city.zone).name
    return Site(name, city.latitude_deg, city.longitude_deg, elevation or 0.0, clock, profile)


def _file_to_write(here: bool) -> Path:
    working = Path.cwd() / site_files.FILE_NAME
    return working if here or working.exists() else user_site_file()


def _listed(entries: Iterable[Entry]) -> pl.DataFrame:
    """Return sites as a table; what cannot be understood has nulls and its problem."""
    rows = []
    for entry in entries:
        site = entry.site
        facts = (
            (None, None, None, None, None)
            if site is None
            else (site.latitude_deg, site.longitude_deg, site.elevation_m, site.zone, _horizon_words(site))
        )
        rows.append((entry.name, *facts, str(entry.path), entry.problem or None))
    return pl.DataFrame(rows, schema=SITE_LIST_COLUMNS, orient="row")


def _horizon_words(site: Site) -> str:
    if site.horizon.is_level:
        return "level"
    return ",".join(f"{azimuth:g}:{altitude:g}" for azimuth, altitude in site.horizon.points)


def _to_print(table: pl.DataFrame) -> pl.DataFrame:
    """Return the columns that fit on a screen."""
    return table.select(
        pl.col("site").alias("Site"),
        pl.col("latitude_deg").round(4).alias("Latitude"),
        pl.col("longitude_deg").round(4).alias("Longitude"),
        pl.col("elevation_m").round(0).alias("Metres"),
        pl.col("zone").alias("Zone"),
        pl.coalesce("problem", "horizon").alias("What"),
    )
