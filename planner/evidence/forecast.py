"""All predictors side by side for each part of the trip: what applies, how far it spreads, and whether they agree.

No predictor is used alone and none is averaged with another. Those outside their range stand greyed with the reason and
take no part in the verdict. Every number here is for air; delivery adds oxygen.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import erf, sqrt
from typing import Literal

import numpy as np

from planner.air.atmosphere import isa_altitude_m
from planner.air.ranges import Array
from planner.case.policy import Policy
from planner.case.trip import Activity
from planner.evidence.baseline import Baseline
from planner.evidence.ceiling import (
    EXPECTED_FALL_MMHG,
    RATIO_SOURCE,
    RATIO_SPREAD_MMHG,
    ceiling_po2_mmhg,
    constant_ratio_po2_mmhg,
)
from planner.evidence.measured import challenge_predictor
from planner.evidence.predictor import PredictorResult
from planner.evidence.regressions import Regression, all_regressions, predict
from planner.lung.fitting import FittedLung
from planner.trip.itinerary import PartSpan

LOW, HIGH = 0.05, 0.95
LIKELY = 0.8  # chance from which "likely" is said; planning assumption
SPREAD_TO_SD = 1.645  # spreads are 90 % of a normal
DISAGREE_MMHG = 5.0  # applying methods whose middles lie on both sides of a threshold and this far apart disagree

Verdict = Literal["likely below", "uncertain", "likely above"]
Agreement = Literal["agree", "disagree", "one method only", "none"]


@dataclass(frozen=True)
class Against:
    """One threshold of PaO2, and what all applying methods together say about it."""

    threshold_mmhg: float
    verdict: Verdict
    chance_below: float | None  # of the fitted lung; of the methods' mean chance where no lung is fitted


@dataclass(frozen=True)
class Middle:
    """Median and 90 % spread."""

    median: float
    low: float
    high: float


@dataclass(frozen=True)
class ActivityForecast:
    """One activity in one part, on air. Saturations are fractions; None where no lung could be fitted."""

    activity: Activity
    share: float
    predictors: tuple[PredictorResult, ...]
    pao2_mmhg: Middle | None
    spo2: Middle | None
    paco2_mmhg: Middle | None
    against: tuple[Against, ...]
    spo2_chance_below: float | None
    agreement: Agreement
    below_model_range: bool


@dataclass(frozen=True)
class PartForecast:
    """One part: its activities, rest always first, and why a test is advised."""

    part_id: str
    activities: tuple[ActivityForecast, ...]
    test_advised: bool
    why: tuple[str, ...]

    def activity(self, name: Activity) -> ActivityForecast | None:
        """The forecast of one activity, or None where the part has none of it."""
        return next((one for one in self.activities if one.activity == name), None)


def forecast(
    spans: Sequence[PartSpan], baseline: Baseline, fitted: FittedLung | None, policy: Policy
) -> tuple[PartForecast, ...]:
    """The forecast of every part whose air is known, at its worst moment."""
    known = [span for span in spans if span.lowest_barometric_mmhg is not None]
    blood = {} if fitted is None else _blood_of(known, fitted)
    by_pressure = {span.lowest_barometric_mmhg: span for span in known}
    published = {pressure: _published(span, baseline) for pressure, span in by_pressure.items()}
    return tuple(_part(span, baseline, fitted, blood, published[span.lowest_barometric_mmhg], policy) for span in known)


@dataclass(frozen=True, eq=False)
class _Blood:
    """One activity in one part: its draws, and their middles."""

    po2_mmhg: Array
    saturation: Array
    po2: Middle
    spo2: Middle
    paco2: Middle
    below_range: bool


def _activities(span: PartSpan) -> list[Activity]:
    return ["rest", *(name for name in ("walking", "asleep") if span.shares[name] > 0.0)]


def _blood_of(spans: Sequence[PartSpan], fitted: FittedLung) -> dict[tuple[str, Activity], _Blood]:
    """Arterial blood of every part and activity, one call of the lung for each activity."""
    found: dict[tuple[str, Activity], _Blood] = {}
    for activity in ("rest", "walking", "asleep"):
        here = {span.part_id: _air(span) for span in spans if activity in _activities(span)}
        if not here:
            continue
        distinct = list(dict.fromkeys(here.values()))  # the way back is often as the way out
        inspired, barometric, hours = np.array(distinct, dtype=np.float64).T
        blood = fitted.arterial(inspired, barometric, activity=activity, hours_at_altitude=hours)
        po2, spo2, paco2 = (_middles(one) for one in (blood.po2_mmhg, blood.saturation, blood.paco2_mmhg))
        of_air = {
            air: _Blood(
                blood.po2_mmhg[:, column],
                blood.saturation[:, column],
                po2[column],
                spo2[column],
                paco2[column],
                bool(blood.below_range[column]),
            )
            for column, air in enumerate(distinct)
        }
        found |= {(part_id, activity): of_air[air] for part_id, air in here.items()}
    return found


def _air(span: PartSpan) -> tuple[float, float, float]:
    """Inspired PO2, barometric pressure (mmHg) and hours of getting used to it, at the worst moment of a part."""
    assert span.lowest_inspired_po2_mmhg is not None
    assert span.lowest_barometric_mmhg is not None
    hours = span.hours_at_altitude if span.altitude_kind == "ground" else 0.0
    return span.lowest_inspired_po2_mmhg, span.lowest_barometric_mmhg, hours


def _part(
    span: PartSpan,
    baseline: Baseline,
    fitted: FittedLung | None,
    blood: Mapping[tuple[str, Activity], _Blood],
    published: Sequence[PredictorResult],
    policy: Policy,
) -> PartForecast:
    activities = tuple(
        _activity(span, name, baseline, fitted, blood.get((span.part_id, name)), published, policy)
        for name in _activities(span)
    )
    why = _why_test(activities, baseline, policy)
    return PartForecast(span.part_id, activities, bool(why), why)


def _activity(
    span: PartSpan,
    activity: Activity,
    baseline: Baseline,
    fitted: FittedLung | None,
    blood: _Blood | None,
    published: Sequence[PredictorResult],
    policy: Policy,
) -> ActivityForecast:
    predictors: list[PredictorResult] = []
    if fitted is not None and blood is not None:
        predictors.append(_lung_predictor(blood.po2, fitted, baseline, blood.below_range))
    if activity == "rest":
        measured = challenge_predictor(baseline, span)
        predictors += [] if measured is None else [measured]
        predictors += published
    applying = [one for one in predictors if one.applies]
    thresholds = (policy.lower_threshold_mmhg, policy.upper_threshold_mmhg)
    draws = None if blood is None else blood.po2_mmhg
    return ActivityForecast(
        activity=activity,
        share=span.shares[activity],
        predictors=tuple(predictors),
        pao2_mmhg=None if blood is None else blood.po2,
        spo2=None if blood is None else blood.spo2,
        paco2_mmhg=None if blood is None else blood.paco2,
        against=tuple(_against(threshold, applying, draws) for threshold in thresholds) if applying else (),
        spo2_chance_below=None
        if blood is None
        else float(np.mean(blood.saturation < policy.spo2_threshold_percent / 100.0)),
        agreement=_agreement(applying, policy.lower_threshold_mmhg),
        below_model_range=blood is not None and blood.below_range,
    )


def _middles(values: Array) -> list[Middle]:
    """Median and spread of each column of draws."""
    low, median, high = np.quantile(values, (LOW, 0.5, HIGH), axis=0).tolist()
    return [Middle(*one) for one in zip(median, low, high, strict=True)]


def _lung_predictor(blood: Middle, fitted: FittedLung, baseline: Baseline, below_range: bool) -> PredictorResult:
    taken = baseline.gas.taken_on if baseline.gas is not None else baseline.spo2_taken_on
    kind = "blood gas" if baseline.gas is not None else "oximetry alone"
    inputs = tuple(
        _reading_words(one.pao2_mmhg, one.spo2_fraction, one.barometric_mmhg, one.fio2)
        for one in baseline.lung_readings
    )
    return PredictorResult(
        predictor_id="this_lung",
        label="This lung, fitted",
        detail=f"{kind} of {taken:%d %b %Y}" if taken else kind,
        pao2_mmhg=blood.median,
        low_mmhg=blood.low,
        high_mmhg=blood.high,
        applies=not below_range,
        reasons=("Below model range: most draws have a PaO₂ of 25 mmHg or lower.",) if below_range else fitted.widened,
        population="Made from this person's own measurements",
        formula="Log-normal spread of blood flow over ventilation-perfusion ratio with shunt, solved for oxygen, "
        "carbon dioxide and pH; the spread of the ratio is fitted to the measurements",
        source="West JB, Respir Physiol 1969;7:88 (log-normal lung, from memory); Severinghaus JW, J Appl Physiol "
        "1979;46:599; Douglas AR et al., J Appl Physiol 1988;65:473",
        inputs=inputs,
    )


def _reading_words(pao2: float | None, spo2: float | None, barometric: float, fio2: float) -> tuple[str, str]:
    if pao2 is not None:
        return "PaO₂", f"{pao2:.1f} mmHg at {barometric:.0f} mmHg, oxygen fraction {fio2:.3f}"
    return "SpO₂", f"{100 * (spo2 or 0.0):.0f} % at {barometric:.0f} mmHg, oxygen fraction {fio2:.3f}"


def _published(span: PartSpan, baseline: Baseline) -> tuple[PredictorResult, ...]:
    """The regressions and the constant ratio, which ask of a part only its pressure."""
    altitude = _pressure_altitude_m(span)
    return *(_regression(one, altitude, baseline) for one in all_regressions()), _ratio(span, baseline)


def _regression(regression: Regression, altitude: float, baseline: Baseline) -> PredictorResult:
    given = {
        "pao2_mmhg": baseline.pao2_mmhg,
        "fev1_l": baseline.fev1_l,
        "fev1_percent": baseline.fev1_percent,
        "tlco_percent": baseline.tlco_percent,
    }
    used = {key: given[key] for key in regression.inputs}
    prediction = predict(
        regression.id,
        altitude_m=altitude,
        diagnosis=baseline.person.diagnosis,
        baseline_elevation_m=_ground_elevation_m(baseline),
        **used,
    )
    units = {"pao2_mmhg": "mmHg", "fev1_l": "L"}
    inputs = tuple((key, f"{value:g} {units.get(key, '%')}") for key, value in used.items() if value is not None)
    return PredictorResult(
        predictor_id=regression.id,
        label=regression.name,
        detail=regression.detail,
        pao2_mmhg=prediction.pao2_mmhg,
        low_mmhg=prediction.low_mmhg,
        high_mmhg=prediction.high_mmhg,
        applies=prediction.applies,
        reasons=tuple(prediction.reasons),
        population=regression.population,
        formula=regression.formula(),
        source=regression.source if regression.seen else f"{regression.source} (coefficients from memory)",
        inputs=(*inputs, ("altitude", f"{altitude:.0f} m")),
    )


def _ratio(span: PartSpan, baseline: Baseline) -> PredictorResult:
    assert span.lowest_barometric_mmhg is not None
    missing = [
        words
        for words, value in (
            ("PaO₂ on the ground", baseline.pao2_mmhg),
            ("PaCO₂ on the ground", baseline.paco2_mmhg),
            ("The pressure where the gas was taken", baseline.gas_barometric_mmhg),
        )
        if value is None
    ]
    pao2 = low = high = None
    if baseline.pao2_mmhg is not None and baseline.paco2_mmhg is not None and baseline.gas_barometric_mmhg is not None:
        fall = EXPECTED_FALL_MMHG if baseline.person.can_hyperventilate else 0.0
        pao2 = constant_ratio_po2_mmhg(
            baseline.pao2_mmhg, baseline.paco2_mmhg, baseline.gas_barometric_mmhg, span.lowest_barometric_mmhg, fall
        )
        low, high = pao2 - RATIO_SPREAD_MMHG, pao2 + RATIO_SPREAD_MMHG
    return PredictorResult(
        predictor_id="constant_ratio",
        label="Constant a/A ratio",
        detail="any altitude",
        pao2_mmhg=pao2,
        low_mmhg=low,
        high_mmhg=None if high is None else min(high, max(pao2 or 0.0, ceiling_po2_mmhg(span.lowest_barometric_mmhg))),
        applies=pao2 is not None,
        reasons=tuple(f"{words} is not known." for words in missing),
        population="Mechanistic; reads 2 to 5 mmHg low at 8,000 ft in COPD groups",
        formula="PaO₂ on the ground × alveolar PO₂ at altitude / alveolar PO₂ on the ground, PaCO₂ 1.5 mmHg lower at "
        "altitude (unchanged where breathing cannot rise)",
        source=RATIO_SOURCE,
        inputs=() if missing else (
            ("PaO₂", f"{baseline.pao2_mmhg:g} mmHg"), ("PaCO₂", f"{baseline.paco2_mmhg:g} mmHg"),
            ("pressure there", f"{baseline.gas_barometric_mmhg:.0f} mmHg"),
        ),
    )  # fmt: skip


def _pressure_altitude_m(span: PartSpan) -> float:
    """Altitude at which equations made in chambers are asked: that of the standard atmosphere with this pressure."""
    assert span.lowest_barometric_mmhg is not None
    return float(isa_altitude_m(span.lowest_barometric_mmhg))


def _ground_elevation_m(baseline: Baseline) -> float | None:
    if baseline.gas_elevation_m is not None or baseline.gas_barometric_mmhg is None:
        return baseline.gas_elevation_m
    return float(isa_altitude_m(baseline.gas_barometric_mmhg))


def _against(threshold: float, applying: Sequence[PredictorResult], po2: Array | None) -> Against:
    chances = [_chance_below(threshold, one) for one in applying]
    lung = None if po2 is None else float(np.mean(po2 < threshold))
    if min(chances) >= LIKELY:
        verdict: Verdict = "likely below"
    elif max(chances) <= 1.0 - LIKELY:
        verdict = "likely above"
    else:
        verdict = "uncertain"
    return Against(threshold, verdict, lung if lung is not None else sum(chances) / len(chances))


def _chance_below(threshold: float, one: PredictorResult) -> float:
    assert one.pao2_mmhg is not None
    assert one.low_mmhg is not None
    sd = (one.pao2_mmhg - one.low_mmhg) / SPREAD_TO_SD
    return 0.5 * (1.0 + erf((threshold - one.pao2_mmhg) / (sd * sqrt(2.0))))


def _agreement(applying: Sequence[PredictorResult], threshold: float) -> Agreement:
    middles = [one.pao2_mmhg for one in applying if one.pao2_mmhg is not None]
    if not middles:
        return "none"
    if len(middles) == 1:
        return "one method only"
    apart = max(middles) - min(middles)
    return "disagree" if min(middles) < threshold <= max(middles) or apart > 2 * DISAGREE_MMHG else "agree"


def _why_test(activities: Sequence[ActivityForecast], baseline: Baseline, policy: Policy) -> tuple[str, ...]:
    """Reasons to advise a test: what is forecast near the threshold, and what was measured badly."""
    rest = activities[0]
    reasons = []
    if rest.against and rest.against[0].verdict == "uncertain":
        reasons.append("The forecast at rest is uncertain against the lower PaO₂ threshold.")
    if rest.agreement == "disagree":
        reasons.append("The methods disagree.")
    threatened = bool(rest.against) and rest.against[-1].verdict != "likely above"
    if threatened and any(note.test for note in baseline.notes):
        reasons.append("The measurements it rests on are old, unstable, contradictory or oximetry alone.")
    walking = next((one for one in activities if one.activity == "walking"), None)
    if not reasons and walking is not None and walking.spo2 is not None and rest.against:
        low = policy.spo2_threshold_percent / 100.0
        if rest.against[0].verdict == "likely above" and walking.spo2.median < low:
            reasons.append("Walking is forecast below the SpO₂ threshold although rest is above the PaO₂ threshold.")
    return tuple(reasons)
