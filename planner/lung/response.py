"""Answers of the fitted lung at once: the solved lung of every draw as a small table, read by interpolation.

The table stands over the ideal alveolar PO2 (the alveolar gas equation), the arterial PCO2 and, on oxygen or a
hypoxic mixture, the inspired fraction; its nodes are solved by planner.lung.gas_exchange for a few log SDs and shunts
that span the draws. What is interpolated is oxygen content, which bends less than pressure. Error against a converged
solution: at most 0.35 mmHg on air between 30 and 100 mmHg of arterial PO2, and on oxygen or a hypoxic mixture at most
0.35 mmHg below 70 mmHg and 0.3 points of saturation above; shown by a test.
"""

from __future__ import annotations

from copy import copy
from dataclasses import dataclass, replace
from functools import cached_property, lru_cache

import numpy as np
from numpy.typing import NDArray

from planner.air.ranges import Array
from planner.lung import blood
from planner.lung.alveolar import carbon_dioxide_factor
from planner.lung.gas_exchange import exchange
from planner.lung.interpolate import end_nodes, extended, lagrange, local_cubic, product

RESPIRATORY_QUOTIENT = 0.82  # at rest, 0.80 to 0.83; textbook value
AIR = 0.2093
TABLE_NODES = ((1.15, 12), (np.inf, 20))  # up to this log SD, so many units of a lung in the table
AIR_NODES, RICH_NODES = 9, 11  # of the alveolar PO2
AIR_STEPS, RICH_STEPS = 40, 48  # read straight between these
LOG_SD_NODES = ((0.8, 5), (np.inf, 7))  # up to this width of the draws, so many
SHUNT_NODES = 3
GREATEST_DRY_MMHG = 760.0  # ground pressure of 807 mmHg, the Dead Sea
LEAST_DRY_MMHG = 360.0  # ground pressure at 5200 m
RICHEST = 0.95
LEAST_ALVEOLAR_MMHG = 30.0
AIR_ALVEOLAR_MMHG = 125.0
MOST_ALVEOLAR_MMHG = 600.0
CONTENT_STEPS = 6000
MOST_PO2_MMHG = 760.0
FRACTION_TOLERANCE = 0.003
FRACTION_PLACES = (0.0, 0.35, 1.0)
PCO2_PLACES = np.array([-1.0, -0.5, 0.5, 1.0])  # of the carbon dioxide asked for, from lowest to highest
BLOCK = 128  # draws tabled together; their arrays stay in the processor's cache
TO_POWERS = np.linalg.inv(np.vander(PCO2_PLACES, increasing=True))


@dataclass(frozen=True)
class Body:
    """What of this body, beside its lungs, bears on gas exchange."""

    haemoglobin_g_dl: float
    base_excess_mmol_l: float
    oxygen_uptake_l_min: float = 0.25
    cardiac_output_l_min: float = 5.2


@dataclass(frozen=True)
class Solved:
    """Oxygen content over (log SD and shunt nodes, place of fraction x PCO2 x fine log alveolar PO2)."""

    content: Array
    places: int
    log_first: float
    per_log: float
    steps: int


@dataclass(frozen=True)
class Branch:
    """Oxygen pressure over (draw, place of fraction, power of carbon dioxide, fine log alveolar PO2)."""

    po2: Array
    log_first: float
    per_log: float
    steps: int


