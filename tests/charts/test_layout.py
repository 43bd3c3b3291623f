import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.charts.layout import Axis, Band, finite_runs, fitting, nice_ticks, without_straight_points, wrap


def measure(text, size):
    return size * len(text)


@given(st.floats(-1e4, 1e4), st.floats(0.01, 1e4), st.integers(3, 8))
@settings(max_examples=60, deadline=None)
def test_ticks_are_round_evenly_spaced_and_inside(low, span, count):
    ticks = nice_ticks(low, low + span, count)
    assert 1 <= len(ticks) <= 2 * count + 1
    assert ticks[0] >= low - 1e-6 * span
    assert ticks[-1] <= low + span * (1 + 1e-5)
    if len(ticks) > 1:
        step = ticks[1] - ticks[0]
        digits = step / 10 ** np.floor(np.log10(step) + 1e-9)
        assert min(abs(digits - d) for d in (1, 2, 2.5, 5, 10)) < 1e-4 * max(1.0, abs(low) / step)


def test_no_tick_is_minus_zero():
    assert not any(np.signbit(nice_ticks(-1.0, 1.0, 5)) & (nice_ticks(-1.0, 1.0, 5) == 0))


@given(st.text(alphabet="ab \n", max_size=60), st.integers(3, 12))
@settings(max_examples=80, deadline=None)
def test_wrapped_lines_are_never_wider_and_lose_no_letter(text, letters):
    lines = wrap(text, 2.0, 2.0 * letters, measure)
    assert all(measure(line, 2.0) <= 2.0 * letters for line in lines)
    assert "".join(lines).replace(" ", "") == text.replace(" ", "").replace("\n", "")


def test_a_number_stays_with_its_unit_when_a_text_wraps():
    assert wrap("outside 2286 to 2591 m.", 1.0, 22.0, measure) == ["outside 2286 to", "2591\u00a0m."]


def test_the_longest_wording_that_fits_is_taken_or_none():
    assert fitting(("Check-in", "Wait", "W"), 1.0, 5.0, measure) == "Wait"
    assert fitting(("Check-in", "Wait"), 1.0, 3.0, measure) is None


def test_gaps_split_a_line_and_single_points_are_left_out():
    values = np.array([1.0, 2.0, np.nan, 3.0, np.nan, 4.0, 5.0])
    assert finite_runs(values) == [slice(0, 2), slice(5, 7)]


def test_an_axis_maps_its_ends_and_keeps_readings_within():
    axis = Axis(80.0, 100.0, 10.0, 210.0)
    assert axis.at(90.0) == pytest.approx(110.0)
    assert axis.value(110.0) == pytest.approx(90.0)
    assert axis.value(500.0) == 100.0


def test_a_band_outline_runs_along_the_low_side_and_back_along_the_high_side():
    band = Band(np.array([0.0, 1.0]), np.array([2.0, 3.0]), np.array([4.0, 5.0]), "data_soft")
    assert band.outline().tolist() == [[0, 2], [1, 3], [1, 5], [0, 4]]


def test_points_within_straight_stretches_go_and_the_line_stays_the_same():
    x = np.linspace(0.0, 100.0, 101)
    y = np.interp(x, [0.0, 30.0, 60.0, 100.0], [0.0, 50.0, 50.0, 5.0])
    kept = without_straight_points(x, y)
    assert kept.tolist() == [0, 30, 60, 100]
    assert np.allclose(np.interp(x, x[kept], y[kept]), y)


def test_an_upright_step_keeps_both_its_ends():
    x, y = np.array([0.0, 1.0, 1.0, 2.0]), np.array([5.0, 5.0, 9.0, 9.0])
    assert without_straight_points(x, y).tolist() == [0, 1, 2, 3]


def test_a_corner_given_twice_where_two_parts_meet_stays_a_corner():
    x, y = np.array([0.0, 10.0, 10.0, 20.0]), np.array([8.0, 1.0, 1.0, 1.0])
    assert without_straight_points(x, y).tolist() == [0, 1, 3]
