"""Measurements out of a FHIR R4 Bundle of one person; whatever is not understood is told and never guessed in silence.

A reading whose breathing is not said is taken as on air with a doubt, unless the bundle has inhaled oxygen of that day
as an observation of its own: then the oxygen of the same moment belongs to it, and without one it is not taken.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from datetime import date, datetime
from math import isfinite
from typing import Any

from pydantic import ValidationError

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
from planner.records.fhir_codes import (
    AIR_FIO2_PERCENT,
    AIR_WITHIN_PERCENT,
    BY_CODE,
    ELEVATION,
    FIO2,
    FLOW,
    INHALED,
    KPA,
    LOINC,
    PRESSURE,
    READ_AS,
    STATE,
    UCUM,
    FhirError,
    Quantity,
)
from planner.records.reading import fault_sentence, shown

MOST_ENTRIES = 2000
OXIMETRY_CODE, SATURATION_CODE = "59408-5", "2708-6"
MOST_REFERENCE = 40
_MODELS: dict[str, Any] = {
    "blood_gas": BloodGas,
    "oximetry": Oximetry,
    "lung_function": LungFunction,
    "haemoglobin": Haemoglobin,
    "carboxyhaemoglobin": Carboxyhaemoglobin,
}
_PLACE: dict[str, tuple[str, Mapping[str, float]]] = {
    ELEVATION: ("m", {}),
    PRESSURE: ("mm[Hg]", {"kPa": KPA, "hPa": KPA / 10.0}),
}
Inhaled = Mapping[str, float]


def from_bundle(bundle: Mapping[str, Any]) -> tuple[tuple[AnyMeasurement, ...], tuple[str, ...]]:
    """The measurements of a Bundle, and a sentence for each entry that was not understood or had to be guessed.

    Observations of blood gas or lung function with the same moment, specimen and breathing are one measurement. Raises
    FhirError where this is no Bundle, is too long, or holds more than one person.
    """
    resources = _resources(bundle)
    _require_one_person(resources)
    said: list[str] = []
    alone = _inhaled_alone(resources, said)
    groups: dict[Any, dict[str, Any]] = {}
    for number, resource in enumerate(resources, start=1):
        kind = resource.get("resourceType") if resource is not None else None
        if kind == "Patient" or (resource is not None and _inhaled_code(resource) is not None):
            continue
        try:
            if resource is None:
                raise FhirError("it holds no resource.")
            quantity, value, shared, doubts = _understood(resource, alone)
        except FhirError as error:
            said.append(f"Entry {number} is not taken: {error}")
            continue
        said += [f"Entry {number}: {doubt}" for doubt in doubts]
        group = groups.setdefault(_key(resource, quantity, shared, groups), {"kind": quantity.kind, **shared})
        group[quantity.field] = value
    taken = []
    for group in groups.values():
        try:
            taken.append(_MODELS[group["kind"]].model_validate(group))
        except ValidationError as error:
            name = group["kind"].replace("_", " ")
            said.append(f"A {name} is not taken: {fault_sentence(error.errors(include_url=False)[0])}")
    return tuple(taken), tuple(said)


def local_reference(bundle: Mapping[str, Any]) -> tuple[str, tuple[str, ...]]:
    """The local reference of the person in a Bundle, or none, and a sentence for what of the person is left there.

    An identifier of a system, which may be a national number, is not a local reference and is not taken.
    """
    reference, said = "", list[str]()
    for number, resource in enumerate(_resources(bundle), start=1):
        if resource is None or resource.get("resourceType") != "Patient":
            continue
        listed = resource.get("identifier")
        local = [
            one["value"]
            for one in (listed if isinstance(listed, list) else [])
            if isinstance(one, Mapping) and "system" not in one and isinstance(one.get("value"), str)
        ]
        if len(local) == 1 and len(local[0]) <= MOST_REFERENCE and local[0].isprintable():
            reference = local[0]
        elif listed:
            said.append(f"Entry {number}: the number of the person is not a local reference and is not taken.")
        if "name" in resource or "birthDate" in resource:
            said.append(f"Entry {number}: name and birth date of the person are not taken.")
    return reference, tuple(said)


def _resources(bundle: Mapping[str, Any]) -> list[Mapping[str, Any] | None]:
    entries = bundle.get("entry", [])
    if bundle.get("resourceType") != "Bundle" or not isinstance(entries, list):
        raise FhirError("This is not a FHIR Bundle with a list of entries.")
    if len(entries) > MOST_ENTRIES:
        raise FhirError(f"The bundle has {len(entries):,} entries; at most {MOST_ENTRIES:,} are read.")
    found = [entry.get("resource") if isinstance(entry, Mapping) else None for entry in entries]
    return [resource if isinstance(resource, Mapping) else None for resource in found]


def _require_one_person(resources: list[Mapping[str, Any] | None]) -> None:
    """Raises FhirError where people could be mixed up: one bundle is one case is one person."""
    present = [one for one in resources if one is not None]
    patients = sum(one.get("resourceType") == "Patient" for one in present)
    subjects = {json.dumps(_pointed(one["subject"]), sort_keys=True) for one in present if one.get("subject")}
    if max(patients, len(subjects)) > 1:
        raise FhirError(
            f"The bundle speaks of {max(patients, len(subjects))} persons; a case is one person. Give each a bundle."
        )


def _pointed(subject: Any) -> Any:
    """What names the person in a subject: its reference; where it has none, all of it."""
    return subject.get("reference", subject) if isinstance(subject, Mapping) else subject


def _inhaled_alone(resources: list[Mapping[str, Any] | None], said: list[str]) -> dict[str, dict[str, float] | None]:
    """Inhaled oxygen as observations of their own, by moment; None where it is not understood."""
    found: dict[str, dict[str, float] | None] = {}
    for number, resource in enumerate(resources, start=1):
        code = None if resource is None else _inhaled_code(resource)
        if resource is None or code is None:
            continue
        moment = str(_moment(resource) or "")
        try:
            _require_final(resource)
            _day(resource)
            values = found.setdefault(moment, {})
            words, unit, others = INHALED[code]
            value = _in_our_unit(resource.get("valueQuantity"), words, unit, others)
            if values is not None and values.setdefault(code, value) != value:
                raise FhirError(f"{words} has two values at the same moment.")
        except FhirError as error:
            found[moment] = None
            said.append(f"Entry {number} is not taken: {error}")
    return found


def _inhaled_code(resource: Mapping[str, Any]) -> str | None:
    if resource.get("resourceType") != "Observation":
        return None
    codes = _codes(resource.get("code"))
    return None if any(code in BY_CODE for code in codes) else next((code for code in codes if code in INHALED), None)


def _understood(
    resource: Mapping[str, Any], alone: Mapping[str, Inhaled | None]
) -> tuple[Quantity, float, dict[str, Any], list[str]]:
    """Quantity, value in our unit, what is shared by a measurement, and doubts. Raises FhirError."""
    if resource.get("resourceType") != "Observation":
        raise FhirError(f"it is a {shown(resource.get('resourceType'))}, not an Observation.")
    _require_final(resource)
    quantity = _quantity_of(resource)
    value = _in_our_unit(resource.get("valueQuantity"), quantity.words, quantity.unit, quantity.others)
    doubts: list[str] = []
    shared: dict[str, Any] = {"taken_on": _day(resource), "sample": quantity.sample}
    if shared["taken_on"] is None:
        doubts.append(f"{quantity.words} has no day; it is taken as of unknown age.")
    inhaled, place, state = _components(resource.get("component"), quantity, doubts)
    shared |= {"place": place, "state": state}
    if quantity.kind in ("blood_gas", "oximetry"):
        breathed = inhaled or _of_the_moment(resource, quantity, alone, doubts)
        shared["breathing"] = _breathing(breathed, quantity, doubts)
    return quantity, value, {key: one for key, one in shared.items() if one not in ("", None)}, doubts


def _require_final(resource: Mapping[str, Any]) -> None:
    if resource.get("status") not in ("final", "amended", "corrected"):
        raise FhirError(f"its status is {shown(resource.get('status'))}, not a final result.")


def _quantity_of(resource: Mapping[str, Any]) -> Quantity:
    codes = _codes(resource.get("code"))
    if OXIMETRY_CODE in codes:  # vital signs carry the code of arterial saturation beside it
        return BY_CODE[OXIMETRY_CODE]
    quantity = next((BY_CODE[code] for code in codes if code in BY_CODE), None)
    if quantity is None:
        raise FhirError(f"no code of it is known here ({shown(', '.join(codes)) if codes else 'no LOINC code'}).")
    if quantity.code == SATURATION_CODE and "vital-signs" in str(resource.get("category")):
        raise FhirError("it is a saturation among vital signs that does not say whether blood was drawn.")
    return quantity


def _components(components: Any, quantity: Quantity, doubts: list[str]) -> tuple[dict[str, float], Place, str | None]:
    """What was breathed by code, place and state. Raises FhirError for a known one whose value is not understood."""
    inhaled: dict[str, float] = {}
    place: dict[str, float] = {}
    state: str | None = None
    for one in components if isinstance(components, list) else []:
        code = one.get("code") if isinstance(one, Mapping) else None
        text = code.get("text") if isinstance(code, Mapping) else None
        known = next((name for name in _codes(code) if name in INHALED), None)
        if known is not None:
            words, unit, others = INHALED[known]
            inhaled[known] = _in_our_unit(one.get("valueQuantity"), words, unit, others)
        elif isinstance(text, str) and text in _PLACE:
            place[text] = _in_our_unit(one.get("valueQuantity"), text, *_PLACE[text])
        elif text == STATE and one.get("valueString") in ("stable", "recovering", "exacerbation"):
            state = one["valueString"]
        else:
            named = ", ".join(_codes(code)) or text
            doubts.append(f"{quantity.words}: a part of it is not understood ({shown(named)}).")
    try:
        return inhaled, Place(elevation_m=place.get(ELEVATION), barometric_mmhg=place.get(PRESSURE)), state
    except ValidationError as error:
        raise FhirError(fault_sentence(error.errors(include_url=False)[0])) from None


def _of_the_moment(
    resource: Mapping[str, Any], quantity: Quantity, alone: Mapping[str, Inhaled | None], doubts: list[str]
) -> Inhaled:
    """The inhaled oxygen of the same moment; none where the bundle has none of that day. Raises FhirError between."""
    moment = str(_moment(resource) or "")
    inhaled = alone.get(moment) if moment else None
    if inhaled:
        doubts.append(f"{quantity.words}: taken as on the inhaled oxygen of the same moment. Check it.")
        return inhaled
    if any(_may_belong(moment, other) for other in alone):
        raise FhirError(
            f"{quantity.words} does not say what was breathed, and inhaled oxygen of about that day may be its own."
        )
    return {}


def _may_belong(moment: str, other: str) -> bool:
    """Whether two moments may be of one day; a day off is allowed for, as their clocks may have other offsets."""
    try:
        return abs((datetime.fromisoformat(moment).date() - datetime.fromisoformat(other).date()).days) <= 1
    except ValueError:
        return True


def _breathing(inhaled: Inhaled, quantity: Quantity, doubts: list[str]) -> Breathing:
    flow, percent = inhaled.get(FLOW), inhaled.get(FIO2)
    if flow is None and percent is None:
        doubts.append(f"{quantity.words}: what was breathed is not said; taken as room air. Check it.")
        return Breathing()
    flow = flow or None  # no litres at all are air
    if flow is None and (percent is None or abs(percent - AIR_FIO2_PERCENT) <= AIR_WITHIN_PERCENT):
        return Breathing()
    try:
        if flow is None and percent is not None and percent < AIR_FIO2_PERCENT:
            return Breathing(gas="air", fio2=percent / 100.0)
        if flow is not None:
            doubts.append(f"{quantity.words}: the device of the oxygen is not said; enter it.")
        return Breathing(gas="oxygen", flow_l_min=flow, fio2=None if percent is None else percent / 100.0)
    except ValidationError as error:
        raise FhirError(fault_sentence(error.errors(include_url=False)[0])) from None


def _key(
    resource: Mapping[str, Any], quantity: Quantity, shared: Mapping[str, Any], groups: Mapping[Any, Mapping[str, Any]]
) -> Any:
    """What makes one measurement of several observations; a second value of the same field starts another."""
    alike = (
        quantity.kind,
        repr(sorted(shared.items(), key=str)),
        str(_moment(resource)),
        repr(resource.get("specimen")),
    )
    number = 0
    while quantity.field in groups.get((alike, number), {}):
        number += 1
    return alike, number


def _codes(concept: Any) -> list[str]:
    codings = concept.get("coding") if isinstance(concept, Mapping) else None
    return list(_loinc(codings)) if isinstance(codings, list) else []


def _loinc(codings: list[Any]) -> Iterator[str]:
    for one in codings:
        if isinstance(one, Mapping) and one.get("system") == LOINC:
            code = str(one.get("code"))
            yield READ_AS.get(code, code)


def _in_our_unit(quantity: Any, words: str, unit: str, others: Mapping[str, float]) -> float:
    if not isinstance(quantity, Mapping):
        raise FhirError(f"{words} has no quantity.")
    value, code = quantity.get("value"), str(quantity.get("code") or quantity.get("unit"))
    if isinstance(value, bool) or not isinstance(value, (int, float)) or quantity.get("comparator"):
        raise FhirError(f"{words} has no plain number.")
    if abs(value) > 1e9 or not isfinite(value):  # a whole number may be too long for isfinite
        raise FhirError(f"{words} has no number that can be measured.")
    if quantity.get("system", UCUM) != UCUM:
        raise FhirError(f"{words} has a unit of {shown(quantity['system'])}; one of {UCUM} is understood.")
    if code == unit:
        return float(value)
    if code in others:
        return float(value) * others[code]
    allowed = " or ".join([unit, *others])
    raise FhirError(f"{words} is in {shown(code)}; {allowed} is understood.")


def _moment(resource: Mapping[str, Any]) -> Any:
    """When it was, as written: a day or a day with its time; None where it is not said."""
    period = resource.get("effectivePeriod")
    start = period.get("start") if isinstance(period, Mapping) else None
    return next(
        (one for one in (resource.get("effectiveDateTime"), resource.get("effectiveInstant"), start) if one), None
    )


def _day(resource: Mapping[str, Any]) -> date | None:
    moment = _moment(resource)
    if moment is None:
        return None
    try:
        return datetime.fromisoformat(moment).date()
    except (TypeError, ValueError):
        raise FhirError(f"its day {shown(moment)} is not a whole date.") from None
