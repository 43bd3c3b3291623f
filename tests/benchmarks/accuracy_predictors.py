"""Every predictor against the published groups, with the coverage of its 90 % band; then what else was measured.

Printed by accuracy_groups.py beneath its own table. A group's mean must lie inside the band of one person far more
often than in 90 % of groups; a band that it leaves is too narrow or in the wrong place.
"""

from __future__ import annotations

import importlib.util
import json
from pathlib import Path
from types import ModuleType

import numpy as np

from planner.air.atmosphere import isa_altitude_m, isa_pressure_mmhg
from planner.delivery.devices import load_devices
from planner.delivery.titration import Condition, Target, with_decision
from planner.evidence.ceiling import RATIO_SPREAD_MMHG, constant_ratio_po2_mmhg
from planner.evidence.regressions import all_regressions, predict
from planner.lung.fitting import FittedLung, LungReading, Person, fit_lung

ROOT = Path(__file__).resolve().parents[2]
PUBLISHED = ROOT / "tests/published"
CABIN_MMHG = float(isa_pressure_mmhg(2438.4))
BERG = "Berg BW et al., Chest 1992;101:638"
AKERO = "Akerø A et al., Aviat Space Environ Med 2011"
CHRISTENSEN = "Christensen CC et al., Eur Respir J 2002;20:300"


def predictor_table(rows: list[dict]) -> str:
    """One line a predictor over the groups on air or a hypoxic mixture; rows are those of accuracy_groups."""
    air = [row for row in rows if not row["on_oxygen"]]
    published = {group["id"]: group for group in json.loads((PUBLISHED / "groups.json").read_text("utf-8"))["groups"]}
    lines = [
        "| Predictor | Groups with its inputs | Mean error | Root mean square error | Inside its 90 % band | "
        "Groups like its own | Root mean square error there |",
        "| --- | --- | --- | --- | --- | --- | --- |",
        _line("This lung, fitted", [(row["lung"], row["low"], row["high"], row["measured"], True) for row in air]),
    ]
    for regression in all_regressions():
        found = []
        for row in air:
            group = published[row["group"]]
            prediction = predict(
                regression.id,
                altitude_m=_altitude_m(group),
                diagnosis=group["diagnosis"],
                baseline_elevation_m=max(float(isa_altitude_m(group["ground"]["barometric_mmhg"])), 0.0),
                pao2_mmhg=group["ground"]["pao2_mmhg"],
                fev1_percent=group.get("fev1_percent"),
            )
            if prediction.pao2_mmhg is not None:
                band = (prediction.pao2_mmhg, prediction.low_mmhg, prediction.high_mmhg)
                found.append((*band, row["measured"], prediction.applies))
        lines.append(_line(f"{regression.name}, {regression.detail}", found))
    ratio = []
    for row in air:
        ground, altitude = published[row["group"]]["ground"], _altitude_m(published[row["group"]])
        middle = constant_ratio_po2_mmhg(
            ground["pao2_mmhg"], ground["paco2_mmhg"] or 39.0, ground["barometric_mmhg"],
            float(isa_pressure_mmhg(altitude)),
        )  # fmt: skip
        ratio.append((middle, middle - RATIO_SPREAD_MMHG, middle + RATIO_SPREAD_MMHG, row["measured"], True))
    lines.append(_line("Constant a/A ratio", ratio))
    return "\n".join(lines)


