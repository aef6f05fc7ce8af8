import os
import struct
from contextlib import closing
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st
from skyfield.api import load, load_file

from tests.ephemeris.kernel_files import (
    DE421,
    DE441_AROUND_1969,
    EARTH_AND_SUN,
    J2000_JD,
    PLANET_PAIRS,
    Segment,
    segments,
    spk_bytes,
    tiny_kernel,
)
from wanderers.constants import AU_KM
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.spk_files import open_spk, usable_contents
from wanderers.errors import KernelError, SpanError


def contents(path):
    with open_spk(path) as spk:
        return usable_contents(path, spk)


def complaint(path):
    """Return the message with which a file is refused, without its path."""
    with pytest.raises(KernelError) as caught:
        contents(path)
    text = str(caught.value)
    assert "\n" not in text
    assert text.startswith(f"kernel {path} ")
    assert "--kernel PATH" in text
    return text.removeprefix(f"kernel {path} ")


def written(tmp_path, content):
    path = tmp_path / "given.bsp"
    path.write_bytes(content)
    return path


def whole(**changes):
    return spk_bytes(segments(*EARTH_AND_SUN, **changes))


def patched(content, offset, replacement):
    return content[:offset] + replacement + content[offset + len(replacement) :]


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
    assert contents(tiny_kernel(tmp_path / "a.bsp", declared_days=1_000.0)).span_jd[1] == J2000_JD + 64.0
    assert contents(tiny_kernel(tmp_path / "b.bsp", declared_days=40.0)).span_jd[1] == J2000_JD + 40.0


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


def two_halves(tmp_path, gap_days=0.0, overlap_days=0.0):
    first = segments(*EARTH_AND_SUN)
    start = J2000_JD + 64.0 + gap_days - overlap_days
    second = segments(*EARTH_AND_SUN, start_jd=start, records=4, place_km=2.0e8)
    return written(tmp_path, spk_bytes([*first, *second]))


def sun_x_km(path, *jd):
    with open_spk(path) as spk:
        position, _ = spk[0, 10].compute_and_differentiate(np.array(jd), np.zeros(len(jd)))
    return np.round(position[0], -8)


def test_halves_that_touch_count_as_one(tmp_path):
    path = two_halves(tmp_path)
    assert contents(path).span_jd == (J2000_JD, J2000_JD + 192.0)
    at = (J2000_JD + 100.0, J2000_JD, J2000_JD + 63.9, J2000_JD + 192.0)
    assert sun_x_km(path, *at).tolist() == [2.0e8, 1.0e8, 1.0e8, 2.0e8]


def test_the_day_and_its_part_together_choose_the_half(tmp_path):
    with open_spk(two_halves(tmp_path)) as spk:
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


# ---- what is refused


def test_a_missing_file_is_refused(tmp_path):
    assert complaint(tmp_path / "none.bsp").startswith("does not exist; give an SPK file")
    (tmp_path / "file").touch()
    assert complaint(tmp_path / "file" / "none.bsp").startswith("does not exist")


def test_a_folder_and_an_empty_file_are_refused(tmp_path):
    assert complaint(tmp_path).startswith("is a folder")
    assert complaint(written(tmp_path, b"")).startswith("is empty")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="needs named pipes")
def test_a_pipe_is_refused_without_waiting_for_it(tmp_path):
    os.mkfifo(tmp_path / "pipe.bsp")
    assert complaint(tmp_path / "pipe.bsp").startswith("is not a regular file")


@pytest.mark.skipif(hasattr(os, "geteuid") and os.geteuid() == 0, reason="the superuser may read everything")
def test_a_file_without_permission_is_refused(tmp_path):
    path = tiny_kernel(tmp_path / "closed.bsp")
    path.chmod(0o000)
    assert complaint(path).startswith("cannot be read: Permission denied")


@pytest.mark.parametrize(
    "content",
    [b"<!DOCTYPE html><title>404</title>", b"DAF/", b"DAF/PCK " + bytes(2000), b"JPL ASCII" * 300],
)
def test_another_kind_of_file_is_refused(tmp_path, content):
    assert complaint(written(tmp_path, content)).startswith("is not an SPK file (it begins with ")


