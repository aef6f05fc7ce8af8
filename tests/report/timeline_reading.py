"""The page's timeline as a reader meets it: its marks, what it tells, its keys and buttons."""

from __future__ import annotations

import datetime as dt
import re
from typing import Any

KEYS = {"left": "\ue012", "up": "\ue013", "right": "\ue014", "down": "\ue015", "home": "\ue011"}
KEYS |= {"enter": "\ue007", "tab": "\ue004", "shift": "\ue008"}
PLANETS = ["mercury", "venus", "mars", "jupiter", "saturn"]


def marks(page: Any) -> list[str]:
    found: list[str] = page.execute_script(
        "return [...document.querySelectorAll('#timeline .mark')].map((m) => m.getAttribute('aria-label'))"
    )
    return found


def focus(page: Any, words: str) -> None:
    script = (
        "const all = [...document.querySelectorAll('#timeline .mark')];"
        "all.find((m) => m.getAttribute('aria-label').includes(arguments[0])).focus()"
    )
    page.execute_script(script, words)


def focused(page: Any) -> str:
    label: str = page.execute_script("return document.activeElement.getAttribute('aria-label') ?? ''")
    return label


def fact(page: Any) -> str:
    return str(page.find_element("css selector", "#timeline .fact").text)


def press(page: Any, *names: str) -> None:
    page.switch_to.active_element.send_keys(*(KEYS.get(name, name) for name in names))


def show(page: Any, name: str) -> None:
    page.find_element("css selector", f'#timeline [data-view="{name}"]').click()


def span(page: Any) -> tuple[dt.date, dt.date]:
    """Return the ends of what the timeline says it shows."""
    first, last = re.findall(r"\d{4}-\d\d-\d\d", page.find_element("css selector", "#timeline .place").text)
    return dt.date.fromisoformat(first), dt.date.fromisoformat(last)


def length(page: Any) -> int:
    first, last = span(page)
    return (last - first).days


def address(page: Any) -> str:
    """Return what stands after "#", once the timeline has come to rest."""
    page.execute_async_script("setTimeout(arguments[0], 300)")
    kept: str = page.execute_script("return location.hash")
    return kept


def first_of_months(page: Any) -> list[float]:
    """Return how far from the left the axis has the first of each month in view, January first."""
    found: list[float] = page.execute_script(
        "return [...document.querySelectorAll('#timeline .small')].filter((t) => t.textContent === '1')"
        ".map((t) => t.getBoundingClientRect()).map((box) => box.left + box.width / 2)"
    )
    assert len(found) == 7
    return found


def stamp(text: str) -> dt.datetime:
    """Return the first instant told, UTC."""
    found = re.search(r"(\d{4}-\d\d-\d\d \d\d:\d\d) UTC", text)
    assert found, text
    return dt.datetime.fromisoformat(f"{found[1]}+00:00")
