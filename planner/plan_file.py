"""A plan as JSON: every number with its unit in the key, arrays as lists, what is not known as null."""

from __future__ import annotations

import json
from dataclasses import fields, is_dataclass
from datetime import date, datetime
from functools import cache
from math import isfinite
from typing import Any

import numpy as np

from planner.lung.fitting import FittedLung
from planner.lung.subset import log_sd_spread
from planner.results import Plan

FORMAT = "oxygen-altitude-plan"
VERSION = 1
CAUTION = "Estimate only. Confirm with prescriber."
_DIGITS = 6


def plan_as_json(plan: Plan, *, compact: bool = False) -> str:
    """The whole plan as JSON text, same plan same bytes. The fitted lung's samples are left out; its summary stays.

    compact: on one line, for another program to read.
    """
    content = {"format": FORMAT, "version": VERSION, "caution": CAUTION} | _plain(plan)
    indent, separators = (None, (",", ":")) if compact else (1, None)
    return json.dumps(content, ensure_ascii=False, indent=indent, separators=separators, allow_nan=False)


def _plain(value: Any) -> Any:
    if value is None or isinstance(value, (str, bool, int)):
        return value
    if isinstance(value, float):
        return _significant(value)
    if isinstance(value, np.ndarray) and value.ndim == 1 and value.dtype == np.float64:
        return [_significant(item) for item in value.tolist()]
    if isinstance(value, FittedLung):
        low, middle, high = log_sd_spread(value)
        return {"log_sd_low": low, "log_sd_median": middle, "log_sd_high": high, "widened": list(value.widened)}
    kind: type = type(value)
    names = _field_names(kind)
    if names:
        return {name: _plain(getattr(value, name)) for name in names}
    if isinstance(value, (list, tuple, set, frozenset)):
        return [_plain(item) for item in value]
    if isinstance(value, np.ndarray):
        return [_plain(item) for item in value.tolist()]
    if isinstance(value, np.generic):
        return _plain(value.item())
    if isinstance(value, dict):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, (datetime, date)):
        return value.isoformat()
    if hasattr(value, "model_dump"):
        return value.model_dump(mode="json")
    return value


@cache
def _field_names(kind: type) -> tuple[str, ...]:
    """Names of the fields of a dataclass; none of any other type."""
    return tuple(field.name for field in fields(kind)) if is_dataclass(kind) else ()


def _significant(value: float) -> float | None:
    return float(f"{value:.{_DIGITS}g}") if isfinite(value) else None
