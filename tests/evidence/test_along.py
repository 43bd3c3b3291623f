"""Blood along the trip: few points, both ends of every part, nothing drawn where the air is not known."""

import json
from dataclasses import replace

import numpy as np
import pytest

from planner.case import Case
from planner.evidence.along import MOST_POINTS, blood_along
from planner.evidence.baseline import read_baseline
from planner.lung.fitting import fit_lung
from planner.trip.itinerary import lay_out

PARTS = [
    {"part_id": "short", "kind": "road", "duration_min": 60, "start_elevation_m": 1500},
    {"part_id": "long", "kind": "road", "duration_min": 3000, "start_elevation_m": 1500},
]
GAS = {"kind": "blood_gas", "taken_on": "2026-11-20", "place": {"elevation_m": 0}, "pao2_mmhg": 72.4,
       "paco2_mmhg": 39.5}  # fmt: skip


@pytest.fixture(scope="module")
def trip():
    content = {
        "patient": {"diagnosis": "copd"},
        "measurements": [GAS],
        "trip": {"home_elevation_m": 0, "parts": PARTS},
        "policy": {"assessed_on": "2026-12-01"},
    }
    case = Case.model_validate_json(json.dumps(content))
    baseline = read_baseline(case, case.policy.assessed_on)
    return fit_lung(baseline.lung_readings, baseline.person, draws=200), lay_out(case.trip, case.policy)


def test_both_ends_of_every_part_are_kept_and_the_points_are_few(trip):
    lung, timeline = trip
    along = blood_along(lung, timeline)
    assert along.minutes.size <= MOST_POINTS
    for span in range(len(timeline.parts)):
        minutes = timeline.minutes[timeline.part_index == span]
        assert {minutes[0], minutes[-1]} <= set(along.minutes)


def test_the_three_lines_keep_their_order(trip):
    along = blood_along(*trip)
    assert (along.spo2_low_percent < along.spo2_median_percent).all()
    assert (along.spo2_median_percent < along.spo2_high_percent).all()
    assert (along.pao2_low_mmhg < along.pao2_median_mmhg).all()
    assert (along.pao2_median_mmhg < along.pao2_high_mmhg).all()


def test_where_the_air_is_not_known_nothing_is_said_and_the_rest_stays(trip):
    lung, timeline = trip
    inspired = np.where(timeline.part_index == 0, np.nan, timeline.inspired_po2_mmhg)
    whole, holed = blood_along(lung, timeline), blood_along(lung, replace(timeline, inspired_po2_mmhg=inspired))
    hidden = np.isnan(holed.spo2_median_percent)
    kept = np.isin(holed.minutes, timeline.minutes[timeline.part_index == 1])
    assert hidden.any()
    assert (hidden | kept).all()
    assert holed.spo2_median_percent[~hidden] == pytest.approx(whole.spo2_median_percent[~hidden])


def test_points_of_the_same_air_share_an_answer_and_oxygen_in_one_part_stays_in_it(trip):
    lung, timeline = trip
    flat = np.full_like(timeline.inspired_po2_mmhg, 120.0)
    level = replace(timeline, inspired_po2_mmhg=flat, barometric_mmhg=np.full_like(flat, 620.0))
    level = replace(level, hours_at_altitude=np.zeros_like(flat))
    air = blood_along(lung, level)
    expected = np.quantile(lung.arterial(120.0, 620.0).po2_mmhg, 0.5)
    assert air.pao2_median_mmhg == pytest.approx(np.full(air.minutes.size, expected))
    on_oxygen = blood_along(lung, level, {"short": np.full(lung.log_sd.size, 30.0)})
    inside = on_oxygen.minutes < timeline.minutes[timeline.part_index == 0][-1]
    after = on_oxygen.minutes > timeline.minutes[timeline.part_index == 1][0]
    assert (on_oxygen.pao2_median_mmhg[inside] > expected + 5.0).all()
    assert on_oxygen.pao2_median_mmhg[after] == pytest.approx(np.full(after.sum(), expected))
