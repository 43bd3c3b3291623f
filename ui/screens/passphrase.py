"""The passphrase of the cases: set, change, lock now, and how soon an idle app locks itself."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from kivy.uix.boxlayout import BoxLayout

from ui.widgets.buttons import PlainButton
from ui.widgets.choices import Choice
from ui.widgets.entries import TextEntry
from ui.widgets.rows import Side
from ui.widgets.text import Text

Away = Callable[[Callable[[], None]], None]
WORDS = (
    "With a passphrase nothing about a person can be read in the file, not even a name. Without it nobody can open the "
    "cases again: write it down where it is kept well."
)
IDLE = ((5.0, "5 min"), (15.0, "15 min"), (60.0, "1 h"), (None, "Never"))


def fill_setting(body: BoxLayout, library: Any, away: Away) -> None:
    """Where no passphrase is set: set one."""
    first, again = _secret("Passphrase"), _secret("The same again")
    for widget in (
        Text(WORDS),
        Side(first, again),
        PlainButton("Seal the cases", lambda: _if_alike(first, again, lambda new: away(lambda: library.protect(new)))),
    ):
        body.add_widget(widget)


def fill_changing(body: BoxLayout, library: Any, away: Away, lock: Callable[[], None]) -> None:
    """Where one is set: lock, choose when an idle app locks, or change it."""
    old, first, again = _secret("Passphrase now"), _secret("New passphrase"), _secret("The new one again")

    def change() -> None:
        _if_alike(first, again, lambda new: away(lambda: library.change_passphrase(old.value, new)))

    for widget in (
        PlainButton("Lock now", lock),
        Choice("Lock when nothing is touched for", IDLE, library.lock_after_min, library.choose_lock_after),
        Side(old, first, again),
        PlainButton("Change the passphrase", change),
    ):
        body.add_widget(widget)


def _if_alike(first: TextEntry, again: TextEntry, then: Callable[[str], None]) -> None:
    if not first.value or first.value != again.value:
        again.refuse("Both must be the same, and not empty.")
        return
    then(first.value)


def _secret(label: str) -> TextEntry:
    entry = TextEntry(label, longest=200)
    entry.input.password = True
    return entry
