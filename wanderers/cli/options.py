"""Options that several commands share, and the types that understand what is typed."""

from __future__ import annotations

import datetime as dt
import functools
import os
import sys
import time
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path
from typing import Any, Final, TypeVar

import click

from wanderers.ephemeris import kernels, timescales
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.dates import ACCEPTED_FORMS, iso_strings, parse_date
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore, silent
from wanderers.errors import DateError, UnknownNameError
from wanderers.events.kinds import Kind

Command = TypeVar("Command", bound=Callable[..., Any])


class NamedType(click.ParamType):  # type: ignore[type-arg, unused-ignore] # generic from click 8.4 on
    """A name out of a list; a wrong one gets the nearest valid ones."""

    def __init__(self, name: str, choices: type[StrEnum]) -> None:
        """Take the sort of name and its list."""
        self.name = name
        self.choices = choices

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> StrEnum:
        """Return the member of that name."""
        try:
            return self.choices(str(value).strip().lower())
        except ValueError:
            raise UnknownNameError(self.name, str(value), [choice.value for choice in self.choices]) from None


BODY = NamedType("body", Body)
KIND = NamedType("kind", Kind)
FRAME = NamedType("frame", Frame)


@dataclass(frozen=True, slots=True)
class Span:
    """A half-open span of TT Julian dates, and how it was typed."""

    jd_from: float
    jd_to: float


@dataclass(frozen=True, slots=True)
class Workplace:
    """What a command works with: the tracks of the kernel in use, and whether to be quiet."""

    store: TrackStore
    quiet: bool


def span_options(default_years: int) -> Callable[[Command], Command]:
    """Add ``--from``, ``--to`` and ``--scale``; the command receives ``span``."""

    def decorate(command: Command) -> Command:
        @click.option(
            "--from",
            "from_text",
            metavar="DATE",
            help="First date; a bare year means its 1 January. [default: today]",
        )
        @click.option(
            "--to",
            "to_text",
            metavar="DATE",
            help=f"End of the span, not included. [default: {default_years} years on]",
        )
        @click.option(
            "--scale",
            type=click.Choice(["utc", "tt"]),
            default="utc",
            show_default=True,
            help="Time scale of the dates given.",
        )
        @functools.wraps(command)
        def wrapped(*args: Any, from_text: str | None, to_text: str | None, scale: str, **kwargs: Any) -> Any:
            return command(*args, span=parse_span(from_text, to_text, scale, default_years), **kwargs)

        return wrapped  # type: ignore[return-value]

    return decorate


def parse_span(from_text: str | None, to_text: str | None, scale: str, default_years: int) -> Span:
    """Return the span that was typed, with today and a number of years standing in.

    Raises:
        DateError: a date that does not exist, or an end not after the beginning.
    """
    start_text = from_text or dt.datetime.now(dt.UTC).date().isoformat()
    start = parse_date(start_text)
    end_text = to_text or _years_later(start, default_years)
    end = parse_date(end_text)
    if end <= start:
        raise DateError(
            f"--to {end_text} is not after --from {start_text}: give a later date ({ACCEPTED_FORMS})"
        )
    if scale == "utc":
        return Span(float(timescales.jd_tt_from_utc(start)), float(timescales.jd_tt_from_utc(end)))
    return Span(start, end)


def _years_later(jd: float, years: int) -> str:
    """Return the same day some years on; 29 February becomes 1 March."""
    text = str(iso_strings(jd))
    year, rest = text[: text.index("-", 1)], text[text.index("-", 1) :].split("T")[0]
    later = int(year) + years
    day = rest if rest != "-02-29" else "-03-01"
    return f"{'-' if later < 0 else ''}{abs(later):04d}{day}"


ONE_AND_SEVERAL: Final = (
    "Body wanted; may be repeated. One alone: and all it meets; several: of what they meet, each other and "
    "stars."
)
EACH_BODY: Final = "Planet wanted; may be repeated."


def body_option(meaning: str) -> Callable[[Command], Command]:
    """Add the repeatable ``--body``; the command receives ``bodies``, all when none is given.

    Args:
        meaning: what naming bodies means, as the help says it.
    """
    return lambda command: _repeatable(command, "--body", "bodies", BODY, BODIES, f"{meaning} [default: all]")


def kind_option(command: Command) -> Command:
    """Add the repeatable ``--kind``; the command receives ``kinds``, all when none is given."""
    return _repeatable(
        command, "--kind", "kinds", KIND, tuple(Kind), "Kind of event wanted; may be repeated. [default: all]"
    )


