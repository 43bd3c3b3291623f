"""Plans of the demo cases, made once; and the demo case with everything a user could type at its worst."""

import pytest

from planner import Case, plan
from planner.catalogue import profile_text
from planner.papers.desk import Desk

DEMOS = ("copd_layover", "fibrosis_mountain_hotel", "neuromuscular_car_and_plane")


def demo_case(name=DEMOS[0]):
    return Case.model_validate_json(profile_text(f"demo/{name}.json"))


@pytest.fixture(scope="session")
def plans():
    kept = {}

    def planned(case):
        key = case.model_dump_json()
        if key not in kept:
            kept[key] = plan(case)
        return case, kept[key]

    return planned


@pytest.fixture(scope="session", params=DEMOS)
def demo(request, plans):
    return Desk.of(*plans(demo_case(request.param)))


@pytest.fixture(scope="session")
def first(plans):
    return Desk.of(*plans(demo_case()))
