"""Carbon dioxide risk: recognised from what was entered, and carried wherever a flow is shown."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from planner.case import Case
from planner.evidence.baseline import Baseline
from planner.units import kpa_from_mmhg

HYPERCAPNIA_MMHG = 45.0  # 6 kPa, the usual definition
# Conditions named with hypercapnic failure: O'Driscoll BR et al., BTS guideline for oxygen use in adults, Thorax
# 2017;72(suppl 1) (list partly from memory).
RISK_DIAGNOSES = {
    "neuromuscular": "a neuromuscular disease",
    "chest_wall": "a chest wall disease",
    "obesity_hypoventilation": "obesity hypoventilation",
}
POSSIBLE_DIAGNOSES = {"copd", "cystic_fibrosis", "bronchiectasis"}
SOURCE = "O'Driscoll BR et al., BTS guideline for oxygen use in adults, Thorax 2017;72(suppl 1):ii1"
RISK_HIGH_PERCENT = 92.0  # target 88 to 92 % where at risk: same source
USUAL_HIGH_PERCENT = 98.0


@dataclass(frozen=True)
class CarbonDioxideFinding:
    """Whether oxygen could make this person retain carbon dioxide, why, and the target that follows.

    Not known is treated as at risk until someone answers.
    """

    level: Literal["yes", "no", "not known"]
    reasons: tuple[str, ...]
    target_low_percent: float
    target_high_percent: float
    test_on_oxygen_advised: bool
    source: str = SOURCE

    @property
    def ceiling(self) -> bool:
        """A ceiling on saturation holds: at risk, or not known."""
        return self.level != "no"


def carbon_dioxide_risk(case: Case, baseline: Baseline) -> CarbonDioxideFinding:
    """Risk from the clinician's own answer and from the entries; entries that show risk outweigh a "no"."""
    risk = case.patient.carbon_dioxide_risk
    reasons = []
    if risk.past_hypercapnia:
        reasons.append("Carbon dioxide was high before.")
    if risk.past_acidosis_or_ventilation:
        reasons.append("There was acidosis or ventilation for high carbon dioxide.")
    if risk.oxygen_alert_card:
        reasons.append("An oxygen alert card is carried.")
    if baseline.paco2_mmhg is not None and baseline.paco2_mmhg > HYPERCAPNIA_MMHG:
        kpa = kpa_from_mmhg(baseline.paco2_mmhg)
        reasons.append(f"PaCO₂ is {kpa:.1f} kPa ({baseline.paco2_mmhg:.0f} mmHg), above 6 kPa.")
    if case.prescription.ventilation is not None and case.prescription.ventilation.kind == "niv":
        reasons.append("Non-invasive ventilation is used.")
    if case.patient.diagnosis in RISK_DIAGNOSES:
        reasons.append(f"The diagnosis is {RISK_DIAGNOSES[case.patient.diagnosis]}.")
    if reasons and risk.judged is False:
        reasons.append("The entry says not at risk; the other entries say otherwise and are followed.")
    if risk.judged:
        reasons.insert(0, "The clinician judges so.")
    if reasons:
        return _finding(case, "yes", tuple(reasons))
    if risk.judged is False:
        return _finding(case, "no", ("The clinician judges not at risk, and no entry says otherwise.",))
    if case.patient.diagnosis in POSSIBLE_DIAGNOSES:
        return _finding(case, "not known", ("This diagnosis can retain carbon dioxide, and nobody has answered.",))
    return _finding(case, "not known", ("Nobody has answered; it is treated as a risk until then.",))


def _finding(case: Case, level: Literal["yes", "no", "not known"], reasons: tuple[str, ...]) -> CarbonDioxideFinding:
    chosen = case.policy.target_spo2_high_percent
    high = USUAL_HIGH_PERCENT if level == "no" else RISK_HIGH_PERCENT
    if chosen is not None:
        high = chosen if level == "no" else min(chosen, RISK_HIGH_PERCENT)
    return CarbonDioxideFinding(level, reasons, case.policy.target_spo2_low_percent, high, level == "yes")
