"""The state of a plan (Draft, Flows decided, Confirmed), which falls back when an input changes; what is missing."""

from __future__ import annotations

from collections.abc import Sequence

from planner.case import Case
from planner.evidence.baseline import Baseline
from planner.guidance.hypercapnia import CarbonDioxideFinding
from planner.guidance.pathway import PathwayResult, load_pathways
from planner.kit.sizes import load_concentrators, load_cylinders
from planner.results import DecidedOxygen, Missing, State
from planner.trip.itinerary import Timeline


def plan_state(case: Case, timeline: Timeline, decisions: Sequence[DecidedOxygen]) -> tuple[State, str]:
    """The state with the reason in a sentence."""
    open_ones = undecided(timeline, decisions)
    stale = [one for one in decisions if one.stale]
    if not timeline.parts:
        return "Draft", "There is no trip yet."
    if stale:
        return (
            "Draft",
            "An entry that the decided flows rested on has changed since. Decide again or keep them by name.",
        )
    if open_ones:
        return "Draft", f"{len(open_ones)} of the flows are not decided yet."
    confirmation = case.confirmation
    if confirmation is None:
        return "Flows decided", "All flows are decided; the plan is not confirmed yet."
    if confirmation.inputs_digest != case.inputs_digest():
        return "Flows decided", (
            f"The confirmation by {confirmation.name} of {confirmation.confirmed_at:%d %b %Y} is void: an entry it "
            "rested on has changed since."
        )
    of = f", version {confirmation.version}" if confirmation.version is not None else ""
    by = f"{confirmation.name}, {confirmation.role}, {confirmation.confirmed_at:%d %b %Y}"
    return "Confirmed", f"Confirmed by {by}{of}."


def undecided(timeline: Timeline, decisions: Sequence[DecidedOxygen]) -> list[tuple[str, str]]:
    """(part, activity) of every share of the trip that has no decision."""
    done = {(one.part_id, one.activity) for one in decisions}
    return [
        (span.part_id, activity)
        for span in timeline.parts
        for activity, share in span.shares.items()
        if share > 0.0 and (span.part_id, activity) not in done
    ]


def missing_entries(
    case: Case,
    timeline: Timeline,
    baseline: Baseline,
    pathways: Sequence[PathwayResult],
    risk: CarbonDioxideFinding,
) -> tuple[Missing, ...]:
    """What is not known and would change the answer, the weightiest first."""
    found: list[Missing] = []
    if not timeline.parts:
        found.append(Missing("trip", "What is the trip?", "Nothing is forecast without it."))
    if case.patient.diagnosis is None:
        found.append(
            Missing("patient.diagnosis", "Which diagnosis group fits best?", "It decides which methods apply.")
        )
    if not baseline.lung_readings:
        found.append(
            Missing(
                "measurements", "What is SpO₂ or the blood gas at rest, and where?", "There is no forecast without."
            )
        )
    if risk.level == "not known":
        found.append(
            Missing(
                "patient.carbon_dioxide_risk.judged",
                "Is there a risk of carbon dioxide retention?",
                "Until answered, the target stays at 88 to 92 % and a ceiling holds.",
            )
        )
    if case.prescription.uses_oxygen is None:
        found.append(Missing("prescription.uses_oxygen", "Is oxygen used at home?", "Pathways start from it."))
    for span in timeline.parts:
        found += [Missing(f"trip.{span.part_id}", sentence, "Its air is not known.") for sentence in span.unknown]
    for note in baseline.notes:
        if note.kind in ("ask", "contradiction", "oxygen"):
            found.append(Missing("measurements", note.text, "It changes the fitted lung."))
    for result in pathways:
        if result.missing is not None:
            found.append(
                Missing(f"pathway.{result.missing.name}", result.missing.question, f"{result.title} stops here.")
            )
    found += _unknown_ids(case)
    return tuple(dict.fromkeys(found))


def _unknown_ids(case: Case) -> list[Missing]:
    """Entries that name something the profiles do not have."""
    found = []
    known = load_pathways()
    for name in case.policy.pathway_ids:
        if name not in known:
            found.append(Missing("policy.pathway_ids", f"There is no pathway {name!r}.", "It is not walked."))
    sizes = load_cylinders()
    for size in [*(one.size_id for one in case.kit.owned_cylinders), *case.kit.offered_size_ids]:
        if size not in sizes:
            found.append(Missing("kit", f"There is no cylinder size {size!r}.", "The kit is not sized."))
    concentrator = case.kit.concentrator_id
    if concentrator is not None and concentrator not in load_concentrators():
        found.append(Missing("kit.concentrator_id", f"There is no concentrator {concentrator!r}.", "It is left out."))
    return found
