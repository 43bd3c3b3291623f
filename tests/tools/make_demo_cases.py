"""Writes profiles/demo/*.json: three invented scenarios with no real people. Run: python tests/tools/make_demo_cases.py

The decisions carry the digest of the inputs they rest on, so the cases are made by this script and not by hand.
"""

from __future__ import annotations

import json
from pathlib import Path

from planner.case import Case

FOLDER = Path(__file__).parents[2] / "profiles" / "demo"
FEET = 0.3048
KPA = 7.50062

ALL_REST = {"rest": 0.9, "walking": 0.1}
NIGHTS = {"rest": 0.5, "walking": 0.17, "asleep": 0.33}


def main() -> None:
    """Write the three demo cases."""
    FOLDER.mkdir(exist_ok=True)
    for name, content in {
        "copd_layover": copd_layover(),
        "fibrosis_mountain_hotel": fibrosis_mountain_hotel(),
        "neuromuscular_car_and_plane": neuromuscular_car_and_plane(),
    }.items():
        (FOLDER / f"{name}.json").write_text(with_decisions(content), encoding="utf-8")


def with_decisions(content: dict) -> str:
    """The case as JSON text, each decision marked with what it rests on."""
    undecided = Case.model_validate_json(json.dumps(content | {"decisions": []}))
    digest = undecided.decision_digest()
    decisions = [decision | {"resting_on": digest} for decision in content["decisions"]]
    case = Case.model_validate_json(json.dumps(content | {"decisions": decisions}))
    return case.model_dump_json(indent=1, exclude_defaults=False) + "\n"


def by(name: str, role: str, day: str) -> dict:
    """Who decided, and when."""
    return {"decided_by": name, "role": role, "decided_on": day}


