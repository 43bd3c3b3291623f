"""Stress cases by hand happen to the part they name, and to nothing else."""

import pytest

from planner.trip.itinerary import PartSpan
from planner.trip.stress import MISSED_MIN, OVERNIGHT_MIN, possible, stress

SHARES = {"rest": 1.0, "walking": 0.0, "asleep": 0.0}


def trip(*kinds):
    return [
        PartSpan(f"p{n}", kind, f"{kind} {n}", 0.0, 60.0 + n, None, None, 0.0, "ground", None, None, 0.0, SHARES, ())
        for n, kind in enumerate(kinds)
    ]


CONNECTING = trip("road", "wait", "flight", "layover", "flight", "road")


def test_every_flight_is_late_and_nothing_else():
    case = stress("late", 180.0, CONNECTING)
    assert case.waits_min.tolist() == [0, 0, 180.0, 0, 180.0, 0]
    assert not case.longer_min.any()


def test_a_missed_connection_is_waited_for_before_the_flight_after_the_layover():
    case = stress("missed_connection", 180.0, CONNECTING)
    assert case.waits_min.tolist() == [0, 0, 0, 0, MISSED_MIN, 0]
    assert case.where == "flight 4"


def test_a_night_more_comes_before_the_connection_else_the_first_flight():
    assert stress("overnight", 0.0, CONNECTING).waits_min.tolist() == [0, 0, 0, 0, OVERNIGHT_MIN, 0]
    direct = stress("overnight", 0.0, trip("wait", "flight", "stay", "flight"))
    assert direct.waits_min.tolist() == [0, OVERNIGHT_MIN, 0, 0]


def test_the_longest_flight_is_diverted_by_the_middle_of_two_to_five_hours():
    case = stress("diversion", 0.0, CONNECTING)
    assert case.longer_min.tolist() == [0, 0, 0, 0, 210.0, 0]
    assert case.minutes == 210.0


def test_only_what_can_happen_is_offered():
    assert possible(CONNECTING) == ("late", "missed_connection", "overnight", "diversion")
    assert possible(trip("wait", "flight")) == ("late", "overnight", "diversion")
    assert possible(trip("road", "stay")) == ()


@pytest.mark.parametrize("kind", ["late", "missed_connection", "overnight", "diversion"])
def test_where_it_cannot_happen_nothing_does(kind):
    case = stress(kind, 180.0, trip("road", "stay"))
    assert not case.waits_min.any()
    assert not case.longer_min.any()
    assert case.where == ""


@pytest.mark.parametrize(
    ("kinds", "missed"),
    [
        ("wait flight wait flight", 3),
        ("flight layover walk flight", 3),
        ("flight wait walk layover flight layover flight", 4),
        ("flight flight", 1),
        ("layover flight", 1),
    ],
)
def test_a_connection_is_known_however_the_time_between_is_entered(kinds, missed):
    spans = trip(*kinds.split())
    assert "missed_connection" in possible(spans)
    assert stress("missed_connection", 0.0, spans).waits_min.nonzero()[0].tolist() == [missed]


@pytest.mark.parametrize("kinds", ["flight stay flight", "flight road wait flight", "flight home wait flight"])
def test_a_flight_begun_anew_is_no_connection(kinds):
    assert "missed_connection" not in possible(trip(*kinds.split()))
