"""Who travels: no more identity than the work needs, and the facts that change a prediction or a caution."""

from __future__ import annotations

from datetime import date
from typing import Literal

from pydantic import Field

from planner.case.section import Section

Diagnosis = Literal[
    "copd",
    "interstitial",
    "cystic_fibrosis",
    "bronchiectasis",
    "asthma",
    "pulmonary_vascular",
    "chest_wall",
    "neuromuscular",
    "obesity_hypoventilation",
    "other",
]
YesNo = bool | None


class CarbonDioxideRisk(Section):
    """Whether oxygen could make this person retain carbon dioxide. None is "not known" and is asked for."""

    judged: YesNo = Field(None, description="The clinician's own answer: at risk, not at risk, not known")
    past_hypercapnia: YesNo = Field(None, description="An arterial PCO2 above 6 kPa (45 mmHg) was ever measured")
    past_acidosis_or_ventilation: YesNo = Field(None, description="Hypercapnic acidosis, or ventilation for it, ever")
    oxygen_alert_card: YesNo = Field(None, description="Carries an oxygen alert card")


class Function(Section):
    """What the person can do on the ground."""

    mmrc_dyspnoea: int | None = Field(None, ge=0, le=4, description="Modified MRC dyspnoea grade, 0 to 4")
    can_walk_50_m: YesNo = Field(None, description="Walks 50 m on the level without distress")
    symptoms_on_past_flight: YesNo = Field(None, description="Respiratory symptoms on an earlier flight without oxygen")
    breathes_through_nose: YesNo = Field(None, description="Needed for a pulse device to trigger")
    can_run_equipment: YesNo = Field(None, description="Can run the oxygen equipment without help")


class Patient(Section):
    """The traveller. Name and birth date are optional and stay out of exports unless chosen."""

    reference: str = Field("", max_length=40, description="Local reference; not a national number")
    initials: str = Field("", max_length=8)
    name: str | None = Field(None, max_length=120, description="Optional; left out of exports unless chosen")
    birth_date: date | None = Field(None, strict=False, description="Optional; left out of exports unless chosen")
    age_years: float | None = Field(None, ge=0, le=120)
    sex: Literal["female", "male"] | None = None
    height_m: float | None = Field(None, ge=0.4, le=2.5)
    mass_kg: float | None = Field(None, ge=2, le=350)
    diagnosis: Diagnosis | None = Field(None, description="The group that decides which methods apply")
    diagnosis_note: str = Field("", max_length=200, description="In the clinician's words")
    carbon_dioxide_risk: CarbonDioxideRisk = CarbonDioxideRisk()
    skin_pigmentation: Literal["light", "medium", "dark"] | None = Field(
        None, description="Pulse oximeters may read high in dark skin"
    )
    smoking: Literal["never", "former", "current"] | None = None
    function: Function = Function()
