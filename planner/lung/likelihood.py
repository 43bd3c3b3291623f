"""What a reading says of the unevenness of each drawn lung."""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array
from planner.errors import InputError
from planner.lung.blood_shift import SaturationCurve
from planner.lung.gas_exchange import LOWEST_PO2_MMHG
from planner.lung.interpolate import end_nodes, extended, lagrange, local_cubic, product
from planner.lung.reading import LungReading, Person, pao2_sd_mmhg, shown_spo2_scale, spo2_sd
from planner.lung.response import Body, ContentCurve, contents

LOG_SD_NODES = np.linspace(0.02, 2.2, 12)
LOG_SDS = np.linspace(0.02, 2.2, 100)  # where the likelihood is told
TO_FINE = local_cubic(LOG_SDS, LOG_SD_NODES)
SHUNT_NODES = 4
UNLIKELY_SD = 4.0


def po2_over_log_sd(reading: LungReading, fio2: Array, pco2_mmhg: Array, shunt: Array, body: Body) -> Array:
    """Arterial PO2 the reading would show, shape (draws, LOG_SDS), for each draw's fraction, PCO2 and shunt.

    Solved for a few nodes that span the draws, read by polynomials in between; NaN below the model's range.
    Raises InputError where even an even lung is below it.
    """
    dry = reading.barometric_mmhg - 47.0
    shunt_nodes = _span(shunt, SHUNT_NODES, 0.005)
    pco2_nodes = _span(pco2_mmhg, 3, 0.5)
    fio2_nodes = _span(fio2, 3, 0.0) if np.ptp(fio2) > 0.0 else fio2[:1]
    fractions, carbon = np.meshgrid(fio2_nodes, pco2_nodes, indexing="ij")
    content = contents(body, LOG_SD_NODES, shunt_nodes, fractions * dry, np.full(fractions.shape, dry), carbon)
    content = extended(content, LOG_SD_NODES, axis=0, downward=False)
    content = extended(content, pco2_nodes, axis=-1, downward=False)
    if np.isnan(content).any():
        raise InputError(
            "readings",
            f"Below model range: breathing {100 * reading.fio2:.3g} % oxygen at {reading.barometric_mmhg:.0f} mmHg "
            f"with an arterial PCO2 of {np.median(pco2_mmhg):.0f} mmHg leaves too little oxygen for any lung.",
        )
    weights = (
        lagrange(shunt, shunt_nodes)[:, :, None, None]
        * lagrange(fio2, fio2_nodes)[:, None, :, None]
        * lagrange(pco2_mmhg, pco2_nodes)[:, None, None, :]
    ).reshape(shunt.size, -1)
    over_nodes = product(weights, content.reshape(LOG_SD_NODES.size, -1).T)
    po2 = ContentCurve(body.haemoglobin_g_dl).po2_mmhg(product(over_nodes, TO_FINE.T))
    return np.where(po2 < LOWEST_PO2_MMHG, np.nan, po2)


def log_likelihood(
    reading: LungReading, person: Person, po2_mmhg: Array, pco2_mmhg: Array, blood: SaturationCurve
) -> Array:
    """Log likelihood of the reading, shape as po2_mmhg; minus infinity where the model does not reach."""
    misfit = np.zeros(po2_mmhg.shape)
    if reading.pao2_mmhg is not None:
        misfit += ((po2_mmhg - reading.pao2_mmhg) / pao2_sd_mmhg(reading)) ** 2
    if reading.spo2_fraction is not None:
        offset, factor = shown_spo2_scale(person)
        shown = np.minimum(offset + factor * blood.saturation(po2_mmhg, pco2_mmhg[:, None]), 1.0)
        misfit += ((shown - reading.spo2_fraction) / spo2_sd(reading, person)) ** 2
    return np.where(np.isnan(misfit), -np.inf, -0.5 * misfit)


def _span(values: Array, count: int, least_width: float) -> Array:
    low, high = float(values.min()), float(values.max())
    return end_nodes(low, max(high, low + least_width), count)
