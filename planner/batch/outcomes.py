"""What happened after the trip beside what was predicted, over a service's own cases. Few cases prove little."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from statistics import median

from planner import Case, plan
from planner.batch.agreement import Agreement, Pair, agreement, widened
from planner.batch.lines import read_lines
from planner.case.confirmation import PartOutcome
from planner.errors import PlannerError
from planner.records.reading import read_case
from planner.results import PartPlan

OXIMETER_SD_PERCENT = 2.0  # as most pulse oximeters reach (from memory); ISO 80601-2-61 allows A_rms 4 points
ENOUGH_PAIRS = 30


@dataclass(frozen=True)
class BadLine:
    """A line that holds no case, and why."""

    number: int
    reason: str


@dataclass
class Outcomes:
    """Predicted and measured of all cases that have an outcome."""

    cases: int = 0
    without_outcome: int = 0
    bad: list[BadLine] = field(default_factory=list)
    on_air: list[Pair] = field(default_factory=list)
    on_oxygen: list[Pair] = field(default_factory=list)
    not_comparable: int = 0
    ran_out: int = 0
    ran_out_foreseen: int = 0
    lasted: int = 0
    lasted_but_feared: int = 0
    symptoms: int = 0
    used_to_planned: list[float] = field(default_factory=list)
    late_min: list[float] = field(default_factory=list)


def outcomes_report(cases: Iterable[Case | BadLine]) -> str:
    """The report as text: agreement of SpO₂ on air and on oxygen, run-outs, oxygen used, symptoms, delays, warnings."""
    return report_text(gather_outcomes(cases))


def read_cases(path: Path) -> Iterator[Case | BadLine]:
    """The cases of a file with one JSON case a line, streamed; a line that cannot be read is a BadLine."""
    for line in read_lines(path):
        if line.text is None:
            yield BadLine(line.number, "The line is longer than a case may be.")
            continue
        try:
            yield read_case(line.text)
        except PlannerError as error:
            yield BadLine(line.number, str(error))


def gather_outcomes(cases: Iterable[Case | BadLine]) -> Outcomes:
    """Plan every case that has an outcome, and set what was predicted beside what was measured."""
    found = Outcomes()
    for case in cases:
        if isinstance(case, BadLine):
            found.bad.append(case)
        elif recorded_parts(case):
            _add(found, case)
        else:
            found.without_outcome += 1
    return found


def recorded_parts(case: Case) -> tuple[PartOutcome, ...]:
    """The parts of which something was recorded."""
    parts = case.outcome.parts if case.outcome is not None else ()
    return tuple(one for one in parts if one != PartOutcome(part_id=one.part_id))


@dataclass(frozen=True)
class Finding:
    """One thing compared: its name, and what came out as labels with their values, units included."""

    title: str
    rows: tuple[tuple[str, str], ...]


def findings(found: Outcomes) -> tuple[Finding, ...]:
    """What was compared: SpO₂ on air and on oxygen, run-outs, oxygen used, symptoms and delays."""
    journey = [("Parts with symptoms", f"{found.symptoms}")]
    if found.late_min:
        journey += [
            ("Parts with a delay recorded", f"{len(found.late_min)}"),
            ("Median delay", f"{median(found.late_min):.0f} min"),
            ("Longest delay", f"{max(found.late_min):.0f} min"),
        ]
    used: tuple[tuple[str, str], ...] = (("Comparisons", "none"),)
    if found.used_to_planned:
        low, middle, high = (100 * one(found.used_to_planned) for one in (min, median, max))
        used = (
            ("Comparisons", f"{len(found.used_to_planned)}"),
            ("Median, of what was planned", f"{middle:.0f} %"),
            ("Lowest to highest", f"{low:.0f} to {high:.0f} %"),
        )
    return (
        Finding("Usual SpO₂ on air", _agreement_rows(agreement(found.on_air))),
        Finding("Usual SpO₂ on the decided oxygen", _agreement_rows(agreement(found.on_oxygen))),
        Finding(
            "Running out",
            (
                ("Parts in which oxygen ran out", f"{found.ran_out}"),
                ("Of these foreseen as more likely than accepted", f"{found.ran_out_foreseen}"),
                ("Parts in which it lasted", f"{found.lasted}"),
                ("Of these a run-out had been foreseen in", f"{found.lasted_but_feared}"),
            ),
        ),
        Finding("Oxygen used", used),
        Finding("On the way", tuple(journey)),
    )


def reservations(found: Outcomes) -> tuple[str, ...]:
    """What limits the comparison, as sentences: what was left out, and how little few cases prove."""
    said = []
    if found.not_comparable:
        said.append(f"Recorded parts without an SpO₂ or without a prediction to set beside it: {found.not_comparable}.")
    pairs = len(found.on_air) + len(found.on_oxygen)
    if pairs < ENOUGH_PAIRS:
        said.append(
            f"Few cases prove little: there are {_counted(pairs, 'comparison')}, and {ENOUGH_PAIRS} begin to tell."
        )
    said.append("Recorded outcomes are a chosen few: those who did badly or well are recorded more often.")
    return tuple(said)


def report_text(found: Outcomes) -> str:
    """The report as plain text."""
    lines = [
        "Predicted against measured, own cases. Estimate only. Confirm with prescriber.",
        f"Cases with an outcome: {found.cases}. Left out without one: {found.without_outcome}.",
        *(f"Line {one.number} was left out: {one.reason}" for one in found.bad),
        "",
    ]
    for one in findings(found):
        lines += [one.title, *(f"  {label}: {value}" for label, value in one.rows)]
    return "\n".join([*lines, "", *reservations(found)])


def _add(found: Outcomes, case: Case) -> None:
    found.cases += 1
    result = plan(case)
    by_id = {part.span.part_id: part for part in result.parts}
    kit = result.kit
    litres = {part.part_id: part.litres for part in kit.parts} if kit else {}
    feared = {part.part_id for part in kit.parts if part.run_out_chance > kit.run_out_wanted} if kit else set()
    for recorded in recorded_parts(case):
        part = by_id.get(recorded.part_id)
        pair = None if part is None else _spo2_pair(part, recorded)
        if pair is None:
            found.not_comparable += 1
        elif recorded.on_oxygen:
            found.on_oxygen.append(pair)
        else:
            found.on_air.append(pair)
        if recorded.ran_out is True:
            found.ran_out += 1
            found.ran_out_foreseen += recorded.part_id in feared
        elif recorded.ran_out is False:
            found.lasted += 1
            found.lasted_but_feared += recorded.part_id in feared
        planned = litres.get(recorded.part_id)
        if recorded.oxygen_used_l is not None and planned:
            found.used_to_planned.append(recorded.oxygen_used_l / planned)
        found.symptoms += bool(recorded.symptoms.strip())
        if recorded.late_min is not None:
            found.late_min.append(recorded.late_min)


def predicted_spo2(part: PartPlan, on_oxygen: bool) -> tuple[float, float, float] | None:
    """Median, 5 and 95 % of the SpO₂ predicted for a part, in per cent; None where nothing was predicted.

    It is that of the activity most of the part is spent in, on air or on the decided oxygen.
    """
    activity = max(part.span.shares, key=lambda one: part.span.shares[one])
    if on_oxygen:
        expected = next((one.expected for one in part.decided if one.activity == activity), None)
        if expected is None:
            return None
        return 100.0 * expected.spo2_median, 100.0 * expected.spo2_low, 100.0 * expected.spo2_high
    activities = part.forecast.activities if part.forecast is not None else ()
    forecast = next((one for one in activities if one.activity == activity), None)
    if forecast is None or forecast.spo2 is None:
        return None
    return 100.0 * forecast.spo2.median, 100.0 * forecast.spo2.low, 100.0 * forecast.spo2.high


def _spo2_pair(part: PartPlan, recorded: PartOutcome) -> Pair | None:
    """Usual SpO₂ of a part against its prediction, in per cent."""
    if recorded.usual_spo2_percent is None or recorded.on_oxygen is None:
        return None
    band = predicted_spo2(part, recorded.on_oxygen)
    if band is None:
        return None
    return Pair(band[0], *widened(*band, OXIMETER_SD_PERCENT), recorded.usual_spo2_percent)


def _agreement_rows(found: Agreement) -> tuple[tuple[str, str], ...]:
    if found.bias is None or found.share_inside is None:
        return (("Comparisons", "none"),)
    limits = "too few comparisons"
    if found.lower_limit is not None and found.upper_limit is not None:
        limits = f"{found.lower_limit:+.1f} to {found.upper_limit:+.1f} points"
    return (
        ("Comparisons", f"{found.count}"),
        ("Bias (predicted less measured)", f"{found.bias:+.1f} points"),
        ("Limits of agreement (95 %)", limits),
        (
            "Inside the 90 % band, oximeter error included",
            f"{found.inside} of {found.count}, {100 * found.share_inside:.0f} %",
        ),
        (
            "95 % interval of that share",
            f"{100 * (found.inside_low or 0.0):.0f} to {100 * (found.inside_high or 0.0):.0f} %",
        ),
    )


def _counted(count: int, word: str) -> str:
    return f"{count} {word}" if count == 1 else f"{count} {word}s"
