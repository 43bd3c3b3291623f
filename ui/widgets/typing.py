"""What a person types: the line that is typed on, a number that is never changed into another, a date."""

from __future__ import annotations

import re
from collections.abc import Callable
from datetime import date, time
from typing import Any

from kivy.core.window import Window
from kivy.graphics import Color, Rectangle
from kivy.metrics import dp
from kivy.uix.textinput import TextInput

from ui.theme import FONT, space, target, theme
from ui.widgets.reach import keyboard_in_use, scroll_into_view

_PARTIAL_NUMBER = re.compile(r"-?[0-9]{0,6}([.][0-9]{0,4})?")
_WHOLE_NUMBER = re.compile(r"-?[0-9]+([.][0-9]*)?|-?[.][0-9]+")
_DURATION = re.compile(
    r"(?:(\d+(?:[.]\d*)?) ?d(?:ays?)?)? ?(?:(\d+(?:[.]\d*)?) ?h(?:ours?)?)? ?(?:(\d+(?:[.]\d*)?) ?(?:m|min|minutes)?)?"
)
_MONTHS = ["jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec"]


class Line(TextInput):  # type: ignore[misc]
    """One line to type on: large text over a rule that thickens while it is typed on."""

    def __init__(self, **keywords: Any) -> None:
        keywords.setdefault("multiline", False)
        keywords.setdefault("input_type", "text")
        super().__init__(
            font_name=FONT,
            font_size=theme.size("value"),
            size_hint_y=None,
            height=target(),
            background_normal="",
            background_active="",
            background_color=(0, 0, 0, 0),
            foreground_color=theme.ink,
            cursor_color=theme.data,
            selection_color=theme.data_soft,
            hint_text_color=theme.muted,
            write_tab=False,
            cursor_width=dp(2),
            padding=(0, space(2), 0, space(1)),
            **keywords,
        )
        self.wrong = False
        self.unit_width = 0.0  # the rule runs on under the unit
        with self.canvas.after:
            self._colour = Color(*theme.ink)
            self._rule = Rectangle()
        self.bind(pos=self._place, size=self._place, focus=self._focus_seen, line_height=self._centre)
        self._centre()
        self._place()

    def _centre(self, *_: Any) -> None:
        room = max(self.height - self.line_height, 0)
        self.padding = (0, room * 0.6, 0, room * 0.4)

    def _place(self, *_: Any) -> None:
        thick = dp(3) if self.focus else dp(1.5)
        self._rule.pos, self._rule.size = self.pos, (self.width + self.unit_width, thick)
        self._colour.rgba = theme.stop if self.wrong else theme.data if self.focus else theme.ink

    def _focus_seen(self, _: Any, focused: bool) -> None:
        self._place()
        if focused and keyboard_in_use():
            scroll_into_view(self)

    def make_room(self, width: float) -> None:
        """Run the rule on under a unit of this width."""
        self.unit_width = width
        self._place()

    def mark(self, wrong: bool) -> None:
        """Show in the rule that what stands here is not accepted."""
        self.wrong = wrong
        self._place()


class NumberLine(Line):
    """Only what leaves a number gets in: a comma is a decimal point; anything else is refused whole, and said."""

    __events__ = ("on_refused",)

    def insert_text(self, substring: str, from_undo: bool = False) -> Any:
        """Insert typed or pasted text if a number remains; else insert nothing and say so."""
        wanted = substring.strip().replace(",", ".").replace("−", "-")
        before, after = self._around_selection()
        if _PARTIAL_NUMBER.fullmatch(before + wanted + after):
            return super().insert_text(wanted, from_undo=from_undo)
        self.dispatch("on_refused", substring)
        return None

    def _around_selection(self) -> tuple[str, str]:
        if self.selection_text:
            low, high = sorted((self.selection_from, self.selection_to))
        else:
            low = high = self.cursor_index()
        return self.text[:low], self.text[high:]

    def on_refused(self, substring: str) -> None:
        """What was typed would not leave a number."""


def parse_number(text: str) -> float | None:
    """Typed text as a number; None when empty; ValueError with a sentence otherwise."""
    trimmed = text.strip().replace(",", ".").replace("−", "-")
    if not trimmed:
        return None
    if not _WHOLE_NUMBER.fullmatch(trimmed):
        raise ValueError(f"{text.strip()} is not yet a number.")
    return float(trimmed)


def parse_date(text: str, today: Callable[[], date] = date.today) -> date | None:
    """12 Nov 2026, 12.11.2026, 12/11/2026, 2026-11-12, today: day before month. None when empty."""
    trimmed = text.strip().lower()
    if not trimmed:
        return None
    if trimmed == "today":
        return today()
    if match := re.fullmatch(r"(\d{4})-(\d{1,2})-(\d{1,2})", trimmed):
        year, month, day = (int(group) for group in match.groups())
    elif match := re.fullmatch(r"(\d{1,2})[./ ](\d{1,2})[./ ](\d{4})", trimmed):
        day, month, year = (int(group) for group in match.groups())
    elif (match := re.fullmatch(r"(\d{1,2}) ?([a-z]{3,9})\.? ?(\d{4})", trimmed)) and match[2][:3] in _MONTHS:
        day, month, year = int(match[1]), _MONTHS.index(match[2][:3]) + 1, int(match[3])
    else:
        raise ValueError("Write day, month and year, for example 12 Nov 2026.")
    try:
        return date(year, month, day)
    except ValueError:
        raise ValueError(f"{text.strip()} is not a day of the calendar.") from None


def parse_duration(text: str) -> float | None:
    """Minutes from 3 h 20, 3:20, 3.5 h, 45 min, 4 d, 1 d 6 h; a bare number is hours. None when empty."""
    trimmed = text.strip().lower().replace(",", ".")
    if not trimmed:
        return None
    if match := re.fullmatch(r"(\d{1,4}):([0-5]\d)", trimmed):
        return int(match[1]) * 60.0 + int(match[2])
    if re.fullmatch(r"\d+([.]\d*)?", trimmed):
        return float(trimmed) * 60.0
    found = re.fullmatch(_DURATION, trimmed)
    if not found or not any(found.groups()):
        raise ValueError("Write hours and minutes, for example 3 h 20, 45 min or 4 d.")
    days, hours, minutes = (float(group) if group else 0.0 for group in found.groups())
    return days * 1440.0 + hours * 60.0 + minutes


def parse_time(text: str) -> time | None:
    """A time of day from 7:30, 07.30, 0730 or 7; None when empty."""
    trimmed = text.strip()
    if not trimmed:
        return None
    match = re.fullmatch(r"(\d{1,2})(?:[:. ]?(\d{2}))?", trimmed)
    if match is None or int(match[1]) > 23 or int(match[2] or 0) > 59:
        raise ValueError("Write hours and minutes of the day, for example 7:30.")
    return time(int(match[1]), int(match[2] or 0))


def date_text(value: date) -> str:
    """A date to be read: 12 Nov 2026; never a month as a number."""
    return f"{value.day} {_MONTHS[value.month - 1].capitalize()} {value.year}"


def close_keyboard() -> None:
    """Put the on-screen keyboard away."""
    Window.release_all_keyboards()
