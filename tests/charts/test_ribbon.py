import dataclasses

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from planner.charts.layout import Band, Marker, Polyline, Text
from planner.charts.ribbon import Layer, RibbonPart, lay_ribbon
from tests.charts.geometry import extent, outside, overlapping_texts


def laid(trip, layer=None, **keywords):
    options = {"width": 358.0, "height": 150.0, "text_size": 10.0, "measure": trip.measure}
    return lay_ribbon(trip.parts, trip.minutes, trip.altitude_m, layer, **(options | keywords))


def saturation_layer(trip, **keywords):
    median = 97.0 - trip.altitude_m / 2438.4 * 11.0
    return Layer(trip.minutes, median, "SpO₂, %", "{:g}".format, low=median - 5, high=median + 2, threshold=88.0,
                 threshold_text="88 %", **keywords)  # fmt: skip


@pytest.mark.parametrize("width", [300.0, 358.0, 760.0])
@pytest.mark.parametrize("text_size", [8.0, 12.0, 18.0])
@pytest.mark.parametrize("with_layer", [True, False])
def test_nothing_reaches_outside_and_no_texts_overlap(trip, width, text_size, with_layer):
    layer = saturation_layer(trip) if with_layer else None
    ribbon = laid(trip, layer, width=width, height=12 * text_size + 60, text_size=text_size,
                  altitude_text="{:.0f} m".format, shortened_text="Long parts are drawn shortened.")  # fmt: skip
    assert outside(ribbon.drawing, trip.measure) == []
    assert overlapping_texts(ribbon.drawing.items, trip.measure) == []


def test_labels_are_whole_words_or_numbers_never_cut_ones(trip):
    shown = [t.text for t in laid(trip).drawing.texts()]
    allowed = {word for part in trip.parts for word in (*part.labels, part.start_text)} | {str(n) for n in range(1, 7)}
    assert set(shown) <= allowed
    assert len([t for t in shown if ":" not in t]) == len(trip.parts)


def test_each_label_stands_within_its_own_part(trip):
    ribbon = laid(trip)
    labels = [t for t in ribbon.drawing.texts() if ":" not in t.text]
    for number, label in enumerate(labels):
        left, _, right, _ = extent(label, trip.measure)
        assert ribbon.scale.x[number] <= left
        assert right <= ribbon.scale.x[number + 1]


def test_a_stay_of_four_days_leaves_each_flight_a_tenth_of_the_width(trip):
    widths = np.diff(laid(trip).scale.x)
    assert widths[5] == widths.max()
    assert widths[2] > 35.8
    assert widths[4] > 35.8


def test_a_shortened_part_is_said_and_marked(trip):
    with_stay = laid(trip, shortened_text="Long parts are drawn shortened.")
    assert with_stay.shortened
    assert "Long parts are drawn shortened." in [t.text for t in with_stay.drawing.texts()]
    marks = [i for i in with_stay.drawing.items if isinstance(i, Polyline) and i.role == "ink"]
    assert len(marks) == 2
    short = lay_ribbon(trip.parts[:2], trip.minutes[:100], trip.altitude_m[:100], width=358.0, height=150.0,
                       text_size=10.0, measure=trip.measure, shortened_text="Long parts.")  # fmt: skip
    assert not short.shortened
    assert "Long parts." not in [t.text for t in short.drawing.texts()]


def test_reading_gives_the_values_that_are_drawn(trip):
    layer = saturation_layer(trip)
    ribbon = laid(trip, layer)
    minute = float(trip.minutes[125])
    reading = ribbon.read_at(minute)
    assert reading.altitude_m == pytest.approx(trip.altitude_m[125])
    assert reading.median == pytest.approx(layer.median[125])
    assert (reading.low, reading.high) == (pytest.approx(layer.low[125]), pytest.approx(layer.high[125]))
    assert reading.stress is None
    line, ring = ribbon.scrub(minute)
    drawn = max((i for i in ribbon.drawing.items if isinstance(i, Polyline) and i.role == "data"),
                key=lambda i: len(i.points)).points  # fmt: skip
    assert isinstance(ring, Marker)
    assert ring.y == pytest.approx(np.interp(ring.x, drawn[:, 0], drawn[:, 1]))
    assert line.points[0, 0] == pytest.approx(ring.x)


def test_positions_and_minutes_are_inverses_and_ends_hold(trip):
    ribbon = laid(trip)
    for minute in (0.0, 100.0, 333.0, 700.0, 6000.0):
        assert ribbon.minute_at(ribbon.scale.at(minute)) == pytest.approx(minute)
    assert ribbon.minute_at(-50.0) == 0.0
    assert ribbon.read_at(1e9).minute == pytest.approx(trip.starts[-1])


