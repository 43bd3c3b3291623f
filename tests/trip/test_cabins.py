"""Measured cabins are as published, and a service's faulty series is refused by key."""

import re

import pytest

from planner.case.trip import Part
from planner.errors import InputError, ProfileError
from planner.trip import cabins


def test_feet_and_metres_of_every_series_agree():
    texts = [one.text for one in cabins.measured_cabins()]
    assert len(texts) >= 4
    for text in texts:
        pairs = re.findall(r"([\d,]+) m \(([\d,]+) ft\)", text)
        assert pairs
        for metres, feet in pairs:
            assert float(metres.replace(",", "")) == pytest.approx(0.3048 * float(feet.replace(",", "")), abs=1.0)


def test_every_series_has_its_source():
    assert all(re.search(r"\b(19|20)\d\d$", one.source) for one in cabins.measured_cabins())


def test_a_series_without_source_is_refused_by_key(monkeypatch):
    monkeypatch.setattr(cabins, "read_entries", lambda _name: {"own": {"name": "Own", "text": "2,000 m"}})
    with pytest.raises(ProfileError, match=r"own\.source"):
        cabins.measured_cabins()


def flight(**entries):
    return Part(**({"part_id": "f", "kind": "flight", "duration_min": 180.0} | entries))


def test_about_one_flight_in_ten_is_above_8000_ft():
    # Hampson NB et al., Aviat Space Environ Med 2013: about 10 % of 207 flights; a normal spread is ours.
    for minutes in (70.0, 300.0):
        assert cabins.measured_for(flight(duration_min=minutes)).share_above(2438.4) == pytest.approx(0.10, abs=0.03)


def test_longer_flights_are_higher_and_the_mean_is_the_published_one():
    short, long = (cabins.measured_for(flight(duration_min=minutes)) for minutes in (70.0, 300.0))
    assert short.quantile_m(0.5) == pytest.approx(5160 * 0.3048, abs=1.0)
    assert long.quantile_m(0.5) == pytest.approx(7085 * 0.3048, abs=1.0)
    assert short.quantile_m(0.01) == 0.0  # never below sea level


def test_the_airports_decide_how_long_a_flight_is():
    # Vienna to Madrid is 1,800 km, whatever minutes are entered.
    places = {"origin_place_id": "VIE", "destination_place_id": "MAD"}
    assert cabins.measured_for(flight(duration_min=60.0, **places)).name == "Flights over 750 miles"
    assert cabins.measured_for(flight(duration_min=60.0)).name == "Flights under 750 miles"


def test_a_share_outside_and_a_series_without_spread_are_refused():
    series = cabins.measured_for(flight())
    with pytest.raises(InputError, match="outside above 0 to below 1"):
        series.quantile_m(1.0)
    with pytest.raises(InputError, match="has no mean and spread"):
        cabins.measured_cabins()[0].share_above(2000.0)


def test_a_faulty_number_of_a_series_is_refused_by_key(monkeypatch):
    entry = {"name": "Own", "text": "2,000 m", "source": "Own", "mean_m": 9000.0}
    monkeypatch.setattr(cabins, "read_entries", lambda _name: {"own": entry})
    with pytest.raises(ProfileError, match=r"own\.mean_m: 0 to 4600 is allowed"):
        cabins.measured_cabins()