def measured_table() -> str:
    """What else was measured: oxygen by device and walking at 8,000 ft, healthy people, blood, air."""
    lines = ["| Measured | Published | Here | Source |", "| --- | --- | --- | --- |"]
    severe, restrictive = _group(72.4, 39.5, "copd"), _group(78.0, None, "interstitial")
    for what, published, lung, device, amount, activity, source in (
        ("severe COPD, 4 L/min by cannula", "82 ± 14 mmHg", severe, "cannula", 4.0, "rest", BERG),
        ("COPD, 2 L/min by cannula", "65 ± 8 mmHg", severe, "cannula", 2.0, "rest", AKERO),
        ("COPD, conserver at setting 2", "64.5 mmHg", severe, "pulse_conserver", 2.0, "rest", AKERO),
        ("COPD, pulse concentrator at setting 2", "57.8 mmHg", severe, "pulse_concentrator", 2.0, "rest", AKERO),
        ("restrictive disease, air, slow walking", "38 ± 7 mmHg", restrictive, None, 0.0, "walking", CHRISTENSEN),
    ):
        condition = Condition("cabin", activity, CABIN_MMHG, 0.2093 * (CABIN_MMHG - 47.0))
        found = with_decision(
            lung, condition, load_devices()[device] if device else None, amount, Target(0.88, None, 0.9, "no")
        )
        here = f"{found.pao2_median_mmhg:.0f} ({found.pao2_low_mmhg:.0f} to {found.pao2_high_mmhg:.0f}) mmHg"
        lines.append(f"| PaO2 at 8,000 ft, {what} | {published} | {here} | {source} |")
    checks = _checks()
    for name, what in (
        ("GRP-MUHM", "Fall of SpO2 in healthy adults, 650 to 8,000 ft"),
        ("GRP-EDV-SAO2", "SaO2 in COPD at a PaO2 of 48.8 mmHg"),
        ("ATM-WEST-EVEREST-MEAS", "Pressure on the summit of Everest"),
        ("ATM-WEST-5400-MEAS", "Pressure at 5,400 m"),
    ):
        check, value = checks.CHECKS[name], _value(checks, name)
        unit = check["unit"].replace("% points", "points")
        lines.append(f"| {what} | {check['expected']:.1f} {unit} | {value:.1f} {unit} | {check['source']} |")
    names = [name for name in checks.CHECKS if name.startswith("ODC-MEAS-")]
    apart = max(abs(_value(checks, name) - checks.CHECKS[name]["expected"]) for name in names)
    pressures = sorted(checks.CHECKS[name]["inputs"]["po2"] for name in names)
    lines.append(
        f"| Saturation of standard blood, {len(names)} values from {pressures[0]} to {pressures[-1]} mmHg | "
        f"his table 1 | at most {apart:.1f} points apart | {checks.CHECKS[names[0]]['source']} |"
    )
    return "\n".join(lines)


def _line(name: str, found: list[tuple[float, float, float, float, bool]]) -> str:
    if not found:
        return f"| {name} | 0 | - | - | - | - | - |"
    middle, low, high, measured, applies = (np.array(one) for one in zip(*found, strict=True))
    misses = middle - measured
    inside = int(((low <= measured) & (measured <= high)).sum())
    own = f"{np.sqrt((misses[applies] ** 2).mean()):.1f}" if applies.any() else "-"
    return (
        f"| {name} | {len(found)} | {misses.mean():+.1f} | {np.sqrt((misses**2).mean()):.1f} | "
        f"{inside} of {len(found)} | {int(applies.sum())} | {own} |"
    )


def _altitude_m(group: dict) -> float:
    """Where air has the inspired oxygen of the exposure."""
    exposure = group["exposure"]
    return float(isa_altitude_m(exposure["fio2"] * (exposure["barometric_mmhg"] - 47.0) / 0.2093 + 47.0))


def _group(pao2_mmhg: float, paco2_mmhg: float | None, diagnosis: str) -> FittedLung:
    reading = LungReading(760.0, 0.2093, pao2_mmhg=pao2_mmhg, paco2_mmhg=paco2_mmhg, sample="arterial", age_days=1.0)
    return fit_lung([reading], Person(diagnosis=diagnosis, age_years=65.0), draws=400)


def _checks() -> ModuleType:
    """The published checks, and what the planner gives for each."""
    spec = importlib.util.spec_from_file_location("physiology_checks", PUBLISHED / "test_physiology_checks.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def _value(checks: ModuleType, name: str) -> float:
    found = checks.FOUND[next(one for one in checks.FOUND if name.startswith(one))]
    return float(found(checks.CHECKS[name]["inputs"]))
