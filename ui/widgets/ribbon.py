"""The trip ribbon: drag along it, move along it by arrow keys, zoom by two fingers, + and − or its buttons, and read.

It shows what `lay` lays out (planner.charts.ribbon) for its size, and asks `tell` for the line of reading above it.
What does not move is painted once; a drag repaints only the scrub line, its ring and the line of text.
"""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise
from typing import Any

from kivy.clock import Clock
from kivy.graphics import Color, Line, Rectangle, RoundedRectangle, StencilPop, StencilPush, StencilUnUse, StencilUse
from kivy.graphics.instructions import InstructionGroup
from kivy.metrics import dp, sp
from kivy.properties import NumericProperty
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.widget import Widget

from ui.painter import measure, paint, paint_items
from ui.theme import space, theme
from ui.widgets.buttons import QuietButton
from ui.widgets.reach import Reachable
from ui.widgets.text import Text

LEFT, RIGHT, HOME, END = 276, 275, 278, 279
MOST_ZOOM = 8.0
Lay = Callable[..., Any]  # (width=, height=, text_size=, measure=) -> planner.charts.ribbon.Ribbon
Tell = Callable[[Any], str]  # planner.charts.ribbon.Reading -> sentence with markup


class RibbonPlot(Reachable, Widget):  # type: ignore[misc]
    """The drawing itself."""

    takes_drags = True  # a page hands touches here over at once, instead of waiting to see whether it should scroll
    minute = NumericProperty(0.0)
    zoom = NumericProperty(1.0)

    def __init__(self, on_minute: Callable[[], None], **keywords: Any) -> None:
        super().__init__(**keywords)
        self.on_minute = on_minute
        self.lay: Lay | None = None
        self.ribbon: Any = None
        self.handle_part: int | None = None  # the part whose end can be dragged
        self.on_lengthen: Callable[[int, float], None] | None = None
        self._lengthening: tuple[float, float, float] | None = None  # x and minutes at the start, minutes per pixel
        self._fingers: dict[Any, float] = {}  # x of the touches held here
        self._pinch: tuple[float, float] | None = None  # distance of two fingers and zoom at the start
        self._offset = 0.0
        self._still, self._moving = InstructionGroup(), InstructionGroup()
        with self.canvas:
            StencilPush()
            self._window = Rectangle()
            StencilUse()
            self.canvas.add(self._still)
            self.canvas.add(self._moving)
            StencilUnUse()
            self._window_again = Rectangle()
            StencilPop()
        self._again = Clock.create_trigger(self._lay_out, -1)
        self.bind(pos=self._again, size=self._again, zoom=self._again, minute=self._moved)

    def show(self, lay: Lay | None) -> None:
        """Show another layout, from the next frame on."""
        self.lay = lay
        self._again()

    def _lay_out(self, *_: Any) -> None:
        if self.lay is None or self.width < dp(80) or self.height < dp(40):
            self.ribbon = None
            self._still.clear()
            self._moving.clear()
            return
        self.ribbon = self.lay(
            width=self.width * self.zoom, height=self.height, text_size=theme.size("small"), measure=measure
        )
        for window in (self._window, self._window_again):
            window.pos, window.size = self.pos, self.size
        self._keep_in_view()
        self._paint()

    def _paint(self) -> None:
        paint(self._still, self.ribbon.drawing, self.x - self._offset, self.y)
        self._paint_scrub()
        self.on_minute()

    def _paint_scrub(self) -> None:
        paint_items(self._moving, self.ribbon.scrub(self.minute), self.x - self._offset, self.y)
        end = self._handle_x()
        if end is not None:
            base = self.y + self.height * 0.45
            self._moving.add(Color(*theme.data))
            self._moving.add(RoundedRectangle(pos=(end - dp(5), base), size=(dp(10), dp(28)), radius=[dp(5)]))
            self._moving.add(Color(*theme.on_data))
            for side in (-dp(1.5), dp(1.5)):
                self._moving.add(Line(points=[end + side, base + dp(9), end + side, base + dp(19)], width=dp(0.6)))

    def _handle_x(self) -> float | None:
        edges = self.ribbon.scale.minutes if self.ribbon is not None else ()
        if self.handle_part is None or self.handle_part >= len(edges) - 1:
            return None
        return float(self.x - self._offset + self.ribbon.scale.at(edges[self.handle_part + 1]))

    def _grip(self, touch: Any) -> bool:
        """Take hold of the handle if the touch is on it."""
        end = self._handle_x()
        if end is None or abs(touch.x - end) > dp(24) or abs(touch.y - self.y - self.height * 0.45 - dp(14)) > dp(26):
            return False
        edges, scale = self.ribbon.scale.minutes, self.ribbon.scale
        start_min, end_min = float(edges[self.handle_part]), float(edges[self.handle_part + 1])
        width = max(scale.at(end_min) - scale.at(start_min), 1.0)
        self._lengthening = (touch.x, end_min - start_min, (end_min - start_min) / width)
        return True

    def _lengthen(self, x: float) -> None:
        begun_x, minutes, per_pixel = self._lengthening or (x, 0.0, 0.0)
        step = 60.0 if minutes > 1440 else 5.0
        wanted = max(step, step * round((minutes + (x - begun_x) * per_pixel) / step))
        if self.on_lengthen is not None and self.handle_part is not None:
            self.on_lengthen(self.handle_part, wanted)

    def _moved(self, *_: Any) -> None:
        if self.ribbon is None:
            return
        if self._keep_in_view():
            self._paint()
        else:
            self._paint_scrub()
            self.on_minute()

    def _keep_in_view(self) -> bool:
        """Slide the zoomed drawing so that the scrub line stays in view; True if it slid."""
        before = self._offset
        here = self.ribbon.scale.at(self.minute)
        margin = self.width * 0.12 if self.zoom > 1 else 0
        low, high = here - self.width + margin, here - margin
        self._offset = min(max(self._offset, low), high)
        self._offset = min(max(self._offset, 0.0), self.width * (self.zoom - 1))
        return abs(before - self._offset) > 0.5

    def _to_minute(self, x: float) -> None:
        if self.ribbon is not None:
            self.minute = self.ribbon.minute_at(x - self.x + self._offset)

    def on_touch_down(self, touch: Any) -> bool:
        """Take the touch and read there."""
        if not self.collide_point(*touch.pos) or self.ribbon is None:
            return bool(super().on_touch_down(touch))
        super().on_touch_down(touch)
        touch.grab(self)
        self._fingers[touch] = touch.x
        if len(self._fingers) == 2:
            self._lengthening = None
            self._pinch = (self._apart(), self.zoom)
        elif not self._grip(touch):
            self._to_minute(touch.x)
        return True

    def on_touch_move(self, touch: Any) -> bool:
        """Read where the finger is."""
        if touch.grab_current is self:
            self._fingers[touch] = touch.x
            if self._pinch is not None:
                apart, zoom = self._pinch
                self.zoom = min(MOST_ZOOM, max(1.0, zoom * self._apart() / apart))
                return True
            (self._lengthen if self._lengthening is not None else self._to_minute)(touch.x)
            return True
        return bool(super().on_touch_move(touch))

    def on_touch_up(self, touch: Any) -> bool:
        """Let go."""
        if touch.grab_current is self:
            touch.ungrab(self)
            self._lengthening = None
            self._fingers.pop(touch, None)
            if not self._fingers:
                self._pinch = None  # the finger that stays does not jump to another moment
            return True
        return bool(super().on_touch_up(touch))

    def _apart(self) -> float:
        """How far two fingers are apart along the ribbon, at least a finger's width."""
        return max(abs(max(self._fingers.values()) - min(self._fingers.values())), float(dp(24)))

    def keyboard_on_key_down(self, window: Any, keycode: tuple[int, str], text: str, modifiers: list[str]) -> bool:
        """Arrows move by a hundredth of the drawing, with Shift by a part; + and − zoom."""
        if self.ribbon is None:
            return bool(super().keyboard_on_key_down(window, keycode, text, modifiers))
        key = keycode[0]
        if key in (LEFT, RIGHT):
            sign = 1 if key == RIGHT else -1
            if "shift" in modifiers:
                self.to_part(self.ribbon.part_at(self.minute) + sign)
            else:
                step = self.width * self.zoom / 100
                self.minute = self.ribbon.minute_at(self.ribbon.scale.at(self.minute) + sign * step)
            return True
        if key in (HOME, END):
            self.minute = float(self.ribbon.scale.minutes[0 if key == HOME else -1])
            return True
        if text in ("+", "=", "-"):
            self.zoom_by(1 / 1.5 if text == "-" else 1.5)
            return True
        return bool(super().keyboard_on_key_down(window, keycode, text, modifiers))

    def to_part(self, index: int) -> None:
        """Read in the middle of a part."""
        edges = self.ribbon.scale.minutes
        if 0 <= index < len(edges) - 1:
            self.minute = float((edges[index] + edges[index + 1]) / 2)

    def zoom_by(self, factor: float) -> None:
        """Zoom about the scrub line."""
        self.zoom = min(MOST_ZOOM, max(1.0, self.zoom * factor))


