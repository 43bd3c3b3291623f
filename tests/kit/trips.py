"""Cases that the tests of the kit are made of: the demos, and trips of one part."""

import json

from planner.case import Case
from planner.catalogue import profile_text
from planner.kit.supply import plan_kit
from planner.trip.itinerary import lay_out


def demo(name, **sections):
    table = json.loads(profile_text(f"demo/{name}.json")) | sections
    return Case.model_validate_json(json.dumps(table))


def kit_of(case, **keywords):
    spans = lay_out(case.trip, case.policy).parts
    return plan_kit(spans, case.trip.parts, case.decisions, case.kit, case.policy, **keywords)


def cylinder_road(litres_per_min=2.0, minutes=240, **kit):
    """A drive on cylinders alone."""
    part = {"part_id": "r", "kind": "road", "duration_min": minutes, "start_elevation_m": 100.0}
    part |= {"sources": ["cylinder"], "shares": {"rest": 1.0}}
    decision = {"part_id": "r", "activity": "rest", "device_id": "cannula", "flow_l_min": litres_per_min}
    return demo("copd_layover", trip={"parts": [part]}, decisions=[decision], kit={"country": "EU"} | kit, outcome=None)


def own_alone(*gauges, celsius=15.0):
    """Hours that own 2 L cylinders at these gauges leave uncovered on a drive of four hours at 2 L/min."""
    owned = [{"size_id": "eu_2", "count": 1, "gauge_bar": gauge, "temperature_c": celsius} for gauge in gauges]
    return kit_of(cylinder_road(2.0, 240, owned_cylinders=owned)).own.uncovered_h


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
    return sum(item.count for item in plan.items if item.kind == "battery")


def on_liquid(kind="road", minutes=240, **vessel):
    """A part on liquid oxygen at 2 L/min."""
    part = {"part_id": "r", "kind": kind, "duration_min": minutes, "sources": ["liquid"]}
    decision = {"part_id": "r", "activity": "rest", "device_id": "cannula", "flow_l_min": 2.0}
    vessels = [{"liquid_kg": 1.0, "empty_kg": 2.5} | vessel]
    return kit_of(demo("copd_layover", trip={"parts": [part]}, decisions=[decision], kit={"liquid_vessels": vessels}))
