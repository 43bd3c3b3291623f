"""The trip ribbon: the door-to-door trip as a silhouette of altitude against time, with one layer on top.

`lay_ribbon` gives a Ribbon: its drawing, and what a finger dragged along it needs, `minute_at`, `read_at` and `scrub`.
The silhouette and the layer are drawn from the same arrays that `read_at` reads, so the line of text above the ribbon
and the drawing cannot disagree. The same layout is painted on screen and on paper.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from planner.charts.layout import (
    Array,
    Axis,
    Band,
    Box,
    Dash,
    Drawing,
    Item,
    Marker,
    Measure,
    Polyline,
    Role,
    Text,
    finite_runs,
    fitting,
    nice_ticks,
    rule,
    without_straight_points,
)
from planner.charts.timescale import LONG_MIN, TimeScale, time_scale

SILHOUETTE_SHARE = 0.72  # of the plot's height, for the highest point
LEAST_PEAK_M = 1500.0  # a trip over flat ground is drawn flat
LABEL_GAP = 5.0
DAY_MIN = 1440.0
READ_TOLERANCE_MIN = 1e-6


@dataclass(frozen=True)
class RibbonPart:
    """One part: its wordings from long to short, and what may stand below it (a clock time)."""

    labels: tuple[str, ...]
    start_min: float
    duration_min: float
    start_text: str = ""


@dataclass(frozen=True, eq=False)
class Layer:
    """What a step lays over the silhouette; arrays of shape (points,) over `minutes`, NaN where not known.

    median with low and high (the spread), or alone; stress: a second, dotted line (the case that is late); threshold:
    a dashed line with its words. text(value) gives a tick's number without its unit; unit stands once above the axis.
    least and most: values the axis must at least reach.
    """

    minutes: Array
    median: Array
    unit: str
    text: Callable[[float], str]
    low: Array | None = None
    high: Array | None = None
    stress: Array | None = None
    threshold: float | None = None
    threshold_text: str = ""
    least: float | None = None
    most: float | None = None
    stepped: bool = False  # each value holds until the next moment, the last to the end of the trip


@dataclass(frozen=True)
class Reading:
    """Every layer at one moment; None where it is not known."""

    minute: float
    part: int
    altitude_m: float | None
    median: float | None
    low: float | None
    high: float | None
    stress: float | None


@dataclass(frozen=True, eq=False)
class Ribbon:
    """A laid-out ribbon. `drawing` is painted once; `scrub` gives the few items that move with the finger."""

    drawing: Drawing
    scale: TimeScale
    shortened: bool
    _minutes: Array
    _altitude_m: Array
    _layer: Layer | None
    _axis: Axis | None
    _altitude_axis: Axis
    _plot: tuple[float, float]
    _size: float

    def minute_at(self, x: float) -> float:
        """Minute since the start at a horizontal position; outside the plot the nearest end."""
        return self.scale.minute(x)

    def part_at(self, minute: float) -> int:
        """Index of the part that contains a minute; at a boundary the one that begins."""
        last = len(self.scale.minutes) - 2
        return int(np.clip(np.searchsorted(self.scale.minutes, minute + READ_TOLERANCE_MIN, side="right") - 1, 0, last))

    def read_at(self, minute: float) -> Reading:
        """What the ribbon shows at a minute, by the interpolation that draws it."""
        minute = float(np.clip(minute, self.scale.minutes[0], self.scale.minutes[-1]))
        layer = self._layer
        values: dict[str, float | None] = dict.fromkeys(("median", "low", "high", "stress"))
        if layer is not None:
            for name in values:
                array = getattr(layer, name)
                values[name] = None if array is None else _read(layer.minutes, array, minute, layer.stepped)
        altitude = _read(self._minutes, self._altitude_m, minute, False)
        return Reading(minute, self.part_at(minute), altitude, **values)

    def scrub(self, minute: float) -> tuple[Item, ...]:
        """The scrub line at a minute and the ring on the layer, or on the silhouette where there is no layer."""
        reading = self.read_at(minute)
        x = self.scale.at(reading.minute)
        items: list[Item] = [rule(x, *_span(self._plot, x), role="ink", width=1.2)]
        if self._axis is not None and reading.median is not None:
            items.append(Marker(x, self._axis.at(reading.median), self._size * 0.42, "ink", "ring"))
        elif self._axis is None and reading.altitude_m is not None:
            items.append(Marker(x, self._altitude_axis.at(reading.altitude_m), self._size * 0.42, "ink", "ring"))
        return tuple(items)


def lay_ribbon(
    parts: Sequence[RibbonPart],
    minutes: Array,
    altitude_m: Array,
    layer: Layer | None = None,
    *,
    width: float,
    height: float,
    text_size: float,
    measure: Measure,
    altitude_text: Callable[[float], str] | None = None,
    unknown_text: str = "?",
    shortened_text: str = "",
    day_text: Callable[[int], str] | None = None,
) -> Ribbon:
    """Lay out the ribbon of a trip with at least one part.

    minutes and altitude_m have shape (points,), NaN where the altitude is not known: there a pale box with unknown_text
    stands. day_text(n) names the days of a stay, where there is room for them. altitude_text(m), where there is no
    layer, writes each plateau's height. shortened_text is put at the lower left where any part is shortened. Nothing
    reaches outside width and height, and no two labels overlap.
    """
    line = text_size * 1.35
    has_clock = any(part.start_text for part in parts)
    says_short = bool(shortened_text) and any(part.duration_min > LONG_MIN for part in parts)
    bottom = line * (1.15 + has_clock + says_short) + 2.0
    top = height - (1.7 * text_size if layer is not None else text_size)
    axis = None if layer is None else _layer_axis(layer, bottom, top)
    ticks = [] if axis is None or layer is None else _ticks(layer, axis)
    gutter = 2.0 + max((measure(text, text_size) + LABEL_GAP for _, text in ticks), default=0.0)
    right = width - 2.0
    end = parts[-1].start_min + parts[-1].duration_min
    scale = time_scale([part.start_min for part in parts], end, gutter, right)
    altitude_axis = _altitude_axis(altitude_m, bottom, top)

    items: list[Item] = []
    items += _silhouette(scale, minutes, altitude_m, altitude_axis)
    items += _unknown(scale, parts, minutes, altitude_m, bottom, top, text_size, measure, unknown_text)
    if layer is None and altitude_text is not None:
        items += _heights(scale, parts, minutes, altitude_m, altitude_axis, text_size, measure, altitude_text)
    if layer is not None and axis is not None:
        items += _layer(layer, axis, scale, ticks, gutter, right, text_size, measure, top + text_size)
    items += _part_axis(scale, parts, bottom, text_size, line, measure, day_text)
    if says_short:
        items.append(Text(shortened_text, gutter, line * 0.5, text_size * 0.9, "muted"))
    return Ribbon(
        Drawing(width, height, tuple(items)), scale, any(scale.shortened), minutes, altitude_m, layer, axis,
        altitude_axis, (bottom, top), text_size,
    )  # fmt: skip


def _span(plot: tuple[float, float], x: float) -> tuple[float, float, float]:
    bottom, top = plot
    return bottom, x, top


def _read(minutes: Array, values: Array, minute: float, stepped: bool) -> float | None:
    if stepped:
        index = int(np.clip(np.searchsorted(minutes, minute, side="right") - 1, 0, len(minutes) - 1))
        value = float(values[index])
    else:
        value = float(np.interp(minute, minutes, values))
    return value if np.isfinite(value) else None


def _altitude_axis(altitude_m: Array, bottom: float, top: float) -> Axis:
    known = altitude_m[np.isfinite(altitude_m)]
    low = min(0.0, float(known.min())) if known.size else 0.0
    peak = max(LEAST_PEAK_M, float(known.max()) if known.size else 0.0)
    return Axis(low, peak, bottom, bottom + (top - bottom) * SILHOUETTE_SHARE)


def _layer_axis(layer: Layer, bottom: float, top: float) -> Axis:
    arrays = [a for a in (layer.median, layer.low, layer.high, layer.stress) if a is not None]
    values = np.concatenate([a[np.isfinite(a)] for a in arrays])
    more = [v for v in (layer.threshold, layer.least, layer.most) if v is not None]
    values = np.concatenate([values, np.array(more)])
    low, high = (float(values.min()), float(values.max())) if values.size else (0.0, 1.0)
    room = 0.06 * (high - low) or 0.5
    low_end = low if layer.least is not None and low >= layer.least else low - room
    return Axis(low_end, high + room, bottom, top)


def _ticks(layer: Layer, axis: Axis) -> list[tuple[float, str]]:
    return [(axis.at(float(v)), layer.text(float(v))) for v in nice_ticks(axis.low, axis.high, 4)]


def _silhouette(scale: TimeScale, minutes: Array, altitude_m: Array, axis: Axis) -> list[Item]:
    x, y = scale.of(minutes), axis.of(altitude_m)
    return [_band(x[run], np.full(run.stop - run.start, axis.start), y[run], "silhouette") for run in finite_runs(y)]


def _unknown(
    scale: TimeScale, parts: Sequence[RibbonPart], minutes: Array, altitude_m: Array,
    bottom: float, top: float, size: float, measure: Measure, words: str,
) -> list[Item]:  # fmt: skip
    items: list[Item] = []
    for part in parts:
        end = part.start_min + part.duration_min
        inside = altitude_m[(minutes > part.start_min) & (minutes < end)]
        if inside.size and np.isfinite(inside).any():
            continue
        if not inside.size and np.isfinite(np.interp([part.start_min, end], minutes, altitude_m)).all():
            continue
        x0, x1 = scale.at(part.start_min), scale.at(end)
        items.append(Box(x0, bottom, x1 - x0, (top - bottom) * 0.25, "grid"))
        text = fitting((words, "?"), size, x1 - x0 - LABEL_GAP, measure)
        if text:
            items.append(Text(text, (x0 + x1) / 2, bottom + (top - bottom) * 0.125, size, "muted", "middle"))
    return items


def _heights(
    scale: TimeScale, parts: Sequence[RibbonPart], minutes: Array, altitude_m: Array,
    axis: Axis, size: float, measure: Measure, text_of: Callable[[float], str],
) -> list[Item]:  # fmt: skip
    items: list[Item] = []
    last_right = -np.inf
    for part in parts:
        end = part.start_min + part.duration_min
        inside = altitude_m[(minutes > part.start_min) & (minutes < end)]
        if not np.isfinite(inside).any():
            continue
        peak = float(np.nanmax(inside))
        words, x = text_of(peak), (scale.at(part.start_min) + scale.at(end)) / 2
        half = measure(words, size) / 2
        if 2 * half <= scale.at(end) - scale.at(part.start_min) and x - half > last_right:
            items.append(Text(words, x, axis.at(peak) + size * 0.8, size, "muted", "middle"))
            last_right = x + half + LABEL_GAP
    return items


def _layer(
    layer: Layer, axis: Axis, scale: TimeScale, ticks: list[tuple[float, str]], left: float, right: float,
    size: float, measure: Measure, unit_y: float,
) -> list[Item]:  # fmt: skip
    items: list[Item] = [Text(layer.unit, 2.0, unit_y, size, "muted")]
    for y, text in ticks:
        items += [rule(left, y, right, y), Text(text, left - LABEL_GAP, y, size, "muted", "right")]
    x = scale.of(layer.minutes)
    if layer.low is not None and layer.high is not None:
        low, high = axis.of(layer.low), axis.of(layer.high)
        items += [_band(x[run], low[run], high[run], "data_soft") for run in finite_runs(low, high)]
    if layer.stress is not None:
        items += _line(x, axis.of(layer.stress), layer.stepped, right, "stop", 1.4, "dotted")
    items += _line(x, axis.of(layer.median), layer.stepped, right, "data", 1.8)
    if layer.threshold is not None:
        y = axis.at(layer.threshold)
        items.append(Polyline(np.array([[left, y], [right, y]]), "caution", 1.1, "dashed"))
        unit_right = 2.0 + measure(layer.unit, size) + 2 * LABEL_GAP
        if measure(layer.threshold_text, size) <= right - unit_right:
            items.append(Text(layer.threshold_text, right, unit_y, size, "caution", "right"))
    return items


def _line(x: Array, y: Array, stepped: bool, end: float, role: Role, width: float, dash: Dash = "solid") -> list[Item]:
    if stepped:
        x, y = np.append(np.repeat(x, 2)[1:], end), np.repeat(y, 2)
    points = [np.column_stack([x[run], y[run]]) for run in finite_runs(y)]
    return [Polyline(p[without_straight_points(p[:, 0], p[:, 1])], role, width, dash) for p in points]


def _band(x: Array, low: Array, high: Array, role: Role) -> Band:
    keep = without_straight_points(x, low, high)
    return Band(x[keep], low[keep], high[keep], role)


def _days(
    scale: TimeScale, part: RibbonPart, bottom: float, label_y: float, size: float, measure: Measure,
    day_text: Callable[[int], str],
) -> list[Item]:  # fmt: skip
    """A tick at each day of a long stay and the days' names, where each has the room; else nothing."""
    days = int(np.ceil(part.duration_min / DAY_MIN))
    edges = np.minimum(part.start_min + DAY_MIN * np.arange(days + 1), part.start_min + part.duration_min)
    x = scale.of(edges)
    names = [day_text(number + 1) for number in range(days)]
    room = float(x[1] - x[0]) - 2 * LABEL_GAP
    if days < 2 or max(measure(name, size) for name in names) > room:
        return []
    items: list[Item] = [rule(float(one), bottom, float(one), bottom + 4.0, "muted", 0.8) for one in x[1:-1]]
    for name, left, right in zip(names, x[:-1], x[1:], strict=True):
        if measure(name, size) <= right - left - LABEL_GAP:
            items.append(Text(name, float(left + right) / 2, label_y, size, "muted", "middle"))
    return items


