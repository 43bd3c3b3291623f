"""What must hold on every screen; each check gives the list of what breaks it, in words, empty when all is well."""

from __future__ import annotations

import re
from functools import cache
from typing import Any

import numpy as np
from fontTools.ttLib import TTFont
from kivy.core.window import Window
from kivy.metrics import dp
from kivy.uix.behaviors import ButtonBehavior, FocusBehavior
from kivy.uix.label import Label
from kivy.uix.scrollview import ScrollView
from kivy.uix.textinput import TextInput

from ui.theme import contrast, font_file
from ui.widgets.notices import CAUTION

SLACK = 1.5  # pixels


def visible(root: Any) -> list[Any]:
    """All widgets with a size that are shown, not those of a closed fold."""
    return [w for w in root.walk() if w.width > 0 and w.height > 0 and w.opacity > 0]


def said(widget: Any) -> str:
    return f"{type(widget).__name__} {getattr(widget, 'text', '')[:40]!r}"


def texts(root: Any) -> list[Any]:
    return [w for w in visible(root) if isinstance(w, Label) and w.text.strip()]


def clipped_texts(root: Any) -> list[str]:
    """Texts that do not fit their box."""
    faults = [
        f"{said(w)} needs {w.texture_size}, has {[round(v) for v in w.size]}"
        for w in texts(root)
        if w.texture_size[0] > w.width + SLACK or w.texture_size[1] > w.height + SLACK
    ]
    faults += [
        f"{said(w)} has no room" for w in root.walk() if isinstance(w, Label) and w.text.strip() and w.height < 5
    ]
    for field in root.walk():
        if isinstance(field, TextInput) and field.text:
            needs = field._get_text_width(field.text, field.tab_width, field._label_cached)
            if not field.focus and (needs > field.width + SLACK or field.line_height > field.height):
                faults.append(f"{said(field)} needs {needs}, has {field.width}")
    return faults


def small_targets(root: Any) -> list[str]:
    """Things to touch that are smaller than 48 dp."""
    kinds = (ButtonBehavior, FocusBehavior)
    return [
        f"{said(w)} is {[round(v) for v in w.size]}"
        for w in visible(root)
        if isinstance(w, kinds) and min(w.size) < dp(48) - 0.5
    ]


def outside_parents(root: Any) -> list[str]:
    """Widgets that reach out of what holds them."""
    faults = []
    for widget in visible(root):
        holder = widget.parent
        if holder is None or holder is Window or widget is root:
            continue
        if isinstance(holder, ScrollView):
            if not holder.do_scroll_x and widget.width > holder.width + SLACK:
                faults.append(f"{said(widget)} is wider than its page")
            continue
        left, bottom = widget.x - holder.x, widget.y - holder.y
        right, top = left + widget.width - holder.width, bottom + widget.height - holder.height
        if min(left, bottom) < -SLACK or max(right, top) > SLACK:
            faults.append(
                f"{said(widget)} reaches out of {said(holder)} by {[round(v) for v in (left, bottom, right, top)]}"
            )
    return faults


def overlapping_texts(root: Any) -> list[str]:
    """Pairs of texts that lie over each other."""
    boxes = [(w, *w.to_window(w.x, w.y), w.width, w.height) for w in texts(root) if in_page(w)]
    faults = []
    for number, (a, ax, ay, aw, ah) in enumerate(boxes):
        for b, bx, by, bw, bh in boxes[number + 1 :]:
            across = min(ax + aw, bx + bw) - max(ax, bx)
            down = min(ay + ah, by + bh) - max(ay, by)
            if across > 2 * SLACK and down > 2 * SLACK:
                faults.append(f"{said(a)} and {said(b)}")
    return faults


def in_page(widget: Any) -> bool:
    """True if the widget is inside what its page shows now."""
    holder = widget.parent
    while holder is not None and holder is not Window and holder is not holder.parent:
        if isinstance(holder, ScrollView):
            x, y = widget.to_window(widget.x, widget.y)
            left, bottom = holder.to_window(holder.x, holder.y)
            if y < bottom - 1 or y + widget.height > bottom + holder.height + 1:
                return False
            if x < left - 1 or x + widget.width > left + holder.width + 1:
                return False
        holder = holder.parent
    return True


def missing_glyphs(root: Any) -> list[str]:
    """Characters that the font does not have."""
    faults = []
    for widget in root.walk():
        text = getattr(widget, "text", "") or ""
        if isinstance(text, str):
            bare = re.sub(r"\[/?(b|i|sub|sup|color[^\]]*|size[^\]]*)\]", "", text)
            faults += [f"{said(widget)} has {c!r}" for c in sorted(set(bare) - set("\n") - glyphs())]
    return faults


@cache
def glyphs() -> set[str]:
    """Characters in both weights of the font."""
    weights = [TTFont(font_file(weight)).getBestCmap() for weight in ("Regular", "Semibold")]
    return {chr(code) for code in set(weights[0]) & set(weights[1])}


def weak_texts(driver: Any, least: float = 4.5) -> list[str]:
    """Texts whose colour is too close to what is really drawn behind them."""
    picture = driver.grab()
    height = picture.shape[0]
    faults = []
    for widget in texts(driver.app.root):
        if not in_page(widget) or getattr(widget, "disabled", False) or _faded(widget):
            continue
        x, y = (int(v) for v in widget.to_window(widget.x, widget.y))
        box = picture[max(height - y - int(widget.height), 0) : height - y, max(x, 0) : x + int(widget.width), :3]
        if box.size == 0:
            continue
        packed = box.reshape(-1, 3).astype(np.int64) @ (65536, 256, 1)
        shades, counts = np.unique(packed, return_counts=True)
        commonest = int(shades[counts.argmax()])
        ground = (commonest >> 16, commonest >> 8 & 255, commonest & 255)
        ratio = contrast(tuple(widget.color), (*(c / 255 for c in ground), 1.0))
        if ratio < least:
            faults.append(f"{said(widget)} has {ratio:.1f} to 1 on {ground}")
    return faults


def _faded(widget: Any) -> bool:
    while widget is not None and widget is not Window:
        if widget.opacity < 1:
            return True
        if widget.parent is widget:
            break
        widget = widget.parent
    return False


def caution_missing(root: Any) -> list[str]:
    """The caution strip, whole and at the foot of the window."""
    strips = [w for w in texts(root) if CAUTION in w.text and in_page(w) and w.to_window(w.x, w.y)[1] >= 0]
    return [] if strips else ["the caution is not on the screen"]


def all_faults(driver: Any) -> dict[str, list[str]]:
    """Every check that fails on the screen shown."""
    root = driver.app.root
    found = {
        "clipped": clipped_texts(root),
        "small": small_targets(root),
        "outside": outside_parents(root),
        "overlapping": overlapping_texts(root),
        "glyphs": missing_glyphs(root),
        "weak": weak_texts(driver),
        "caution": caution_missing(root),
    }
    return {name: faults for name, faults in found.items() if faults}
