"""The cabin through a flight: its rates, its fields, and flights too short to reach the planning altitude."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.air.cabin import PLANNING_M, cabin_altitude_m
from planner.errors import InputError

FEET = 0.3048


def at(minute, duration=180.0, origin=0.0, destination=0.0, cruise=8000 * FEET):
    return float(cabin_altitude_m(np.array([float(minute)]), duration, origin, destination, cruise)[0])


def test_the_planning_altitude_is_8000_ft():
    assert pytest.approx(2438.4) == PLANNING_M  # 14 CFR 25.841


def test_it_climbs_at_500_ft_a_minute_and_takes_16_minutes_to_8000_ft():
    assert at(10) == pytest.approx(5000 * FEET)
    assert at(15.9) < 8000 * FEET
    assert at(16) == pytest.approx(8000 * FEET)


def test_it_comes_down_at_300_ft_a_minute_over_the_last_27_minutes():
    assert at(150) == pytest.approx(8000 * FEET)
    assert at(170) == pytest.approx(3000 * FEET)
    assert at(180) == pytest.approx(0.0)


def test_a_short_flight_turns_before_the_planning_altitude():
    heights = cabin_altitude_m(np.linspace(0, 30, 301), 30.0, 0.0, 0.0, 8000 * FEET)
    assert heights.max() < 8000 * FEET
    assert heights.max() == pytest.approx(30 * 500 * 300 / 800 * FEET, abs=60)


def test_from_a_field_above_the_cabin_altitude_the_cabin_starts_at_the_field():
    # The field of La Paz stands at about 13,300 ft, above any planned cabin.
    assert at(0, origin=13_300 * FEET) == pytest.approx(13_300 * FEET)
    assert at(90, origin=13_300 * FEET) == pytest.approx(8000 * FEET)
    assert at(180, destination=13_300 * FEET) == pytest.approx(13_300 * FEET)


@given(
    duration=st.floats(20.0, 900.0),
    origin=st.floats(-400.0, 4100.0),
    destination=st.floats(-400.0, 4100.0),
    cruise=st.floats(500.0, 2500.0),
)
def test_it_starts_and_ends_at_the_fields_and_stays_between_what_it_meets(duration, origin, destination, cruise):
    heights = cabin_altitude_m(np.linspace(0.0, duration, 200), duration, origin, destination, cruise)
    highest, lowest = max(origin, destination, cruise), min(origin, destination, cruise)
    if duration > 120.0:
        assert heights[0] == pytest.approx(origin, abs=1e-6)
        assert heights[-1] == pytest.approx(destination, abs=1e-6)
        assert heights.max() <= highest + 1e-6
        assert heights.min() >= lowest - 1e-6


@pytest.mark.parametrize("wrong", [{"cruise": -10.0}, {"cruise": 6000.0}, {"minute": 200.0}])
def test_an_impossible_cabin_is_refused(wrong):
    with pytest.raises(InputError):
        at(**({"minute": 10.0} | wrong))
