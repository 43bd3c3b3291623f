"""The kit of the demo trips: nothing without decisions, sums that agree, readings that warn in time."""

import json
from dataclasses import replace

import numpy as np
import pytest

from planner.errors import InputError
from planner.kit.cautions import kit_cautions
from planner.kit.cylinder import contents_l
from planner.kit.legs import Choice, Leg
from planner.kit.programme import Cancelled
from planner.kit.selection import LegUse
from planner.kit.sizes import load_cylinders
from planner.kit.turn_back import turn_back
from tests.kit.trips import cylinder_road, demo, flight_on_concentrator, kit_of


@pytest.fixture(scope="module")
def copd():
    return kit_of(demo("copd_layover"))


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
    assert "If the cabin loses pressure." in leads
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


def test_a_stationary_concentrator_is_not_planned_in_a_cabin_with_a_plug():
    plan = kit_of(flight_on_concentrator(120, "stationary_5", part={"power": "mains"}))
    assert plan.uncovered_h == pytest.approx(2.0)
    assert any("not for use in an aircraft cabin" in fault for fault in plan.faults)


def test_own_batteries_above_the_weight_that_can_be_carried_are_said():
    part = {"carry_limit_kg": 5.0}
    plan = kit_of(flight_on_concentrator(120, "portable_dual", part=part, batteries=8))
    assert any("kg carried are above the 5 kg" in fault for fault in plan.faults)


def test_sizes_beyond_those_compared_are_named():
    plan = kit_of(cylinder_road(offered_size_ids=["eu_1", "eu_2", "eu_3", "eu_5", "eu_10"]))
    assert any("left out: 10 L, 200 bar" in fault for fault in plan.faults)


def test_with_a_full_cylinder_of_another_size_beside_it_the_reading_is_lower():
    leg = Leg("r", "Road", 4.0, 4.0, 120.0, None, False, False, False, False, False, False, None, False)
    sizes = load_cylinders()
    choices = [
        Choice(one.id, one.name, one.usable_l(14.0), one.full_l, one.gross_kg, None, True, size=one)
        for one in (sizes["eu_3"], sizes["eu_1"])
    ]

    def reading(cylinders):
        use = LegUse("r", 0.0, 0.0, 0.0, {"cylinder": 4.0}, cylinders, cylinders, {"eu_3": 480.0}, 5.0, 0.0)
        found = turn_back([leg], [use], choices, None, 0, reserve_fraction=0.0, residual_bar=14.0)
        return dict(found[0].gauge_bar)["3 L, 200 bar"], found[0].fresh_cylinders

    alone, _ = reading({"eu_3": 1})
    beside, fresh = reading({"eu_3": 1, "eu_1": 1})
    held = contents_l(3.0, beside) - contents_l(3.0, 14.0)
    assert held == pytest.approx(480.0 - (contents_l(1.0, 200.0) - contents_l(1.0, 14.0)), rel=0.01)
    assert beside < alone
    assert fresh == 1


def test_a_concentrator_left_at_home_gives_nothing_at_a_plug():
    case = cylinder_road(1.0, 60)
    part = json.loads(case.trip.model_dump_json())["parts"][0]
    part |= {"sources": ["cylinder", "concentrator"], "power": "mains"}
    decisions = json.loads(case.model_dump_json())["decisions"]
    kit = {"country": "EU", "concentrator_id": "portable_dual"}
    plan = kit_of(demo("copd_layover", trip={"parts": [part]}, decisions=decisions, kit=kit))
    assert all("oncentrator" not in item.what for item in plan.items)
    assert plan.left.litres[-1] == pytest.approx(plan.left.litres[0] - 60 * 1.05, abs=0.5)  # with 5 % left running


def test_an_assumption_entered_is_the_one_that_is_played_and_printed():
    plan = kit_of(cylinder_road(2.0, 240, assumptions={"fill_mean": 0.9, "left_running": 0.0}))
    printed = dict(plan.assumptions)
    assert printed["Cylinder filled to"] == "90 % of full, spread 3 %"
    assert printed["Left running when not worn"] == "0 % more oxygen"
    sizes = {one.name: one for one in load_cylinders().values()}
    of = [sizes[item.what.removeprefix("Cylinder ").removesuffix(", against delays")] for item in plan.items]
    usable = sum(item.count * size.usable_l(14.0, 0.9) for item, size in zip(plan.items, of, strict=True))
    assert plan.left.litres[0] == pytest.approx(usable)


def test_a_worse_machine_fails_more_often():
    usual = kit_of(flight_on_concentrator(300, "portable_dual"))
    worse = kit_of(flight_on_concentrator(300, "portable_dual", assumptions={"concentrator_mttf_h": 50.0}))
    assert worse.run_out.by_cause["concentrator failed"] > 10 * usual.run_out.by_cause["concentrator failed"]


def test_the_handbooks_number_stands_beside_the_real_gas():
    plan = kit_of(cylinder_road(2.0, 120, country="US", offered_size_ids=["us_e"]))
    check = plan.cross_checks[0]
    assert check.name == "E (M24)"
    # 0.28 L/psi over 138.9 - 14 bar of gauge (1 bar = 14.504 psi)
    assert check.textbook_l == pytest.approx(0.28 * (138.9 - 14.0) * 14.504, rel=0.001)
    assert check.real_l == pytest.approx(contents_l(4.64, 138.9, 21.1) - contents_l(4.64, 14.0, 21.1))


