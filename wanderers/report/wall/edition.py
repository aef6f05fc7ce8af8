"""Whose wall it is: the place, the clock, the kernel, and what every page has to say about them."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers import __version__
from wanderers.ephemeris.kernels import Kernel
from wanderers.report.wall.layout import Paper
from wanderers.report.wall.text import printable
from wanderers.site.clock import offset_texts
from wanderers.site.places import Site, looks_like_coordinates
from wanderers.site.zones import UNIX_EPOCH_JD, UNIX_EPOCH_ORDINAL, Zone, zone_data_version

CHECKSUM_DIGITS: Final = 12
UTC_NAMES: Final = frozenset({"UTC", "Etc/UTC", "Etc/UCT", "UCT", "Zulu", "Universal", "Etc/Universal"})


@dataclass(frozen=True, slots=True)
class Edition:
    """What all pages have in common.

    Attributes:
        paper: their size.
        kernel: what the tables were computed from.
        site: whose sky they show; None for the Earth's centre.
        zone: the clock.
        sees: whether the tables tell what can be seen from the site.
        first_day: first date.
        end_day: the date after the last.
    """

    paper: Paper
    kernel: Kernel
    site: Site | None
    zone: Zone
    sees: bool
    first_day: dt.date
    end_day: dt.date

    @property
    def southern(self) -> bool:
        """Whether the Moon is drawn as the southern half of the Earth sees it."""
        return self.site is not None and self.site.latitude_deg < 0.0

    @property
    def is_utc(self) -> bool:
        """Whether the clock is UTC itself."""
        return self.zone.name in UTC_NAMES

    def shows(self, day: dt.date) -> bool:
        """Return whether a date is one of the edition's."""
        return self.first_day <= day < self.end_day

    def titles(self) -> tuple[str, str]:
        """Return for whom a page is made, and where and by which clock."""
        clock = "times in UTC" if self.is_utc else f"local time of {self.zone.name}"
        if self.site is None or not self.sees:
            return (
                f"Geocentric: seen from the Earth's centre; {clock}",
                "For no place in particular: what you can see, and your local date, differ",
            )
        where = place_text(self.site)
        if looks_like_coordinates(self.site.name):
            return f"The sky of {where}", clock
        return f"The sky of {printable(self.site.name)}", f"{where}; {clock}"

    def statements(self, first: dt.date, last: dt.date) -> list[str]:
        """Return what has to be known about times and sources, for a page from one day to another."""
        dates = "" if self.site is None or not self.sees else (
            " Each entry stands on the date that this clock shows at the time printed, so after midnight on "
            "the new date."
        )  # fmt: skip
        checksum = self.kernel.sha256[:CHECKSUM_DIGITS]
        source = (
            f"Computed from {printable(self.kernel.name)} (SHA-256 {checksum}) by wanderers {__version__}."
        )
        return [f"{self._clock_statement(first, last)}{dates}", f"{self._view_statement()}{source}"]

    def _view_statement(self) -> str:
        if self.site is None or not self.sees:
            return "Positions geocentric, apparent. "
        return "Visibility for a clear sky; no promise of weather. "

    def _clock_statement(self, first: dt.date, last: dt.date) -> str:
        version = f"zone data {zone_data_version()}"
        if self.is_utc:
            return f"All times are UTC (zone {self.zone.name}, {version}), not local time."
        days = np.arange(first.toordinal(), last.toordinal() + 1, dtype=np.float64)
        noons = days - UNIX_EPOCH_ORDINAL + UNIX_EPOCH_JD + 0.5
        offsets = dict.fromkeys(f"UTC{text}" for text in offset_texts(self.zone.offset_s(noons)))
        return (
            f"All times are local, by the clock of {self.zone.name} ({' and '.join(offsets)}; {version}: "
            "governments may still change its rules)."
        )


def place_text(site: Site) -> str:
    """Return where a site lies, to a hundredth of a degree."""
    north, east = "N" if site.latitude_deg >= 0 else "S", "E" if site.longitude_deg >= 0 else "W"
    return f"{abs(site.latitude_deg):.2f}° {north}, {abs(site.longitude_deg):.2f}° {east}"
