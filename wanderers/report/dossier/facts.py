"""Figures of a season in the size people speak of, each with its value, rounded form and table row."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

from wanderers.constants import AU_KM, SPEED_OF_LIGHT_KM_PER_S
from wanderers.events.season_marks import CLOSEST
from wanderers.report import facts
from wanderers.report.dossier.sources import Origin, SeasonRows, printed
from wanderers.site.summary import counted

TURNS: Final = (("station_retrograde", "at the first turn"), ("station_direct", "at the second turn"))
MIDDLES: Final = {"opposition": "opposition", "inferior_conjunction": "inferior conjunction"}
HOURS_LIMIT: Final = 48.0
"""Longest difference of time that is told in hours."""
SPOKEN_DIGITS: Final = 3
HARDLY: Final = 1.15
"""Ratio below which two brightnesses or sizes are not told apart."""


@dataclass(frozen=True, slots=True)
class Figure:
    """One figure.

    Attributes:
        name: what it is.
        spoken: the rounded form, as it is said.
        value: in full precision.
        unit: of the value.
        origins: what it was read from.
        how: how it follows from there, empty where it is the column itself.
    """

    name: str
    spoken: str
    value: float
    unit: str
    origins: tuple[Origin, ...]
    how: str = ""

    @property
    def sources(self) -> tuple[str, ...]:
        """The origins in words, one a table row."""
        return printed(self.origins)

    @property
    def exact(self) -> str:
        """The value as it is printed beside the rounded form, seven digits with the unit."""
        return f"{self.value:.7g} {self.unit}".replace("-", facts.MINUS)


def figures(rows: SeasonRows) -> tuple[Figure, ...]:
    """Return every figure of a season, in the order in which a script needs them."""
    return (*_motion(rows), *_distance(rows), *_light(rows), *_size(rows))


def moon_widths(degrees: float) -> str:
    """Return an angle in Moon widths, to the half below five."""
    widths = degrees / facts.MOON_WIDTH_DEG
    if widths >= 5.0:
        return f"about {widths:.0f} Moon widths"
    halves = round(2.0 * widths) / 2.0
    return f"about {halves:g} Moon width{'' if halves <= 1.0 else 's'}"


def million_km(au: float) -> float:
    """Return a distance in million kilometres."""
    return au * AU_KM / 1e6


def spoken_million_km(au: float) -> str:
    """Return a distance in million kilometres to SPOKEN_DIGITS digits: ``101 million km``."""
    value = million_km(au)
    places = SPOKEN_DIGITS - 1 - math.floor(math.log10(value))
    return f"{round(value, places):,.{max(places, 0)}f} million km"


def light_minutes(au: float) -> float:
    """Return how many minutes light takes over a distance; the speed of light: BIPM, SI brochure, exact."""
    return au * AU_KM / SPEED_OF_LIGHT_KM_PER_S / 60.0


def times_brighter(fainter: float, brighter: float) -> float:
    """Return the ratio of two brightnesses by Pogson's scale, 10^(0.4 dm)."""
    return math.pow(10.0, 0.4 * (fainter - brighter))


def spoken_speed(deg_per_day: float) -> str:
    """Return a daily motion backwards: in degrees, slow ones in arcminutes."""
    back = -deg_per_day
    return f"{back:.2f} degrees a day back" if back >= 0.095 else f"{back * 60.0:.1f} arcminutes a day back"


def middle_word(rows: SeasonRows) -> str:
    """Return what the middle is called."""
    return MIDDLES[rows.season["middle_kind"]]


def after_middle_hours(rows: SeasonRows, mark: str) -> float | None:
    """Return by how many hours a moment follows the middle; None where one is not known."""
    at, middle = rows.of_mark(mark, "jd_tt"), rows.of_mark("middle", "jd_tt")
    return None if at is None or middle is None else (at - middle) * 24.0


def spoken_after_middle(rows: SeasonRows, mark: str) -> str:
    """Return how a moment lies to the middle: ``8 hours after opposition``; empty where not known."""
    hours = after_middle_hours(rows, mark)
    if hours is None:
        return ""
    long = abs(hours)
    if long < 0.5:
        return f"within an hour of {middle_word(rows)}"
    amount = counted(long, "hour") if long < HOURS_LIMIT else counted(long / 24.0, "day")
    return f"{amount} {'after' if hours > 0.0 else 'before'} {middle_word(rows)}"


