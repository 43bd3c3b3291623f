"""The trip in time and air: pressures, passes, zones, stays, and what is not known."""

import json
from datetime import datetime
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.air.atmosphere import isa_pressure_mmhg, mountain_pressure_mmhg
from planner.air.cabin import cabin_altitude_m
from planner.case.policy import Policy
from planner.case.trip import Trip
from planner.trip.itinerary import elevations_at_start, lay_out
from planner.trip.places import by_id

ROAD = {"part_id": "r", "kind": "road", "duration_min": 90, "name": "Road"}
FLIGHT = {
    "part_id": "f",
    "kind": "flight",
    "duration_min": 180,
    "origin_place_id": "AMS",
    "destination_place_id": "MAD",
}


def laid(*parts, policy=None, **trip):
    content = {"home_elevation_m": 100, "parts": parts} | trip
    return lay_out(Trip.model_validate_json(json.dumps(content)), policy or Policy())


def test_an_empty_trip_is_an_empty_timeline():
    empty = laid()
    assert empty.parts == ()
    assert empty.total_min == 0.0
    assert empty.minutes.size == 0


def test_a_cabin_has_the_standard_atmosphere_and_a_mountain_that_of_west():
    both = laid(ROAD | {"highest_m": 2438.4}, FLIGHT)
    assert both.parts[0].lowest_barometric_mmhg == pytest.approx(float(mountain_pressure_mmhg(2438.4)))
    assert both.parts[1].lowest_barometric_mmhg == pytest.approx(float(isa_pressure_mmhg(2438.4)))
    assert both.parts[0].lowest_barometric_mmhg - both.parts[1].lowest_barometric_mmhg == pytest.approx(9.5, abs=0.2)


def test_the_top_of_a_pass_is_never_missed():
    for minutes in (7, 31, 90, 333):
        assert laid(ROAD | {"highest_m": 2504, "duration_min": minutes}).parts[0].highest_m == 2504.0


def test_a_recorded_profile_keeps_its_highest_point_when_the_drive_takes_longer():
    profile = [
        {"at_min": 0, "elevation_m": 300},
        {"at_min": 37, "elevation_m": 1811},
        {"at_min": 60, "elevation_m": 700},
    ]
    part = laid(ROAD | {"profile": profile, "duration_min": 97}).parts[0]
    assert part.highest_m == 1811.0


def test_each_part_starts_where_the_one_before_ended():
    laid_out = laid(ROAD | {"end_elevation_m": 640}, ROAD | {"part_id": "b"})
    assert laid_out.parts[1].highest_m == 640.0
    assert laid_out.parts[1].start_min == 90.0


def test_after_a_flight_the_ground_is_the_destinations_field():
    assert laid(FLIGHT, ROAD).parts[1].highest_m == pytest.approx(609.9, abs=1.0)  # Madrid, 2,000 ft


def test_an_unknown_elevation_is_asked_for_and_never_sea_level():
    unknown = laid(ROAD, home_elevation_m=None)
    assert unknown.parts[0].lowest_inspired_po2_mmhg is None
    assert "elevation of Road is not known" in unknown.parts[0].unknown[0]
    assert np.isnan(unknown.inspired_po2_mmhg).all()


def test_an_unknown_airport_is_asked_for_and_the_cabin_still_planned():
    span = laid(FLIGHT | {"destination_place_id": None}).parts[0]
    assert "lands is not known" in span.unknown[0]
    assert span.highest_m == pytest.approx(2438.4)


def test_a_cabin_is_never_taken_down_to_sea_level_at_a_field_whose_elevation_is_not_known():
    into = laid(FLIGHT | {"destination_place_id": "XNN"})  # Xining: the data have no elevation
    assert into.altitude_m[-1] == pytest.approx(2438.4)
    assert into.altitude_m[0] == pytest.approx(-3.4, abs=1.0)
    out = laid(FLIGHT | {"origin_place_id": "XNN"}, home_elevation_m=None)
    assert out.altitude_m[0] == pytest.approx(2438.4)
    assert into.parts[0].unknown == (
        "The elevation where the flight lands is not known: the airport data have none for "
        "Xining Caojiabu Airport (XNN); enter it.",
    )


