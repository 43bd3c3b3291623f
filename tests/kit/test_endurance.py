"""Trips played with delays: the order of use, where a delay is spent, and what can only help."""

from dataclasses import replace

import numpy as np
import pytest

from planner.kit.endurance import Assumptions, Carried, Draws, draw_trips, on_time, play, run_out
from planner.kit.legs import Leg, Power

ASSUMED = Assumptions(flow_sd=0.0, fill_sd=0.0, battery_sd=0.0, left_running=0.0)
ROAD = Leg("r", "Road", 2.0, 2.0, 120.0, None, False, False, False, False, False, False, None, False)
FLIGHT = Leg("f", "Flight", 3.0, 3.0, None, 50.0, False, False, False, False, True, False, None, False)
POWER = Power("c", "Concentrator", 6.0, 90.0, 100.0, 100.0, 0.8, 1, 100.0, 10)


def certain(legs, waits_h=None, **changes):
    """One trip without chance: full cylinders and batteries, nothing fails."""
    drawn = on_time(legs)
    ones = {"fill": np.ones(1), "battery": np.ones(1)}
    waits = drawn.waits_h if waits_h is None else np.array([waits_h])
    return replace(drawn, waits_h=waits, **(ones | changes))


def trips(legs, draws=4000, seed=1, waits_min=None):
    rng = np.random.default_rng(seed)
    waits = np.zeros((draws, len(legs))) if waits_min is None else waits_min
    return draw_trips(legs, waits, np.zeros((draws, len(legs))), rng, Assumptions())


def test_a_trip_on_time_uses_what_it_needs():
    played = play([ROAD], Carried((300.0,), (1e6,), 0), None, certain([ROAD]), ASSUMED)
    assert played.short_h[0, 0] == 0.0
    assert played.litres_left[0, 0] == pytest.approx(60.0)


