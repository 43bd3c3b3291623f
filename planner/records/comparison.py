"""What differs between two versions of a case, entry by entry and in plain words."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from planner.case import Case

NOT_ENTERED = "not entered"
SECTIONS = {
    "patient": "Patient",
    "measurements": "Measurements",
    "prescription": "Oxygen today",
    "cautions": "Cautions",
    "trip": "Trip",
    "decisions": "Decided oxygen",
    "kit": "Kit",
    "policy": "Choices of the service",
    "display": "Units shown",
    "confirmation": "Confirmation",
    "outcome": "After the trip",
}
UNITS = {
    "years": "years", "cm": "cm", "kg": "kg", "mmhg": "mmHg", "percent": "%", "m": "m", "min": "min", "h": "h",
    "bar": "bar", "c": "°C", "day": "a day",
}  # fmt: skip
_LONG_UNITS = (("_l_min", "L/min"), ("_g_dl", "g/dL"), ("_kg_day", "kg/day"))
_NAMED_BY = ("name", "title", "kind", "size_id", "condition_id", "part_id", "activity")


@dataclass(frozen=True)
class Difference:
    """One entry that is not the same: where it stands in words, and its value before and after."""

    where: str
    before: str
    after: str


def compare(before: Case, after: Case) -> tuple[Difference, ...]:
    """Every entry that differs, in the order of the case. Lists are matched by the ids of what they hold."""
    old, new = before.model_dump(mode="json"), after.model_dump(mode="json")
    found: list[Difference] = []
    for section, title in SECTIONS.items():
        found += _differences((title,), old[section], new[section])
    return tuple(found)


def _differences(where: tuple[str, ...], old: Any, new: Any) -> Iterator[Difference]:
    if old == new:
        return
    if isinstance(old, Mapping) and isinstance(new, Mapping):
        for key in [*old, *(key for key in new if key not in old)]:
            yield from _differences((*where, _words(key)), old.get(key), new.get(key))
    elif isinstance(old, list) and isinstance(new, list) and _holds_entries(old, new):
        yield from _of_lists(where, old, new)
    else:
        before, after = _value(old), _value(new)
        if before == after == NOT_ENTERED:
            return
        if before == after:  # alike as far as numbers are rounded to be read
            before, after = str(old), str(new)
        yield Difference(", ".join(where), before, after)


def _of_lists(where: tuple[str, ...], old: list[Any], new: list[Any]) -> Iterator[Difference]:
    before, after = _by_id(old), _by_id(new)
    for key in [*before, *(key for key in after if key not in before)]:
        name = _name(after[key] if key in after else before[key])
        if key in before and key in after:
            yield from _differences((*where, name), before[key], after[key])
        else:
            there, gone = ("entered", NOT_ENTERED) if key in before else (NOT_ENTERED, "entered")
            yield Difference(", ".join((*where, name)), there, gone)
    order = [key for key in after if key in before]
    if order != [key for key in before if key in after]:
        yield Difference(", ".join((*where, "order")), _order(before, after), _order(after, before))


def _order(one: Mapping[Any, Any], other: Mapping[Any, Any]) -> str:
    return ", ".join(_name(entry) for key, entry in one.items() if key in other)


def _holds_entries(*lists: Sequence[Any]) -> bool:
    return all(isinstance(entry, Mapping) for entries in lists for entry in entries)


def _by_id(entries: list[dict[str, Any]]) -> dict[Any, dict[str, Any]]:
    """Entries by what names them; those alike in that are told apart by their order."""
    found: dict[Any, dict[str, Any]] = {}
    for entry in entries:
        key = (entry.get("part_id"), entry.get("activity"), entry.get("condition_id"), entry.get("kind"),
               entry.get("taken_on"), entry.get("size_id"), entry.get("at_min"))  # fmt: skip
        number = 0
        while (key, number) in found:
            number += 1
        found[key, number] = entry
    return found


def _name(entry: Mapping[str, Any]) -> str:
    """What an entry of a list is called: its name or kind, with its activity and day where it has them."""
    name = next((str(entry[key]).replace("_", " ") for key in _NAMED_BY if entry.get(key)), "entry")
    activity = entry.get("activity")
    more = [str(one) for one in (activity if activity and activity != name else None, entry.get("taken_on")) if one]
    return " ".join((name, *more))


def _words(key: str) -> str:
    """ "age_years" as "age (years)"."""
    for ending, unit in _LONG_UNITS:
        if key.endswith(ending):
            return f"{key.removesuffix(ending).replace('_', ' ')} ({unit})"
    name, _, last = key.rpartition("_")
    return f"{name.replace('_', ' ')} ({UNITS[last]})" if name and last in UNITS else key.replace("_", " ")


def _value(value: Any) -> str:
    if value is None or value == [] or value == "":
        return NOT_ENTERED
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:g}"
    if isinstance(value, list):
        return ", ".join(_value(one) for one in value)
    if isinstance(value, Mapping):
        return ", ".join(f"{_words(key)} {_value(one)}" for key, one in value.items() if one is not None) or NOT_ENTERED
    return str(value)
