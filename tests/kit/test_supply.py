"""The kit of the demo trips: nothing without decisions, sums that agree, readings that warn in time."""

import json

import numpy as np
import pytest

from planner.case import Case
from planner.catalogue import profile_text
from planner.errors import InputError
from planner.kit.cylinder import contents_l
from planner.kit.programme import Cancelled
from planner.kit.sizes import load_cylinders
from planner.kit.supply import plan_kit
from planner.trip.itinerary import lay_out


def demo(name, **sections):
    table = json.loads(profile_text(f"demo/{name}.json")) | sections
    return Case.model_validate_json(json.dumps(table))


def kit_of(case, **keywords):
    spans = lay_out(case.trip, case.policy).parts
    return plan_kit(spans, case.trip.parts, case.decisions, case.kit, case.policy, **keywords)


@pytest.fixture(scope="module")
def copd():
    return kit_of(demo("copd_layover"))


def cylinder_road(litres_per_min=2.0, minutes=240, **kit):
    """A drive on cylinders alone."""
    part = {"part_id": "r", "kind": "road", "duration_min": minutes, "start_elevation_m": 100.0}
    part |= {"sources": ["cylinder"], "shares": {"rest": 1.0}}
    decision = {"part_id": "r", "activity": "rest", "device_id": "cannula", "flow_l_min": litres_per_min}
    return demo("copd_layover", trip={"parts": [part]}, decisions=[decision], kit={"country": "EU"} | kit, outcome=None)


def test_nothing_is_sized_from_a_flow_that_nobody_decided():
    plan = kit_of(demo("neuromuscular_car_and_plane"))
    assert plan.items == ()
    assert plan.run_out is None
    assert all(part.litres is None for part in plan.parts)
    assert len(plan.undecided) == 14


def test_an_undecided_part_is_named_and_the_others_are_sized():
    case = demo("copd_layover")
    table = json.loads(case.model_dump_json())
    fewer = [one for one in table["decisions"] if (one["part_id"], one["activity"]) != ("flight_1", "walking")]
    plan = kit_of(demo("copd_layover", decisions=fewer))
    assert plan.undecided == ("Flight 1: walking",)
    assert plan.items


def test_litres_are_flow_times_time_times_share(copd):
    # Flight 1: 150 min, 95 % at rest on 2 L/min and 5 % walking on 3 L/min.
    flight = next(part for part in copd.parts if part.part_id == "flight_1")
    assert flight.litres == pytest.approx(150 * (0.95 * 2 + 0.05 * 3))


def test_the_same_case_gives_the_same_kit(copd):
    again = kit_of(demo("copd_layover"))
    assert again.items == copd.items
    assert again.run_out == copd.run_out
    assert np.array_equal(again.left.watt_hours, copd.left.watt_hours)


def test_the_chance_by_part_is_that_of_the_whole(copd):
    assert sum(part.run_out_chance for part in copd.parts) == pytest.approx(copd.run_out.chance)


def test_without_what_is_carried_against_delays_running_out_is_more_likely(copd):
    words, chance = copd.lighter
    assert "against delays" in words
    assert chance > copd.run_out.chance


def test_what_is_left_falls_and_is_less_when_late(copd):
    left = copd.left
    assert left.minutes[0] == 0.0
    assert (left.watt_hours_stress <= left.watt_hours + 1e-9).all()
    assert (left.watt_hours_low <= left.watt_hours_high).all()


def test_a_drive_on_cylinders_carries_enough_with_its_reserve():
    case = cylinder_road()
    plan = kit_of(case)
    assert plan.uncovered_h == 0.0
    sizes = {f"Cylinder {one.name}": one for one in load_cylinders().values()}
    usable = sum(
        item.count * sizes[item.what.removesuffix(", against delays")].usable_l(case.policy.residual_bar)
        for item in plan.items
    )
    assert usable >= 480.0 * 1.25


def test_the_turn_back_reading_holds_what_is_still_needed_with_the_reserve():
    plan = kit_of(cylinder_road(1.0, 120))
    reading = plan.turn_back[0]
    name, gauge = reading.gauge_bar[0]
    assert reading.litres_needed == pytest.approx(120 * 1.25)
    capacity = float(name.split(" L")[0])
    held = contents_l(capacity, gauge, reading.temperature_c) - contents_l(capacity, 14.0)
    assert held == pytest.approx(reading.litres_needed, rel=0.01)


def test_own_cylinders_count_with_their_gauge_and_no_others_are_proposed():
    owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": 100.0, "temperature_c": 15.0}]
    plan = kit_of(cylinder_road(2.0, 240, owned_cylinders=owned))
    usable = contents_l(2.0, 100.0) - contents_l(2.0, 14.0)
    assert plan.uncovered_h == pytest.approx(4.0 - usable / 120.0, abs=0.02)
    assert all("1 L" not in item.what for item in plan.items)


def test_a_hot_gauge_of_an_own_cylinder_counts_for_less():
    def uncovered(celsius):
        owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": 150.0, "temperature_c": celsius}]
        return kit_of(cylinder_road(2.0, 240, owned_cylinders=owned)).uncovered_h

    assert uncovered(45.0) > uncovered(15.0)


def test_a_part_without_any_source_is_said_and_uncovered():
    case = cylinder_road()
    part = json.loads(case.trip.model_dump_json())["parts"][0] | {"sources": []}
    plan = kit_of(
        demo("copd_layover", trip={"parts": [part]}, decisions=json.loads(case.model_dump_json())["decisions"])
    )
    assert plan.uncovered_h == pytest.approx(4.0)
    assert any("No oxygen source is allowed" in fault for fault in plan.faults)


def test_a_concentrator_above_its_altitude_is_said():
    case = cylinder_road()
    part = json.loads(case.trip.model_dump_json())["parts"][0]
    part |= {"highest_m": 4200.0, "sources": ["concentrator"], "power": "vehicle"}
    decisions = json.loads(case.model_dump_json())["decisions"]
    plan = kit_of(
        demo(
            "copd_layover",
            trip={"parts": [part]},
            decisions=decisions,
            kit={"country": "EU", "concentrator_id": "portable_dual"},
        )
    )
    assert any("is for up to 4000 m" in fault for fault in plan.faults)
    assert plan.uncovered_h == pytest.approx(4.0)


def test_a_pulse_decision_is_sized_by_its_boluses():
    case = cylinder_road()
    decision = {"part_id": "r", "activity": "rest", "device_id": "pulse_conserver", "setting": 2}
    trip = json.loads(case.trip.model_dump_json())
    plan = kit_of(
        demo("copd_layover", trip=trip, decisions=[decision], kit={"country": "EU", "breathing_rate_min": 20})
    )
    litres = plan.parts[0].litres
    assert 0.0 < litres < 480.0  # less than 2 L/min for four hours: a setting is not litres per minute


def test_fire_and_carriage_cautions_stand_with_every_kit(copd):
    leads = [one.lead for one in copd.cautions]
    assert "No smoking or flames within 3 m." in leads
    assert "On aircraft." in leads
    assert all(one.source for one in copd.cautions)


def test_an_unknown_size_is_refused_by_name():
    with pytest.raises(InputError, match="no cylinder size 'xx_1'"):
        kit_of(cylinder_road(offered_size_ids=["xx_1"]))


def test_work_can_be_stopped_and_tells_how_far_it_is():
    told = []
    kit_of(cylinder_road(), on_progress=lambda what, share: told.append((what, share)))
    assert [share for _, share in told] == sorted(share for _, share in told)
    with pytest.raises(Cancelled):
        kit_of(cylinder_road(), cancelled=lambda: True)
