"""Entries bound to paths of the case: they show what stands there, set what is typed, and take the model's range."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from datetime import date
from functools import cache
from typing import Any

from ui.measures import Measure
from ui.widgets.choices import YES_NO, Choice
from ui.widgets.entries import DateEntry, NumberEntry, TextEntry
from ui.widgets.rows import Stack

Get = Callable[[], Any]
Set = Callable[[Any], str]


class Form:
    """Makes entries and keeps them showing what the case says."""

    def __init__(self, session: Any) -> None:
        self.session = session
        self._shown: list[tuple[Any, Get]] = []

    def number(self, path: str, label: str, measure: Measure, **keywords: Any) -> NumberEntry:
        """A number at a path; keywords go to NumberEntry (why, usual, also, low, high)."""
        low, high = self.limits(path)
        keywords = {"low": low, "high": high} | keywords
        entry = NumberEntry(label, self.session.get(path), measure=measure, **self._binding(path, label), **keywords)
        return self.keep(entry, path)

    def date(self, path: str, label: str, **keywords: Any) -> DateEntry:
        """A date at a path."""
        return self.keep(DateEntry(label, self.session.get(path), **self._binding(path, label), **keywords), path)

    def text(self, path: str, label: str, **keywords: Any) -> TextEntry:
        """Words at a path."""
        longest = int(self._schema(path).get("maxLength", 80))
        binding = self._binding(path, label)
        if self._schema(path, nullable=True):
            take = binding["on_value"]
            binding["on_value"] = lambda words: take(words or None)
        return self.keep(TextEntry(label, self.session.get(path) or "", longest=longest, **binding, **keywords), path)

    def choice(self, path: str, label: str, options: Sequence[tuple[Any, str]] = YES_NO, **keywords: Any) -> Choice:
        """One of a few at a path; without options yes, no or not known."""
        choice = Choice(
            label, options, self.session.get(path), lambda v: self.session.choose(path, v, label), **keywords
        )
        return self.keep(choice, path)

    def live(self, signature: Callable[[], Any], fill: Callable[[Live, Form], None], **keywords: Any) -> Live:
        """A group that is made again when what signature() gives changes."""
        group = Live(self.session, signature, fill, **keywords)
        self._shown.append((group, lambda: None))
        return group

    def keep(self, entry: Any, source: str | Get) -> Any:
        """Keep any entry with a `show` showing what stands at a path, or what a function gives."""
        get = (lambda: self.session.get(source)) if isinstance(source, str) else source
        entry.path = source if isinstance(source, str) else ""
        self._shown.append((entry, get))
        return entry

    def forget(self) -> None:
        """Forget all entries: their widgets are gone."""
        self._shown.clear()

    def refresh(self) -> None:
        """Show what the case says now; entries whose place is gone are left to be removed."""
        for entry, get in self._shown:
            try:
                value = get()
            except (IndexError, AttributeError):
                continue
            entry.show(value)

    def limits(self, path: str) -> tuple[float | None, float | None]:
        """Lowest and highest value the case model allows at a path."""
        parent, _, name = path.rpartition(".")
        return model_limits(type(self.session.get(parent)), name)

    def _schema(self, path: str, nullable: bool = False) -> dict[str, Any]:
        parent, _, name = path.rpartition(".")
        choices = _choices(type(self.session.get(parent)), name)
        if nullable:
            return {"null": True} if any(c.get("type") == "null" for c in choices) else {}
        return next((c for c in choices if c.get("type") != "null"), {})

    def _binding(self, path: str, label: str) -> dict[str, Any]:
        def take(value: Any) -> None:
            entry = next((e for e, _ in self._shown if getattr(e, "path", None) == path), None)
            refused = self.session.set(path, value, label)
            if refused and entry is not None:
                entry.refuse(refused)

        return {"on_value": take, "on_fault": lambda sentence: self.session.fault(path, sentence)}


class Live(Stack):
    """A group of entries that is made again when its signature changes, and else only shows what the case says."""

    def __init__(
        self, session: Any, signature: Callable[[], Any], fill: Callable[[Live, Form], None], **keywords: Any
    ) -> None:
        super().__init__(**keywords)
        self._signature, self._fill = signature, fill
        self._seen: Any = object()
        self.form = Form(session)

    def show(self, _: Any = None) -> None:
        """Make again or show."""
        signature = self._signature()
        if signature != self._seen:
            self._seen = signature
            self.clear_widgets()
            self.form.forget()
            self._fill(self, self.form)
        self.form.refresh()


def model_limits(model: Any, name: str) -> tuple[float | None, float | None]:
    """Lowest and highest value a field of a case model allows."""
    schema = next((c for c in _choices(model, name) if c.get("type") != "null"), {})
    low = schema.get("minimum", schema.get("exclusiveMinimum"))
    return low, schema.get("maximum", schema.get("exclusiveMaximum"))


def _choices(model: Any, name: str) -> list[dict[str, Any]]:
    field = _properties(model)[name]
    return list(field.get("anyOf", [field]))


@cache
def _properties(model: Any) -> dict[str, Any]:
    return dict(model.model_json_schema()["properties"])


def today() -> date:
    """The day it is; screens ask here so that tests can set it."""
    return date.today()
