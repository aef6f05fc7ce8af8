"""Published Delta-T and its published uncertainty; sources in data/delta_t.csv and beside each check."""

from __future__ import annotations

import csv
from pathlib import Path

import astropy_iers_data
import erfa
import numpy as np
import pytest
from astropy.utils import iers

from wanderers.ephemeris import timescales
from wanderers.ephemeris.dates import parse_date

DATA = Path(__file__).parent / "data" / "delta_t.csv"
LINES = [line for line in DATA.read_text(encoding="utf-8").splitlines() if not line.startswith("#")]
ROWS = list(csv.DictReader(LINES))


def jd_of_year(year: float) -> float:
    """Return the Julian Day number of a Julian year and its decimals."""
    return 2_451_545.0 + (year - 2_000.0) * 365.25


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row['year']}-{row['source']}")
def test_delta_t_agrees_with_the_published_value(row: dict[str, str]) -> None:
    ours = timescales.delta_t_s(jd_of_year(float(row["year"])))
    assert float(ours) == pytest.approx(float(row["delta_t_s"]), abs=float(row["tolerance_s"]))


def test_delta_t_is_the_long_term_parabola_far_from_now() -> None:
    # Stephenson, Morrison and Hohenkerk 2016, Proc. R. Soc. A 472, 20160404: -320 + 32.5 ((y - 1825)/100)^2
    # seconds. From memory. Half a day of doubt about where a Julian year begins moves it by 0.15 s at most.
    for year in (-13_000.0, -5_000.0, 5_000.0, 17_000.0):
        parabola = -320.0 + 32.5 * ((year - 1_825.0) / 100.0) ** 2
        assert float(timescales.delta_t_s(jd_of_year(year))) == pytest.approx(parabola, abs=0.2)


def test_delta_t_is_the_one_measured_by_the_iers_up_to_the_stated_day() -> None:
    # IERS finals2000A.all as packaged with astropy, Bulletin B where it has both: measured values only. The
    # two bulletins in that file differ by up to 6 ms before 1985, by less than 1 ms from 1992 on.
    table = iers.IERS_A.open(astropy_iers_data.IERS_A_FILE)
    until = parse_date(timescales.time_scale_facts().delta_t_measured_until.isoformat()) - 2_400_000.5
    mjd = np.asarray(table["MJD"].value)
    chosen = np.isin(np.asarray(table["UT1Flag"]), ["B", "I"]) & (mjd <= until)
    mjd, ut1_minus_utc_s = mjd[chosen], np.asarray(table["UT1_UTC"].value)[chosen]
    assert mjd[0] == 41_684.0 and mjd[-1] == until
    tai, part = erfa.utctai(np.full(mjd.shape, 2_400_000.5), mjd)
    tt_minus_utc_s = ((tai - 2_400_000.5) + (part - mjd)) * 86_400.0 + 32.184
    expected_s = tt_minus_utc_s - ut1_minus_utc_s
    error_s = timescales.delta_t_s(2_400_000.5 + mjd + tt_minus_utc_s / 86_400.0) - expected_s
    assert np.abs(error_s).max() < 0.010
    assert np.abs(error_s[mjd > 48_622.0]).max() < 0.001


@pytest.mark.parametrize(
    ("year", "printed_s"),
    [(-1000, 640), (-500, 430), (-450, 410), (-100, 290), (0, 260), (600, 120), (800, 80), (1600, 20)],
)
def test_uncertainty_is_the_printed_standard_error(year: int, printed_s: float) -> None:
    # Morrison and Stephenson 2004, Table 1 (from memory); -450 lies halfway between 430 and 390.
    # The years are those where the solutions of 2004 and 2021 agree within the error printed.
    assert float(timescales.utc_uncertainty_s(jd_of_year(year))) == pytest.approx(printed_s, abs=0.1)


@pytest.mark.parametrize("year", [-1000, -800, -500, -300, -100, 0, 100, 500, 700, 800])
def test_uncertainty_follows_the_published_rule_of_thumb(year: int) -> None:
    # Morrison and Stephenson 2004: sigma = 0.8 ((year - 1820)/100)^2 s, for -1000 to 1200 (from memory);
    # the printed errors are rounded to 10 s, hence 8 per cent.
    rule_s = 0.8 * ((year - 1_820.0) / 100.0) ** 2
    assert float(timescales.utc_uncertainty_s(jd_of_year(year))) == pytest.approx(rule_s, rel=0.08)


@pytest.mark.parametrize(("year", "disagreement_s"), [(1300, 190.0), (1800, 4.4), (1700, 5.0)])
def test_uncertainty_covers_what_two_published_solutions_differ_by(year: int, disagreement_s: float) -> None:
    # 1300: 490 (Morrison and Stephenson 2004) against the knot 681.149 (Table S15.2020, from memory);
    # 1800: 14 against 18.367; 1700: 9 against 14.
    assert float(timescales.utc_uncertainty_s(jd_of_year(year))) == pytest.approx(disagreement_s, rel=0.05)


def test_uncertainty_of_the_future_grows_by_hubers_formula() -> None:
    # 1000 years on, by hand: 365.25 x sqrt(1000 x 0.058 / 3 x 1.4) = 365.25 x 5.20256 = 1900.24 s.
    measured_until = parse_date(timescales.time_scale_facts().delta_t_measured_until.isoformat())
    later = measured_until + 365_250.0
    assert float(timescales.utc_uncertainty_s(later)) == pytest.approx(1_900.24, abs=0.02)


def test_uncertainty_before_the_table_adds_hubers_growth_to_its_first_error() -> None:
    # 1000 years before -1000: sqrt(640^2 + 1900.24^2) = 2005.12 s, by hand.
    assert float(timescales.utc_uncertainty_s(jd_of_year(-2_000))) == pytest.approx(2_005.12, abs=0.05)
