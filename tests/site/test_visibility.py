"""Verdicts: which criterion binds, and that nothing gets better when things get worse."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.arrays import Floats
from wanderers.site.skylight import Lights
from wanderers.site.visibility import (
    VERDICTS,
    Criteria,
    Looks,
    Margins,
    Verdict,
    crescent_q,
    margins,
    merit,
    verdicts,
)

CRITERIA = Criteria()
LOSS_MAG = 0.28
MOON_AU = 384_400.0 / 149_597_870.7
MOMENTS = st.lists(st.tuples(st.floats(-12.0, 12.0), st.floats(0.0, 90.0)), min_size=1, max_size=25)


def look(
    magnitude: float,
    altitude: float,
    sun_altitude: float,
    *,
    elongation: float = 90.0,
    is_moon: bool = False,
) -> Looks:
    values = (altitude, sun_altitude, elongation, -30.0, 90.0, 90.0)
    where = Lights(*(np.array([value]) for value in values))
    return Looks(np.array([magnitude]), np.array([altitude]), where, np.array([is_moon]), np.array([MOON_AU]))


def verdict_of(looks: Looks, criteria: Criteria = CRITERIA) -> Verdict:
    return VERDICTS[
        verdicts(margins(looks, criteria, LOSS_MAG).least, criteria, looks.lights.sun_altitude_deg)[0]
    ]


@pytest.mark.parametrize(
    ("magnitude", "expected"),
    # Common practice, no source: high in a dark rural sky. Uranus needs binoculars at the edge of a town,
    # Neptune binoculars or a telescope, Pluto more than 200 mm.
    [
        (-2.5, Verdict.NAKED_EYE),
        (0.8, Verdict.NAKED_EYE),
        (5.7, Verdict.BINOCULARS),
        (7.8, Verdict.BINOCULARS),
        (10.5, Verdict.TELESCOPE),
        (14.4, Verdict.NOT_VISIBLE),
    ],
)
def test_planets_at_night_need_what_observers_use(magnitude: float, expected: Verdict) -> None:
    assert verdict_of(look(magnitude, 50.0, -30.0)) is expected


def test_an_unknown_magnitude_is_not_visible() -> None:
    assert verdict_of(look(float("nan"), 50.0, -30.0)) is Verdict.NOT_VISIBLE


def test_below_the_horizon_nothing_is_visible() -> None:
    assert verdict_of(look(-4.0, -1.0, -30.0)) is Verdict.NOT_VISIBLE


def test_arcus_visionis_binds_close_to_the_sun_and_not_by_day() -> None:
    # Saturn 8 degrees up with the Sun 2 down: 10 degrees apart, where 11.6 are needed.
    close = margins(look(0.8, 8.0, -2.0, elongation=12.0), CRITERIA, LOSS_MAG)
    assert close.arcus[0] == pytest.approx((10.0 - 10.5 - 1.4 * 0.8) / 1.4)
    assert margins(look(0.8, 8.0, 1.0), CRITERIA, LOSS_MAG).arcus[0] > 50.0


def test_a_crescent_below_danjons_limit_shows_to_nobody() -> None:
    # Danjon 1932: no crescent within 7 degrees of the Sun; from memory.
    assert verdict_of(look(-4.0, 5.0, -1.0, elongation=6.0, is_moon=True)) is Verdict.NOT_VISIBLE
    assert verdict_of(look(-6.0, 12.0, -6.0, elongation=20.0, is_moon=True)) is Verdict.NAKED_EYE


def test_measure_of_a_crescent_is_zero_where_its_width_just_suffices() -> None:
    # Yallop 1997, by hand: at 10 degrees and a semidiameter of 15.5 arcminutes the width is 0.23548
    # arcminutes; 11.8371 - 6.3226 W + 0.7319 W^2 - 0.1018 W^3 = 10.3875 degrees of arc.
    q = crescent_q(np.array([10.3875]), np.array([10.0]), np.array([15.5]))
    assert q[0] == pytest.approx(0.0, abs=2e-4)


def test_verdicts_change_where_the_criteria_say() -> None:
    margin = np.array([0.0, -1e-9, -CRITERIA.binoculars_mag, -4.28, -CRITERIA.telescope_mag, -7.29])
    assert verdicts(margin, CRITERIA, np.full(6, -30.0)).tolist() == [0, 1, 1, 2, 2, 3]


def test_no_optics_are_asked_for_while_the_sun_is_up() -> None:
    margin = np.array([0.0, -1e-9, -5.0])
    assert verdicts(margin, CRITERIA, np.full(3, -0.9)).tolist() == [0, 1, 2]
    assert verdicts(margin, CRITERIA, np.full(3, -0.8)).tolist() == [0, 3, 3]


def test_every_criterion_can_be_replaced() -> None:
    saturn = look(0.8, 20.0, -7.0)
    assert verdict_of(saturn) is Verdict.NAKED_EYE
    assert verdict_of(saturn, replace(CRITERIA, allowance_mag=4.0)) is Verdict.BINOCULARS
    assert verdict_of(saturn, replace(CRITERIA, arcus_base_deg=40.0)) is not Verdict.NAKED_EYE
    assert replace(CRITERIA, extinction_mag=0.5).extinction_at(3_000.0) == 0.5
    faint = look(4.0, 60.0, -30.0)
    assert verdict_of(faint) is Verdict.NAKED_EYE
    assert verdict_of(faint, replace(CRITERIA, dark_zenith_mag=17.5)) is Verdict.BINOCULARS


@given(
    magnitudes=st.lists(st.floats(-5.0, 15.0), min_size=2, max_size=6),
    altitude=st.floats(0.0, 90.0),
    sun_altitude=st.floats(-40.0, 10.0),
    elongation=st.floats(1.0, 180.0),
)
def test_what_is_fainter_is_never_seen_better(
    magnitudes: list[float], altitude: float, sun_altitude: float, elongation: float
) -> None:
    found = [
        VERDICTS.index(verdict_of(look(magnitude, altitude, sun_altitude, elongation=elongation)))
        for magnitude in sorted(magnitudes)
    ]
    assert found == sorted(found)


@given(altitude=st.floats(0.0, 90.0), losses=st.lists(st.floats(0.05, 1.0), min_size=2, max_size=5))
def test_haze_never_helps_at_night(altitude: float, losses: list[float]) -> None:
    margin = [margins(look(3.0, altitude, -40.0), CRITERIA, loss).least[0] for loss in sorted(losses)]
    assert (np.diff(margin) <= 1e-9).all()


@given(moments=MOMENTS, limits=st.lists(st.floats(0.0, 90.0), min_size=2, max_size=6))
def test_no_verdict_improves_when_low_altitudes_are_forbidden(
    moments: list[tuple[float, float]], limits: list[float]
) -> None:
    margin, altitude = np.array(moments).T
    found = [best_verdict(margin[altitude >= limit], altitude[altitude >= limit]) for limit in sorted(limits)]
    assert found == sorted(found)


def best_verdict(margin: Floats, altitude: Floats) -> int:
    """Return the verdict at the moment of most merit, the worst one where there is none."""
    if margin.size == 0:
        return len(VERDICTS) - 1
    verdict = verdicts(margin, CRITERIA, np.full(margin.size, -30.0))
    return int(verdict[np.argmax(merit(margin, altitude, verdict, CRITERIA))])


def test_the_least_margin_counts() -> None:
    three = Margins(np.array([1.0, 9.0, 9.0]), np.array([9.0, 2.0, 9.0]), np.array([9.0, 9.0, 3.0]))
    assert three.least.tolist() == [1.0, 2.0, 3.0]
