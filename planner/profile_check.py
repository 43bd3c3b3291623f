"""Checks every profile, the packaged and the service's own: each is read by the room that uses it."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from planner.catalogue import profile_names, profile_text, read_own_profile, read_profile, service_folder
from planner.delivery.devices import load_devices
from planner.errors import PlannerError
from planner.evidence.regressions import all_regressions
from planner.guidance.cautions import load_conditions
from planner.guidance.pathway_file import FOLDER, read_pathway
from planner.kit.conservers import load_conservers
from planner.kit.sizes import load_concentrators, load_cylinders
from planner.records.reading import read_case
from planner.trip.cabins import measured_cabins
from planner.trip.places import by_id

_ROOMS: dict[str, Callable[[], object]] = {
    "airports.json": lambda: by_id("XXX"),
    "cabins.toml": measured_cabins,
    "cautions.toml": load_conditions,
    "concentrators.toml": load_concentrators,
    "conservers.toml": load_conservers,
    "cylinders.toml": load_cylinders,
    "delivery.toml": load_devices,
    "regressions.toml": all_regressions,
}


def check_profiles() -> Iterator[tuple[str, str | None]]:
    """(name, None or the fault as a sentence) for every profile and demo case."""
    for name in profile_names():
        yield name, _fault(_ROOMS.get(name, lambda name=name: read_profile(name)))  # type: ignore[misc]
        if (service_folder() / name).is_file():
            yield str(service_folder() / name), _fault(lambda name=name: read_own_profile(name))  # type: ignore[misc]
    for name in profile_names(FOLDER):
        yield name, _fault(lambda name=name: _check_pathway(name))  # type: ignore[misc]
    for name in profile_names("demo"):
        yield name, _fault(lambda name=name: read_case(profile_text(name)))  # type: ignore[misc]


def _check_pathway(name: str) -> object:
    own = read_own_profile(name)
    return read_pathway(name, own if own is not None else read_profile(name))


def _fault(check: Callable[[], object]) -> str | None:
    try:
        check()
    except PlannerError as error:
        return str(error)
    return None
