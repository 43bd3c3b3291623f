"""What a flow or a setting does: SpO2 against the amount, with its spread, the target band and the ceiling."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from planner.charts.layout import (
    Array,
    Axis,
    Band,
    Box,
    Drawing,
    Item,
    Marker,
    Measure,
    Polyline,
    Text,
    finite_runs,
    nice_ticks,
    rule,
)

GAP = 5.0


@dataclass(frozen=True, eq=False)
class DoseSeries:
    """SpO2 in per cent for each amount of one device; arrays of shape (amounts,), amounts rising."""

    amounts: Array
    median: Array
    low: Array
    high: Array


@dataclass(frozen=True, eq=False)
class DoseChart:
    """A laid-out dose view: the drawing, and the moment under a finger."""

    drawing: Drawing
    _series: DoseSeries
    _x: Axis
    _y: Axis
    _size: float

    def amount_at(self, x: float) -> float:
        """Amount at a horizontal position, kept within the axis."""
        return self._x.value(x)

    def read_at(self, amount: float) -> tuple[float, float, float]:
        """Low, median and high SpO2 in per cent at an amount, by the interpolation that is drawn."""
        s = self._series
        low, median, high = (float(np.interp(amount, s.amounts, a)) for a in (s.low, s.median, s.high))
        return low, median, high

    def scrub(self, amount: float) -> tuple[Item, ...]:
        """The line at an amount with a ring on the median."""
        x, median = self._x.at(amount), self.read_at(amount)[1]
        line = rule(x, self._y.start, x, self._y.end, "ink", 1.2)
        return (line, Marker(x, self._y.at(median), self._size * 0.42, "ink", "ring"))


def lay_dose(
    series: DoseSeries,
    *,
    target_low: float,
    target_high: float | None,
    target_text: str,
    amount_label: str,
    width: float,
    height: float,
    text_size: float,
    measure: Measure,
    value_label: str,
    tick_text: Callable[[float], str] = "{:g}".format,
    marked: tuple[float, ...] = (),
) -> DoseChart:
    """Lay out the dose view. target_high is the ceiling where carbon dioxide is a risk, None where there is none.

    target_text and amount_label ("Target 88 to 92 %", "L/min, cannula") carry their units. marked: amounts that get a
    mark on the median, such as the decided one.
    """
    line = text_size * 1.35
    bottom, top = 2.2 * line, height - 1.7 * text_size
    ceiling = [] if target_high is None else [target_high]
    known = np.concatenate([series.low, series.high, [target_low], ceiling])
    known = known[np.isfinite(known)]
    axis_y = Axis(float(known.min()) - 1.0, min(101.0, float(known.max()) + 1.0), bottom, top)
    ticks_y = [(axis_y.at(float(v)), tick_text(float(v))) for v in nice_ticks(axis_y.low, min(axis_y.high, 100.0), 5)]
    left = max(measure(text, text_size) for _, text in ticks_y) + GAP + 2.0
    ends = float(series.amounts[0]), float(series.amounts[-1])
    axis_x = Axis(*ends, left, width - 8.0)
    right = axis_x.end

    items: list[Item] = []
    band_top = axis_y.at(target_high) if target_high is not None else axis_y.at(min(100.0, axis_y.high))
    low_y = axis_y.at(target_low)
    items.append(Box(left, low_y, right - left, band_top - low_y, "caution_soft"))
    for y, text in ticks_y:
        items += [rule(left, y, right, y), Text(text, left - GAP, y, text_size, "muted", "right")]
    x = axis_x.of(series.amounts)
    low, high, median = axis_y.of(series.low), axis_y.of(series.high), axis_y.of(series.median)
    items += [Band(x[run], low[run], high[run], "data_soft") for run in finite_runs(low, high)]
    items += [Polyline(np.column_stack([x[run], median[run]]), "data", 1.8) for run in finite_runs(median)]
    if target_high is not None:
        items.append(Polyline(np.array([[left, band_top], [right, band_top]]), "stop", 1.1, "dashed"))
    for amount in marked:
        at = float(np.interp(amount, series.amounts, median))
        items.append(Marker(axis_x.at(amount), at, text_size * 0.34, "data"))
    items.append(rule(left, bottom, right, bottom, "muted", 0.8))
    last_right = -np.inf
    for value in nice_ticks(*ends, 5):
        words, at = tick_text(float(value)), axis_x.at(float(value))
        half = measure(words, text_size) / 2
        if at - half > last_right:
            items.append(Text(words, at, bottom - line * 0.75, text_size, "muted", "middle"))
            last_right = at + half + GAP
    items.append(Text(amount_label, right, line * 0.55, text_size, "muted", "right"))
    items.append(Text(value_label, 2.0, top + text_size, text_size, "muted"))
    items.append(Text(target_text, right, top + text_size, text_size, "caution", "right"))
    return DoseChart(Drawing(width, height, tuple(items)), series, axis_x, axis_y, text_size)
