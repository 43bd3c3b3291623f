"""Titration of a whole trip: all doses through the lung together, against one call of the lung for each dose.

Method: 8 parts x 3 activities x 3 devices on a lung of 400 draws. Run: python tests/benchmarks/bench_titration.py
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, against, print_table

from planner.air.atmosphere import isa_pressure_mmhg
from planner.delivery.devices import load_devices
from planner.delivery.effect import usual_spread
from planner.delivery.titration import Condition, Target, titrate, with_decision
from planner.lung.fitting import LungReading, Person, fit_lung

DRAWS = 400
REPEATS = 7
DEVICE_IDS = ("cannula", "pulse_conserver", "pulse_concentrator")


def rows() -> Iterator[Row]:
    """One row."""
    lung = fit_lung(
        [LungReading(760.0, 0.2093, pao2_mmhg=68.0, paco2_mmhg=40.0, sample="arterial", age_days=1.0)],
        Person(diagnosis="copd", age_years=66.0),
        draws=DRAWS,
    )
    conditions = [
        Condition(f"part {index}", activity, pressure, 0.2093 * (pressure - 47.0))
        for index, pressure in enumerate(float(isa_pressure_mmhg(300.0 * part)) for part in range(1, 9))
        for activity in ("rest", "walking", "asleep")
    ]
    devices = [load_devices()[device_id] for device_id in DEVICE_IDS]
    target = Target(0.88, None, 0.9, "no")
    spread = usual_spread(DRAWS)
    results = titrate(lung, conditions, devices, target, spread=spread)
    doses = [
        (condition, device if amount else None, amount)
        for condition, result in zip(conditions, results, strict=True)
        for device in devices
        for curve in result.curves
        if curve.device_id == device.id
        for amount in map(float, curve.amounts)
    ]
    yield against(
        f"Dose search, whole trip ({len(doses)} doses)",
        lambda: titrate(lung, conditions, devices, target, spread=spread),
        lambda: [with_decision(lung, *dose, target, spread=spread) for dose in doses],
        "one call of the lung for each dose",
        repeats=REPEATS,
    )


if __name__ == "__main__":
    print_table(rows())
