"""Airports: elevations that are not known stay so, distances, and search as one types."""

import json
import re

import pytest

from planner.catalogue import profile_text, read_profile
from planner.errors import InputError
from planner.trip.places import by_id, great_circle_km, planning_flight_min, search


@pytest.mark.parametrize(("code", "elevation_m"), [("MAD", 610), ("DEN", 1656), ("LPB", 4061), ("AMS", -3)])
def test_elevations_of_well_known_airports(code, elevation_m):
    # Aeronautical publications: Madrid 1,998 ft, Denver 5,434 ft, La Paz 13,325 ft, Amsterdam -11 ft.
    assert by_id(code).elevation_m == pytest.approx(elevation_m, abs=12)


@pytest.mark.parametrize("code", ["DIG", "GOQ", "XNN"])
def test_a_high_airport_whose_elevation_the_data_lack_is_unknown_and_not_sea_level(code):
    # Shangri-La, Golmud and Xining stand between 2,100 and 3,300 m; the data give 0 for "not known".
    assert by_id(code).elevation_m is None


def test_no_elevation_is_zero_and_none_is_above_the_highest_airport():
    heights = [row[4] for row in read_profile("airports.json")["rows"]]
    assert 0 not in heights
    assert max(height for height in heights if height is not None) < 4500
    assert sum(height is None for height in heights) > 100


def test_the_profile_says_which_data_it_was_made_from():
    head = json.loads(re.match(r".*?\"rows\"", profile_text("airports.json"), re.S).group(0) + ": []}")
    assert "airportsdata" in head["source"]
    assert "MIT" in head["source"]


def test_a_code_in_small_letters_is_found_and_an_unknown_one_is_none():
    assert by_id("mad").place_id == "MAD"
    assert by_id("QQQ") is None


def test_search_puts_the_code_first_then_what_begins_with_the_words():
    assert search("ZRH")[0].place_id == "ZRH"
    assert all("verona" in f"{one.city} {one.name}".lower() for one in search("verona"))


def test_search_takes_letters_without_their_accents():
    assert "ZRH" in {one.place_id for one in search("zurich")}
    assert {one.place_id for one in search("Zürich")} == {one.place_id for one in search("zurich")}


def test_search_keeps_to_its_limit_and_finds_nothing_in_nothing():
    assert len(search("a", limit=7)) == 7
    assert search("   ") == ()


@pytest.mark.parametrize(("a", "b", "km"), [("LHR", "JFK", 5540), ("SYD", "LAX", 12_050), ("SIN", "EWR", 15_340)])
def test_great_circles_are_the_printed_distances(a, b, km):
    # Distances printed for these well-known routes (from memory), on a sphere within half a per cent.
    assert great_circle_km(by_id(a), by_id(b)) == pytest.approx(km, rel=0.005)


def test_a_planning_flight_time_grows_with_the_distance_and_is_a_round_number():
    assert planning_flight_min(0.0) == 45.0
    assert planning_flight_min(800.0) == 105.0
    assert planning_flight_min(1234.0) % 5 == 0
    with pytest.raises(InputError, match="20,100 km"):
        planning_flight_min(30_000.0)
