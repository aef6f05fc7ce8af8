"""A page model printed as one HTML file that holds everything it needs and asks nothing of a network."""

from __future__ import annotations

import base64
import hashlib
from dataclasses import asdict, fields
from importlib import resources
from typing import Any, Final

from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup

from wanderers.report.page import Page
from wanderers.report.words import GLARE_DEG

HEADINGS: Final = (
    ("time", "Time (UTC)"),
    ("what", "Event"),
    ("constellation", "In"),
    ("separation", "Apart"),
    ("elongation", "From the Sun"),
    ("magnitude", "Mag"),
    ("distance", "Distance"),
    ("diameter", "Size"),
)
SITE_HEADINGS: Final = (
    ("local", "Local time"),
    ("what", "Event"),
    ("watch", "Watch, local"),
    ("verdict", "Seen with"),
    ("altitude", "Height"),
    ("separation", "Apart"),
    ("elongation", "From the Sun"),
    ("magnitude", "Mag"),
    ("time", "Time (UTC)"),
)
"""Columns of the page's event table, without a site and with one: names in the page's program, and titles."""

PROGRAMS: Final = ("page.js", "timeline.js")
"""The page's own programs, in the order they run: the second uses the first."""


def rendered(page: Page, data: dict[str, Any], calendar: str) -> str:
    """Return the page as HTML.

    Args:
        page: the model.
        data: the event table as ``page_data.table_data`` gives it.
        calendar: the calendar file as ``page_data.packed`` gives it.
    """
    programs = [f"\n{packaged(name)}" for name in PROGRAMS]
    template = environment().get_template("page.html.j2")
    return template.render(
        {name.name: getattr(page, name.name) for name in fields(page)},
        headings=SITE_HEADINGS if page.site else HEADINGS,
        data=data
        | {"site": page.site, "span": page.span, "stem": page.stem, "glare_deg": GLARE_DEG}
        | {"timeline": asdict(page.timeline)},
        calendar=calendar,
        glare_deg=GLARE_DEG,
        style=Markup(packaged("page.css")),
        programs=[Markup(program) for program in programs],
        program_hashes=[policy_hash(program) for program in programs],
    )


def rendered_beside(page: Any, template: str, style: str) -> str:
    """Return a page that lies beside the report's, a dossier or a campaign, as HTML.

    Args:
        page: the model, a dataclass.
        template: name of its template.
        style: name of its style, which follows the common one.
    """
    program = f"\n{packaged('dossier.js')}"
    return (
        environment()
        .get_template(template)
        .render(
            {name.name: getattr(page, name.name) for name in fields(page)},
            style=Markup(packaged("page.css") + packaged(style)),
            program=Markup(program),
            program_hash=policy_hash(program),
        )
    )


def policy_hash(program: str) -> str:
    """Return what a Content Security Policy (W3C, level 3) lets a program in the page run by."""
    return f"sha256-{base64.b64encode(hashlib.sha256(program.encode()).digest()).decode()}"


def environment() -> Environment:
    """Return the settings of the templates; whatever they are given is escaped."""
    environment = Environment(
        loader=PackageLoader("wanderers.report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.policies["json.dumps_kwargs"] = {
        "separators": (",", ":"),
        "ensure_ascii": False,
        "allow_nan": False,
    }
    return environment


def packaged(name: str) -> str:
    """Return a file that lies beside the template."""
    return resources.files("wanderers.report").joinpath("templates", name).read_text(encoding="utf-8")
