import pytest

from planner.charts.forecast import ForecastRow, Threshold, lay_forecast
from planner.charts.layout import Box, Marker, Polyline
from tests.charts.geometry import outside, overlapping_texts

ROWS = [
    ForecastRow("This lung, fitted", "gas of 12 November", 6.6, 5.6, 7.8, "6.6"),
    ForecastRow("Challenge test", "15 % oxygen at 580 m", 6.3, 6.1, 6.5, "6.3", "measured"),
    ForecastRow("Restrictive disease, 2002", "not this diagnosis; made from people with interstitial lung disease",
                6.5, 5.5, 7.4, "6.5", "not applicable"),
    ForecastRow("Another", "FEV₁ not entered", None, None, None, "—", "not applicable"),
]  # fmt: skip
LIMITS = [Threshold(6.6, "6.6 kPa"), Threshold(7.4, "7.4 kPa")]


def laid(trip, rows=ROWS, limits=LIMITS, **keywords):
    options = {"width": 358.0, "text_size": 12.0, "measure": trip.measure, "title": "PaO₂ in flight 1", "unit": "kPa"}
    return lay_forecast(rows, limits, **(options | keywords))


@pytest.mark.parametrize("width", [300.0, 358.0, 511.0])
@pytest.mark.parametrize("text_size", [9.0, 12.0, 18.0])
def test_nothing_reaches_outside_and_no_texts_overlap(trip, width, text_size):
    drawing = laid(trip, width=width, text_size=text_size)
    assert outside(drawing, trip.measure) == []
    assert overlapping_texts(drawing.items, trip.measure) == []


def test_close_thresholds_put_their_words_above_each_other(trip):
    drawing = laid(trip, limits=[Threshold(6.6, "6.6 kPa"), Threshold(6.7, "6.7 kPa")])
    assert overlapping_texts(drawing.items, trip.measure) == []
    assert {"6.6 kPa", "6.7 kPa"} <= {t.text for t in drawing.texts()}


def test_shape_tells_predicted_measured_and_not_applicable_apart(trip):
    marks = [(i.shape, i.role) for i in laid(trip).items if isinstance(i, Marker)]
    assert marks == [("dot", "data"), ("diamond", "data"), ("ring", "muted")]


def test_bars_and_marks_lie_where_the_common_scale_puts_them(trip):
    items = laid(trip).items
    bars = [i for i in items if isinstance(i, Box)]
    dot = next(i for i in items if isinstance(i, Marker))
    lines = [i for i in items if isinstance(i, Polyline) and i.dash == "dashed"]
    per_kpa = (lines[1].points[0, 0] - lines[0].points[0, 0]) / 0.8
    assert dot.x == pytest.approx(lines[0].points[0, 0])
    assert bars[0].width == pytest.approx(2.2 * per_kpa)
    assert bars[0].x == pytest.approx(dot.x - 1.0 * per_kpa)


def test_every_word_of_a_long_reason_is_shown(trip):
    shown = " ".join(t.text for t in laid(trip).texts())
    for word in ROWS[2].sublabel.split():
        assert word in shown


def test_a_row_that_could_not_be_worked_out_has_no_mark_and_says_so(trip):
    drawing = laid(trip, rows=ROWS[3:])
    assert not any(isinstance(i, (Marker, Box)) for i in drawing.items)
    assert {"—", "FEV₁ not entered"} <= {t.text for t in drawing.texts()}


def test_rows_are_at_least_as_high_as_a_touch_target_where_asked(trip):
    assert laid(trip, least_row=48.0).height >= 4 * 48.0
