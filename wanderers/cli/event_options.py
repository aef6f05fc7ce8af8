"""Options of commands that list events: which of them are wanted."""

from __future__ import annotations

import functools
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Final, TypeVar

import click

from wanderers.cli.options import (
    ONE_AND_SEVERAL,
    Span,
    Workplace,
    body_option,
    frame_option,
    kind_option,
    require_in_kernel,
    span_options,
    workplace_options,
)
from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits

Command = TypeVar("Command", bound=Callable[..., Any])

STARS_FOR: Final = {"all": BODIES[1:], "planets": PLANETS, "none": ()}
HOW_CLOSE: Final = (
    "Largest separation of an appulse, largest diameter of a gathering. [default: 10; Moon 6, stars 5]"
)
WHOSE_STARS: Final = "Whose meetings with stars to list: Moon's and planets', planets' only, nobody's."


@dataclass(frozen=True, slots=True)
class Wanted:
    """Which events are wanted.

    Attributes:
        span: between which instants.
        bodies: whose.
        kinds: of which kinds.
        frames: in which frames, where that matters.
        stars_for: whose meetings with stars.
        within_deg: largest separation; None for the limits that each kind has.
    """

    span: Span
    bodies: tuple[Body, ...]
    kinds: tuple[Kind, ...]
    frames: tuple[Frame, ...]
    stars_for: tuple[Body, ...]
    within_deg: float | None = None

    def query(self, workplace: Workplace) -> Query:
        """Return what is asked of the catalogue.

        Raises:
            SpanError: the span is not within the kernel.
            KernelError: a body named is not in the kernel.
        """
        require_in_kernel(workplace, self.span, self.bodies)
        within = self.within_deg
        limits = Limits() if within is None else Limits(within, within, within, within)
        choice = Choice(self.bodies, self.stars_for, limits)
        kinds, frames = frozenset(self.kinds), frozenset(self.frames)
        return Query(self.span.jd_from, self.span.jd_to, kinds, frames, choice)


def event_options(*, years: int, stars: str) -> Callable[[Command], Command]:
    """Add what events are wanted; the command receives ``wanted`` and ``workplace``.

    Args:
        years: length of the span where none is given.
        stars: whose meetings with stars are listed where nothing is said.
    """

    def decorate(command: Command) -> Command:
        @span_options(default_years=years)
        @body_option(ONE_AND_SEVERAL)
        @kind_option
        @frame_option
        @click.option(
            "--within", type=click.FloatRange(0.0, 180.0, min_open=True), metavar="DEG", help=HOW_CLOSE
        )
        @click.option(
            "--stars", type=click.Choice(list(STARS_FOR)), default=stars, show_default=True, help=WHOSE_STARS
        )
        @workplace_options
        @functools.wraps(command)
        def wrapped(
            *args: Any,
            span: Span,
            bodies: tuple[Body, ...],
            kinds: tuple[Kind, ...],
            frames: tuple[Frame, ...],
            within: float | None,
            stars: str,
            **kwargs: Any,
        ) -> Any:
            wanted = Wanted(span, bodies, kinds, frames, STARS_FOR[stars], within)
            return command(*args, wanted=wanted, **kwargs)

        return wrapped  # type: ignore[return-value]

    return decorate
