"""Checks of the comparison of two event tables, on tables of a few rows."""

from __future__ import annotations

import polars as pl
import pytest

from tests.oracle.compare import match


def table(*rows: tuple[str, str | None, str, str | None, str | None, float]) -> pl.DataFrame:
    return pl.DataFrame(rows, schema=["kind", "detail", "body", "other", "frame", "jd_tt"], orient="row")


def test_nulls_and_empty_strings_match_and_times_are_compared() -> None:
    second = 1.0 / 86400.0
    oracle = table(
        ("opposition", None, "mars", None, "ecliptic", 2451545.0),
        ("conjunction", None, "jupiter", "saturn", "ecliptic", 2451555.0),
    )
    ours = table(
        ("opposition", "", "sun", "mars", "ecliptic", 2451545.0 + 1.5 * second),
        ("conjunction", "", "jupiter", "saturn", "ecliptic", 2451555.0 + 4.0 * second),
    )
    outcome = match(ours, oracle)
    assert outcome.missing.is_empty() and outcome.extra.is_empty()
    assert outcome.late["kind"].to_list() == ["opposition"]
    assert not outcome.complete
    assert outcome.worst.filter(kind="conjunction")["worst_of_tolerance"][0] == pytest.approx(0.8, abs=1e-3)


def test_missing_and_extra_rows_are_told_apart_even_close_in_time() -> None:
    oracle = table(
        ("conjunction", None, "mars", "uranus", "equator", 2451545.0),
        ("conjunction", None, "mars", "uranus", "equator", 2451545.4),
    )
    outcome = match(oracle.head(1), oracle)
    assert outcome.missing["jd_tt"].to_list() == [2451545.4]
    assert match(oracle, oracle.head(1)).extra["jd_tt"].to_list() == [2451545.4]
    assert match(oracle, oracle).complete


def test_the_ends_of_a_span_are_forgiven() -> None:
    oracle = table(("opposition", None, "mars", None, "ecliptic", 2451545.0 + 1e-6))
    nothing = oracle.clear()
    assert match(nothing, oracle, span=(2451545.0, 2451600.0)).complete
    assert not match(nothing, oracle, span=(2451540.0, 2451600.0)).complete
