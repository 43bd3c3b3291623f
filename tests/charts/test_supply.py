import numpy as np

from planner.charts.ribbon import lay_ribbon
from planner.charts.supply import supply_layer


def test_gas_left_reads_as_planned_and_late_at_any_moment(trip):
    left = np.linspace(1200.0, 300.0, 300)
    layer = supply_layer(trip.minutes, left, left - 180.0, unit="Litres left", reserve=250.0, reserve_text="250 L")
    ribbon = lay_ribbon(trip.parts, trip.minutes, trip.altitude_m, layer, width=358.0, height=150.0, text_size=10.0,
                        measure=trip.measure)  # fmt: skip
    reading = ribbon.read_at(float(trip.minutes[200]))
    assert reading.median - reading.stress == 180.0
    assert {"Litres left", "250 L", "0"} <= {t.text for t in ribbon.drawing.texts()}
