"""Sentences with parts that may be left out: the richest one whose facts are known and that fits.

A template is text with ``{fields}`` and ``[optional parts]``. Optional parts are taken in their written
order, each if all its fields are known and there is still room. A template whose other fields are unknown, or
which is too long even without its optional parts, is passed over for the next.
"""

from __future__ import annotations

import functools
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from string import Formatter
from typing import Final

Facts = Mapping[str, str | None]
"""Text of every field by name; None where a fact does not apply or is not known."""

NOTHING: Final = ""
CUT: Final = "…"
_OPTIONAL: Final = re.compile(r"\[([^\[\]]*)\]")


@dataclass(frozen=True, slots=True)
class Piece:
    """A stretch of a template.

    Attributes:
        text: with fields in braces.
        fields: their names.
        is_optional: whether it may be left out.
    """

    text: str
    fields: tuple[str, ...]
    is_optional: bool

    def filled(self, facts: Facts) -> str | None:
        """Return the text with its fields filled in, None where one is not known."""
        known = {name: facts[name] for name in self.fields}
        return None if None in known.values() else self.text.format_map(known)


@functools.cache
def pieces(template: str) -> tuple[Piece, ...]:
    """Cut a template into its stretches."""
    texts = _OPTIONAL.split(template)
    return tuple(Piece(text, _fields(text), place % 2 == 1) for place, text in enumerate(texts) if text)


def field_names(template: str) -> frozenset[str]:
    """Return the names of all fields of a template."""
    return frozenset(name for piece in pieces(template) for name in piece.fields)


def composed(templates: Sequence[str], facts: Facts, limit: int, endings: Sequence[str] = (NOTHING,)) -> str:
    """Return the first template that fits, as full as it fits, with the first ending that fits behind it.

    Args:
        templates: from the richest to the tersest.
        facts: what is known.
        limit: most characters.
        endings: templates of what must follow, from the richest to the tersest.
    """
    shortest = NOTHING
    for ending in endings:
        for template in templates:
            text = _fitted(pieces(template), pieces(ending), facts, limit)
            if text is not None and len(text) <= limit:
                return text
            if text is not None and (not shortest or len(text) < len(shortest)):
                shortest = text
    return shortest if len(shortest) <= limit else shortest[: limit - 1].rstrip() + CUT


def _fitted(body: Sequence[Piece], ending: Sequence[Piece], facts: Facts, limit: int) -> str | None:
    """Return the pieces joined, optional ones as far as they fit; None where a needed fact is not known.

    What may be left out of the ending is taken before what may be left out of the body.
    """
    texts = {place: piece.filled(facts) for place, piece in enumerate((*body, *ending))}
    needed = [place for place, piece in enumerate((*body, *ending)) if not piece.is_optional]
    if any(texts[place] is None for place in needed):
        return None
    room = limit - sum(len(texts[place] or NOTHING) for place in needed)
    kept = set(needed)
    for place in (*range(len(body), len(texts)), *range(len(body))):
        text = texts[place]
        if place not in kept and text is not None and len(text) <= room:
            room -= len(text)
            kept.add(place)
    return capitalized("".join(texts[place] or NOTHING for place in sorted(kept)))


def capitalized(text: str) -> str:
    """Return a text that begins with a capital letter."""
    return f"{text[:1].upper()}{text[1:]}"


def _fields(text: str) -> tuple[str, ...]:
    return tuple(name for _, name, _, _ in Formatter().parse(text) if name)