def is_at_edge(rows: SeasonRows, mark: str) -> bool:
    """Return whether a least value lies at the season's first or last instant: no extremum of its own."""
    at = rows.of_mark(mark, "jd_tt")
    ends = [rows.of_mark(name, "jd_tt") for name in ("first_pass_start", "third_pass_end")]
    return at is not None and any(end is not None and abs(at - end) < 0.01 for end in ends)


def _motion(rows: SeasonRows) -> Iterator[Figure]:
    season = rows.season
    days, arc = season["retrograde_days"], season["arc_deg"]
    origin = (rows.in_season("retrograde_days"),)
    yield Figure("Runs backwards for", counted(days, "day"), days, "days", origin)
    yield Figure("Moves back by", f"{arc:.1f} degrees", arc, "degrees", (rows.in_season("arc_deg"),))
    widths = arc / facts.MOON_WIDTH_DEG
    how = f"divided by {facts.MOON_WIDTH_DEG:g}"
    yield Figure("In Moon widths", moon_widths(arc), widths, "Moon widths", (rows.in_season("arc_deg"),), how)
    if season["threefold_days"] is not None:
        threefold = season["threefold_days"]
        origin = (rows.in_season("threefold_days"),)
        yield Figure("First pass to last", counted(threefold, "day"), threefold, "days", origin)
    speed = rows.of_mark("middle", "longitude_rate_deg_per_day")
    if speed is not None:
        origin = (rows.in_marks("middle", "longitude_rate_deg_per_day"),)
        yield Figure(f"Speed at {middle_word(rows)}", spoken_speed(speed), speed, "degrees a day", origin)


def _distance(rows: SeasonRows) -> Iterator[Figure]:
    closest = rows.season["closest_au"]
    origin = (rows.in_season("closest_au"),)
    yield Figure("Least distance", f"{closest:.3f} au", closest, "au", origin)
    km, minutes = million_km(closest), light_minutes(closest)
    yield Figure("In kilometres", spoken_million_km(closest), km, "million km", origin, f"times {AU_KM} km")
    how = f"times {AU_KM} km, divided by {SPEED_OF_LIGHT_KM_PER_S} km/s and by 60"
    yield Figure("In light's time", facts.light_time(closest), minutes, "minutes", origin, how)
    hours = after_middle_hours(rows, CLOSEST)
    if hours is not None:
        both = (rows.in_marks(CLOSEST, "jd_tt"), rows.in_marks("middle", "jd_tt"))
        said = spoken_after_middle(rows, CLOSEST)
        yield Figure("Least distance falls", said, hours, "hours", both, "difference, times 24")
    for mark, where in TURNS:
        at = rows.of_mark(mark, "distance_au")
        if at is not None:
            yield Figure(f"Distance {where}", f"{at:.3f} au", at, "au", (rows.in_marks(mark, "distance_au"),))


def _light(rows: SeasonRows) -> Iterator[Figure]:
    peak = rows.season["peak_magnitude"]
    if peak is None:
        return
    origin = rows.in_season("peak_magnitude")
    yield Figure("Greatest brightness", f"magnitude {facts.signed(peak, 1)}", peak, "magnitude", (origin,))
    for mark, where in TURNS:
        at = rows.of_mark(mark, "magnitude")
        if at is None:
            continue
        turn = rows.in_marks(mark, "magnitude")
        yield Figure(f"Brightness {where}", f"magnitude {facts.signed(at, 1)}", at, "magnitude", (turn,))
        ratio = times_brighter(at, peak)
        said = "hardly brighter" if ratio < HARDLY else f"about {facts.times_brighter(at - peak)} as bright"
        yield Figure(
            f"At its brightest, against {where.removeprefix('at ')}",
            said,
            ratio,
            "times",
            (origin, turn),
            "10 to the power of 0.4 times the difference",
        )


def _size(rows: SeasonRows) -> Iterator[Figure]:
    peak = rows.season["peak_diameter_arcsec"]
    origin = rows.in_season("peak_diameter_arcsec")
    decimals = 1 if peak >= 1.0 else 2
    yield Figure("Largest disc", f"{peak:.{decimals}f} arcseconds", peak, "arcseconds", (origin,))
    for mark, where in TURNS:
        at = rows.of_mark(mark, "diameter_arcsec")
        if at is not None:
            turn = (rows.in_marks(mark, "diameter_arcsec"),)
            yield Figure(f"Disc {where}", f"{at:.{decimals}f} arcseconds", at, "arcseconds", turn)
