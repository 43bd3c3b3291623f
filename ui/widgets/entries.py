"""Entries: a label, the line to type on, what is allowed said before it is broken, and the fault beside it when it is.

An entry keeps what was typed when it is wrong and gives nothing to on_value then; on_fault is called with the sentence.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from datetime import date
from typing import Any

from kivy.metrics import sp
from kivy.properties import StringProperty
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.widget import Widget

from ui.measures import Measure, plain_measure
from ui.theme import space, theme
from ui.widgets.buttons import PlainButton
from ui.widgets.text import Fixed, Text, plain
from ui.widgets.typing import Line, NumberLine, date_text, parse_date, parse_number

_THOUSANDS = re.compile(r"-?[0-9]{1,3}[.][0-9]{3}")  # a comma typed as a thousands mark has become a decimal point


class Entry(BoxLayout):
    """What all entries share: label, line, unit, hint, fault. Subclasses set `value` before."""

    value: Any = None
    label = StringProperty()
    fault = StringProperty()

    def __init__(
        self,
        label: str,
        line: Line,
        *,
        unit: str = "",
        hint: str = "",
        on_value: Callable[[Any], None] | None = None,
        on_fault: Callable[[str], None] | None = None,
    ) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0, spacing=space(0.5), label=label)
        self.input, self.on_value, self.on_fault = line, on_value, on_fault
        self._showing = False
        self._begun_at: Any = self.value
        self._held = ""  # said when the person leaves: it may be the beginning of something right
        self.add_widget(Text(label, role="label", tone="muted"))
        row = BoxLayout(size_hint_y=None, height=line.height, spacing=space(1))
        row.add_widget(line)
        self.unit = Fixed(unit, role="body", tone="muted", halign="right")
        if unit:
            holder = BoxLayout(orientation="vertical", size_hint_x=None)
            holder.add_widget(Widget())
            holder.add_widget(self.unit)
            holder.add_widget(Widget(size_hint_y=None, height=(line.height - 1.26 * theme.size("value")) * 0.4 + sp(1)))
            self.unit.bind(width=lambda _, width: setattr(holder, "width", width))
            self.unit.bind(width=lambda _, width: line.make_room(width + space(1)))
            row.add_widget(holder)
        self.add_widget(row)
        self.fault_text = Text("", role="label", tone="stop")
        self.add_widget(self.fault_text)
        self.hint = Text(hint, role="small", tone="muted")
        self.add_widget(self.hint)
        self.bind(minimum_height=self.setter("height"))
        line.bind(text=self._typed, focus=self._left)

    def _typed(self, _: Any, text: str) -> None:
        if not self._showing:
            self._held = ""
            self._read(text)

    def _left(self, _: Any, focused: bool) -> None:
        if focused:
            self._begun_at = self.value
        else:
            if self._held:
                self._say_fault(self._held)
            self.leave()

    def leave(self) -> None:
        """The person has left the line."""

    def _read(self, text: str) -> None:
        raise NotImplementedError

    def _accept(self, value: Any) -> None:
        self.value = value
        self._say_fault("")
        if self.on_value is not None:
            self.on_value(value)

    def _say_fault(self, sentence: str) -> None:
        self.fault = sentence
        self.fault_text.text = plain(sentence)
        self.input.mark(bool(sentence))
        if self.on_fault is not None:
            self.on_fault(sentence)

    def hold(self, sentence: str) -> None:
        """Like refuse, but said only when the person leaves the line."""
        self.refuse(sentence)
        self._say_fault("")
        if self.input.focus:
            self._held = sentence
        else:
            self._say_fault(sentence)

    def stands(self, value: Any) -> bool:
        """True if what was typed wrongly is to stay for correction: nothing else came from elsewhere."""
        return bool(self.fault or self._held) and value == self.value

    def refuse(self, sentence: str) -> None:
        """Say why what was typed is not taken. The value goes back to what it was before the person began to type:
        the beginning of a wrong number is not a value."""
        self._say_fault(sentence)
        if self.value != self._begun_at:
            self.value = self._begun_at
            if self.on_value is not None:
                self.on_value(self.value)

    def _put(self, text: str) -> None:
        self._showing = True
        self.input.text = text
        self._showing = False
        self.input.cursor = (0, 0)


class NumberEntry(Entry):
    """A number in a unit. low, high and usual are in the stored unit; on_value gets the stored value or None.

    usual: outside it, if the number read in the measure's other unit would be usual, it asks which was meant.
    """

    def __init__(
        self,
        label: str,
        value: float | None = None,
        *,
        measure: Measure | None = None,
        low: float | None = None,
        high: float | None = None,
        usual: tuple[float, float] | None = None,
        why: str = "",
        also: Callable[[float], str] | None = None,
        **keywords: Any,
    ) -> None:
        self.measure = measure or plain_measure("")
        self.low, self.high, self.usual, self.value = low, high, usual, value
        self.why, self._also = why, also
        self._question: BoxLayout | None = None
        super().__init__(label, NumberLine(), unit=self.measure.unit, **keywords)
        self._agreed: float | None = None
        self.input.bind(on_refused=self._refused)
        self.show(value)

    def show(self, value: float | None) -> None:
        """Show a value that came from elsewhere; what is being typed and means the same is left alone."""
        if self.stands(value):
            return  # what was typed wrongly stays to be corrected
        self.value = value
        try:
            typed = parse_number(self.input.text)
        except ValueError:
            typed = None
        same = value is not None and typed is not None and abs(self.measure.stored(typed) - value) < 1e-9
        if not same and not (value is None and not self.input.text):
            self._put("" if value is None else self.measure.typed(value))
            self._drop_question()
            self._say_fault("")
        self._say_hint()

    def _say_hint(self) -> None:
        allowed = self._range_text()
        beside = self._also(self.value) if self._also is not None and self.value is not None else ""
        self.hint.text = ". ".join(part for part in (beside, allowed, self.why) if part)

    def _range_text(self) -> str:
        m = self.measure
        if self.low is None or self.high is None:
            return ""
        return f"{m.text(self.low)} to {m.with_unit(self.high)}"

    def _refused(self, _: Any, typed: str) -> None:
        shown = typed.strip() or "A space"
        self.fault_text.text = plain(f"{shown} was not taken: only digits and a decimal point or comma.")

    def _read(self, text: str) -> None:
        self._drop_question()
        try:
            number = parse_number(text)
        except ValueError as error:
            self.hold(str(error))
            return
        if number is None:
            self._accept(None)
            return
        if self.measure.decimals == 0 and _THOUSANDS.fullmatch(text.strip()):
            whole = text.strip().replace(".", "")
            self.refuse(
                f"{text.strip()} could be {number:g} or {whole}. Write {whole} without a mark if that is meant."
            )
            return
        stored = self.measure.stored(number)
        meant = self._meant_in_other_unit(number)
        if not self._allowed(stored):
            sentence = f"{self._range_text()} can be used here; {text.strip()} {self.measure.unit} was typed."
            begins = self.low is not None and 0 <= stored < self.low and self.measure.other is None
            (self.hold if begins else self.refuse)(sentence)
            if meant is not None:
                self._ask(number, meant, may_be_right=False)
        elif meant is not None and self._agreed != number:
            self.refuse(f"{number:g} {self.measure.unit} is not taken until you say which unit is meant.")
            self._ask(number, meant, may_be_right=True)
        else:
            self._accept(stored)
            self._say_hint()

    def _allowed(self, stored: float) -> bool:
        # half a unit in the last shown place: the range as shown may be typed
        slack = abs(self.measure.stored(1.0) - self.measure.stored(0.0)) * 0.5 * 10**-self.measure.decimals
        too_low = self.low is not None and stored < self.low and self.low - stored > slack
        too_high = self.high is not None and stored > self.high and stored - self.high > slack
        return not too_low and not too_high

    def _meant_in_other_unit(self, number: float) -> float | None:
        """What the number would be in the unit it may have been meant in, where only that is usual."""
        other = self.measure.other
        low, high = self.usual or (self.low, self.high)
        if other is None or low is None or high is None or low <= self.measure.stored(number) <= high:
            return None
        meant = other.stored(number)
        return meant if low <= meant <= high else None

    def _ask(self, number: float, meant: float, *, may_be_right: bool) -> None:
        unit = self.measure.other.unit if self.measure.other is not None else ""
        here, other = f"{number:g} {self.measure.unit}", f"{number:g} {unit}"
        self._question = BoxLayout(orientation="vertical", size_hint_y=None, height=0, spacing=space(1))
        self._question.bind(minimum_height=self._question.setter("height"))
        words = f"{here} is unusual here. Was {other} meant?"
        self._question.add_widget(Text(words, role="label", tone="caution"))
        self._question.add_widget(PlainButton(f"Yes, {other}", lambda: self._take_other(meant)))
        if may_be_right:
            self._question.add_widget(PlainButton(f"No, {here} is right", lambda: self._keep(number)))
        self.add_widget(self._question)

    def _take_other(self, stored: float) -> None:
        self._drop_question()
        self._put(self.measure.typed(stored))
        self._accept(stored)
        self._say_hint()

    def _keep(self, number: float) -> None:
        self._agreed = number
        self._drop_question()
        self._accept(self.measure.stored(number))
        self._say_hint()

    def _drop_question(self) -> None:
        if self._question is not None:
            self.remove_widget(self._question)
            self._question = None


class DateEntry(Entry):
    """A date, typed in any common way; day before month, shown with the month as a word."""

    def __init__(
        self,
        label: str,
        value: date | None = None,
        *,
        latest: date | None = None,
        why: str = "",
        today: Callable[[], date] = date.today,
        **keywords: Any,
    ) -> None:
        self.value, self.latest, self._today = value, latest, today
        hint = "For example 12 Nov 2026, or today"
        super().__init__(label, Line(), hint=f"{hint}. {why}" if why else hint, **keywords)
        self.show(value)

    def show(self, value: date | None) -> None:
        """Show a date that came from elsewhere."""
        if self.stands(value):
            return
        try:
            same = parse_date(self.input.text, self._today) == value
        except ValueError:
            same = value is None
        self.value = value
        if not same:
            self._put("" if value is None else date_text(value))
            self._say_fault("")

    def leave(self) -> None:
        """Show the date as it was understood."""
        if self.value is not None and not self.fault:
            self._put(date_text(self.value))

    def _read(self, text: str) -> None:
        try:
            value = parse_date(text, self._today)
        except ValueError as error:
            self.hold(str(error))
            return
        if value is not None and self.latest is not None and value > self.latest:
            self.refuse(f"{date_text(value)} is after {date_text(self.latest)}, the latest that can be used here.")
            return
        self._accept(value)


class TextEntry(Entry):
    """Words."""

    def __init__(self, label: str, value: str = "", *, longest: int = 80, **keywords: Any) -> None:
        self.value, self.longest = value, longest
        super().__init__(label, Line(), **keywords)
        self.show(value)

    def show(self, value: str | None) -> None:
        """Show words that came from elsewhere."""
        self.value = value or ""
        if self.input.text != self.value and not self.fault:
            self._put(self.value)

    def _read(self, text: str) -> None:
        if len(text) > self.longest:
            self.refuse(f"At most {self.longest} letters fit here; {len(text)} were typed.")
            return
        self._accept(text)
