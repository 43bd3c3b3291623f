"""Turn-back readings hold what is needed past a short plug and past a delivery, by hand-made legs."""

from dataclasses import replace

import pytest

from planner.kit.cylinder import contents_l
from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import CHARGE_SHARE, FLIGHT_RULE, LegUse
from planner.kit.sizes import load_cylinders
from planner.kit.turn_back import turn_back

ROAD = Leg("r", "Road", 4.0, 4.0, 120.0, None, False, False, False, False, False, False, None, False)
FLIGHT = replace(ROAD, part_id="f", name="Flight", hours=3.0, oxygen_h=3.0, cylinder_l_per_h=None, concentrator_w=50.0,
                 flight=True)  # fmt: skip
NEXT_FLIGHT = replace(FLIGHT, part_id="g")
PLUG = replace(FLIGHT, part_id="w", name="Wait", hours=0.25, oxygen_h=0.25, flight=False, mains=True)
POWER = Power("c", "Concentrator", 6.0, 90.0, 95.0, 95.0, 0.8, 1, 120.0, 10)
BATTERIES = 5
SIZE = load_cylinders()["eu_3"]
THREE = Choice("eu_3", SIZE.name, SIZE.usable_l(14.0), SIZE.full_l, SIZE.gross_kg, None, True, size=SIZE)


def use(hours_by, litres=0.0, new=0, cylinders=None):
    there = cylinders or {}
    return LegUse("x", 0.0, 0.0, 0.0, hours_by, there, {"eu_3": new} if new else {}, {"eu_3": litres}, 5.0, 0.0)


def charge_wh(legs, uses):
    found = turn_back(legs, uses, [], POWER, BATTERIES, reserve_fraction=0.0, residual_bar=14.0)
    return found[0].battery_percent / 100.0 * POWER.battery_wh * BATTERIES


def test_a_short_plug_on_the_way_counts_for_what_it_can_charge_and_no_more():
    flown, plugged = use({"battery": 3.0}), use({"plugged": 0.25})
    each = FLIGHT_RULE * 50.0 * 3.0
    two = charge_wh([FLIGHT, PLUG, NEXT_FLIGHT], [flown, plugged, flown])
    assert two == pytest.approx(2 * each - CHARGE_SHARE * POWER.charge_w * 0.25)
    long_plug = replace(PLUG, hours=12.0, oxygen_h=12.0)
    assert charge_wh([FLIGHT, long_plug, NEXT_FLIGHT], [flown, use({"plugged": 12.0}), flown]) == pytest.approx(each)


@pytest.mark.parametrize("delivered", [0, 1, 2])
def test_gas_that_a_delivery_does_not_bring_is_in_the_reading_before_it(delivered):
    usable = SIZE.usable_l(14.0)
    after = 1.5 * usable
    uses = [use({"cylinder": 4.0}, 100.0, 0, {"eu_3": 3}), use({"cylinder": 4.0}, after, delivered, {"eu_3": 3})]
    found = turn_back(
        [ROAD, replace(ROAD, part_id="s")], uses, [THREE], None, 0, reserve_fraction=0.0, residual_bar=14.0
    )
    assert found[0].litres_needed == pytest.approx(100.0 + max(after - delivered * usable, 0.0))


def percent_of(leg, hours, reserve=0.0, batteries=BATTERIES):
    found = turn_back(
        [leg], [use({"battery": hours})], [], POWER, batteries, reserve_fraction=reserve, residual_bar=14.0
    )
    return found[0].battery_percent


def test_the_charge_holds_the_reserve_and_at_least_the_rule_of_a_flight():
    full = POWER.battery_wh * BATTERIES
    road = replace(ROAD, cylinder_l_per_h=None, concentrator_w=50.0)
    assert percent_of(road, 4.0, reserve=0.25) == pytest.approx(100.0 * 200.0 * 1.25 / full)
    assert percent_of(FLIGHT, 3.0, reserve=0.25) == pytest.approx(100.0 * 150.0 * FLIGHT_RULE / full)
    assert percent_of(FLIGHT, 3.0, reserve=0.8) == pytest.approx(100.0 * 150.0 * 1.8 / full)


def test_more_charge_than_the_packs_hold_is_not_shown_as_full():
    assert percent_of(FLIGHT, 3.0, batteries=2) == pytest.approx(100.0 * 225.0 / 180.0)


def test_the_reading_is_that_at_the_temperature_there():
    def reading(celsius):
        leg = replace(ROAD, equipment_c=celsius)
        found = turn_back(
            [leg], [use({"cylinder": 4.0}, 480.0, 1, {"eu_3": 1})], [THREE], None, 0, reserve_fraction=0.0,
            residual_bar=14.0,
        )  # fmt: skip
        return found[0].gauge_bar[0][1], found[0].temperature_c

    assert reading(None) == reading(15.0)
    cold, at = reading(-20.0)
    assert at == -20.0
    assert cold < reading(15.0)[0] < reading(50.0)[0]
    held = contents_l(3.0, cold, -20.0) - contents_l(3.0, 14.0)
    assert held == pytest.approx(480.0, rel=0.005)


def test_legs_of_one_part_have_one_reading():
    found = turn_back(
        [ROAD, replace(ROAD)], [use({"cylinder": 4.0}, 100.0, 0, {"eu_3": 1})] * 2, [THREE], None, 0,
        reserve_fraction=0.0, residual_bar=14.0,
    )  # fmt: skip
    assert [one.litres_needed for one in found] == pytest.approx([200.0])