def test_a_beginning_with_line_ends_still_makes_one_line(tmp_path):
    assert complaint(written(tmp_path, b"a\r\nb\nc\n" * 300)).startswith(
        "is not an SPK file (it begins with 'a"
    )


def test_orientations_under_the_old_beginning_are_refused(tmp_path):
    # A PCK's summaries have 2 doubles and 5 integers: NAIF, PCK Required Reading.
    content = spk_bytes(segments(*EARTH_AND_SUN), magic=b"NAIF/DAF", counts=(2, 5))
    assert complaint(written(tmp_path, content)).startswith("is not an SPK file (its summaries differ)")


def test_a_file_copied_as_text_is_refused(tmp_path):
    # DAF Required Reading, "FTP validation": the test string shows which line ends were changed.
    content = whole().replace(b"\r\n", b"\n", 1)
    assert complaint(written(tmp_path, content)).startswith("was changed in transfer (copied as text?)")


def test_every_shorter_copy_is_refused(tmp_path):
    content = whole()
    for length in [*range(1, 1_100, 90), *range(1_100, len(content), 8), len(content) - 1]:
        said = complaint(written(tmp_path, content[:length]))
        if length >= 8:
            assert said.startswith("is cut short"), length


def test_the_beginning_of_a_real_kernel_is_refused_with_both_lengths(tmp_path):
    with DE421.open("rb") as file:
        said = complaint(written(tmp_path, file.read(200_000)))
    needed = 2_098_516 * 8  # the last word of its last segment, by jplephem's listing
    assert said.startswith(f"is cut short: it should have {needed} bytes, has 200000")


def test_bytes_after_the_end_do_no_harm(tmp_path):
    assert contents(written(tmp_path, whole() + bytes(5_000))).span_jd == (J2000_JD, J2000_JD + 64.0)


@pytest.mark.parametrize("following", [2.0, 1.0, -7.0, 1e6, 2.5, float("nan"), float("inf")])
def test_a_directory_that_leads_nowhere_or_round_in_a_circle_is_refused(tmp_path, following):
    content = spk_bytes(segments(*EARTH_AND_SUN), next_record=following)
    assert complaint(written(tmp_path, content)).startswith("is damaged (")


@pytest.mark.parametrize("count", [26.0, -1.0, 2.5, float("nan")])
def test_an_impossible_number_of_segments_is_refused(tmp_path, count):
    content = patched(whole(), 1024 + 16, struct.pack("<d", count))
    assert complaint(written(tmp_path, content)).startswith("is damaged (")


@pytest.mark.parametrize(("first", "last"), [(0, 400), (400, 400), (400, 399), (385, 10**9), (-5, -1)])
def test_a_segment_outside_the_file_is_refused(tmp_path, first, last):
    content = patched(whole(), 1024 + 24 + 16 + 16, struct.pack("<2i", first, last))
    assert complaint(written(tmp_path, content)).startswith("is damaged (segment 0 to 3 lies outside")


@pytest.mark.parametrize(
    "tail",
    [{-1: 3.0}, {-1: 0.0}, {-2: 9.0}, {-2: float("nan")}, {-3: 0.0}, {-3: -1.0}, {-1: 1.0, -2: 16.0 + 2.0}],
)
@pytest.mark.parametrize("data_type", [2, 3])
def test_a_segment_whose_own_description_does_not_fit_is_refused(tmp_path, tail, data_type):
    content = spk_bytes(segments(*EARTH_AND_SUN, data_type=data_type), tail=tail)
    assert complaint(written(tmp_path, content)).startswith("is damaged (segment ")


@pytest.mark.parametrize(
    "tail", [{-4: float("nan")}, {-4: float("inf")}, {-4: 86_400.0}, {-3: float("inf")}, {-3: 86_400.0}]
)
def test_a_segment_whose_dates_do_not_fit_its_records_is_refused(tmp_path, tail):
    content = spk_bytes(segments(*EARTH_AND_SUN), tail=tail)
    assert complaint(written(tmp_path, content)).startswith("is damaged (segment ")


