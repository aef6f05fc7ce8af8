"""``wanderers track``: the time series of one body."""

from __future__ import annotations

import re
from typing import Any

import click

from wanderers.cli.options import (
    BODY,
    FRAME,
    Span,
    Workplace,
    require_in_kernel,
    span_options,
    workplace_options,
)
from wanderers.cli.output import Destination, output_options, write_table
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.errors import UsageProblem
from wanderers.events.timeseries import time_series
from wanderers.report.tables import track_heading

MOST_ROWS = 5_000_000
DAYS_PER_UNIT = {"s": 1.0 / 86_400.0, "min": 1.0 / 1_440.0, "h": 1.0 / 24.0, "d": 1.0}


class Step(click.ParamType):  # type: ignore[type-arg, unused-ignore] # generic from click 8.4 on
    """A length of time such as 6h or 1d, in days."""

    name = "step"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> float:
        """Return the step in days."""
        if isinstance(value, float):
            return value
        match = re.fullmatch(r"(\d+(?:\.\d+)?)\s*(s|min|h|d)", str(value).strip())
        if match is None or float(match[1]) == 0.0:
            self.fail(f"'{value}' is no step: give a number and a unit, as 10min, 6h or 1d", param, ctx)
        return float(match[1]) * DAYS_PER_UNIT[match[2]]


@click.command("track")
@click.argument("body", type=BODY)
@span_options(default_years=1)
@click.option(
    "--step", type=Step(), default="1d", show_default=True, help="Time between rows: 10min, 6h, 1d, ..."
)
@click.option(
    "--frame",
    type=FRAME,
    default="ecliptic",
    show_default=True,
    metavar="FRAME",
    help="Frame of the longitude and its rate.",
)
@workplace_options
@output_options
def command(
    *,
    body: Body,
    span: Span,
    step: float,
    frame: Frame,
    workplace: Workplace,
    destination: Destination,
) -> None:
    r"""Print a body's apparent positions, distance, brightness and size at regular steps.

    \b
    Example: Mars every six hours in January 2027, as CSV
        wanderers track mars --from 2027-01 --to 2027-02 --step 6h --format csv
    """
    require_in_kernel(workplace, span, (body,))
    rows = (span.jd_to - span.jd_from) / step
    if rows > MOST_ROWS:
        raise UsageProblem(
            f"--step would give {rows:,.0f} rows, more than {MOST_ROWS:,}: "
            "choose a longer step or a shorter span"
        )
    table = time_series(workplace.store, body, span.jd_from, span.jd_to, step, frame)
    write_table(table, destination, track_heading(table, body, workplace.store.kernel.name))
