"""Measurements as a FHIR R4 Bundle of Observations with LOINC and UCUM codes, and back.

Only what has a standard code goes: PaO2, PaCO2, pH, saturation, inhaled oxygen, FEV1 and FVC, haemoglobin. Everything
else of a case stays behind and is told. Bundles are checked by fhir.resources, an optional extra, whose release R4B has
the same Bundle, Patient and Observation for these entries as R4. LOINC codes are from memory; UCUM as in the standard.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import date
from typing import Any

from planner.case import Case
from planner.case.measurements import (
    AnyMeasurement,
    BloodGas,
    Breathing,
    Carboxyhaemoglobin,
    Haemoglobin,
    LungFunction,
    Oximetry,
    Place,
)
from planner.errors import PlannerError
from planner.units import mmhg_from_kpa

LOINC, UCUM = "http://loinc.org", "http://unitsofmeasure.org"
AIR_FIO2_PERCENT = 20.93
AIR_WITHIN_PERCENT = 0.5
FLOW, FIO2 = "3151-8", "3150-0"
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
    Quantity("20150-9", "FEV1", _FUNCTION, "fev1_l", "L", {"mL": 0.001}),
    Quantity("20152-5", "FEV1, per cent of predicted", _FUNCTION, "fev1_percent", "%", _SHARES),
    Quantity("19868-9", "Forced vital capacity", _FUNCTION, "fvc_l", "L", {"mL": 0.001}),
    Quantity("718-7", "Haemoglobin", "haemoglobin", "haemoglobin_g_dl", "g/dL", {"g/L": 0.1}),
    Quantity("20563-3", "Carboxyhaemoglobin", "carboxyhaemoglobin", "carboxyhaemoglobin_percent", "%", _SHARES),
)
_BY_CODE = {one.code: one for one in QUANTITIES}
_MODELS: dict[str, Any] = {
    "blood_gas": BloodGas,
    "oximetry": Oximetry,
    "lung_function": LungFunction,
    "haemoglobin": Haemoglobin,
    "carboxyhaemoglobin": Carboxyhaemoglobin,
}


def to_bundle(case: Case) -> tuple[dict[str, Any], tuple[str, ...]]:
    """The measurements as a Bundle, and a sentence for each that stays behind. The person is a local reference only.

    Raises FhirError where fhir.resources is not installed or does not take the bundle.
    """
    subject = case.patient.reference or case.patient.initials or "unnamed"
    entries: list[dict[str, Any]] = [{"resourceType": "Patient", "id": "patient", "identifier": [{"value": subject}]}]
    left: list[str] = []
    for number, one in enumerate(case.measurements, start=1):
        observations = list(_observations(number, one))
        entries += observations
        if not observations:
            left.append(f"{_called(one)} has no standard code here and stays behind.")
    left.append("Trip, prescription, cautions, decisions and kit have no place in it and stay behind.")
    bundle = {
        "resourceType": "Bundle",
        "type": "collection",
        "entry": [{"fullUrl": f"urn:local:{one['id']}", "resource": one} for one in entries],
    }
    check(bundle)
    return bundle, tuple(left)


def from_bundle(bundle: Mapping[str, Any]) -> tuple[tuple[AnyMeasurement, ...], tuple[str, ...]]:
    """The measurements of a Bundle, and a sentence for each entry that was not understood or had to be guessed.

    Observations of blood gas or lung function with the same day, sample and breathing are one measurement. Raises
    FhirError where this is no Bundle.
    """
    if bundle.get("resourceType") != "Bundle" or not isinstance(bundle.get("entry", []), list):
        raise FhirError("This is not a FHIR Bundle with a list of entries.")
    said: list[str] = []
    groups: dict[Any, dict[str, Any]] = {}
    for number, entry in enumerate(bundle.get("entry", []), start=1):
        resource = entry.get("resource") if isinstance(entry, Mapping) else None
        if not isinstance(resource, Mapping) or resource.get("resourceType") == "Patient":
            continue
        try:
            quantity, value, shared, doubts = _understood(resource)
        except FhirError as error:
            said.append(f"Entry {number} is not taken: {error}")
            continue
        said += [f"Entry {number}: {doubt}" for doubt in doubts]
        group = groups.setdefault(_key(quantity, shared, groups), {"kind": quantity.kind, **shared})
        group[quantity.field] = value
    taken = []
    for group in groups.values():
        try:
            taken.append(_MODELS[group["kind"]].model_validate(group))
        except ValueError as error:
            said.append(f"A {group['kind'].replace('_', ' ')} is not taken: {str(error).splitlines()[2].strip()}.")
    return tuple(taken), tuple(said)


def check(bundle: Mapping[str, Any]) -> None:
    """Raises FhirError where fhir.resources is not installed, or says what it does not take."""
    try:
        from fhir.resources.R4B.bundle import Bundle
    except ImportError as error:
        raise FhirError(
            "FHIR needs the optional extra of this program: install it with pip install '.[fhir]' in its environment."
        ) from error
    try:
        Bundle.model_validate(dict(bundle))
    except ValueError as error:
        raise FhirError(f"The bundle does not follow FHIR: {str(error).splitlines()[0]}.") from error


def _observations(number: int, one: AnyMeasurement) -> Iterator[dict[str, Any]]:
    for quantity in QUANTITIES:
        value = getattr(one, quantity.field, None) if one.kind == quantity.kind else None
        if value is None or (quantity.sample and getattr(one, "sample", "") != quantity.sample):
            continue
        if isinstance(one, Oximetry) and one.activity != "rest":
            continue  # a reading on the move or asleep would be read as one at rest
        found: dict[str, Any] = {
            "resourceType": "Observation",
            "id": f"m{number}-{quantity.field.replace('_', '-')}",
            "status": "final",
            "code": {"coding": [{"system": LOINC, "code": quantity.code, "display": quantity.words}]},
            "subject": {"reference": "urn:local:patient"},
            "valueQuantity": _quantity(value, quantity.unit),
            "component": list(_components(one)),
        }
        if one.taken_on is not None:
            found["effectiveDateTime"] = one.taken_on.isoformat()
        yield {key: value for key, value in found.items() if value != []}


def _components(one: AnyMeasurement) -> Iterator[dict[str, Any]]:
    breathing, place = one.breathing, one.place
    if one.kind in ("blood_gas", "oximetry"):
        fio2 = (
            AIR_FIO2_PERCENT if breathing.gas == "air" else None if breathing.fio2 is None else 100.0 * breathing.fio2
        )
        if fio2 is not None:
            yield _component(FIO2, "Inhaled oxygen concentration", fio2, "%")
        if breathing.flow_l_min is not None:
            yield _component(FLOW, "Inhaled oxygen flow rate", breathing.flow_l_min, "L/min")
    if place.elevation_m is not None:
        yield {"code": {"text": ELEVATION}, "valueQuantity": _quantity(place.elevation_m, "m")}
    if place.barometric_mmhg is not None:
        yield {"code": {"text": PRESSURE}, "valueQuantity": _quantity(place.barometric_mmhg, "mm[Hg]")}
    if one.state is not None:
        yield {"code": {"text": STATE}, "valueString": one.state}


def _component(code: str, words: str, value: float, unit: str) -> dict[str, Any]:
    coding = {"system": LOINC, "code": code, "display": words}
    return {"code": {"coding": [coding]}, "valueQuantity": _quantity(value, unit)}


def _quantity(value: float, unit: str) -> dict[str, Any]:
    return {"value": value, "unit": unit, "system": UCUM, "code": unit}


def _understood(resource: Mapping[str, Any]) -> tuple[Quantity, float, dict[str, Any], list[str]]:
    """Quantity, value in our unit, what is shared by a measurement, and doubts. Raises FhirError."""
    if resource.get("resourceType") != "Observation":
        raise FhirError(f"it is a {str(resource.get('resourceType'))[:40]}, not an Observation.")
    if resource.get("status") not in ("final", "amended", "corrected"):
        raise FhirError(f"its status is {str(resource.get('status'))[:40]!r}, not a final result.")
    codes = _codes(resource.get("code"))
    quantity = next((_BY_CODE[code] for code in codes if code in _BY_CODE), None)
    if quantity is None:
        raise FhirError(f"no code of it is known here ({', '.join(codes)[:80] or 'no LOINC code'}).")
    value = _in_our_unit(resource.get("valueQuantity"), quantity.words, quantity.unit, quantity.others)
    doubts: list[str] = []
    shared: dict[str, Any] = {"taken_on": _day(resource), "sample": quantity.sample}
    if shared["taken_on"] is None:
        doubts.append(f"{quantity.words} has no day; it is taken as of unknown age.")
    shared |= _place_and_breathing(resource.get("component"), quantity, doubts)
    return quantity, value, {key: one for key, one in shared.items() if one not in ("", None)}, doubts


def _place_and_breathing(components: Any, quantity: Quantity, doubts: list[str]) -> dict[str, Any]:
    values: dict[str, Any] = {}
    for one in components if isinstance(components, list) else []:
        if not isinstance(one, Mapping):
            continue
        code = one.get("code")
        text = code.get("text") if isinstance(code, Mapping) else None
        for name, unit in ((FIO2, "%"), (FLOW, "L/min")):
            if name in _codes(code):
                values[name] = _in_our_unit(one.get("valueQuantity"), name, unit, {"1": 100.0} if unit == "%" else {})
        for name, unit, others in ((ELEVATION, "m", {}), (PRESSURE, "mm[Hg]", {"kPa": KPA, "hPa": KPA / 10.0})):
            if text == name:
                values[name] = _in_our_unit(one.get("valueQuantity"), name, unit, others)
        if text == STATE and one.get("valueString") in ("stable", "recovering", "exacerbation"):
            values[STATE] = one["valueString"]
    found: dict[str, Any] = {"state": values.get(STATE)}
    found["place"] = Place(elevation_m=values.get(ELEVATION), barometric_mmhg=values.get(PRESSURE))
    if quantity.kind not in ("blood_gas", "oximetry"):
        return found
    flow, fio2 = values.get(FLOW), values.get(FIO2)
    if flow is None and fio2 is None:
        doubts.append(f"{quantity.words}: what was breathed is not said; taken as room air. Check it.")
    on_air = flow is None and (fio2 is None or abs(fio2 - AIR_FIO2_PERCENT) <= AIR_WITHIN_PERCENT)
    if not on_air:
        found["breathing"] = Breathing(gas="oxygen", flow_l_min=flow, fio2=None if fio2 is None else fio2 / 100.0)
        if flow is not None:
            doubts.append(f"{quantity.words}: the device of the oxygen is not said; enter it.")
    return found


def _key(quantity: Quantity, shared: Mapping[str, Any], groups: Mapping[Any, Mapping[str, Any]]) -> Any:
    """What makes one measurement of several observations; a second value of the same field starts another."""
    number = 0
    while True:
        key = (quantity.kind, repr(sorted(shared.items(), key=str)), number)
        if quantity.field not in groups.get(key, {}):
            return key
        number += 1


def _codes(concept: Any) -> list[str]:
    codings = concept.get("coding") if isinstance(concept, Mapping) else None
    return [
        str(one.get("code"))
        for one in (codings if isinstance(codings, list) else [])
        if isinstance(one, Mapping) and one.get("system") == LOINC
    ]


def _in_our_unit(quantity: Any, words: str, unit: str, others: Mapping[str, float]) -> float:
    if not isinstance(quantity, Mapping):
        raise FhirError(f"{words} has no quantity.")
    value, code = quantity.get("value"), str(quantity.get("code") or quantity.get("unit"))
    if isinstance(value, bool) or not isinstance(value, (int, float)) or quantity.get("comparator"):
        raise FhirError(f"{words} has no plain number.")
    if code == unit:
        return float(value)
    if code in others:
        return float(value) * others[code]
    allowed = " or ".join([unit, *others])
    raise FhirError(f"{words} is in {code[:20]!r}; {allowed} is understood.")


def _day(resource: Mapping[str, Any]) -> date | None:
    text = resource.get("effectiveDateTime")
    if text is None:
        return None
    try:
        return date.fromisoformat(str(text)[:10])
    except ValueError:
        raise FhirError(f"its day {str(text)[:30]!r} is not a whole date.") from None


def _called(one: AnyMeasurement) -> str:
    name = one.kind.replace("_", " ").capitalize()
    return f"{name} of {one.taken_on}" if one.taken_on is not None else f"{name} without a day"
