"""Conditions that forbid, delay or need advice before travel, with intervals counted to the day of travel."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date, timedelta
from typing import Any, Literal, cast, get_args

from planner.case import Case
from planner.case.cautions import CautionAnswer
from planner.catalogue import read_entries
from planner.errors import ProfileError
from planner.lung.trapped_gas import expansion_ratio
from planner.trip.itinerary import PartSpan, Timeline

PROFILE = "cautions.toml"
HIGH_M = 1500.0
MOST_USUAL_FLOW_L_MIN = 4.0  # usual oxygen above 4 L/min: contraindication in BTS 2011 (from memory)
LEAST_HAEMOGLOBIN_G_DL = 8.0

Level = Literal["stop", "delay", "specialist", "note"]
Applies = Literal["flight", "altitude", "trip"]
_KEYS = {
    "id", "name", "question", "level", "days", "specialist_days", "within_days", "applies_to", "gas", "text", "source",
    "seen",
}  # fmt: skip


@dataclass(frozen=True)
class Condition:
    """One condition of the profile."""

    id: str
    name: str
    question: str
    level: Level
    days: int | None
    specialist_days: int | None
    within_days: int | None
    applies_to: Applies
    gas: bool
    text: str
    source: str
    seen: bool


@dataclass(frozen=True)
class CautionFinding:
    """A caution for this trip. until: the earliest day the rule names, where it names one."""

    condition_id: str
    title: str
    level: Level
    text: str
    source: str
    until: date | None = None


def load_conditions() -> dict[str, Condition]:
    """Every condition by id: the packaged ones, then the service's own. Raises ProfileError."""
    return {key: _read(row) for key, row in read_entries(PROFILE).items()}


def review(case: Case, timeline: Timeline, on: date | None) -> tuple[CautionFinding, ...]:
    """What applies to this trip: conditions answered yes, those the entries show, and what power equipment needs.

    on: the day of travel, or of the assessment where the trip has no date; None: intervals are asked for.
    """
    answers = {answer.condition_id: answer for answer in case.cautions.answers}
    findings: list[CautionFinding] = []
    for condition in load_conditions().values():
        answer = answers.get(condition.id)
        if answer is not None and answer.present and _applies(condition, timeline):
            findings.append(_finding(condition, answer, timeline, on))
    findings += _from_entries(case)
    order = {"stop": 0, "delay": 1, "specialist": 2, "note": 3}
    return tuple(sorted(findings, key=lambda one: order[one.level]))


def open_questions(case: Case, timeline: Timeline) -> tuple[Condition, ...]:
    """Conditions that matter for this trip and that nobody has answered."""
    answered = {answer.condition_id for answer in case.cautions.answers if answer.present is not None}
    return tuple(one for one in load_conditions().values() if one.id not in answered and _applies(one, timeline))


def gas_expansion(timeline: Timeline) -> tuple[float, PartSpan, PartSpan] | None:
    """Largest expansion of moist shut-in gas on the trip, with the part it starts from and the part it ends in.

    Compares the highest pressure met before with the lowest of each part, in the order of the trip. None where no
    pressure is known.
    """
    best: tuple[float, PartSpan, PartSpan] | None = None
    densest: PartSpan | None = None
    for number, span in enumerate(timeline.parts):
        if span.lowest_barometric_mmhg is None:
            continue
        highest = float(timeline.barometric_mmhg[timeline.part_index == number].max())
        if densest is None or highest > _highest(timeline, densest):
            densest = span
        ratio = float(expansion_ratio(_highest(timeline, densest), span.lowest_barometric_mmhg))
        if best is None or ratio > best[0]:
            best = (ratio, densest, span)
    return best


def _highest(timeline: Timeline, span: PartSpan) -> float:
    number = timeline.parts.index(span)
    return float(timeline.barometric_mmhg[timeline.part_index == number].max())


def _applies(condition: Condition, timeline: Timeline) -> bool:
    flies = any(span.kind == "flight" for span in timeline.parts)
    if condition.applies_to == "flight":
        return flies
    if condition.applies_to == "altitude":
        return flies or any((span.highest_m or 0.0) > HIGH_M for span in timeline.parts)
    return True


def _finding(condition: Condition, answer: CautionAnswer, timeline: Timeline, on: date | None) -> CautionFinding:
    text, level, until = condition.text, condition.level, None
    happened = answer.happened_on
    if condition.days is not None or condition.within_days is not None:
        if happened is None:
            text = f"{text} The date is not known; enter it."
        elif on is None:
            text = f"{text} The day of travel is not known; enter it."
        elif happened > on:
            text = f"{text} The date entered, {happened:%d %b %Y}, lies after the day of travel; check it."
        else:
            text, level, until = _counted(condition, happened, on, text)
    if condition.gas:
        expansion = gas_expansion(timeline)
        if expansion is not None:
            ratio, start, end = expansion
            text = (
                f"{text} From {start.name} to {end.name}, gas shut in the body would expand by "
                f"{100 * (ratio - 1):.0f} % if its wall gave way freely."
            )
    return CautionFinding(condition.id, condition.name, level, text, condition.source, until)