class SolvedLungs:
    """Solved lungs of one body at nodes that span what will be asked; each part is solved when first needed.

    The spans are (least, most) of the log SD, the shunt and the arterial PCO2 (mmHg).
    """

    def __init__(
        self,
        body: Body,
        log_sd_span: tuple[float, float],
        shunt_span: tuple[float, float],
        pco2_span_mmhg: tuple[float, float],
    ) -> None:
        self.body = body
        width = max(log_sd_span[1] - log_sd_span[0], 0.02)
        count = next(count for most, count in LOG_SD_NODES if width <= most)
        self.log_sd_nodes = end_nodes(log_sd_span[0], log_sd_span[0] + width, count)
        self.shunt_nodes = end_nodes(shunt_span[0], max(shunt_span[1], shunt_span[0] + 0.005), SHUNT_NODES)
        self.pco2_middle_mmhg = 0.5 * (pco2_span_mmhg[0] + pco2_span_mmhg[1])
        self.pco2_half_mmhg = 0.5 * (pco2_span_mmhg[1] - pco2_span_mmhg[0])
        self.curve = ContentCurve(body.haemoglobin_g_dl)

    def covers(
        self,
        body: Body,
        log_sd_span: tuple[float, float],
        shunt_span: tuple[float, float],
        pco2_span_mmhg: tuple[float, float],
    ) -> bool:
        """Whether draws of this body within these spans can be read from these lungs."""
        return (
            body == self.body
            and bool(self.log_sd_nodes[0] <= log_sd_span[0] and log_sd_span[1] <= self.log_sd_nodes[-1])
            and bool(self.shunt_nodes[0] <= shunt_span[0] and shunt_span[1] <= self.shunt_nodes[-1])
            and self.pco2_middle_mmhg - self.pco2_half_mmhg <= pco2_span_mmhg[0]
            and pco2_span_mmhg[1] <= self.pco2_middle_mmhg + self.pco2_half_mmhg
        )

    @cached_property
    def air(self) -> Solved:
        """Breathing air, at any pressure."""
        logs, (_, carbon, alveolar) = self._grid(AIR_ALVEOLAR_MMHG, AIR_NODES, (0.0,))
        inspired = _inspired_of_air(alveolar, carbon)
        return self._solve(logs, inspired, _air_fraction(inspired), carbon, AIR_STEPS)

    @cached_property
    def rich(self) -> Solved:
        """Breathing oxygen or a hypoxic mixture, at any pressure."""
        logs, (place, carbon, alveolar) = self._grid(MOST_ALVEOLAR_MMHG, RICH_NODES, FRACTION_PLACES)
        least, most = _fraction_ends(alveolar, carbon)
        fraction = least + place * (most - least)
        inspired: Array = alveolar + carbon * carbon_dioxide_factor(fraction, RESPIRATORY_QUOTIENT)
        return self._solve(logs, inspired, fraction, carbon, RICH_STEPS)

    def _grid(self, most_alveolar: float, nodes: int, places: tuple[float, ...]) -> tuple[Array, list[Array]]:
        logs = np.linspace(np.log(LEAST_ALVEOLAR_MMHG), np.log(most_alveolar), nodes)
        pco2 = self.pco2_middle_mmhg + self.pco2_half_mmhg * PCO2_PLACES
        return logs, list(np.meshgrid(np.array(places), pco2, np.exp(logs), indexing="ij"))

    def _solve(self, logs: Array, inspired: Array, fraction: Array, carbon: Array, steps: int) -> Solved:
        content = contents(self.body, self.log_sd_nodes, self.shunt_nodes, inspired, inspired / fraction, carbon)
        content = np.nan_to_num(extended(content, logs, axis=-1, downward=True), nan=0.0)  # no answer anywhere: below
        fine = np.linspace(logs[0], logs[-1], steps)
        flat = product(content.reshape(-1, logs.size), local_cubic(fine, logs).T)
        lungs = self.log_sd_nodes.size * self.shunt_nodes.size
        per_log = (steps - 1) / float(logs[-1] - logs[0])
        return Solved(flat.reshape(lungs, -1), carbon.shape[0], float(logs[0]), per_log, steps)


