"""The record's inputs: who travels, every measurement with its date, state, gas and place, and today's oxygen."""

from __future__ import annotations

from planner.case import measurements as m
from planner.case.measurements import AnyMeasurement, Breathing, Place
from planner.case.prescription import PrescribedOxygen
from planner.papers.desk import Desk, capital
from planner.papers.flow import Column, Flow, Row


def write_who(flow: Flow, desk: Desk) -> None:
    """Identity as entered, no more; facts that change a prediction or a caution."""
    say, q, patient = desk.say, desk.quantities, desk.case.patient
    function = patient.function
    flow.heading(say("record.who"))
    rows = [
        ("who.reference", patient.reference),
        ("who.initials", patient.initials),
        ("who.name", patient.name or ""),
        ("who.born", desk.texts.day(patient.birth_date) if patient.birth_date else ""),
        ("who.age", say("who.age_years", years=desk.texts.number(patient.age_years)) if patient.age_years else ""),
        ("who.sex", say(f"words.sex.{patient.sex}") if patient.sex else ""),
        ("who.size", _size(desk)),
        ("who.diagnosis", _diagnosis(desk)),
        ("who.smoking", say(f"words.smoking.{patient.smoking}") if patient.smoking else q.unknown),
        ("who.skin", say(f"words.skin.{patient.skin_pigmentation}") if patient.skin_pigmentation else q.unknown),
        ("who.dyspnoea", _dyspnoea(desk)),
        ("who.walk_50", q.yes_no(function.can_walk_50_m)),
        ("who.past_flight", q.yes_no(function.symptoms_on_past_flight)),
        ("who.nose", q.yes_no(function.breathes_through_nose)),
        ("who.equipment", q.yes_no(function.can_run_equipment)),
        ("who.assessed", desk.texts.day(desk.case.policy.assessed_on)),
    ]
    flow.pairs([(say(key), value) for key, value in rows if value])


def write_measured(flow: Flow, desk: Desk) -> None:
    """Every measurement, in the order entered."""
    say = desk.say
    flow.heading(say("record.measured"))
    if not desk.case.measurements:
        flow.paragraph(say("record.nothing_measured"))
        return
    columns = [
        Column(say("measured.date"), 0.17),
        Column(say("measured.what"), 0.23),
        Column(say("measured.how"), 0.27),
        Column(say("measured.value"), 0.33, bold=True),
    ]
    rows = []
    for measurement in desk.case.measurements:
        what, values = _what(desk, measurement)
        value = ", ".join(values) or say("measured.not_given")
        if measurement.note:
            what = f"{what}\n{say('measured.note', note=measurement.note)}"
        rows.append(Row((desk.texts.day(measurement.taken_on), what, _how(desk, measurement), value)))
    flow.table(columns, rows)


def write_prescribed(flow: Flow, desk: Desk, *, small: bool = False) -> None:
    """Today's prescription: each line a device with its flow or its setting. small: under a small heading."""
    say, prescription = desk.say, desk.case.prescription
    (flow.lead if small else flow.heading)(say("record.prescribed"))
    uses = {True: "prescribed.yes", False: "prescribed.no", None: "prescribed.not_known"}
    flow.paragraph(say(uses[prescription.uses_oxygen]))
    rows = [
        (say(f"prescribed.{name}"), _prescribed(desk, getattr(prescription, name)))
        for name in ("rest", "walking", "asleep")
        if getattr(prescription, name) is not None
    ]
    if prescription.hours_per_day is not None:
        hours = desk.texts.number(prescription.hours_per_day, 1)
        rows.append((say("prescribed.hours_label"), say("prescribed.hours", hours=hours)))
    if prescription.ventilation is not None:
        rows.append((say("prescribed.support"), support(desk)))
    if rows:
        flow.pairs(rows)


def measurement_line(desk: Desk, measurement: AnyMeasurement) -> tuple[str, str]:
    """What was measured, and its value with date, state, gas and place: for papers with one line a fact."""
    what, values = _what(desk, measurement)
    value = ", ".join(values) or desk.say("measured.not_given")
    day, how = desk.texts.day(measurement.taken_on), _how(desk, measurement)
    return what, desk.say("measured.line", value=value, day=day, how=how)


def gas_values(desk: Desk, pao2_mmhg: float | None, paco2_mmhg: float | None, ph: float | None) -> list[str]:
    """The values of a blood gas that are known, in both pressure units."""
    q = desk.quantities
    pressures = [("pao2", pao2_mmhg), ("paco2", paco2_mmhg)]
    values = [desk.say(f"measured.{key}", value=q.pressure_both(mmhg)) for key, mmhg in pressures if mmhg is not None]
    return values if ph is None else [*values, desk.say("measured.ph", value=desk.texts.number(ph, 2))]


def support(desk: Desk) -> str:
    """Ventilatory support with its power need, where there is one."""
    ventilation = desk.case.prescription.ventilation
    if ventilation is None:
        return desk.say("words.none")
    kind = desk.say(f"prescribed.{ventilation.kind}")
    if ventilation.power_w is None:
        return kind
    return desk.say("prescribed.power", kind=kind, power=desk.texts.number(ventilation.power_w))