class SteadyText(Text):
    """Keeps the height it once needed at this width, so that what is under it stands still while a finger drags."""

    def _wrap(self, *arguments: Any) -> None:
        self._most = 0.0
        super()._wrap(*arguments)

    def _grow(self, *_: Any) -> None:
        self._most = max(self._most, self.texture_size[1])
        self.height = self._most


class RibbonView(BoxLayout):
    """Ribbon with its line of reading and its zoom above it. `show(lay, tell, minute)`; `on_minute(minute)`."""

    def __init__(self, on_minute: Callable[[float], None] | None = None, *, height_sp: float = 190) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0, spacing=space(2))
        self._tell: Tell | None = None
        self._on_minute = on_minute
        self.reading = SteadyText("", role="body", pos_hint={"top": 1}, valign="top")
        self.plot = RibbonPlot(self._moved, size_hint_y=None, height=sp(height_sp))
        top = BoxLayout(size_hint_y=None, height=0)
        self._less = QuietButton("−", lambda: self.plot.zoom_by(1 / 1.5), role="lead", pos_hint={"top": 1})
        self._more = QuietButton("+", lambda: self.plot.zoom_by(1.5), role="lead", pos_hint={"top": 1})
        for widget in (self.reading, self._less, self._more):
            top.add_widget(widget)
        top.bind(minimum_height=top.setter("height"))
        self.add_widget(top)
        self.add_widget(self.plot)
        self.bind(minimum_height=self.setter("height"))
        self.plot.bind(zoom=self._zoomed)
        self._zoomed()

    def show(self, lay: Lay | None, tell: Tell, minute: float | None = None) -> None:
        """Show a ribbon; the moment that is read stays unless another is given."""
        self._tell = tell
        if minute is not None:
            self.plot.minute = minute
        self.plot.show(lay)

    def spoken(self) -> list[str]:
        """The line of reading in the middle of each part, for those who cannot see the drawing."""
        if self.plot.lay is None or self._tell is None:
            return []
        ribbon = self.plot.lay(width=600.0, height=200.0, text_size=13.0, measure=measure)
        edges = ribbon.scale.minutes
        middles = [(a + b) / 2 for a, b in pairwise(edges)]
        lines = [self._tell(ribbon.read_at(float(minute))).replace("\n", ", ") for minute in middles]
        return [line.replace("[b]", "").replace("[/b]", "") for line in lines]

    def _zoomed(self, *_: Any) -> None:
        self._less.disabled = self.plot.zoom <= 1.0
        self._more.disabled = self.plot.zoom >= MOST_ZOOM

    def _moved(self) -> None:
        if self._tell is not None and self.plot.ribbon is not None:
            reading = self.plot.ribbon.read_at(self.plot.minute)
            self.reading.text = self._tell(reading)
            if self._on_minute is not None:
                self._on_minute(reading.minute)


