"""The standard codes of exchanged measurements: LOINC for what was measured, UCUM for the unit.

LOINC codes are from memory, each right by its check digit; UCUM as in the standard.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from planner.errors import PlannerError
from planner.units import mmhg_from_kpa

LOINC, UCUM = "http://loinc.org", "http://unitsofmeasure.org"
AIR_FIO2_PERCENT = 20.93
AIR_WITHIN_PERCENT = 0.5
FLOW, FIO2 = "3151-8", "3150-0"
INHALED: Mapping[str, tuple[str, str, Mapping[str, float]]] = {
    FLOW: ("Inhaled oxygen flow rate", "L/min", {"l/min": 1.0}),
    FIO2: ("Inhaled oxygen concentration", "%", {"1": 100.0}),
}
READ_AS = {"3150-6": FIO2}  # from memory in wide use, though its check digit is wrong; read, never written
ELEVATION, PRESSURE, STATE = "Elevation where taken", "Air pressure where taken", "State of the patient"


class FhirError(PlannerError):
    """A bundle that cannot be written or read, as a sentence."""


@dataclass(frozen=True)
class Quantity:
    """A measured quantity with its code: the kind and field it belongs to, and how other units become ours."""

    code: str
    words: str
    kind: str
    field: str
    unit: str
    others: Mapping[str, float]  # UCUM code to factor into our unit
    sample: str = ""


KPA = mmhg_from_kpa(1.0)
_PRESSURES, _SHARES = {"kPa": KPA}, {"1": 100.0}
_GAS, _FUNCTION = "blood_gas", "lung_function"
QUANTITIES = (
    Quantity("2703-7", "PaO2, arterial blood", _GAS, "pao2_mmhg", "mm[Hg]", _PRESSURES, "arterial"),
    Quantity("2704-5", "PO2, capillary blood", _GAS, "pao2_mmhg", "mm[Hg]", _PRESSURES, "capillary"),
    Quantity("2019-8", "PaCO2, arterial blood", _GAS, "paco2_mmhg", "mm[Hg]", _PRESSURES, "arterial"),
    Quantity("2020-6", "PCO2, capillary blood", _GAS, "paco2_mmhg", "mm[Hg]", _PRESSURES, "capillary"),
    Quantity("2744-1", "pH, arterial blood", _GAS, "ph", "[pH]", {"1": 1.0}, "arterial"),
    Quantity("2745-8", "pH, capillary blood", _GAS, "ph", "[pH]", {"1": 1.0}, "capillary"),
    Quantity("2708-6", "Oxygen saturation, arterial blood", _GAS, "sao2_percent", "%", _SHARES, "arterial"),
    Quantity("59408-5", "Oxygen saturation by pulse oximetry", "oximetry", "spo2_percent", "%", _SHARES),
    Quantity("20150-9", "FEV1", _FUNCTION, "fev1_l", "L", {"l": 1.0, "mL": 0.001, "ml": 0.001}),
    Quantity("20152-5", "FEV1, per cent of predicted", _FUNCTION, "fev1_percent", "%", _SHARES),
    Quantity("19868-9", "Forced vital capacity", _FUNCTION, "fvc_l", "L", {"l": 1.0, "mL": 0.001, "ml": 0.001}),
    Quantity("718-7", "Haemoglobin", "haemoglobin", "haemoglobin_g_dl", "g/dL", {"g/dl": 1.0, "g/L": 0.1, "g/l": 0.1}),
    Quantity("20563-3", "Carboxyhaemoglobin", "carboxyhaemoglobin", "carboxyhaemoglobin_percent", "%", _SHARES),
)
BY_CODE = {one.code: one for one in QUANTITIES}
