"""Files that are cut short, damaged or of another kind, and how the program names them."""

import os
import struct
from dataclasses import replace

import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from tests.ephemeris.kernel_files import (
    DE421,
    EARTH_AND_SUN,
    J2000_JD,
    Segment,
    contents,
    segments,
    spk_bytes,
    tiny_kernel,
    whole,
    written,
)
from wanderers.ephemeris.bodies import Body
from wanderers.errors import KernelError


def complaint(path):
    """Return the message with which a file is refused, without its path."""
    with pytest.raises(KernelError) as caught:
        contents(path)
    text = str(caught.value)
    assert "\n" not in text
    assert text.startswith(f"kernel {path} ")
    assert "--kernel PATH" in text
    return text.removeprefix(f"kernel {path} ")


def patched(content, offset, replacement):
    return content[:offset] + replacement + content[offset + len(replacement) :]


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
    [{-1: 3.0}, {-1: 0.0}, {-2: 9.0}, {-2: float("nan")}, {-3: 0.0}, {-3: -1.0}, {-1: 1.0, -2: 10.0}],
)
@pytest.mark.parametrize("data_type", [2, 3])
def test_a_segment_whose_own_description_does_not_fit_is_refused(tmp_path, tail, data_type):
    content = spk_bytes(segments(*EARTH_AND_SUN, data_type=data_type), tail=tail)
    assert complaint(written(tmp_path, content)).startswith("is damaged (segment ")


@pytest.mark.parametrize(("data_type", "record_words"), [(2, 16.0), (3, 28.0)])
def test_a_record_that_holds_no_whole_number_of_series_is_refused(tmp_path, data_type, record_words):
    # As long as the two records that are there, but 2 words short of a multiple of 3 or 6.
    tail = {-1: 1.0, -2: record_words}
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


@pytest.mark.skipif(not os.path.isdir("/proc/self/fd"), reason="counts open files in /proc")
def test_a_refused_file_is_not_left_open(tmp_path):
    path = written(tmp_path, whole()[:-8])
    before = len(os.listdir("/proc/self/fd"))
    for _ in range(3):
        complaint(path)
    assert len(os.listdir("/proc/self/fd")) == before
