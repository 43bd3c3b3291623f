"""Titration of a whole trip: all doses through the lung together, against one call of the lung for each dose.

Method: 8 parts x 3 activities x 3 devices on a lung of 400 draws, best of 7 after a warm-up, both in one run. Prints
milliseconds, doses and the ratio. Run: python tests/benchmarks/bench_titration.py
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from planner.air.atmosphere import isa_pressure_mmhg
from planner.delivery.devices import load_devices
from planner.delivery.effect import usual_spread
from planner.delivery.titration import Condition, Target, titrate, with_decision
from planner.lung.fitting import LungReading, Person, fit_lung

DRAWS = 400
REPEATS = 7
DEVICE_IDS = ("cannula", "pulse_conserver", "pulse_concentrator")


def main() -> None:
    """Print the table."""
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
    together = _best(lambda: titrate(lung, conditions, devices, target, spread=spread))
    apart = _best(
        lambda: [with_decision(lung, *dose, target, spread=spread) for dose in doses],
    )
    print(f"doses                      {len(doses)}")
    print(f"together                   {1000 * together:8.1f} ms, {1e6 * together / len(doses):6.1f} us a dose")
    print(f"one call of the lung each  {1000 * apart:8.1f} ms, {1e6 * apart / len(doses):6.1f} us a dose")
    print(f"ratio                      {apart / together:8.1f}")


def _best(work: Callable[[], object]) -> float:
    work()
    times = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


if __name__ == "__main__":
    main()
