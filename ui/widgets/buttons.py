"""Buttons: the one thing to do next, the other things one may do, and chips to choose from."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from kivy.graphics import Color, SmoothLine, SmoothRoundedRectangle
from kivy.metrics import dp, sp
from kivy.properties import BooleanProperty
from kivy.uix.behaviors import ButtonBehavior
from kivy.uix.label import Label

from ui.theme import FONT, space, target, theme
from ui.widgets.reach import Reachable

WIDEST_DP = 420


class PlainButton(ButtonBehavior, Reachable, Label):  # type: ignore[misc]
    """A button that is words and an outline. Its text wraps and it grows with it."""

    filled = BooleanProperty(False)
    outlined = BooleanProperty(True)

    def __init__(
        self, text: str, on_tap: Callable[[], None], *, role: str = "body", tone: str = "data", **keywords: Any
    ) -> None:
        self.on_tap, self.tone = on_tap, tone
        keywords.setdefault("size_hint_y", None)
        keywords.setdefault("size_hint_max_x", max(dp(WIDEST_DP), sp(WIDEST_DP)))
        super().__init__(
            text=text,
            font_name=FONT,
            font_size=theme.size(role),
            halign="center",
            valign="middle",
            bold=True,
            height=target(),
            **keywords,
        )
        with self.canvas.before:
            self._ground = Color(0, 0, 0, 0)
            self._shape = SmoothRoundedRectangle(radius=[dp(8)])
            self._edge = Color(0, 0, 0, 0)
            self._outline = SmoothLine(width=1)
        self.bind(
            pos=self._place,
            size=self._place,
            texture_size=self._grow,
            state=self._paint,
            disabled=self._paint,
            filled=self._paint,
            outlined=self._paint,
        )
        self._place()
        self._paint()

    def _place(self, *_: Any) -> None:
        self._shape.pos, self._shape.size = self.pos, self.size
        self._outline.rounded_rectangle = (
            self.x + 1,
            self.y + 1,
            max(self.width - 2, 0),
            max(self.height - 2, 0),
            dp(8),
        )
        if self.size_hint_x is not None:
            self.text_size = (max(self.width - space(4), 1), None)

    def _grow(self, *_: Any) -> None:
        if self.size_hint_y is None:
            self.height = max(target(), self.texture_size[1] + space(4))
        if self.size_hint_x is None:
            self.width = max(target(), self.texture_size[0] + space(8))

    def _paint(self, *_: Any) -> None:
        tone = theme.colour(self.tone)
        down = self.state == "down"
        if self.disabled:
            self._ground.rgba, self.disabled_color = (0, 0, 0, 0), theme.muted
            self._edge.rgba = theme.line if self.outlined else (0, 0, 0, 0)
        elif self.filled:
            self._ground.rgba = (*tone[:3], 0.82 if down else 1.0)
            self._edge.rgba = (0, 0, 0, 0)
            self.color = theme.on_stop if self.tone == "stop" else theme.on_data
        else:
            self._ground.rgba = theme.raised if down else (0, 0, 0, 0)
            self._edge.rgba = theme.edge if self.outlined else (0, 0, 0, 0)
            self.color = tone

    def on_release(self) -> None:
        """A finger lifted inside, or Enter."""
        self.on_tap()

    def activate(self) -> None:
        """Enter or Space."""
        if not self.disabled:
            self.dispatch("on_release")


class PrimaryButton(PlainButton):
    """The one thing to do next on this screen."""

    def __init__(self, text: str, on_tap: Callable[[], None], **keywords: Any) -> None:
        super().__init__(text, on_tap, filled=True, outlined=False, **keywords)


class QuietButton(PlainButton):
    """Words that act, without an outline, as wide as they are."""

    def __init__(self, text: str, on_tap: Callable[[], None], **keywords: Any) -> None:
        keywords.setdefault("size_hint_x", None)
        keywords.setdefault("role", "label")
        super().__init__(text, on_tap, outlined=False, **keywords)
