"""``wanderers kernels``: which kernel is used and why, what it holds; checking and adding one."""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from math import ceil, floor
from pathlib import Path
from typing import Any, Final

import click

from wanderers.cli.options import warn
from wanderers.ephemeris import kernels
from wanderers.ephemeris.dates import iso_strings
from wanderers.ephemeris.kernels import Kernel
from wanderers.errors import KernelError
from wanderers.site.summary import counted

BYTES_PER_MB: Final = 1_000_000


@dataclass(frozen=True, slots=True)
class Damaged:
    """A file in the cache folder that cannot be used.

    Attributes:
        path: the file.
        problem: what is wrong with it.
    """

    path: Path
    problem: str


def cache_option(command: Callable[..., None]) -> Callable[..., None]:
    """Add ``--cache``; the command receives ``cache``."""
    return click.option(
        "--cache",
        type=click.Path(path_type=Path),
        metavar="DIR",
        help="Folder for kernels, computed tracks and kept events. [default: ./data_cache if there is one, "
        "else the user's cache folder]",
    )(command)


def format_option(command: Callable[..., None]) -> Callable[..., None]:
    """Add ``--format``; the command receives ``form``."""
    return click.option(
        "--format",
        "form",
        type=click.Choice(("table", "json")),
        default="table",
        show_default=True,
        help="How to print it.",
    )(command)


@click.group("kernels", invoke_without_command=True)
@click.option(
    "--kernel",
    type=click.Path(path_type=Path),
    metavar="PATH",
    help="SPK kernel to use. [default: WANDERERS_KERNEL, a kernel in the cache folder, the embedded DE440]",
)
@cache_option
@format_option
@click.pass_context
def command(ctx: click.Context, *, kernel: Path | None, cache: Path | None, form: str) -> None:
    """Say which kernel is used and why, what span of dates and which bodies it holds, and what else is there.

    A kernel is a file of positions of the planets in JPL's SPK format.

    \b
    Example: put a longer kernel into the cache folder, then see that it is used
        wanderers kernels add de441_part-1.bsp
        wanderers kernels
    """  # noqa: D301  (click takes the backspace itself as a mark)
    if ctx.invoked_subcommand is not None:
        given = {"cache": cache, "form": form}
        ctx.default_map = dict.fromkeys(command.commands, given)
        return
    folder = cache or kernels.default_cache_dir()
    path = kernels.find_kernel(kernel, folder, os.environ)
    used = kernels.inspect_kernel(path, folder, warn=warn)
    others = [_inspected(other, folder) for other in kernels.cached_kernels(folder) if not _same(other, path)]
    reason = reason_for(path, kernel, folder)
    if form == "json":
        listed = [_facts_of(other) for other in others]
        _print_json({"in_use": facts(used) | {"reason": reason}, "cache": str(folder), "others": listed})
        return
    click.echo("\n".join(_report(used, reason, folder, others)))


@command.command("check", short_help="Check a kernel and say what it holds.")
@click.argument("path", type=click.Path(path_type=Path))
@cache_option
@format_option
def check(*, path: Path, cache: Path | None, form: str) -> None:
    """Check a kernel to its last segment and say what it holds; nothing is copied.

    \b
    Example: a file that was just downloaded
        wanderers kernels check de441_part-1.bsp
    """  # noqa: D301
    folder = cache or kernels.default_cache_dir()
    _print_one(kernels.inspect_kernel(path, folder, warn=warn), "Whole", form)


@command.command("add", short_help="Check a kernel and copy it into the cache folder.")
@click.argument("path", type=click.Path(path_type=Path))
@cache_option
@format_option
def add(*, path: Path, cache: Path | None, form: str) -> None:
    """Check a kernel and copy it into the cache folder, where it is used from then on if it is the only one.

    \b
    Example: a kernel for antiquity
        wanderers kernels add de441_part-1.bsp
    """  # noqa: D301
    folder = cache or kernels.default_cache_dir()
    added = kernels.add_kernel(path, folder, tell=_tell)
    if len(kernels.cached_kernels(folder)) > 1:
        _tell(f"{folder} now holds several kernels: name one with --kernel, e.g. --kernel {added.path.name}")
    _print_one(added, "In the cache folder", form)


