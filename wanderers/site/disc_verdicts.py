"""Which contacts of discs that meet can be watched from a site, and how well."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import SUN
from wanderers.events.discs import Pairs
from wanderers.site.local_discs import LocalDiscs
from wanderers.site.sightings import Watch, headroom_deg, look_exactly
from wanderers.site.visibility import VERDICTS, Verdict, merit, verdicts

BEFORE_DAYS: Final = 10.0 / 1_440.0
"""So long before and after a contact one should look. Common practice, no source."""
BRIGHT_LIMB_MAG: Final = 3.0
"""What the dazzle of the Moon's lit limb costs on top of the light that the air scatters. Common practice, no
source."""
PARTS_OF_TRANSIT: Final = 97
NOT_VISIBLE: Final = VERDICTS.index(Verdict.NOT_VISIBLE)
TRANSIT_VERDICTS: Final = {
    Body.MERCURY.order: VERDICTS.index(Verdict.TELESCOPE),
    Body.VENUS.order: VERDICTS.index(Verdict.NAKED_EYE),
}
"""Through a filter: Mercury's disc of 12 arcseconds is too small for the eye, that of Venus, of 1 arcminute,
is not. Common practice, no source."""


@dataclass(frozen=True, slots=True)
class Contacts:
    """Discs that meet, at a site: arrays of shape (n,), or (n, 4) by contact.

    Attributes:
        happens: whether the discs overlap as seen from the site.
        by_moon: whether the Moon is in front.
        is_transit: whether the Sun is behind.
        altitude_deg: of what is hidden (of the Sun), as seen; NaN where there is no such contact.
        sun_altitude_deg: likewise.
        start_jd: TT, from when to when to look; NaN where nothing can be watched.
        best_jd: the contact (the middle of a transit) that shows best.
        end_jd: likewise.
        verdict: index into VERDICTS.
    """

    happens: Bools
    by_moon: Bools
    is_transit: Bools
    altitude_deg: Floats
    sun_altitude_deg: Floats
    start_jd: Floats
    best_jd: Floats
    end_jd: Floats
    verdict: Ints


def judged(watched: Watch, pairs: Pairs, discs: LocalDiscs) -> Contacts:
    """Judge the contacts of pairs."""
    is_transit = pairs.first == SUN
    hidden = np.where(is_transit, SUN, pairs.second)
    count = pairs.jd.size
    altitude, sun = np.full((2, count, 4), np.nan)
    start, best, end = np.full((3, count), np.nan)
    happens, by_moon = discs.gap_deg < 0.0, pairs.first == Body.MOON.order
    verdict = np.full(count, NOT_VISIBLE)
    out = Contacts(happens, by_moon, is_transit, altitude, sun, start, best, end, verdict)
    row, contact = np.nonzero(np.isfinite(discs.contacts_jd))
    if row.size:
        _judge_contacts(watched, hidden, discs, out, row, contact)
    for number in np.flatnonzero(is_transit & out.happens).tolist():
        _judge_transit(watched, int(pairs.second[number]), discs.contacts_jd[number], out, number)
    return out


def _judge_contacts(
    watched: Watch, hidden: Ints, discs: LocalDiscs, out: Contacts, row: Ints, contact: Ints
) -> None:
    """Fill in how high contacts happen, and which of the outer ones of occultations can be watched."""
    jd, target = discs.contacts_jd[row, contact], hidden[row]
    over, seen, margins, _ = look_exactly(watched, target, jd)
    lit = out.by_moon[row] & ~discs.by_dark_limb[row, contact]
    margin = margins.least - np.where(lit, BRIGHT_LIMB_MAG, 0.0)
    out.altitude_deg[row, contact] = seen.altitude_deg
    out.sun_altitude_deg[row, contact] = over.sun_altitude_deg
    verdict = verdicts(margin, watched.rules.criteria, over.sun_altitude_deg)
    worth = merit(margin, seen.altitude_deg, verdict, watched.rules.criteria)
    dark = over.sun_altitude_deg < watched.rules.sun_below_deg
    high = headroom_deg(watched, target, jd) > 0.0
    counts = dark & high & np.isin(contact, (0, 3)) & ~out.is_transit[row] & (verdict < NOT_VISIBLE)
    order = np.flatnonzero(counts)[np.argsort(worth[counts], kind="stable")]  # the best is written last
    out.best_jd[row[order]], out.verdict[row[order]] = jd[order], verdict[order]
    for place in np.flatnonzero(counts).tolist():
        one, around = int(row[place]), (jd[place] - BEFORE_DAYS, jd[place] + BEFORE_DAYS)
        out.start_jd[one] = np.fmin(out.start_jd[one], around[0])
        out.end_jd[one] = np.fmax(out.end_jd[one], around[1])


def _judge_transit(watched: Watch, planet: int, contacts_jd: Floats, out: Contacts, number: int) -> None:
    """Fill in when a transit can be watched: while the Sun stands high enough."""
    jd = np.linspace(contacts_jd[0], contacts_jd[3], PARTS_OF_TRANSIT)
    above = headroom_deg(watched, np.full(jd.size, SUN), jd)
    (up,) = np.nonzero(above > 0.0)
    if up.size == 0:
        return
    out.start_jd[number] = _edge(jd, above, int(up[0]), -1)
    out.end_jd[number] = _edge(jd, above, int(up[-1]), +1)
    out.best_jd[number] = jd[up[np.argmin(np.abs(up - PARTS_OF_TRANSIT // 2))]]
    out.verdict[number] = TRANSIT_VERDICTS[planet]


def _edge(jd: Floats, above: Floats, inside: int, side: int) -> float:
    """Return when the Sun reaches its least altitude, by a straight line between two moments."""
    outside = inside + side
    if not 0 <= outside < jd.size:
        return float(jd[inside])
    part = above[inside] / (above[inside] - above[outside])
    return float(jd[inside] + part * (jd[outside] - jd[inside]))