def copd_layover() -> dict:
    """A woman with severe COPD drives over a pass, flies with a layover, and stays on a hillside for four nights."""
    cylinders = ["cylinder", "concentrator"]
    out = [
        part(
            "road_out",
            "road",
            105,
            "Road over the pass",
            start_elevation_m=580.0,
            highest_m=1370.0,
            end_elevation_m=73.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
        ),
        part(
            "wait_out",
            "wait",
            120,
            "Check-in and wait",
            start_elevation_m=73.0,
            end_elevation_m=73.0,
            sources=cylinders,
            power="none",
            shares={"rest": 0.75, "walking": 0.25},
        ),
        flight("flight_1", 150, "Flight 1", "VRN", "MAD"),
        part(
            "layover_out",
            "layover",
            105,
            "Layover",
            start_elevation_m=610.0,
            end_elevation_m=610.0,
            sources=["concentrator"],
            power="mains",
            shares={"rest": 0.75, "walking": 0.25},
        ),
        flight("flight_2", 175, "Flight 2", "MAD", "TFN"),
        part(
            "road_up",
            "road",
            75,
            "Road to the village",
            start_elevation_m=632.0,
            highest_m=1420.0,
            end_elevation_m=1400.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
        ),
        part(
            "stay",
            "stay",
            3 * 24 * 60 + 14 * 60,
            "Village house, 4 nights",
            start_elevation_m=1400.0,
            end_elevation_m=1400.0,
            sources=[*cylinders, "stationary"],
            power="mains",
            delivery=True,
            shares=NIGHTS,
            zone_at_end="Atlantic/Canary",
        ),
    ]
    back = [
        part(
            "road_down",
            "road",
            75,
            "Road to the airport",
            start_elevation_m=1400.0,
            highest_m=1420.0,
            end_elevation_m=632.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
        ),
        part(
            "wait_back",
            "wait",
            120,
            "Check-in and wait",
            start_elevation_m=632.0,
            end_elevation_m=632.0,
            sources=cylinders,
            power="none",
            shares={"rest": 0.75, "walking": 0.25},
        ),
        flight("flight_3", 170, "Flight 3", "TFN", "MAD"),
        part(
            "layover_back",
            "layover",
            110,
            "Layover",
            start_elevation_m=610.0,
            end_elevation_m=610.0,
            sources=["concentrator"],
            power="mains",
            shares={"rest": 0.75, "walking": 0.25},
        ),
        flight("flight_4", 145, "Flight 4", "MAD", "VRN"),
        part(
            "road_home",
            "road",
            105,
            "Road home over the pass",
            start_elevation_m=73.0,
            highest_m=1370.0,
            end_elevation_m=580.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
        ),
    ]
    return {
        "patient": {
            "reference": "DEMO-1",
            "initials": "M. T.",
            "age_years": 68,
            "sex": "female",
            "height_m": 1.62,
            "mass_kg": 61,
            "diagnosis": "copd",
            "smoking": "former",
            "skin_pigmentation": "light",
            "carbon_dioxide_risk": {"judged": False, "past_hypercapnia": False, "past_acidosis_or_ventilation": False},
            "function": {
                "mmrc_dyspnoea": 3,
                "can_walk_50_m": True,
                "breathes_through_nose": True,
                "can_run_equipment": True,
            },
        },
        "measurements": [
            {
                "kind": "blood_gas",
                "taken_on": "2026-11-12",
                "state": "stable",
                "place": {"elevation_m": 262},
                "pao2_mmhg": 69.5,
                "paco2_mmhg": 39.6,
                "ph": 7.41,
            },
            {
                "kind": "oximetry",
                "taken_on": "2026-11-12",
                "state": "stable",
                "place": {"elevation_m": 262},
                "spo2_percent": 93,
                "heart_rate_min": 82,
            },
            {
                "kind": "walk_test",
                "taken_on": "2026-11-12",
                "state": "stable",
                "place": {"elevation_m": 262},
                "lowest_spo2_percent": 85,
                "distance_m": 310,
            },
            {
                "kind": "lung_function",
                "taken_on": "2026-10-02",
                "fev1_l": 0.94,
                "fev1_percent": 41,
                "fvc_l": 2.31,
                "fvc_percent": 79,
                "tlco_percent": 44,
            },
            {"kind": "haemoglobin", "taken_on": "2026-10-02", "haemoglobin_g_dl": 13.9},
        ],
        "prescription": {
            "uses_oxygen": True,
            "hours_per_day": 8,
            "walking": {"device_id": "cannula", "flow_l_min": 1},
            "asleep": {"device_id": "cannula", "flow_l_min": 1},
        },
        "cautions": {"answers": []},
        "trip": {
            "departs_at": "2027-01-16T07:30:00",
            "departure_zone": "Europe/Vienna",
            "home_elevation_m": 580,
            "parts": out + back,
        },
        "decisions": decisions_for(
            out + back,
            by("Dr A. Example", "respiratory physician", "2026-11-24"),
            {
                "flight": {"rest": 2, "walking": 3},
                "stay": {"rest": None, "walking": 1.5, "asleep": 1.5},
                "road": {"rest": 1},
                "wait": {"rest": None, "walking": 1},
                "layover": {"rest": None, "walking": 1},
            },
        ),
        "kit": {"country": "EU", "concentrator_id": "portable_dual", "breathing_rate_min": 20},
        "policy": {
            "assessed_on": "2026-11-24",
            "holds_until": "2027-02-28",
            "pathway_ids": ["bts_2022_adult", "edvardsen_2012_copd"],
        },
        "display": {"pressure": "kPa", "altitude": "m", "gauge": "bar", "paper": "A4", "locale": "en_GB"},
    }


