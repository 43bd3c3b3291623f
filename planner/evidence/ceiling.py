"""What no blood at altitude can exceed, and the prediction that keeps the ratio of arterial to alveolar PO2."""

from __future__ import annotations

from planner.air.inspired import AIR_OXYGEN
from planner.lung.alveolar import alveolar_po2_mmhg

LOWEST_PACO2_MMHG = 30.0  # a strong breather on the first day at 8,000 ft; planning assumption
EXPECTED_FALL_MMHG = 1.5  # 0.2 kPa: Akerø A et al., Eur Respir J 2005;25:725; Edvardsen A et al., Thorax 2012;67:964
RATIO_SPREAD_MMHG = (
    9.0  # planning assumption: its error over the published groups, bias 2.7 and RMSE 4.3 mmHg, and people differ
)
RATIO_SOURCE = "Gilbert R, Auchincloss JH, et al. Prediction of hypoxemia at altitude (from memory)"


def ceiling_po2_mmhg(barometric_mmhg: float, lowest_paco2_mmhg: float | None = None) -> float:
    """Alveolar PO2 on air at the lowest PaCO2 that is plausible; arterial PO2 cannot be higher."""
    lowest = LOWEST_PACO2_MMHG if lowest_paco2_mmhg is None else lowest_paco2_mmhg
    return alveolar_po2_mmhg(barometric_mmhg, AIR_OXYGEN, lowest)


def constant_ratio_po2_mmhg(
    pao2_mmhg: float, paco2_mmhg: float, ground_mmhg: float, altitude_mmhg: float, fall_mmhg: float = EXPECTED_FALL_MMHG
) -> float:
    """Arterial PO2 at altitude if the ratio of arterial to alveolar PO2 stays as on the ground, on air.

    PaO2 x PAO2(altitude) / PAO2(ground), the carbon dioxide lower by fall_mmhg at altitude. Barometric pressures and
    gases in mmHg. Source: RATIO_SOURCE.
    """
    ground = alveolar_po2_mmhg(ground_mmhg, AIR_OXYGEN, paco2_mmhg)
    altitude = alveolar_po2_mmhg(altitude_mmhg, AIR_OXYGEN, paco2_mmhg - fall_mmhg)
    return pao2_mmhg * altitude / ground
