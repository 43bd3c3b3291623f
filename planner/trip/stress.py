"""Stress cases by hand: every flight late, a connection missed, a night more, a diversion. Each is one fixed trip."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from planner.air.ranges import Array
from planner.case.policy import StressKind
from planner.trip.delays import diversion_min
from planner.trip.itinerary import PartSpan

MISSED_MIN = 6 * 60.0  # until the next connection; planning assumption
BETWEEN = ("layover", "wait", "walk")  # what may lie between two flights of one connection
OVERNIGHT_MIN = 14 * 60.0  # from an evening to the next morning's flight; planning assumption


@dataclass(frozen=True, eq=False)
class Stress:
    """Minutes waited before each part and minutes it takes longer, arrays (parts,); where: the part it happens to.

    minutes: how much in words. where is empty for a case that happens to every flight, or to none.
    """

    kind: StressKind
    minutes: float
    where: str
    waits_min: Array
    longer_min: Array


def possible(spans: Sequence[PartSpan]) -> tuple[StressKind, ...]:
    """The cases that can happen on this trip: no connection is missed where there is none."""
    kinds = [span.kind for span in spans]
    found: list[StressKind] = ["late"] if "flight" in kinds else []
    if _connection(spans) is not None:
        found.append("missed_connection")
    return (*found, "overnight", "diversion") if found else ()


def stress(kind: StressKind, late_min: float, spans: Sequence[PartSpan]) -> Stress:
    """The case on this trip; nothing happens where it cannot. late_min: of every flight in the case "late".

    A connection is missed at the first flight that follows another. The night more comes before that one, else before
    the first flight. The longest flight is diverted, by the middle of the hours that the delays profile gives.
    """
    waits, longer = np.zeros(len(spans)), np.zeros(len(spans))
    flights = [number for number, span in enumerate(spans) if span.kind == "flight"]
    if kind == "late":
        waits[flights] = late_min
        return Stress(kind, late_min, "", waits, longer)
    at: int | None
    if kind == "diversion":
        at, minutes = max(flights, key=lambda one: spans[one].duration_min, default=None), diversion_min()
        into = longer
    else:
        at, minutes, into = _connection(spans), MISSED_MIN, waits
        if kind == "overnight":
            at, minutes = at if at is not None else next(iter(flights), None), OVERNIGHT_MIN
    if at is not None:
        into[at] = minutes
    return Stress(kind, minutes, "" if at is None else spans[at].name, waits, longer)


def _connection(spans: Sequence[PartSpan]) -> int | None:
    """The first flight that follows a layover, or another flight with nothing but waits and walks between."""
    connects = False
    for number, span in enumerate(spans):
        if span.kind == "flight" and connects:
            return number
        connects = span.kind in ("flight", "layover") or (connects and span.kind in BETWEEN)
    return None