def test_what_is_missing_is_told_in_hours():
    played = play([ROAD], Carried((120.0,), (1e6,), 0), None, certain([ROAD]), ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(1.0)


def test_a_flights_delay_is_spent_waiting_in_the_part_before_it():
    legs = [ROAD, FLIGHT]
    carried = Carried((300.0, 0.0), (1e6, 0.0), 2)
    late = play(legs, carried, POWER, certain(legs, waits_h=[0.0, 1.0]), ASSUMED)
    assert late.short_h[0, 0] == pytest.approx(0.5)  # three hours at 120 L/h need 360 L
    assert late.short_h[0, 1] == 0.0


def test_the_carriers_oxygen_comes_first_and_the_battery_stays_full():
    leg = replace(FLIGHT, airline=True)
    played = play([leg], Carried((0.0,), (0.0,), 1), POWER, certain([leg]), ASSUMED)
    assert played.short_h[0, 0] == 0.0
    assert played.watt_hours_left[0, 0] == pytest.approx(100.0)


def test_when_the_carriers_oxygen_is_missing_the_battery_helps_and_the_cause_is_named():
    leg = replace(FLIGHT, airline=True)
    no_airline = certain([leg], airline_ok=np.zeros((1, 1), dtype=bool))
    played = play([leg], Carried((0.0,), (0.0,), 1), POWER, no_airline, ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(1.0)  # 100 Wh at 50 W cover 2 of 3 h
    assert run_out(played).by_cause["promised oxygen was missing"] == 1.0


def test_charge_for_the_next_flight_is_kept_and_the_cylinder_used_before_it():
    road = replace(ROAD, concentrator_w=50.0)
    legs = [road, replace(FLIGHT, hours=2.0, oxygen_h=2.0)]
    played = play(legs, Carried((240.0, 0.0), (1e6, 0.0), 2), POWER, certain(legs), ASSUMED)
    assert played.short_h.sum() == 0.0
    assert played.litres_left[0, 0] == pytest.approx(120.0)  # 50 Wh may be spent, 150 Wh wait for the flight
    assert played.watt_hours_left[0, 0] == pytest.approx(150.0)


def test_a_plug_gives_oxygen_and_charges():
    wait = replace(ROAD, cylinder_l_per_h=None, concentrator_w=50.0, mains=True)
    legs = [FLIGHT, wait]
    played = play(legs, Carried((0.0, 0.0), (0.0, 0.0), 2), POWER, certain(legs), ASSUMED)
    assert played.watt_hours_left[0].tolist() == pytest.approx([50.0, 200.0])


def test_a_broken_concentrator_is_named_as_the_cause():
    broken = certain([FLIGHT], failure_h=np.array([1.0]))
    played = play([FLIGHT], Carried((0.0,), (0.0,), 3), POWER, broken, ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(3.0)
    assert run_out(played).by_cause["concentrator failed"] == 1.0


def test_parts_and_causes_add_up_to_the_chance():
    legs = [ROAD, FLIGHT, replace(ROAD, part_id="b")]
    waits = np.random.default_rng(3).exponential(30.0, (4000, 3))
    found = run_out(
        play(legs, Carried((700.0, 0, 0), (1e6, 1e6, 1e6), 3), POWER, trips(legs, waits_min=waits), ASSUMED)
    )
    assert 0.0 < found.chance < 1.0
    assert sum(found.by_leg) == pytest.approx(found.chance)
    assert sum(found.by_cause.values()) == pytest.approx(found.chance)
    assert found.low < found.chance < found.high


@pytest.mark.parametrize("more", [{"batteries": 1}, {"litres": 100.0}, {"batteries": 2, "litres": 300.0}])
def test_more_of_anything_never_raises_the_chance_on_the_same_trips(more):
    legs = [replace(ROAD, concentrator_w=50.0), FLIGHT, replace(ROAD, part_id="b", concentrator_w=50.0)]
    waits = np.random.default_rng(3).exponential(40.0, (4000, 3))
    drawn = trips(legs, waits_min=waits)
    carried = Carried((250.0, 0.0, 0.0), (1e6, 1e6, 1e6), 3)
    larger = Carried((250.0 + more.get("litres", 0.0), 0.0, 0.0), (1e6, 1e6, 1e6), 3 + more.get("batteries", 0))
    before, after = (run_out(play(legs, one, POWER, drawn, Assumptions())).chance for one in (carried, larger))
    assert after <= before


def test_the_same_seed_gives_the_same_trips():
    legs = [ROAD]
    first, second = (trips(legs, seed=5) for _ in range(2))
    assert np.array_equal(first.flow, second.flow)
    assert np.array_equal(first.fill, second.fill)
    assert isinstance(first, Draws)


def test_draws_follow_their_assumptions():
    drawn = trips([ROAD], draws=20_000)
    assert drawn.fill.mean() == pytest.approx(0.98, abs=0.01)
    assert drawn.fill.max() <= 1.0
    assert drawn.flow.std() == pytest.approx(0.06, abs=0.003)
    assert drawn.failure_h.mean() == pytest.approx(1500.0, rel=0.05)
    assert drawn.airline_ok.mean() == pytest.approx(0.99, abs=0.005)


def test_gas_left_behind_before_a_flight_is_not_there_after_it():
    # Two cylinders of 300 L; only one may fly on, though nothing of the other was used.
    still = replace(ROAD, oxygen_h=0.0)
    legs = [still, replace(ROAD, part_id="b", hours=4.0, oxygen_h=4.0)]
    played = play(legs, Carried((600.0, 0.0), (600.0, 300.0), 0), None, certain(legs), ASSUMED)
    assert played.short_h[0, 1] == pytest.approx(1.5)  # 300 of 480 L


def test_swapped_cylinders_do_not_add_to_what_was_left_in_the_old_ones():
    legs = [replace(ROAD, hours=1.0, oxygen_h=1.0), replace(ROAD, part_id="b")]
    played = play(legs, Carried((300.0, 300.0), (300.0, 300.0), 0), None, certain(legs), ASSUMED)
    assert played.litres_left[0].tolist() == pytest.approx([180.0, 60.0])


def test_the_wait_before_a_trip_that_begins_with_a_flight_is_spent_on_its_own_oxygen():
    played = play([FLIGHT], Carried((0.0,), (0.0,), 2), POWER, certain([FLIGHT], waits_h=[2.0]), ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(1.0)  # 200 Wh at 50 W cover 4 of 5 h


def test_a_plug_gives_nothing_where_no_concentrator_is_carried():
    wait = replace(ROAD, cylinder_l_per_h=None, concentrator_w=50.0, mains=True)
    played = play([wait], Carried((0.0,), (0.0,), 0), None, certain([wait]), ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(2.0)


def test_a_hotels_unit_and_a_cars_plug_do_not_cover_the_wait_at_the_airport():
    hotel = replace(ROAD, cylinder_l_per_h=None, stationary=True)
    car = replace(ROAD, cylinder_l_per_h=None, concentrator_w=50.0, vehicle=True)
    legs = [hotel, FLIGHT]
    played = play(legs, Carried((0.0, 0.0), (0.0, 0.0), 0), None, certain(legs, waits_h=[0.0, 1.0]), ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(1.0)
    legs = [car, replace(FLIGHT, airline=True)]
    played = play(legs, Carried((0.0, 0.0), (0.0, 0.0), 2), POWER, certain(legs, waits_h=[0.0, 1.0]), ASSUMED)
    assert played.watt_hours_left[0, 0] == pytest.approx(150.0)  # an hour of 50 W from two packs of 100 Wh
    terminal = [replace(car, mains=True, vehicle=False, terminal=True), legs[1]]
    played = play(terminal, Carried((0.0, 0.0), (0.0, 0.0), 2), POWER, certain(legs, waits_h=[0.0, 1.0]), ASSUMED)
    assert played.watt_hours_left[0, 0] == pytest.approx(200.0)


def test_the_carriers_oxygen_does_not_cover_the_wait_at_the_gate():
    leg = replace(FLIGHT, airline=True, concentrator_w=None)
    played = play([leg], Carried((0.0,), (0.0,), 0), None, certain([leg], waits_h=[2.0]), ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(2.0)


def test_liquid_is_drawn_first_and_boils_away_also_when_late():
    leg = replace(ROAD, liquid_l_per_h=120.0, hours=3.0, oxygen_h=1.0)
    carried = Carried((500.0,), (500.0,), 0, (400.0,), (400.0,), (50.0,))
    on_plan = play([leg], carried, None, certain([leg]), ASSUMED)
    assert on_plan.litres_left[0, 0] == pytest.approx(500.0 + 400.0 - 150.0)  # three hours boil away more than is drawn
    legs = [leg, replace(FLIGHT, airline=True)]
    late = Carried((500.0, 0.0), (500.0, 0.0), 0, (400.0, 0.0), (400.0, 0.0), (50.0, 0.0))
    played = play(legs, late, None, certain(legs, waits_h=[0.0, 3.0]), ASSUMED)
    assert played.litres_left[0].tolist() == pytest.approx([500.0 + 400.0 - 300.0, 0.0])


def test_a_cold_battery_is_emptied_sooner():
    cold = replace(FLIGHT, cold_share=0.5)
    played = play([cold], Carried((0.0,), (0.0,), 2), POWER, certain([cold]), ASSUMED)
    assert played.short_h[0, 0] == pytest.approx(1.0)  # 200 Wh at 100 W cover 2 of 3 h


def test_each_share_has_its_interval():
    found = run_out(play([ROAD], Carried((245.0,), (1e6,), 0), None, trips([ROAD]), Assumptions()))
    low, high = found.interval(found.by_cause["delay or use"])
    assert low < found.by_cause["delay or use"] < high
    assert found.interval(found.chance) == (found.low, found.high)


def test_pulses_of_a_fixed_bolus_follow_the_breathing_rate():
    faster = certain([ROAD], breathing=np.array([1.5]))
    pulsed = replace(ROAD, breath_share=1.0)
    steady, quick = (play([leg], Carried((500.0,), (500.0,), 0), None, faster, ASSUMED) for leg in (ROAD, pulsed))
    assert steady.litres_left[0, 0] == pytest.approx(500.0 - 240.0)
    assert quick.litres_left[0, 0] == pytest.approx(500.0 - 240.0 * 1.5)
    assert trips([ROAD], draws=20_000).breathing.std() == pytest.approx(0.15, abs=0.01)


def test_a_plug_left_for_the_airport_does_not_charge_while_waiting_there():
    legs = [replace(ROAD, cylinder_l_per_h=None, concentrator_w=50.0, mains=True, oxygen_h=0.0), FLIGHT]
    used = [replace(FLIGHT, part_id="a"), *legs]
    played = play(used, Carried((0.0,) * 3, (0.0,) * 3, 9), POWER, certain(used, waits_h=[0.0, 0.0, 1.0]), ASSUMED)
    assert played.watt_hours_left[0, :2].tolist() == pytest.approx([750.0, 900.0])
    weak = replace(POWER, charge_w=10.0)
    played = play(used, Carried((0.0,) * 3, (0.0,) * 3, 9), weak, certain(used, waits_h=[0.0, 0.0, 1.0]), ASSUMED)
    assert played.watt_hours_left[0, 1] == pytest.approx(750.0 + 0.9 * 10.0 * 2.0)