def _prescribed(desk: Desk, oxygen: PrescribedOxygen) -> str:
    return desk.oxygen(oxygen.device_id, oxygen.flow_l_min, oxygen.setting)


def _size(desk: Desk) -> str:
    patient = desk.case.patient
    if patient.height_m is None or patient.mass_kg is None:
        return ""
    height = desk.texts.number(patient.height_m, 2)
    return desk.say("who.size_value", height=height, mass=desk.quantities.mass(patient.mass_kg))


def _diagnosis(desk: Desk) -> str:
    patient = desk.case.patient
    group = desk.say(f"words.diagnosis.{patient.diagnosis}") if patient.diagnosis else desk.quantities.unknown
    return (
        desk.say("who.diagnosis_value", group=group, note=patient.diagnosis_note) if patient.diagnosis_note else group
    )


def _dyspnoea(desk: Desk) -> str:
    grade = desk.case.patient.function.mmrc_dyspnoea
    return desk.quantities.unknown if grade is None else desk.say("who.dyspnoea_value", grade=grade)


def _how(desk: Desk, measurement: AnyMeasurement) -> str:
    state = desk.say(f"words.state.{measurement.state or 'unknown'}")
    gas, place = _gas(desk, measurement.breathing), _place(desk, measurement.place)
    return capital(desk.say("measured.how_value", state=state, gas=gas, place=place))


def _gas(desk: Desk, breathing: Breathing) -> str:
    if breathing.gas == "air":
        return desk.say("measured.on_air")
    if breathing.device_id is None and breathing.fio2 is not None:
        return desk.say("measured.on_fraction", percent=desk.quantities.percent(breathing.fio2 * 100, 1))
    oxygen = desk.oxygen(breathing.device_id, breathing.flow_l_min, breathing.setting)
    return desk.say("measured.on_oxygen", oxygen=oxygen)


def _place(desk: Desk, place: Place) -> str:
    if place.barometric_mmhg is not None:
        return desk.say("measured.at_pressure", pressure=desk.quantities.pressure(place.barometric_mmhg))
    if place.elevation_m is not None:
        return desk.say("measured.at_elevation", elevation=desk.quantities.altitude(place.elevation_m))
    return desk.say("measured.at_unknown")


def _what(desk: Desk, measurement: AnyMeasurement) -> tuple[str, list[str]]:
    """The name of the measurement and its values, each with its unit."""
    say, q, number = desk.say, desk.quantities, desk.texts.number
    pairs: list[tuple[str, object]]
    match measurement:
        case m.BloodGas():
            what = say(f"measured.blood_gas_{measurement.sample}")
            values = gas_values(desk, measurement.pao2_mmhg, measurement.paco2_mmhg, measurement.ph)
            if measurement.sao2_percent is not None:
                values.append(say("measured.sao2", value=q.percent(measurement.sao2_percent, 1)))
            return what, values
        case m.Oximetry():
            what = say("measured.oximetry", activity=desk.activity(measurement.activity))
            pairs = [("spo2", measurement.spo2_percent and q.percent(measurement.spo2_percent, 1))]
            pairs.append(("heart", measurement.heart_rate_min and number(measurement.heart_rate_min)))
        case m.WalkTest():
            what = say("measured.walk_six" if measurement.protocol == "six_minute" else "measured.walk_other")
            pairs = [("lowest", measurement.lowest_spo2_percent and q.percent(measurement.lowest_spo2_percent, 1))]
            pairs.append(("distance", measurement.distance_m and number(measurement.distance_m)))
        case m.LungFunction():
            what = say("measured.lung_function")
            return what, _lung_values(desk, measurement)
        case m.Haemoglobin():
            what = say("measured.haemoglobin")
            pairs = [("hb", measurement.haemoglobin_g_dl and number(measurement.haemoglobin_g_dl, 1))]
        case m.Carboxyhaemoglobin():
            what = say("measured.carboxyhaemoglobin")
            percent = measurement.carboxyhaemoglobin_percent
            pairs = [("cohb", None if percent is None else q.percent(percent, 1))]
        case m.Challenge():
            what = say("measured.challenge")
            if measurement.challenge_fio2 is None:
                return what, []
            length = q.unknown if measurement.duration_min is None else q.duration(measurement.duration_min)
            return what, [
                say("measured.mixture", percent=q.percent(measurement.challenge_fio2 * 100, 1), minutes=length)
            ]
    return what, [say(f"measured.{key}", value=value) for key, value in pairs if value]


def _lung_values(desk: Desk, lung: m.LungFunction) -> list[str]:
    say, number, percent = desk.say, desk.texts.number, desk.quantities.percent
    litres = [("fev1", lung.fev1_l), ("fvc", lung.fvc_l)]
    shares = [("fev1_percent", lung.fev1_percent), ("fvc_percent", lung.fvc_percent), ("tlco", lung.tlco_percent)]
    values = [say(f"measured.{key}", litres=number(value, 2)) for key, value in litres if value]
    return values + [say(f"measured.{key}", percent=percent(value)) for key, value in shares if value]
