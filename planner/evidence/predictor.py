"""One method's answer for one part of the trip."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class PredictorResult:
    """PaO2 by one method, with its 90 % spread, who it was made from and whether this person is like them.

    applies False: shown greyed with the reasons, and left out of the verdict. reasons of an applying method say what
    widened its spread. Pressures are None where an input is missing.
    """

    predictor_id: str
    label: str
    detail: str
    pao2_mmhg: float | None
    low_mmhg: float | None
    high_mmhg: float | None
    applies: bool
    reasons: tuple[str, ...]
    population: str
    formula: str
    source: str
    inputs: tuple[tuple[str, str], ...]
