"""Tables of stars, and the log in which brightness estimates are written down."""

from __future__ import annotations

from typing import Final

import polars as pl

from wanderers.report.campaign import words
from wanderers.report.campaign.contents import CampaignContents
from wanderers.report.charts.campaign_backdrop import LETTERS

STARS_A_NIGHT: Final = 3
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
    rows = []
    table = contents.comparisons.table
    for place, at in enumerate(contents.compared):
        night = contents.plan.row(at, named=True)
        stars = table.filter(pl.col("night") == place).select("star", "v_mag").rows()
        stars += [(None, None)] * (STARS_A_NIGHT - len(stars))
        rows.append(
            {
                "evening_date": night["evening_date"],
                "planned_local_time": words.clock(night["recommended_local"]),
                "predicted_mag": round(night["magnitude"], 2) if night["magnitude"] is not None else None,
                "altitude_deg": round(night["altitude_deg"], 1),
                "airmass": round(night["airmass"], 2),
            }
            | {
                f"{name}_{number}": value
                for number, star in enumerate(stars, 1)
                for name, value in zip(("star", "v_mag"), star, strict=True)
            }
        )
    return pl.DataFrame(rows, schema=_schema()).with_columns(
        pl.lit(None, dtype=pl.String).alias(name) for name in TO_FILL_IN
    )


def _schema() -> dict[str, type[pl.DataType]]:
    stars: dict[str, type[pl.DataType]] = {}
    for number in range(1, STARS_A_NIGHT + 1):
        stars |= {f"star_{number}": pl.String, f"v_mag_{number}": pl.Float64}
    return {
        "evening_date": pl.String,
        "planned_local_time": pl.String,
        "predicted_mag": pl.Float64,
        "altitude_deg": pl.Float64,
        "airmass": pl.Float64,
    } | stars
