"""A paper before it is painted: pages of drawing items inside one frame, so that tests and the preview see what prints.

Every page carries the title, the plan's state, the version digest, its number, and the caution; a plan that is not
confirmed is marked as a draft on every page.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from planner.charts.layout import Band, Box, Drawing, Item, Marker, Polyline, Text, rule
from planner.papers import fonts

SIZES_PT: dict[str, tuple[float, float]] = {"A4": (595.28, 841.89), "Letter": (612.0, 792.0)}
MARGIN_PT = 42.0
HEAD_PT = 30.0
FOOT_PT = 46.0
SMALL_PT = 8.0
DIGEST_LETTERS = 12


@dataclass(frozen=True)
class Frame:
    """What stands on every page, in whole words: texts(…) of the catalogue, already filled.

    page: a wording with {page} and {pages}. draft: empty on a confirmed plan.
    """

    title: str
    about: str
    state: str
    draft: str
    caution: str
    version: str
    page: str
    language: str


@dataclass(frozen=True, eq=False)
class Paper:
    """Pages ready to paint; width and height in points."""

    title: str
    language: str
    subject: str
    pages: tuple[Drawing, ...]


@dataclass(frozen=True)
class Panel:
    """A rectangle of a page that text flows into, with its frame drawn around it."""

    left: float
    bottom: float
    width: float
    height: float


def portrait(paper: str) -> tuple[float, float]:
    """Width and height of an upright sheet in points."""
    return SIZES_PT[paper]


def landscape(paper: str) -> tuple[float, float]:
    """Width and height of a sheet on its side in points."""
    width, height = SIZES_PT[paper]
    return height, width


def inside(size: tuple[float, float], margin: float = MARGIN_PT) -> Panel:
    """The panel between head and foot of a page with one frame."""
    width, height = size
    bottom = margin + FOOT_PT
    return Panel(margin, bottom, width - 2 * margin, height - margin - HEAD_PT - bottom)


def framed(frame: Frame, panel: Panel, page: int, pages: int) -> list[Item]:
    """The frame around a panel: head above it, caution strip and foot line below it."""
    left, right, top = panel.left, panel.left + panel.width, panel.bottom + panel.height
    items: list[Item] = []
    head_y = top + HEAD_PT - SMALL_PT
    if frame.draft:
        draft_width = fonts.width(frame.draft, SMALL_PT + 1.0, bold=True)
        items.append(Box(right - draft_width - 10.0, head_y - 8.0, draft_width + 10.0, 16.0, "caution_soft"))
        items.append(Text(frame.draft, right - 5.0, head_y, SMALL_PT + 1.0, "ink", "right", bold=True))
    else:
        draft_width = 0.0
    room = panel.width - draft_width - 20.0
    items.append(Text(shortened(f"{frame.title} · {frame.about}", SMALL_PT, room), left, head_y, SMALL_PT, "muted"))
    items.append(rule(left, top + HEAD_PT * 0.4, right, top + HEAD_PT * 0.4))

    strip = panel.bottom - FOOT_PT + 16.0
    items.append(Box(left, strip, panel.width, 18.0, "caution_soft"))
    items.append(rule(left, strip + 18.0, right, strip + 18.0, "caution", 0.8))
    items.append(Text(frame.caution, left + 6.0, strip + 9.0, SMALL_PT + 1.5, "ink", bold=True))
    foot = strip - 9.0
    number = frame.page.format(page=page, pages=pages)
    items.append(Text(number, right, foot, SMALL_PT, "muted", "right"))
    room = panel.width - fonts.width(number, SMALL_PT) - 12.0
    items.append(Text(shortened(f"{frame.state} · {frame.version}", SMALL_PT, room), left, foot, SMALL_PT, "muted"))
    return items


def shortened(text: str, size: float, room: float) -> str:
    """The text, or its beginning with an ellipsis where it is wider than the room: for head and foot lines only."""
    text = fonts.printable(text).replace("\n", " ")
    if fonts.width(text, size) <= room:
        return text
    while text and fonts.width(text + "…", size) > room:
        text = text[:-1]
    return text.rstrip() + "…"


def moved(item: Item, dx: float, dy: float) -> Item:
    """The same item somewhere else on the page."""
    match item:
        case Polyline():
            return replace(item, points=item.points + np.array([dx, dy]))
        case Band():
            return replace(item, x=item.x + dx, low=item.low + dy, high=item.high + dy)
        case Text() | Marker() | Box():
            return replace(item, x=item.x + dx, y=item.y + dy)