class Response:
    """The lungs of all draws of one body, ready to be asked for the arterial PO2 of any air.

    log_sd, shunt: shape (draws,), within the spans of the solved lungs.
    """

    def __init__(self, solved: SolvedLungs, log_sd: Array, shunt: Array) -> None:
        self.solved = solved
        self.draws = log_sd.size
        by_log_sd, by_shunt = lagrange(log_sd, solved.log_sd_nodes), lagrange(shunt, solved.shunt_nodes)
        self._weights = (by_log_sd[:, :, None] * by_shunt[:, None, :]).reshape(self.draws, -1)

    def of_draws(self, taken: NDArray[np.int64]) -> Response:
        """The response of some of the draws, with what is tabled of them already."""
        fewer = copy(self)
        fewer.draws, fewer._weights = taken.size, self._weights[taken]
        for name in ("_air", "_rich"):
            if name in vars(self):
                branch: Branch = getattr(self, name)
                vars(fewer)[name] = replace(branch, po2=branch.po2[taken])
        return fewer

    def arterial_po2_mmhg(self, inspired_mmhg: Array, dry_mmhg: Array, pco2_mmhg: Array, first_draw: int = 0) -> Array:
        """Arterial PO2 of the draws from first_draw on, as many as pco2_mmhg (draws, points) has rows.

        inspired_mmhg: (1 or draws, points); dry_mmhg: (points,). Values under 25 mmHg only say that the model's range
        has been left.
        """
        fraction: Array = inspired_mmhg / dry_mmhg
        by_air = np.abs(fraction - _air_fraction(inspired_mmhg)).max(axis=0) < FRACTION_TOLERANCE
        alveolar = inspired_mmhg - pco2_mmhg * carbon_dioxide_factor(fraction, RESPIRATORY_QUOTIENT)
        if by_air.all():
            return self._read(self._air, alveolar, pco2_mmhg, None, first_draw)
        result = np.empty(alveolar.shape)
        if by_air.any():
            result[:, by_air] = self._read(self._air, alveolar[:, by_air], pco2_mmhg[:, by_air], None, first_draw)
        other = ~by_air
        alveolar, pco2 = alveolar[:, other], pco2_mmhg[:, other]
        least, most = _fraction_ends(alveolar, pco2)
        place = (fraction[:, other] - least) / (most - least)
        result[:, other] = self._read(self._rich, alveolar, pco2, place, first_draw)
        return result

    @cached_property
    def _air(self) -> Branch:
        return self._branch(self.solved.air)

    @cached_property
    def _rich(self) -> Branch:
        return self._branch(self.solved.rich)

    def _branch(self, solved: Solved) -> Branch:
        """The table of each draw from the solved lungs around it."""
        shape = (self.draws, solved.places, PCO2_PLACES.size, solved.steps)
        powers = np.empty(shape)
        for start in range(0, self.draws, BLOCK):
            content = product(self._weights[start : start + BLOCK], solved.content)
            po2 = self.solved.curve.po2_mmhg(content).reshape(-1, *shape[1:])
            np.matmul(TO_POWERS, po2, out=powers[start : start + BLOCK])
        return Branch(powers, solved.log_first, solved.per_log, solved.steps)

    def _read(self, branch: Branch, alveolar: Array, pco2: Array, place: Array | None, first: int) -> Array:
        where = (np.log(np.maximum(alveolar, 1.0)) - branch.log_first) * branch.per_log
        index = np.clip(where.astype(np.int64), 0, branch.steps - 2)
        beyond = np.clip(where - index, -4.0, 1.0)
        u = (pco2 - self.solved.pco2_middle_mmhg) / self.solved.pco2_half_mmhg
        start = np.arange(first, first + alveolar.shape[0])[:, None] * branch.po2[0].size + index
        table = branch.po2.reshape(-1)

        def along(offset: int) -> Array:
            low: Array = table.take(start + offset)
            high: Array = table.take(start + (offset + 1))
            return low + beyond * (high - low)

        def over_pco2(k: int) -> Array:
            at = k * PCO2_PLACES.size * branch.steps
            total = along(at + (PCO2_PLACES.size - 1) * branch.steps)
            for power in range(PCO2_PLACES.size - 2, -1, -1):
                total = along(at + power * branch.steps) + u * total
            return total

        if place is None:
            return over_pco2(0)
        result = np.zeros(alveolar.shape)
        for k, node in enumerate(FRACTION_PLACES):
            others = [other for other in FRACTION_PLACES if other != node]
            result += np.prod([(place - other) / (node - other) for other in others], axis=0) * over_pco2(k)
        return result


class ContentCurve:
    """Oxygen content of standard blood over pressure, and back by a fine table. Monotone; 0 to 760 mmHg."""

    def __init__(self, haemoglobin_g_dl: float) -> None:
        self._haemoglobin = haemoglobin_g_dl
        pressures = np.concatenate([np.linspace(0.0, 200.0, 4001), np.linspace(200.0, MOST_PO2_MMHG, 1121)[1:]])
        held = self.content_ml_dl(pressures)
        self._per_step = CONTENT_STEPS / float(held[-1])
        even = np.linspace(0.0, float(held[-1]), CONTENT_STEPS + 1)
        self._pressures = np.interp(even, held, pressures)

    def content_ml_dl(self, po2_mmhg: Array) -> Array:
        """1.34 Hb S + 0.0031 PO2 on the standard curve."""
        return blood.oxygen_content_ml_dl(po2_mmhg, blood.saturation(po2_mmhg), self._haemoglobin)

    def po2_mmhg(self, content_ml_dl: Array) -> Array:
        """The pressure that belongs to a content; 0 for contents below 0, 760 beyond the end."""
        where = np.clip(content_ml_dl * self._per_step, 0.0, CONTENT_STEPS - 1e-6)
        index = where.astype(np.int64)
        low: Array = self._pressures.take(index)
        high: Array = self._pressures.take(index + 1)
        return low + (where - index) * (high - low)


