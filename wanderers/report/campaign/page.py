"""The page of a campaign: all words and figures in place, and as HTML that needs no network."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

from wanderers import __version__
from wanderers.plans.replan import Status
from wanderers.plans.rows import MUST
from wanderers.plans.wording import rules_sentence
from wanderers.report.calendars import CHECKSUM_DIGITS
from wanderers.report.campaign import cautions, numbers, words
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.campaign.numbers import Comparison, Fact, StarRow
from wanderers.report.campaign.words import Night
from wanderers.report.charts import timeaxis
from wanderers.report.pictures import Picture
from wanderers.report.render import rendered_beside
from wanderers.site.zones import zone_data_version

TEMPLATE: Final = "campaign.html.j2"


@dataclass(frozen=True, slots=True)
class NightRow:
    """A planned night as the page prints it; every text is empty where it does not apply."""

    number: str
    evening: str
    evening_date: str
    role: str
    is_must: bool
    is_gone: bool
    time: str
    after_midnight: bool
    window: str
    place: str
    moon: str
    magnitude: str
    diameter: str
    move: str
    spares: str
    reasons: str
    caution: str


@dataclass(frozen=True, slots=True)
class MomentRow:
    """A moment that the campaign must have: its night, the nights that may serve it, the chance."""

    words: str
    when: str
    night: str
    spares: str
    tries: str
    chance: str


@dataclass(frozen=True, slots=True)
class CampaignPage:
    """Everything the template prints.

    Attributes:
        title: planet, season and site.
        lead: what is planned, one sentence.
        basis: settings every reader should know.
        next_words: what to do on the next night, in sentences.
        chances: what clouds leave, in sentences.
        nights: planned nights, past ones included.
        moments: moments the campaign must have.
        changes: what replanning changed: date, what, why.
        notes: what the observer should know.
        advice: what would help where something cannot be had.
        frame: the camera's numbers.
        exposures: limits without tracking.
        stars: registration stars.
        stars_message: why there are few; else empty.
        comparisons: comparison stars by night.
        pictures: the charts, the field first.
        near_sun: the caution about the Sun where one is due, else empty.
        cautions: the others.
        files: names of the files beside the page, and what they hold.
        provenance: where all comes from.
        generator: program and version.
    """

    title: str
    lead: str
    basis: tuple[Fact, ...]
    next_words: tuple[str, ...]
    chances: tuple[str, ...]
    nights: tuple[NightRow, ...]
    moments: tuple[MomentRow, ...]
    changes: tuple[tuple[str, str, str], ...]
    notes: tuple[str, ...]
    advice: tuple[str, ...]
    frame: tuple[Fact, ...]
    exposures: tuple[Fact, ...]
    stars: tuple[StarRow, ...]
    stars_message: str
    comparisons: tuple[Comparison, ...]
    pictures: tuple[Picture, ...]
    near_sun: str
    cautions: tuple[str, ...]
    files: tuple[Fact, ...]
    provenance: tuple[Fact, ...]
    generator: str


def page_of(
    contents: CampaignContents, pictures: tuple[Picture, ...], files: Mapping[str, str]
) -> CampaignPage:
    """Compose the page.

    Args:
        contents: the campaign.
        pictures: its charts, the field first.
        files: what lies beside the page, and what each file holds.
    """
    campaign = contents.campaign
    return CampaignPage(
        title=_title(contents),
        lead=_lead(contents),
        basis=_basis(contents),
        next_words=tuple(words.what_next(contents)),
        chances=tuple(words.chances_words(contents)),
        nights=tuple(_night_row(night) for night in contents.plan.iter_rows(named=True)),
        moments=_moment_rows(contents),
        changes=tuple(
            (words.long_day(row["evening_date"]), row["change"], row["reason"] or "")
            for row in campaign.changes.iter_rows(named=True)
            if row["change"] != "kept"
        ),
        notes=campaign.notes,
        advice=campaign.advice,
        frame=tuple(numbers.frame_facts(contents)),
        exposures=tuple(numbers.exposure_facts(contents)),
        stars=tuple(numbers.star_rows(contents)),
        stars_message=contents.registration.message,
        comparisons=tuple(numbers.comparison_rows(contents)),
        pictures=pictures,
        near_sun=cautions.SUN if cautions.is_near_sun(contents) else "",
        cautions=cautions.ALWAYS,
        files=tuple(files.items()),
        provenance=_provenance(contents),
        generator=f"wanderers {__version__}",
    )


def rendered(page: CampaignPage) -> str:
    """Return the page as HTML that holds everything it needs."""
    return rendered_beside(page, TEMPLATE, "campaign.css")


def _title(contents: CampaignContents) -> str:
    season = contents.campaign.season
    low, high = timeaxis.utc_days([season.start_jd, season.end_jd]).tolist()
    return f"{season.body.label} from {contents.campaign.site.name}, {timeaxis.month_span_text(low, high)}"


def _lead(contents: CampaignContents) -> str:
    """Return in one sentence what is planned."""
    campaign, row = contents.campaign, contents.campaign.season.row
    shape = "a loop" if row["path_shape"] == "loop" else "a zigzag"
    path = f"{campaign.season.body.label} draws {shape} among the stars"
    if campaign.is_empty:
        return f"{path}; no night of it can be had from here."
    gone = {name: int((contents.plan["status"] == name).sum()) for name in (Status.DONE, Status.LOST)}
    past = ", ".join(f"{count} {name.value}" for name, count in gone.items() if count)
    musts = int((contents.plan["role"] == MUST).sum())
    return (
        f"{path}: {contents.plan.height} nights{f' ({past})' if past else ''}, {musts} of them must-nights, "
        f"and {contents.spares.height} spares."
    )


def _basis(contents: CampaignContents) -> tuple[Fact, ...]:
    campaign, site = contents.campaign, contents.campaign.site
    return (
        (
            "Site",
            f"{site.name}, {words.signed(site.latitude_deg, 2)}°, {words.signed(site.longitude_deg, 2)}°, "
            f"{site.elevation_m:.0f} m",
        ),
        ("Clock", site.zone),
        ("Season", str(campaign.season.row["season_id"])),
        ("Planned as of", words.as_of(contents).isoformat()),
        ("Camera", f"{contents.framing.sensor.name}, {words.lens(contents)}"),
        ("Nights lost to clouds", f"{campaign.request.cloudy * 100.0:.0f} %, as assumed"),
    )


def _night_row(night: Night) -> NightRow:
    diameter, move = night["diameter_arcsec"], night["move_deg"]
    pixels = "" if night["move_px"] is None else f", {night['move_px']:.0f} px"
    return NightRow(
        number=str(night["night"]),
        evening=words.short_evening(night),
        evening_date=str(night["evening_date"]),
        role=words.role(night),
        is_must=words.is_must(night),
        is_gone=night["status"] != Status.PLANNED.value,
        time=words.clock(night["recommended_local"]),
        after_midnight=words.is_after_midnight(night),
        window=words.window(night),
        place=words.place(night) if night["recommended_local"] else "",
        moon=words.moon(night),
        magnitude=words.magnitude(night["magnitude"]),
        diameter="" if diameter is None else f"{diameter:.1f}″",
        move="" if move is None else f"{move:.2f}°{pixels}",
        spares=words.spare_days(night),
        reasons=str(night["reasons"] or ""),
        caution=str(night["caution"] or ""),
    )


def _moment_rows(contents: CampaignContents) -> tuple[MomentRow, ...]:
    """Return the moments that must be had, in order of time."""
    chances = {moment.name: moment for moment in contents.campaign.chances.moments}
    held = {
        name: night for night in contents.plan.iter_rows(named=True) for name in words.moment_names(night)
    }
    rows = []
    for moment in contents.campaign.season.moments:
        chance, night = chances.get(moment.name), held.get(moment.name)
        if chance is None:
            continue
        rows.append(
            MomentRow(
                words=moment.words,
                when=timeaxis.day_text(float(timeaxis.utc_days(moment.jd_tt))),
                night=f"{night['night']}, {words.short_day(night['evening_date'])}" if night else "none",
                spares=words.spare_days(night) if night else "",
                tries=str(chance.tries),
                chance=words.percent(chance.chance),
            )
        )
    return tuple(rows)


def _provenance(contents: CampaignContents) -> tuple[Fact, ...]:
    kernel, campaign = contents.kernel, contents.campaign
    return (
        ("Kernel", f"{kernel.name}, SHA-256 {kernel.sha256[:CHECKSUM_DIGITS]}…"),
        ("Whole checksum", kernel.sha256),
        ("Zone data", f"IANA {zone_data_version()}; rules more than two years ahead are a guess"),
        ("Rules", rules_sentence(campaign.season, campaign.rules)),
        (
            "Places",
            "Altitudes with standard refraction, from the site; J2000 places from the Earth's centre.",
        ),
        ("Numbers", cautions.MODEL),
        ("Program", f"wanderers {__version__}"),
    )
