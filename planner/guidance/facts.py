"""The facts a pathway may ask for, gathered from the case: a value, the words that show it, or not known.

FACTS lists every name with the question to ask when it is missing; a pathway that asks for another name is refused.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from planner.case import Case
from planner.evidence.baseline import Baseline
from planner.guidance.challenge import read_challenge
from planner.guidance.hypercapnia import CarbonDioxideFinding
from planner.lung.blood import saturation
from planner.units import kpa_from_mmhg

FactKind = Literal["number", "yes_no", "choice"]
CHILD_YEARS = 18.0
RECENT_DAYS = 42  # within six weeks of an exacerbation: BTS 2011 risk factor
RISK_DIAGNOSES = {"interstitial", "chest_wall", "neuromuscular", "obesity_hypoventilation"}


@dataclass(frozen=True)
class FactName:
    """A fact that pathways may use: what it is, and the question when it is missing."""

    kind: FactKind
    question: str
    unit: str = ""


@dataclass(frozen=True)
class Fact:
    """A fact of this person; value None is not known. text is shown beside the turn it led to."""

    value: float | bool | str | None
    text: str


FACTS: Mapping[str, FactName] = {
    "age_years": FactName("number", "How old is the traveller?", "years"),
    "child": FactName("yes_no", "How old is the traveller?"),
    "diagnosis": FactName("choice", "Which diagnosis group fits best?"),
    "spo2_percent": FactName("number", "What is the SpO₂ at rest on air?", "%"),
    "pao2_mmhg": FactName("number", "What is the PaO₂ at rest on air?", "mmHg"),
    "fev1_percent": FactName("number", "What is the FEV₁ per cent of predicted?", "%"),
    "tlco_percent": FactName("number", "What is the TLCO per cent of predicted?", "%"),
    "walk_lowest_percent": FactName("number", "What was the lowest SpO₂ of the walk test?", "%"),
    "mmrc": FactName("number", "Which modified MRC dyspnoea grade, 0 to 4?"),
    "uses_oxygen": FactName("yes_no", "Is oxygen prescribed at home?"),
    "usual_flow_l_min": FactName("number", "Which flow is prescribed at home at rest?", "L/min"),
    "hypercapnia_risk": FactName("yes_no", "Is there a risk of carbon dioxide retention?"),
    "symptoms_on_past_flight": FactName("yes_no", "Were there respiratory symptoms on an earlier flight?"),
    "risk_factor": FactName("yes_no", "Is there a further risk factor (FEV₁ below 50 %, hypercapnia, restrictive "
                            "disease, ventilatory support, recent exacerbation)?"),
    "exercise_spo2_below_95": FactName("yes_no", "What was the lowest SpO₂ on exertion?"),
    "challenge_done": FactName("yes_no", "Was a hypoxic challenge test done?"),
    "challenge_pao2_mmhg": FactName("number", "What was the PaO₂ on the mixture?", "mmHg"),
    "challenge_spo2_percent": FactName("number", "What was the lowest SpO₂ on the mixture?", "%"),
    "challenge_fails": FactName("yes_no", "What were PaO₂ and SpO₂ on the mixture?"),
    "challenge_oxygen_acidosis": FactName("yes_no", "Did pH fall below 7.35 with a PCO₂ rise above 1 kPa on oxygen?"),
}  # fmt: skip


def gather_facts(
    case: Case,
    baseline: Baseline,
    carbon_dioxide: CarbonDioxideFinding,
) -> dict[str, Fact]:
    """Every fact of FACTS for this case, not known where it was not entered. Facts are measurements, not forecasts."""
    patient, function = case.patient, case.patient.function
    rest = case.prescription.rest
    age = patient.age_years
    facts = {
        "age_years": _number("age_years", age, "Age"),
        "child": Fact(None if age is None else age < CHILD_YEARS, "Age not known" if age is None else f"Age {age:g}"),
        "diagnosis": Fact(patient.diagnosis, f"Diagnosis group: {_diagnosis_words(patient.diagnosis)}"),
        "spo2_percent": _spo2(baseline),
        "pao2_mmhg": _pressure("PaO₂", baseline.pao2_mmhg),
        "fev1_percent": _number("fev1_percent", baseline.fev1_percent, "FEV₁"),
        "tlco_percent": _number("tlco_percent", baseline.tlco_percent, "TLCO"),
        "walk_lowest_percent": _number("walk_lowest_percent", baseline.walk_lowest_percent, "Walk test lowest SpO₂"),
        "mmrc": _number("mmrc", function.mmrc_dyspnoea, "mMRC grade"),
        "uses_oxygen": _yes_no(case.prescription.uses_oxygen, "Oxygen at home"),
        "usual_flow_l_min": _number("usual_flow_l_min", None if rest is None else rest.flow_l_min, "Usual flow"),
        "hypercapnia_risk": Fact(
            {"yes": True, "no": False, "not known": None}[carbon_dioxide.level],
            f"Carbon dioxide risk: {carbon_dioxide.level}",
        ),
        "symptoms_on_past_flight": _yes_no(function.symptoms_on_past_flight, "Symptoms on an earlier flight"),
        "risk_factor": _risk_factor(case, baseline, carbon_dioxide),
        "exercise_spo2_below_95": _exercise(baseline),
    }
    return facts | _challenge_facts(baseline, case)


def _diagnosis_words(diagnosis: str | None) -> str:
    if diagnosis is None:
        return "not known"
    return "COPD" if diagnosis == "copd" else diagnosis.replace("_", " ")


def _number(name: str, value: float | None, words: str) -> Fact:
    unit = FACTS[name].unit
    return Fact(value, f"{words} not known" if value is None else f"{words} {value:g} {unit}".rstrip())


def _yes_no(value: bool | None, words: str) -> Fact:
    return Fact(value, f"{words}: {'not known' if value is None else 'yes' if value else 'no'}")


def _pressure(words: str, mmhg: float | None) -> Fact:
    if mmhg is None:
        return Fact(None, f"{words} not known")
    return Fact(mmhg, f"{words} {kpa_from_mmhg(mmhg):.1f} kPa ({mmhg:.0f} mmHg)")


def _spo2(baseline: Baseline) -> Fact:
    """SpO2 as measured; the gas's own saturation where there is no oximetry, and that is said."""
    if baseline.spo2_percent is not None:
        return Fact(baseline.spo2_percent, f"SpO₂ {baseline.spo2_percent:g} %")
    gas = baseline.gas
    if gas is None or gas.pao2_mmhg is None:
        return Fact(None, "SpO₂ not known")
    percent = gas.sao2_percent
    if percent is None:
        percent = 100.0 * saturation(gas.pao2_mmhg, gas.ph or 7.4, gas.paco2_mmhg or 40.0)
    return Fact(percent, f"Saturation {percent:.0f} % from the blood gas")


