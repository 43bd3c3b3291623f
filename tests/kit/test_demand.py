"""What was decided in litres and watts, and which sources can give it."""

import pytest

from planner.case.decisions import Decision
from planner.case.trip import ActivityShares, Part
from planner.delivery.devices import load_devices
from planner.errors import InputError
from planner.kit.demand import demand
from planner.kit.eligible import told
from planner.kit.power import VEHICLE_W, cold_share
from planner.kit.sizes import load_concentrators
from planner.trip.itinerary import PartSpan

DEVICES, CONCENTRATORS = load_devices(), load_concentrators()
DUAL, SMALL, STATIONARY = (CONCENTRATORS[one] for one in ("portable_dual", "portable_pulse_small", "stationary_5"))


def needs(decided, sources, concentrator=DUAL, kind="road", hours=4.0, highest_m=0.0, rate=None, idle=0.0, **part):
    """The demand of one part; decided: activity -> (device, flow or setting, share); idle: share without oxygen."""
    shares = {activity: share for activity, (_, _, share) in decided.items()}
    shares = {name: shares.get(name, 0.0) for name in ("rest", "walking", "asleep")}
    shares["walking"] += idle
    of_case = Part(part_id="p", kind=kind, name="Part", duration_min=60.0 * hours, sources=sources,
                   shares=ActivityShares(**shares), **part)  # fmt: skip
    span = PartSpan("p", kind, "Part", 0.0, 60.0 * hours, None, None, highest_m, "ground", None, None, 0.0, shares, ())
    decisions = {}
    for activity, (device, amount, _) in decided.items():
        field = "setting" if DEVICES[device].unit == "setting" else "flow_l_min"
        decisions["p", activity] = Decision(part_id="p", activity=activity, device_id=device, **{field: amount})
    if idle:
        decisions["p", "walking"] = Decision(part_id="p", activity="walking", no_oxygen=True)
    return demand(span, of_case, decisions, DEVICES, concentrator, rate)


def said(found):
    return " ".join(told(found.faults))


def test_a_setting_of_a_conserver_is_not_the_same_number_on_a_concentrator():
    found = needs({"rest": ("pulse_conserver", 2, 1.0)}, ("cylinder", "concentrator"))
    assert found.legs[0].cylinder_l_per_h is not None
    assert found.legs[0].concentrator_w is None
    assert "is not one of a concentrator" in said(found)


def test_pulses_of_a_concentrator_are_not_taken_from_a_cylinder():
    found = needs({"rest": ("pulse_concentrator", 2, 1.0)}, ("cylinder", "concentrator"))
    assert found.legs[0].cylinder_l_per_h is None
    assert found.legs[0].concentrator_w == DUAL.power_w(setting=2)
    assert "Cylinders are not counted" in said(found)


def test_activities_that_different_sources_can_give_are_legs_of_their_own():
    decided = {"rest": ("pulse_conserver", 2, 0.5), "asleep": ("cannula", 1.0, 0.5)}
    found = needs(decided, ("cylinder", "stationary"), kind="stay", hours=24.0)
    day, night = found.legs
    assert (day.oxygen_h, night.oxygen_h) == pytest.approx((12.0, 12.0))
    assert (day.stationary, night.stationary) == (False, True)
    assert "continuous flow only" in said(found)


def test_hours_of_all_legs_add_up_to_those_of_the_part():
    decided = {"rest": ("pulse_conserver", 2, 0.3), "asleep": ("cannula", 1.0, 0.3), "walking": ("cannula", 6.0, 0.4)}
    found = needs(decided, ("cylinder", "stationary"), kind="stay", hours=10.0, refill=True)
    assert sum(leg.hours for leg in found.legs) == pytest.approx(10.0)
    assert [leg.supply_here for leg in found.legs] == [True] + [False] * (len(found.legs) - 1)


def test_a_vehicles_socket_does_not_drive_what_takes_more_than_it_gives():
    able = needs({"rest": ("cannula", 2.0, 1.0)}, ("concentrator",), power="vehicle").legs[0]
    assert able.vehicle
    assert able.concentrator_w <= VEHICLE_W
    found = needs({"rest": ("cannula", 2.0, 1.0)}, ("concentrator",), STATIONARY, power="vehicle")
    assert not found.legs[0].vehicle
    assert "takes 300 W" in said(found)
    assert "120 W" in said(found)


@pytest.mark.parametrize(
    ("decided", "concentrator", "sentence"),
    [
        ({"rest": ("cannula", 4.0, 1.0)}, DUAL, "its highest continuous flow is 3 L/min"),
        ({"rest": ("cannula", 2.0, 1.0)}, SMALL, "its highest continuous flow is none"),
        ({"rest": ("pulse_concentrator", 5, 1.0)}, SMALL, "its settings are 1, 2, 3"),
        ({"rest": ("venturi_28", 4.0, 1.0)}, DUAL, "not give enough for a mask"),
        ({"rest": ("cannula", 2.0, 1.0)}, None, "none is chosen for the kit"),
    ],
)
def test_why_the_concentrator_covers_nothing_is_said(decided, concentrator, sentence):
    found = needs(decided, ("concentrator",), concentrator)
    assert found.legs[0].concentrator_w is None
    assert sentence in said(found)


