"""All predictors side by side: one row each, its spread as a bar, its value as a mark, the thresholds as lines.

A row that does not apply to this person is grey, its mark a ring, and its second line says why; a measured value is a
diamond. Shape and words say it as well as colour.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from planner.charts.layout import (
    Axis,
    Box,
    Drawing,
    Item,
    Marker,
    Measure,
    Polyline,
    Text,
    nice_ticks,
    rule,
    wrap,
)

LABEL_SHARE = 0.40
GAP = 8.0
Kind = Literal["predicted", "measured", "not applicable"]


@dataclass(frozen=True)
class ForecastRow:
    """One predictor. value, low and high in the unit shown, None where it could not be worked out."""

    label: str
    sublabel: str
    value: float | None
    low: float | None
    high: float | None
    value_text: str
    kind: Kind = "predicted"


@dataclass(frozen=True)
class Threshold:
    """A named limit, drawn as a dashed line through all rows."""

    value: float
    text: str


@dataclass(frozen=True)
class ForecastDrawing(Drawing):
    """The drawing with where each row stands: (bottom, top) from the drawing's lower edge, in the order of the rows."""

    rows: tuple[tuple[float, float], ...] = ()


def lay_forecast(
    rows: Sequence[ForecastRow],
    thresholds: Sequence[Threshold],
    *,
    width: float,
    text_size: float,
    measure: Measure,
    title: str,
    unit: str,
    tick_text: Callable[[float], str] = "{:g}".format,
    least_row: float = 0.0,
    label_share: float = LABEL_SHARE,
) -> ForecastDrawing:
    """Lay the rows out below each other; the drawing's height follows from them.

    title stands at the upper left (what is shown, for which part), unit over the column of values. least_row: smallest
    row height; label_share: of the width, for the words. Long labels wrap; nothing is cut.
    """
    small = text_size * 0.82
    values_width = max([measure(row.value_text, text_size * 1.06) for row in rows] + [measure(unit, small)]) + 2.0
    label_width = width * label_share
    plot = (label_width + GAP, width - values_width - GAP)
    axis = _axis(rows, thresholds, plot)

    laid = [_row_lines(row, label_width, text_size, small, measure) for row in rows]
    heights = [max(least_row, _text_height(*lines, text_size, small) + text_size * 0.7) for lines in laid]
    title_lines = wrap(title, small, label_width, measure)
    head = max(len(title_lines) * small * 1.3, small * 1.5 * _tiers(thresholds, axis, small, measure)) + small * 0.5
    foot = small * 1.8
    total = head + sum(heights) + foot

    items: list[Item] = []
    y = total - small * 0.75
    for words in title_lines:
        items.append(Text(words, 0.0, y, small, "muted"))
        y -= small * 1.3
    items.append(Text(unit, width, total - small * 0.75, small, "muted", "right"))
    y = total - head
    items.append(rule(0.0, y, width, y))
    places = []
    for row, lines, height in zip(rows, laid, heights, strict=True):
        items += _row(row, lines, axis, y, height, width, text_size, small)
        places.append((y - height, y))
        y -= height
        items.append(rule(0.0, y, width, y))
    items += _thresholds(thresholds, axis, y, total - head, small, measure)
    items += _tick_texts(axis, y - small * 0.9, small, measure, tick_text)
    return ForecastDrawing(width, total, tuple(items), tuple(places))


def _axis(rows: Sequence[ForecastRow], thresholds: Sequence[Threshold], plot: tuple[float, float]) -> Axis:
    values = [v for row in rows for v in (row.value, row.low, row.high) if v is not None]
    values += [threshold.value for threshold in thresholds]
    low, high = (min(values), max(values)) if values else (0.0, 1.0)
    room = 0.05 * (high - low) or 0.5
    return Axis(low - room, high + room, *plot)


def _row_lines(
    row: ForecastRow, width: float, size: float, small: float, measure: Measure
) -> tuple[list[str], list[str]]:
    return wrap(row.label, size, width, measure), wrap(row.sublabel, small, width, measure) if row.sublabel else []


def _text_height(labels: list[str], sublabels: list[str], size: float, small: float) -> float:
    return len(labels) * size * 1.25 + len(sublabels) * small * 1.25


def _row(
    row: ForecastRow, lines: tuple[list[str], list[str]], axis: Axis, top: float, height: float, width: float,
    size: float, small: float,
) -> list[Item]:  # fmt: skip
    grey = row.kind == "not applicable"
    middle = top - height / 2
    items: list[Item] = []
    y = middle + _text_height(*lines, size, small) / 2
    for words in lines[0]:
        items.append(Text(words, 0.0, y - size * 0.62, size, "muted" if grey else "ink"))
        y -= size * 1.25
    for words in lines[1]:
        items.append(Text(words, 0.0, y - small * 0.62, small, "muted"))
        y -= small * 1.25
    bar = size * 0.34
    if row.low is not None and row.high is not None:
        x0, x1 = axis.at(row.low), axis.at(row.high)
        items.append(Box(x0, middle - bar / 2, x1 - x0, bar, "grid" if grey else "data_soft"))
    if row.value is not None:
        shape = {"predicted": "dot", "measured": "diamond", "not applicable": "ring"}[row.kind]
        role = "muted" if grey else "data"
        items.append(Marker(axis.at(row.value), middle, size * 0.32, role, shape))  # type: ignore[arg-type]
    items.append(Text(row.value_text, width, middle, size * 1.06, "muted" if grey else "ink", "right", bold=not grey))
    return items


def _places(
    thresholds: Sequence[Threshold], axis: Axis, small: float, measure: Measure
) -> list[tuple[Threshold, float, int]]:
    """Each threshold with the middle of its words, kept within the plot, and a tier so that no words overlap."""
    taken: list[float] = []
    places = []
    for threshold in sorted(thresholds, key=lambda t: t.value):
        half = measure(threshold.text, small) / 2
        x = min(max(axis.at(threshold.value), axis.start + half), max(axis.end - half, axis.start + half))
        tier = next((i for i, right in enumerate(taken) if x - half > right + 3.0), len(taken))
        taken[tier : tier + 1] = [x + half]
        places.append((threshold, x, tier))
    return places


def _tiers(thresholds: Sequence[Threshold], axis: Axis, small: float, measure: Measure) -> int:
    return 1 + max((tier for _, _, tier in _places(thresholds, axis, small, measure)), default=0)


def _thresholds(
    thresholds: Sequence[Threshold], axis: Axis, bottom: float, top: float, small: float, measure: Measure
) -> list[Item]:
    items: list[Item] = []
    for threshold, x, tier in _places(thresholds, axis, small, measure):
        at = axis.at(threshold.value)
        items.append(Polyline(np.array([[at, bottom], [at, top]]), "caution", 1.0, "dashed"))
        items.append(Text(threshold.text, x, top + small * (0.8 + 1.4 * tier), small, "caution", "middle"))
    return items


def _tick_texts(axis: Axis, y: float, small: float, measure: Measure, tick_text: Callable[[float], str]) -> list[Item]:
    items: list[Item] = []
    last_right = -np.inf
    for value in nice_ticks(axis.low, axis.high, 5):
        x, words = axis.at(float(value)), tick_text(float(value))
        half = measure(words, small) / 2
        if x - half > last_right and x - half >= axis.start - GAP and x + half <= axis.end + GAP:
            items.append(Text(words, x, y, small, "muted", "middle"))
            last_right = x + half + 4.0
    return items
