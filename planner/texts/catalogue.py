"""The message catalogue of a language: whole sentences by key, with named places, and how it writes numbers and dates.

A catalogue is a TOML file beside this module, named by locale. en_GB is complete; another catalogue holds only what
differs, and what it lacks is taken from the one it names in `base`. A translator copies en_GB.toml and changes the
right-hand sides; nothing is glued from fragments, so the order of words is the translator's.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date, datetime
from functools import lru_cache
from importlib import resources
from typing import Any

from planner.errors import ProfileError

COMPLETE = "en_GB"
_KEYS_APART = {"format", "version", "locale", "base"}


@dataclass(frozen=True, eq=False)
class Texts:
    """Messages of one locale."""

    locale: str
    messages: Mapping[str, str]
    months: tuple[str, ...]

    def say(self, key: str, **values: object) -> str:
        """The message with its named places filled. KeyError for an unknown key or a missing value: a fault in code."""
        return self.messages[key].format(**values)

    def count(self, key: str, number: int, **values: object) -> str:
        """The message for this many things: `key.one` for one, else `key.other`; {number} is filled."""
        form = "one" if number == 1 else "other"
        return self.say(f"{key}.{form}", number=self.number(number), **values)

    def knows(self, key: str) -> bool:
        """Whether there is a message with this key."""
        return key in self.messages

    def number(self, value: float, digits: int = 0) -> str:
        """A number with so many decimals, a leading zero, no trailing zeros, and this locale's separators."""
        text = f"{value:,.{digits}f}"
        if "." in text:
            text = text.rstrip("0").rstrip(".")
        text = "0" if text in {"-0", ""} else text.replace("-", "−")
        swap = {",": self.messages["numbers.thousands"], ".": self.messages["numbers.decimal"]}
        return "".join(swap.get(letter, letter) for letter in text)

    def day(self, day: date | datetime | None) -> str:
        """A date in words of this locale, or the words for a date that is not known."""
        if day is None:
            return self.say("dates.unknown")
        return self.say("dates.day", day=day.day, month=self.months[day.month - 1], year=day.year)

    def moment(self, moment: datetime) -> str:
        """A date with its clock time; the clock is that of the moment's own zone."""
        return self.say("dates.moment", day=self.day(moment), clock=moment.strftime("%H:%M"))

    @property
    def language(self) -> str:
        """The locale as a language tag, such as en-GB."""
        return self.locale.replace("_", "-")


@lru_cache(maxsize=8)
def texts_for(locale: str) -> Texts:
    """The texts of a locale; a locale without a catalogue gets the complete one."""
    known = available()
    name = locale if locale in known else COMPLETE
    table = _read(name)
    while "base" in table and table["base"] != name:
        base = _read(str(table["base"]))
        table = _merged(base, table)
        if "base" not in base:
            break
    months = tuple(str(month) for month in table["dates"]["months"])
    return Texts(name, _flat(table), months)


def available() -> tuple[str, ...]:
    """Locales that have a catalogue."""
    folder = resources.files("planner.texts")
    return tuple(sorted(item.name[:-5] for item in folder.iterdir() if item.name.endswith(".toml")))


def own_keys(locale: str) -> dict[str, str]:
    """The messages that this catalogue itself holds, without those of its base."""
    return _flat(_read(locale))


def _read(name: str) -> dict[str, Any]:
    file = f"texts/{name}.toml"
    try:
        table = tomllib.loads(resources.files("planner.texts").joinpath(f"{name}.toml").read_text(encoding="utf-8"))
    except ValueError as error:
        raise ProfileError(file, "", f"the catalogue cannot be parsed: {error}") from error
    if table.get("format") != "planner-texts" or table.get("version") != 1:
        raise ProfileError(file, "format", 'format = "planner-texts" and version = 1 are expected')
    return table


def _merged(base: dict[str, Any], over: dict[str, Any]) -> dict[str, Any]:
    merged = dict(base)
    for key, value in over.items():
        merged[key] = _merged(base[key], value) if isinstance(value, dict) and key in base else value
    return merged


def _flat(table: Mapping[str, Any], start: str = "") -> dict[str, str]:
    flat: dict[str, str] = {}
    for key, value in table.items():
        if isinstance(value, dict):
            flat |= _flat(value, f"{start}{key}.")
        elif isinstance(value, str) and (start or key not in _KEYS_APART):
            flat[start + key] = value
    return flat
