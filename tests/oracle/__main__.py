"""Command line: ``python -m tests.oracle --kernel PATH --from-jd X --to-jd Y --kinds A B --out FILE``."""

from __future__ import annotations

import argparse
import time
from pathlib import Path

from tests.oracle.places import DEFLECTION_LIMITER, open_sky
from tests.oracle.run import KINDS, TRACK_KINDS, Steps, run


def main() -> None:
    """Search a span for events and write them as Parquet."""
    parser = argparse.ArgumentParser(prog="python -m tests.oracle", description=__doc__)
    parser.add_argument("--kernel", type=Path, required=True, help="SPK file")
    parser.add_argument("--from-jd", type=float, required=True, help="TT Julian date, included")
    parser.add_argument("--to-jd", type=float, required=True, help="TT Julian date, excluded")
    parser.add_argument("--kinds", nargs="+", choices=tuple(KINDS), default=TRACK_KINDS)
    parser.add_argument("--moon", action="store_true", help="also the kinds and pairs of the Moon")
    parser.add_argument(
        "--gathering", nargs="+", action="append", default=[], metavar="BODY", help="one group"
    )
    parser.add_argument(
        "--radius", nargs="+", default=[], metavar="BODY=KM", help="of a disc, instead of the usual"
    )
    parser.add_argument("--deflection-limiter", type=float, default=DEFLECTION_LIMITER, help="behind the Sun")
    parser.add_argument("--step", type=float, default=Steps().planets_days, help="of the planets, days")
    parser.add_argument("--moon-step", type=float, default=Steps().moon_days, help="of the Moon, days")
    parser.add_argument("--out", type=Path, required=True, help="Parquet file to write")
    given = parser.parse_args()
    started = time.perf_counter()
    steps = Steps(given.step, given.moon_step)
    radii = {body: float(km) for body, km in (text.split("=") for text in given.radius)}
    groups = tuple(tuple(group) for group in given.gathering)
    with open_sky(given.kernel, radii_km=radii, deflection_limiter=given.deflection_limiter) as sky:
        span = (given.from_jd, given.to_jd)
        found = run(
            sky,
            span,
            given.kinds,
            moon=given.moon,
            gathered=groups,
            bodies=given.bodies,
            steps=steps,
        )
    found.write_parquet(given.out)
    print(f"{found.height} events in {time.perf_counter() - started:.1f} s -> {given.out}")


if __name__ == "__main__":
    main()