def fibrosis_mountain_hotel() -> dict:
    """A man with lung fibrosis flies to a high airport and drives over a pass to a hotel at 2,500 m."""
    cylinders = ["cylinder", "concentrator"]
    parts = [
        part(
            "road_out",
            "road",
            50,
            "Drive to the airport",
            start_elevation_m=270.0,
            end_elevation_m=313.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
        ),
        part(
            "wait_out",
            "wait",
            110,
            "Check-in and wait",
            start_elevation_m=313.0,
            end_elevation_m=313.0,
            sources=["concentrator"],
            power="mains",
            shares={"rest": 0.75, "walking": 0.25},
        ),
        flight("flight_out", 120, "Flight out", "MCI", "DEN", airline=[]),
        part(
            "pass_out",
            "road",
            130,
            "Drive over the pass",
            start_elevation_m=1656.0,
            highest_m=3450.0,
            end_elevation_m=2500.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
            delivery=True,
        ),
        part(
            "hotel",
            "stay",
            3 * 24 * 60,
            "Hotel, 3 nights",
            start_elevation_m=2500.0,
            end_elevation_m=2500.0,
            sources=[*cylinders, "stationary"],
            power="mains",
            delivery=True,
            shares=NIGHTS,
            zone_at_end="America/Denver",
        ),
        part(
            "pass_back",
            "road",
            130,
            "Drive back over the pass",
            start_elevation_m=2500.0,
            highest_m=3450.0,
            end_elevation_m=1656.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
        ),
        part(
            "wait_back",
            "wait",
            110,
            "Check-in and wait",
            start_elevation_m=1656.0,
            end_elevation_m=1656.0,
            sources=["concentrator"],
            power="mains",
            shares={"rest": 0.75, "walking": 0.25},
        ),
        flight("flight_back", 105, "Flight back", "DEN", "MCI", airline=[]),
        part(
            "road_back",
            "road",
            50,
            "Drive home",
            start_elevation_m=313.0,
            end_elevation_m=270.0,
            sources=cylinders,
            power="vehicle",
            shares=ALL_REST,
        ),
    ]
    return {
        "patient": {
            "reference": "DEMO-2",
            "initials": "J. W.",
            "age_years": 71,
            "sex": "male",
            "height_m": 1.78,
            "mass_kg": 80,
            "diagnosis": "interstitial",
            "smoking": "former",
            "skin_pigmentation": "light",
            "carbon_dioxide_risk": {"judged": False, "past_hypercapnia": False},
            "function": {
                "mmrc_dyspnoea": 2,
                "can_walk_50_m": True,
                "breathes_through_nose": True,
                "can_run_equipment": True,
            },
        },
        "measurements": [
            {
                "kind": "blood_gas",
                "taken_on": "2026-11-03",
                "state": "stable",
                "place": {"elevation_m": 270},
                "pao2_mmhg": 69.0,
                "paco2_mmhg": 37.0,
                "ph": 7.43,
            },
            {
                "kind": "oximetry",
                "taken_on": "2026-11-03",
                "state": "stable",
                "place": {"elevation_m": 270},
                "spo2_percent": 94,
                "heart_rate_min": 78,
            },
            {
                "kind": "walk_test",
                "taken_on": "2026-11-03",
                "state": "stable",
                "place": {"elevation_m": 270},
                "lowest_spo2_percent": 84,
                "distance_m": 365,
            },
            {
                "kind": "lung_function",
                "taken_on": "2026-11-03",
                "fev1_l": 2.1,
                "fev1_percent": 71,
                "fvc_l": 2.5,
                "fvc_percent": 64,
                "tlco_percent": 41,
            },
            {"kind": "haemoglobin", "taken_on": "2026-11-03", "haemoglobin_g_dl": 14.6},
        ],
        "prescription": {"uses_oxygen": True, "walking": {"device_id": "cannula", "flow_l_min": 2}},
        "cautions": {"answers": []},
        "trip": {
            "departs_at": "2027-02-12T09:10:00",
            "departure_zone": "America/Chicago",
            "home_elevation_m": 270,
            "parts": parts,
        },
        "decisions": decisions_for(
            parts,
            by("Dr B. Example", "pulmonologist", "2026-11-20"),
            {
                "flight": {"rest": 2, "walking": 3},
                "stay": {"rest": 2, "walking": 4, "asleep": 2},
                "road": {"rest": 2, "walking": 3},
                "wait": {"rest": None, "walking": 2},
            },
        ),
        "kit": {"country": "US", "concentrator_id": "portable_dual", "breathing_rate_min": 22},
        "policy": {
            "assessed_on": "2026-11-20",
            "holds_until": "2027-03-01",
            "pathway_ids": ["bts_2022_adult", "ild_thresholds"],
        },
        "display": {"pressure": "mmHg", "altitude": "ft", "gauge": "psi", "paper": "Letter", "locale": "en_US"},
    }


