"""The frame of a page that is reached from the list of cases and belongs to no open case."""

from __future__ import annotations

from typing import Any

from kivy.core.window import Window
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.textinput import TextInput

from ui.theme import theme
from ui.widgets.buttons import QuietButton
from ui.widgets.notices import CautionStrip, paint_ground
from ui.widgets.page import Page
from ui.widgets.reach import ESCAPE
from ui.widgets.rows import Stack
from ui.widgets.text import Text


class OutsidePage(BoxLayout):
    """A page outside of any open case: a way back at its top, Escape goes back, the caution at its foot."""

    def __init__(self, title: str, back_to: str, back: Any) -> None:
        super().__init__(orientation="vertical")
        paint_ground(self, theme.ground)
        self.back = back
        self.content = Stack(gap=5)
        self.content.add_widget(Stack(QuietButton(f"‹ {back_to}", back), Text(f"[b]{title}[/b]", role="title"), gap=1))
        self.add_widget(Page(self.content))
        self.add_widget(CautionStrip())
        Window.bind(on_key_down=self._on_key)

    def on_parent(self, _: Any, parent: Any) -> None:
        """Stop listening once this page is left."""
        if parent is None:
            Window.unbind(on_key_down=self._on_key)

    def _on_key(self, _window: Any, key: int, *_: Any) -> bool:
        if key != ESCAPE or any(isinstance(widget, TextInput) and widget.focus for widget in self.walk()):
            return False
        self.back()
        return True
