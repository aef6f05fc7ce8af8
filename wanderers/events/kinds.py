"""The kinds of events, and how a finder hands over what it found."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import StrEnum
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.frames import Frame

NOBODY: Final = -1
"""Stands in ``other`` where an event concerns one body only."""


class Kind(StrEnum):
    """Every kind of event, in the order in which documentation lists them."""

    STATION = "station"
    OPPOSITION = "opposition"
    SOLAR_CONJUNCTION = "solar_conjunction"
    QUADRATURE = "quadrature"
    GREATEST_ELONGATION = "greatest_elongation"
    PERIGEE = "perigee"
    APOGEE = "apogee"
    PERIHELION = "perihelion"
    APHELION = "aphelion"
    GREATEST_BRILLIANCY = "greatest_brilliancy"
    CONJUNCTION = "conjunction"
    APPULSE = "appulse"
    OCCULTATION = "occultation"
    TRANSIT = "transit"
    GATHERING = "gathering"
    CONSTELLATION_ENTRY = "constellation_entry"
    NODE = "node"
    SEASON_POINT = "season_point"
    RING_PLANE_CROSSING = "ring_plane_crossing"
    MOON_PHASE = "moon_phase"


@dataclass(frozen=True, slots=True)
class Batch:
    """Events of one kind and frame.

    Attributes:
        kind: what they are.
        frame: the frame of the definition; None where none applies.
        jd: TT Julian dates, shape (n,).
        body: target numbers of the first body, shape (n,).
        other: target numbers of the second, NOBODY where there is none, shape (n,).
        detail: index into ``details``, shape (n,).
        details: the words; the empty one stands for none.
        contacts_jd: for discs that meet, the four contacts, shape (n, 4), NaN where one does not happen.
        figure_deg: a figure the finder knows, shape (n,): least separation of an appulse, diameter of a
            gathering's circle, longitude of date of a constellation entry.
        entered: for constellation entries, index of the constellation entered, shape (n,).
    """

    kind: Kind
    frame: Frame | None
    jd: Floats
    body: Ints
    other: Ints
    detail: Ints
    details: tuple[str, ...] = ("",)
    contacts_jd: Floats | None = None
    figure_deg: Floats | None = None
    entered: Ints | None = None

    def chosen(self, keep: Bools | slice) -> Batch:
        """Return the events where ``keep`` is true, or of a slice."""
        return replace(
            self,
            jd=self.jd[keep],
            body=self.body[keep],
            other=self.other[keep],
            detail=self.detail[keep],
            contacts_jd=None if self.contacts_jd is None else self.contacts_jd[keep],
            figure_deg=None if self.figure_deg is None else self.figure_deg[keep],
            entered=None if self.entered is None else self.entered[keep],
        )

    def within(self, jd_from: float, jd_to: float) -> Batch:
        """Return the events in a half-open span."""
        return self.chosen((self.jd >= jd_from) & (self.jd < jd_to))


def batch(
    kind: Kind,
    frame: Frame | None,
    jd: Floats,
    body: Ints,
    *,
    other: Ints | None = None,
    detail: Ints | None = None,
    details: tuple[str, ...] = ("",),
    contacts_jd: Floats | None = None,
    figure_deg: Floats | None = None,
) -> Batch:
    """Compose a batch, filling in what most kinds leave empty."""
    return Batch(
        kind,
        frame,
        jd,
        body,
        np.full(jd.size, NOBODY) if other is None else other,
        np.zeros(jd.size, dtype=np.int64) if detail is None else detail,
        details,
        contacts_jd,
        figure_deg,
    )
