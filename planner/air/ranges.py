"""Numbers or arrays of them, and the sentence that is said when one lies outside what a formula covers."""

from __future__ import annotations

from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from planner.errors import InputError

Array = NDArray[np.float64]
FloatOrArray = float | Array
Numbers = TypeVar("Numbers", float, Array)


def require_within(
    field: str, what: str, value: FloatOrArray, least: float, most: float, unit: str = "", *, open_below: bool = False
) -> Array:
    """The value as an array, when every element is a number from least to most (above least if open_below).

    Raises InputError(field, ...) with the first element that is not.
    """
    array = np.asarray(value, dtype=np.float64)
    inside = (array > least if open_below else array >= least) & (array <= most)  # False for NaN
    if not inside.all():
        given = float(array[~inside].flat[0])
        suffix = f" {unit}" if unit else ""
        lower = f"above {least:g}" if open_below else f"{least:g}"
        allowed = f"{lower} to {most:g}{suffix}" if np.isfinite(most) else f"{lower}{suffix} or more"
        said = "is not a number" if np.isnan(given) else f"{given:g}{suffix} is outside the range"
        raise InputError(field, f"{what} {said}; {allowed} is allowed.")
    return array
