"""Delays of parts as delays of legs: a wait comes once, and a longer part is longer in each of its legs."""

from dataclasses import replace

import numpy as np
import pytest

from planner.case.trip import Part
from planner.kit.endurance import Assumptions, on_time, play
from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import select
from planner.kit.trip_legs import TripLegs, carried_of
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


EVEN = Assumptions(flow_sd=0.0, fill_sd=0.0, battery_sd=0.0, left_running=0.0)
MACHINE = Power("c", "Concentrator", 6.4, 87.4, 95.0, 95.0, 0.8, 2, 120.0, 12)
SMALL = Choice("s", "1 L", 190.0, 212.0, 2.1, None, True)


def test_charge_and_gas_are_kept_for_the_parts_that_have_nothing_else():
    # Both may be used at first; then only the battery, then only the cylinder. Used up in order, one would be missing.
    both = replace(leg("a", 3.0), concentrator_w=50.0)
    battery_only = replace(leg("b", 4.0), cylinder_l_per_h=None, concentrator_w=50.0)
    cylinder_only = leg("c", 3.0)
    legs = (both, battery_only, cylinder_only)
    found = select(legs, [SMALL], MACHINE, reserve_fraction=0.0, batteries=3)
    assert found.uncovered_h == 0.0
    trip = TripLegs([], [], legs, (0, 1, 2), EVEN)
    carried = carried_of(found, [SMALL], trip, MACHINE)
    assert play(legs, carried, MACHINE, on_time(legs, EVEN), EVEN).short_h.max() < 0.01
    unkept = replace(carried, kept=())
    assert play(legs, unkept, MACHINE, on_time(legs, EVEN), EVEN).short_h.max() > 0.1


@pytest.mark.parametrize("seed", range(40))
def test_what_the_plan_covers_does_not_run_short_on_time(seed):
    rng = np.random.default_rng(seed)
    legs = tuple(
        replace(
            leg(str(number), float(hours)),
            cylinder_l_per_h=float(rng.uniform(30, 200)) if rng.random() < 0.7 else None,
            concentrator_w=float(rng.uniform(20, 120)) if rng.random() < 0.7 else None,
            mains=bool(rng.random() < 0.3),
            cold_share=float(rng.choice([1.0, 0.8])),
        )
        for number, hours in enumerate(rng.uniform(0.4, 6.0, 5))
    )
    found = select(legs, [SMALL], MACHINE, reserve_fraction=0.0)
    carried = carried_of(found, [SMALL], TripLegs([], [], legs, tuple(range(5)), EVEN), MACHINE)
    power = MACHINE if found.concentrator else None
    short = play(legs, carried, power, on_time(legs, EVEN), EVEN).short_h[0]
    assert short.sum() <= found.uncovered_h + 0.02
