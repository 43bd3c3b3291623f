"""Gas shut in the body (a bulla, a pneumothorax, the middle ear) as the pressure around it changes."""

from __future__ import annotations

from planner.air.inspired import WATER_VAPOUR_MMHG, require_pressure
from planner.air.ranges import FloatOrArray, Numbers


def expansion_ratio(from_mmhg: FloatOrArray, to_mmhg: Numbers, humid: bool = True) -> Numbers:
    """Volume of freely expanding shut-in gas at the second pressure over its volume at the first.

    Moist gas in the body: (P1 - 47) / (P2 - 47); dry gas: P1 / P2. Both pressures above 47 mmHg. A stiff wall lets
    the volume grow less and the pressure difference more. Raises InputError outside. Source: Boyle's law.
    """
    require_pressure("from_mmhg", from_mmhg)
    require_pressure("to_mmhg", to_mmhg)
    vapour = WATER_VAPOUR_MMHG if humid else 0.0
    result: Numbers = (from_mmhg - vapour) / (to_mmhg - vapour)  # type: ignore[assignment]
    return result
