"""Ready sentences for a narrator, each with what it was read from.

They keep clear of what is often said wrongly: least distance and greatest brightness have their own instants
and are never put on the day of opposition; the planet does not turn round; constellations are not signs.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any, Final

from wanderers.ephemeris.constellations import full_name
from wanderers.events.season_marks import BRIGHTEST, CLOSEST
from wanderers.report import facts
from wanderers.report.dossier import facts as figures
from wanderers.report.dossier.sources import Origin, SeasonRows, printed
from wanderers.report.words import listed
from wanderers.site.summary import counted

STARS_TOLD: Final = 3
CLOSE_DEG: Final = 3.0
"""A star farther off is not told of. Common practice, no source."""
BETTER: Final = {"arc_deg": "longer", "closest_au": "closer", "peak_magnitude": "brighter"}
RANKED: Final = {"arc_deg": "arc", "closest_au": "least distance", "peak_magnitude": "greatest brightness"}
SUPERLATIVES: Final = {"arc_deg": "longest", "closest_au": "closest", "peak_magnitude": "brightest"}
LAST: Final = {"arc_deg": "shortest", "closest_au": "farthest", "peak_magnitude": "faintest"}
ASPECTS: Final = {"arc_deg": "by arc ", "closest_au": "", "peak_magnitude": ""}
STANDING_TOLD: Final = (
    "rank",
    "of",
    "better_before_utc",
    "better_after_utc",
    "searched_from_utc",
    "searched_to_utc",
)


@dataclass(frozen=True, slots=True)
class Sentence:
    """A sentence and the rows it was read from."""

    text: str
    origins: tuple[Origin, ...]

    @property
    def sources(self) -> tuple[str, ...]:
        """The origins in words, one a table row."""
        return printed(self.origins)


Writer = Callable[[SeasonRows], Iterator[Sentence]]


def sentences(rows: SeasonRows) -> tuple[Sentence, ...]:
    """Return every sentence of a season, in the order in which a script tells it."""
    return tuple(sentence for write in WRITERS for sentence in write(rows))


def ordinal(number: int) -> str:
    """Return a number as a rank: ``1st``, ``22nd``, ``113th``."""
    if number % 100 in (11, 12, 13):
        return f"{number}th"
    ending = {1: "st", 2: "nd", 3: "rd"}.get(number % 10, "th")
    return f"{number}{ending}"


def day_range(first: str, last: str) -> str:
    """Return two days in words, month and year said once where they are one: ``7 to 28 October 2027``."""
    start, end = facts.spoken_day(first), facts.spoken_day(last)
    _, _, month = end.partition(" ")
    year = end.rpartition(" ")[2]
    return f"{start.removesuffix(f' {month}').removesuffix(f' {year}')} to {end}"


def star_label(row: dict[str, Any]) -> str:
    """Return what to call a star in a sentence: its name, else its designation or number."""
    name = str(row["star"])
    if row["kind"] == "cluster":
        return f"the {name}"
    return name if not name.startswith("HIP ") else str(row["designation"] or name)


def spoken_star(row: dict[str, Any]) -> str:
    """Return what a narrator calls a star: its name, else its letter; empty where it has neither."""
    label = star_label(row)
    if label != row["designation"]:
        return "" if label.startswith("HIP ") else label
    letter, _, constellation = label.partition(" ")
    bare = letter.rstrip("123456789")
    return f"the star {bare} in {full_name(constellation)}" if bare.isalpha() and constellation else ""


def spoken_angle(degrees: float) -> str:
    """Return an angle in words: tenths of a degree, below one degree arcminutes."""
    if degrees >= 0.9995:
        return f"{degrees:.1f} degrees"
    return counted(degrees * 60.0, "arcminute")


def _backwards(rows: SeasonRows) -> Iterator[Sentence]:
    season, name = rows.season, rows.body.label
    span = day_range(season["station_retrograde_utc"], season["station_direct_utc"])
    days, arc = season["retrograde_days"], season["arc_deg"]
    stations = (rows.in_season("station_retrograde_utc"), rows.in_season("station_direct_utc"))
    yield Sentence(
        f"From {span}, for {counted(days, 'day')}, {name} runs backwards, westward among the stars.",
        (*stations, rows.in_season("retrograde_days")),
    )
    yield Sentence(
        f"In that time it moves back {arc:.1f} degrees: {figures.moon_widths(arc)}.",
        (rows.in_season("arc_deg"),),
    )


def _why(rows: SeasonRows) -> Iterator[Sentence]:
    name = rows.body.label
    overtaking = "it overtakes the Earth" if rows.inner else f"the Earth overtakes {name}"
    yield Sentence(
        f"{name} itself never reverses: on the inner and faster track, {overtaking}, and our line of sight "
        "swings back.",
        (),
    )


def _path(rows: SeasonRows) -> Iterator[Sentence]:
    season, name = rows.season, rows.body.label
    shape = "crosses itself in a loop" if season["path_shape"] == "loop" else "makes a zigzag, not a loop"
    yield Sentence(f"Its path among the stars {shape}.", (rows.in_season("path_shape"),))
    names = [full_name(short) for short in season["constellations"].split("+")]
    noun = "constellation" if len(names) == 1 else "constellations"
    way = f"stays within the {noun}" if len(names) == 1 else f"wanders through the {noun}"
    yield Sentence(
        f"Through the whole season {name} {way} {listed(tuple(names))}.", (rows.in_season("constellations"),)
    )
    first, last = season["first_pass_start_utc"], season["third_pass_end_utc"]
    if first is not None and last is not None:
        ends = (rows.in_season("first_pass_start_utc"), rows.in_season("third_pass_end_utc"))
        yield Sentence(f"It covers the same stretch of sky three times, {day_range(first, last)}.", ends)


def _middle(rows: SeasonRows) -> Iterator[Sentence]:
    season, name = rows.season, rows.body.label
    if season["middle_utc"] is None:
        return
    word = figures.middle_word(rows)
    when = facts.spoken_day(season["middle_utc"])
    text = f"On {when} it is at opposition, opposite the Sun in ecliptic longitude."
    if rows.inner:
        text = f"On {when} {name} passes between Earth and Sun, at {word}, lost in the Sun's glare."
    yield Sentence(text, (rows.in_season("middle_utc"),))


def _closest(rows: SeasonRows) -> Iterator[Sentence]:
    when = rows.of_mark(CLOSEST, "utc")
    if when is None or figures.is_at_edge(rows, CLOSEST):
        return
    au = rows.season["closest_au"]
    after = figures.spoken_after_middle(rows, CLOSEST)
    yield Sentence(
        f"Least distance comes on {facts.spoken_day(when)}{f', {after}' if after else ''}: "
        f"{figures.spoken_million_km(au)}, {facts.light_time(au)} away.",
        (
            rows.in_marks(CLOSEST, "utc"),
            rows.in_marks(CLOSEST, "jd_tt"),
            rows.in_marks("middle", "jd_tt"),
            rows.in_season("closest_au"),
        ),
    )


def _bright(rows: SeasonRows) -> Iterator[Sentence]:
    peak, when = rows.season["peak_magnitude"], rows.of_mark(BRIGHTEST, "utc")
    turn = rows.of_mark("station_retrograde", "magnitude")
    if peak is None or when is None:
        return
    at_edge = figures.is_at_edge(rows, BRIGHTEST)
    around = "Within the season it is brightest at its very edge, on" if at_edge else "It is brightest about"
    text = f"{around} {facts.spoken_day(when)}, at magnitude {facts.signed(peak, 1)}"
    if turn is not None and figures.times_brighter(turn, peak) >= figures.HARDLY:
        text += f", about {facts.times_brighter(turn - peak)} as bright as at its first turn"
    elif turn is not None:
        text += ", hardly brighter than at its first turn"
    yield Sentence(
        f"{text}.",
        (
            rows.in_marks(BRIGHTEST, "utc"),
            rows.in_season("peak_magnitude"),
            rows.in_marks("station_retrograde", "magnitude"),
        ),
    )


def _stars(rows: SeasonRows) -> Iterator[Sentence]:
    near = [
        row
        for row in rows.stars.sort("v_mag").iter_rows(named=True)
        if row["separation_deg"] <= CLOSE_DEG and not row["at_edge"] and spoken_star(row)
    ]
    for row in sorted(near[:STARS_TOLD], key=lambda one: one["closest_jd_tt"]):
        when = facts.spoken_day(row["closest_utc"])
        columns = ("closest_utc", "separation_deg", "planet_is")
        yield Sentence(
            f"On {when} {rows.body.label} is nearest to {spoken_star(row)}, "
            f"{spoken_angle(row['separation_deg'])} {row['planet_is']} of it.",
            tuple(rows.in_stars(str(row["star"]), column) for column in columns),
        )


def _standing(rows: SeasonRows) -> Iterator[Sentence]:
    for figure, row in rows.standing.items():
        if figure == "peak_magnitude" and figures.is_at_edge(rows, BRIGHTEST):
            continue  # how bright a planet is where its season happens to begin or end tells little
        origins = tuple(rows.in_standing(figure, column) for column in STANDING_TOLD)
        yield Sentence(standing_text(rows.body.label, figure, row), origins)


def standing_text(name: str, figure: str, row: dict[str, Any]) -> str:
    """Return a rank in words, with the span searched and the nearest better seasons."""
    rank, count = row["rank"], row["of"]
    first, last = (facts.spoken_day(row[f"searched_{end}_utc"]) for end in ("from", "to"))
    place = LAST[figure] if rank == count > 1 else SUPERLATIVES[figure]
    place = place if rank in (1, count) else f"{ordinal(rank)} {place}"
    text = (
        f"It is the {place} {ASPECTS[figure]}of the {count} seasons of {name} with their middle between "
        f"{first} and {last}"
    )
    before, after = (
        facts.spoken_month(row[f"better_{side}_utc"]) if row[f"better_{side}_utc"] else "none"
        for side in ("before", "after")
    )
    if before == after:
        return f"{text}."
    return f"{text}; the nearest {BETTER[figure]} ones: before it {before}, after it {after}."


WRITERS: Final[tuple[Writer, ...]] = (
    _backwards, _why, _path, _middle, _closest, _bright, _stars, _standing,
)  # fmt: skip
