"""The kit in words for the screen: chances, what is still open, readings at which to turn back."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any

from planner.units import charge_to_read, gauge_to_read
from ui.widgets.text import plain


def one_in(chance: float) -> str:
    """A chance as a person says it."""
    if chance <= 0:
        return "Fewer than 1 trip in 10,000"
    if chance > 0.5:
        return f"{100 * chance:.0f} of 100 trips"
    return f"1 trip in {_two_digits(1 / chance):,}"


def between(low: float, high: float) -> str:
    """The 95 % interval of a chance."""
    return f"95 %: {_share(low)} to {_share(high)}"


def _share(chance: float) -> str:
    return "1 in 10,000 or rarer" if chance < 1e-4 else f"1 in {_two_digits(1 / chance):,}"


def _two_digits(value: float) -> int:
    """The number with no more digits than the trips played can tell."""
    digits = 2 if value >= 1000.0 else 1 if value >= 100.0 else 0
    return int(round(value, -digits))


def still_open(undecided: Iterable[str]) -> str:
    """How many flows are open, and for what, each activity once."""
    counts: dict[str, int] = {}
    for one in undecided:
        activity = one.rpartition(": ")[2]
        counts[activity] = counts.get(activity, 0) + 1
    words = {"rest": "at rest", "walking": "walking", "asleep": "asleep"}
    each = ", ".join(f"{count} {words.get(activity, activity)}" for activity, count in counts.items())
    total = sum(counts.values())
    return f"{total} {'flow is' if total == 1 else 'flows are'} still open: {each}."


def turn_back_rows(readings: Iterable[Any], gauge_unit: str) -> list[tuple[str, str, str, str]]:
    """(where, what is read, value, id of the first part) with places that read the same together."""
    alike: dict[tuple[str, str], list[Any]] = {}
    for one in readings:
        values = [f"{name} {gauge_to_read(bar, gauge_unit):,.0f} {gauge_unit}" for name, bar in one.gauge_bar]
        details = []
        if one.gauge_bar:
            cold = f"cylinder at {one.temperature_c:g} °C"
            details.append(cold + (f", and {one.fresh_cylinders} full beside it" if one.fresh_cylinders else ""))
        if one.liquid_kg is not None:
            values.append(f"{_up(one.liquid_kg):.1f} kg liquid")
        if one.battery_percent is not None:
            details.append("all packs together")
            short = one.battery_percent > 100.0
            values.append("more than full" if short else f"{charge_to_read(one.battery_percent):.0f} % charge")
            if short:
                details.append("charge on the way, or take another pack")
        alike.setdefault((", ".join(details), ", ".join(values)), []).append(one)
    return [
        (f"Starting: {', '.join(dict.fromkeys(one.name for one in points))}", detail, value, points[0].part_id)
        for (detail, value), points in alike.items()
    ]


def item_rows(items: Sequence[Any]) -> list[tuple[str, str, str]]:
    """(count and name, where and by whom, mass) with lines that are alike together."""
    alike: dict[tuple[str, str, str], list[str]] = {}
    for item in items:
        mass = f"{item.mass_kg:.1f} kg" if item.each_kg else ""
        alike.setdefault((f"{item.count} × {item.what}", item.brought_by, mass), []).append(item.where)
    return [(plain(what), plain(f"{', '.join(places)} · {by}"), mass) for (what, by, mass), places in alike.items()]


def _up(kilograms: float) -> float:
    """A mass that must not be passed downwards: rounded up to 0.1 kg."""
    return -(-kilograms * 10.0 // 1.0) / 10.0
