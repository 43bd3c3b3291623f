"""A paper on the screen: the pages as they will print, as wide as the screen or half by half."""

from __future__ import annotations

from typing import Any

from kivy.clock import Clock
from kivy.graphics import Color, Rectangle
from kivy.graphics.instructions import InstructionGroup
from kivy.metrics import dp
from kivy.uix.stencilview import StencilView
from kivy.uix.widget import Widget

from ui.painter import paint_page
from ui.theme import theme

GAP_DP = 12
LARGER = 1.9  # two halves with an overlap, so that no word is cut in both


class PaperView(Widget):
    """All pages under each other. The page is white in either theme: it shows paper."""

    def __init__(self, **keywords: Any) -> None:
        super().__init__(size_hint_y=None, height=0, **keywords)
        self.paper: Any = None
        self._again = Clock.create_trigger(self._lay_out, -1)
        self.bind(pos=self._again, width=self._again)

    def show(self, paper: Any) -> None:
        """Show another paper (planner.papers.lay_paper)."""
        self.paper = paper
        self._again()

    def spoken(self) -> list[str]:
        """The words of the pages, from the top."""
        if self.paper is None:
            return []
        return [text.text for page in self.paper.pages for text in sorted(page.texts(), key=lambda one: -one.y)]

    def _lay_out(self, *_: Any) -> None:
        self.canvas.clear()
        if self.paper is None or self.width < dp(80):
            self.height = 0
            return
        scale = self.width / self.paper.pages[0].width
        heights = [page.height * scale for page in self.paper.pages]
        self.height = sum(heights) + dp(GAP_DP) * (len(heights) - 1)
        y = self.top
        for page, height in zip(self.paper.pages, heights, strict=True):
            y -= height
            with self.canvas:
                Color(*theme.line)
                Rectangle(pos=(self.x - 1, y - 1), size=(self.width + 2, height + 2))
                Color(1, 1, 1, 1)
                Rectangle(pos=(self.x, y), size=(self.width, height))
            group = InstructionGroup()
            self.canvas.add(group)
            paint_page(group, page, self.x, y, scale)
            y -= dp(GAP_DP)


class PaperFrame(StencilView):
    """A paper as wide as the frame, or `LARGER` with its left or right half in the frame.

    Halves and not a sideways drag: a finger on the pages goes on moving the screen up and down.
    """

    def __init__(self, **keywords: Any) -> None:
        super().__init__(size_hint_y=None, height=0, **keywords)
        self.view = PaperView()
        self.half = ""
        self.add_widget(self.view)
        self.view.bind(height=self.setter("height"))
        self.bind(pos=self._fit, size=self._fit)

    def show_half(self, half: str) -> None:
        """Show "left" or "right" larger, or "" for the whole pages."""
        self.half = half
        self._fit()

    def _fit(self, *_: Any) -> None:
        self.view.width = self.width * (LARGER if self.half else 1.0)
        hidden = self.view.width - self.width if self.half == "right" else 0.0
        self.view.pos = (self.x - hidden, self.y)
