"""Cost of the lung: many samples at one condition, the fit, and a forecast from the fitted lung.

Run:  python tests/benchmarks/bench_lung.py
The baseline is the same solver asked for one sample at a time in a Python loop, in the same run.
"""

import sys
from collections.abc import Iterator
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, against, milliseconds, print_table, spread

from planner.lung.draws import Draws
from planner.lung.fitting import LungReading, Person, fit_lung
from planner.lung.gas_exchange import exchange

LOOP_SAMPLES = 200
DRAWS = 1000
GAS = LungReading(760.0, 0.2093, pao2_mmhg=72.4, paco2_mmhg=39.5, sample="arterial", age_days=5.0)
OXIMETRY = LungReading(760.0, 0.2093, spo2_fraction=0.93, age_days=5.0)
ALTITUDES = np.linspace(108.3, 149.2, 100)
PRESSURES = ALTITUDES / 0.2093 + 47.0


def samples(count: int) -> tuple:
    draws = Draws(count, 1)
    log_sd = np.clip(0.8 + 0.15 * draws.normal(), 0.05, 2.0)
    return 108.3, 564.5, 37.0 + 2.0 * draws.normal(), log_sd, draws.beta(1.5, 50.0)


def rows() -> Iterator[Row]:
    """Many samples against one at a time; then the fit and a forecast, whose spread of draws the app uses."""
    inspired, barometric, pco2, log_sd, shunt = samples(LOOP_SAMPLES)

    def one_by_one() -> None:
        for k in range(LOOP_SAMPLES):
            exchange(inspired, barometric, pco2[k], log_sd[k], shunt[k])

    for count, goal in ((1000, "20 ms"), (10_000, "200 ms")):
        yield against(
            f"Lung, {count:,} samples at one condition",
            lambda count=count: exchange(*samples(count)),
            one_by_one,
            "one sample at a time",
            repeats=5,
            share=LOOP_SAMPLES / count,
            goal=goal,
        )
    person = Person("copd")
    for name, reading in (("a blood gas", GAS), ("oximetry alone", OXIMETRY)):
        fitted = fit_lung([reading], person, draws=DRAWS)
        fit = milliseconds(lambda reading=reading: fit_lung([reading], person, draws=DRAWS))
        yield Row(f"Lung fitted to {name}, {DRAWS:,} draws", spread(fit))
        yield against(
            f"The same lung at {ALTITUDES.size} more places",
            lambda fitted=fitted: fitted.arterial(ALTITUDES, PRESSURES),
            one_by_one,
            "one sample at a time",
            share=LOOP_SAMPLES / (DRAWS * ALTITUDES.size),
        )


if __name__ == "__main__":
    print_table(rows())
