"""The kit of the demo trips: nothing without decisions, sums that agree, readings that warn in time."""

import json

import numpy as np
import pytest

from planner.case import Case
from planner.catalogue import profile_text
from planner.errors import InputError
from planner.kit.cylinder import contents_l
from planner.kit.legs import Leg
from planner.kit.programme import Cancelled
from planner.kit.selection import LegUse
from planner.kit.sizes import load_cylinders
from planner.kit.supply import plan_kit
from planner.kit.turn_back import turn_back
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


def own_packs(tmp_path, monkeypatch, watt_hours):
    """A service's own concentrator class, like the dual one with other packs."""
    text = profile_text("concentrators.toml")
    entry = "[[entry]]" + next(one for one in text.split("[[entry]]") if 'id = "portable_dual"' in one)
    entry = entry.replace("portable_dual", "own").replace("battery_wh = 95", f"battery_wh = {watt_hours}")
    header = 'format = "oxygen-concentrators"\nversion = 1\n'
    (tmp_path / "concentrators.toml").write_text(header + entry)
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))


def flight_on_concentrator(minutes=300, concentrator_id="own", part=None, **kit):
    """A flight on a concentrator at 2 L/min (100 W)."""
    leg = {"part_id": "f", "kind": "flight", "duration_min": minutes, "sources": ["concentrator"]} | (part or {})
    decision = {"part_id": "f", "activity": "rest", "device_id": "cannula", "flow_l_min": 2.0}
    kit = {"country": "EU", "concentrator_id": concentrator_id} | kit
    return demo("copd_layover", trip={"parts": [leg]}, decisions=[decision], kit=kit)


def packs(plan):
    return sum(item.count for item in plan.items if item.what.startswith("Battery"))


def test_at_most_two_spares_above_100_wh_fly(tmp_path, monkeypatch):
    own_packs(tmp_path, monkeypatch, 150)
    plan = kit_of(flight_on_concentrator(180))
    assert 0 < packs(plan) <= 4  # two in the device and two spares
    longer = kit_of(flight_on_concentrator(600))
    assert longer.uncovered_h == pytest.approx(10.0)
    entered = kit_of(flight_on_concentrator(180, batteries=7))
    assert packs(entered) <= 4
    assert any("7 batteries of 150 Wh were entered; 4 are planned" in fault for fault in entered.faults)


def test_the_rule_goes_by_the_energy_printed_on_an_old_pack(tmp_path, monkeypatch):
    own_packs(tmp_path, monkeypatch, 105)
    plan = kit_of(flight_on_concentrator(60, battery_age_years=3.0))
    assert any(one.lead == "Batteries need consent." for one in plan.cautions)


def test_packs_above_160_wh_are_not_planned_on_a_trip_with_a_flight(tmp_path, monkeypatch):
    own_packs(tmp_path, monkeypatch, 180)
    plan = kit_of(flight_on_concentrator(60))
    assert packs(plan) == 0
    assert plan.uncovered_h == pytest.approx(1.0)
    assert any("above the 160 Wh" in fault for fault in plan.faults)


def test_a_stationary_concentrator_is_not_planned_in_a_cabin_with_a_plug():
    plan = kit_of(flight_on_concentrator(120, "stationary_5", part={"power": "mains"}))
    assert plan.uncovered_h == pytest.approx(2.0)
    assert any("not for use in an aircraft cabin" in fault for fault in plan.faults)


def test_own_batteries_above_the_weight_that_can_be_carried_are_said():
    part = {"carry_limit_kg": 5.0}
    plan = kit_of(flight_on_concentrator(120, "portable_dual", part=part, batteries=8))
    assert any("kg carried are above the 5 kg" in fault for fault in plan.faults)


def test_a_gauge_above_what_the_cylinder_can_have_counts_as_empty_and_is_said():
    owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": 340.0, "temperature_c": 15.0}]
    plan = kit_of(cylinder_road(2.0, 240, owned_cylinders=owned))
    assert plan.uncovered_h == pytest.approx(4.0)
    assert any("340 bar" in fault and "counts as empty" in fault for fault in plan.faults)


def test_an_empty_own_cylinder_takes_nothing_from_a_full_one():
    def uncovered(*gauges):
        owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": gauge, "temperature_c": 15.0} for gauge in gauges]
        return kit_of(cylinder_road(2.0, 240, owned_cylinders=owned)).uncovered_h

    assert uncovered(100.0, 2.0) == pytest.approx(uncovered(100.0), abs=0.01)


def test_sizes_beyond_those_compared_are_named():
    plan = kit_of(cylinder_road(offered_size_ids=["eu_1", "eu_2", "eu_3", "eu_5", "eu_10"]))
    assert any("left out: 10 L, 200 bar" in fault for fault in plan.faults)


def test_liquid_is_said_with_its_mass_and_never_for_a_flight():
    def faults(kind):
        part = {"part_id": "r", "kind": kind, "duration_min": 240, "sources": ["liquid"]}
        decision = {"part_id": "r", "activity": "rest", "device_id": "cannula", "flow_l_min": 2.0}
        return kit_of(demo("copd_layover", trip={"parts": [part]}, decisions=[decision], kit={})).faults

    assert any("0.7 kg of liquid" in fault for fault in faults("road"))
    assert any("never carried on aircraft" in fault for fault in faults("flight"))


def test_with_a_full_cylinder_of_another_size_beside_it_the_reading_is_lower():
    leg = Leg("r", "Road", 4.0, 4.0, 120.0, None, False, False, False, False, False, False, None, False)
    sizes = load_cylinders()

    def reading(cylinders):
        use = LegUse("r", 0.0, 0.0, {"cylinder": 4.0}, cylinders, cylinders, {}, {"eu_3": 480.0}, 0.0, 5.0, 0.0)
        found = turn_back([leg], [use], sizes, None, 0, reserve_fraction=0.0, residual_bar=14.0)
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