def _exercise(baseline: Baseline) -> Fact:
    lowest = baseline.walk_lowest_percent
    if lowest is None:
        return Fact(None, "SpO₂ on exertion not known")
    return Fact(lowest < 95.0, f"Lowest SpO₂ on exertion {lowest:g} %")


def _risk_factor(case: Case, baseline: Baseline, carbon_dioxide: CarbonDioxideFinding) -> Fact:
    """Risk factors of the 2011 recommendations that the entries show; not known when none shows and some are open."""
    found = []
    if carbon_dioxide.level == "yes":
        found.append("carbon dioxide risk")
    if baseline.fev1_percent is not None and baseline.fev1_percent < 50.0:
        found.append(f"FEV₁ {baseline.fev1_percent:g} %")
    if case.patient.diagnosis in RISK_DIAGNOSES:
        found.append("restrictive disease")
    if case.prescription.ventilation is not None:
        found.append("ventilatory support")
    if any(one.state == "exacerbation" for one in case.measurements):
        found.append("recent exacerbation")
    if found:
        return Fact(True, "Risk factor: " + ", ".join(found))
    settled = carbon_dioxide.level == "no" and baseline.fev1_percent is not None and case.patient.diagnosis is not None
    return Fact(False, "No risk factor entered") if settled else Fact(None, "Risk factors not known")


def _challenge_facts(baseline: Baseline, case: Case) -> dict[str, Fact]:
    test = baseline.challenge
    if test is None:
        return {
            "challenge_done": Fact(False, "No challenge test recorded"),
            "challenge_pao2_mmhg": Fact(None, "No PaO₂ on the mixture"),
            "challenge_spo2_percent": Fact(None, "No SpO₂ on the mixture"),
            "challenge_fails": Fact(None, "No challenge test recorded"),
            "challenge_oxygen_acidosis": Fact(None, "No gas on oxygen"),
        }
    reading = read_challenge(test, case.policy)
    below = reading.below_threshold
    return {
        "challenge_done": Fact(True, reading.headline),
        "challenge_pao2_mmhg": _pressure("PaO₂ on the mixture", reading.pao2_mmhg),
        "challenge_spo2_percent": _number("challenge_spo2_percent", reading.lowest_spo2_percent, "Lowest SpO₂"),
        "challenge_fails": Fact(below, reading.band_text),
        "challenge_oxygen_acidosis": Fact(reading.acidosis_on_oxygen, reading.acidosis_text),
    }
