"""Gas exchange of an uneven lung with shunt: the arterial oxygen pressure that follows from the air breathed.

Blood flow is spread log-normally over units of ventilation-perfusion ratio r; a fraction goes past them (shunt).
In each unit, with k = 8.63 and F the inspired fraction of oxygen:
    carbon dioxide   r PCO2 = k (CvCO2 - CcCO2)
    oxygen           r (PIO2 - F PCO2 - PO2) = (1 - F) k (CcO2 - CvO2)        (nitrogen is in balance)
Mixed venous blood is arterial blood less oxygen uptake plus carbon dioxide output (Fick). The mean ratio is the one
that gives the arterial PCO2. Unknown are the pressures and the pH of every unit, the arterial PO2 and the mean ratio;
Newton's method takes all of them at once, for all samples at once.

Sources: West JB, Respir Physiol 1969;7:88 (log-normal lung); Evans JW, Wagner PD, J Appl Physiol 1977;42:889 (units
from flow); West JB, Wagner PD, in: Bioengineering Aspects of the Lung, 1977 (nitrogen balance).
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import cache

import numpy as np
from numpy.typing import NDArray

from planner.air.inspired import WATER_VAPOUR_MMHG, require_pressure
from planner.air.ranges import Array, FloatOrArray, Numbers, require_within
from planner.errors import InputError
from planner.lung.unit_blood import BloodState, blood_state

NODES = 10  # units of a sample: within 0.3 mmHg of many units up to a log SD of 1.2
CONVERGED_NODES = 40  # of the scalar front door
K_MMHG_DL_PER_ML = 760.0 * 310.15 / 273.15 / 100.0  # 8.63: volume at body temperature and pressure from content

HAEMOGLOBIN_G_DL = 14.8
OXYGEN_UPTAKE_L_MIN = 0.30
RESPIRATORY_QUOTIENT = 0.8
CARDIAC_OUTPUT_L_MIN = 6.0

HIGHEST_LOG_SD = 2.5
HIGHEST_SHUNT = 0.5
LOWEST_PO2_MMHG = 20.0  # an arterial PO2 below is no steady state of rest that this model was checked for

FIRST_STEPS = 10  # nearly every sample that has a solution has found it by then
MOST_STEPS = 40
SETTLED_STEP = 1e-4  # a last step this small (mmHg, and of the log ratio) leaves an error of its square
LARGEST_FACTOR = 4.0  # how far one step may raise or lower a pressure
# Units (samples times nodes) solved together: their arrays stay in the processor's cache, and sums over the units stay
# below the size (9216) at which OpenBLAS shares them over threads, which on a busy machine costs more than it gains.
BLOCK_UNITS = 9_000
BELOW_RANGE = (
    "Below model range: with this air, carbon dioxide, unevenness and shunt no steady state with an arterial oxygen "
    f"pressure above {LOWEST_PO2_MMHG:g} mmHg exists."
)


@dataclass(frozen=True, eq=False)
class Exchange:
    """What the lung gives, one entry a sample. Where below_range, the numbers are NaN and must not be used."""

    po2_mmhg: Array
    saturation: Array
    ph: Array
    venous_oxygen_ml_dl: Array
    ventilation_l_min: Array  # alveolar
    below_range: NDArray[np.bool_]


def arterial_po2_mmhg(
    inspired_po2_mmhg: Numbers,
    barometric_mmhg: FloatOrArray,
    paco2_mmhg: FloatOrArray,
    log_sd: FloatOrArray,
    shunt: FloatOrArray,
    *,
    haemoglobin_g_dl: FloatOrArray = HAEMOGLOBIN_G_DL,
    oxygen_uptake_l_min: FloatOrArray = OXYGEN_UPTAKE_L_MIN,
    respiratory_quotient: FloatOrArray = RESPIRATORY_QUOTIENT,
    cardiac_output_l_min: FloatOrArray = CARDIAC_OUTPUT_L_MIN,
    base_excess_mmol_l: FloatOrArray = 0.0,
    nodes: int = CONVERGED_NODES,
) -> Numbers:
    """Arterial PO2 of a lung with this unevenness (log SD of blood flow over ventilation-perfusion ratio) and shunt.

    inspired_po2_mmhg 20 to 760, at most the dry pressure; paco2_mmhg 10 to 120; log_sd 0 to 2.5; shunt 0 to 0.5, a
    fraction of blood flow. With no unevenness and no shunt it is the alveolar gas equation.
    Raises InputError for values outside, and one that begins "Below model range" where no steady state exists.
    Sources: see the module.
    """
    solved = exchange(
        inspired_po2_mmhg,
        barometric_mmhg,
        paco2_mmhg,
        log_sd,
        shunt,
        haemoglobin_g_dl=haemoglobin_g_dl,
        oxygen_uptake_l_min=oxygen_uptake_l_min,
        respiratory_quotient=respiratory_quotient,
        cardiac_output_l_min=cardiac_output_l_min,
        base_excess_mmol_l=base_excess_mmol_l,
        nodes=nodes,
    )
    if solved.below_range.any():
        raise InputError("inspired_po2_mmhg", BELOW_RANGE)
    return solved.po2_mmhg if solved.po2_mmhg.ndim else float(solved.po2_mmhg)  # type: ignore[return-value]


def exchange(
    inspired_po2_mmhg: FloatOrArray,
    barometric_mmhg: FloatOrArray,
    paco2_mmhg: FloatOrArray,
    log_sd: FloatOrArray,
    shunt: FloatOrArray,
    *,
    haemoglobin_g_dl: FloatOrArray = HAEMOGLOBIN_G_DL,
    oxygen_uptake_l_min: FloatOrArray = OXYGEN_UPTAKE_L_MIN,
    respiratory_quotient: FloatOrArray = RESPIRATORY_QUOTIENT,
    cardiac_output_l_min: FloatOrArray = CARDIAC_OUTPUT_L_MIN,
    base_excess_mmol_l: FloatOrArray = 0.0,
    nodes: int = NODES,
) -> Exchange:
    """The same for many samples, with a mark instead of an error where the model does not reach.

    All arguments broadcast together. Raises InputError for values outside the ranges of arterial_po2_mmhg.
    """
    require_pressure("barometric_mmhg", barometric_mmhg)
    given = np.broadcast_arrays(
        require_within("inspired_po2_mmhg", "Inspired oxygen pressure", inspired_po2_mmhg, 20.0, 760.0, "mmHg"),
        np.asarray(barometric_mmhg, dtype=np.float64) - WATER_VAPOUR_MMHG,
        require_within("paco2_mmhg", "Arterial PCO2", paco2_mmhg, 10.0, 120.0, "mmHg"),
        require_within("log_sd", "Log SD of blood flow", log_sd, 0.0, HIGHEST_LOG_SD),
        require_within("shunt", "Shunt fraction", shunt, 0.0, HIGHEST_SHUNT),
        require_within("haemoglobin_g_dl", "Haemoglobin", haemoglobin_g_dl, 3.0, 25.0, "g/dL"),
        require_within("oxygen_uptake_l_min", "Oxygen uptake", oxygen_uptake_l_min, 0.05, 2.0, "L/min"),
        require_within("respiratory_quotient", "Respiratory quotient", respiratory_quotient, 0.5, 1.5),
        require_within("cardiac_output_l_min", "Cardiac output", cardiac_output_l_min, 1.0, 25.0, "L/min"),
        require_within("base_excess_mmol_l", "Base excess", base_excess_mmol_l, -25.0, 30.0, "mmol/L"),
    )
    shape = given[0].shape
    flat = [np.ascontiguousarray(values).reshape(-1) for values in given]
    if (flat[0] > flat[1] + 1e-9).any():
        raise InputError("inspired_po2_mmhg", "Inspired oxygen pressure is above the pressure of the dry gas breathed.")
    solved = _in_blocks(flat, nodes, FIRST_STEPS)
    slow = np.flatnonzero(solved.below_range)
    if slow.size:
        again = _in_blocks([values[slow] for values in flat], nodes, MOST_STEPS)
        for one in fields(Exchange):
            getattr(solved, one.name)[slow] = getattr(again, one.name)
    return Exchange(*(getattr(solved, one.name).reshape(shape) for one in fields(Exchange)))


def _in_blocks(given: list[Array], nodes: int, steps: int) -> Exchange:
    block = BLOCK_UNITS // nodes
    blocks = [
        _solve([values[start : start + block] for values in given], nodes, steps)
        for start in range(0, given[0].size, block)
    ]
    return Exchange(*(np.concatenate([getattr(block, one.name) for block in blocks]) for one in fields(Exchange)))


@cache
def _flow_nodes(nodes: int) -> tuple[Array, Array]:
    """Points and weights that average over a standard normal spread (Gauss and Hermite)."""
    points, weights = np.polynomial.hermite_e.hermegauss(nodes)
    return points, weights / weights.sum()


def _solve(given: list[Array], nodes: int, steps: int) -> Exchange:
    """Newton's method for one block; every array of `given` has shape (samples,)."""
    inspired, dry, paco2, log_sd, shunt, haemoglobin, uptake, quotient, output, base_excess = given
    points, weights = _flow_nodes(nodes)
    fraction = inspired / dry
    oxygen_loss = uptake * 100.0 / output  # mL/dL: L/min over L/min, 1000 mL per 10 dL
    carbon_gain = quotient * oxygen_loss
    per_mean = np.exp(log_sd[:, None] * points)

    # First guess: an even lung for the mean ratio, straight dissociation lines for the units.
    ideal = inspired - paco2 * (fraction + (1.0 - fraction) / quotient)
    po2_a = np.clip(ideal * (1.0 - 0.35 * np.minimum(log_sd, 1.6)) * (1.0 - shunt), 30.0, 500.0)
    ph_a = np.full_like(po2_a, 7.4)
    log_ratio = np.log(K_MMHG_DL_PER_ML * carbon_gain / paco2) + 0.15 * log_sd * log_sd
    ratio = np.exp(log_ratio)[:, None] * per_mean
    pull = ratio / (ratio + 3.5)
    pco2 = (paco2[:, None] + 6.0) * (1.0 - pull)
    lean = ratio / (ratio + 0.6)
    po2 = 35.0 + (np.maximum(inspired - 20.0, 40.0)[:, None] - 35.0) * lean
    ph = 7.4 - 0.5 * np.log(pco2 / paco2[:, None]) * 0.6

    hb_units, be_units = haemoglobin[:, None], base_excess[:, None]
    keep_f, part_f = fraction[:, None], (1.0 - fraction)[:, None] * K_MMHG_DL_PER_ML
    inspired_units = inspired[:, None]
    settled = np.zeros(po2_a.shape, dtype=bool)
    with np.errstate(all="ignore"):  # samples without a solution run away; they are marked below
        for _ in range(steps):
            unit = blood_state(po2, pco2, ph, hb_units, be_units)
            artery = blood_state(po2_a, paco2, ph_a, haemoglobin, base_excess)
            step, unit_steps = _newton_step(
                unit, artery, ratio, pco2, po2, inspired_units, keep_f, part_f, weights, shunt, oxygen_loss, carbon_gain
            )
            d_artery, d_log_ratio = step
            d_po2, d_pco2 = unit_steps
            ph += np.clip(unit.ph_residual + unit.ph_by_po2 * d_po2 + unit.ph_by_pco2 * d_pco2, -0.3, 0.3)
            ph_a += np.clip(artery.ph_residual + artery.ph_by_po2 * d_artery, -0.3, 0.3)
            po2 = np.clip(po2 + d_po2, po2 / LARGEST_FACTOR, po2 * LARGEST_FACTOR)
            pco2 = np.clip(pco2 + d_pco2, pco2 / LARGEST_FACTOR, pco2 * LARGEST_FACTOR)
            po2_a = np.clip(po2_a + d_artery, po2_a / 2.0, po2_a * 2.0)
            log_ratio = log_ratio + np.clip(d_log_ratio, -1.0, 1.0)
            ratio = np.exp(log_ratio)[:, None] * per_mean
            settled = (np.abs(d_artery) < SETTLED_STEP) & (np.abs(d_log_ratio) < SETTLED_STEP)
            if settled.all():
                break
        artery = blood_state(po2_a, paco2, ph_a, haemoglobin, base_excess)
        venous = artery.oxygen - oxygen_loss
        below = ~(settled & (po2_a >= LOWEST_PO2_MMHG) & (venous > 0.0))
        saturation = artery.saturation.copy()
        ventilation = output * np.exp(log_ratio) * (per_mean @ weights) * (1.0 - shunt)
    for values in (po2_a, saturation, ph_a, venous, ventilation):
        values[below] = np.nan
    return Exchange(po2_a, saturation, ph_a, venous, ventilation, below)


