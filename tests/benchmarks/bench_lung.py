"""Cost of the lung: many samples at one condition, the fit, and a forecast from the fitted lung.

Run:  python tests/benchmarks/bench_lung.py
The baseline is the same solver asked for one sample at a time in a Python loop, in the same run.
"""

import statistics
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from planner.lung.draws import Draws
from planner.lung.fitting import LungReading, Person, fit_lung
from planner.lung.gas_exchange import exchange

LOOP_SAMPLES = 200
REPEATS = 9
GAS = LungReading(760.0, 0.2093, pao2_mmhg=72.4, paco2_mmhg=39.5, sample="arterial", age_days=5.0)
OXIMETRY = LungReading(760.0, 0.2093, spo2_fraction=0.93, age_days=5.0)
ALTITUDES = np.linspace(108.3, 149.2, 100)
PRESSURES = ALTITUDES / 0.2093 + 47.0


def milliseconds(work, repeats: int = REPEATS) -> float:
    """Median time of `work` once warm."""
    work()
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return 1000.0 * statistics.median(times)


def samples(count: int) -> tuple:
    draws = Draws(count, 1)
    log_sd = np.clip(0.8 + 0.15 * draws.normal(), 0.05, 2.0)
    return 108.3, 564.5, 37.0 + 2.0 * draws.normal(), log_sd, draws.beta(1.5, 50.0)


def main() -> None:
    inspired, barometric, pco2, log_sd, shunt = samples(LOOP_SAMPLES)

    def one_by_one() -> None:
        for k in range(LOOP_SAMPLES):
            exchange(inspired, barometric, pco2[k], log_sd[k], shunt[k])

    per_sample = milliseconds(one_by_one, 3) / LOOP_SAMPLES
    print(f"baseline, one sample at a time: {per_sample:.3f} ms a sample")
    for count, limit in ((1000, 20.0), (10_000, 200.0)):
        taken = milliseconds(lambda count=count: exchange(*samples(count)))
        ratio = per_sample * count / taken
        print(
            f"{count:6d} samples at one condition: {taken:7.1f} ms (limit {limit:.0f}), "
            f"{ratio:.0f} times the baseline's speed"
        )
    for name, reading in (("blood gas", GAS), ("oximetry", OXIMETRY)):
        for draws in (200, 400, 1000):
            person = Person("copd")
            fitted = fit_lung([reading], person, draws=draws)
            fit = milliseconds(
                lambda reading=reading, person=person, draws=draws: fit_lung([reading], person, draws=draws)
            )
            first = milliseconds(
                lambda reading=reading, person=person, draws=draws: fit_lung([reading], person, draws=draws).arterial(
                    108.3, 564.5
                )
            )
            more = milliseconds(lambda fitted=fitted: fitted.arterial(ALTITUDES, PRESSURES))
            ratio = per_sample * draws * ALTITUDES.size / more
            print(
                f"{name}, {draws:4d} draws: fit {fit:5.1f} ms, fit and first answer {first:5.1f} ms, "
                f"100 more points {more:5.2f} ms ({ratio:.0f} times the baseline's speed)"
            )


if __name__ == "__main__":
    main()
