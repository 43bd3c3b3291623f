"""Reads profiles: the packaged ones, then the service's own, which extend or replace by id.

A profile is a TOML or JSON file that a clinician could read and correct. Each carries `format` and `version`.
A service keeps its own files under the same names in `service_folder()`. Rooms turn raw entries into their own
checked types; this module knows files and nothing of what stands in them.
"""

from __future__ import annotations

import json
import os
import tomllib
from functools import lru_cache
from importlib import resources
from importlib.resources.abc import Traversable
from pathlib import Path
from typing import Any

import platformdirs

from planner.errors import ProfileError

APP_NAME = "home-oxygen-altitude-planner"
MAX_PROFILE_BYTES = 5_000_000
_SUFFIXES = (".toml", ".json")


def service_folder() -> Path:
    """Where a service keeps its own profiles; PLANNER_PROFILES_DIR overrides it."""
    override = os.environ.get("PLANNER_PROFILES_DIR")
    return Path(override) if override else Path(platformdirs.user_data_dir(APP_NAME, appauthor=False)) / "profiles"


def profile_text(name: str) -> str:
    """Text of a packaged profile; name is relative, such as "pathways/bts_2022_adult.toml"."""
    source = resources.files("profiles").joinpath(*name.split("/"))
    if not source.is_file():
        raise ProfileError(name, "", "there is no packaged profile with this name")
    return source.read_text(encoding="utf-8")


def profile_names(folder: str = "") -> tuple[str, ...]:
    """Names of the profiles in a folder: packaged and the service's own, sorted, each once."""
    packaged = resources.files("profiles")
    if folder:
        packaged = packaged.joinpath(*folder.split("/"))
    names = set(_listed(packaged, folder))
    own = service_folder() / folder
    if own.is_dir():
        names.update(_listed(own, folder))
    return tuple(sorted(names))


def read_profile(name: str) -> dict[str, Any]:
    """A packaged profile as a table, with its `format` and `version` present."""
    return _parsed(name, profile_text(name))


def read_own_profile(name: str) -> dict[str, Any] | None:
    """The service's own file of this name as a table, or None where it has none."""
    path = service_folder() / name
    if not path.is_file():
        return None
    try:
        if path.stat().st_size > MAX_PROFILE_BYTES:
            raise ProfileError(
                str(path), "", f"the file is larger than the {MAX_PROFILE_BYTES // 1_000_000} MB allowed"
            )
        text = path.read_text(encoding="utf-8")
    except UnicodeDecodeError as error:
        raise ProfileError(str(path), "", f"the file is not UTF-8 text (byte {error.start})") from error
    except OSError as error:
        raise ProfileError(str(path), "", f"the file cannot be read: {error.strerror}") from error
    return _parsed(str(path), text)


def read_entries(name: str, entries_key: str = "entry") -> dict[str, dict[str, Any]]:
    """Entries by id: the packaged ones, then the service's own, which replace an id or add one.

    A service may have its own file of this name without a packaged one.
    """
    entries: dict[str, dict[str, Any]] = {}
    if name in _listed_all(name):
        entries = _by_id(name, read_profile(name), entries_key)
    own = read_own_profile(name)
    if own is not None:
        entries |= _by_id(str(service_folder() / name), own, entries_key)
    return entries


def _listed_all(name: str) -> tuple[str, ...]:
    folder, _, _ = name.rpartition("/")
    packaged = resources.files("profiles")
    if folder:
        packaged = packaged.joinpath(*folder.split("/"))
    return tuple(_listed(packaged, folder))


def _listed(folder: Traversable | Path, prefix: str) -> list[str]:
    if not folder.is_dir():
        return []
    start = f"{prefix}/" if prefix else ""
    return [start + item.name for item in folder.iterdir() if item.name.endswith(_SUFFIXES)]


@lru_cache(maxsize=64)
def _parsed(name: str, text: str) -> dict[str, Any]:
    """The table of a file's text; parsed once for the same text, so it must not be changed."""
    try:
        table = json.loads(text) if name.endswith(".json") else tomllib.loads(text)
    except (ValueError, RecursionError) as error:
        raise ProfileError(name, "", f"the file cannot be parsed: {error}") from error
    if not isinstance(table, dict):
        raise ProfileError(name, "", "the file must hold one table of keys and values")
    if not isinstance(table.get("format"), str):
        raise ProfileError(name, "format", "the name of the format is missing")
    if not isinstance(table.get("version"), int):
        raise ProfileError(name, "version", "the version, a whole number, is missing")
    return table


def _by_id(name: str, table: dict[str, Any], entries_key: str) -> dict[str, dict[str, Any]]:
    rows = table.get(entries_key)
    if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
        raise ProfileError(name, entries_key, f"a list of [[{entries_key}]] tables is expected")
    entries: dict[str, dict[str, Any]] = {}
    for number, row in enumerate(rows, start=1):
        entry_id = row.get("id")
        if not isinstance(entry_id, str) or not entry_id:
            raise ProfileError(name, f"{entries_key} {number}", "the entry has no id")
        if entry_id in entries:
            raise ProfileError(name, entry_id, "the id stands twice in this file; each entry needs its own")
        entries[entry_id] = row
    return entries
