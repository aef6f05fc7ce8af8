"""What would help where nights are missing: the same campaign under easier rules."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from wanderers.ephemeris.store import TrackStore
from wanderers.plans.request import evening_span
from wanderers.plans.rules import EVERY_DAY, CampaignRules
from wanderers.plans.season import CampaignSeason, Moment, date_of
from wanderers.plans.spares import NEAR_DAYS, Line
from wanderers.plans.usable import all_nights
from wanderers.site.places import Site
from wanderers.site.summary import counted

LOWER_ALTITUDES_DEG: Final = (60.0, 45.0, 30.0, 15.0, 10.0, 5.0)
LIGHTER_SUNS_DEG: Final = (-9.0, -6.0)
LOWEST_DEG: Final = 5.0
LIGHTEST_DEG: Final = -6.0


@dataclass(frozen=True, slots=True)
class Easier:
    """Rules that ask less, and what is given up, in words."""

    words: str
    rules: CampaignRules


def easier_rules(rules: CampaignRules) -> list[Easier]:
    """Return rules that give up one thing each, the least first, and then all of them."""
    out = [
        Easier(f"a least altitude of {limit:g} degrees", replace(rules, min_altitude_deg=limit))
        for limit in LOWER_ALTITUDES_DEG
        if limit < rules.min_altitude_deg
    ]
    out += [
        Easier(f"a Sun only {-limit:g} degrees down", replace(rules, sun_below_deg=limit))
        for limit in LIGHTER_SUNS_DEG
        if limit > rules.sun_below_deg
    ]
    if max(rules.moon_bright_deg, rules.moon_faint_deg) > 0.0:
        out.append(Easier("no regard to the Moon", replace(rules, moon_bright_deg=0.0, moon_faint_deg=0.0)))
    if rules.weekdays_asked:
        out.append(Easier("every day of the week", replace(rules, weekdays=EVERY_DAY)))
    lowest = min(rules.min_altitude_deg, LOWEST_DEG)
    lightest = max(rules.sun_below_deg, LIGHTEST_DEG)
    if lowest < rules.min_altitude_deg and lightest > rules.sun_below_deg:
        both = replace(rules, min_altitude_deg=lowest, sun_below_deg=lightest)
        out.append(
            Easier(f"a least altitude of {lowest:g} degrees with a Sun only {-lightest:g} degrees down", both)
        )
    return out


def easiest_rules(rules: CampaignRules) -> CampaignRules:
    """Return rules that give up everything that easier rules give up one by one."""
    return replace(
        rules,
        min_altitude_deg=min(rules.min_altitude_deg, LOWEST_DEG),
        sun_below_deg=max(rules.sun_below_deg, LIGHTEST_DEG),
        moon_bright_deg=0.0,
        moon_faint_deg=0.0,
        weekdays=EVERY_DAY,
    )


@dataclass(frozen=True, slots=True)
class Trials:
    """A campaign tried under other rules.

    Attributes:
        store: the tracks.
        site: from where.
        season: the season.
        near_deg: how far along the path a night still serves a moment.
        since_jd: from when nights count.
    """

    store: TrackStore
    site: Site
    season: CampaignSeason
    near_deg: float
    since_jd: float

    def usable(self, rules: CampaignRules) -> int:
        """Return how many nights of the campaign can be used."""
        nights = all_nights(self.store, self.site, self.season.path, evening_span(self.season), rules)
        return int((nights["usable"].to_numpy() & (nights["nominal_jd"].to_numpy() >= self.since_jd)).sum())

    def served(self, rules: CampaignRules, moments: list[Moment]) -> list[str]:
        """Return in words which moments a usable night serves."""
        return [moment.words for moment in moments if self._serves(rules, moment)]

    def _serves(self, rules: CampaignRules, moment: Moment) -> bool:
        """Return whether any of the nights around a moment serves it, looking at those alone."""
        path = self.season.path
        place = path.reached_deg(moment.jd_tt)
        able = np.abs(path.along_deg - place) <= self.near_deg
        able |= np.abs(path.jd - moment.jd_tt) <= NEAR_DAYS
        first, end = evening_span(self.season)
        around = np.array([date_of(jd) for jd in path.jd[able][[0, -1]].tolist()], dtype="datetime64[D]")
        days = (max(around[0] - 1, first), min(around[1] + 2, end))
        nights = all_nights(self.store, self.site, path, days, rules)
        jd = nights["nominal_jd"].to_numpy()
        line = Line(jd, nights["path_deg"].to_numpy(), self.near_deg, self.near_deg)
        usable = nights["usable"].to_numpy() & (jd >= self.since_jd)
        return bool(line.serves(moment, place)[usable].any())


def what_would_help(
    trials: Trials, rules: CampaignRules, had: dict[str, bool], *, is_empty: bool
) -> tuple[str, ...]:
    """Return which easier rules give nights to an empty plan, or serve moments that are not served.

    Nothing is said of moments that are past. Empty where nothing is missing.
    """
    if is_empty:
        return _for_an_empty_plan(trials, rules)
    missing = [
        moment
        for moment in trials.season.moments
        if moment.must and not had[moment.name] and moment.jd_tt >= trials.since_jd
    ]
    if not missing:
        return ()
    left = trials.served(rules, missing)
    told = [f"more nights, or fewer skipped, would serve the {' and the '.join(left)}"] if left else []
    hidden = [moment for moment in missing if moment.words not in left]
    reachable = [moment for moment in hidden if trials.served(easiest_rules(rules), [moment])]
    for easier in easier_rules(rules) if reachable else []:
        served = trials.served(easier.rules, reachable)
        if served:
            told.append(f"{easier.words} would serve the {' and the '.join(served)}")
    lost = [moment.words for moment in hidden if moment not in reachable]
    if lost:
        told.append(f"no easier rules serve the {' and the '.join(lost)} from this site")
    return _sentences(told)


def _for_an_empty_plan(trials: Trials, rules: CampaignRules) -> tuple[str, ...]:
    told = []
    if trials.usable(easiest_rules(rules)):
        counts = [(easier.words, trials.usable(easier.rules)) for easier in easier_rules(rules)]
        told = [f"{words} would give {counted(count, 'usable night')}" for words, count in counts if count]
        told = told or ["only giving up several of the rules together would give nights"]
    return _sentences(told) or (
        f"From this site {trials.season.body.label} is not to be had this season: try another season, "
        "or a site nearer the equator.",
    )


def _sentences(told: list[str]) -> tuple[str, ...]:
    return tuple(text[0].upper() + text[1:] + "." for text in told)
