"""Delays of parts as delays of legs: a wait comes once, and a longer part is longer in each of its legs."""

import numpy as np
import pytest

from planner.case.trip import Part
from planner.kit.endurance import Assumptions
from planner.kit.legs import Leg
from planner.kit.trip_legs import TripLegs
from planner.trip.delays import sample_delays
from planner.trip.itinerary import PartSpan
from planner.trip.stress import stress

SHARES = {"rest": 1.0, "walking": 0.0, "asleep": 0.0}


def span(part_id, kind, minutes):
    return PartSpan(part_id, kind, part_id, 0.0, minutes, None, None, 0.0, "ground", None, None, 0.0, SHARES, ())


def leg(part_id, hours, flight=False):
    return Leg(part_id, part_id, hours, hours, 60.0, None, False, False, False, False, flight, False, None, False)


def test_waits_come_before_the_first_leg_of_a_part_and_longer_parts_are_longer_in_each():
    spans = [span("road", "road", 120.0), span("flight", "flight", 180.0)]
    parts = [Part(part_id=one.part_id, kind=one.kind, duration_min=one.duration_min) for one in spans]
    legs = (leg("road", 0.5), leg("road", 1.5), leg("flight", 2.0, True), leg("flight", 1.0, True))
    trip = TripLegs(spans, parts, legs, (0, 0, 1, 1), Assumptions())
    drawn = trip.draw(5, 2000)
    waits, longer = sample_delays(spans, parts, np.random.default_rng(5), 2000)
    assert drawn.waits_h[:, 2] == pytest.approx(waits[:, 1] / 60.0)
    assert not drawn.waits_h[:, 3].any()
    assert drawn.longer_h[:, 0] == pytest.approx(longer[:, 0] / 60.0 * 0.25)
    assert drawn.longer_h[:, 1] == pytest.approx(longer[:, 0] / 60.0 * 0.75)
    assert drawn.waits_h[:, 2].max() > 0.0
    assert np.ptp(drawn.longer_h[:, 0]) > 0.0


def test_other_trips_confirm_a_set_than_those_it_was_chosen_on():
    spans = [span("flight", "flight", 180.0)]
    parts = [Part(part_id="flight", kind="flight", duration_min=180.0)]
    trip = TripLegs(spans, parts, (leg("flight", 3.0, True),), (0,), Assumptions())
    assert not np.array_equal(trip.draw(1, 100).flow, trip.draw(2, 100).flow)
    assert np.array_equal(trip.draw(1, 100).flow, trip.draw(1, 100).flow)


def test_a_stress_case_is_played_on_the_legs_of_its_part():
    spans = [span("road", "road", 120.0), span("flight", "flight", 180.0)]
    parts = [Part(part_id=one.part_id, kind=one.kind, duration_min=one.duration_min) for one in spans]
    legs = (leg("road", 2.0), leg("flight", 2.0, True), leg("flight", 1.0, True))
    trip = TripLegs(spans, parts, legs, (0, 1, 1), Assumptions())
    late = trip.stressed(stress("late", 180.0, spans))
    assert late.waits_h.tolist() == [[0.0, 3.0, 0.0]]
    diverted = trip.stressed(stress("diversion", 0.0, spans))
    assert diverted.longer_h.tolist() == [pytest.approx([0.0, 3.5 * 2 / 3, 3.5 / 3])]
