"""Options of commands that look for several bodies together: which may take part, and how many at least."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Final, TypeVar

import click

from wanderers.cli.options import BODY
from wanderers.ephemeris.bodies import BODIES, NAKED_EYE_PLANETS, Body

Command = TypeVar("Command", bound=Callable[..., Any])

WHICH: Final = (
    "Bodies that may take part, separated by commas. [default: the five planets the naked eye sees]"
)
HOW_MANY: Final = "Fewest bodies together."
DEFAULT_AT_LEAST: Final = 3


class BodyList(click.ParamType):  # type: ignore[type-arg, unused-ignore] # generic from click 8.4 on
    """Different bodies separated by commas, at least so many."""

    name = "bodies"

    def __init__(self, fewest: int, needed: str, without: Body | None = None) -> None:
        """Take the least number, what is said where it is not reached, and a body that cannot take part."""
        self.fewest = fewest
        self.needed = needed
        self.without = without

    def convert(
        self, value: Any, param: click.Parameter | None, ctx: click.Context | None
    ) -> tuple[Body, ...]:
        """Return the bodies in their written order, each once."""
        if isinstance(value, tuple):
            return value
        named = {BODY.convert(name, param, ctx) for name in str(value).split(",") if name.strip()}
        if self.without in named or len(named) < self.fewest:
            self.fail(self.needed, param, ctx)
        return tuple(body for body in BODIES if body in named)


def party_options(bodies: BodyList) -> Callable[[Command], Command]:
    """Add ``--bodies`` and ``--at-least``; the command receives ``bodies`` and ``at_least``."""

    def decorate(command: Command) -> Command:
        command = click.option(
            "--at-least",
            type=click.IntRange(bodies.fewest),
            default=DEFAULT_AT_LEAST,
            show_default=True,
            metavar="N",
            help=HOW_MANY,
        )(command)
        five = ",".join(NAKED_EYE_PLANETS)
        return click.option("--bodies", type=bodies, default=five, metavar="LIST", help=WHICH)(command)

    return decorate


def require_enough(bodies: tuple[Body, ...], at_least: int) -> None:
    """Check that enough bodies may take part.

    Raises:
        UsageError: more together are asked for.
    """
    if at_least > len(bodies):
        raise click.UsageError(
            f"--at-least {at_least} is more than the {len(bodies)} bodies named by --bodies"
        )
