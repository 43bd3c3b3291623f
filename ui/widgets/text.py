"""Text that is always whole: it wraps to its width and takes the height it needs."""

from __future__ import annotations

import re
from typing import Any

from kivy.properties import StringProperty
from kivy.uix.label import Label
from kivy.utils import escape_markup, get_hex_from_color

from ui.theme import FONT, theme

_DIGIT = re.compile(r"\d")


class Text(Label):
    """A paragraph. role: a size of the type scale; tone: a colour token. Markup is on; use `plain` for typed words."""

    role = StringProperty("body")
    tone = StringProperty("ink")

    def __init__(self, text: str = "", role: str = "body", tone: str = "ink", **keywords: Any) -> None:
        keywords.setdefault("halign", "left")
        keywords.setdefault("valign", "middle")
        keywords.setdefault("markup", True)
        if keywords.setdefault("size_hint_y", None) is None:
            keywords.setdefault("height", 0)
        super().__init__(
            text=text,
            role=role,
            tone=tone,
            font_name=FONT,
            font_size=theme.size(role),
            color=theme.colour(tone),
            **keywords,
        )
        self.bind(width=self._wrap, texture_size=self._grow, role=self._restyle, tone=self._restyle)
        self._wrap()

    def _wrap(self, *_: Any) -> None:
        self.text_size = (max(self.width, 1), None)

    def _grow(self, *_: Any) -> None:
        if self.size_hint_y is None:
            self.height = self.texture_size[1] if self.text else 0

    def _restyle(self, *_: Any) -> None:
        self.font_size = theme.size(self.role)
        self.color = theme.colour(self.tone)

    def texture_update(self, *arguments: Any) -> None:
        """Draw the text with no line broken between a number and its unit; `text` itself stays as it was given."""
        if not self.markup or not _DIGIT.search(self.text):
            super().texture_update(*arguments)
            return
        from planner.charts.layout import with_units_kept

        colour = get_hex_from_color(self.disabled_color if self.disabled else self.color)
        self._label.text = f"[color={colour}]{with_units_kept(self.text)}[/color]"
        self._label.refresh()
        self.texture = self._label.texture
        self.texture_size = list(self.texture.size)


class Fixed(Text):
    """A short text on one line that takes the width it needs: a number, a unit."""

    def __init__(self, text: str = "", role: str = "body", tone: str = "ink", **keywords: Any) -> None:
        super().__init__(text, role, tone, size_hint_x=None, **keywords)
        self.bind(texture_size=self._fit)

    def _wrap(self, *_: Any) -> None:
        self.text_size = (None, None)

    def _fit(self, *_: Any) -> None:
        self.width = self.texture_size[0]


def plain(text: str) -> str:
    """Typed or read words made harmless inside markup."""
    return str(escape_markup(text))


def strong(text: str) -> str:
    """Semibold inside a sentence; text is already escaped or ours."""
    return f"[b]{text}[/b]"
