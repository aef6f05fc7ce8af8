"""A retrograde season planned night by night from a site."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date

import numpy as np
import polars as pl

from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.plans import wording
from wanderers.plans.advice import Trials, what_would_help
from wanderers.plans.chances import Chances, chances_of
from wanderers.plans.columns import CHANGE_COLUMNS
from wanderers.plans.draft import Draft, draft_of, line_of, served
from wanderers.plans.request import Aim, CampaignRequest, aim_of, evening_span
from wanderers.plans.rows import plan_rows, spare_rows
from wanderers.plans.rules import CampaignRules, default_rules
from wanderers.plans.season import CampaignSeason, campaign_season
from wanderers.plans.usable import all_nights
from wanderers.site.places import Site


@dataclass(frozen=True, slots=True)
class Campaign:
    """A planned campaign.

    Attributes:
        request: what was asked.
        site: from where.
        season: the season, its moments and its path.
        rules: what a night had to offer.
        aim: how the nights should lie.
        nights: every night of the campaign, usable or not, with the reason why not; see
            :func:`wanderers.plans.usable.all_nights`.
        plan: a row a planned night, ``columns.PLAN_COLUMNS``; past nights that were lost stay in it.
        spares: a row a spare night, likewise.
        changes: what replanning changed, ``columns.CHANGE_COLUMNS``; empty if nothing was reported or
            skipped.
        chances: what clouds leave of it.
        notes: what the observer should know, in sentences.
        advice: what would help where moments or all nights are missing, in sentences.
    """

    request: CampaignRequest
    site: Site
    season: CampaignSeason
    rules: CampaignRules
    aim: Aim
    nights: pl.DataFrame
    plan: pl.DataFrame
    spares: pl.DataFrame
    changes: pl.DataFrame
    chances: Chances
    notes: tuple[str, ...]
    advice: tuple[str, ...] = ()

    @property
    def is_empty(self) -> bool:
        """Whether no night can be had."""
        return self.plan.is_empty()


def plan_campaign(store: TrackStore, site: Site, request: CampaignRequest) -> Campaign:
    """Plan a campaign. One that no night can serve has an empty plan, with the reason and what would help.

    Raises:
        UsageProblem: no such season.
        SpanError: it reaches outside the kernel.
        UnknownNameError: the site's zone does not exist.
    """
    rules = request.rules or default_rules(request.body)
    season = _season(store, request)
    nights = all_nights(store, site, season.path, evening_span(season), rules)
    aim = aim_of(season, request, nights)
    draft = draft_of(season, nights, request, aim)
    line = line_of(nights, aim)
    had = served(season, line, draft)
    plan = plan_rows(site, season, nights, draft)
    since_jd = -np.inf if request.first_open is None else _jd_of(request.first_open)
    trials = Trials(store, site, season, aim.near_deg, since_jd)
    return Campaign(
        request=request,
        site=site,
        season=season,
        rules=rules,
        aim=aim,
        nights=nights,
        plan=plan,
        spares=spare_rows(site, season, nights, draft),
        changes=_changes(nights, draft, plan, request),
        chances=chances_of(season, line, draft, request.cloudy),
        notes=wording.notes(season, nights, draft, rules, request, aim, had),
        advice=what_would_help(trials, rules, had, is_empty=plan.is_empty()),
    )


def _season(store: TrackStore, request: CampaignRequest) -> CampaignSeason:
    since = min((night.evening for night in request.log), default=request.now)
    return campaign_season(
        store,
        request.body,
        request.season,
        now_jd=_jd_of(since),
        lead_days=request.lead_days,
        tail_days=request.tail_days,
        under_way=bool(request.log),
    )


def _jd_of(day: date) -> float:
    """Return the beginning of a UTC calendar day, TT."""
    return float(jd_tt_from_utc(parse_date(day.isoformat())))


def _changes(
    nights: pl.DataFrame, draft: Draft, plan: pl.DataFrame, request: CampaignRequest
) -> pl.DataFrame:
    """List what was added, dropped and kept, if anything happened."""
    if not (request.reports or request.skip):
        return pl.DataFrame(schema=CHANGE_COLUMNS)
    return wording.changes(nights, draft, plan, {day.isoformat() for day in request.skip})
