"""The family of errors the program raises on purpose.

Every message says what was asked, what is allowed and what to do next; the command line prints it as
one line. Errors that stem from what the user typed derive from UsageProblem (exit status 2); everything
else is a run-time failure (exit status 1).
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable


class WanderersError(Exception):
    """Base of all errors raised on purpose."""


class UsageProblem(WanderersError, ValueError):
    """The request itself cannot be understood or is impossible."""


class UnknownNameError(UsageProblem, LookupError):
    """A name that is not in its list; carries the nearest valid ones."""

    def __init__(self, what: str, given: str, valid: Iterable[str], *, advice: str = "") -> None:
        """Compose the message for the unknown name ``given`` of the sort ``what``."""
        self.given = given
        self.valid = tuple(valid)
        self.nearest = tuple(difflib.get_close_matches(given.lower(), self.valid, n=3, cutoff=0.5))
        hint = (
            f"did you mean {' or '.join(self.nearest)}?"
            if self.nearest
            else f"choose from {', '.join(self.valid)}"
        )
        super().__init__(f"unknown {what} '{given}': {advice or hint}")


class DateError(UsageProblem):
    """A date that does not exist or a span that runs backwards."""


class KernelError(WanderersError):
    """A kernel file that is missing, damaged, of another kind or lacks a body."""


class SpanError(WanderersError):
    """A span of time outside the kernel."""


class InputError(WanderersError):
    """A file that cannot be read."""


class OutputError(WanderersError):
    """A place that cannot be written."""
