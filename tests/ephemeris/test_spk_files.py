from contextlib import closing
from dataclasses import replace

import numpy as np
import pytest
from skyfield.api import load, load_file

from tests.ephemeris.kernel_files import (
    DE421,
    DE441_AROUND_1969,
    EARTH_AND_SUN,
    J2000_JD,
    PLANET_PAIRS,
    Segment,
    contents,
    segments,
    spk_bytes,
    tiny_kernel,
    whole,
    written,
)
from wanderers.constants import AU_KM
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.spk_files import open_spk, usable_contents
from wanderers.errors import SpanError

# ---- what is read


def test_a_kernel_of_jpl_is_read_as_its_own_log_describes_it():
    with open_spk(DE421) as spk:
        held, log = usable_contents(DE421, spk), spk.comments()
    # The file's comment area holds the log of its making at NAIF.
    assert "BEGIN_TIME      = CAL-ET 1899 JUL 29 00:00:00.000" in log
    assert "END_TIME        = CAL-ET 2053 OCT 09 00:00:00.000" in log
    days = np.array(["1899-07-29", "2053-10-09"], "datetime64[D]") - np.datetime64("2000-01-01")
    np.testing.assert_array_equal(held.span_jd, J2000_JD - 0.5 + days.astype(int))
    assert held.name == "DE421"
    assert held.bodies == BODIES


@pytest.mark.parametrize("order", "<>")
@pytest.mark.parametrize("magic", [b"DAF/SPK ", b"NAIF/DAF"])
def test_both_byte_orders_and_both_beginnings_are_read(tmp_path, order, magic):
    parts = segments(*EARTH_AND_SUN, *PLANET_PAIRS, (3, 301))
    path = written(tmp_path, spk_bytes(parts, order=order, magic=magic))
    assert contents(path).bodies == BODIES
    assert contents(path).span_jd == (J2000_JD, J2000_JD + 64.0)


@pytest.mark.parametrize("data_type", [2, 3])
def test_positions_and_rates_are_those_the_series_describe(tmp_path, data_type):
    path = tiny_kernel(tmp_path / "k.bsp", data_type=data_type)
    days = np.array([0.0, 8.0, 31.0, 33.0, 64.0])
    with open_spk(path) as spk:
        position, rate = spk[0, 10].compute_and_differentiate(np.full(5, J2000_JD), days)
    # SPK Required Reading, type 2: s runs from -1 to 1 over each record; T0 = 1, T1 = s.
    s = np.array([-1.0, -0.5, 15.0 / 16.0, -15.0 / 16.0, 1.0])
    np.testing.assert_allclose(position, np.tile(1.0e8 + 1.0e6 * s, (3, 1)), rtol=1e-14)
    np.testing.assert_allclose(rate, np.full((3, 5), 1.0e6 / 16.0), rtol=1e-12)


def test_bodies_are_those_whose_whole_chain_is_there(tmp_path):
    assert contents(tiny_kernel(tmp_path / "a.bsp")).bodies == (Body.SUN,)
    half_chains = tiny_kernel(tmp_path / "b.bsp", (0, 1), (2, 299), (0, 4), (0, 9))
    assert contents(half_chains).bodies == (Body.SUN, Body.MARS, Body.PLUTO)
    assert contents(tiny_kernel(tmp_path / "c.bsp", (3, 301))).bodies == (Body.SUN, Body.MOON)


def test_the_span_is_common_to_the_segments_that_are_needed_and_only_those(tmp_path):
    short = Segment(0, 4, start_jd=J2000_JD + 8.0, records=1)
    foreign = Segment(0, 2_000_001, start_jd=J2000_JD + 20.0, records=1)
    path = written(tmp_path, spk_bytes([*segments(*EARTH_AND_SUN), short, foreign]))
    assert contents(path).span_jd == (J2000_JD + 8.0, J2000_JD + 40.0)


def test_no_more_is_promised_than_there_are_coefficients_for(tmp_path):
    assert contents(tiny_kernel(tmp_path / "a.bsp", declared_to_day=1_000.0)).span_jd[1] == J2000_JD + 64.0
    inside = tiny_kernel(tmp_path / "b.bsp", declared_from_day=3.0, declared_to_day=40.0)
    assert contents(inside).span_jd == (J2000_JD + 3.0, J2000_JD + 40.0)
    before = tiny_kernel(tmp_path / "c.bsp", declared_from_day=-1_000.0)
    assert contents(before).span_jd == (J2000_JD, J2000_JD + 64.0)


@pytest.mark.parametrize(
    ("source", "name"),
    [(b"DE-0440LE-0440", "DE440"), (b"XE-0441LE-0441", "DE441"), (b"someone else's", "given")],
)
def test_the_name_comes_from_the_segments_or_else_from_the_file(tmp_path, source, name):
    assert contents(written(tmp_path, whole(source=source))).name == name


