"""The timeline in a real browser: zooming and moving, by keyboard, buttons and pointer."""

from __future__ import annotations

import datetime as dt
from typing import Any

import pytest

from tests.report.timeline_reading import (
    PLANETS,
    fact,
    first_of_months,
    focus,
    focused,
    length,
    marks,
    press,
    show,
    span,
    stamp,
)

pytestmark = pytest.mark.filterwarnings("ignore::ResourceWarning")  # the driver's own sockets


def test_arrows_go_from_mark_to_mark_and_from_lane_to_lane(page: Any) -> None:
    focus(page, "Mars runs backwards")
    press(page, "right")
    press(page, "right")
    assert "Mars" in focused(page)
    there = stamp(fact(page))
    press(page, "left")
    assert stamp(fact(page)) < there or "runs backwards" in focused(page)
    focus(page, "Mars at opposition")
    press(page, "down")
    assert "Jupiter" in focused(page)
    press(page, "up")
    assert "Mars" in focused(page)
    stops = page.execute_script(
        "return document.querySelectorAll('#timeline .lanes [tabindex=\"0\"]').length"
    )
    assert stops == 1


def test_every_mark_can_be_reached_by_arrows(page: Any) -> None:
    page.execute_script("document.querySelector('#timeline .lanes [tabindex=\"0\"]').focus()")
    seen = {focused(page)}
    for _ in PLANETS:
        press(page, "up")
    for _ in PLANETS:
        for way in ("left", "right"):
            before = None
            while before != (before := page.execute_script("return document.activeElement.outerHTML")):
                press(page, way)
                seen.add(focused(page))
        press(page, "down")
    assert seen == set(marks(page))


def test_keys_zoom_and_move(page: Any) -> None:
    whole = span(page)
    focus(page, "Mars at opposition")
    press(page, "+")
    assert length(page) == pytest.approx((whole[1] - whole[0]).days / 2.0, abs=1)
    assert focused(page).startswith("Mars at opposition")
    before = span(page)
    press(page, "shift", "right")
    assert (span(page)[0] - before[0]).days == pytest.approx(length(page) / 4.0, abs=1)
    press(page, "-")
    press(page, "home")
    assert span(page) == whole


def test_buttons_zoom_and_move_as_far_as_the_span_reaches(page: Any) -> None:
    whole = span(page)
    assert whole == (dt.date(2027, 1, 1), dt.date(2027, 7, 1))
    for _ in range(12):
        show(page, "in")
    assert length(page) == 10
    first = span(page)[0]
    show(page, "earlier")
    assert (first - span(page)[0]).days == pytest.approx(5, abs=1)
    for _ in range(60):
        show(page, "later")
    assert span(page)[1] == whole[1]
    later = page.find_element("css selector", '#timeline [data-view="later"]')
    assert later.get_attribute("aria-disabled") == "true"
    show(page, "whole")
    assert span(page) == whole


def test_the_wheel_zooms_only_with_the_control_key(page: Any) -> None:
    wheel = (
        "const svg = document.querySelector('#timeline .lanes svg'); const box = svg.getBoundingClientRect();"
        "const turned = new WheelEvent('wheel', { deltaY: -120, ctrlKey: arguments[0], cancelable: true,"
        " clientX: box.left + box.width / 2, clientY: box.top + 30 });"
        "svg.dispatchEvent(turned); return turned.defaultPrevented;"
    )
    before = length(page)
    assert page.execute_script(wheel, False) is False
    assert length(page) == before
    assert page.execute_script(wheel, True) is True
    assert length(page) < before


def test_dragging_across_the_lanes_zooms_to_what_was_dragged_over(page: Any) -> None:
    from selenium.webdriver import ActionChains

    february, may = first_of_months(page)[1], first_of_months(page)[4]
    lanes = page.find_element("css selector", "#timeline .lanes svg")
    start = february - lanes.rect["x"] - lanes.rect["width"] / 2.0
    drag = ActionChains(page).move_to_element_with_offset(lanes, round(start), 0).click_and_hold()
    drag.move_by_offset(round(may - february), 5).release().perform()
    first, last = span(page)
    assert abs((first - dt.date(2027, 2, 1)).days) <= 1
    assert abs((last - dt.date(2027, 5, 1)).days) <= 1


def test_pointing_at_a_mark_tells_its_fact_and_a_click_keeps_it(page: Any) -> None:
    from selenium.webdriver import ActionChains

    shape = page.execute_script(
        "return [...document.querySelectorAll('#timeline .mark')]"
        ".find((m) => m.getAttribute('aria-label').startsWith('Mars at opposition')).querySelector('.shape')"
    )
    ActionChains(page).move_to_element(shape).perform()
    assert "Mars at opposition" in fact(page)
    ActionChains(page).click().perform()
    assert focused(page).startswith("Mars at opposition")
    ActionChains(page).move_to_element(page.find_element("css selector", "#timeline-title")).perform()
    assert "Mars at opposition" in fact(page)
