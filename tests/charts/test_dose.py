import numpy as np
import pytest

from planner.charts.dose import DoseSeries, lay_dose
from planner.charts.layout import Box, Marker, Polyline
from tests.charts.geometry import outside, overlapping_texts

AMOUNTS = np.linspace(0.0, 4.0, 9)
MEDIAN = 85.0 + 8.0 * (1.0 - np.exp(-AMOUNTS / 1.7))
SERIES = DoseSeries(AMOUNTS, MEDIAN, MEDIAN - 4.0, MEDIAN + 3.0)


def laid(trip, **keywords):
    options = {"target_low": 88.0, "target_high": 92.0, "target_text": "Target 88 to 92 %", "width": 358.0,
               "height": 210.0, "amount_label": "L/min, cannula", "text_size": 10.0, "measure": trip.measure,
               "value_label": "SpO₂, %"}  # fmt: skip
    return lay_dose(SERIES, **(options | keywords))


@pytest.mark.parametrize("width", [300.0, 358.0, 500.0])
@pytest.mark.parametrize("text_size", [9.0, 15.0])
def test_nothing_reaches_outside_and_no_texts_overlap(trip, width, text_size):
    chart = laid(trip, width=width, height=16 * text_size + 60, text_size=text_size)
    assert outside(chart.drawing, trip.measure) == []
    assert overlapping_texts(chart.drawing.texts(), trip.measure) == []


def test_reading_is_the_drawn_line(trip):
    chart = laid(trip)
    low, median, high = chart.read_at(2.0)
    assert (low, median, high) == pytest.approx((MEDIAN[4] - 4, MEDIAN[4], MEDIAN[4] + 3))
    ring = chart.scrub(2.0)[1]
    line = next(i for i in chart.drawing.items if isinstance(i, Polyline) and i.role == "data")
    assert [ring.x, ring.y] == pytest.approx(line.points[4])
    assert chart.amount_at(ring.x) == pytest.approx(2.0)


def test_the_ceiling_is_a_line_only_where_carbon_dioxide_sets_one(trip):
    def ceilings(chart):
        return [i for i in chart.drawing.items if isinstance(i, Polyline) and i.role == "stop"]

    assert len(ceilings(laid(trip))) == 1
    assert ceilings(laid(trip, target_high=None)) == []


def test_the_target_band_spans_the_target(trip):
    chart = laid(trip)
    box = next(i for i in chart.drawing.items if isinstance(i, Box))
    ceiling = next(i for i in chart.drawing.items if isinstance(i, Polyline) and i.role == "stop")
    assert box.y + box.height == pytest.approx(ceiling.points[0, 1])


def test_a_decided_amount_is_marked_on_the_median(trip):
    mark = next(i for i in laid(trip, marked=(2.0,)).drawing.items if isinstance(i, Marker))
    assert mark.y == pytest.approx(laid(trip).scrub(2.0)[1].y)
