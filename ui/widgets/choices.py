"""Chips to choose one (or several) of a few, with "not known" as an answer of its own."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from kivy.graphics import Color, SmoothLine, SmoothRoundedRectangle
from kivy.metrics import dp
from kivy.properties import BooleanProperty, StringProperty
from kivy.uix.behaviors import ButtonBehavior
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.label import Label
from kivy.uix.stacklayout import StackLayout

from ui.theme import FONT, space, target, theme
from ui.widgets.reach import Reachable
from ui.widgets.text import Text

YES_NO = ((True, "Yes"), (False, "No"), (None, "Not known"))


class Chip(ButtonBehavior, Reachable, Label):  # type: ignore[misc]
    """One choice. Chosen is shown by ground, weight and a tick, never by colour alone."""

    chosen = BooleanProperty(False)

    def __init__(self, value: Any, words: str, on_tap: Callable[[Chip], None], **keywords: Any) -> None:
        self.value, self.words, self.on_tap = value, words, on_tap
        super().__init__(
            text=words,
            font_name=FONT,
            font_size=theme.size("body"),
            size_hint=(None, None),
            height=target(),
            **keywords,
        )
        with self.canvas.before:
            self._ground = Color(0, 0, 0, 0)
            self._shape = SmoothRoundedRectangle(radius=[dp(8)])
            self._edge = Color(*theme.edge)
            self._outline = SmoothLine(width=1)
        self.bind(pos=self._place, size=self._place, texture_size=self._fit, chosen=self._paint, state=self._paint)
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

    def _fit(self, *_: Any) -> None:
        limit = self.parent.width if self.parent is not None else 10_000
        natural = self.texture_size[0] + space(7)
        if self.text_size[0] is None and natural > limit > 1:
            self.text_size = (limit - space(6), None)
            self.halign = "center"
        self.width = max(target(), min(natural, limit))
        self.height = max(target(), self.texture_size[1] + space(4))

    def _paint(self, *_: Any) -> None:
        self.text = f"✓ {self.words}" if self.chosen else self.words
        self.bold = self.chosen
        self.color = theme.on_data if self.chosen else theme.ink
        self._ground.rgba = theme.data if self.chosen else (theme.raised if self.state == "down" else (0, 0, 0, 0))
        self._edge.rgba = theme.data if self.chosen else theme.edge

    def on_release(self) -> None:
        """A finger lifted inside, or Enter."""
        self.on_tap(self)

    def activate(self) -> None:
        """Enter or Space."""
        self.dispatch("on_release")


class Choice(BoxLayout):
    """A question with chips. value is the chosen value; on_value is called with it when the person chooses.

    With several=True value is a tuple, and each chip is switched on and off.
    """

    label = StringProperty()

    def __init__(
        self,
        label: str,
        options: Sequence[tuple[Any, str]],
        value: Any = None,
        on_value: Callable[[Any], None] | None = None,
        *,
        hint: str = "",
        several: bool = False,
    ) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0, spacing=space(1.5), label=label)
        self.on_value, self.several = on_value, several
        self.value: Any = value
        if label:
            self.add_widget(Text(label, role="label", tone="muted"))
        self._chips = _Chips(spacing=space(2), size_hint_y=None, height=0)
        for option, words in options:
            self._chips.add_widget(Chip(option, words, self._tapped))
        self.add_widget(self._chips)
        self.hint = Text(hint, role="small", tone="muted")
        if hint:
            self.add_widget(self.hint)
        self.bind(minimum_height=self.setter("height"))
        self.show(value)

    @property
    def chips(self) -> list[Chip]:
        """The chips in their order."""
        return list(reversed(self._chips.children))

    def show(self, value: Any) -> None:
        """Show a value that came from elsewhere."""
        self.value = value
        for chip in self._chips.children:
            chip.chosen = (
                chip.value in value if self.several else chip.value == value and type(chip.value) is type(value)
            )

    def _tapped(self, chip: Chip) -> None:
        if self.several:
            value = tuple(c.value for c in self.chips if c.chosen != (c is chip))
        else:
            value = chip.value
        self.show(value)
        if self.on_value is not None:
            self.on_value(value)


class _Chips(StackLayout):
    """Chips in lines; it is as high as its lines."""

    def __init__(self, **keywords: Any) -> None:
        super().__init__(**keywords)
        self.bind(minimum_height=self.setter("height"), width=self._refit)

    def _refit(self, *_: Any) -> None:
        for chip in self.children:
            chip.text_size = (None, None)
            chip.texture_update()
            chip._fit()
