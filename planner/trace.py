"""How results were worked out: from which inputs, by which formula, from which source. Written beside the stages."""

from __future__ import annotations

from collections.abc import Sequence

from planner.case import Case
from planner.evidence.baseline import Baseline
from planner.guidance.pathway import PathwayResult
from planner.lung.fitting import FittedLung
from planner.lung.subset import log_sd_spread
from planner.results import TraceLine
from planner.trip.itinerary import Timeline
from planner.units import ft_from_m, kpa_from_mmhg


def trace_lines(
    case: Case,
    timeline: Timeline,
    baseline: Baseline,
    lung: FittedLung | None,
    pathways: Sequence[PathwayResult],
) -> tuple[TraceLine, ...]:
    """One line for each result that a reader may want to check by hand."""
    return (*_air(case, timeline), *_lung(baseline, lung), *_guidance(pathways))


def air_formula(altitude_kind: str) -> tuple[str, str]:
    """Formula and source of the air pressure: of a cabin ("cabin"), else of the ground."""
    if altitude_kind == "cabin":
        return "P = 101325 Pa (1 − 0.0065 h / 288.15)^5.2559", "ICAO standard atmosphere, ISO 2533:1975"
    return "ln P = 6.63268 − 0.1112 h − 0.00149 h², P in mmHg, h in km", "West JB, J Appl Physiol 1996;81:1850"


def _air(case: Case, timeline: Timeline) -> list[TraceLine]:
    lines = []
    for span in timeline.parts:
        if span.lowest_barometric_mmhg is None or span.lowest_inspired_po2_mmhg is None or span.highest_m is None:
            continue
        cabin = span.altitude_kind == "cabin"
        formula, source = air_formula(span.altitude_kind)
        inspired, pressure = span.lowest_inspired_po2_mmhg, span.lowest_barometric_mmhg
        lines.append(
            TraceLine(
                stage="Air",
                result=f"{span.name}: inspired PO₂ {kpa_from_mmhg(inspired):.1f} kPa ({inspired:.1f} mmHg)",
                inputs=(
                    f"{'cabin altitude' if cabin else 'highest elevation'} {span.highest_m:,.0f} m "
                    f"({ft_from_m(span.highest_m):,.0f} ft)",
                    f"pressure {pressure:.1f} mmHg",
                ),
                formula=f"{formula}; PIO₂ = 0.2093 (P − 47)",
                source=source,
            )
        )
    if any(span.kind == "flight" for span in timeline.parts):
        altitude = case.policy.planning_cabin_altitude_m
        lines.append(
            TraceLine(
                stage="Air",
                result=f"Cabin planned at {altitude:,.0f} m ({ft_from_m(altitude):,.0f} ft)",
                inputs=("planning value of the service, or of the flight itself",),
                formula="climb 500 ft/min, descent 300 ft/min (common practice)",
                source="Highest normal cabin altitude 8,000 ft: 14 CFR 25.841; measured peaks 6,341 ± 1,813 ft over "
                "207 flights: Hampson NB et al., Aviat Space Environ Med 2013",
            )
        )
    return lines


def _lung(baseline: Baseline, lung: FittedLung | None) -> list[TraceLine]:
    if lung is None:
        return []
    low, middle, high = log_sd_spread(lung)
    inputs = []
    for one in baseline.lung_readings:
        value = f"SpO₂ {100 * (one.spo2_fraction or 0):.0f} %"
        if one.pao2_mmhg is not None:
            value = f"PaO₂ {one.pao2_mmhg:.1f} mmHg"
        carbon = f", PaCO₂ {one.paco2_mmhg:.1f} mmHg" if one.paco2_mmhg is not None else ""
        inputs.append(f"{value}{carbon} at {one.barometric_mmhg:.0f} mmHg, oxygen fraction {one.fio2:.4f}")
    return [
        TraceLine(
            stage="Lung",
            result=f"Log SD of blood flow over ventilation-perfusion ratio {middle:.2f} ({low:.2f} to {high:.2f})",
            inputs=tuple(inputs),
            formula="log-normal VA/Q lung with shunt on its prior (Beta 1.5, 50; mean 3 %), nitrogen balance, solved "
            "for oxygen, carbon dioxide and pH; the log SD is drawn from what the measurements leave likely",
            source="West JB, Respir Physiol 1969;7:88 (from memory); Severinghaus JW, J Appl Physiol 1979;46:599; "
            "Douglas AR et al., J Appl Physiol 1988;65:473",
        )
    ]


def _guidance(pathways: Sequence[PathwayResult]) -> list[TraceLine]:
    return [
        TraceLine(
            stage="Guidance",
            result=f"{one.title}: {one.advice.text if one.advice else 'stopped, an entry is missing'}",
            inputs=tuple(step.fact_text for step in one.steps),
            formula=" → ".join(f"{step.question} {step.answer}" for step in one.steps) or "no question was answered",
            source=f"{one.source} (file version {one.version})",
        )
        for one in pathways
    ]
