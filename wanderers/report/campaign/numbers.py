"""The camera's numbers of a campaign: frame, scale, exposure limits, stars, in words."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.plans.camera import disc_px, rule_500_s, trail_limit_s
from wanderers.plans.field_stars import star_names
from wanderers.plans.frame import coordinates
from wanderers.report.campaign import words
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts.campaign_backdrop import LETTERS
from wanderers.report.charts.path import angle_text, ra_text

Fact = tuple[str, str]
"""A name and what it is."""
TRAILS_PX: Final = (1.0, 3.0)


def frame_facts(contents: CampaignContents) -> list[Fact]:
    """Return where the camera points, how it is turned and what it holds."""
    framing, frame = contents.framing, contents.frame
    smallest = framing.smallest
    sensor = framing.sensor
    pixels = " (usual for the size)" if sensor.pixels_assumed else ""
    longest = "any" if not np.isfinite(framing.longest_mm) else f"{framing.longest_mm:.0f} mm"
    return [
        ("Sensor", f"{sensor.name}, {sensor.width_mm:g} × {sensor.height_mm:g} mm"),
        ("Pixels", f"{sensor.columns} × {sensor.rows}, {sensor.pixel_um:.1f} µm{pixels}"),
        ("Lens", words.lens(contents)),
        ("Picture", f"{frame.width_deg:.1f}° × {frame.height_deg:.1f}°"),
        ("Middle (J2000)", middle(contents)),
        ("Upper edge", f"position angle {frame.position_angle_deg:.0f}° (from north through east)"),
        ("Does the path fit", fits(contents)),
        ("Longest lens that holds it", longest),
        ("Smallest frame", f"{smallest.width_deg:.1f}° × {smallest.height_deg:.1f}°, margin included"),
        ("Scale", f"{framing.scale_arcsec_per_px:.1f}″ a pixel in the middle"),
        ("Path in the picture", path_size(contents)),
        ("Disc", disc(contents)),
    ]


def middle(contents: CampaignContents) -> str:
    """Return the middle of the frame in right ascension and declination, J2000."""
    return f"{ra_text(contents.frame.ra_deg)}, {angle_text(contents.frame.dec_deg)}"


def fits(contents: CampaignContents) -> str:
    """Return whether the path fits into the picture, and with which margin."""
    framing = contents.framing
    least = float(framing.room.min())
    kept = f"{least * 100.0:.0f} % of the side stay free at the tightest place"
    if framing.fits:
        return f"yes, on every night: {kept}"
    if framing.holds_path:
        return f"yes, but closer to the edge than the margin of {framing.margin * 100.0:.0f} %: {kept}"
    days = contents.path_jd[framing.room < 0.0]
    return f"no: on {days.size} of {contents.path_jd.size} days it lies outside; take a shorter lens"


def path_size(contents: CampaignContents) -> str:
    """Return how large the path is in the picture."""
    places = contents.framing.path_px
    wide, high = np.ptp(places, axis=0).tolist()
    return f"{wide:.0f} × {high:.0f} px"


def disc(contents: CampaignContents) -> str:
    """Return how large the planet's disc becomes in the picture."""
    known = contents.campaign.nights["diameter_arcsec"].drop_nulls().to_numpy()
    if known.size == 0:
        return ""
    framing = contents.framing
    across = disc_px(framing.sensor, framing.lens_mm, known[[known.argmin(), known.argmax()]]).tolist()
    note = "; below about 2 pixels the lens's own blur decides" if across[1] < 2.0 else ""
    return f"{across[0]:.1f} to {across[1]:.1f} px{note}"


def exposure_facts(contents: CampaignContents) -> list[Fact]:
    """Return how long an exposure may last without tracking."""
    framing = contents.framing
    declination = coordinates(contents.path)[1]
    fastest = float(declination[np.argmin(np.abs(declination))])
    facts = []
    for trail in TRAILS_PX:
        limit = float(trail_limit_s(framing.sensor, framing.lens_mm, fastest, trail))
        name = "a pixel" if trail == 1.0 else f"{trail:.0f} pixels"
        facts.append((f"Stars trail by {name} after", seconds(limit)))
    rule = rule_500_s(framing.sensor, framing.lens_mm)
    facts.append(("Rule of 500, generous", seconds(rule)))
    return facts


def seconds(value: float) -> str:
    """Return a length of exposure as it can be set."""
    return f"{value:.1f} s" if value < 10.0 else f"{value:.0f} s"


@dataclass(frozen=True, slots=True)
class StarRow:
    """A registration star in words."""

    letter: str
    name: str
    constellation: str
    magnitude: str
    place: str
    pixels: str


def star_rows(contents: CampaignContents) -> list[StarRow]:
    """Return the registration stars, lettered as on the chart."""
    stars, places = contents.registration.stars, contents.registration.place_px
    return [
        StarRow(
            letter=LETTERS[number],
            name=name,
            constellation=stars.constellation[number],
            magnitude=words.magnitude(float(stars.v_mag[number])),
            place=f"{ra_text(float(stars.ra_deg[number]))}, {angle_text(float(stars.dec_deg[number]))}",
            pixels=f"{places[number, 0]:.0f}, {places[number, 1]:.0f}",
        )
        for number, name in enumerate(star_names(stars))
    ]


@dataclass(frozen=True, slots=True)
class Comparison:
    """The comparison stars of one night in words."""

    night: str
    evening: str
    time: str
    planet: str
    stars: tuple[str, ...]
    notes: tuple[str, ...]
    message: str


def comparison_rows(contents: CampaignContents) -> list[Comparison]:
    """Return which stars to set the planet against, a row a planned night that is still to come."""
    return [
        Comparison(
            night=str(night["night"]),
            evening=words.short_day(night["evening_date"]),
            time=words.clock(night["recommended_local"]),
            planet=f"{words.magnitude(night['magnitude'])}, air mass {night['airmass']:.1f}",
            stars=tuple(_star_text(star) for star in stars.iter_rows(named=True)),
            notes=tuple(str(note or "") for note in stars["note"].to_list()),
            message=message,
        )
        for night, stars, message in contents.compared_nights()
    ]


def _star_text(star: words.Night) -> str:
    colour = "" if star["b_v"] is None else f", B−V {words.signed(star['b_v'])}"
    return (
        f"{star['star']} {star['v_mag']:.2f}{colour}, {star['altitude_deg']:.0f}° "
        f"{words.letters(star['compass'])}, air {words.signed(star['extinction_difference_mag'], 2)}"
    )
