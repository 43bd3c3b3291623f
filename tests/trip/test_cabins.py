"""Measured cabins are as published, and a service's faulty series is refused by key."""

import re

import pytest

from planner.errors import ProfileError
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