def reason_for(path: Path, option: Path | None, folder: Path) -> str:
    """Return why a kernel is the one in use, in the order in which find_kernel looks."""
    if option is not None:
        return "named by --kernel"
    if os.environ.get(kernels.KERNEL_VARIABLE):
        return f"named by the environment variable {kernels.KERNEL_VARIABLE}"
    if path.parent == folder:
        return f"the only kernel in the cache folder {folder}"
    return (
        f"comes with the program; none is named by --kernel or {kernels.KERNEL_VARIABLE}, "
        f"and the cache folder {folder} holds none"
    )


def facts(kernel: Kernel) -> dict[str, Any]:
    """Return what is known of a kernel, for JSON.

    ``first_day`` and ``last_day`` are days the file covers whole (TDB); between ``usable_from`` and
    ``usable_to`` (TT) apparent places can be had, which takes light-time on top.
    """
    first, last = _whole_days(kernel.jd_tdb_start, kernel.jd_tdb_end)
    usable_from, usable_to = _whole_days(*kernels.usable_span_jd_tt(kernel))
    return {
        "name": kernel.name,
        "path": str(kernel.path),
        "first_day": first,
        "last_day": last,
        "usable_from": usable_from,
        "usable_to": usable_to,
        "jd_tdb_start": kernel.jd_tdb_start,
        "jd_tdb_end": kernel.jd_tdb_end,
        "bodies": list(kernel.bodies),
        "size_bytes": kernel.size_bytes,
        "sha256": kernel.sha256,
    }


def _whole_days(jd_from: float, jd_to: float) -> tuple[str, str]:
    """Print the first and the last midnight in a span as dates."""
    ends = ceil(jd_from - 0.5) + 0.5, floor(jd_to - 0.5) + 0.5
    first, last = (str(text).partition("T")[0] for text in iso_strings(ends))
    return first, last


def _lines(kernel: Kernel) -> Iterator[str]:
    """Print what is known of a kernel for people."""
    known = facts(kernel)
    yield f"  File      {kernel.path}"
    yield f"  Span      {known['usable_from']} to {known['usable_to']} (TT; astronomical years, Gregorian)"
    yield f"  Bodies    {', '.join(kernel.bodies)}"
    yield f"  Size      {kernel.size_bytes / BYTES_PER_MB:.1f} MB ({kernel.size_bytes} bytes)"
    yield f"  SHA-256   {kernel.sha256}"


def _report(used: Kernel, reason: str, folder: Path, others: list[Kernel | Damaged]) -> Iterator[str]:
    """Print the kernel in use and the rest of the cache folder for people."""
    yield f"In use: {used.name}"
    yield f"  Why       {reason}"
    yield from _lines(used)
    yield ""
    if not others:
        yield f"No other kernel in the cache folder {folder}"
        return
    yield f"{counted(len(others), 'other kernel')} in the cache folder {folder}"
    for other in others:
        if isinstance(other, Damaged):
            yield f"  NOT USABLE: {other.path.name}"
            yield f"  Problem   {other.problem}"
        else:
            yield other.name
            yield from _lines(other)


def _print_one(kernel: Kernel, heading: str, form: str) -> None:
    if form == "json":
        _print_json(facts(kernel))
        return
    click.echo("\n".join([f"{heading}: {kernel.name}", *_lines(kernel)]))


def _print_json(value: dict[str, Any]) -> None:
    click.echo(json.dumps(value, indent=2, ensure_ascii=False))


def _inspected(path: Path, folder: Path) -> Kernel | Damaged:
    """Inspect a kernel that is not in use: its damage must not stop the report."""
    try:
        return kernels.inspect_kernel(path, folder, warn=warn)
    except KernelError as error:
        return Damaged(path, str(error))


def _facts_of(other: Kernel | Damaged) -> dict[str, Any]:
    if isinstance(other, Damaged):
        return {"path": str(other.path), "problem": other.problem}
    return facts(other)


def _same(one: Path, other: Path) -> bool:
    return one.resolve() == other.resolve()


def _tell(line: str) -> None:
    click.echo(f"wanderers: {line}", err=True)
