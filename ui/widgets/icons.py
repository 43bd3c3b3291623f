"""Small drawn buttons: back and undo. `says` is what they do, in words."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Literal

from kivy.graphics import Color, SmoothLine
from kivy.metrics import dp

from ui.theme import TARGET_DP, theme
from ui.widgets.reach import Tappable


class IconButton(Tappable):
    """A back arrow or an undo arrow on a target of 48 dp."""

    def __init__(self, icon: Literal["back", "undo"], says: str, on_tap: Callable[[], None], **keywords: Any) -> None:
        super().__init__(on_tap, size_hint=(None, None), size=(dp(TARGET_DP), dp(TARGET_DP)), **keywords)
        self.icon, self.says = icon, says
        with self.canvas:
            self._colour = Color(*theme.ink)
            self._stroke = SmoothLine(width=dp(1.1))
            self._head = SmoothLine(width=dp(1.1))
        self.bind(pos=self._draw, size=self._draw, disabled=self._draw, state=self._draw)
        self._draw()

    def _draw(self, *_: Any) -> None:
        x, y, r = self.x + self.width / 2, self.y + self.height / 2, dp(7)
        self._colour.rgba = theme.line if self.disabled else theme.data if self.state == "down" else theme.ink
        if self.icon == "back":
            self._stroke.points = [x + r * 0.4, y + r, x - r * 0.6, y, x + r * 0.4, y - r]
            self._head.points = []
        else:
            self._stroke.points = [x - r, y + r * 0.35, x + r * 0.3, y + r * 0.35]
            arc = [(0.3, 0.35), (0.75, 0.2), (1.0, -0.2), (0.85, -0.65), (0.4, -0.85), (-0.3, -0.85)]
            self._stroke.points += [value for dx, dy in arc for value in (x + dx * r, y + dy * r)]
            self._head.points = [x - r * 0.45, y + r * 0.9, x - r, y + r * 0.35, x - r * 0.45, y - r * 0.2]
