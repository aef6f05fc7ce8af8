"""One entry of a calendar file as text: content lines, their folding, escaping, and how instants are written.

Source: RFC 5545, 3.1 (folding by octets), 3.3.5 (UTC date-times), 3.3.11 (escaping of text).
"""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Final

from icalendar.parser import Contentline

from wanderers.errors import UsageProblem
from wanderers.site.zones import zone_named

UID_ENDING: Final = "@wanderers"
"""Follows the event's id in a UID. No host: RFC 7986, 5.3, advises against them."""
INSTANT: Final = "X-WANDERERS-INSTANT"
"""Property that says when the event happens, where the entry stands at another time."""
PROVENANCE: Final = "Computed from "
"""First words of the last line of a description. A new kernel or version alone is no change."""

LINE_END: Final = b"\r\n"
_INSTANT: Final = re.compile(r"\d{8}T\d{6}Z")
_NOT_CONTENT: Final = ("SEQUENCE:", "DTSTAMP:", "LAST-MODIFIED:")


@dataclass(frozen=True, slots=True)
class Entry:
    """One VEVENT.

    Attributes:
        lines: its content lines, unfolded, from BEGIN to END.
        octets: as written: folded, every line ended.
    """

    lines: tuple[str, ...]
    octets: bytes

    def value(self, name: str) -> str:
        """Return the raw value of one of its properties, alarms excluded; empty where it has none."""
        for line in self.lines[1:]:
            if line.startswith("BEGIN:"):
                break
            if re.split("[;:]", line, maxsplit=1)[0] == name:
                return line.partition(":")[2]
        return ""

    @property
    def uid(self) -> str:
        """Its name."""
        return self.value("UID")

    @property
    def is_ours(self) -> bool:
        """Whether this program wrote it; another hand may have added others."""
        return self.uid.endswith(UID_ENDING)

    def zone(self, name: str) -> str:
        """Return the TZID of one of its properties; empty where it has none."""
        heads = (line.partition(":")[0] for line in self.lines[1:])
        own = next((head for head in heads if re.split(";", head, maxsplit=1)[0] == name), "")
        found = re.search(r";TZID=([^;:]+)", own)
        return found[1] if found else ""

    @property
    def start(self) -> dt.datetime:
        """Its DTSTART in UTC."""
        zone = self.zone("DTSTART")
        return local_instant(self.value("DTSTART"), zone) if zone else instant(self.value("DTSTART"))

    @property
    def moment(self) -> dt.datetime:
        """When the event itself happens, UTC: entries of a site stand at the time to watch."""
        stated = self.value(INSTANT)
        return instant(stated) if stated else self.start

    @property
    def sequence(self) -> int:
        """How often it was reissued."""
        return int(self.value("SEQUENCE"))

    @property
    def is_cancelled(self) -> bool:
        """Whether it was withdrawn."""
        return self.value("STATUS") == "CANCELLED"

    @property
    def title(self) -> str:
        """Its SUMMARY as text."""
        return unescaped(self.value("SUMMARY"))

    def content(self) -> list[str]:
        """Return what it says, whatever its stamps and whichever kernel and version computed it."""
        lines = [line for line in self.lines if not line.startswith(_NOT_CONTENT)]
        return sorted(
            line.rpartition(rf"\n{PROVENANCE}")[0] or line if line.startswith("DESCRIPTION") else line
            for line in lines
        )

    def is_sound(self) -> bool:
        """Return whether what reissuing compares can be read."""
        dates = self.value("DTSTAMP"), self.value(INSTANT) or self.value("DTSTAMP")
        return (
            self.has_start and all(is_instant(date) for date in dates) and self.value("SEQUENCE").isdecimal()
        )

    @property
    def has_start(self) -> bool:
        """Whether its DTSTART can be read."""
        try:
            return bool(self.start)
        except (ValueError, UsageProblem):
            return False


def entry_of(lines: Sequence[str]) -> Entry:
    """Return the entry of unfolded content lines, folded anew at 75 octets."""
    folded: list[bytes] = [Contentline(line).to_ical() for line in lines]  # type: ignore[no-untyped-call]
    return Entry(tuple(lines), b"".join(line + LINE_END for line in folded))


def read_entry(octets: bytes) -> Entry:
    """Return the entry of a VEVENT as written."""
    return Entry(tuple(unfolded(octets.decode())), octets)


def in_order(entries: Iterable[Entry]) -> list[Entry]:
    """Return entries in order of time."""
    return sorted(entries, key=_place_in_time)


def _place_in_time(entry: Entry) -> tuple[str, str]:
    """Return what entries are ordered by; those of another hand may begin in ways not read here."""
    return instant_text(entry.start) if entry.has_start else entry.value("DTSTART"), entry.uid


def outside_components(lines: Iterable[str]) -> list[str]:
    """Return the lines that belong to no component inside the one they were taken from."""
    kept, depth = [], 0
    for line in lines:
        depth += line.startswith("BEGIN:")
        if depth == 0:
            kept.append(line)
        depth -= line.startswith("END:")
    return kept


def unfolded(text: str) -> list[str]:
    """Return the content lines of a text."""
    return [line for line in re.split(r"\r?\n", re.sub(r"\r?\n[ \t]", "", text)) if line]


def escaped(text: str) -> str:
    r"""Return the raw TEXT value of a text: ``\`` ``;`` ``,`` and line ends escaped, controls dropped."""
    one_line_end = re.sub("\r\n?|[\x85\u2028\u2029]", "\n", text)
    allowed = re.sub("[\x00-\x08\x0b-\x1f\x7f-\x9f\ud800-\udfff]", "", one_line_end)
    return re.sub(r"([\\;,])", r"\\\1", allowed).replace("\n", r"\n")


def unescaped(value: str) -> str:
    r"""Return the text of a raw TEXT value; ``\n`` and ``\N`` are line ends."""
    return re.sub(r"\\(.)", lambda match: "\n" if match[1] in "nN" else match[1], value)


def instant(value: str) -> dt.datetime:
    """Return an instant of the form 20270103T130700Z.

    Raises:
        ValueError: it has another form, or there is no such instant.
    """
    if not _INSTANT.fullmatch(value):
        raise ValueError(f"no UTC instant: {value}")
    return dt.datetime.strptime(value, "%Y%m%dT%H%M%SZ").replace(tzinfo=dt.UTC)


def local_instant(value: str, zone: str) -> dt.datetime:
    """Return the UTC instant of a local time of the form 20270103T130700; the first where it comes twice.

    Raises:
        ValueError: it has another form.
        UnknownNameError: there is no such zone.
    """
    clock = dt.datetime.strptime(value, "%Y%m%dT%H%M%S")
    return clock.replace(tzinfo=zone_named(zone).rules).astimezone(dt.UTC)


def is_instant(value: str) -> bool:
    """Return whether a value is an instant of that form."""
    try:
        instant(value)
    except ValueError:
        return False
    return True


def instant_text(moment: dt.datetime) -> str:
    """Return an instant in that form; the year by hand, because strftime leaves its zeros out."""
    return f"{moment.year:04d}{moment:%m%dT%H%M%SZ}"
