"""The steps with their drawn states: along the top on a phone, down the left side on a wide window."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any, Literal

from kivy.graphics import Color, Ellipse, Rectangle, SmoothLine
from kivy.metrics import dp, sp
from kivy.properties import BooleanProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.scrollview import ScrollView
from kivy.uix.widget import Widget

from ui.theme import space, theme
from ui.widgets.notices import Rule
from ui.widgets.reach import Tappable
from ui.widgets.text import Text

StepState = Literal["empty", "incomplete", "complete"]
STATE_WORDS = {"empty": "not started", "incomplete": "in progress", "complete": "complete"}


class Mark(Widget):
    """A ring when empty, half filled when in progress, a tick when complete."""

    state = StringProperty("empty")

    def __init__(self, **keywords: Any) -> None:
        side = max(dp(13), sp(13))
        super().__init__(size_hint=(None, None), size=(side, side), **keywords)
        self.bind(pos=self._draw, size=self._draw, state=self._draw)

    def _draw(self, *_: Any) -> None:
        self.canvas.clear()
        x, y, side = self.x, self.y, self.width
        with self.canvas:
            Color(*(theme.muted if self.state == "empty" else theme.data))
            if self.state == "complete":
                tick = [
                    x + side * 0.1,
                    y + side * 0.5,
                    x + side * 0.38,
                    y + side * 0.2,
                    x + side * 0.92,
                    y + side * 0.84,
                ]
                SmoothLine(points=tick, width=dp(1.2))
            else:
                SmoothLine(circle=(x + side / 2, y + side / 2, side / 2 - dp(1.5)), width=dp(0.7))
                if self.state == "incomplete":
                    Ellipse(
                        pos=(x + dp(1), y + dp(1)), size=(side - dp(2), side - dp(2)), angle_start=180, angle_end=360
                    )


class StepTab(Tappable):
    """One step. `upright` tabs stand beside each other; the others are rows."""

    current = BooleanProperty(False)

    def __init__(self, name: str, title: str, upright: bool, on_tap: Callable[[], None]) -> None:
        super().__init__(
            on_tap,
            orientation="vertical" if upright else "horizontal",
            size_hint=(None, 1) if upright else (1, None),
            padding=(space(1), space(1.5), space(1), space(2)) if upright else (space(4), space(3), space(3), space(3)),
            spacing=space(0.5) if upright else space(3),
        )
        self.name, self.upright = name, upright
        self.mark = Mark(pos_hint={"center_x": 0.5} if upright else {"center_y": 0.5})
        self.title = Text(
            title,
            role="small" if upright else "body",
            halign="center" if upright else "left",
            pos_hint={"center_y": 0.5},
        )
        self.detail = Text("", role="small", tone="muted")
        self.add_widget(self.mark)
        if upright:
            self.add_widget(self.title)
        else:
            words = BoxLayout(orientation="vertical", size_hint_y=None, height=0, pos_hint={"center_y": 0.5})
            words.bind(minimum_height=words.setter("height"))
            words.add_widget(self.title)
            words.add_widget(self.detail)
            words.bind(height=lambda _, h: setattr(self, "height", max(dp(56), h + space(6))))
            self.add_widget(words)
            self.height = dp(56)
        with self.canvas.before:
            self._ground_colour = Color(0, 0, 0, 0)
            self._ground = Rectangle()
            self._bar_colour = Color(0, 0, 0, 0)
            self._bar = Rectangle()
        self._plain = title
        self.bind(pos=self._place, size=self._place, current=self._paint)
        self._paint()

    def _place(self, *_: Any) -> None:
        self._ground.pos, self._ground.size = self.pos, self.size
        self._bar.pos = self.pos
        self._bar.size = (self.width, dp(3)) if self.upright else (dp(3), self.height)

    def _paint(self, *_: Any) -> None:
        self.title.text = f"[b]{self._plain}[/b]" if self.current else self._plain
        self.title.tone = "data" if self.current else "ink"
        self._bar_colour.rgba = theme.data if self.current else (0, 0, 0, 0)
        self._ground_colour.rgba = theme.raised if self.current and not self.upright else (0, 0, 0, 0)

    def say(self, state: str, detail: str) -> None:
        """Show the state of the step, in the wide form with a line about it."""
        self.mark.state = state
        if not self.upright:
            self.detail.text = detail or STATE_WORDS[state]


class StepBar(BoxLayout):
    """All steps; `current` is the one shown. on_step(name) when one is tapped."""

    current = StringProperty("")

    def __init__(self, steps: Sequence[tuple[str, str]], upright: bool, on_step: Callable[[str], None]) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0)
        self.tabs = {name: StepTab(name, title, upright, lambda n=name: on_step(n)) for name, title in steps}
        if upright:
            self._scroll = ScrollView(do_scroll_y=False, size_hint_y=None, bar_width=0)
            self._row = BoxLayout(size_hint_x=None)
            for tab in self.tabs.values():
                self._row.add_widget(tab)
            self._scroll.add_widget(self._row)
            self.add_widget(self._scroll)
            self.add_widget(Rule())
            self.bind(width=self._share)
            self._share()
        else:
            for tab in self.tabs.values():
                self.add_widget(tab)
        self.bind(minimum_height=self.setter("height"), current=self._choose)

    def _share(self, *_: Any) -> None:
        height = max(dp(54), sp(54))
        self._scroll.height = height
        self._row.height = height
        least = [max(dp(48), sp(6.9 * len(tab._plain) + 9)) for tab in self.tabs.values()]
        spare = max(0.0, self.width - sum(least)) / max(len(least), 1)
        for tab, width in zip(self.tabs.values(), least, strict=True):
            tab.width = width + spare
        self._row.width = max(self.width, sum(least))

    def _choose(self, *_: Any) -> None:
        for name, tab in self.tabs.items():
            tab.current = name == self.current
            if tab.current and tab.upright and self._row.width > self.width + 1:
                self._scroll.scroll_to(tab, padding=dp(40), animate=False)

    def say(self, states: dict[str, tuple[str, str]]) -> None:
        """Show each step's state and, in the wide form, a line about it."""
        for name, (state, detail) in states.items():
            if name in self.tabs:
                self.tabs[name].say(state, detail)
