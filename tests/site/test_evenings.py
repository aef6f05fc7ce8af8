"""Evenings: noon to noon by the clock, whatever the clock does."""

from __future__ import annotations

import numpy as np
import pytest

from tests.site.places import ATOLL, HILL, POLE, RIDGE
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.site.evenings import evenings
from wanderers.site.places import Site
from wanderers.site.zones import zone_named


def day(text: str) -> np.datetime64:
    return np.datetime64(text, "D")


def test_evenings_follow_each_other_without_gap_and_begin_at_clock_noon() -> None:
    for site in (HILL, RIDGE, ATOLL):
        year = evenings(site, day("2027-01-01"), day("2028-01-01"))
        assert year.count == 365 and not year.by_sun
        noons = zone_named(site.zone).noon_jd_utc(np.append(year.days, day("2028-01-01")))
        np.testing.assert_allclose(jd_utc_from_tt(year.edges_jd), noons, atol=1e-8)


def test_clock_changes_make_one_evening_shorter_and_one_longer() -> None:
    year = evenings(HILL, day("2027-01-01"), day("2028-01-01"))
    hours = np.diff(jd_utc_from_tt(year.edges_jd)) * 24.0
    by_date = dict(zip(year.days.astype(str).tolist(), hours.round(6).tolist(), strict=True))
    # Clocks change in the night that ends on 28 March and on 31 October 2027.
    assert {date for date, length in by_date.items() if length != 24.0} == {"2027-03-27", "2027-10-30"}
    assert (by_date["2027-03-27"], by_date["2027-10-30"]) == (23.0, 25.0)


def test_a_date_skipped_at_the_date_line_has_no_evening() -> None:
    # Samoa went from 29 to 31 December 2011 (IANA database, Pacific/Apia).
    samoa = Site("lagoon", -13.8, -171.8, 2.0, "Pacific/Apia")
    found = evenings(samoa, day("2011-12-28"), day("2012-01-02"))
    assert found.days.astype(str).tolist() == ["2011-12-28", "2011-12-29", "2011-12-31", "2012-01-01"]
    np.testing.assert_allclose(np.diff(found.edges_jd), 1.0, atol=1e-6)


@pytest.mark.parametrize("longitude", [-157.8, 178.0, -100.0, 95.0])
def test_a_clock_far_off_the_sun_gives_way_to_the_mean_sun(longitude: float) -> None:
    far = Site("far", 20.0, longitude, 0.0, "UTC")
    found = evenings(far, day("2027-03-05"), day("2027-03-07"))
    assert found.by_sun
    hours_ut = (jd_utc_from_tt(found.edges_jd) - 0.5) % 1.0 * 24.0
    mean_sun = (hours_ut + longitude / 15.0) % 24.0
    np.testing.assert_allclose(mean_sun, 12.0, atol=1e-4)


def test_clocks_hours_off_the_sun_are_still_the_clock() -> None:
    # The west of China keeps the capital's time, three hours ahead of its Sun.
    oasis = Site("oasis", 39.5, 76.0, 1_290.0, "Asia/Shanghai")
    assert not evenings(oasis, day("2027-03-05"), day("2027-03-07")).by_sun
    assert not evenings(POLE, day("2027-03-05"), day("2027-03-07")).by_sun


def test_the_date_line_is_crossed_by_whole_days() -> None:
    west = Site("west", 0.0, -179.9, 0.0, "Etc/GMT+12")
    east = Site("east", 0.0, 179.9, 0.0, "Etc/GMT-12")
    noon_west, noon_east = (
        evenings(site, day("2027-03-05"), day("2027-03-06")).edges_jd[0] for site in (west, east)
    )
    assert noon_west - noon_east == pytest.approx(1.0, abs=1e-8)


def test_an_instant_belongs_to_the_evening_that_holds_it() -> None:
    found = evenings(HILL, day("2027-03-05"), day("2027-03-08"))
    edges = found.edges_jd
    instants = np.array([edges[0] - 1e-6, edges[0], edges[1] - 1e-6, edges[1], edges[-1]])
    assert found.index_of(instants).tolist() == [-1, 0, 0, 1, -1]


def test_the_grid_of_an_evening_does_not_depend_on_its_neighbours() -> None:
    alone = evenings(HILL, day("2027-03-27"), day("2027-03-28")).grid(12)
    among = evenings(HILL, day("2027-03-20"), day("2027-04-10")).grid(12)
    start = int(np.searchsorted(among, alone[0]))
    assert (among[start : start + 13] == alone).all()


def test_evenings_left_out_leave_gaps_and_change_nothing_else() -> None:
    whole = evenings(HILL, day("2027-03-20"), day("2027-04-10"))
    some = whole.chosen(np.array([2, 3, 9]))
    np.testing.assert_array_equal(some.index_of(whole.middle_jd[[1, 2, 3, 4, 9]]), [-1, 0, 1, -1, 2])
    grid = some.grid(12)
    assert grid.size == 2 * 12 + 1 + 12 + 1  # the two that meet share a noon
    assert np.all(np.diff(grid) > 0.0)
    assert np.isin(grid, whole.grid(12)).all()
