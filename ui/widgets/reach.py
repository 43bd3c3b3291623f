"""What makes a widget reachable by finger and keyboard: focus, a visible ring, Enter and Space, scrolling to it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, ClassVar

from kivy.clock import Clock
from kivy.core.window import Window
from kivy.graphics import Color, Line
from kivy.metrics import dp
from kivy.properties import BooleanProperty
from kivy.uix.behaviors import ButtonBehavior, FocusBehavior
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.scrollview import ScrollView
from kivy.uix.widget import Widget

from ui.theme import theme

ENTER, KEYPAD_ENTER, SPACE, ESCAPE, TAB = 13, 271, 32, 27, 9


class _LastInput:
    """Whether the last thing the person used was the keyboard: the ring is shown then, and not after a touch."""

    by_key = False


def _key(_window: Any, key: int, *_: Any) -> None:
    if key in (TAB, 273, 274, 275, 276):
        _LastInput.by_key = True


def _touch(*_: Any) -> None:
    _LastInput.by_key = False


Window.bind(on_key_down=_key, on_touch_down=_touch)


def keyboard_in_use() -> bool:
    """True while the person moves by keyboard."""
    return _LastInput.by_key


def scroll_into_view(widget: Widget) -> None:
    """Bring a widget into view if it stands in something that scrolls."""
    parent = widget.parent
    while parent is not None and parent is not parent.parent:
        if isinstance(parent, ScrollView):
            if parent.do_scroll_y and parent.children and parent.children[0].height > parent.height:
                parent.scroll_to(widget, padding=dp(64), animate=False)
            return
        parent = parent.parent


class Reachable(FocusBehavior):  # type: ignore[misc]
    """Takes the focus by Tab and by touch; draws a ring round itself while the keyboard is in use."""

    ring = BooleanProperty(False)
    ring_inset_dp: ClassVar[float] = 2.0  # below 0: round the widget, for words that begin at its edge

    def __init__(self, **keywords: Any) -> None:
        super().__init__(**keywords)
        with self.canvas.after:
            self._ring_colour = Color(*theme.data[:3], 0)
            self._ring_line = Line(width=dp(1.5))
        self.bind(pos=self._draw_ring, size=self._draw_ring, focus=self._focused)

    def _draw_ring(self, *_: Any) -> None:
        inset = dp(self.ring_inset_dp)
        self._ring_line.rounded_rectangle = (
            self.x + inset,
            self.y + inset,
            max(self.width - 2 * inset, 0),
            max(self.height - 2 * inset, 0),
            dp(6),
        )

    def _focused(self, _: Any, focused: bool) -> None:
        self.ring = focused and keyboard_in_use()
        self._ring_colour.a = 1.0 if self.ring else 0.0
        if self.ring:
            Clock.schedule_once(lambda _dt: scroll_into_view(self), 0)

    def keyboard_on_key_down(self, window: Any, keycode: tuple[int, str], text: str, modifiers: list[str]) -> bool:
        """Enter and Space do what a tap does; Escape leaves the widget and reaches the screen."""
        if keycode[0] in (ENTER, KEYPAD_ENTER, SPACE) and not self.disabled:
            self.activate()
            return True
        if keycode[0] == ESCAPE:
            self.focus = False
            return False
        return bool(super().keyboard_on_key_down(window, keycode, text, modifiers))

    def activate(self) -> None:
        """What Enter does."""


class Tappable(ButtonBehavior, Reachable, BoxLayout):  # type: ignore[misc]
    """A box that acts when it is tapped. `on_tap` is called without arguments."""

    def __init__(self, on_tap: Callable[[], None] | None = None, **keywords: Any) -> None:
        self.on_tap = on_tap
        super().__init__(**keywords)

    def on_release(self) -> None:
        """A finger lifted inside, or Enter."""
        if self.on_tap is not None:
            self.on_tap()

    def activate(self) -> None:
        """Enter or Space."""
        self.dispatch("on_release")
