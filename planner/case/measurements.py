"""Dated measurements: what was measured, when, in which state, on which gas, and at which pressure."""

from __future__ import annotations

from datetime import date, datetime
from typing import Annotated, Literal

from pydantic import Field

from planner.case.section import Section

State = Literal["stable", "recovering", "exacerbation"]
Fraction = Annotated[float, Field(gt=0.0, le=1.0)]
Mmhg = Annotated[float, Field(gt=0.0)]

PaO2 = Annotated[float, Field(ge=15.0, le=700.0, description="mmHg; 2 to 93 kPa")]
PaCO2 = Annotated[float, Field(ge=10.0, le=150.0, description="mmHg; 1.3 to 20 kPa")]
Ph = Annotated[float, Field(ge=6.8, le=7.8)]
Percent = Annotated[float, Field(ge=0.0, le=100.0)]
SpO2Percent = Annotated[float, Field(ge=30.0, le=100.0)]


class Place(Section):
    """Where it was measured. A station pressure is better than an elevation; neither known is asked for."""

    elevation_m: float | None = Field(None, ge=-430.0, le=5200.0, description="Ground elevation; 0 is sea level")
    barometric_mmhg: float | None = Field(
        None, ge=380.0, le=800.0, description="Station pressure, not reduced to sea level"
    )


class Breathing(Section):
    """What was breathed. Air unless said; oxygen names its device and its flow, setting or fraction."""

    gas: Literal["air", "oxygen"] = "air"
    device_id: str | None = Field(None, max_length=60, description="A delivery device of the profiles")
    flow_l_min: float | None = Field(None, ge=0.1, le=15.0)
    setting: float | None = Field(None, gt=0.0, le=10.0, description="A pulse setting; never litres per minute")
    fio2: float | None = Field(None, ge=0.1, le=1.0, description="Inspired fraction where it is known")


class Measurement(Section):
    """What all kinds share."""

    taken_on: date | None = Field(None, strict=False, description="None: the date is not known")
    state: State | None = Field(None, description="How the patient was")
    place: Place = Place()
    breathing: Breathing = Breathing()
    note: str = Field("", max_length=300)


class BloodGas(Measurement):
    """Arterial or arterialised capillary gas at rest."""

    kind: Literal["blood_gas"] = "blood_gas"
    sample: Literal["arterial", "capillary"] = "arterial"
    pao2_mmhg: PaO2 | None = None
    paco2_mmhg: PaCO2 | None = None
    ph: Ph | None = None
    sao2_percent: SpO2Percent | None = None


class Oximetry(Measurement):
    """Pulse oximetry."""

    kind: Literal["oximetry"] = "oximetry"
    spo2_percent: SpO2Percent | None = None
    activity: Literal["rest", "walking", "asleep"] = "rest"
    heart_rate_min: float | None = Field(None, ge=20.0, le=250.0)


class WalkTest(Measurement):
    """Six-minute or other walk test."""

    kind: Literal["walk_test"] = "walk_test"
    protocol: Literal["six_minute", "other"] = "six_minute"
    lowest_spo2_percent: SpO2Percent | None = None
    distance_m: float | None = Field(None, ge=0.0, le=1200.0)


class LungFunction(Measurement):
    """Spirometry and transfer factor."""

    kind: Literal["lung_function"] = "lung_function"
    fev1_l: float | None = Field(None, gt=0.0, le=8.0)
    fev1_percent: float | None = Field(None, gt=0.0, le=200.0, description="Per cent of predicted")
    fvc_l: float | None = Field(None, gt=0.0, le=10.0)
    fvc_percent: float | None = Field(None, gt=0.0, le=200.0)
    tlco_percent: float | None = Field(None, gt=0.0, le=200.0, description="Transfer factor, per cent of predicted")


class Haemoglobin(Measurement):
    """Haemoglobin concentration."""

    kind: Literal["haemoglobin"] = "haemoglobin"
    haemoglobin_g_dl: float | None = Field(None, ge=3.0, le=25.0)


class Carboxyhaemoglobin(Measurement):
    """Carboxyhaemoglobin; a pulse oximeter counts it as oxygenated."""

    kind: Literal["carboxyhaemoglobin"] = "carboxyhaemoglobin"
    carboxyhaemoglobin_percent: float | None = Field(None, ge=0.0, le=50.0)


class ChallengeRow(Section):
    """One moment of a hypoxic challenge test."""

    at_min: float = Field(ge=0.0, le=180.0)
    phase: Literal["before", "challenge", "on_oxygen", "walking", "recovery"]
    spo2_percent: SpO2Percent | None = None
    heart_rate_min: float | None = Field(None, ge=20.0, le=250.0)
    flow_l_min: float | None = Field(None, ge=0.1, le=15.0)
    symptoms: str = Field("", max_length=200)


class ChallengeGas(Section):
    """A blood gas during a hypoxic challenge test."""

    phase: Literal["before", "challenge", "on_oxygen"]
    sample: Literal["arterial", "capillary"] = "arterial"
    pao2_mmhg: PaO2 | None = None
    paco2_mmhg: PaCO2 | None = None
    ph: Ph | None = None
    flow_l_min: float | None = Field(None, ge=0.1, le=15.0)
    device_id: str | None = Field(None, max_length=60)


class Challenge(Measurement):
    """Hypoxic challenge test, as it was really done: at this laboratory's pressure, with this mixture."""

    kind: Literal["challenge"] = "challenge"
    challenge_fio2: float | None = Field(None, ge=0.10, le=0.2093, description="Fraction of oxygen in the mixture")
    method: Literal["mask", "venturi_nitrogen", "hood", "tent", "body_box", "hypobaric_chamber"] | None = None
    started_at: datetime | None = Field(
        None, strict=False, description="When its clock was started, with its offset; rows count from here"
    )
    duration_min: float | None = Field(None, gt=0.0, le=180.0)
    ended_early: bool | None = None
    ended_why: str = Field("", max_length=200)
    oxygen_titrated_by: Literal["cannula_under_mask", "cannula_in_tent", "chamber", "other"] | None = None
    rows: tuple[ChallengeRow, ...] = Field((), max_length=2000, strict=False)
    gases: tuple[ChallengeGas, ...] = Field((), max_length=50, strict=False)


AnyMeasurement = Annotated[
    BloodGas | Oximetry | WalkTest | LungFunction | Haemoglobin | Carboxyhaemoglobin | Challenge,
    Field(discriminator="kind"),
]
