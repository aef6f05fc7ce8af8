"""Time series: their steps, their frames, and that they are cut without a trace."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest

from tests.direct import Direct, wrapped_deg
from wanderers import schema
from wanderers.ephemeris.blocks import block_start_jd
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events import timeseries
from wanderers.events.timeseries import time_series

START = 2_461_041.5


@pytest.mark.parametrize(
    ("length", "step", "count"),
    [
        (10.0, 1.0, 10),
        (10.0, 3.0, 4),
        (10.0, 0.1, 100),
        (1.0, 5.0, 1),
        (0.3, 0.1, 3),
        (1.0, 1.0 / 1440.0, 1440),
    ],
)
def test_rows_begin_at_the_start_and_stop_before_the_end(
    store: TrackStore, length: float, step: float, count: int
) -> None:
    table = time_series(store, Body.MARS, START, START + length, step)
    assert table.height == count
    np.testing.assert_allclose(table["jd_tt"], START + step * np.arange(count), rtol=0.0, atol=1e-9)
    assert table["jd_tt"].max() < START + length


@pytest.mark.parametrize("body", BODIES)
def test_columns_are_those_of_the_schema(store: TrackStore, body: Body) -> None:
    table = time_series(store, body, START, START + 5.0, 1.0)
    assert table.schema == pl.Schema(schema.TRACK_COLUMNS)
    assert table["longitude_deg"].is_between(0.0, 360.0, closed="left").all()


@pytest.mark.parametrize("frame", list(Frame))
@pytest.mark.parametrize("body", [Body.MOON, Body.VENUS, Body.SATURN])
def test_longitude_latitude_and_rate_are_of_the_frame_asked(
    store: TrackStore, direct: Direct, body: Body, frame: Frame
) -> None:
    table = time_series(store, body, START, START + 400.0, 7.0, frame)
    jd = table["jd_tt"].to_numpy()
    longitude, latitude = direct.place_deg(body, jd, frame)
    away = wrapped_deg(table["longitude_deg"].to_numpy() - longitude)
    far = table["elongation_deg"].to_numpy() > 1.0
    np.testing.assert_allclose(away[far], 0.0, atol=1e-7)
    np.testing.assert_allclose(table["latitude_deg"].to_numpy()[far], latitude[far], atol=1e-7)
    half = 0.02
    before, after = (direct.longitude_deg(body, jd + side, frame) for side in (-half, half))
    rate = wrapped_deg(after - before) / (2.0 * half)
    # The Moon's third derivative over 0.04 day; the Sun's neighbourhood left out.
    limit = 1e-3 if body is Body.MOON else 1e-5
    np.testing.assert_allclose(table["longitude_rate_deg_per_day"].to_numpy()[far], rate[far], atol=limit)


def test_right_ascension_is_of_date_in_any_frame(store: TrackStore) -> None:
    one, two = (
        time_series(store, Body.MARS, START, START + 20.0, 1.0, f) for f in (Frame.J2000, Frame.EQUATOR)
    )
    assert one["ra_deg"].equals(two["ra_deg"])
    np.testing.assert_allclose(two["longitude_deg"], two["ra_deg"], atol=1e-10)
    np.testing.assert_allclose(two["latitude_deg"], two["dec_deg"], atol=1e-10)


def test_pieces_leave_no_trace(store: TrackStore, monkeypatch: pytest.MonkeyPatch) -> None:
    seam = block_start_jd(19)
    asked = (Body.MOON, seam - 30.0, seam + 30.0, 0.25)
    whole = time_series(store, *asked)
    monkeypatch.setattr(timeseries, "ROWS_AT_ONCE", 17)
    pieces = time_series(store, *asked)
    assert pieces["jd_tt"].equals(whole["jd_tt"])
    for name in ("longitude_deg", "dec_deg", "distance_au", "magnitude"):
        np.testing.assert_allclose(pieces[name], whole[name], rtol=1e-13)


def test_a_series_may_fill_the_kernel_to_its_ends(store: TrackStore) -> None:
    low, high = store.span_jd
    for start, end in ((low, low + 3.0), (high - 3.0, high)):
        assert time_series(store, Body.MERCURY, start, end, 0.5).height == 6


def test_what_does_not_apply_is_null(store: TrackStore) -> None:
    sun = time_series(store, Body.SUN, START, START + 3.0, 1.0)
    assert sun["elongation_deg"].null_count() == 3
    assert (sun["illuminated_fraction"] == 1.0).all()
    new_moon = time_series(store, Body.MOON, START, START + 30.0, 0.25)
    assert 0 < new_moon["magnitude"].null_count() < 20  # beyond a phase angle of 160 degrees no law is known