@pytest.mark.parametrize("place", [0, 8])
def test_a_segment_declared_for_no_real_dates_is_refused(tmp_path, place):
    content = patched(whole(), 1024 + 24 + place, struct.pack("<d", float("nan")))
    assert complaint(written(tmp_path, content)).startswith("is damaged (segment 0 to 3")


def test_a_directory_without_segments_is_refused(tmp_path):
    assert complaint(written(tmp_path, spk_bytes([]))).startswith("lacks the Earth and the Sun")


@pytest.mark.parametrize(
    ("pairs", "lacking"),
    [
        (((0, 3), (3, 399)), "lacks the Sun;"),
        (((0, 10), (0, 4)), "lacks the Earth;"),
        (((0, 3), (0, 10)), "lacks the Earth;"),
        (((10, 2_000_001),), "lacks the Earth and the Sun;"),
    ],
)
def test_a_kernel_without_the_earth_or_the_sun_is_refused(tmp_path, pairs, lacking):
    assert complaint(written(tmp_path, spk_bytes(segments(*pairs)))).startswith(lacking)


@pytest.mark.parametrize("data_type", [1, 5, 9, 13, 20, 21])
def test_another_data_type_is_refused_where_it_is_needed(tmp_path, data_type):
    mars = Segment(0, 4, data_type=data_type)
    path = written(tmp_path, spk_bytes([*segments(*EARTH_AND_SUN), mars]))
    assert complaint(path).startswith(f"holds segment 0 to 4 as data type {data_type}, where 2 or 3")
    asteroid = replace(mars, target=2_000_001)
    path = written(tmp_path, spk_bytes([*segments(*EARTH_AND_SUN), asteroid]))
    assert contents(path).bodies == (Body.SUN,)


def test_other_axes_are_refused(tmp_path):
    # 17 is NAIF's ECLIPJ2000: positions read as if they were ICRS would be 23 degrees off.
    assert complaint(written(tmp_path, whole(frame=17))).startswith("gives segment 0 to 3 in frame 17")


def test_segments_with_no_day_in_common_are_refused(tmp_path):
    late = Segment(0, 4, start_jd=J2000_JD + 63.5)
    path = written(tmp_path, spk_bytes([*segments(*EARTH_AND_SUN), late]))
    assert complaint(path).startswith("has no whole day")


@settings(max_examples=300, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    st.lists(st.tuples(st.integers(0, 3 * 1024 + 300), st.integers(0, 255)), min_size=1, max_size=6),
    st.sampled_from("<>"),
)
@example([(8, 255), (11, 127)], "<")
@example([(76, 0)], "<")
@example([(76, 255), (79, 255)], "<")
@example([(84, 0), (85, 0)], "<")
@example([(88, 0)], ">")
def test_whatever_is_damaged_is_read_or_refused_but_never_crashes(tmp_path, changes, order):
    content = bytearray(spk_bytes(segments(*EARTH_AND_SUN, (0, 4), data_type=3), order=order))
    for offset, value in changes:
        content[offset] = value
    path = written(tmp_path, bytes(content))
    try:
        held = contents(path)
    except KernelError as error:
        assert "\n" not in str(error)
    else:
        assert Body.SUN in held.bodies
        assert held.span_jd[1] - held.span_jd[0] >= 1.0


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


@pytest.mark.skipif(not os.path.isdir("/proc/self/fd"), reason="counts open files in /proc")
def test_a_refused_file_is_not_left_open(tmp_path):
    path = written(tmp_path, whole()[:-8])
    before = len(os.listdir("/proc/self/fd"))
    for _ in range(3):
        complaint(path)
    assert len(os.listdir("/proc/self/fd")) == before


def test_an_instant_outside_becomes_a_span_error(tmp_path):
    path = tiny_kernel(tmp_path / "k.bsp")
    with pytest.raises(SpanError) as caught, open_spk(path) as spk:
        spk[0, 10].compute_and_differentiate(np.array([J2000_JD - 50.0]), np.zeros(1))
    assert "\n" not in str(caught.value)
    assert "--kernel PATH" in str(caught.value)
