"""A step's screen as plain text: to be read aloud by what reads text, and to be copied."""

from __future__ import annotations

import re

from kivy.core.clipboard import Clipboard
from kivy.uix.label import Label
from kivy.uix.textinput import TextInput
from kivy.uix.widget import Widget

from ui.screens import STEPS
from ui.screens.screen import Screen
from ui.theme import space
from ui.widgets.buttons import PlainButton, PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.entries import Entry
from ui.widgets.notices import CAUTION
from ui.widgets.paper import PaperView
from ui.widgets.ribbon import DrawingView, RibbonView
from ui.widgets.text import Text, plain

_MARKUP = re.compile(r"\[/?(?:b|i|sub|sup|color[^\]]*)\]")


class TextScreen(Screen):
    """The step shown before, as text."""

    step = "text"
    question = "This step as text"

    def build(self) -> None:
        """The text, and what can be done with it."""
        name = self.session.place.get("text_of", STEPS[0].name)
        self.content = text_of_step(name, self.session)
        self.put(
            PrimaryButton("Copy the text", lambda: Clipboard.copy(self.content)),
            PlainButton("Back to the step", lambda: self.go(name)),
            Text(plain(self.content), line_height=1.15, padding=(0, space(1))),
        )


def text_of_step(name: str, session: object) -> str:
    """Everything a step says, line by line, with the ribbon read in the middle of each part."""
    from ui.screens import screen_class

    screen = screen_class(name)(session, lambda step: None)
    return "\n".join([*_lines(screen), CAUTION])


def _lines(widget: Widget) -> list[str]:
    if isinstance(widget, RibbonView | DrawingView | PaperView):
        return widget.spoken()
    if isinstance(widget, Entry):
        value = widget.input.text or "not entered"
        lines = [f"{widget.label}: {value} {widget.unit.text}".strip()]
        return [*lines, widget.fault] if widget.fault else lines
    if isinstance(widget, Choice):
        chosen = [chip.words for chip in widget.chips if chip.chosen]
        return [f"{widget.label or 'Chosen'}: {', '.join(chosen) or 'not answered'}"]
    if isinstance(widget, Label | TextInput):
        text = _MARKUP.sub("", widget.text).replace("&bl;", "[").replace("&br;", "]").replace("&amp;", "&").strip()
        return [text] if text else []
    lines = []
    for child in reversed(widget.children):
        lines += _lines(child)
    return lines
