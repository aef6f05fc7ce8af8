"""Tables of stars, and the log in which brightness estimates are written down."""

from __future__ import annotations

from typing import Any, Final

import polars as pl

from wanderers.plans.comparison_stars import STARS_A_NIGHT
from wanderers.report.campaign import words
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts.campaign_backdrop import LETTERS

PREDICTED: Final[dict[str, type[pl.DataType]]] = {
    "evening_date": pl.String,
    "planned_local_time": pl.String,
    "predicted_mag": pl.Float64,
    "altitude_deg": pl.Float64,
    "airmass": pl.Float64,
}
"""Columns of the log that tell what to expect; the comparison stars follow."""
TO_FILL_IN: Final = (
    "observed_local_time",
    "brighter_star",
    "fainter_star",
    "estimate_mag",
    "instrument",
    "sky",
    "observer",
    "remarks",
)
"""Columns of the log that stay empty."""


def lettered(contents: CampaignContents) -> pl.DataFrame:
    """Return the registration stars, ``letter`` in front as on the chart."""
    table = contents.registration.table()
    return table.insert_column(0, pl.Series("letter", list(LETTERS[: table.height]), dtype=pl.String))


def compared(contents: CampaignContents) -> pl.DataFrame:
    """Return the comparison stars, evening date and number of the night in front."""
    table = contents.comparisons.table
    nights = contents.plan[list(contents.compared)].select(
        pl.int_range(pl.len()).cast(table.schema["night"]).alias("row"),
        "evening_date",
        pl.col("night").alias("number"),
    )
    joined = table.rename({"night": "row"}).join(nights, on="row", how="left", maintain_order="left")
    rest = [name for name in table.columns if name != "night"]
    return joined.select("evening_date", pl.col("number").alias("night"), *rest)


def blank_log(contents: CampaignContents) -> pl.DataFrame:
    """Return a line a planned night: what is predicted, its comparison stars, and columns to fill in."""
    columns = dict(PREDICTED)
    for number in range(1, STARS_A_NIGHT + 1):
        columns |= {f"star_{number}": pl.String, f"v_mag_{number}": pl.Float64}
    rows = [_predicted(night, stars) for night, stars, _ in contents.compared_nights()]
    return pl.DataFrame(rows, schema=columns, orient="row").with_columns(
        pl.lit(None, dtype=pl.String).alias(name) for name in TO_FILL_IN
    )


def _predicted(night: words.Night, stars: pl.DataFrame) -> list[Any]:
    """Return a line of the log as far as it is filled in."""
    own = stars.select("star", "v_mag").rows()
    own += [(None, None)] * (STARS_A_NIGHT - len(own))
    return [
        night["evening_date"],
        words.clock(night["recommended_local"]),
        round(night["magnitude"], 2) if night["magnitude"] is not None else None,
        round(night["altitude_deg"], 1),
        round(night["airmass"], 2),
        *(value for star in own for value in star),
    ]