def contents(body: Body, log_sd: Array, shunt: Array, inspired_mmhg: Array, dry_mmhg: Array, pco2_mmhg: Array) -> Array:
    """Standard oxygen content (mL/dL) at the arterial PO2 of the solved lung, over (log SD, shunt, condition...).

    NaN where the model has no answer. The three conditions share one shape. Solved once for the same nodes: while a
    digit is typed the nodes stay, and only the draws between them move. The result must not be changed.
    """
    grids = (log_sd, shunt, inspired_mmhg, dry_mmhg, pco2_mmhg)
    return _contents(body, inspired_mmhg.shape, *(np.ascontiguousarray(one).tobytes() for one in grids))


@lru_cache(maxsize=24)
def _contents(body: Body, shape: tuple[int, ...], *grids: bytes) -> Array:
    log_sd, shunt, inspired_mmhg, dry_mmhg, pco2_mmhg = (np.frombuffer(one) for one in grids)
    grid_sd, grid_shunt, index = np.meshgrid(log_sd, shunt, np.arange(inspired_mmhg.size), indexing="ij")
    solved = exchange(
        inspired_mmhg.reshape(-1)[index],
        dry_mmhg.reshape(-1)[index] + 47.0,
        pco2_mmhg.reshape(-1)[index],
        grid_sd,
        np.maximum(grid_shunt, 0.0),
        haemoglobin_g_dl=body.haemoglobin_g_dl,
        oxygen_uptake_l_min=body.oxygen_uptake_l_min,
        respiratory_quotient=RESPIRATORY_QUOTIENT,
        cardiac_output_l_min=body.cardiac_output_l_min,
        base_excess_mmol_l=body.base_excess_mmol_l,
        nodes=next(count for most, count in TABLE_NODES if log_sd.max() <= most),
    )
    known = ~solved.below_range
    content = np.full(known.shape, np.nan)
    content[known] = ContentCurve(body.haemoglobin_g_dl).content_ml_dl(solved.po2_mmhg[known])
    content = content.reshape((log_sd.size, shunt.size, *shape))
    content.flags.writeable = False
    return content


def _air_fraction(inspired_mmhg: Array) -> Array:
    """Inspired fraction on the branch of air: that of air, and above its reach what 760 mmHg dry needs."""
    return np.maximum(AIR, inspired_mmhg / GREATEST_DRY_MMHG)


def _inspired_of_air(alveolar: Array, pco2: Array) -> Array:
    by_air = alveolar + pco2 * carbon_dioxide_factor(AIR, RESPIRATORY_QUOTIENT)
    return np.where(by_air <= AIR * GREATEST_DRY_MMHG, by_air, _inspired_at(alveolar, pco2, GREATEST_DRY_MMHG))


def _inspired_at(alveolar: Array, pco2: Array, dry_mmhg: float) -> Array:
    """The alveolar gas equation solved for the inspired PO2 at a given dry pressure."""
    return (alveolar + pco2 / RESPIRATORY_QUOTIENT) / (1.0 - pco2 * (1.0 - 1.0 / RESPIRATORY_QUOTIENT) / dry_mmhg)


def _fraction_ends(alveolar: Array, pco2: Array) -> tuple[Array, Array]:
    """The least and the greatest inspired fraction that gives this alveolar PO2, at the ends of dry pressure."""
    least = _inspired_at(alveolar, pco2, GREATEST_DRY_MMHG) / GREATEST_DRY_MMHG
    most = np.minimum(_inspired_at(alveolar, pco2, LEAST_DRY_MMHG) / LEAST_DRY_MMHG, RICHEST)
    return least, most
