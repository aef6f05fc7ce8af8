"""Dates: what is read, what is refused, what is printed."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from jplephem.calendar import compute_calendar_date, compute_julian_day
from skyfield import timelib

from wanderers.ephemeris.dates import datetime64_from_jd, iso_strings, julian_calendar_iso, parse_date
from wanderers.errors import DateError, UnknownNameError, UsageProblem

DAY_MS = 86_400_000
YEARS = st.integers(min_value=-99_999, max_value=99_999)
MONTHS = st.integers(min_value=1, max_value=12)
DAYS = st.integers(min_value=1, max_value=28)


def written(year: int, month: int, day: int) -> str:
    sign_and_year = f"{year:04d}" if 0 <= year <= 9_999 else f"{year:+05d}"
    return f"{sign_and_year}-{month:02d}-{day:02d}"


@pytest.mark.parametrize(
    ("text", "jd"),
    [
        ("2000-01-01T12:00:00", 2_451_545.0),  # J2000: IAU 1994 Resolution C7
        ("2000-01-01T12:00", 2_451_545.0),
        ("2000-01-01 12:00", 2_451_545.0),
        ("2000-01-01T12:00Z", 2_451_545.0),
        (" 2000-01-01T12:00:00.000Z ", 2_451_545.0),
        ("2000-01-01", 2_451_544.5),
        ("2000-01", 2_451_544.5),
        ("2000", 2_451_544.5),
        ("+2000-01-01", 2_451_544.5),
        ("2000-01-01T00:00:43.2", 2_451_544.5005),
        ("2000-01-01T00:00:43,2", 2_451_544.5005),
        ("1970-01-01", 2_440_587.5),  # the Unix epoch
        (
            "1582-10-10",
            2_299_155.5,
        ),  # five days before the Gregorian start, JD 2299160.5: exists when proleptic
        ("0000-02-29", 1_721_118.5),  # 1 BCE: 59 days after its 1 January, JD 1721059.5
        ("-4713-11-24T12:00", 0.0),  # the origin of the count
        ("\N{MINUS SIGN}4713-11-24T12:00", 0.0),
    ],
)
def test_reads_every_accepted_form(text: str, jd: float) -> None:
    assert parse_date(text) == pytest.approx(jd, abs=1e-9)


@pytest.mark.parametrize(
    "text",
    [
        "2027-02-29",
        "1900-02-29",
        "-0500-02-29",
        "2027-02-30",
        "2027-04-31",
        "2027-00-10",
        "2027-13-01",
        "2027-13",
        "2027-01-00",
        "2027-01-32",
        "2027-01-10T24:30",
        "2027-01-10T24:00",
        "2027-01-10T23:60",
        "2027-01-10T23:59:60",
        "2027-01-10T23:59:61",
        "2027-01-10T",
        "2027-01-10T12",
        "2027-01-10T1200",
        "2027-01-10T12:00+02:00",
        "2027-01-10T12:00:00.",
        "2027-01-10Z",
        "2027-1-10",
        "2027-01-1",
        "2027/01/10",
        "10.01.2027",
        "20270110",
        "2027-W02-1",
        "2027-010",
        "27",
        "-500",
        "12027",
        "+1234567",
        "-0000",
        "-0000-01-01",
        "",
        " ",
        "today",
        "now",
        "spring",
        "nan",
        "2027-01-10T12:00:00Z Z",
        "2027-01-10\n2027-01-11",
        "٢٠٢٧-٠١-١٠",
    ],
)
def test_refuses_what_is_no_date_and_says_how_to_write_one(text: str) -> None:
    with pytest.raises(DateError) as caught:
        parse_date(text)
    assert f"'{text}'" in str(caught.value)
    assert "YYYY-MM-DD" in str(caught.value)
    assert isinstance(caught.value, UsageProblem)


def test_century_leap_days_exist_only_in_the_julian_calendar() -> None:
    assert parse_date("1900-02-29", calendar="julian") == parse_date("1900-03-13")
    with pytest.raises(DateError, match="Gregorian"):
        parse_date("1900-02-29")
    with pytest.raises(DateError, match="Julian"):
        parse_date("1901-02-29", calendar="julian")


def test_refuses_an_unknown_calendar() -> None:
    with pytest.raises(UnknownNameError, match="gregorian"):
        parse_date("2027", calendar="gregorain")


@given(YEARS, MONTHS, DAYS)
def test_gregorian_days_agree_with_jplephem_and_skyfield(year: int, month: int, day: int) -> None:
    jd = parse_date(written(year, month, day))
    assert jd == timelib.julian_day(year, month, day) - 0.5
    # jplephem's formula holds from year -4800 on.
    if year >= -4_800:
        assert jd == compute_julian_day(year, month, day) - 0.5
        assert compute_calendar_date(int(jd + 0.5)) == (year, month, day)


@given(YEARS, st.integers(min_value=3, max_value=12), DAYS)
def test_julian_calendar_lags_by_the_published_rule(year: int, month: int, day: int) -> None:
    # Explanatory Supplement (and Meeus ch. 7, A and B): from 1 March on the calendars differ by
    # floor(y/100) - floor(y/400) - 2 days. From memory.
    text = written(year, month, day)
    lag = year // 100 - year // 400 - 2
    assert parse_date(text, calendar="julian") - parse_date(text) == lag


@given(YEARS, MONTHS, DAYS, st.integers(min_value=0, max_value=DAY_MS - 1))
def test_printing_undoes_reading_in_both_calendars(year: int, month: int, day: int, ms: int) -> None:
    seconds, thousandths = divmod(ms, 1_000)
    clock = f"{seconds // 3600:02d}:{seconds // 60 % 60:02d}:{seconds % 60:02d}.{thousandths:03d}"
    text = f"{written(year, month, day)}T{clock}"
    assert str(iso_strings(parse_date(text))) == text
    assert str(julian_calendar_iso(parse_date(text, calendar="julian"), suffix="Z")) == text + "Z"


def test_printing_agrees_with_numpy_where_numpy_prints_iso() -> None:
    jd = np.random.default_rng(1582).uniform(1_721_060.5, 5_373_484.5, 20_000)  # years 0000 to 9999
    np.testing.assert_array_equal(iso_strings(jd), np.datetime_as_string(datetime64_from_jd(jd)))


def test_instants_agree_with_numpy_days_over_the_longest_kernel() -> None:
    # numpy counts its days since 1970-01-01, JD 2440587.5; every 997th day from 13001 BCE to 17000 CE.
    days = np.arange(-5_480_000, 5_490_000, 997)
    instants = datetime64_from_jd(days + 2_440_587.5)
    np.testing.assert_array_equal(instants, days.astype("datetime64[D]").astype("datetime64[ms]"))
    year = instants.astype("datetime64[Y]").astype(int) + 1_970
    assert [int(text[: text.index("-", 1)]) for text in iso_strings(instants_jd(instants))] == year.tolist()


def instants_jd(instants: np.ndarray) -> np.ndarray:
    return instants.astype(np.int64) / DAY_MS + 2_440_587.5


def test_rounds_to_the_nearest_millisecond_and_carries_into_the_next_day() -> None:
    midnight = 2_451_544.5
    ms = 1.0 / DAY_MS
    jd = midnight + np.array([-1.4, -0.6, -0.4, 0.4, 0.6, 1.4]) * ms
    assert iso_strings(jd).tolist() == [
        "1999-12-31T23:59:59.999",
        "1999-12-31T23:59:59.999",
        "2000-01-01T00:00:00.000",
        "2000-01-01T00:00:00.000",
        "2000-01-01T00:00:00.001",
        "2000-01-01T00:00:00.001",
    ]


def test_years_of_other_than_four_digits_carry_a_sign() -> None:
    jd = [parse_date(text) for text in ("-13000", "-0500", "0000", "0099", "9999", "+10000", "+17000")]
    years = [text.split("-01-01T")[0] for text in iso_strings(jd, suffix="Z")]
    assert years == ["-13000", "-0500", "0000", "0099", "9999", "+10000", "+17000"]


def test_an_unknown_instant_prints_as_nothing() -> None:
    jd = np.array([[np.nan, 2_451_545.0], [2_451_545.0, np.nan]])
    expected = [["", "2000-01-01T12:00:00.000Z"], ["2000-01-01T12:00:00.000Z", ""]]
    assert iso_strings(jd, suffix="Z").tolist() == expected
    assert np.isnat(datetime64_from_jd(jd)).tolist() == [[True, False], [False, True]]
    assert julian_calendar_iso([np.nan]).tolist() == [""]
    assert iso_strings([]).tolist() == []
