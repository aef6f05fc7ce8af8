"""Options of commands that go evening by evening: which evenings, and with what aid."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

import click

from wanderers.site.lineup_nights import Aid

Command = TypeVar("Command", bound=Callable[..., Any])


def evening_options(default: str) -> Callable[[Command], Command]:
    """Add ``--from`` and ``--to``; the command receives ``from_text`` and ``to_text``.

    Args:
        default: how long the span is where no end is given, in words.
    """

    def decorate(command: Command) -> Command:
        after_last = f"Date after the last evening. [default: {default} on]"
        command = click.option("--to", "to_text", metavar="DATE", help=after_last)(command)
        first = "First evening, a local date. [default: today]"
        return click.option("--from", "from_text", metavar="DATE", help=first)(command)

    return decorate


def aid_option(meaning: str) -> Callable[[Command], Command]:
    """Add ``--aid``; the command receives ``aid``, the name of an Aid.

    Args:
        meaning: what the aid is for, as the help says it.
    """
    return click.option(
        "--aid",
        type=click.Choice([aid.value for aid in Aid]),
        default=Aid.NAKED_EYE.value,
        show_default=True,
        help=meaning,
    )
