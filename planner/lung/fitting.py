"""This person's lung from dated measurements: many lungs that agree with them, and what each does in other air.

One reading fixes one number: the log SD of blood flow over ventilation-perfusion ratio. Shunt, carbon dioxide,
breathing and the model's own error keep their priors. Every draw is made from the same stratified numbers for the
same case, so nothing jitters while a digit is typed.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from planner.air.inspired import WATER_VAPOUR_MMHG
from planner.air.ranges import Array, FloatOrArray, require_within
from planner.errors import InputError
from planner.lung import blood, diffusion, ventilation
from planner.lung.blood_shift import SaturationCurve
from planner.lung.draws import Draws, resampled
from planner.lung.fitted import STRUCTURAL_SD_MMHG, Arterial, FittedLung, model_distance
from planner.lung.gas_exchange import HIGHEST_LOG_SD, exchange
from planner.lung.likelihood import LOG_SDS, UNLIKELY_SD, log_likelihood, po2_over_log_sd
from planner.lung.reading import (
    LOWEST_PAO2_MMHG,
    Activity,
    LungReading,
    Person,
    paco2_sd_mmhg,
    pao2_sd_mmhg,
    trust_sd_mmhg,
    usable,
    widening,
)
from planner.lung.response import RESPIRATORY_QUOTIENT, Body

__all__ = [
    "Arterial",
    "Condition",
    "FittedLung",
    "LungReading",
    "Narrowing",
    "Person",
    "fit_log_sd",
    "fit_lung",
    "narrowing",
]

HAEMOGLOBIN_G_DL = 14.5  # where not measured; planning assumption, 12 to 17 changes the forecast by 0.4 mmHg
# Shunt in stable COPD is below 4 % (Barbera JA et al., Am Rev Respir Dis 1990, from memory); 2 to 4 % of flow in
# pulmonary fibrosis goes to shunt and very low ratios (Agusti AG et al., Am Rev Respir Dis 1991;143:219).
SHUNT_BETA = (1.5, 50.0)
# Log SD: 0.35 to 0.43 in the young and healthy (Wagner PD et al., J Clin Invest 1974;54:54), 0.8 to 1.1 in COPD
# (Rodriguez-Roisin R et al., J Appl Physiol 2009;106:1902), both from memory. The prior is wide: planning assumption.
LOG_SD_PRIOR = (0.8, 0.45)
# PaCO2 where it was not measured, mean and SD; planning assumptions.
PACO2_PRIOR_MMHG = (39.5, 3.5)
PACO2_BOUNDED_PRIOR_MMHG = (46.0, 6.0)
PACO2_BETWEEN = 2.0  # a second reading's PaCO2 counts with this many of its SD: days differ; planning assumption
BASE_EXCESS_DECIMALS = 1  # finer changes saturation by less than 0.05 points, and solved tables stay while typing
EXPECTED_FALL_MMHG = 1.8  # mean of the published falls of PaCO2, sea level to about 8000 ft; see ventilation

NARROWING_DRAWS = 400
LEAST_NARROWING_MMHG = 0.3  # less cannot be told from the choice of draws
LEAST_MIXTURE_STEP = 0.01  # a challenge test nearer than this to what was breathed is none


@dataclass(frozen=True)
class Condition:
    """Air in which the blood is asked for."""

    inspired_po2_mmhg: float
    barometric_mmhg: float
    activity: Activity = "rest"
    hours_at_altitude: float = 0.0


@dataclass(frozen=True)
class Narrowing:
    """What one missing entry would do to the spread (5 to 95 %) of the PaO2 forecast."""

    input_name: str
    spread_now_mmhg: float
    spread_then_mmhg: float


def fit_lung(readings: Sequence[LungReading], person: Person, *, draws: int = 1000, seed: int = 20260101) -> FittedLung:
    """Lungs that agree with these readings, `draws` of them, the same for the same input.

    Each draw takes its shunt, carbon dioxide and breathing from their priors, then its log SD from what the readings
    leave likely; draws are kept in proportion to how well they agree. 50 draws or more.
    Raises InputError when nothing usable was measured, when a reading is outside what the model covers, or when no
    lung explains the readings.
    """
    if draws < 50:
        raise InputError("draws", f"{draws} draws are too few for a spread; 50 or more are allowed.")
    ordered = usable(readings)
    base = ordered[0]
    prior = Draws(draws, seed)
    shunt = prior.beta(*SHUNT_BETA)
    log_sd_place = prior.uniform()
    carbon_z = prior.normal()
    gain = prior.lognormal(ventilation.HYPOXIC_GAIN_L_MIN, ventilation.HYPOXIC_GAIN_VARIATION)
    fall_z, structural_z, anchored_z = prior.normal(), prior.normal(), prior.normal()
    interstitial = person.diagnosis == "interstitial"
    mean, sd = ventilation.WALKING_EXTRA_INTERSTITIAL_MMHG if interstitial else ventilation.WALKING_EXTRA_MMHG
    walking = np.maximum(mean + sd * prior.normal(), 0.0)
    capacity = prior.lognormal(diffusion.CAPACITY_MEDIAN, diffusion.CAPACITY_VARIATION)
    has_capacity = person.diagnosis in diffusion.DIFFUSION_DIAGNOSES
    sleep = np.maximum(ventilation.SLEEP_RISE_MMHG + ventilation.SLEEP_RISE_SPREAD_MMHG * prior.normal(), 0.0)
    acclimatised = np.maximum(1.0 + ventilation.ACCLIMATISED_SPREAD * prior.normal(), 0.0)

    rest_source = next((one for one in ordered if one.paco2_mmhg is not None and not one.challenge), None)
    rest_pco2 = _rest_pco2(rest_source, person, carbon_z)
    body = _body(ordered, person)
    curve = SaturationCurve(body.haemoglobin_g_dl, body.base_excess_mmol_l)
    told = np.zeros((draws, LOG_SDS.size))
    for reading in ordered:
        distance = ventilation.share_of_reference_fall(base.inspired_po2_mmhg, reading.inspired_po2_mmhg)
        pco2 = rest_pco2
        if person.can_hyperventilate:
            fall = EXPECTED_FALL_MMHG * np.sqrt(gain / ventilation.HYPOXIC_GAIN_L_MIN) * distance
            pco2 = rest_pco2 - fall + ventilation.FALL_SPREAD_MMHG * fall_z * distance
        fio2 = np.clip(reading.fio2 + reading.fio2_spread * prior.normal(), 0.1, 1.0)
        po2 = po2_over_log_sd(reading, fio2, pco2, shunt, body)
        away = model_distance(base.inspired_po2_mmhg, reading.inspired_po2_mmhg)
        po2 = po2 + (STRUCTURAL_SD_MMHG * structural_z * away)[:, None]
        if has_capacity:
            fall_mmhg = min(base.inspired_po2_mmhg, ventilation.SEA_LEVEL_INSPIRED_MMHG) - reading.inspired_po2_mmhg
            po2 = po2 - diffusion.diffusion_fall_mmhg(capacity, np.array(fall_mmhg))[:, None]
        told += log_likelihood(reading, person, po2, pco2, curve)
        if reading is not rest_source and reading.paco2_mmhg is not None:
            told -= (0.5 * ((pco2 - reading.paco2_mmhg) / (PACO2_BETWEEN * paco2_sd_mmhg(reading))) ** 2)[:, None]
    best = told.max()
    if best < -0.5 * UNLIKELY_SD**2 * len(ordered):
        raise InputError("readings", _unexplained(ordered))
    density = np.exp(told - best - 0.5 * ((LOG_SDS - LOG_SD_PRIOR[0]) / LOG_SD_PRIOR[1]) ** 2)
    log_sd, weight = _drawn_log_sd(density, log_sd_place)
    kept = resampled(weight)
    anchors = tuple({one.inspired_po2_mmhg: None for one in ordered if one is base or one.challenge})
    return FittedLung(
        person=person,
        body=body,
        log_sd=log_sd[kept],
        shunt=shunt[kept],
        paco2_mmhg=rest_pco2[kept],
        hypoxic_gain_l_min=gain[kept],
        fall_z=fall_z[kept],
        structural_z=structural_z[kept],
        anchored_z=anchored_z[kept],
        walking_extra_mmhg=walking[kept],
        diffusing_capacity=capacity[kept] if has_capacity else None,
        sleep_rise_mmhg=sleep[kept],
        acclimatised_exponent=ventilation.ACCLIMATISED_EXPONENT * acclimatised[kept],
        base_inspired_mmhg=base.inspired_po2_mmhg,
        anchors_mmhg=anchors,
        widened=widening(ordered, person),
    )


def fit_log_sd(
    pao2_mmhg: FloatOrArray,
    paco2_mmhg: FloatOrArray,
    inspired_po2_mmhg: FloatOrArray,
    barometric_mmhg: FloatOrArray,
    shunt: FloatOrArray = 0.03,
    **body: FloatOrArray,
) -> FloatOrArray:
    """The log SD with which a lung of this shunt has this arterial PO2 in this air.

    Searched on nets of 41 log SDs, each 40 times finer; exact to 0.001. body: the keywords of
    gas_exchange.arterial_po2_mmhg, here for a patient at rest where not given (haemoglobin 14.5 g/dL, uptake 0.25 and
    cardiac output 5.2 L/min, quotient 0.82). Raises InputError where even an even lung is lower, or none is as low.
    """
    target = np.asarray(pao2_mmhg, dtype=np.float64)[..., None]
    air = (inspired_po2_mmhg, barometric_mmhg, paco2_mmhg, shunt)
    given = [np.asarray(one, dtype=np.float64)[..., None] for one in air]
    at_rest = {
        "haemoglobin_g_dl": HAEMOGLOBIN_G_DL,
        "oxygen_uptake_l_min": Body.oxygen_uptake_l_min,
        "respiratory_quotient": RESPIRATORY_QUOTIENT,
        "cardiac_output_l_min": Body.cardiac_output_l_min,
    } | body
    extra = {name: np.asarray(value, dtype=np.float64)[..., None] for name, value in at_rest.items()}
    shape = np.broadcast_shapes(target.shape, *(one.shape for one in given))
    low, high = np.zeros(shape), np.full(shape, HIGHEST_LOG_SD)
    share = np.linspace(0.0, 1.0, 41)
    for finer in range(3):
        net = low + (high - low) * share
        po2 = exchange(given[0], given[1], given[2], net, given[3], nodes=40, **extra).po2_mmhg
        above = po2 > target  # False where below the model's range
        count = above.sum(axis=-1, keepdims=True)
        if finer == 0 and (count == 0).any():
            raise InputError("pao2_mmhg", "This PaO2 is above what a lung without any unevenness has in this air.")
        if finer == 0 and (count == share.size).any():
            raise InputError("pao2_mmhg", "Below model range: this PaO2 is lower than any unevenness explains.")
        count = np.clip(count, 1, share.size - 1)  # a target on a node may fall either side of it
        low, high = np.take_along_axis(net, count - 1, -1), np.take_along_axis(net, count, -1)
        at_low, at_high = np.take_along_axis(po2, count - 1, -1), np.take_along_axis(po2, count, -1)
    if np.isnan(at_high).any():
        raise InputError("pao2_mmhg", "Below model range: this PaO2 is lower than any unevenness explains.")
    found = (low + (high - low) * (at_low - target) / (at_low - at_high))[..., 0]
    return found if found.ndim else float(found)


def narrowing(
    readings: Sequence[LungReading],
    person: Person,
    condition: Condition,
    *,
    fitted: FittedLung | None = None,
    seed: int = 20260101,
) -> tuple[Narrowing, ...]:
    """Which missing entry would narrow the forecast most: first the one that would most; only those that would.

    For each, the lung is fitted again with that entry added at the value now expected. fitted: this person's lung where
    there is one already; the lungs solved for it are read again. Raises what fit_lung raises.
    """
    ordered = usable(readings)
    now = fit_lung(ordered, person, draws=NARROWING_DRAWS, seed=seed)
    now = now if fitted is None else now.with_tables_of(fitted)
    spread_now = _spread_mmhg(now, condition)
    found = []
    for name, more_readings, more_person in _with_one_more(ordered, person, condition, now):
        more = fit_lung(more_readings, more_person, draws=NARROWING_DRAWS, seed=seed)
        then = _spread_mmhg(more.with_tables_of(now), condition)
        if then < spread_now - LEAST_NARROWING_MMHG:
            found.append(Narrowing(name, spread_now, then))
    return tuple(sorted(found, key=lambda one: one.spread_then_mmhg))


def _with_one_more(
    ordered: tuple[LungReading, ...], person: Person, condition: Condition, now: FittedLung
) -> Iterator[tuple[str, tuple[LungReading, ...], Person]]:
    """Each entry that is missing, with the case as it would be if it were known."""
    base = ordered[0]
    expected = now.arterial(base.inspired_po2_mmhg, base.barometric_mmhg)
    gas = LungReading(
        base.barometric_mmhg,
        base.fio2,
        pao2_mmhg=max(float(np.median(expected.po2_mmhg)), LOWEST_PAO2_MMHG),
        paco2_mmhg=float(np.median(expected.paco2_mmhg)),
        sample="arterial",
        age_days=0.0,
    )
    if pao2_sd_mmhg(gas) < trust_sd_mmhg(base):
        yield "a fresh arterial blood gas", (gas, *ordered), person
    elif base.paco2_mmhg is None:
        yield "the arterial carbon dioxide", (replace(base, paco2_mmhg=gas.paco2_mmhg), *ordered[1:]), person
    if any(one.age_days is None for one in ordered):
        dated = tuple(replace(one, age_days=one.age_days or 0.0) for one in ordered)
        yield "the date of the measurement", dated, person
    if person.skin is None and any(one.spo2_fraction is not None for one in ordered):
        yield "the skin pigmentation", ordered, replace(person, skin="light")
    mixture = condition.inspired_po2_mmhg / (base.barometric_mmhg - WATER_VAPOUR_MMHG)
    if not any(one.challenge for one in ordered) and 0.10 <= mixture < base.fio2 - LEAST_MIXTURE_STEP:
        there = now.arterial(condition.inspired_po2_mmhg, base.barometric_mmhg)
        test = LungReading(
            base.barometric_mmhg,
            mixture,
            pao2_mmhg=max(float(np.median(there.po2_mmhg)), LOWEST_PAO2_MMHG),
            paco2_mmhg=float(np.median(there.paco2_mmhg)),
            sample="arterial",
            age_days=0.0,
            challenge=True,
        )
        yield "a hypoxic challenge test with a blood gas", (*ordered, test), person


def _spread_mmhg(fitted: FittedLung, condition: Condition) -> float:
    blood_there = fitted.arterial(
        condition.inspired_po2_mmhg,
        condition.barometric_mmhg,
        activity=condition.activity,
        hours_at_altitude=condition.hours_at_altitude,
    )
    low, high = np.quantile(blood_there.po2_mmhg, (0.05, 0.95))
    return float(high - low)


def _rest_pco2(source: LungReading | None, person: Person, z: Array) -> Array:
    """Arterial PCO2 at rest: as measured on the ground, else the usual range."""
    if source is not None and source.paco2_mmhg is not None:
        return np.clip(source.paco2_mmhg + paco2_sd_mmhg(source) * z, 12.0, 115.0)
    mean, sd = PACO2_PRIOR_MMHG if person.can_hyperventilate else PACO2_BOUNDED_PRIOR_MMHG
    return np.clip(mean + sd * z, 20.0, 115.0)


def _body(ordered: Sequence[LungReading], person: Person) -> Body:
    haemoglobin = person.haemoglobin_g_dl or HAEMOGLOBIN_G_DL
    haemoglobin *= 1.0 - (person.carboxyhaemoglobin_fraction or 0.0)
    gas = next((one for one in ordered if one.ph is not None and one.paco2_mmhg is not None), None)
    if gas is None or gas.ph is None or gas.paco2_mmhg is None:
        return Body(haemoglobin, 0.0)
    saturated = gas.spo2_fraction or float(blood.saturation(gas.pao2_mmhg or 70.0, gas.ph, gas.paco2_mmhg))
    told = float(blood.base_excess_mmol_l(gas.ph, gas.paco2_mmhg, saturated, haemoglobin))
    excess = round(told, BASE_EXCESS_DECIMALS)
    require_within("ph", "Base excess from pH and PaCO2", excess, -25.0, 30.0, "mmol/L")
    return Body(haemoglobin, excess)


def _drawn_log_sd(density: Array, place: Array) -> tuple[Array, Array]:
    """For each row of a density over LOG_SDS: the quantile at its place, and the weight of the row."""
    sums = np.zeros(density.shape)
    np.cumsum(0.5 * (density[:, 1:] + density[:, :-1]), axis=1, out=sums[:, 1:])
    weight = sums[:, -1]
    wanted = (place * weight)[:, None]
    index = np.clip((sums <= wanted).sum(axis=1) - 1, 0, LOG_SDS.size - 2)[:, None]
    low, high = np.take_along_axis(sums, index, 1), np.take_along_axis(sums, index + 1, 1)
    share = np.where(high > low, (wanted - low) / np.where(high > low, high - low, 1.0), 0.0)[:, 0]
    step = LOG_SDS[1] - LOG_SDS[0]
    return LOG_SDS[index[:, 0]] + share * step, weight


def _unexplained(ordered: Sequence[LungReading]) -> str:
    if len(ordered) > 1:
        return "The measurements contradict each other more than their errors allow; check their values and dates."
    return "No lung explains this measurement in the air it was taken in; check the value and what was breathed."