def frame_option(command: Command) -> Command:
    """Add the repeatable ``--frame``; the command receives ``frames``."""
    return _repeatable(
        command,
        "--frame",
        "frames",
        FRAME,
        (Frame.ECLIPTIC,),
        "Frame of longitudes: ecliptic or equator of date, or j2000; may be repeated. [default: ecliptic]",
    )


def _repeatable(
    command: Command, flag: str, name: str, kind: NamedType, default: Iterable[Any], text: str
) -> Command:
    @click.option(flag, f"{name}_given", type=kind, multiple=True, metavar=flag[2:].upper(), help=text)
    @functools.wraps(command)
    def wrapped(*args: Any, **kwargs: Any) -> Any:
        given = kwargs.pop(f"{name}_given")
        ordered = tuple(choice for choice in type(next(iter(default))) if choice in given)
        return command(*args, **{name: ordered or tuple(default)}, **kwargs)

    return wrapped  # type: ignore[return-value]


def workplace_options(command: Command) -> Command:
    """Add ``--kernel``, ``--cache`` and ``--quiet``; the command receives ``workplace``."""

    @click.option(
        "--kernel",
        type=click.Path(path_type=Path),
        metavar="PATH",
        help="SPK kernel. [default: WANDERERS_KERNEL, a kernel in the cache folder, the embedded DE440]",
    )
    @click.option(
        "--cache",
        type=click.Path(path_type=Path),
        metavar="DIR",
        help="Folder for kernels, tracks, events. [default: ./data_cache if there is one, else the user's]",
    )
    @click.option("--quiet", is_flag=True, help="Show no progress.")
    @functools.wraps(command)
    def wrapped(*args: Any, kernel: Path | None, cache: Path | None, quiet: bool, **kwargs: Any) -> Any:
        return command(*args, workplace=open_workplace(kernel, cache, quiet), **kwargs)

    return wrapped  # type: ignore[return-value]


def open_workplace(kernel: Path | None, cache: Path | None, quiet: bool) -> Workplace:
    """Find and check the kernel, and open its tracks."""
    folder = cache or kernels.default_cache_dir()
    found = kernels.inspect_kernel(kernels.find_kernel(kernel, folder, os.environ), folder, warn=warn)
    progress = silent if quiet or not sys.stderr.isatty() else ProgressLine()
    return Workplace(TrackStore(found, folder, progress=progress, warn=told_once(warn)), quiet)


def told_once(tell: Callable[[str], None]) -> Callable[[str], None]:
    """Return a function that passes on a line the first time: one fault may be met once a block."""
    told: set[str] = set()

    def tell_once(line: str) -> None:
        if line not in told:
            told.add(line)
            tell(line)

    return tell_once


def warn(line: str) -> None:
    """Print one warning line on standard error."""
    click.echo(f"wanderers: warning: {line}", err=True)


class ProgressLine:
    """One line of progress on standard error, redrawn after each block, with the time left."""

    def __init__(self, clock: Callable[[], float] = time.monotonic) -> None:
        """Start counting time."""
        self._clock = clock
        self._start = clock()

    def __call__(self, done: int, total: int) -> None:
        """Redraw the line."""
        left = (self._clock() - self._start) * (total - done) / done
        note = f", about {time_left(left)} left" if done < total else ""
        line = f"computing tracks: {done} of {total} blocks{note}"
        click.echo(f"\r{line:<70}" + ("\n" if done == total else ""), nl=False, err=True)


def time_left(seconds: float) -> str:
    """Say a duration as roughly as it is known: ``40 s``, ``12 min``, ``3 h``."""
    if seconds < 90.0:
        return f"{max(round(seconds), 1)} s"
    minutes = seconds / 60.0
    return f"{round(minutes)} min" if minutes < 90.0 else f"{round(minutes / 60.0)} h"


def require_in_kernel(workplace: Workplace, span: Span, bodies: tuple[Body, ...] = BODIES) -> None:
    """Check that a span, and the bodies that were named, lie within the kernel in use.

    Raises:
        SpanError: the span does not; the message gives the kernel's span.
        KernelError: a body named is not in the kernel.
    """
    if bodies != BODIES:
        kernels.require_bodies(workplace.store.kernel, bodies)
    kernels.require_span(workplace.store.kernel, span.jd_from, span.jd_to)