def test_an_elevation_typed_for_a_flight_answers_for_its_airport_and_for_what_follows():
    typed = laid(FLIGHT | {"destination_place_id": "XNN", "end_elevation_m": 2184.0}, ROAD)
    assert typed.parts[0].unknown == ()
    assert typed.altitude_m[typed.part_index == 0][-1] == pytest.approx(2184.0)
    assert typed.parts[1].highest_m == 2184.0


def test_an_airport_nobody_knows_is_said_and_where_the_road_ended_stands_in():
    span = laid(FLIGHT | {"destination_place_id": "QQQ"}).parts[0]
    assert "there is no airport 'QQQ' in the list" in span.unknown[0]
    assert laid(FLIGHT | {"origin_place_id": "XNN"}).altitude_m[0] == 100.0


@pytest.mark.parametrize("minutes", [21, 33, 42, 43, 44, 58])
def test_the_top_of_a_flight_too_short_to_cruise_is_never_missed(minutes):
    flight = laid(FLIGHT | {"duration_min": minutes, "destination_place_id": "BRU"})
    fine = np.linspace(0.0, minutes, 50_001)
    top = cabin_altitude_m(fine, minutes, by_id("AMS").elevation_m, by_id("BRU").elevation_m, 2438.4).max()
    assert flight.parts[0].highest_m == pytest.approx(top, abs=0.5)


def test_the_planning_cabin_altitude_is_the_services_and_a_flights_own_comes_first():
    lower = Policy(planning_cabin_altitude_m=1828.8)
    assert laid(FLIGHT, policy=lower).parts[0].highest_m == pytest.approx(1828.8)
    assert laid(FLIGHT | {"cabin_altitude_m": 2400.0}, policy=lower).parts[0].highest_m == pytest.approx(2400.0)


@pytest.mark.parametrize(
    ("departs", "zone", "flight", "arrives"),
    [
        # over midnight
        ("2026-06-10T23:00", "Europe/Amsterdam", FLIGHT, "2026-06-11T02:00+02:00"),
        # into the hour that summer time skips: 01:30 and three hours later it is 05:30
        ("2027-03-28T01:30", "Europe/Amsterdam", FLIGHT, "2027-03-28T05:30+02:00"),
        # west over the Atlantic: arrives an hour after it left by the clocks
        ("2026-06-10T10:00", "Europe/Amsterdam", FLIGHT | {"duration_min": 420, "destination_place_id": "JFK"},
         "2026-06-10T11:00-04:00"),
        # east over the date line: Los Angeles to Auckland arrives two days later by the calendar
        ("2026-06-10T21:00", "America/Los_Angeles",
         FLIGHT | {"duration_min": 780, "origin_place_id": "LAX", "destination_place_id": "AKL"},
         "2026-06-12T05:00+12:00"),
    ],
)  # fmt: skip
def test_clocks_are_right_across_midnight_summer_time_and_the_date_line(departs, zone, flight, arrives):
    span = laid(flight, departs_at=departs, departure_zone=zone).parts[0]
    assert span.ends_at == datetime.fromisoformat(arrives)
    assert span.ends_at.utcoffset() == datetime.fromisoformat(arrives).utcoffset()


def test_without_a_date_there_are_no_clocks():
    assert laid(ROAD).parts[0].starts_at is None


def test_a_zone_nobody_knows_leaves_the_clocks_out():
    assert laid(ROAD, departs_at="2026-06-10T10:00", departure_zone="Mars/Olympus").parts[0].starts_at is None


def test_a_ground_part_keeps_the_zone_it_starts_in():
    span = laid(ROAD, departs_at="2026-06-10T10:00", departure_zone="Asia/Tokyo").parts[0]
    assert span.ends_at == datetime(2026, 6, 10, 11, 30, tzinfo=ZoneInfo("Asia/Tokyo"))


def test_a_stay_at_altitude_counts_the_hours_and_a_cabin_or_a_valley_ends_them():
    stay = {"part_id": "s", "kind": "stay", "duration_min": 2880, "start_elevation_m": 2500}
    valley = {"part_id": "v", "kind": "stay", "duration_min": 600, "start_elevation_m": 500}
    laid_out = laid(stay, FLIGHT, stay | {"part_id": "t"}, valley)
    hours = [laid_out.hours_at_altitude[laid_out.part_index == number].max() for number in range(4)]
    assert hours == pytest.approx([48.0, 0.0, 48.0, 0.0])


