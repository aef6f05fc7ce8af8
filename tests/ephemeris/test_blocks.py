"""Blocks: where they begin, how they are cut at a kernel's ends, and that they depend on nothing else."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.ephemeris import blocks
from wanderers.ephemeris.blocks import Block, block_index, block_start_jd, build_block
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.chebyshev import Series
from wanderers.ephemeris.kernels import Kernel, inspect_kernel, usable_span_jd_tt


@pytest.fixture(scope="module")
def block(kernel: Kernel) -> Block:
    return build_block(kernel.path, kernel.bodies, 18, usable_span_jd_tt(kernel))


def series_of(block: Block) -> dict[str, Series]:
    held = {"planets": block.planets, "moon": block.moon, "observer": block.observer}
    return {name: series for name, series in held.items() if series is not None}


def assert_same(one: Series, two: Series) -> None:
    for field in fields(Series):
        assert np.array_equal(getattr(one, field.name), getattr(two, field.name)), field.name


@given(st.floats(-4e6, 8e6))
def test_an_instant_lies_in_its_block(jd: float) -> None:
    index = block_index(jd)
    assert block_start_jd(index) <= jd < block_start_jd(index + 1)


def test_the_first_instant_of_a_block_belongs_to_it() -> None:
    for index in (-5, 0, 18, 43):
        assert block_index(block_start_jd(index)) == index
        assert block_index(float(np.nextafter(block_start_jd(index), 0.0))) == index - 1


def test_a_block_holds_every_body_once(block: Block) -> None:
    assert block.bodies == tuple(body for body in BODIES if body is not Body.MOON)
    assert block.moon is not None
    assert block.planets.coefficients.shape[2] == len(block.bodies)


def test_series_fill_the_block_without_gaps(block: Block) -> None:
    for series in series_of(block).values():
        assert series.start_jd == pytest.approx(block_start_jd(18), abs=1e-9)
        assert series.end_jd == pytest.approx(block_start_jd(19), abs=1e-9)
        ends = series.middle_jd + series.half_days
        np.testing.assert_allclose(ends[:-1], (series.middle_jd - series.half_days)[1:], atol=1e-9)


def test_the_last_terms_are_too_small_to_matter(block: Block) -> None:
    # A series that converges: what is cut off is smaller than the last terms held. In au and rad.
    for series in series_of(block).values():
        last = np.abs(series.coefficients[:, -2:]).max()
        assert last < 1e-9


def test_building_twice_gives_the_same_numbers_to_the_last_bit(kernel: Kernel, block: Block) -> None:
    again = build_block(kernel.path, kernel.bodies, 18, usable_span_jd_tt(kernel))
    for name, series in series_of(block).items():
        assert_same(series, series_of(again)[name])


@pytest.mark.parametrize("side", ["start", "end"])
def test_blocks_at_the_ends_of_a_kernel_are_cut_to_what_is_usable(kernel: Kernel, side: str) -> None:
    low, high = usable_span_jd_tt(kernel)
    index = block_index(low) if side == "start" else block_index(high)
    cut = build_block(kernel.path, kernel.bodies, index, (low, high))
    for series in series_of(cut).values():
        edge, usable = (series.start_jd, low) if side == "start" else (series.end_jd, high)
        assert edge == pytest.approx(usable, abs=1e-9)
        assert np.isfinite(series.coefficients).all()
        assert (series.half_days > 0.0).all()


def test_a_kernel_without_the_moon_gives_a_block_without_it(small_kernel: Path) -> None:
    kernel = inspect_kernel(small_kernel)
    span = usable_span_jd_tt(kernel)
    held = build_block(kernel.path, kernel.bodies, block_index(span[0]), span)
    assert held.moon is None
    assert held.bodies == kernel.bodies == (Body.SUN, Body.MERCURY, Body.VENUS, Body.MARS, Body.JUPITER)
    assert held.planets.coefficients.shape[2] == len(held.bodies)


def test_segments_lie_on_the_kernels_own_granules(kernel: Kernel) -> None:
    # JPL's granules last 32, 16, 8 or 4 days from the kernel's first instant, JD 2287184.5 for DE440.
    assert (kernel.jd_tdb_start - blocks.ORIGIN_JD) % 32.0 == 0.0
    for layout in (blocks.PLANET_LAYOUT, blocks.MOON_LAYOUT, blocks.OBSERVER_LAYOUT):
        assert 32.0 % layout.segment_days == 0.0
