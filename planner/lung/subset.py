"""A fitted lung in fewer draws, and its main number in words."""

from __future__ import annotations

from dataclasses import fields, replace
from typing import Any

import numpy as np

from planner.lung.fitted import FittedLung


def thinned(lung: FittedLung, draws: int) -> FittedLung:
    """Evenly taken draws of a fitted lung, at most so many; the lung itself where it has no more."""
    have = lung.log_sd.size
    if have <= draws:
        return lung
    taken = np.linspace(0, have - 1, draws).round().astype(np.int64)
    arrays: dict[str, Any] = {
        field.name: value[taken]
        for field in fields(lung)
        if isinstance(value := getattr(lung, field.name), np.ndarray) and value.shape == (have,)
    }
    # What is solved already spans these draws too; what they have solved later would not span all, so it is not shared.
    responses = {key: response.of_draws(taken) for key, response in lung._responses.items()}
    fewer = replace(lung, **arrays, _solved=dict(lung._solved), _responses=responses)
    if "_acute_curve" in vars(lung):
        vars(fewer)["_acute_curve"] = lung._acute_curve[taken]
    return fewer


def log_sd_spread(lung: FittedLung) -> tuple[float, float, float]:
    """5, 50 and 95 % of the log SD of blood flow over ventilation-perfusion ratio."""
    low, middle, high = np.quantile(lung.log_sd, (0.05, 0.5, 0.95))
    return float(low), float(middle), float(high)
