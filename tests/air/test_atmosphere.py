"""The air's pressure against the standard's own table, an independent library and measured mountains."""

import fluids
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.air import atmosphere
from planner.air.atmosphere import (
    isa_altitude_m,
    isa_pressure_mmhg,
    mountain_elevation_m,
    mountain_pressure_mmhg,
    station_pressure_mmhg,
)
from planner.errors import InputError

PA_PER_MMHG = 133.322387415


@pytest.mark.parametrize("geometric_m", [0.0, 500.0, 2438.4, 5000.0, 10_000.0, 12_500.0, 16_000.0])
def test_cabin_pressure_agrees_with_the_fluids_library(geometric_m):
    theirs = fluids.ATMOSPHERE_1976(geometric_m).P / PA_PER_MMHG
    ours = isa_pressure_mmhg(atmosphere.geopotential_m(geometric_m))
    assert ours == pytest.approx(theirs, rel=2e-5)


def test_cabin_pressure_equals_the_printed_table_of_the_standard():
    # ICAO Doc 7488/3, table: geopotential altitude (m) and pressure (hPa).
    printed_hpa = {
        0: 1013.250,
        1000: 898.746,
        2000: 794.952,
        3000: 701.085,
        5000: 540.199,
        11000: 226.321,
        20000: 54.7489,
    }
    ours = isa_pressure_mmhg(np.array(list(printed_hpa), dtype=float)) * PA_PER_MMHG / 100.0
    assert ours == pytest.approx(list(printed_hpa.values()), abs=0.006)


@settings(max_examples=80, deadline=None)
@given(st.floats(-500.0, 20_000.0))
def test_cabin_altitude_of_cabin_pressure_is_the_altitude_again(metres):
    assert isa_altitude_m(isa_pressure_mmhg(metres)) == pytest.approx(metres, abs=1e-6)


@settings(max_examples=80, deadline=None)
@given(st.floats(-500.0, 8850.0))
def test_ground_elevation_of_ground_pressure_is_the_elevation_again(metres):
    assert mountain_elevation_m(mountain_pressure_mmhg(metres)) == pytest.approx(metres, abs=1e-6)


def test_mountains_are_not_treated_as_cabins():
    # Measured on the summit: 253 mmHg (West 1983, J Appl Physiol 54:1188); the standard atmosphere is 17 lower.
    assert mountain_pressure_mmhg(8848.0) == pytest.approx(253.0, abs=1.0)
    assert isa_pressure_mmhg(8848.0) < 237.0
    assert mountain_pressure_mmhg(2438.0) - isa_pressure_mmhg(2438.0) == pytest.approx(9.5, abs=0.3)


def test_arrays_and_floats_give_the_same_answer_in_the_same_shape():
    metres = np.array([[0.0, 1500.0], [2438.4, 4000.0]])
    for give in (isa_pressure_mmhg, mountain_pressure_mmhg):
        together = give(metres)
        assert together.shape == metres.shape
        assert isinstance(give(1500.0), float)
        assert together[0, 1] == give(1500.0)


def test_a_measured_station_pressure_is_believed_before_the_elevation():
    assert station_pressure_mmhg(760.0, 702.0) == 702.0
    assert station_pressure_mmhg(760.0) == pytest.approx(mountain_pressure_mmhg(760.0))


def test_a_place_without_elevation_or_pressure_is_asked_for():
    with pytest.raises(InputError, match="Neither the elevation nor the station pressure") as caught:
        station_pressure_mmhg(None)
    assert caught.value.field == "elevation_m"


@pytest.mark.parametrize(
    ("give", "wrong", "said"),
    [
        (isa_pressure_mmhg, 20_001.0, "20001 m is outside"),
        (isa_pressure_mmhg, float("nan"), "is not a number"),
        (isa_pressure_mmhg, np.array([0.0, -501.0]), "-501 m is outside"),
        (mountain_pressure_mmhg, 8851.0, "8851 m is outside"),
        (isa_altitude_m, 10.0, "10 mmHg is outside"),
        (mountain_elevation_m, 900.0, "900 mmHg is outside"),
        (lambda mmhg: station_pressure_mmhg(None, mmhg), 100.0, "100 mmHg is outside"),
    ],
)
def test_what_no_model_covers_is_refused_with_what_was_given_and_what_is_allowed(give, wrong, said):
    with pytest.raises(InputError, match=said) as caught:
        give(wrong)
    assert "allowed" in caught.value.message
