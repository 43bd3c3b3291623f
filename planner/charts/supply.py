"""What is left of the gas or the charge, as a layer of the trip ribbon: the plan, and the case that is late."""

from __future__ import annotations

from collections.abc import Callable

from planner.charts.layout import Array
from planner.charts.ribbon import Layer


def supply_layer(
    minutes: Array,
    left: Array,
    late: Array | None,
    *,
    low: Array | None = None,
    high: Array | None = None,
    unit: str,
    text: Callable[[float], str] = "{:,.0f}".format,
    reserve: float | None = None,
    reserve_text: str = "",
) -> Layer:
    """Litres, watt-hours or gauge left over the trip, shape (points,), with their spread; late is drawn dotted.

    unit names what is left and its unit ("Litres left"). reserve: what should still be there at the end, drawn as the
    threshold. The axis always reaches down to nothing left.
    """
    return Layer(
        minutes,
        left,
        unit,
        text,
        low=low,
        high=high,
        stress=late,
        threshold=reserve,
        threshold_text=reserve_text,
        least=0.0,
    )
