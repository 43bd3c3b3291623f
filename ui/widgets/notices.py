"""Things said: the caution strip, notices with a bar at their left, and section headings."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Literal

from kivy.graphics import Color, Rectangle
from kivy.metrics import dp
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.widget import Widget

from ui.theme import MARGIN_DP, space, theme
from ui.widgets.buttons import PlainButton
from ui.widgets.text import Text

CAUTION = "Estimate only. Confirm with prescriber."


def paint_ground(widget: Widget, colour: Any) -> Rectangle:
    """Fill a widget's background with a colour."""
    with widget.canvas.before:
        Color(*colour)
        ground = Rectangle(pos=widget.pos, size=widget.size)
    widget.bind(pos=lambda w, v: setattr(ground, "pos", v), size=lambda w, v: setattr(ground, "size", v))
    return ground


class Rule(Widget):
    """A thin line across."""

    def __init__(self, **keywords: Any) -> None:
        super().__init__(size_hint_y=None, height=max(1, dp(1)), **keywords)
        paint_ground(self, theme.line)


class CautionStrip(BoxLayout):
    """At the foot of every result screen; it cannot be dismissed."""

    def __init__(self, **keywords: Any) -> None:
        super().__init__(
            size_hint_y=None, height=0, padding=(dp(MARGIN_DP), space(3), dp(MARGIN_DP), space(3)), **keywords
        )
        paint_ground(self, theme.caution_ground)
        with self.canvas.after:
            Color(*theme.caution)
            self._edge = Rectangle()
        self.words = Text(f"[b]{CAUTION}[/b]", role="body", tone="caution_ink")
        self.add_widget(self.words)
        self.bind(pos=self._place, size=self._place, minimum_height=self.setter("height"))

    def _place(self, *_: Any) -> None:
        self._edge.pos, self._edge.size = (self.x, self.y + self.height - dp(1.5)), (self.width, dp(1.5))


Kind = Literal["note", "caution", "stop", "good"]
_TONES: dict[str, str] = {"note": "data", "caution": "caution", "stop": "stop", "good": "data"}


class Notice(BoxLayout):
    """A sentence with a bar at its left. title is said in semibold first; actions are (words, what to do)."""

    def __init__(
        self,
        text: str,
        kind: Kind = "note",
        *,
        title: str = "",
        actions: tuple[tuple[str, Callable[[], None]], ...] = (),
        **keywords: Any,
    ) -> None:
        super().__init__(
            orientation="vertical",
            size_hint_y=None,
            height=0,
            spacing=space(2),
            padding=(space(4), space(1), 0, space(1)),
            **keywords,
        )
        self.kind = kind
        self._title = title
        self.words = Text("", role="body")
        self.add_widget(self.words)
        self.say(text)
        for words, action in actions:
            self.add_widget(PlainButton(words, action))
        with self.canvas.before:
            self._colour = Color(*theme.colour(_TONES[kind]))
            self._bar = Rectangle()
        self.bind(pos=self._place, size=self._place, minimum_height=self.setter("height"))

    def say(self, text: str) -> None:
        """Change what the notice says; its title stays."""
        self.words.text = f"[b]{self._title}[/b] {text}" if self._title else text

    def _place(self, *_: Any) -> None:
        self._bar.pos, self._bar.size = self.pos, (dp(3), self.height)


class Section(BoxLayout):
    """A heading with what belongs to it."""

    def __init__(self, title: str, *, note: str = "", **keywords: Any) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0, spacing=space(4), **keywords)
        self.title = Text(f"[b]{title}[/b]", role="lead")
        self.add_widget(self.title)
        if note:
            self.add_widget(Text(note, role="label", tone="muted"))
        self.bind(minimum_height=self.setter("height"))
