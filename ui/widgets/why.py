"""Numbers that can be asked about: a touch, or Enter, shows how they were worked out. A mark at the right says so."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, ClassVar

from kivy.graphics import Color, SmoothLine
from kivy.metrics import dp, sp
from kivy.uix.widget import Widget

from ui.theme import space, target, theme
from ui.widgets.reach import Tappable
from ui.widgets.ribbon import DrawingView

MARK_SP = 14
MARK_ROOM_SP = 20


class Onward(Widget):
    """The mark: a small angle that points to the right."""

    def __init__(self, **keywords: Any) -> None:
        keywords.setdefault("pos_hint", {"center_y": 0.5})
        super().__init__(size_hint=(None, None), size=(sp(MARK_SP), sp(MARK_SP)), **keywords)
        with self.canvas:
            Color(*theme.data)
            self._line = SmoothLine(width=dp(1.2))
        self.bind(pos=self._draw, size=self._draw)

    def _draw(self, *_: Any) -> None:
        x, w, y, h = self.x, self.width, self.y, self.height
        self._line.points = [x + w * 0.35, y + h * 0.85, x + w * 0.7, y + h * 0.5, x + w * 0.35, y + h * 0.15]


class Asked(Tappable):
    """What can be asked about."""

    ring_inset_dp: ClassVar[float] = -4.0


class Why(Asked):
    """One thing that shows a number, with the mark at its right. on_tap: what a touch does."""

    def __init__(self, thing: Widget, on_tap: Callable[[], None], **keywords: Any) -> None:
        super().__init__(on_tap, size_hint_y=None, height=target(), spacing=space(1.5), **keywords)
        self._asked = on_tap
        self.thing, self._mark = thing, Onward()
        thing.pos_hint = {"center_y": 0.5}
        self.add_widget(thing)
        self.add_widget(self._mark)
        thing.bind(height=self._grow)
        self._grow()

    def answer(self, there: bool) -> None:
        """Whether there is anything to ask: without an answer there is no mark, and a touch does nothing."""
        self.on_tap = self._asked if there else None
        self.is_focusable = there
        self._mark.opacity = 1.0 if there else 0.0

    def _grow(self, *_: Any) -> None:
        self.height = max(target(), self.thing.height + space(2))


class WhyRows(DrawingView):
    """A drawing of planner.charts.forecast whose rows can be touched. on_row(index): what a touch on a row does."""

    def __init__(self, on_row: Callable[[int], None], **keywords: Any) -> None:
        super().__init__(**keywords)
        self.on_row = on_row

    def show(self, lay: Callable[..., Any] | None) -> None:
        """Show another drawing, beside which there is room for the marks."""
        room = sp(MARK_ROOM_SP)
        super().show(None if lay is None else lambda width, **size: lay(width=width - room, **size))
        if lay is None:
            self.height = 0
            self.clear_widgets()

    def _lay_out(self, *arguments: Any) -> None:
        super()._lay_out(*arguments)
        rows = self.drawing.rows if self._lay is not None and self.drawing is not None else ()
        while len(self.children) > len(rows):
            self.remove_widget(self.children[0])
        while len(self.children) < len(rows):
            number = len(self.children)
            touch = Asked(lambda index=number: self.on_row(index), size_hint=(None, None))
            touch.add_widget(Widget())
            touch.add_widget(Onward())
            self.add_widget(touch)
        for touch, (bottom, top) in zip(reversed(self.children), rows, strict=True):
            touch.pos, touch.size = (self.x, self.y + bottom), (self.width, top - bottom)


__all__ = ["Onward", "Why", "WhyRows"]
