"""What is at hand: own cylinders as they read, liquid vessels, packs that age and what may fly of them."""

import json

import numpy as np
import pytest

from planner.kit.cylinder import contents_l
from tests.kit.trips import cylinder_road, demo, flight_on_concentrator, kit_of, on_liquid, own_alone, own_packs, packs


def test_own_cylinders_count_with_their_gauge():
    usable = contents_l(2.0, 100.0) - contents_l(2.0, 14.0)
    assert own_alone(100.0) == pytest.approx(4.0 - usable / 120.0, abs=0.02)


def test_own_cylinders_at_different_gauges_are_not_taken_for_their_mean():
    # A flight that only one of them may go on would else be given half of what the full one holds.
    def litres(gauge):
        return contents_l(2.0, gauge) - contents_l(2.0, 14.0)

    assert own_alone(60.0, 180.0) == pytest.approx(4.0 - (litres(60.0) + litres(180.0)) / 120.0, abs=0.02)
    owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": gauge} for gauge in (60.0, 180.0)]
    plan = kit_of(cylinder_road(1.0, 60, owned_cylinders=owned))
    assert [item.what for item in plan.own.items] == ["Cylinder 2 L, 200 bar, own at 180 bar"]
    assert plan.own.items[0].brought_by == "own, at hand"


def test_a_hot_gauge_of_an_own_cylinder_counts_for_less():
    assert own_alone(150.0, celsius=45.0) > own_alone(150.0, celsius=15.0)


def test_the_own_set_stands_beside_a_proposed_one_that_covers_more():
    owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": 100.0}]
    plan = kit_of(cylinder_road(2.0, 240, owned_cylinders=owned))
    assert plan.uncovered_h == 0.0
    assert plan.own.uncovered_h > 2.0
    assert plan.own.run_out.chance > plan.run_out.chance


def test_a_cylinder_without_a_gauge_reading_is_taken_as_full_and_that_is_said():
    plan = kit_of(cylinder_road(1.0, 60, owned_cylinders=[{"size_id": "eu_2"}]))
    assert any("taken as full. Read the gauge" in fault for fault in plan.faults)


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


def test_a_gauge_above_what_the_cylinder_can_have_counts_as_empty_and_is_said():
    owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": 340.0, "temperature_c": 15.0}]
    plan = kit_of(cylinder_road(2.0, 240, owned_cylinders=owned))
    assert plan.own is None
    assert all("own" not in item.what for item in plan.items)
    assert any("340 bar" in fault and "counts as empty" in fault for fault in plan.faults)


def test_an_empty_own_cylinder_takes_nothing_from_a_full_one():
    assert own_alone(100.0, 2.0) == pytest.approx(own_alone(100.0), abs=0.01)


def test_liquid_is_sized_by_its_mass_and_carried():
    plan = on_liquid()
    assert plan.uncovered_h == 0.0
    assert plan.parts[0].hours_by == pytest.approx({"liquid": 4.0})
    assert [(item.kind, item.mass_kg) for item in plan.items] == [("liquid", 3.5)]
    assert any(one.lead == "Liquid oxygen." for one in plan.cautions)
    # 480 L with a quarter on top, at 1.354 g a litre (density of oxygen at 15 degC and 1 atm)
    assert plan.turn_back[0].liquid_kg == pytest.approx(480 * 1.25 * 1.354 / 1000, rel=0.01)


def test_too_little_liquid_is_uncovered_time():
    litres = 0.3 / 1.354e-3
    assert on_liquid(liquid_kg=0.3).uncovered_h == pytest.approx(4.0 - litres / 120.0, abs=0.02)


def test_liquid_is_never_counted_on_a_flight():
    plan = on_liquid("flight")
    assert plan.uncovered_h == pytest.approx(4.0)
    assert plan.items == ()
    assert any("never carried on aircraft" in fault for fault in plan.faults)


def test_an_old_pack_counts_for_less_and_keeps_its_printed_energy(tmp_path, monkeypatch):
    own_packs(tmp_path, monkeypatch, 95)
    new, old = (kit_of(flight_on_concentrator(180, battery_age_years=age)) for age in (0.0, 5.0))
    assert packs(old) > packs(new)
    assert next(item.what for item in old.items if item.kind == "battery") == "Battery, 95 Wh"
    # 178 min at 100 W by the 150 % rule are 445 Wh; a pack gives 92 % of 95 Wh: five would do if it gave all.
    bare = kit_of(flight_on_concentrator(178), draws=50)
    assert 5 * 95 * 0.92 < 445.0 < 5 * 95
    assert bare.parts[0].mass_kg == pytest.approx(8.0 - 2 * 0.8 + 6 * 0.8)


def test_a_cylinder_left_behind_is_not_read_as_there_during_the_flight():
    table = json.loads(demo("copd_layover").model_dump_json())
    owned = [{"size_id": "eu_2", "gauge_bar": 150.0}]
    plan = kit_of(demo("copd_layover", kit=table["kit"] | {"owned_cylinders": owned, "backup_h": 1.0}))
    before, start, middle = 105.0 + 120.0 - 1.0, 105.0 + 120.0 + 1.0, 105.0 + 120.0 + 75.0  # the first flight
    assert np.interp(before, plan.left.minutes, plan.left.litres) > 50.0
    assert np.interp([start, middle], plan.left.minutes, plan.left.litres).tolist() == [0.0, 0.0]