def test_the_worst_moment_of_a_stay_is_its_acute_start():
    stay = {"part_id": "s", "kind": "stay", "duration_min": 2880, "start_elevation_m": 2500}
    assert laid(stay).parts[0].hours_at_altitude == 0.0


def test_shares_of_activities_are_carried():
    part = laid(ROAD | {"shares": {"rest": 0.5, "walking": 0.2, "asleep": 0.3}}).parts[0]
    assert part.shares == {"rest": 0.5, "walking": 0.2, "asleep": 0.3}


def test_where_each_part_begins_is_told_or_not_known():
    known = laid(ROAD | {"end_elevation_m": 2500.0}, {"part_id": "s", "kind": "stay", "duration_min": 600})
    assert elevations_at_start(known) == (100.0, 2500.0)
    assert elevations_at_start(laid(ROAD, home_elevation_m=None)) == (None,)


minutes = st.floats(1.0, 3000.0)


@given(st.lists(st.tuples(minutes, st.floats(0.0, 5000.0), st.floats(0.0, 5000.0)), min_size=1, max_size=8))
def test_parts_follow_one_another_and_time_adds_up(parts):
    trip = laid(
        *(
            {
                "part_id": str(number),
                "kind": "road",
                "duration_min": length,
                "start_elevation_m": low,
                "end_elevation_m": high,
            }
            for number, (length, low, high) in enumerate(parts)
        )
    )
    assert trip.total_min == pytest.approx(sum(length for length, _, _ in parts))
    assert (np.diff(trip.minutes) >= -1e-9).all()
    assert (np.diff(trip.part_index) >= 0).all()
    for before, after in zip(trip.parts, trip.parts[1:], strict=False):
        assert after.start_min == pytest.approx(before.start_min + before.duration_min)
    assert np.isfinite(trip.inspired_po2_mmhg).all()


LEAVES = {"departs_at": "2026-12-01T08:00:00", "departure_zone": "Europe/Amsterdam"}


def test_a_time_zone_that_is_not_the_airports_is_said():
    right = laid(FLIGHT, **LEAVES).parts[0]
    assert right.doubts == ()
    landed = laid(FLIGHT | {"zone_at_end": "Europe/London"}, **LEAVES).parts[0]
    assert landed.doubts == (
        "flight reaches Madrid at 11:00 by the clock there, but at 10:00 by the time zone entered; check the zone.",
    )
    left = laid(FLIGHT, **(LEAVES | {"departure_zone": "America/New_York"})).parts[0]
    assert "leaves Amsterdam at 14:00 by the clock there, but at 08:00" in left.doubts[0]


def test_a_zone_of_another_name_with_the_same_clock_is_no_doubt():
    assert laid(FLIGHT | {"zone_at_end": "Europe/Berlin"}, **LEAVES).parts[0].doubts == ()


def test_a_zone_that_does_not_exist_is_said_and_the_clock_goes_on():
    part = laid(FLIGHT | {"destination_place_id": None, "zone_at_end": "Europe/Nowhere"}, **LEAVES).parts[0]
    assert "There is no time zone 'Europe/Nowhere'" in part.doubts[0]
    assert f"{part.ends_at:%H:%M}" == "11:00"


def test_going_down_ends_acclimatisation_and_a_flight_does_not_count():
    up = {"kind": "stay", "duration_min": 2880, "start_elevation_m": 2500.0, "end_elevation_m": 2500.0}
    low = {"part_id": "low", "kind": "stay", "duration_min": 120, "start_elevation_m": 400.0, "end_elevation_m": 400.0}
    trip = laid(up | {"part_id": "a"}, low, up | {"part_id": "b"})
    hours = [trip.hours_at_altitude[trip.part_index == part] for part in range(3)]
    assert hours[0][-1] == pytest.approx(48.0)
    assert not hours[1].any()
    assert hours[2][0] == 0.0
