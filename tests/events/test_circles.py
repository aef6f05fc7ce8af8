"""The smallest circle around directions, against a minimisation that knows no geometry."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import minimize

from wanderers.arrays import Floats
from wanderers.events.circles import smallest_circles


def near_directions(rng: np.random.Generator, bodies: int, spread_deg: float) -> Floats:
    """Random unit directions around a random one, shape (bodies, 3)."""
    middle = rng.normal(size=3)
    offsets = rng.normal(size=(bodies, 3)) * np.radians(spread_deg)
    out = middle / np.linalg.norm(middle) + offsets
    return np.asarray(out / np.linalg.norm(out, axis=1)[:, None])


def widest_deg(centre: Floats, directions: Floats) -> float:
    unit = centre / np.linalg.norm(centre)
    chord = np.linalg.norm(directions - unit, axis=1)
    return float(2.0 * np.degrees(2.0 * np.arcsin(np.clip(chord / 2.0, 0.0, 1.0))).max())


def minimised_deg(directions: Floats) -> float:
    """Diameter by moving a centre about until the farthest direction is nearest."""
    start = directions.mean(axis=0)
    first, second = np.linalg.svd(start[None])[2][1:]
    best = np.inf
    origin = np.zeros(2)
    for _ in range(6):  # a simplex may stall on the ridge; restart it where it stopped
        found = minimize(
            lambda at: widest_deg(start + at[0] * first + at[1] * second, directions),
            origin,
            method="Nelder-Mead",
            options={"xatol": 1e-10, "fatol": 1e-10, "maxiter": 4000},
        )
        origin, best = found.x, min(best, float(found.fun))
    return best


@pytest.mark.parametrize("bodies", [3, 4, 5, 6])
def test_diameter_is_the_least_that_a_minimisation_finds(bodies: int) -> None:
    rng = np.random.default_rng(bodies)
    cases = [near_directions(rng, bodies, spread) for spread in (0.1, 1.0, 5.0, 12.0) for _ in range(3)]
    ours = smallest_circles(np.stack(cases, axis=-1))[0]
    theirs = [minimised_deg(case) for case in cases]
    np.testing.assert_allclose(ours, theirs, rtol=1e-6, atol=0.0)


def test_two_far_apart_and_one_between_make_the_diameter_of_the_pair() -> None:
    angle = np.radians([0.0, 3.0, 8.0])
    line = np.stack([np.cos(angle), np.sin(angle), np.zeros(3)], axis=1)
    assert smallest_circles(line[:, :, None])[0][0] == pytest.approx(8.0, abs=1e-9)


def test_three_on_a_small_circle_give_that_circle() -> None:
    around = np.radians([0.0, 120.0, 240.0])
    tilt = np.radians(5.0)
    ring = np.stack(
        [np.sin(tilt) * np.cos(around), np.sin(tilt) * np.sin(around), np.full(3, np.cos(tilt))], axis=1
    )
    assert smallest_circles(ring[:, :, None])[0][0] == pytest.approx(10.0, abs=1e-9)


def test_order_of_the_bodies_does_not_matter() -> None:
    case = near_directions(np.random.default_rng(7), 5, 4.0)
    one, two = (smallest_circles(some[:, :, None])[0][0] for some in (case, case[::-1]))
    assert one == pytest.approx(two, rel=1e-12)
