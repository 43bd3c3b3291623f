"""The hypoxic challenge test as a predictor: what was measured on the mixture, at the altitude it really simulated."""

from __future__ import annotations

from planner.air.atmosphere import isa_altitude_m
from planner.evidence.baseline import Baseline
from planner.evidence.predictor import PredictorResult
from planner.lung.reading import pao2_sd_mmhg
from planner.trip.itinerary import PartSpan

DRY_AIR_OXYGEN = 0.2093
WATER_VAPOUR_MMHG = 47.0
SAME_AIR_MMHG = 4.0  # inspired PO2 of part and test no further apart than this: about 1,000 ft; planning assumption
SPREAD_TO_SD = 1.645


def challenge_predictor(baseline: Baseline, span: PartSpan) -> PredictorResult | None:
    """What the challenge test measured, for this part; None where no gas was taken on the mixture.

    It applies where the part's inspired PO2 is that of the test, within SAME_AIR_MMHG; greyed in thinner or richer air.
    """
    reading = next((one for one in baseline.lung_readings if one.challenge and one.pao2_mmhg is not None), None)
    test = baseline.challenge
    if reading is None or test is None or reading.pao2_mmhg is None or span.lowest_inspired_po2_mmhg is None:
        return None
    simulated_m = float(isa_altitude_m(reading.inspired_po2_mmhg / DRY_AIR_OXYGEN + WATER_VAPOUR_MMHG))
    apart = span.lowest_inspired_po2_mmhg - reading.inspired_po2_mmhg
    spread = SPREAD_TO_SD * pao2_sd_mmhg(reading)
    reasons = []
    if abs(apart) > SAME_AIR_MMHG:
        side = "less" if apart > 0 else "more"
        reasons.append(f"This part asks {side} than the {simulated_m:.0f} m the test simulated.")
    when = f" of {test.taken_on:%d %b %Y}" if test.taken_on else ""
    return PredictorResult(
        predictor_id="challenge",
        label="Measured in the challenge test",
        detail=f"{100 * reading.fio2:.1f} % oxygen, as at {simulated_m:.0f} m{when}",
        pao2_mmhg=reading.pao2_mmhg,
        low_mmhg=reading.pao2_mmhg - spread,
        high_mmhg=reading.pao2_mmhg + spread,
        applies=not reasons,
        reasons=tuple(reasons),
        population="Measured in this person at rest",
        formula="Measured; the altitude is the one whose air has the inspired PO₂ of the mixture in that laboratory",
        source="BTS clinical statement on air travel, Thorax 2022;77:329 (reading of the test)",
        inputs=(
            ("oxygen fraction", f"{reading.fio2:.3f}"),
            ("laboratory pressure", f"{reading.barometric_mmhg:.0f} mmHg"),
        ),
    )
