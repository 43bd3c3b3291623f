"""Which of the dated measurements each method uses, in numbers, and what is doubtful about them.

Nothing is guessed: a pressure that is not known is asked for, a contradiction is asked about, an old or unstable
value is used and marked.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import date
from typing import Literal, TypeVar

from planner.air.atmosphere import station_pressure_mmhg
from planner.air.inspired import AIR_OXYGEN, WATER_VAPOUR_MMHG
from planner.case import Case
from planner.case.measurements import (
    BloodGas,
    Carboxyhaemoglobin,
    Challenge,
    Haemoglobin,
    LungFunction,
    Measurement,
    Oximetry,
    Place,
    WalkTest,
)
from planner.delivery.cannula import GAIN_MEDIAN_MMHG_PER_L_MIN, GAIN_VARIATION, SEA_LEVEL_MMHG
from planner.errors import InputError
from planner.lung.blood import saturation
from planner.lung.reading import LungReading, Person
from planner.units import kpa_from_mmhg

OLD_DAYS = (
    42  # a gas weeks old did not predict (Schwartz JS et al., Ann Intern Med 1984;100:473); 6 weeks: common practice
)
AT_ALTITUDE_M = 300.0  # above it a ground value is not a sea-level value; planning assumption
CONTRADICTION = 0.06  # saturation apart by more than this between oximeter and gas of the same day; planning assumption
CANNOT_HYPERVENTILATE = {"neuromuscular", "chest_wall", "obesity_hypoventilation"}
HYPERCAPNIA_MMHG = 45.0  # 6 kPa, the usual definition
# Fraction of oxygen that a cannula adds at rest, from the gain that titration uses, so that both mean the same breath.
CANNULA_FRACTION_PER_L_MIN = GAIN_MEDIAN_MMHG_PER_L_MIN / (SEA_LEVEL_MMHG - WATER_VAPOUR_MMHG)
CANNULA_SPREAD_PER_L_MIN = GAIN_VARIATION * CANNULA_FRACTION_PER_L_MIN

Kind = TypeVar("Kind", bound=Measurement)


@dataclass(frozen=True)
class Note:
    """Something to know, to ask, or to mend about the measurements; test: a fresh measurement or test is advised."""

    kind: Literal["ask", "contradiction", "old", "state", "place", "oximetry", "oxygen"]
    text: str
    test: bool = False


@dataclass(frozen=True)
class OxygenResponse:
    """Blood measured on oxygen from a device at a flow or setting, on the ground, beside a value on air."""

    device_id: str
    amount: float
    barometric_mmhg: float
    spo2_fraction: float | None
    pao2_mmhg: float | None


@dataclass(frozen=True)
class Baseline:
    """The ground values, in numbers, with where and when they were taken. None: not measured, or not usable."""

    gas: BloodGas | None
    gas_barometric_mmhg: float | None
    gas_elevation_m: float | None
    pao2_mmhg: float | None
    paco2_mmhg: float | None
    spo2_percent: float | None
    spo2_taken_on: date | None
    walk_lowest_percent: float | None
    fev1_l: float | None
    fev1_percent: float | None
    fvc_l: float | None
    fvc_percent: float | None
    tlco_percent: float | None
    haemoglobin_g_dl: float | None
    challenge: Challenge | None
    lung_readings: tuple[LungReading, ...]
    responses: tuple[OxygenResponse, ...]
    person: Person
    notes: tuple[Note, ...]


def read_baseline(case: Case, on: date | None) -> Baseline:
    """What the measurements give, counted to the day `on` (None: ages are not known). Never raises for a valid case."""
    notes: list[Note] = []
    gas = _latest(case, BloodGas, lambda one: one.pao2_mmhg is not None and one.breathing.gas == "air")
    oximetry = _latest(
        case,
        Oximetry,
        lambda one: one.spo2_percent is not None and one.activity == "rest" and one.breathing.gas == "air",
    )
    walk = _latest(case, WalkTest, lambda one: one.lowest_spo2_percent is not None)
    function = _latest(case, LungFunction, lambda _: True)
    haemoglobin = _latest(case, Haemoglobin, lambda one: one.haemoglobin_g_dl is not None)
    carboxy = _latest(case, Carboxyhaemoglobin, lambda one: one.carboxyhaemoglobin_percent is not None)
    challenge = _latest(case, Challenge, lambda one: one.challenge_fio2 is not None)
    paco2 = gas.paco2_mmhg if gas is not None else None
    person = Person(
        diagnosis=case.patient.diagnosis,
        age_years=case.patient.age_years,
        haemoglobin_g_dl=None if haemoglobin is None else haemoglobin.haemoglobin_g_dl,
        carboxyhaemoglobin_fraction=None if carboxy is None else (carboxy.carboxyhaemoglobin_percent or 0.0) / 100.0,
        skin=case.patient.skin_pigmentation,
        can_hyperventilate=not (
            case.patient.diagnosis in CANNOT_HYPERVENTILATE
            or bool(case.patient.carbon_dioxide_risk.past_hypercapnia)
            or (paco2 is not None and paco2 > HYPERCAPNIA_MMHG)
        ),
    )
    on_air = any(_says_oxygen(one) and one.breathing.gas == "air" for one in case.measurements)
    responses = [one for measured in case.measurements if on_air and (one := _response(measured)) is not None]
    readings = [
        reading
        for measured in case.measurements
        if not (on_air and _response(measured) is not None)
        if (reading := _lung_reading(measured, on, notes)) is not None
    ]
    barometric = None if gas is None else _pressure(gas.place)
    notes += _doubts(gas, oximetry, on)
    return Baseline(
        gas=gas,
        gas_barometric_mmhg=barometric,
        gas_elevation_m=None if gas is None else gas.place.elevation_m,
        pao2_mmhg=gas.pao2_mmhg if gas is not None else None,
        paco2_mmhg=paco2,
        spo2_percent=oximetry.spo2_percent if oximetry is not None else None,
        spo2_taken_on=oximetry.taken_on if oximetry is not None else None,
        walk_lowest_percent=walk.lowest_spo2_percent if walk is not None else None,
        fev1_l=function.fev1_l if function is not None else None,
        fev1_percent=function.fev1_percent if function is not None else None,
        fvc_l=function.fvc_l if function is not None else None,
        fvc_percent=function.fvc_percent if function is not None else None,
        tlco_percent=function.tlco_percent if function is not None else None,
        haemoglobin_g_dl=person.haemoglobin_g_dl,
        challenge=challenge,
        lung_readings=tuple(readings),
        responses=tuple(responses),
        person=person,
        notes=tuple(dict.fromkeys(notes)),
    )


def age_days(measured: Measurement, on: date | None) -> float | None:
    """Days from the measurement to the day `on`; None when either is not known or the date lies after it."""
    if on is None or measured.taken_on is None or measured.taken_on > on:
        return None
    return float((on - measured.taken_on).days)


def _latest(case: Case, kind: type[Kind], wanted: object) -> Kind | None:
    fitting = [one for one in case.measurements if isinstance(one, kind) and wanted(one)]  # type: ignore[operator]
    return max(fitting, key=lambda one: one.taken_on or date.min, default=None)


def _pressure(place: Place) -> float | None:
    if place.elevation_m is None and place.barometric_mmhg is None:
        return None
    return station_pressure_mmhg(place.elevation_m, place.barometric_mmhg)


def _lung_reading(measured: Measurement, on: date | None, notes: list[Note]) -> LungReading | None:
    """A measurement as the lung model takes it, or None where it says nothing of oxygen at rest or lacks its air."""
    wanted = isinstance(measured, (BloodGas, Challenge)) or (
        isinstance(measured, Oximetry) and measured.activity == "rest"
    )
    if not wanted:
        return None
    barometric = _pressure(measured.place)
    what = _words(measured)
    if barometric is None:
        notes.append(Note("ask", f"Where was the {what} taken? Enter the elevation or the station pressure."))
        return None
    fio2, fio2_spread = _breathed(measured, what, notes)
    if fio2 is None:
        return None
    age, stable = age_days(measured, on), measured.state in (None, "stable")
    try:
        if isinstance(measured, BloodGas) and measured.pao2_mmhg is not None:
            return LungReading(
                barometric, fio2, measured.pao2_mmhg, measured.paco2_mmhg, measured.ph, None, measured.sample,
                fio2_spread, age, stable,
            )  # fmt: skip
        if isinstance(measured, Oximetry) and measured.spo2_percent is not None:
            return LungReading(
                barometric, fio2, spo2_fraction=measured.spo2_percent / 100.0, fio2_spread=fio2_spread, age_days=age,
                stable=stable,
            )  # fmt: skip
        if isinstance(measured, Challenge):
            return _challenge_reading(measured, barometric, age, stable)
    except InputError as error:
        notes.append(Note("ask", error.message))
    return None


def _says_oxygen(measured: Measurement) -> bool:
    """A PaO2 or a resting SpO2 was measured, other than in a challenge test."""
    if isinstance(measured, BloodGas):
        return measured.pao2_mmhg is not None
    return isinstance(measured, Oximetry) and measured.activity == "rest" and measured.spo2_percent is not None


def _response(measured: Measurement) -> OxygenResponse | None:
    """A value on oxygen from a known device and amount: it teaches what the device adds, not what the lung is."""
    breathing, barometric = measured.breathing, _pressure(measured.place)
    amount = breathing.flow_l_min if breathing.flow_l_min is not None else breathing.setting
    if not _says_oxygen(measured) or breathing.gas != "oxygen" or breathing.fio2 is not None:
        return None
    if breathing.device_id is None or amount is None or barometric is None:
        return None
    spo2 = measured.spo2_percent if isinstance(measured, Oximetry) else None
    pao2 = measured.pao2_mmhg if isinstance(measured, BloodGas) else None
    return OxygenResponse(breathing.device_id, amount, barometric, None if spo2 is None else spo2 / 100.0, pao2)


def _challenge_reading(test: Challenge, barometric: float, age: float | None, stable: bool) -> LungReading | None:
    """The gas at the end of the challenge on the mixture, or the lowest SpO2 where no gas was taken."""
    if test.challenge_fio2 is None:
        return None
    gas = next((one for one in test.gases if one.phase == "challenge" and one.pao2_mmhg is not None), None)
    if gas is not None:
        return LungReading(
            barometric,
            test.challenge_fio2,
            gas.pao2_mmhg,
            gas.paco2_mmhg,
            gas.ph,
            None,
            gas.sample,
            0.0,
            age,
            stable,
            True,
        )
    lowest = [one.spo2_percent for one in test.rows if one.phase == "challenge" and one.spo2_percent is not None]
    if not lowest:
        return None
    return LungReading(
        barometric, test.challenge_fio2, spo2_fraction=min(lowest) / 100.0, age_days=age, stable=stable, challenge=True
    )


def _breathed(measured: Measurement, what: str, notes: list[Note]) -> tuple[float | None, float]:
    """Fraction of oxygen breathed and its SD."""
    breathing = measured.breathing
    if isinstance(measured, Challenge) or breathing.gas == "air":
        return AIR_OXYGEN, 0.0
    if breathing.fio2 is not None:
        return breathing.fio2, 0.0
    if breathing.flow_l_min is not None and (breathing.device_id or "cannula").startswith(("cannula", "airline")):
        flow = breathing.flow_l_min
        return AIR_OXYGEN + CANNULA_FRACTION_PER_L_MIN * flow, CANNULA_SPREAD_PER_L_MIN * flow
    notes.append(Note("oxygen", f"What was breathed when the {what} was taken? Enter the fraction of oxygen."))
    return None, 0.0


def _doubts(gas: BloodGas | None, oximetry: Oximetry | None, on: date | None) -> Iterable[Note]:
    if gas is None:
        if oximetry is not None:
            yield Note("oximetry", "There is oximetry alone. A blood gas would narrow the spread.", test=True)
    else:
        yield from _doubts_of(gas, on)
        if gas.place.elevation_m is not None and gas.place.elevation_m > AT_ALTITUDE_M:
            yield Note(
                "place",
                f"The blood gas was taken at {gas.place.elevation_m:.0f} m. Equations made from sea-level values do "
                "not apply to it; the fitted lung does.",
            )
    if oximetry is not None:
        yield from _doubts_of(oximetry, on)
    if gas is not None and oximetry is not None and gas.taken_on == oximetry.taken_on:
        yield from _contradiction(gas, oximetry)


def _doubts_of(measured: BloodGas | Oximetry, on: date | None) -> Iterable[Note]:
    what = _words(measured)
    age = age_days(measured, on)
    if measured.taken_on is None:
        yield Note("ask", f"When was the {what} taken? Its age widens the spread.")
    elif on is not None and measured.taken_on > on:
        yield Note(
            "contradiction", f"The {what} is dated {measured.taken_on:%d %b %Y}, after the day of the assessment."
        )
    elif age is not None and age > OLD_DAYS:
        yield Note("old", f"The {what} is {age:.0f} days old. Values this old predicted poorly; repeat it.", test=True)
    if measured.state in ("exacerbation", "recovering"):
        yield Note("state", f"The {what} was not taken in a stable state. Repeat it when stable.", test=True)


def _contradiction(gas: BloodGas, oximetry: Oximetry) -> Iterable[Note]:
    if gas.pao2_mmhg is None or oximetry.spo2_percent is None:
        return
    expected = saturation(gas.pao2_mmhg, gas.ph or 7.4, gas.paco2_mmhg or 40.0)
    if abs(expected - oximetry.spo2_percent / 100.0) > CONTRADICTION:
        yield Note(
            "contradiction",
            f"SpO₂ {oximetry.spo2_percent:g} % and PaO₂ {gas.pao2_mmhg:.0f} mmHg "
            f"({kpa_from_mmhg(gas.pao2_mmhg):.1f} kPa) of the same day do not belong together: that PaO₂ goes with "
            f"about {100 * expected:.0f} %. Which is right?",
            test=True,
        )


def _words(measured: Measurement) -> str:
    names: Sequence[tuple[type[Measurement], str]] = (
        (BloodGas, "blood gas"),
        (Oximetry, "oximetry"),
        (Challenge, "hypoxic challenge test"),
    )
    return next((words for kind, words in names if isinstance(measured, kind)), "measurement")
