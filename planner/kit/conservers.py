"""Conservers on a cylinder: which one gives the pulses decided, and what it weighs."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from planner.catalogue import read_entries
from planner.errors import ProfileError

CONSERVERS = "conservers.toml"
_KEYS: dict[str, Any] = {"id": str, "name": str, "device_id": str, "mass_kg": (int, float), "source": str, "seen": bool}


@dataclass(frozen=True)
class Conserver:
    """A device that lets oxygen out of a cylinder in pulses; its pulses are those of the delivery device named."""

    id: str
    name: str
    device_id: str
    mass_kg: float
    source: str
    seen: bool


def load_conservers() -> dict[str, Conserver]:
    """Every conserver by id. Raises ProfileError."""
    found = {}
    for key, row in read_entries(CONSERVERS).items():
        for name, kind in _KEYS.items():
            if not isinstance(row.get(name), kind):
                raise ProfileError(CONSERVERS, f"{key}.{name}", "this value is missing or of another type")
        if unknown := sorted(set(row) - set(_KEYS)):
            raise ProfileError(CONSERVERS, f"{key}.{unknown[0]}", f"known keys are {', '.join(_KEYS)}")
        if not 0.0 < row["mass_kg"] <= 5.0:
            raise ProfileError(CONSERVERS, f"{key}.mass_kg", f"above 0 to 5 kg is allowed; {row['mass_kg']} was given")
        found[key] = Conserver(**{name: row[name] for name in _KEYS})
    return found


def conserver_for(device_ids: Iterable[str], chosen_id: str | None) -> Conserver | None:
    """The conserver that gives one of these devices' pulses: the one chosen, else the first of the profiles."""
    wanted = set(device_ids)
    fitting = [one for one in load_conservers().values() if one.device_id in wanted]
    return next((one for one in fitting if one.id == chosen_id), fitting[0] if fitting else None)
