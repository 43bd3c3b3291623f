"""The hypoxic challenge test as it ran: SpO2 above, heart rate below, the phases named along one time axis."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from planner.charts.layout import (
    Array,
    Axis,
    Box,
    Drawing,
    Item,
    Measure,
    Polyline,
    Text,
    finite_runs,
    fitting,
    nice_ticks,
    rule,
)

GAP = 5.0
SPO2_SHARE = 0.62  # of the plots' height


@dataclass(frozen=True)
class Phase:
    """A stretch of the test, such as breathing the mixture; shaded ones are those on the mixture."""

    label: str
    start_min: float
    end_min: float
    shaded: bool


def lay_challenge(
    minutes: Array,
    spo2_percent: Array,
    heart_rate_min: Array,
    phases: Sequence[Phase],
    *,
    width: float,
    height: float,
    text_size: float,
    measure: Measure,
    spo2_label: str,
    heart_label: str,
    time_label: str,
    threshold_percent: float | None = None,
    threshold_text: str = "",
    tick_text: Callable[[float], str] = "{:g}".format,
) -> Drawing:
    """Lay out the series of a test with at least one row; arrays of shape (rows,), NaN where not taken.

    The labels carry their units. The heart rate is left out where none was taken.
    """
    line = text_size * 1.35
    bottom, top = 2.2 * line, height - 1.6 * line
    both = bool(np.isfinite(heart_rate_min).any())
    spo2_bottom = bottom + (top - bottom) * (1.0 - SPO2_SHARE) + 0.5 * line if both else bottom
    axis_s = _axis(spo2_percent, threshold_percent, spo2_bottom, top - line)
    axis_h = _axis(heart_rate_min, None, bottom, spo2_bottom - 1.9 * line) if both else None
    ticks = [(axis_s.at(float(v)), tick_text(float(v))) for v in nice_ticks(axis_s.low, min(axis_s.high, 100.0), 4)]
    if axis_h is not None:
        ticks += [(axis_h.at(float(v)), tick_text(float(v))) for v in nice_ticks(axis_h.low, axis_h.high, 3)]
    left = max(measure(text, text_size) for _, text in ticks) + GAP + 2.0
    ends = min(phase.start_min for phase in phases), max(phase.end_min for phase in phases)
    axis_x = Axis(ends[0], max(ends[1], ends[0] + 1.0), left, width - 6.0)

    items: list[Item] = []
    items += _phases(phases, axis_x, (bottom, axis_s.start, axis_s.end, top), text_size, measure)
    for y, text in ticks:
        items += [rule(left, y, axis_x.end, y), Text(text, left - GAP, y, text_size, "muted", "right")]
    x = axis_x.of(minutes)
    items += _series(x, axis_s.of(spo2_percent), 1.8)
    items.append(Text(spo2_label, 2.0, axis_s.end + text_size * 0.8, text_size, "muted"))
    if threshold_percent is not None:
        y = axis_s.at(threshold_percent)
        items.append(Polyline(np.array([[left, y], [axis_x.end, y]]), "caution", 1.1, "dashed"))
        items.append(Text(threshold_text, axis_x.end, axis_s.end + text_size * 0.8, text_size, "caution", "right"))
    if axis_h is not None:
        items += _series(x, axis_h.of(heart_rate_min), 1.2)
        items.append(Text(heart_label, 2.0, axis_h.end + text_size * 0.9, text_size, "muted"))
    items.append(rule(left, bottom, axis_x.end, bottom, "muted", 0.8))
    last_right = -np.inf
    for value in nice_ticks(axis_x.low, axis_x.high, 6):
        words, at = tick_text(float(value)), axis_x.at(float(value))
        half = measure(words, text_size) / 2
        if at - half > last_right and at + half <= width:
            items.append(Text(words, at, bottom - 0.75 * line, text_size, "muted", "middle"))
            last_right = at + half + GAP
    items.append(Text(time_label, axis_x.end, 0.55 * line, text_size, "muted", "right"))
    return Drawing(width, height, tuple(items))


def _axis(values: Array, threshold: float | None, bottom: float, top: float) -> Axis:
    known = values[np.isfinite(values)]
    if threshold is not None:
        known = np.append(known, threshold)
    low, high = (float(known.min()), float(known.max())) if known.size else (0.0, 1.0)
    room = 0.08 * (high - low) or 1.0
    return Axis(low - room, high + room, bottom, top)


def _phases(
    phases: Sequence[Phase], axis: Axis, levels: tuple[float, float, float, float], size: float, measure: Measure
) -> list[Item]:
    bottom, series_bottom, series_top, top = levels
    items: list[Item] = []
    for number, phase in enumerate(phases):
        x0, x1 = axis.at(phase.start_min), axis.at(phase.end_min)
        if phase.shaded:
            items.append(Box(x0, bottom, x1 - x0, series_top - bottom, "silhouette"))
        if number:
            items.append(rule(x0, series_bottom, x0, series_top, "muted", 0.6))
        words = fitting((phase.label,), size, x1 - x0 - GAP, measure)
        if words:
            items.append(Text(words, x0 + 2.0, top + size * 1.1, size, "ink"))
    return items


def _series(x: Array, y: Array, width: float) -> list[Item]:
    keep = np.isfinite(y)
    points = np.column_stack([x[keep], y[keep]])
    return [Polyline(points[run], "data", width) for run in finite_runs(points[:, 1])]
