"""The pages of the guide in their order, with the list of keys put in where it belongs."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache

from gainbench_app.shortcuts import SHEET, WITHIN, Shortcut, told
from gainbench_resources import guide_page

FIRST = "first-steps"
GUIDE = "guide"
"""A property that a widget may carry: ``page#section``, for itself and all in it."""
GROUPS: dict[str, tuple[str, ...]] = {
    "The window": (FIRST, "the-sheet", "asking", "reading", "shelf", "handover"),
    "Experiments": ("locked-rotor", "no-load", "coast-down", "driven", "step-check", "frequency-response"),
    "To look up": ("words", "keys"),
}
"""Names of pages, by the head they stand below in the list."""

_SHORTCUTS = "{shortcuts}"
_HEADING = re.compile(r"^(#+) (.+)$", re.MULTILINE)
_NO_SLUG = re.compile(r"[^a-z0-9]+")


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """A heading of a page."""

    level: int
    """1 for the page's own."""
    text: str

    @property
    def slug(self) -> str:
        """What a link calls it."""
        return slug(self.text)


def slug(heading: str) -> str:
    """What a link calls a heading: ``Reach map`` is ``reach-map``."""
    return _NO_SLUG.sub("-", heading.lower()).strip("-")


@cache
def page_text(name: str) -> str:
    """A page as markdown.

    Parameters
    ----------
    name : str
        One of those in :data:`GROUPS`.

    Returns
    -------
    str

    Raises
    ------
    KeyError
        If there is no page of that name.
    """
    text = guide_page(name).read_text(encoding="utf-8")
    return text.replace(_SHORTCUTS, shortcut_tables()) if _SHORTCUTS in text else text


def headings(name: str) -> tuple[Heading, ...]:
    """The headings of a page, from top to bottom."""
    return tuple(Heading(level=len(marks), text=text.strip()) for marks, text in _HEADING.findall(page_text(name)))


def title(name: str) -> str:
    """What a page is called."""
    return headings(name)[0].text


def has_place(name: str, section: str) -> bool:
    """Whether there is such a page, with such a section; an empty section is the page's top."""
    known = any(name in names for names in GROUPS.values())
    return known and (not section or any(one.slug == section for one in headings(name)))


def shortcut_tables() -> str:
    """All shortcuts as markdown, from the list that the window listens to."""
    parts = [_table("Everywhere", tuple(SHEET.values()))]
    parts += [_table(where, shortcuts) for where, shortcuts in WITHIN.items()]
    return "\n".join(parts)


def _table(where: str, shortcuts: tuple[Shortcut, ...]) -> str:
    rows = "\n".join(f"| **{told(one)}** | {one.does} |" for one in shortcuts)
    return f"## {where}\n\n| keys | what they do |\n|---|---|\n{rows}\n"
