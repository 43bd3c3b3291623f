"""What is added against delays stays within the weights and rules that the planned set was chosen under."""

from dataclasses import replace

import numpy as np
import pytest

from planner.kit.endurance import SHORT_H, Assumptions, Carried, draw_trips, play, run_out
from planner.kit.legs import Choice, Leg, Power
from planner.kit.strengthen import strengthen

ROAD = Leg("r", "Road", 2.0, 2.0, 120.0, None, False, False, False, False, False, False, None, False)
FLIGHT = Leg("f", "Flight", 3.0, 3.0, None, 50.0, False, False, False, False, True, False, None, False)
SMALL = Choice("small", "1 L", 190.0, 212.0, 2.0, None, True)
POWER = Power("c", "Concentrator", 6.0, 90.0, 100.0, 100.0, 0.8, 1, 100.0, 10)
ASSUMED = Assumptions()


def stronger(legs, carried, masses, power=None, wanted=0.001, **keywords):
    rng = np.random.default_rng(4)
    waits = np.zeros((3000, len(legs)))
    longer = rng.exponential(40.0, (3000, len(legs)))
    drawn = draw_trips(legs, waits, longer, rng, ASSUMED)
    return strengthen(legs, carried, masses, [SMALL], power, drawn, ASSUMED, wanted, **keywords)


def test_a_set_that_is_rare_enough_to_run_out_is_left_as_it_is():
    found = stronger([ROAD], Carried((2000.0,), (2000.0,), 0), [9.0])
    assert (found.extra_cylinders, found.extra_batteries) == (0, 0)
    assert found.reached
    assert found.peak_kg == 9.0


def test_cylinders_are_added_until_running_out_is_rare_enough_and_count_in_the_peak():
    found = stronger([ROAD], Carried((300.0,), (300.0,), 0), [4.0], wanted=0.05)
    assert found.reached
    assert found.extra_cylinders > 0
    assert found.peak_kg == 4.0 + 2.0 * found.extra_cylinders


def test_nothing_is_added_above_the_weight_that_can_be_carried():
    limited = replace(ROAD, carry_limit_kg=6.5)
    found = stronger([limited], Carried((300.0,), (300.0,), 0), [4.0])
    assert found.extra_cylinders == 1
    assert found.peak_kg <= 6.5
    assert not found.reached


def test_no_battery_is_added_beyond_those_that_may_be_carried():
    short = Carried((0.0,), (0.0,), 2)
    assert stronger([FLIGHT], short, [7.6], power=POWER).extra_batteries > 1
    assert stronger([FLIGHT], short, [7.6], power=replace(POWER, most_batteries=3)).extra_batteries == 1
    assert stronger([FLIGHT], short, [7.6], power=replace(POWER, most_batteries=2)).extra_batteries == 0


def test_an_added_cylinder_is_gone_after_a_flight_that_forbids_it():
    legs = [ROAD, replace(FLIGHT, airline=True), replace(ROAD, part_id="b", oxygen_h=0.0)]
    found = stronger(legs, Carried((200.0, 0.0, 0.0), (200.0, 0.0, 0.0), 0), [4.0, 0.0, 0.0])
    assert found.carried.litres_most[0] > 200.0
    assert found.carried.litres_most[1:] == (0.0, 0.0)


@pytest.mark.parametrize("seed", range(12))
def test_the_chance_of_a_larger_set_is_that_of_all_trips_though_only_the_short_ones_are_played_again(seed):
    rng = np.random.default_rng(seed)
    legs = [replace(leg, hours=float(rng.uniform(1.0, 6.0))) for leg in (ROAD, FLIGHT, ROAD, FLIGHT)]
    legs = [replace(leg, oxygen_h=leg.hours, mains=bool(rng.random() < 0.3)) for leg in legs]
    litres = [150.0 * leg.hours for leg in legs]
    carried = Carried((litres[0], 0.0, litres[2], 0.0), (litres[0], 0.0, litres[2], 0.0), int(rng.integers(4, 7)))
    drawn = draw_trips(legs, rng.exponential(40.0, (3000, 4)), rng.exponential(20.0, (3000, 4)), rng, ASSUMED)
    found = strengthen(legs, carried, [9.0] * 4, [SMALL], POWER, drawn, ASSUMED, 0.02)
    assert found.extra_batteries + found.extra_cylinders > 0
    assert found.chosen_on == run_out(play(legs, found.carried, POWER, drawn, ASSUMED))


@pytest.mark.parametrize("seed", range(20))
def test_with_more_carried_no_trip_runs_out_that_did_not_before(seed):
    rng = np.random.default_rng(seed)
    legs = [replace(ROAD if rng.random() < 0.6 else FLIGHT, hours=float(rng.uniform(1.0, 6.0))) for _ in range(6)]
    legs = [replace(leg, oxygen_h=leg.hours, mains=bool(rng.random() < 0.3), concentrator_w=40.0) for leg in legs]
    litres = tuple(float(one) for one in rng.choice([0.0, 200.0, 600.0], 6))
    carried = Carried(litres, (600.0,) * 6, int(rng.integers(1, 5)))
    drawn = draw_trips(legs, rng.exponential(40.0, (2000, 6)), rng.exponential(20.0, (2000, 6)), rng, ASSUMED)
    kept = int(rng.integers(1, 7))
    larger = replace(
        carried,
        batteries=carried.batteries + 1,
        litres_new=(litres[0] + 200.0, *litres[1:]),
        litres_most=tuple(most + 200.0 * (leg < kept) for leg, most in enumerate(carried.litres_most)),
    )
    before, after = (
        (play(legs, one, POWER, drawn, ASSUMED).short_h > SHORT_H).any(axis=1) for one in (carried, larger)
    )
    assert before.any()
    assert not (after & ~before).any()