class DrawingView(Widget):
    """Any other drawing of planner.charts, as high as it needs. lay(width, text_size, measure) -> Drawing."""

    def __init__(self, lay: Callable[..., Any] | None = None, **keywords: Any) -> None:
        super().__init__(size_hint_y=None, height=0, **keywords)
        self._lay = lay
        self.drawing: Any = None
        self._group = InstructionGroup()
        self.canvas.add(self._group)
        self._again = Clock.create_trigger(self._lay_out, -1)
        self.bind(pos=self._again, width=self._again)

    def show(self, lay: Callable[..., Any] | None) -> None:
        """Show another drawing."""
        self._lay = lay
        self._again()

    def spoken(self) -> list[str]:
        """The drawing's words, line by line from the top."""
        if self._lay is None:
            return []
        drawing = self._lay(width=600.0, text_size=14.0, measure=measure)
        lines: dict[int, list[Any]] = {}
        for text in drawing.texts():
            lines.setdefault(round(text.y / 6), []).append(text)
        return [
            " ".join(text.text for text in sorted(line, key=lambda text: text.x))
            for _, line in sorted(lines.items(), reverse=True)
        ]

    def _lay_out(self, *_: Any) -> None:
        if self._lay is None or self.width < dp(40):
            self._group.clear()
            return
        self.drawing = self._lay(width=self.width, text_size=theme.size("label"), measure=measure)
        self.height = self.drawing.height
        paint(self._group, self.drawing, self.x, self.y)


__all__ = ["DrawingView", "RibbonPlot", "RibbonView"]