def test_a_conserver_is_listed_and_weighed():
    decision = {"part_id": "r", "activity": "rest", "device_id": "pulse_conserver", "setting": 2}
    trip = json.loads(cylinder_road().trip.model_dump_json())
    plan = kit_of(demo("copd_layover", trip=trip, decisions=[decision], kit={"country": "EU"}))
    item = next(one for one in plan.items if one.kind == "conserver")
    assert item.mass_kg == 0.4
    assert plan.peak_kg == pytest.approx(sum(one.mass_kg for one in plan.items))
    assert all(one.kind != "conserver" for one in kit_of(cylinder_road()).items)


def test_pulses_asleep_are_a_caution_of_the_kit():
    part = {
        "part_id": "r",
        "kind": "stay",
        "duration_min": 480,
        "sources": ["cylinder"],
        "shares": {"rest": 0.0, "asleep": 1.0},
    }
    decision = {"part_id": "r", "activity": "asleep", "device_id": "pulse_conserver", "setting": 2}
    plan = kit_of(demo("copd_layover", trip={"parts": [part]}, decisions=[decision], kit={"country": "EU"}))
    assert any(one.lead == "Pulses asleep." and "Cuvelier" in one.source for one in plan.cautions)


def test_cold_is_a_caution_where_a_concentrator_is_carried():
    part = {"equipment_c": -5.0}
    leads = [one.lead for one in kit_of(flight_on_concentrator(120, "portable_dual", part=part)).cautions]
    assert "Cold." in leads
    assert "Cold." not in [one.lead for one in kit_of(flight_on_concentrator(120, "portable_dual")).cautions]


def test_a_concentrator_alone_is_said():
    alone = kit_of(flight_on_concentrator(120, "portable_dual", part={"name": "Flight 7"}))
    assert any(one.lead == "No second source." and "Flight" in one.text for one in alone.cautions)
    helped = kit_of(flight_on_concentrator(120, "portable_dual", part={"sources": ["concentrator", "airline"]}))
    assert all(one.lead != "No second source." for one in helped.cautions)


@pytest.mark.parametrize(("kilograms", "near"), [(4.85, True), (5.3, True), (4.5, False), (6.0, False)])
def test_a_cylinder_near_5_kg_is_to_be_weighed_before_a_flight(kilograms, near):
    road = Leg("r", "Road", 1.0, 1.0, 60.0, None, False, False, False, False, False, False, None, False)
    choice = Choice("e", "E", 600.0, 680.0, kilograms, None, True)
    leads = [one.lead for one in kit_cautions([replace(road, flight=True)], None, [choice], None, 0)]
    assert ("E is near 5 kg." in leads) == near
    assert "E is near 5 kg." not in [one.lead for one in kit_cautions([road], None, [choice], None, 0)]


def test_parts_of_several_legs_are_told_as_one():
    part = {"part_id": "s", "kind": "stay", "duration_min": 1440, "sources": ["cylinder", "stationary"],
            "shares": {"rest": 0.6, "asleep": 0.4}}  # fmt: skip
    decisions = [
        {"part_id": "s", "activity": "rest", "device_id": "pulse_conserver", "setting": 1},
        {"part_id": "s", "activity": "asleep", "device_id": "cannula", "flow_l_min": 1.0},
    ]
    plan = kit_of(demo("copd_layover", trip={"parts": [part]}, decisions=decisions, kit={"country": "EU"}))
    assert len(plan.parts) == 1
    assert plan.parts[0].hours_by == pytest.approx({"cylinder": 24 * 0.6, "stationary": 24 * 0.4})
    assert plan.left.minutes[-1] == pytest.approx(1440.0)
    assert sum(one.run_out_chance for one in plan.parts) == pytest.approx(plan.run_out.chance)


def test_a_part_that_the_carrier_shares_is_not_said_to_hang_on_the_concentrator_alone(copd):
    text = next(one.text for one in copd.cautions if one.lead == "No second source.")
    assert "Flight 1" not in text
    assert "Check-in and wait" in text


def test_hours_of_a_second_source_help_where_they_may_be_carried_and_the_rest_is_told(copd):
    table = json.loads(demo("copd_layover").model_dump_json())
    second = kit_of(demo("copd_layover", kit=table["kit"] | {"backup_h": 2.0}))
    # The flights allow no cylinder, so a broken concentrator still ends the trip there; on the road it does not.
    assert second.run_out.chance <= copd.run_out.chance
    assert second.parts[0].run_out_chance < 0.1 * copd.parts[0].run_out_chance
    told = {part.part_id for part in second.parts if part.backup_missing_h > 0.0}
    assert "layover_out" in told  # a concentrator alone may be used there
    assert "road_out" not in told
    assert dict(second.assumptions)["Second source wherever a machine or the carrier is relied on"] == "2 h"


def test_who_brings_what_is_told(copd):
    by = {item.kind: item.brought_by for item in copd.items}
    assert by["carrier"] == "carrier, asked for ahead"
    assert by["stationary"] == "supplier at the destination"
    assert by["battery"] == by["concentrator"] == "home-care supplier, before leaving"
