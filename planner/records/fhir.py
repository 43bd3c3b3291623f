"""Measurements as a FHIR R4 Bundle of Observations; fhir_reading takes them back.

Only what has a standard code goes (see fhir_codes). Everything else of a case stays behind and is told. Bundles are
checked by fhir.resources, an optional extra, whose release R4B has the same Bundle, Patient and Observation for these
entries as R4.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from planner.case import Case
from planner.case.measurements import AnyMeasurement, BloodGas, Oximetry
from planner.records.fhir_codes import (
    AIR_FIO2_PERCENT,
    ELEVATION,
    FIO2,
    FLOW,
    INHALED,
    LOINC,
    PRESSURE,
    QUANTITIES,
    STATE,
    UCUM,
    FhirError,
    Quantity,
)

_UNCODED = {
    "sao2_percent": "the saturation of capillary blood",
    "heart_rate_min": "the heart rate",
    "fvc_percent": "the forced vital capacity in per cent of predicted",
    "tlco_percent": "the transfer factor",
}


def to_bundle(case: Case) -> tuple[dict[str, Any], tuple[str, ...]]:
    """The measurements as a Bundle, and a sentence for each that stays behind. The person is a local reference only.

    Raises FhirError where fhir.resources is not installed or does not take the bundle.
    """
    person: dict[str, Any] = {"resourceType": "Patient", "id": "patient"}
    if case.patient.reference:
        person["identifier"] = [{"value": case.patient.reference}]
    entries = [person]
    left: list[str] = []
    for number, one in enumerate(case.measurements, start=1):
        sent = list(_sent(one))
        entries += [_observation(number, one, quantity) for quantity in sent]
        left += _left_of(one, {quantity.field for quantity in sent})
    left.append("Trip, prescription, cautions, decisions and kit have no place in it and stay behind.")
    left.append("Devices, settings and notes of measurements stay behind too.")
    bundle = {
        "resourceType": "Bundle",
        "type": "collection",
        "entry": [{"fullUrl": f"urn:local:{one['id']}", "resource": one} for one in entries],
    }
    check(bundle)
    return bundle, tuple(left)


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


def _sent(one: AnyMeasurement) -> Iterator[Quantity]:
    """What goes of a measurement: nothing that would be read as at rest, or as on air, and was not."""
    if (isinstance(one, Oximetry) and one.activity != "rest") or _oxygen_unsaid(one):
        return
    for quantity in QUANTITIES:
        if one.kind == quantity.kind and getattr(one, quantity.field) is not None:
            if quantity.sample and getattr(one, "sample", "") != quantity.sample:
                continue
            yield quantity


def _oxygen_unsaid(one: AnyMeasurement) -> bool:
    breathing = one.breathing
    return (
        isinstance(one, (BloodGas, Oximetry))
        and breathing.gas == "oxygen"
        and breathing.flow_l_min is None
        and breathing.fio2 is None
    )


def _left_of(one: AnyMeasurement, sent: set[str]) -> Iterator[str]:
    if _oxygen_unsaid(one):
        yield f"{_called(one)} was on oxygen without a flow or fraction; it would be read as on air and stays behind."
    elif not sent:
        yield f"{_called(one)} has no standard code here and stays behind."
    else:
        for field, words in _UNCODED.items():
            if field not in sent and getattr(one, field, None) is not None:
                yield f"{_called(one)}: {words} has no standard code here and stays behind."


def _observation(number: int, one: AnyMeasurement, quantity: Quantity) -> dict[str, Any]:
    found: dict[str, Any] = {
        "resourceType": "Observation",
        "id": f"m{number}-{quantity.field.replace('_', '-')}",
        "status": "final",
        "code": _code(quantity.code, quantity.words),
        "subject": {"reference": "urn:local:patient"},
        "valueQuantity": _quantity(getattr(one, quantity.field), quantity.unit),
    }
    if one.taken_on is not None:
        found["effectiveDateTime"] = one.taken_on.isoformat()
    if isinstance(one, BloodGas):
        found["specimen"] = {"display": f"Sample {number}"}
    components = list(_components(one))
    return found | ({"component": components} if components else {})


def _components(one: AnyMeasurement) -> Iterator[dict[str, Any]]:
    breathing, place = one.breathing, one.place
    if isinstance(one, (BloodGas, Oximetry)):
        if breathing.fio2 is not None:
            yield _inhaled(FIO2, 100.0 * breathing.fio2)
        elif breathing.gas == "air":
            yield _inhaled(FIO2, AIR_FIO2_PERCENT)
        if breathing.flow_l_min is not None:
            yield _inhaled(FLOW, breathing.flow_l_min)
    if place.elevation_m is not None:
        yield {"code": {"text": ELEVATION}, "valueQuantity": _quantity(place.elevation_m, "m")}
    if place.barometric_mmhg is not None:
        yield {"code": {"text": PRESSURE}, "valueQuantity": _quantity(place.barometric_mmhg, "mm[Hg]")}
    if one.state is not None:
        yield {"code": {"text": STATE}, "valueString": one.state}


def _inhaled(code: str, value: float) -> dict[str, Any]:
    words, unit, _ = INHALED[code]
    return {"code": _code(code, words), "valueQuantity": _quantity(value, unit)}


def _code(code: str, words: str) -> dict[str, Any]:
    return {"coding": [{"system": LOINC, "code": code, "display": words}]}


def _quantity(value: float, unit: str) -> dict[str, Any]:
    return {"value": value, "unit": unit, "system": UCUM, "code": unit}


def _called(one: AnyMeasurement) -> str:
    name = one.kind.replace("_", " ").capitalize()
    return f"{name} of {one.taken_on}" if one.taken_on is not None else f"{name} without a day"
