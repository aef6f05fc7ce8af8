"""What a reader does with a report's page in a browser: reading the table, ticking, writing, saving."""

from __future__ import annotations

from typing import Any

SHOWN = "#table tbody tr"


def shown_ids(page: Any) -> list[str]:
    ids: list[str] = page.execute_script(
        f"return [...document.querySelectorAll('{SHOWN}')].map(r => r.dataset.id)"
    )
    return ids


def all_ids(page: Any) -> list[str]:
    """Ids of every slice of the selection, in order."""
    found = shown_ids(page)
    following = page.find_element("css selector", '.pager button[data-go="next"]')
    while following.is_enabled():
        page.execute_script("arguments[0].click()", following)
        found += shown_ids(page)
    return found


def count(page: Any) -> int:
    return int(page.find_element("css selector", "#count").text.split(" of ")[0])


def tick(page: Any, name: str, value: str) -> None:
    box = page.find_element("css selector", f'input[name="{name}"][value="{value}"]')
    page.execute_script("arguments[0].click()", box)


def write(page: Any, name: str, text: str) -> None:
    field = page.find_element("css selector", f'input[name="{name}"]')
    field.clear()
    field.send_keys(text)


def saved(page: Any, button: str) -> str:
    """Press a button that saves, and return the text that would have become a file."""
    page.execute_script(
        "window.savedText = null; HTMLAnchorElement.prototype.click = () => {};"
        "URL.createObjectURL = (blob) => {"
        " blob.text().then((text) => { window.savedText = text; }); return '#'; };"
    )
    page.find_element("css selector", button).click()
    wait = (
        "const done = arguments[0];"
        "const look = () => window.savedText ? done(window.savedText) : setTimeout(look, 20); look();"
    )
    text: str = page.execute_async_script(wait)
    return text
