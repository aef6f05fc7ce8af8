"""Campaigns from invented sites, gathered for their files, each computed once a session."""

from __future__ import annotations

from datetime import date
from functools import cache
from typing import Any

from tests.plans.places import ATOLL, CAPE, HILL, RIDGE
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.store import TrackStore
from wanderers.plans.campaign import Campaign, plan_campaign
from wanderers.plans.replan import LoggedNight, Status
from wanderers.plans.request import CampaignRequest
from wanderers.plans.rules import CampaignRules
from wanderers.report.campaign.contents import CameraChoice, CampaignContents, gather_campaign

NOW = date(2026, 3, 1)
SITES = {site.name: site for site in (HILL, ATOLL, RIDGE, CAPE)}


@cache
def campaign(store: TrackStore, body: str, site: str, **more: Any) -> Campaign:
    return plan_campaign(store, SITES[site], CampaignRequest(Body(body), NOW, **more))


@cache
def contents(store: TrackStore, body: str, site: str) -> CampaignContents:
    return gather_campaign(store, campaign(store, body, site), CameraChoice())


@cache
def reported(store: TrackStore) -> Campaign:
    """Mars from the hill after nine nights, two of them cloudy."""
    planned = campaign(store, "mars", "hill").plan["evening_date"].to_list()[:9]
    log = tuple(
        LoggedNight(date.fromisoformat(day), Status.LOST if number in (3, 6) else Status.DONE)
        for number, day in enumerate(planned)
    )
    return campaign(store, "mars", "hill", log=log)


@cache
def hopeless(store: TrackStore) -> Campaign:
    """Mercury where the Sun does not set."""
    return campaign(store, "mercury", "cape", rules=CampaignRules(min_altitude_deg=30.0))
