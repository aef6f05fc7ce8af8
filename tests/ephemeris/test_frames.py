"""The three frames against ERFA, the open SOFA."""

from __future__ import annotations

import erfa
import numpy as np
import pytest

from tests.direct import Direct, ecliptic_of_j2000
from wanderers.ephemeris import frames
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore

MICROARCSEC = np.radians(1.0 / 3.6e9)
JD_TT = np.sort(np.random.default_rng(21).uniform(2_287_250.5, 2_688_900.5, 200))
NEAR_JD_TT = np.linspace(2_451_000.5, 2_452_000.5, 401)


def erfa_rotations(jd_tt: np.ndarray, frame: Frame) -> np.ndarray:
    """GCRS to a frame of date, IAU 2006 precession with IAU 2000A nutation, shape (3, 3, n)."""
    in_longitude, in_obliquity = erfa.nut00a(jd_tt, 0.0)
    mean_obliquity, *_, to_equator = erfa.pn06(jd_tt, 0.0, in_longitude, in_obliquity)
    to_ecliptic = np.array(
        [
            erfa.rx(tilt, matrix)
            for tilt, matrix in zip(mean_obliquity + in_obliquity, to_equator, strict=True)
        ]
    )
    chosen = to_equator if frame is Frame.EQUATOR else to_ecliptic
    return np.asarray(np.moveaxis(chosen, 0, -1))


def test_ecliptic_of_date_is_erfas() -> None:
    rotation, obliquity = frames.ecliptic_of_date(Direct.time(JD_TT))
    expected = erfa_rotations(JD_TT, Frame.ECLIPTIC)
    np.testing.assert_allclose(rotation, expected, rtol=0.0, atol=1e-3 * MICROARCSEC)
    _, in_obliquity = erfa.nut00a(JD_TT, 0.0)
    true = erfa.obl06(JD_TT, 0.0) + in_obliquity
    np.testing.assert_allclose(obliquity, true, rtol=0.0, atol=1e-3 * MICROARCSEC)


def test_rotations_keep_lengths_and_angles() -> None:
    rotation, _ = frames.ecliptic_of_date(Direct.time(JD_TT))
    products = np.einsum("ijn,kjn->ikn", rotation, rotation)
    np.testing.assert_allclose(products, np.repeat(np.eye(3)[..., None], JD_TT.size, axis=2), atol=1e-14)


def test_ecliptic_of_j2000_is_fixed_and_that_of_iau_2006() -> None:
    # ecm06 gives the mean ecliptic of its date, here J2000.
    np.testing.assert_allclose(frames.ecliptic_of_j2000(), erfa.ecm06(2_451_545.0, 0.0), atol=2e-12)
    np.testing.assert_allclose(frames.ecliptic_of_j2000(), ecliptic_of_j2000(), atol=2e-12)


@pytest.mark.parametrize("frame", [Frame.ECLIPTIC, Frame.EQUATOR])
def test_fitted_rotations_are_erfas_between_the_nodes_too(store: TrackStore, frame: Frame) -> None:
    jd_tt = NEAR_JD_TT + 0.317
    sky = Sky(store.tracks(float(jd_tt[0]), float(jd_tt[-1])))
    found = sky.rotation(frame, jd_tt)[0]
    np.testing.assert_allclose(found, erfa_rotations(jd_tt, frame), atol=5 * MICROARCSEC)


@pytest.mark.parametrize("frame", [Frame.ECLIPTIC, Frame.EQUATOR])
def test_rates_of_rotations_are_their_derivatives(store: TrackStore, frame: Frame) -> None:
    jd_tt, half = NEAR_JD_TT, 0.005
    sky = Sky(store.tracks(float(jd_tt[0]) - 1.0, float(jd_tt[-1]) + 1.0))
    stack = sky.rotation(frame, jd_tt, order=2)
    before, after = (erfa_rotations(jd_tt + side, frame) for side in (-half, half))
    # The fit is worst at the ends of its segments: 7e-11 radians a day there, which moves a station of Pluto
    # (5e-6 radians a day squared) by a second. Elsewhere it is below 1e-11.
    away = np.abs(stack[1] - (after - before) / (2.0 * half))
    assert away.max() < 1e-10
    assert np.quantile(away, 0.98) < 1e-11
    inside = jd_tt + 0.317  # where no difference reaches across a seam
    before, after = (sky.rotation(frame, inside + side, order=1)[1] for side in (-half, half))
    bend = sky.rotation(frame, inside, order=2)[2]
    np.testing.assert_allclose(bend, (after - before) / (2.0 * half), atol=1e-10)


def test_the_fixed_frame_has_one_rotation_for_all_instants(store: TrackStore) -> None:
    sky = Sky(store.tracks(2_451_545.0, 2_451_546.0))
    assert sky.rotation(Frame.J2000, np.array([2_451_545.0, 2_451_545.5])).shape == (3, 3)


def test_a_quarter_turn_about_x_leaves_y_on_the_negative_z_axis() -> None:
    # Axes turned by +90 degrees about x: the new z points along the old -y.
    turned = frames.rotation_about_x(np.pi / 2.0) @ np.array([0.0, 1.0, 0.0])
    np.testing.assert_allclose(turned, [0.0, 0.0, -1.0], atol=1e-15)


def test_turning_rows_is_a_rotation_in_their_plane() -> None:
    one = np.repeat(np.eye(3)[..., None], 2, axis=2)
    turned = frames.turned(one, np.array([np.pi / 2.0, 0.0]), (0, 1))
    np.testing.assert_allclose(turned[..., 0] @ [1.0, 0.0, 0.0], [0.0, -1.0, 0.0], atol=1e-15)
    np.testing.assert_allclose(turned[..., 1], np.eye(3), atol=0.0)