def _newton_step(
    unit: BloodState,
    artery: BloodState,
    ratio: Array,
    pco2: Array,
    po2: Array,
    inspired: Array,
    fraction: Array,
    nitrogen: Array,
    weights: Array,
    shunt: Array,
    oxygen_loss: Array,
    carbon_gain: Array,
) -> tuple[tuple[Array, Array], tuple[Array, Array]]:
    """One step for (arterial PO2, log mean ratio), and the units' (PO2, PCO2) that go with it.

    The two equations of each unit are solved for its own two pressures, which leaves them straight lines in the two
    unknowns of the whole; the mixing of contents then gives those.
    """
    venous_o2 = (artery.oxygen - oxygen_loss)[:, None]
    venous_co2 = (artery.carbon + carbon_gain)[:, None]
    k = K_MMHG_DL_PER_ML
    # Residuals and derivatives of the two equations; rows: carbon dioxide, oxygen; columns: PO2, PCO2.
    lack = inspired - fraction * pco2 - po2
    residual_c = ratio * pco2 - k * (venous_co2 - unit.carbon)
    residual_o = ratio * lack - nitrogen * (unit.oxygen - venous_o2)
    c_o = k * unit.carbon_by_po2
    c_c = ratio + k * unit.carbon_by_pco2
    o_o = -ratio - nitrogen * unit.oxygen_by_po2
    o_c = -ratio * fraction - nitrogen * unit.oxygen_by_pco2
    over = 1.0 / (c_o * o_c - c_c * o_o)
    # Right sides: constant, by arterial PO2, by log ratio.
    by_artery_c = k * artery.carbon_by_po2[:, None]
    by_artery_o = -nitrogen * artery.oxygen_by_po2[:, None]
    constant_c = k * (artery.carbon_shift[:, None] - unit.carbon_shift) - residual_c
    constant_o = -residual_o + nitrogen * (unit.oxygen_shift - artery.oxygen_shift[:, None])
    by_ratio_c, by_ratio_o = -ratio * pco2, -ratio * lack

    def pressures(right_c: Array, right_o: Array) -> tuple[Array, Array]:
        return (right_c * o_c - right_o * c_c) * over, (c_o * right_o - o_o * right_c) * over

    lines = [pressures(constant_c, constant_o), pressures(by_artery_c, by_artery_o), pressures(by_ratio_c, by_ratio_o)]
    oxygen = [(unit.oxygen_by_po2 * a + unit.oxygen_by_pco2 * b) @ weights for a, b in lines]
    carbon = [(unit.carbon_by_po2 * a + unit.carbon_by_pco2 * b) @ weights for a, b in lines]

    # Mixing: (1 - s) mean(Cc) + s Cv - Ca = 0 with Cv = Ca -/+ the change in the tissues.
    through = 1.0 - shunt
    mean_o = (unit.oxygen + unit.oxygen_shift) @ weights + oxygen[0]
    mean_c = (unit.carbon + unit.carbon_shift) @ weights + carbon[0]
    artery_o, artery_c = artery.oxygen + artery.oxygen_shift, artery.carbon + artery.carbon_shift
    right_o = -(through * (mean_o - artery_o) - shunt * oxygen_loss)
    right_c = -(through * (mean_c - artery_c) + shunt * carbon_gain)
    a11, a12 = through * (oxygen[1] - artery.oxygen_by_po2), through * oxygen[2]
    a21, a22 = through * (carbon[1] - artery.carbon_by_po2), through * carbon[2]
    determinant = a11 * a22 - a12 * a21
    d_artery = (right_o * a22 - a12 * right_c) / determinant
    d_ratio = (a11 * right_c - a21 * right_o) / determinant
    shift_a, shift_r = d_artery[:, None], d_ratio[:, None]
    return (d_artery, d_ratio), (
        lines[0][0] + lines[1][0] * shift_a + lines[2][0] * shift_r,
        lines[0][1] + lines[1][1] * shift_a + lines[2][1] * shift_r,
    )