def _part_axis(
    scale: TimeScale, parts: Sequence[RibbonPart], bottom: float, size: float, line: float, measure: Measure,
    day_text: Callable[[int], str] | None,
) -> list[Item]:  # fmt: skip
    items: list[Item] = [rule(float(scale.x[0]), bottom, float(scale.x[-1]), bottom, "muted", 0.8)]
    items += [rule(float(x), bottom, float(x), bottom - 4.0, "muted", 0.8) for x in scale.x]
    label_y = bottom - line * 0.75
    last_right = -np.inf
    for number, part in enumerate(parts):
        x0, x1 = float(scale.x[number]), float(scale.x[number + 1])
        days = [] if day_text is None else _days(scale, part, bottom, label_y, size, measure, day_text)
        items += days
        words = fitting((*part.labels, str(number + 1)), size, x1 - x0 - 3.0, measure)
        if words and not days:
            items.append(Text(words, (x0 + x1) / 2, label_y, size, "muted", "middle"))
        if scale.shortened[number]:
            middle = (x0 + x1) / 2
            items += [rule(middle + d - 2.0, bottom - 3.0, middle + d + 2.0, bottom + 3.0, "ink", 1.0) for d in (-2, 2)]
        if part.start_text and x0 > last_right:
            half = measure(part.start_text, size) / 2
            left = max(min(x0 - half, float(scale.x[-1]) - 2 * half), 0.0)  # whole within the ribbon's ends
            if left > last_right:
                items.append(Text(part.start_text, left, label_y - line, size, "muted"))
                last_right = left + 2 * half + LABEL_GAP
    return items