def test_the_carrier_is_not_counted_for_a_flow_it_does_not_offer():
    decided = {"rest": ("cannula", 3.0, 1.0)}
    refused = needs(decided, ("airline",), kind="flight", airline_flows_l_min=(2.0, 4.0))
    assert not refused.legs[0].airline
    assert "it offers 2 or 4 L/min" in said(refused)
    unknown = needs(decided, ("airline",), kind="flight")
    assert unknown.legs[0].airline
    assert "Ask the carrier" in said(unknown)
    assert said(needs({"rest": ("cannula", 2.0, 1.0)}, ("airline",), kind="flight")) == ""


def test_a_stationary_unit_is_not_counted_above_what_the_usual_one_gives():
    found = needs({"rest": ("cannula", 6.0, 1.0)}, ("stationary",), kind="stay")
    assert not found.legs[0].stationary
    assert "up to 5 L/min" in said(found)


def test_one_sentence_names_all_the_parts_it_is_true_of():
    first = needs({"rest": ("cannula", 4.0, 1.0)}, ("concentrator",)).faults
    other = tuple(type(one)(one.text, "Other") for one in first)
    assert [one for one in told([*first, *other]) if "in Part, Other" in one]


def test_a_faster_breath_takes_more_pulses_from_a_fixed_bolus():
    # 33 mL at setting 2, 20 breaths a minute: 39.6 L an hour (profile of the device, times 60 minutes).
    usual = needs({"rest": ("pulse_conserver", 2, 1.0)}, ("cylinder",), hours=1.0)
    faster = needs({"rest": ("pulse_conserver", 2, 1.0)}, ("cylinder",), hours=1.0, rate=30.0)
    assert usual.litres == pytest.approx(0.033 * 20 * 60)
    assert faster.litres == pytest.approx(0.033 * 30 * 60)


def test_pulses_decided_for_sleep_are_told():
    assert needs({"asleep": ("pulse_conserver", 2, 1.0)}, ("cylinder",)).pulses_asleep
    assert not needs({"rest": ("pulse_conserver", 2, 1.0)}, ("cylinder",)).pulses_asleep


def test_nothing_decided_is_not_nought_litres():
    span = PartSpan("p", "road", "Part", 0.0, 60.0, None, None, 0.0, "ground", None, None, 0.0,
                    {"rest": 1.0, "walking": 0.0, "asleep": 0.0}, ())  # fmt: skip
    part = Part(part_id="p", kind="road", duration_min=60.0, sources=("cylinder",))
    found = demand(span, part, {}, DEVICES, DUAL, None)
    assert found.litres is None
    assert found.undecided == ("rest",)
    none = {("p", "rest"): Decision(part_id="p", activity="rest", no_oxygen=True)}
    assert demand(span, part, none, DEVICES, DUAL, None).litres == 0.0


def test_a_cold_battery_gives_less_and_beyond_the_range_is_refused():
    assert cold_share(None) == cold_share(25.0) == 1.0
    assert 0.6 < cold_share(-10.0) < cold_share(5.0) < 1.0
    with pytest.raises(InputError, match="-20 to 60"):
        cold_share(-30.0)
    warm = needs({"rest": ("cannula", 2.0, 1.0)}, ("concentrator",)).legs[0]
    cold = needs({"rest": ("cannula", 2.0, 1.0)}, ("concentrator",), equipment_c=-10.0).legs[0]
    assert cold.battery_w == pytest.approx(warm.battery_w / cold_share(-10.0))


def test_only_a_fixed_bolus_takes_more_with_faster_breathing():
    assert needs({"rest": ("pulse_conserver", 2, 1.0)}, ("cylinder",)).legs[0].breath_share == 1.0
    assert needs({"rest": ("cannula", 2.0, 1.0)}, ("cylinder",)).legs[0].breath_share == 0.0
    assert needs({"rest": ("pulse_concentrator", 2, 1.0)}, ("concentrator",)).legs[0].breath_share == 0.0


def test_a_conservers_setting_is_not_asked_of_the_carrier():
    found = needs({"rest": ("pulse_conserver", 2, 1.0)}, ("airline", "cylinder"), kind="flight")
    assert not found.legs[0].airline
    assert "the traveller's own" in said(found)


def test_time_without_oxygen_belongs_to_the_part():
    found = needs({"rest": ("cannula", 2.0, 0.4), "asleep": ("pulse_conserver", 2, 0.1)}, ("cylinder", "stationary"),
                  kind="stay", hours=10.0, idle=0.5)  # fmt: skip
    assert sum(leg.oxygen_h for leg in found.legs) == pytest.approx(5.0)
    assert sum(leg.hours for leg in found.legs) == pytest.approx(10.0)