def neuromuscular_car_and_plane() -> dict:
    """A woman with a neuromuscular disease and night ventilation: oximetry and a capillary gas, carbon dioxide risk."""
    cylinders = ["cylinder", "concentrator"]
    parts = [
        part(
            "road_out",
            "road",
            190,
            "Drive south",
            start_elevation_m=15.0,
            highest_m=462.0,
            end_elevation_m=41.0,
            sources=cylinders,
            power="vehicle",
            shares={"rest": 0.95, "walking": 0.05},
        ),
        part(
            "wait_out",
            "wait",
            120,
            "Check-in and wait",
            start_elevation_m=41.0,
            end_elevation_m=41.0,
            sources=["concentrator"],
            power="mains",
            shares={"rest": 0.95, "walking": 0.05},
        ),
        flight("flight_out", 200, "Flight out", "EDI", "FAO"),
        part(
            "taxi",
            "road",
            45,
            "Car to the house",
            start_elevation_m=7.0,
            end_elevation_m=30.0,
            sources=cylinders,
            power="vehicle",
            shares={"rest": 1.0},
        ),
        part(
            "stay",
            "stay",
            5 * 24 * 60 + 20 * 60,
            "House by the sea, 6 nights",
            start_elevation_m=30.0,
            end_elevation_m=30.0,
            sources=["concentrator", "stationary"],
            power="mains",
            shares={"rest": 0.55, "walking": 0.05, "asleep": 0.4},
            zone_at_end="Europe/Lisbon",
        ),
        flight("flight_back", 205, "Flight back", "FAO", "EDI"),
        part(
            "road_back",
            "road",
            190,
            "Drive home",
            start_elevation_m=41.0,
            highest_m=462.0,
            end_elevation_m=15.0,
            sources=cylinders,
            power="vehicle",
            shares={"rest": 0.95, "walking": 0.05},
        ),
    ]
    return {
        "patient": {
            "reference": "DEMO-3",
            "initials": "S. K.",
            "age_years": 54,
            "sex": "female",
            "height_m": 1.58,
            "mass_kg": 49,
            "diagnosis": "neuromuscular",
            "smoking": "never",
            "skin_pigmentation": "dark",
            "carbon_dioxide_risk": {"judged": True, "past_hypercapnia": True, "past_acidosis_or_ventilation": True},
            "function": {
                "mmrc_dyspnoea": 3,
                "can_walk_50_m": False,
                "breathes_through_nose": True,
                "can_run_equipment": False,
            },
        },
        "measurements": [
            {
                "kind": "oximetry",
                "taken_on": "2026-11-17",
                "state": "stable",
                "place": {"elevation_m": 15},
                "spo2_percent": 94,
                "heart_rate_min": 88,
            },
            {
                "kind": "blood_gas",
                "sample": "capillary",
                "taken_on": "2026-11-17",
                "state": "stable",
                "place": {"elevation_m": 15},
                "pao2_mmhg": 71.0,
                "paco2_mmhg": 47.5,
                "ph": 7.38,
            },
            {
                "kind": "lung_function",
                "taken_on": "2026-09-22",
                "fev1_l": 0.92,
                "fev1_percent": 38,
                "fvc_l": 1.05,
                "fvc_percent": 36,
            },
        ],
        "prescription": {"uses_oxygen": False, "ventilation": {"kind": "niv", "power_w": 60, "hours_per_day": 9}},
        "cautions": {"answers": []},
        "trip": {
            "departs_at": "2027-03-05T06:00:00",
            "departure_zone": "Europe/London",
            "home_elevation_m": 15,
            "parts": parts,
        },
        "decisions": [],
        "kit": {"country": "UK", "concentrator_id": "portable_dual"},
        "policy": {"assessed_on": "2026-11-24", "holds_until": "2027-03-31", "pathway_ids": ["bts_2022_adult"]},
        "display": {"pressure": "kPa", "altitude": "ft", "gauge": "bar", "paper": "A4", "locale": "en_GB"},
    }


def part(part_id: str, kind: str, minutes: int, name: str, **rest: object) -> dict:
    """A part of a trip."""
    return {"part_id": part_id, "kind": kind, "duration_min": minutes, "name": name} | rest


def flight(part_id: str, minutes: int, name: str, origin: str, destination: str, airline: list | None = None) -> dict:
    """A flight with the carrier's own oxygen at 2 or 4 L/min, or without."""
    flows = [2, 4] if airline is None else airline
    sources = ["concentrator", "airline"] if flows else ["concentrator"]
    return part(
        part_id,
        "flight",
        minutes,
        name,
        origin_place_id=origin,
        destination_place_id=destination,
        sources=sources,
        airline_flows_l_min=flows,
        power="none",
        shares={"rest": 0.95, "walking": 0.05},
    )


def decisions_for(parts: list[dict], who: dict, flows: dict[str, dict[str, float | None]]) -> list[dict]:
    """A decision for every activity that has a share in a part; None is a decision for no oxygen."""
    decisions = []
    for each in parts:
        for activity, share in each["shares"].items():
            if share == 0:
                continue
            amount = flows[each["kind"]].get(activity)
            decision = {"part_id": each["part_id"], "activity": activity, "basis": "own"} | who
            if amount is None:
                decisions.append(decision | {"no_oxygen": True})
            else:
                decisions.append(decision | {"device_id": "cannula", "flow_l_min": amount})
    return decisions


if __name__ == "__main__":
    main()
