"""Edits of a trip's shape: templates that are whole trips, and a way back in the order it is travelled."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.case.policy import Policy
from planner.case.trip import Part, ProfilePoint, Trip
from planner.errors import InputError
from planner.trip import edits
from planner.trip.itinerary import elevations_at_start, lay_out
from planner.trip.templates import TEMPLATES, USUAL_SOURCES, new_part, parts_of

KINDS = tuple(USUAL_SOURCES)


def trip(kinds):
    """Parts of these kinds, named by their place."""
    parts = ()
    for number, kind in enumerate(kinds.split()):
        parts, _ = edits.with_new(parts, kind, None)
        parts = (*parts[:-1], parts[-1].model_copy(update={"name": f"{kind} {number}"}))
    return parts


def back(kinds):
    there = trip(kinds)
    return [part.name.removesuffix(", back") for part in edits.with_way_back(there, [None] * len(there))[len(there) :]]


@pytest.mark.parametrize(
    ("there", "returns"),
    [
        ("road wait flight road stay", "road 3, wait 1, flight 2, road 0"),
        ("road wait flight layover flight road", "road 5, wait 1, flight 4, layover 3, flight 2, road 0"),
        ("road wait flight wait road stay", "road 4, wait 1, flight 2, wait 3, road 0"),
        ("road wait rail wait flight road", "road 5, wait 3, flight 4, wait 1, rail 2, road 0"),
        ("wait wait ship walk stay", "walk 3, wait 0, wait 1, ship 2"),
        ("road stay road home", "road 2, stay 1, road 0"),
        ("stay", ""),
    ],
)
def test_the_way_back_comes_in_the_order_it_is_travelled(there, returns):
    assert ", ".join(back(there)) == returns


@given(st.lists(st.sampled_from(KINDS), min_size=1, max_size=9))
def test_whatever_the_way_there_all_of_it_is_travelled_back_once(kinds):
    there = trip(" ".join(kinds))
    travelled = [part.name for part in there]
    while travelled and travelled[-1].split()[0] in ("stay", "home"):
        travelled.pop()
    assert sorted(back(" ".join(kinds))) == sorted(travelled)


def test_places_zones_elevations_and_profile_are_turned():
    profile = tuple(ProfilePoint(at_min=at, elevation_m=up) for at, up in ((0.0, 100.0), (40.0, 2000.0), (60.0, 900.0)))
    road = Part(part_id="road_1", kind="road", duration_min=60.0, start_elevation_m=100.0, end_elevation_m=900.0,
                profile=profile)  # fmt: skip
    flight = Part(part_id="flight_1", kind="flight", duration_min=150.0, origin_place_id="VIE",
                  destination_place_id="MAD", zone_at_end="Europe/Madrid")  # fmt: skip
    _, _, returned, down = edits.with_way_back((road, flight), [100.0, None])
    assert (returned.origin_place_id, returned.destination_place_id) == ("MAD", "VIE")
    assert returned.zone_at_end == "Europe/Vienna"
    assert (down.start_elevation_m, down.end_elevation_m) == (900.0, 100.0)
    assert [(point.at_min, point.elevation_m) for point in down.profile] == [
        (0.0, 900.0),
        (20.0, 2000.0),
        (60.0, 100.0),
    ]


def test_a_wait_at_one_airport_is_not_at_its_elevation_on_the_way_back():
    wait = Part(part_id="wait_1", kind="wait", duration_min=60.0, start_elevation_m=1800.0, highest_m=1800.0)
    flight = new_part("flight", ())
    returned = edits.with_way_back((wait, flight), [1800.0, None])[2]
    assert returned.kind == "wait"
    assert (returned.start_elevation_m, returned.highest_m, returned.end_elevation_m) == (None, None, None)


def test_the_way_back_over_ground_ends_where_the_way_there_began():
    parts = parts_of(next(one for one in TEMPLATES if one.id == "mountains"))
    there = Trip(home_elevation_m=150.0, parts=(parts[0].model_copy(update={"end_elevation_m": 2500.0}), *parts[1:]))
    began = elevations_at_start(lay_out(there, Policy()))
    whole = lay_out(Trip(home_elevation_m=150.0, parts=edits.with_way_back(there.parts, began)), Policy())
    down = whole.altitude_m[whole.part_index == 2]
    assert (down[0], down[-1]) == (2500.0, 150.0)


@pytest.mark.parametrize(
    ("name", "turned"),
    [
        ("Road to the airport", "Road from the airport"),
        ("From the station", "To the station"),
        ("Road up", "Road down"),
        ("Check-in and wait", "Check-in and wait, back"),
        ("", ""),
    ],
)
def test_a_name_says_the_other_way(name, turned):
    road = new_part("road", ()).model_copy(update={"name": name})
    assert edits.with_way_back((road,), [None])[1].name == turned


@pytest.mark.parametrize("template_id", [one.id for one in TEMPLATES])
def test_each_template_is_a_trip_with_a_source_for_every_part(template_id):
    parts = edits.started_from(template_id)
    assert Trip(parts=parts).parts == parts
    assert all(part.sources for part in parts)
    assert all(
        "liquid" not in part.sources and "cylinder" not in part.sources for part in parts if part.kind == "flight"
    )
    kinds = [part.kind for part in parts]
    boarded = [number for number, kind in enumerate(kinds) if kind in ("flight", "ship", "rail")]
    assert all(kinds[number - 1] in ("wait", "layover") for number in boarded)


def test_an_unknown_template_is_refused_by_name():
    with pytest.raises(InputError, match="no trip template 'x'"):
        edits.started_from("x")


def test_parts_are_added_doubled_moved_and_taken_out_with_ids_of_their_own():
    parts = trip("road wait flight")
    added, new = edits.with_new(parts, "walk", 1)
    assert [part.kind for part in added] == ["road", "walk", "wait", "flight"]
    doubled, double = edits.with_double(added, 3)
    assert doubled[4].model_copy(update={"part_id": ""}) == doubled[3].model_copy(update={"part_id": ""})
    assert len({part.part_id for part in doubled}) == 5
    assert {new, double} <= {part.part_id for part in doubled}
    assert [part.kind for part in edits.moved(parts, 2, -1)] == ["road", "flight", "wait"]
    assert [part.kind for part in edits.without(parts, 0)] == ["wait", "flight"]
    with pytest.raises(InputError, match="place 4 of 3"):
        edits.moved(parts, 2, 1)


def test_a_part_turned_twice_is_as_it_was():
    flight = Part(part_id="f", kind="flight", duration_min=90.0, origin_place_id="VIE", destination_place_id="MAD",
                  zone_at_end="Europe/Madrid")  # fmt: skip
    once = edits.turned((flight,), 0, None)
    assert once[0].destination_place_id == "VIE"
    assert edits.turned(once, 0, None)[0] == flight


def clock_back(part, home_zone):
    """The zone in which the way back of one part ends."""
    return edits.with_way_back((part, new_part("stay", ())), [None, None], home_zone)[2].zone_at_end


def test_the_way_back_over_ground_ends_by_the_clock_it_began_by():
    train = Part(part_id="rail_1", kind="rail", duration_min=180.0, zone_at_end="Europe/London")
    assert clock_back(train, "Europe/Vienna") == "Europe/Vienna"
    assert clock_back(train.model_copy(update={"zone_at_end": None}), "Europe/Vienna") is None


def test_the_way_back_to_a_place_outside_the_list_ends_by_its_clock():
    flight = Part(part_id="flight_1", kind="flight", duration_min=500.0, destination_place_id="VIE")
    assert clock_back(flight, "Asia/Kathmandu") == "Asia/Kathmandu"


def test_each_part_of_the_way_back_takes_the_clock_of_its_own_start():
    train = Part(part_id="rail_1", kind="rail", duration_min=180.0, zone_at_end="Europe/London")
    wait = new_part("wait", ())
    ship = Part(part_id="ship_1", kind="ship", duration_min=600.0, zone_at_end="Atlantic/Azores")
    back = edits.with_way_back((train, wait, ship), [None] * 3, "Europe/Paris")[3:]
    assert [(part.kind, part.zone_at_end) for part in back] == [
        ("wait", None),
        ("ship", "Europe/London"),
        ("rail", "Europe/Paris"),
    ]


def test_a_wait_is_not_by_the_clock_of_the_other_end_on_the_way_back():
    wait = new_part("wait", ()).model_copy(update={"zone_at_end": "Europe/Vienna"})
    back = edits.with_way_back((wait, new_part("flight", ())), [None, None], "Europe/Vienna")[2]
    assert (back.kind, back.zone_at_end) == ("wait", None)