def test_a_boundary_belongs_to_the_part_that_begins(trip):
    ribbon = laid(trip)
    assert ribbon.read_at(float(trip.starts[2])).part == 2
    assert ribbon.read_at(float(trip.starts[2]) - 0.5).part == 1
    assert ribbon.read_at(float(trip.starts[-1])).part == 5


def test_an_unknown_altitude_is_a_box_with_words_and_reads_as_none(trip):
    altitude = trip.altitude_m.copy()
    altitude[150:200] = np.nan
    ribbon = lay_ribbon(trip.parts, trip.minutes, altitude, width=760.0, height=150.0, text_size=10.0,
                        measure=trip.measure, unknown_text="not known")  # fmt: skip
    assert [t.text for t in ribbon.drawing.texts()].count("not known") == 1
    assert ribbon.read_at(float(trip.minutes[175])).altitude_m is None
    assert len([i for i in ribbon.drawing.items if isinstance(i, Band)]) == 2
    assert len(ribbon.scrub(float(trip.minutes[175]))) == 1


def test_a_stepped_layer_holds_each_value_to_the_next_part_and_the_last_to_the_end(trip):
    flows = np.array([1.0, 1.0, 2.0, 1.0, 2.0, 1.5])
    layer = Layer(trip.starts[:-1], flows, "L/min", "{:g}".format, least=0.0, stepped=True)
    ribbon = laid(trip, layer)
    assert ribbon.read_at(float(trip.starts[2]) + 1).median == 2.0
    assert ribbon.read_at(float(trip.starts[3]) - 1).median == 2.0
    line = next(i for i in ribbon.drawing.items if isinstance(i, Polyline) and i.role == "data")
    assert line.points[-1, 0] == pytest.approx(ribbon.scale.x[-1])


def test_the_axis_of_what_is_left_reaches_zero(trip):
    ribbon = laid(trip, Layer(trip.minutes, np.full(300, 800.0), "L left", "{:.0f}".format, least=0.0))
    assert "0" in [t.text for t in ribbon.drawing.texts()]


def test_sixty_parts_still_have_no_overlap(trip):
    parts = [RibbonPart(("Road", "R"), 60.0 * i, 60.0, f"{i % 24:02d}:00") for i in range(60)]
    minutes = np.linspace(0, 3600, 600)
    ribbon = lay_ribbon(parts, minutes, 500 + 400 * np.sin(minutes / 99), width=358.0, height=120.0, text_size=10.0,
                        measure=trip.measure)  # fmt: skip
    assert overlapping_texts(ribbon.drawing.items, trip.measure) == []
    assert outside(ribbon.drawing, trip.measure) == []
    assert isinstance(ribbon.drawing.items[0], Band)
    assert any(isinstance(i, Text) for i in ribbon.drawing.items)


@given(
    st.lists(st.tuples(st.floats(5.0, 9000.0), st.floats(-100.0, 5000.0)), min_size=1, max_size=25),
    st.floats(240.0, 900.0),
    st.sampled_from([8.0, 12.0, 18.0]),
    st.booleans(),
)
@example([(5.0, 0.0)] * 13 + [(240.0, 0.0)] + [(5.0, 5000.0)] * 6, 240.0, 12.0, True)  # the last clock time stuck out
@settings(max_examples=60, deadline=None)
def test_any_trip_is_drawn_within_its_place_without_overlap(trip, parts, width, text_size, with_layer):
    starts = np.concatenate([[0.0], np.cumsum([duration for duration, _ in parts])])
    minutes = np.repeat(starts, 2)[1:-1]
    altitude = np.repeat([metres for _, metres in parts], 2)
    ribbon_parts = [
        RibbonPart(("A long name of a part", "Part"), float(start), duration, "12:34")
        for start, (duration, _) in zip(starts, parts, strict=False)
    ]
    layer = Layer(minutes, altitude / 10.0, "L left", "{:,.0f}".format, least=0.0) if with_layer else None
    ribbon = lay_ribbon(
        ribbon_parts,
        minutes,
        altitude,
        layer,
        width=width,
        height=12 * text_size,
        text_size=text_size,
        measure=trip.measure,
        altitude_text="{:,.0f} m".format,
        shortened_text="Long parts are drawn shortened.",
    )
    texts = [t for t in ribbon.drawing.texts() if "shortened" not in t.text]
    assert outside(dataclasses.replace(ribbon.drawing, items=tuple(texts)), trip.measure) == []
    assert overlapping_texts(ribbon.drawing.items, trip.measure) == []
    for number, start in enumerate(starts[:-1]):
        reading = ribbon.read_at(float(start) + parts[number][0] / 2)
        assert reading.part == number
        assert reading.altitude_m == pytest.approx(parts[number][1])
