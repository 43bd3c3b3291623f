"""Rows of a list, sections that fold away, and rows of fields side by side where there is room."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, ClassVar

from kivy.graphics import Color, Rectangle, SmoothLine
from kivy.metrics import dp, sp
from kivy.properties import BooleanProperty
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.layout import Layout
from kivy.uix.widget import Widget

from ui.theme import space, target, theme
from ui.widgets.notices import Rule, paint_ground
from ui.widgets.reach import Tappable
from ui.widgets.text import Fixed, Text


class ListRow(Tappable):
    """A title and a line under it at the left, a value at the right; tapping it acts."""

    chosen = BooleanProperty(False)
    ring_inset_dp: ClassVar[float] = -4.0

    def __init__(
        self, title: str, detail: str = "", value: str = "", on_tap: Callable[[], None] | None = None, **keywords: Any
    ) -> None:
        keywords.setdefault("padding", (0, space(2.5), 0, space(2.5)))
        super().__init__(on_tap, size_hint_y=None, height=0, spacing=space(3), **keywords)
        words = BoxLayout(
            orientation="vertical", size_hint_y=None, height=0, spacing=space(0.5), pos_hint={"center_y": 0.5}
        )
        words.bind(minimum_height=words.setter("height"))
        self.title, self.detail, self.value = Text(title), Text(detail, role="label", tone="muted"), Fixed(value)
        words.add_widget(self.title)
        words.add_widget(self.detail)
        self.add_widget(words)
        self.value.pos_hint = {"top": 1}
        self.add_widget(self.value)
        with self.canvas.before:
            self._ground_colour = Color(0, 0, 0, 0)
            self._ground = Rectangle()
            self._bar_colour = Color(0, 0, 0, 0)
            self._bar = Rectangle()
            Color(*theme.line)
            self._line = Rectangle()
        self.bind(pos=self._place, size=self._place, chosen=self._paint, state=self._paint)
        words.bind(height=self._grow)
        self._words = words
        self._grow()

    def say(self, title: str, detail: str, value: str) -> None:
        """Change what the row says."""
        self.title.text, self.detail.text, self.value.text = title, detail, value

    def _grow(self, *_: Any) -> None:
        self.height = max(target() + space(2), self._words.height + self.padding[1] + self.padding[3])

    def _place(self, *_: Any) -> None:
        reach = space(3)
        raised = self.chosen or self.state == "down"  # an invisible ground would take as long to draw as a visible one
        self._ground.pos = (self.x - reach, self.y)
        self._ground.size = (self.width + 2 * reach, self.height) if raised else (0, 0)
        self._bar.pos, self._bar.size = (self.x - reach, self.y), (dp(3) if self.chosen else 0, self.height)
        self._line.pos, self._line.size = self.pos, (self.width, max(1, dp(1)))

    def _paint(self, *_: Any) -> None:
        self._ground_colour.rgba, self._bar_colour.rgba = theme.raised, theme.data
        self._place()


class Chevron(Widget):
    """Drawn mark of a fold: pointing down when closed, up when open."""

    open = BooleanProperty(False)

    def __init__(self, **keywords: Any) -> None:
        super().__init__(size_hint=(None, None), size=(sp(14), sp(14)), pos_hint={"center_y": 0.5}, **keywords)
        with self.canvas:
            Color(*theme.data)
            self._line = SmoothLine(width=dp(1.2))
        self.bind(pos=self._draw, size=self._draw, open=self._draw)

    def _draw(self, *_: Any) -> None:
        w, h = self.width, self.height
        low, high = (self.y + h * 0.32, self.y + h * 0.68)
        ends, tip = (low, high) if self.open else (high, low)
        self._line.points = [self.x + w * 0.12, ends, self.x + w * 0.5, tip, self.x + w * 0.88, ends]


class Fold(BoxLayout):
    """A section folded away until it is wanted. `summary` says in the closed row what is inside.

    fill(body) is called once, when it is first opened, so that what nobody opens costs nothing.
    """

    open = BooleanProperty(False)

    def __init__(self, title: str, summary: str, fill: Callable[[BoxLayout], None], **keywords: Any) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0, **keywords)
        self._fill, self._filled = fill, False
        self.row = ListRow(f"[b]{title}[/b]", summary, on_tap=self.toggle)
        self.row.remove_widget(self.row.value)
        self.chevron = Chevron()
        self.row.add_widget(self.chevron)
        self.body = BoxLayout(
            orientation="vertical", size_hint_y=None, height=0, spacing=space(5), padding=(0, space(4), 0, space(6))
        )
        self.body.bind(minimum_height=self.body.setter("height"))
        self.add_widget(self.row)
        self.bind(minimum_height=self.setter("height"))

    @property
    def summary(self) -> str:
        """What the closed row says."""
        return str(self.row.detail.text)

    @summary.setter
    def summary(self, text: str) -> None:
        self.row.detail.text = text

    def toggle(self) -> None:
        """Open or close."""
        self.open = not self.open
        self.chevron.open = self.open
        if self.open:
            if not self._filled:
                self._filled = True
                self._fill(self.body)
            self.add_widget(self.body)
        else:
            self.remove_widget(self.body)


class Stack(BoxLayout):
    """Things under each other, as high as they are."""

    def __init__(self, *things: Widget, gap: float = 4, **keywords: Any) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0, spacing=space(gap), **keywords)
        for thing in things:
            self.add_widget(thing)
        self.bind(minimum_height=self.setter("height"))

    def hold(self, thing: Widget | None) -> None:
        """Hold this one thing, or nothing."""
        if self.children != ([thing] if thing is not None else []):
            self.clear_widgets()
            if thing is not None:
                self.add_widget(thing)


class Opened(Stack):
    """What belongs to a chosen row, on the same raised ground with the same bar at its left."""

    def __init__(self, *things: Widget, **keywords: Any) -> None:
        super().__init__(*things, **keywords)
        with self.canvas.before:
            Color(*theme.raised)
            self._ground = Rectangle()
            Color(*theme.data)
            self._bar = Rectangle()
        self.bind(pos=self._place, size=self._place)

    def _place(self, *_: Any) -> None:
        reach = space(3)
        self._ground.pos, self._ground.size = (self.x - reach, self.y), (self.width + 2 * reach, self.height)
        self._bar.pos, self._bar.size = (self.x - reach, self.y), (dp(3), self.height)


class Side(Layout):
    """Fields side by side where each has at least `least_sp` of width, under each other where not; tops aligned."""

    def __init__(self, *fields: Widget, least_sp: float = 160, **keywords: Any) -> None:
        super().__init__(size_hint_y=None, height=0, **keywords)
        self._least = least_sp
        self.bind(pos=self._trigger_layout, width=self._trigger_layout, children=self._trigger_layout)
        for field in fields:
            field.bind(height=self._trigger_layout)
            self.add_widget(field)

    def do_layout(self, *_: Any) -> None:
        """Place the fields line by line."""
        gap = space(5)
        fields = list(reversed(self.children))
        columns = max(1, min(len(fields), int((self.width + gap) // (sp(self._least) + gap))))
        width = (self.width - gap * (columns - 1)) / columns
        lines = [fields[i : i + columns] for i in range(0, len(fields), columns)]
        heights = [max(field.height for field in line) for line in lines]
        self.height = sum(heights) + gap * (len(lines) - 1)
        top = self.y + self.height
        for line, height in zip(lines, heights, strict=True):
            for column, field in enumerate(line):
                field.width = width
                field.pos = (self.x + column * (width + gap), top - field.height)
            top -= height + gap


__all__ = ["Chevron", "Fold", "ListRow", "Rule", "Side", "Stack", "paint_ground"]