def test_segments_that_disagree_on_the_name_leave_it_to_the_file(tmp_path):
    parts = segments(*EARTH_AND_SUN)
    parts[0] = replace(parts[0], source=b"DE-0421LE-0421")
    assert contents(written(tmp_path, spk_bytes(parts))).name == "given"


# ---- several segments for one orbit


def two_halves(tmp_path, gap_days=0.0, overlap_days=0.0, later_first=False):
    first = segments(*EARTH_AND_SUN)
    start = J2000_JD + 64.0 + gap_days - overlap_days
    second = segments(*EARTH_AND_SUN, start_jd=start, records=4, place_km=2.0e8)
    parts = [*second, *first] if later_first else [*first, *second]
    return written(tmp_path, spk_bytes(parts))


def sun_x_km(path, *jd):
    with open_spk(path) as spk:
        position, _ = spk[0, 10].compute_and_differentiate(np.array(jd), np.zeros(len(jd)))
    return np.round(position[0], -8)


def test_halves_that_touch_count_as_one(tmp_path):
    path = two_halves(tmp_path)
    assert contents(path).span_jd == (J2000_JD, J2000_JD + 192.0)
    at = (J2000_JD + 100.0, J2000_JD, J2000_JD + 63.9, J2000_JD + 192.0)
    assert sun_x_km(path, *at).tolist() == [2.0e8, 1.0e8, 1.0e8, 2.0e8]


@pytest.mark.parametrize("later_first", [False, True])
def test_the_day_and_its_part_together_choose_the_half(tmp_path, later_first):
    with open_spk(two_halves(tmp_path, later_first=later_first)) as spk:
        tiny = np.array([-1e-12, 1e-12])
        position, _ = spk[0, 10].compute_and_differentiate(np.full(2, J2000_JD + 64.0), tiny)
    assert np.round(position[0], -8).tolist() == [1.0e8, 2.0e8]


def test_where_halves_overlap_the_later_in_the_file_holds(tmp_path):
    # SPK Required Reading, "Segment Order and Priority".
    path = two_halves(tmp_path, overlap_days=32.0)
    assert contents(path).span_jd == (J2000_JD, J2000_JD + 160.0)
    assert sun_x_km(path, J2000_JD + 31.0, J2000_JD + 33.0).tolist() == [1.0e8, 2.0e8]


def test_of_halves_with_a_gap_the_longer_one_is_offered(tmp_path):
    path = two_halves(tmp_path, gap_days=10.0)
    assert contents(path).span_jd == (J2000_JD + 74.0, J2000_JD + 202.0)


def test_an_instant_in_no_segment_is_refused(tmp_path):
    path = two_halves(tmp_path, gap_days=10.0)
    with pytest.raises(SpanError, match="outside kernel"):
        sun_x_km(path, J2000_JD + 10.0, J2000_JD + 70.0)


@pytest.mark.skipif(not DE441_AROUND_1969.is_file(), reason="skyfield was installed without its tests")
def test_de441_is_read_across_its_seam_as_skyfield_reads_it():
    held = contents(DE441_AROUND_1969)
    # DE441's orbits are cut at 1969-07-30 TDB; the excerpt holds four days on either side of it.
    assert held.span_jd == (2_440_428.5, 2_440_436.5)
    assert (held.name, held.bodies) == ("DE441", BODIES)
    # Not on the seam itself: there both halves serve.
    offsets = np.array([-3.9, -1.0, -0.01, 0.01, 0.7, 3.9])
    t = load.timescale(builtin=True).tt_jd(2_440_432.5, offsets)
    with closing(load_file(str(DE441_AROUND_1969))) as independent, open_spk(DE441_AROUND_1969) as spk:
        for pair, name in (((0, 10), "sun"), ((0, 5), "jupiter barycenter"), ((0, 1), "mercury barycenter")):
            position, rate = spk[pair].compute_and_differentiate(t.whole, t.tdb_fraction)
            expected = independent[name].at(t)
            # The same coefficients: only rounding of 1e9 km in float64 is left.
            np.testing.assert_allclose(position / AU_KM, expected.position.au, rtol=1e-13)
            np.testing.assert_allclose(rate / AU_KM, expected.velocity.au_per_d, rtol=1e-11)


# ---- opened and closed


def test_an_open_file_is_closed_at_the_end_and_on_an_error(tmp_path):
    path = tiny_kernel(tmp_path / "k.bsp")
    with open_spk(path) as spk:
        file = spk.daf.file
        assert not file.closed
    assert file.closed
    with pytest.raises(ZeroDivisionError), open_spk(path) as spk:
        file = spk.daf.file
        raise ZeroDivisionError
    assert file.closed


def test_an_instant_outside_becomes_a_span_error(tmp_path):
    path = tiny_kernel(tmp_path / "k.bsp")
    with pytest.raises(SpanError) as caught, open_spk(path) as spk:
        spk[0, 10].compute_and_differentiate(np.array([J2000_JD - 50.0]), np.zeros(1))
    assert "\n" not in str(caught.value)
    assert "--kernel PATH" in str(caught.value)
