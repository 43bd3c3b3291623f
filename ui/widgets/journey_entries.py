"""Entries of a journey: how long, at what time, and a place found by typing."""

from __future__ import annotations

from collections.abc import Callable
from datetime import time
from typing import Any

from kivy.uix.boxlayout import BoxLayout

from ui.measures import hours_minutes
from ui.widgets.entries import Entry
from ui.widgets.rows import ListRow
from ui.widgets.typing import Line, parse_duration, parse_time


class DurationEntry(Entry):
    """A length of time; value in minutes."""

    def __init__(self, label: str, value: float | None = None, *, high: float = 60 * 24 * 60, **keywords: Any) -> None:
        self.value, self.high = value, high
        super().__init__(label, Line(), hint="For example 3 h 20, 45 min or 4 d", **keywords)
        self.show(value)

    def show(self, value: float | None) -> None:
        """Show a length that came from elsewhere."""
        if self.stands(value):
            return
        try:
            same = parse_duration(self.input.text) == value
        except ValueError:
            same = False
        self.value = value
        if not same:
            self._put("" if value is None else hours_minutes(value))
            self._say_fault("")

    def leave(self) -> None:
        """Show the length as it was understood."""
        if self.value is not None and not self.fault:
            self._put(hours_minutes(self.value))

    def _read(self, text: str) -> None:
        try:
            value = parse_duration(text)
        except ValueError as error:
            self.hold(str(error))
            return
        if value is None or not 0 < value <= self.high:
            self.refuse(f"A length above 0 and up to {hours_minutes(self.high)} can be used here.")
            return
        self._accept(value)


class TimeEntry(Entry):
    """A time of day."""

    def __init__(self, label: str, value: time | None = None, **keywords: Any) -> None:
        self.value = value
        super().__init__(label, Line(), hint="For example 7:30", **keywords)
        self.show(value)

    def show(self, value: time | None) -> None:
        """Show a time that came from elsewhere."""
        if self.stands(value):
            return
        try:
            same = parse_time(self.input.text) == value
        except ValueError:
            same = value is None
        self.value = value
        if not same:
            self._put("" if value is None else f"{value:%H:%M}")
            self._say_fault("")

    def _read(self, text: str) -> None:
        try:
            value = parse_time(text)
        except ValueError as error:
            self.hold(str(error))
            return
        if value is None:
            self.hold("A time of day is needed here, for example 7:30.")
            return
        self._accept(value)


class SearchEntry(Entry):
    """Typing searches; a found row is tapped. search(text) gives (key, title, detail); text_of(key) shows one."""

    def __init__(
        self,
        label: str,
        value: str | None,
        search: Callable[[str], list[tuple[str, str, str]]],
        text_of: Callable[[str], str],
        **keywords: Any,
    ) -> None:
        self.value, self._search, self._text_of = value, search, text_of
        super().__init__(label, Line(), **keywords)
        self.found = BoxLayout(orientation="vertical", size_hint_y=None, height=0)
        self.found.bind(minimum_height=self.found.setter("height"))
        self.add_widget(self.found, index=1)
        self.show(value)

    def show(self, value: str | None) -> None:
        """Show what was chosen elsewhere."""
        changed = value != self.value or not self.input.text
        self.value = value
        if changed and not self.input.focus:
            self._put(self._text_of(value) if value else "")

    def _read(self, text: str) -> None:
        self.found.clear_widgets()
        if not text.strip():
            self._accept(None)
            return
        rows = self._search(text)
        for key, title, detail in rows:
            self.found.add_widget(ListRow(title, detail, on_tap=lambda k=key: self._choose(k)))
        self._say_fault("" if rows else "Nothing is found by these letters.")

    def _choose(self, key: str) -> None:
        self.found.clear_widgets()
        self.input.focus = False
        self._put(self._text_of(key))
        self._accept(key)
