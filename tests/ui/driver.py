"""Drives a Kivy app inside the test process as a person would: touches, typing, keys; reads the screen and its pixels.

All calls into Kivy's private parts stand in this file.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import numpy as np
from kivy.base import EventLoop, stopTouchApp
from kivy.clock import Clock
from kivy.core.window import Window
from kivy.graphics.opengl import GL_RGBA, GL_UNSIGNED_BYTE, glReadPixels
from kivy.input.motionevent import MotionEvent
from kivy.lang import Builder
from kivy.metrics import Metrics
from kivy.uix.behaviors import FocusBehavior
from kivy.uix.widget import Widget

BACKSPACE, TAB, ENTER, ESCAPE, UP, DOWN, RIGHT, LEFT, END = 8, 9, 13, 27, 273, 274, 275, 276, 279


class Touch(MotionEvent):
    _count = 0

    def __init__(self, x: float, y: float) -> None:
        Touch._count += 1
        super().__init__("test", Touch._count, place(x, y), is_touch=True, type_id="touch")
        self.profile = ["pos"]

    def depack(self, args: Any) -> None:
        self.sx, self.sy = args["x"], args["y"]
        super().depack(args)


def place(x: float, y: float) -> dict[str, float]:
    return {"x": x / (Window.width - 1), "y": y / (Window.height - 1)}


class Driver:
    """One running app in a window of this size. `close` it."""

    def __init__(self, app: Any, size: tuple[int, int] = (390, 844), font_scale: float = 1.0) -> None:
        Metrics.fontscale = font_scale
        Window.size = size
        self.app = app
        app._run_prepare()
        EventLoop.ensure_window()
        EventLoop.start()
        self.frames(6)

    def close(self) -> None:
        root = self.app.root
        self.app.stop()
        stopTouchApp()
        root.clear_widgets()  # a page that listens to the window stops when it is taken out
        for child in Window.children[:]:
            Window.remove_widget(child)
        EventLoop.touches.clear()
        Metrics.fontscale = 1.0

    def frames(self, count: int = 2) -> None:
        """So many turns of the event loop. Drawing, which takes the most time, is left to `grab`."""
        for _ in range(count):
            Clock.tick()
            EventLoop.dispatch_input()
            Builder.sync()
            Clock.tick_draw()
            Builder.sync()

    def until(self, true: Callable[[], bool], frames: int = 2000) -> None:
        """Run frames until something holds; an AssertionError if it never does."""
        import time

        for _ in range(frames):
            if true():
                return
            EventLoop.idle()
            time.sleep(0.001)
        raise AssertionError("it did not happen")

    def centre(self, widget: Widget) -> tuple[float, float]:
        return widget.to_window(*widget.center)  # type: ignore[no-any-return]

    def tap(self, target: Widget | str | tuple[float, float]) -> None:
        """Tap a place, a widget, or the widget that says this text; scrolls to it first as a person would."""
        if isinstance(target, str):
            target = self.says(target)
        if isinstance(target, Widget):
            self.bring(target)
            target = self.centre(target)
        touch = Touch(*target)
        EventLoop.post_dispatch_input("begin", touch)
        self.frames(1)
        EventLoop.post_dispatch_input("end", touch)
        self.frames(4)

    def bring(self, widget: Widget) -> None:
        from ui.widgets.reach import scroll_into_view

        scroll_into_view(widget)
        self.frames(3)

    def drag(self, start: tuple[float, float], end: tuple[float, float], steps: int = 8) -> None:
        touch = Touch(*start)
        EventLoop.post_dispatch_input("begin", touch)
        self.frames(1)
        for step in range(1, steps + 1):
            share = step / steps
            touch.move(place(*(a + (b - a) * share for a, b in zip(start, end, strict=True))))
            EventLoop.post_dispatch_input("update", touch)
            self.frames(1)
        EventLoop.post_dispatch_input("end", touch)
        self.frames(3)

    def pinch(self, start: tuple[float, float], end: tuple[float, float], by: float, steps: int = 6) -> None:
        """Two fingers put down at two places and moved apart along x by so much, half of it each."""
        touches = [Touch(*start), Touch(*end)]
        for touch in touches:
            EventLoop.post_dispatch_input("begin", touch)
            self.frames(1)
        for step in range(1, steps + 1):
            moved = 0.5 * by * step / steps
            for touch, (x, y), sign in zip(touches, (start, end), (-1, 1), strict=True):
                touch.move(place(x + sign * moved, y))
                EventLoop.post_dispatch_input("update", touch)
            self.frames(1)
        for touch in touches:
            EventLoop.post_dispatch_input("end", touch)
        self.frames(3)

    def type(self, text: str) -> None:
        for character in text:
            Window.dispatch("on_key_down", ord(character), 0, character, [])
            Window.dispatch("on_textinput", character)
            Window.dispatch("on_key_up", ord(character), 0)
        self.frames(3)

    def key(self, code: int, times: int = 1, modifiers: tuple[str, ...] = ()) -> None:
        for _ in range(times):
            Window.dispatch("on_key_down", code, 0, None, list(modifiers))
            Window.dispatch("on_key_up", code, 0)
        self.frames(3)

    def fill(self, field: Any, text: str) -> None:
        """Tap a field, clear it and type."""
        self.tap(field.input)
        self.key(END)
        self.key(BACKSPACE, times=len(field.input.text))
        self.type(text)

    def widgets(self, kind: type | tuple[type, ...] = Widget) -> list[Any]:
        return [widget for widget in self.app.root.walk() if isinstance(widget, kind)]

    def texts(self) -> list[str]:
        return [widget.text for widget in self.app.root.walk() if getattr(widget, "text", "")]

    def reads(self, part: str) -> bool:
        """True if some text on the screen holds these words."""
        return any(part in text for text in self.texts())

    def says(self, text: str) -> Widget:
        """The widget that says exactly this, else the first that holds it."""
        exact: Iterator[Widget] = (w for w in self.app.root.walk() if getattr(w, "text", None) == text)
        found = next(exact, None) or next(
            (w for w in self.app.root.walk() if text in (getattr(w, "text", "") or "")), None
        )
        assert found is not None, f"nothing on the screen says {text!r}; it says {self.texts()}"
        return found

    def field(self, label: str) -> Any:
        """The entry with this label."""
        found = [w for w in self.app.root.walk() if getattr(w, "label", None) == label]
        assert found, f"there is no field {label!r}"
        return found[0]

    def focused(self) -> Widget | None:
        return next((w for w in self.app.root.walk() if isinstance(w, FocusBehavior) and w.focus), None)

    def grab(self) -> np.ndarray:
        """The window as (rows, columns, 4) bytes, top row first."""
        self.frames(2)
        width, height = (int(v) for v in Window.size)
        Window.dispatch("on_draw")
        raw = glReadPixels(0, 0, width, height, GL_RGBA, GL_UNSIGNED_BYTE)
        return np.frombuffer(raw, np.uint8).reshape(height, width, 4)[::-1]

    def save(self, path: Any) -> None:
        from PIL import Image

        Image.fromarray(np.ascontiguousarray(self.grab()[..., :3])).save(path)
