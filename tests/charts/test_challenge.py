import numpy as np
import pytest

from planner.charts.challenge import Phase, lay_challenge
from planner.charts.layout import Polyline
from tests.charts.geometry import outside, overlapping_texts

MINUTES = np.arange(0.0, 41.0)
SPO2 = np.where(MINUTES < 5, 93.0, 84.0 + 9.0 * np.exp(-(MINUTES - 5) / 4))
HEART = 82.0 + (93.0 - SPO2)
PHASES = [Phase("Before", 0, 5, False), Phase("15 % oxygen", 5, 25, True), Phase("Recovery", 25, 40, False)]


def laid(trip, spo2=SPO2, heart=HEART, **keywords):
    options = {"width": 358.0, "height": 220.0, "text_size": 9.0, "measure": trip.measure, "spo2_label": "SpO₂, %",
               "heart_label": "Heart rate, beats a minute", "time_label": "minutes", "threshold_percent": 85.0,
               "threshold_text": "85 %"}  # fmt: skip
    return lay_challenge(MINUTES, spo2, heart, PHASES, **(options | keywords))


@pytest.mark.parametrize("width", [300.0, 358.0, 500.0])
def test_nothing_reaches_outside_and_no_texts_overlap(trip, width):
    drawing = laid(trip, width=width)
    assert outside(drawing, trip.measure) == []
    assert overlapping_texts(drawing.texts(), trip.measure) == []


def test_both_series_are_drawn_the_first_above_the_second(trip):
    spo2, heart = [i for i in laid(trip).items if isinstance(i, Polyline) and i.role == "data"]
    assert spo2.points[:, 1].min() > heart.points[:, 1].max()


def test_a_heart_rate_never_taken_leaves_no_empty_plot(trip):
    drawing = laid(trip, heart=np.full(41, np.nan))
    assert len([i for i in drawing.items if isinstance(i, Polyline) and i.role == "data"]) == 1
    assert "Heart rate, beats a minute" not in [t.text for t in drawing.texts()]


def test_rows_without_a_saturation_do_not_break_the_line(trip):
    spo2 = SPO2.copy()
    spo2[::3] = np.nan
    line = next(i for i in laid(trip, spo2=spo2).items if isinstance(i, Polyline) and i.role == "data")
    assert len(line.points) == int(np.isfinite(spo2).sum())