def _counted(condition: Condition, happened: date, on: date, text: str) -> tuple[str, Level, date | None]:
    passed = (on - happened).days
    counted = f"{text} On the day of travel {passed} days will have passed."
    if condition.days is not None and passed < condition.days:
        until = happened + timedelta(days=condition.days)
        return f"{counted} Not before {until:%d %b %Y}.", "delay", until
    if condition.specialist_days is not None and passed < condition.specialist_days:
        return f"{counted} Specialist advice first.", "specialist", None
    if condition.within_days is not None and passed <= condition.within_days:
        return counted, condition.level, None
    return f"{counted} The interval has passed; confirm that it has healed.", "note", None


def _from_entries(case: Case) -> list[CautionFinding]:
    """Cautions that the other entries show without being asked."""
    findings = []
    for words, line in (("at rest", case.prescription.rest), ("walking", case.prescription.walking)):
        if line is not None and line.flow_l_min is not None and line.flow_l_min > MOST_USUAL_FLOW_L_MIN:
            findings.append(
                CautionFinding(
                    "usual_flow_high",
                    "Usual oxygen above 4 L/min",
                    "stop",
                    f"The usual flow {words} is {line.flow_l_min:g} L/min. Usual oxygen above 4 L/min on the ground "
                    "is a contraindication to flying in earlier advice; carriers rarely give more. Specialist advice "
                    "first.",
                    "BTS 2011 (from memory)",
                )
            )
            break
    support = case.prescription.ventilation
    if support is not None:
        name = "Non-invasive ventilation" if support.kind == "niv" else "CPAP"
        power = "not known" if support.power_w is None else f"{support.power_w:g} W"
        findings.append(
            CautionFinding(
                "ventilation_power",
                f"{name} needs its own power",
                "specialist",
                f"{name} travels with its own batteries, plug and written consent of the carrier. Its power is "
                f"{power}; it is not part of the kit sized here.",
                "Common practice",
            )
        )
    measured = [one for one in case.measurements if one.kind == "haemoglobin" and one.haemoglobin_g_dl is not None]
    latest = max(measured, key=lambda one: one.taken_on or date.min, default=None)
    if latest is not None and (latest.haemoglobin_g_dl or 0.0) < LEAST_HAEMOGLOBIN_G_DL:
        findings.append(
            CautionFinding(
                "anaemia_entered",
                "Haemoglobin below 8 g/dL",
                "specialist",
                f"Haemoglobin is {latest.haemoglobin_g_dl:g} g/dL; 8 g/dL or more is usually asked for.",
                "UK Civil Aviation Authority, guidance for health professionals",
            )
        )
    usual_m = case.policy.planning_cabin_altitude_m
    lower = [part for part in case.trip.parts if part.cabin_altitude_m is not None and part.cabin_altitude_m < usual_m]
    if lower:
        names = ", ".join(dict.fromkeys(part.name or "a flight" for part in lower))
        findings.append(
            CautionFinding(
                "lower_cabin",
                "A lower cabin is planned",
                "note",
                f"In {names} the cabin is planned below {usual_m:,.0f} m. Aircraft are exchanged at short notice, so a "
                "lower cabin cannot be relied on; plan for the usual one.",
                "Planning rule of this program",
            )
        )
    return findings


def _read(row: Mapping[str, Any]) -> Condition:
    def wrong(key: str, message: str) -> ProfileError:
        return ProfileError(PROFILE, f"{row['id']}.{key}", message)

    unknown = sorted(set(row) - _KEYS)
    if unknown:
        raise wrong(unknown[0], f"this key is not known; known keys are {', '.join(sorted(_KEYS))}")
    for key in ("name", "question", "text", "source"):
        if not isinstance(row.get(key), str) or not row[key]:
            raise wrong(key, "a text is needed")
    if row.get("level") not in get_args(Level):
        raise wrong("level", f"one of {', '.join(get_args(Level))} is needed")
    if row.get("applies_to") not in get_args(Applies):
        raise wrong("applies_to", f"one of {', '.join(get_args(Applies))} is needed")
    days: dict[str, int | None] = {}
    for key in ("days", "specialist_days", "within_days"):
        value = row.get(key)
        if value is not None and (not isinstance(value, int) or not 0 < value <= 3650):
            raise wrong(key, "a whole number of days from 1 to 3650 is needed")
        days[key] = value
    return Condition(
        id=row["id"],
        name=row["name"],
        question=row["question"],
        level=cast(Level, row["level"]),
        days=days["days"],
        specialist_days=days["specialist_days"],
        within_days=days["within_days"],
        applies_to=cast(Applies, row["applies_to"]),
        gas=bool(row.get("gas", False)),
        text=row["text"],
        source=row["source"],
        seen=bool(row.get("seen", False)),
    )
