"""A plan as JSON: every number with its unit in the key, arrays as lists, what is not known as null."""

from __future__ import annotations

import json
from dataclasses import fields, is_dataclass
from datetime import date, datetime
from typing import Any

import numpy as np

from planner.lung.fitting import FittedLung
from planner.lung.subset import log_sd_spread
from planner.results import Plan

FORMAT = "oxygen-altitude-plan"
VERSION = 1
CAUTION = "Estimate only. Confirm with prescriber."
_DIGITS = 6


def plan_as_json(plan: Plan) -> str:
    """The whole plan as JSON text, same plan same bytes. The fitted lung's samples are left out; its summary stays."""
    content = {"format": FORMAT, "version": VERSION, "caution": CAUTION} | _plain(plan)
    return json.dumps(content, ensure_ascii=False, indent=1, allow_nan=False)


def _plain(value: Any) -> Any:
    if isinstance(value, FittedLung):
        low, middle, high = log_sd_spread(value)
        return {"log_sd_low": low, "log_sd_median": middle, "log_sd_high": high, "widened": list(value.widened)}
    if is_dataclass(value) and not isinstance(value, type):
        return {field.name: _plain(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, np.ndarray):
        return [_plain(item) for item in value.tolist()]
    if isinstance(value, np.generic):
        return _plain(value.item())
    if isinstance(value, float):
        return _significant(value)
    if isinstance(value, dict):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, (list, tuple, set, frozenset)):
        return [_plain(item) for item in value]
    if isinstance(value, (datetime, date)):
        return value.isoformat()
    if hasattr(value, "model_dump"):
        return value.model_dump(mode="json")
    return value


def _significant(value: float) -> float | None:
    if not np.isfinite(value):
        return None
    return float(f"{value:.{_DIGITS}g}")
