"""The deciding numbers of each case as one row of a table, and the table of a whole batch."""

from __future__ import annotations

import csv
import json
import os
import re
from collections.abc import Iterable, Iterator
from pathlib import Path

from planner.case import Case
from planner.evidence.forecast import ActivityForecast
from planner.results import PartPlan, Plan

COLUMNS = (
    "line",
    "status",
    "reference",
    "state",
    "highest_altitude_m",
    "lowest_inspired_po2_mmhg",
    "worst_part",
    "rest_pao2_median_mmhg",
    "rest_pao2_low_mmhg",
    "rest_pao2_high_mmhg",
    "rest_spo2_median_percent",
    "rest_spo2_low_percent",
    "rest_spo2_high_percent",
    "predictors_agree",
    "test_advised",
    "carbon_dioxide_risk",
    "stop_findings",
    "proposals",
    "targets_not_reached",
    "decisions",
    "pathway_advice",
    "kit_items",
    "kit_peak_kg",
    "run_out_chance_percent",
    "uncovered_h",
    "kit_not_decided",
    "message",
)
# A spreadsheet takes a cell that starts so for a formula.
FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")
_NUMBER = re.compile(r"-?\d+(\.\d+)?")


def summary_row(case: Case, plan: Plan) -> dict[str, str]:
    """The deciding numbers of one planned case, as texts; an empty text is not known."""
    spans = [part.span for part in plan.parts]
    worst = min(
        (part for part in plan.parts if part.span.lowest_inspired_po2_mmhg is not None),
        key=lambda part: part.span.lowest_inspired_po2_mmhg or 0.0,
        default=None,
    )
    at_rest, kit = _at_rest(worst), plan.kit
    pao2, spo2 = (at_rest.pao2_mmhg, at_rest.spo2) if at_rest else (None, None)
    titrations = [one for part in plan.parts for one in part.titrations]
    whole = plan.through == "kit"  # else what comes after the forecast is not worked out, and empty
    return {
        "reference": case.patient.reference,
        "state": plan.state if whole else "",
        "highest_altitude_m": _number(max((one.highest_m for one in spans if one.highest_m is not None), default=None)),
        "lowest_inspired_po2_mmhg": _number(worst.span.lowest_inspired_po2_mmhg if worst else None),
        "worst_part": (worst.span.name or worst.span.part_id) if worst else "",
        "rest_pao2_median_mmhg": _number(pao2.median if pao2 else None),
        "rest_pao2_low_mmhg": _number(pao2.low if pao2 else None),
        "rest_pao2_high_mmhg": _number(pao2.high if pao2 else None),
        "rest_spo2_median_percent": _number(100.0 * spo2.median if spo2 else None),
        "rest_spo2_low_percent": _number(100.0 * spo2.low if spo2 else None),
        "rest_spo2_high_percent": _number(100.0 * spo2.high if spo2 else None),
        "predictors_agree": at_rest.agreement if at_rest else "",
        "test_advised": _yes_no(any(part.forecast is not None and part.forecast.test_advised for part in plan.parts)),
        "carbon_dioxide_risk": plan.carbon_dioxide.level,
        "stop_findings": str(sum(one.level == "stop" for one in plan.cautions)),
        "proposals": " | ".join(
            f"{one.part_id} {one.activity}: {one.model_amount_text}" for one in titrations if one.model_amount
        ),
        "targets_not_reached": str(sum(not one.reaches_target for one in titrations)) if whole else "",
        "decisions": str(sum(len(part.decided) for part in plan.parts)) if whole else "",
        "pathway_advice": " | ".join(one.advice.text for one in plan.pathways if one.advice is not None),
        "kit_items": " | ".join(f"{item.count} x {item.what}" for item in kit.items) if kit else "",
        "kit_peak_kg": _number(kit.peak_kg if kit and kit.items else None),
        "run_out_chance_percent": _number(100.0 * kit.run_out.chance if kit and kit.run_out else None),
        "uncovered_h": _number(kit.uncovered_h if kit and kit.items else None),
        "kit_not_decided": " | ".join(kit.undecided) if kit else "",
    }


def write_summary(path: Path, kept: Iterable[tuple[int, Path]]) -> Iterator[str]:
    """Write the table of a batch whole or not at all; yields a sentence for every reference that stands twice.

    kept: for each line its number and the folder of its result. Rows are read and written one at a time.
    """
    first_line: dict[str, int] = {}
    part = path.with_name(f"{path.name}.part")
    with part.open("w", encoding="utf-8", newline="") as file:
        writer = csv.DictWriter(file, COLUMNS, restval="", lineterminator="\n")
        writer.writeheader()
        for number, folder in kept:
            row = _kept_row(folder) | {"line": str(number)}
            reference = row.get("reference", "")
            if reference and reference in first_line:
                row["message"] = f"The reference also stands in line {first_line[reference]}; both are kept."
                yield f"Line {number}, reference {reference!r}: {row['message']}"
            elif reference:
                first_line[reference] = number
            writer.writerow({key: _inert(value) for key, value in row.items()})
        file.flush()
        os.fsync(file.fileno())
    part.replace(path)


def _kept_row(folder: Path) -> dict[str, str]:
    failed = folder.with_name(f"{folder.name}.failed")
    if failed.is_file():
        return {"status": "failed", "message": failed.read_text(encoding="utf-8")}
    row: dict[str, str] = json.loads((folder / "row.json").read_text(encoding="utf-8"))
    return row | {"status": "planned"}


def _at_rest(part: PartPlan | None) -> ActivityForecast | None:
    if part is None or part.forecast is None:
        return None
    return next((one for one in part.forecast.activities if one.activity == "rest"), None)


def _inert(text: str) -> str:
    if not text.startswith(FORMULA_STARTS) or _NUMBER.fullmatch(text):
        return text
    return f"'{text}"


def _number(value: float | None) -> str:
    return "" if value is None else f"{value:.1f}"


def _yes_no(value: bool) -> str:
    return "yes" if value else "no"
