"""Turn-back readings hold what is needed past a short plug and past a delivery, by hand-made legs."""

from dataclasses import replace

import pytest

from planner.kit.legs import Leg, Power
from planner.kit.selection import CHARGE_SHARE, FLIGHT_RULE, LegUse
from planner.kit.sizes import load_cylinders
from planner.kit.turn_back import turn_back

ROAD = Leg("r", "Road", 4.0, 4.0, 120.0, None, False, False, False, False, False, False, None, False)
FLIGHT = replace(ROAD, part_id="f", name="Flight", hours=3.0, oxygen_h=3.0, cylinder_l_per_h=None, concentrator_w=50.0,
                 flight=True)  # fmt: skip
PLUG = replace(FLIGHT, part_id="w", name="Wait", hours=0.25, oxygen_h=0.25, flight=False, mains=True)
POWER = Power("c", "Concentrator", 6.0, 90.0, 95.0, 95.0, 0.8, 1, 120.0, 10)
BATTERIES = 5


def use(hours_by, litres=0.0, new=0, cylinders=None):
    there = cylinders or {}
    return LegUse("x", 0.0, 0.0, hours_by, there, {"eu_3": new} if new else {}, {}, {"eu_3": litres}, 0.0, 5.0, 0.0)


def charge_wh(legs, uses):
    found = turn_back(legs, uses, {}, POWER, BATTERIES, reserve_fraction=0.0, residual_bar=14.0)
    return found[0].battery_percent / 100.0 * POWER.battery_wh * BATTERIES


def test_a_short_plug_on_the_way_counts_for_what_it_can_charge_and_no_more():
    flown, plugged = use({"battery": 3.0}), use({"plugged": 0.25})
    each = FLIGHT_RULE * 50.0 * 3.0
    two = charge_wh([FLIGHT, PLUG, FLIGHT], [flown, plugged, flown])
    assert two == pytest.approx(2 * each - CHARGE_SHARE * POWER.charge_w * 0.25)
    long_plug = replace(PLUG, hours=12.0, oxygen_h=12.0)
    assert charge_wh([FLIGHT, long_plug, FLIGHT], [flown, use({"plugged": 12.0}), flown]) == pytest.approx(each)


@pytest.mark.parametrize("delivered", [0, 1, 2])
def test_gas_that_a_delivery_does_not_bring_is_in_the_reading_before_it(delivered):
    sizes = load_cylinders()
    usable = sizes["eu_3"].usable_l(14.0)
    after = 1.5 * usable
    uses = [use({"cylinder": 4.0}, 100.0, 0, {"eu_3": 3}), use({"cylinder": 4.0}, after, delivered, {"eu_3": 3})]
    found = turn_back([ROAD, ROAD], uses, sizes, None, 0, reserve_fraction=0.0, residual_bar=14.0)
    assert found[0].litres_needed == pytest.approx(100.0 + max(after - delivered * usable, 0.0))
