"""What stands beside an event: a mark near midnight, how sure the time is, what cannot be seen, cautions."""

from __future__ import annotations

from typing import Final

from wanderers.events.kinds import Kind
from wanderers.report import words as plain
from wanderers.report.phrases import figures
from wanderers.report.phrases.language import Language
from wanderers.report.phrases.moments import (
    NEAR_MIDNIGHT_S,
    Row,
    date_text,
    is_near_midnight,
    moment_of,
    uncertainty_text,
)

CAUTIONS: Final = {plain.NEAR_SUN_CAUTION: "near_sun", plain.SUN_CAUTION: "sun"}
"""Cautions that the program's own words decide on, and the phrases for them."""


def notes(event: Row, words: Language) -> list[str]:
    """Return the lines that belong beside an event, the most urgent last."""
    lines = (_midnight(event, words), _uncertainty(event, words), _glare(event, words), caution(event, words))
    return [line for line in lines if line is not None]


def caution(event: Row, words: Language) -> str | None:
    """Return the caution about looking at or near the Sun that an event needs, None where none."""
    due = [CAUTIONS[line] for line in plain.cautions(event) if line in CAUTIONS]
    if not due and event.get("caution"):
        due = ["daylight"]
    return words.phrase("notes", due[0]) if due else None


def _midnight(event: Row, words: Language) -> str | None:
    if not is_near_midnight(event):
        return None
    moment = moment_of(event)
    if moment.from_midnight_s <= NEAR_MIDNIGHT_S:
        return words.phrase("notes", f"midnight_{moment.midnight_side}")
    date, error = date_text(moment, words, "full"), uncertainty_text(event, words)
    return words.phrase("notes", "midnight_unsure").format(date=date, uncertainty=error)


def _uncertainty(event: Row, words: Language) -> str | None:
    error = uncertainty_text(event, words)
    return None if error is None else words.phrase("notes", "uncertain").format(uncertainty=error)


def _glare(event: Row, words: Language) -> str | None:
    """Return that nothing can be seen so near the Sun; from a site its verdict says it better."""
    elongation = event["elongation_deg"]
    if elongation is None or elongation >= plain.GLARE_DEG:
        return None
    if event["kind"] == Kind.TRANSIT or event.get("verdict") is not None:
        return None
    return words.phrase("notes", "glare").format(elongation=figures.whole_degrees(elongation, words))
