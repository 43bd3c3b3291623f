"""The fitted lung of one person: many drawn lungs, and what the blood of each is in any air."""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from planner.air.inspired import WATER_VAPOUR_MMHG
from planner.air.ranges import Array, FloatOrArray, require_within
from planner.errors import InputError
from planner.lung import diffusion, ventilation
from planner.lung.alveolar import carbon_dioxide_factor
from planner.lung.blood_shift import SaturationCurve
from planner.lung.gas_exchange import HIGHEST_LOG_SD
from planner.lung.reading import Activity, Person
from planner.lung.response import AIR, RESPIRATORY_QUOTIENT, Body, Response, SolvedLungs

# The model's own error for one person, SD per fall of inspired PO2: with the other spreads it makes the residual SD
# of 3.6 to 5 mmHg of published predictions from a ground gas (Edvardsen 2013, Kelly 2009, Dillard 1989).
STRUCTURAL_SD_MMHG = 3.0
REFERENCE_FALL_MMHG = ventilation.REFERENCE_FALL_MMHG
ANCHORED_SHARE = 0.7  # of that error between and beyond two anchors, over the distance to the nearest; assumption

MOST_DEPRESSION = 0.4
LOWEST_PCO2_MMHG, HIGHEST_PCO2_MMHG = 12.0, 120.0
LOWEST_PCO2_SHARE, PCO2_MARGIN_MMHG = 0.6, 4.0  # how far from that at rest the tables reach
LEAST_MMHG = 25.0  # an arterial PO2 below is "below model range"
LOG_SD_SNAP, SHUNT_SNAP, PCO2_SNAP_MMHG = 0.4, 0.05, 4.0
WIDEST_SHARED = 1.5  # spans of solved lungs read again, over those that would be solved anew: wider ones are coarser
BLOCK = 125  # draws worked together; their arrays stay in the processor's cache
WALKING_STRAIN = 2.0  # of the share that diffusion takes: 19 % of the gradient at rest, 40 % on exercise (Agusti 1991)
CURVE_POINTS = 16
CURVE_START_MMHG = 40.0

Span = tuple[float, float]


@dataclass(frozen=True, eq=False)
class Arterial:
    """Arterial blood of every draw at every point: arrays (draws, points), pressures in mmHg.

    A draw below the model's range stands at its lower end, 25 mmHg: a quantile there reads "25 or lower".
    share_below (points,) is the share of such draws; below_range (points,) is true where they are most.
    """

    po2_mmhg: Array
    saturation: Array
    paco2_mmhg: Array
    share_below: Array
    below_range: NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class FittedLung:
    """Many lungs that agree with what was measured. Arrays have shape (draws,)."""

    person: Person
    body: Body
    log_sd: Array
    shunt: Array
    paco2_mmhg: Array  # at rest, where the first reading was taken
    hypoxic_gain_l_min: Array
    fall_z: Array
    structural_z: Array
    anchored_z: Array
    walking_extra_mmhg: Array
    diffusing_capacity: Array | None
    sleep_rise_mmhg: Array
    acclimatised_exponent: Array
    base_inspired_mmhg: float
    anchors_mmhg: tuple[float, ...]  # inspired PO2 of the readings that tie the model down
    widened: tuple[str, ...]
    _solved: dict[tuple[bool, bool], SolvedLungs] = field(default_factory=dict, repr=False)
    _responses: dict[tuple[Activity, bool], Response] = field(default_factory=dict, repr=False)

    def arterial(
        self,
        inspired_po2_mmhg: FloatOrArray,
        barometric_mmhg: FloatOrArray,
        *,
        activity: Activity = "rest",
        hours_at_altitude: FloatOrArray = 0.0,
        ventilation_depression: FloatOrArray = 0.0,
    ) -> Arterial:
        """Arterial blood in this air.

        inspired_po2_mmhg: scalar, (points,) or (draws, points), 20 to 760, added oxygen included; barometric_mmhg and
        hours_at_altitude (since arrival, 0 is acute): scalar or (points,). ventilation_depression: share of alveolar
        ventilation lost beyond sleep, 0 to 0.4. Raises InputError outside.
        """
        inspired, dry, hours = self._checked(inspired_po2_mmhg, barometric_mmhg, hours_at_altitude)
        depression = require_within(
            "ventilation_depression", "Lost ventilation", ventilation_depression, 0.0, MOST_DEPRESSION
        )
        shape = (self.log_sd.size, inspired.shape[1])
        po2, saturation, pco2, below = np.empty(shape), np.empty(shape), np.empty(shape), np.zeros(shape[1])
        for start in range(0, shape[0], BLOCK):
            rows = slice(start, start + BLOCK)
            breathed = inspired if inspired.shape[0] == 1 else inspired[rows]
            found, pco2[rows] = self._gases(breathed, dry, hours, activity, depression, rows)
            below += (found < LEAST_MMHG).sum(axis=0)
            po2[rows] = np.maximum(found, LEAST_MMHG)
            saturation[rows] = self.blood.saturation(po2[rows], pco2[rows])
        share = below / shape[0]
        return Arterial(po2, saturation, pco2, share, share > 0.5)

    def _gases(
        self, inspired: Array, dry: Array, hours: Array, activity: Activity, depression: Array, rows: slice
    ) -> tuple[Array, Array]:
        """Arterial PO2 and PCO2 of some of the draws, as the model has them, (rows, points)."""
        pco2 = self._pco2_mmhg(inspired, hours, rows)
        if activity == "asleep":
            pco2 = pco2 + self.sleep_rise_mmhg[rows, None]
        pco2 = pco2 / (1.0 - depression)
        po2 = self._response(activity, bool((depression > 0.0).any())).arterial_po2_mmhg(
            inspired, dry, pco2, rows.start
        )
        po2 += self._model_error_mmhg(inspired, rows)
        if self.diffusing_capacity is not None:
            strain = WALKING_STRAIN if activity == "walking" else 1.0
            fall = min(self.base_inspired_mmhg, ventilation.SEA_LEVEL_INSPIRED_MMHG) - inspired
            po2 -= strain * diffusion.diffusion_fall_mmhg(self.diffusing_capacity[rows, None], fall)
        if activity == "walking":
            po2 -= self.walking_extra_mmhg[rows, None]
        ideal = inspired - pco2 * carbon_dioxide_factor(inspired / dry, RESPIRATORY_QUOTIENT)
        return np.minimum(po2, ideal), pco2  # no blood is above the alveolar gas it met

    @cached_property
    def blood(self) -> SaturationCurve:
        """Saturation of this person's blood."""
        return SaturationCurve(self.body.haemoglobin_g_dl, self.body.base_excess_mmol_l)

    def _checked(
        self, inspired_po2_mmhg: FloatOrArray, barometric_mmhg: FloatOrArray, hours_at_altitude: FloatOrArray
    ) -> tuple[Array, Array, Array]:
        inspired = np.atleast_2d(
            require_within("inspired_po2_mmhg", "Inspired oxygen pressure", inspired_po2_mmhg, 20.0, 760.0, "mmHg")
        )
        pressure = require_within("barometric_mmhg", "Barometric pressure", barometric_mmhg, 230.0, 830.0, "mmHg")
        dry = np.broadcast_to(np.atleast_1d(pressure) - WATER_VAPOUR_MMHG, inspired.shape[-1:])
        hours = require_within("hours_at_altitude", "Time at altitude", hours_at_altitude, 0.0, np.inf, "h")
        if (inspired > dry * (1.0 + 1e-9)).any():
            raise InputError("inspired_po2_mmhg", "Inspired oxygen is above the pressure of the dry gas breathed.")
        if inspired.shape[0] not in (1, self.log_sd.size):
            raise InputError("inspired_po2_mmhg", f"{inspired.shape[0]} rows were given for {self.log_sd.size} draws.")
        return inspired, dry, hours

    def _response(self, activity: Activity, depressed: bool = False) -> Response:
        """The table for one activity, made when first asked for; a wider one where ventilation is lost."""
        if (activity, depressed) not in self._responses:
            worse = ventilation.SLEEP_LOG_SD_FACTOR if activity == "asleep" else 1.0
            log_sd = np.minimum(self.log_sd * worse, HIGHEST_LOG_SD)
            solved = self._solved_lungs(activity == "walking", depressed)
            self._responses[activity, depressed] = Response(solved, log_sd, self.shunt)
        return self._responses[activity, depressed]

    def _solved_lungs(self, walking: bool, depressed: bool) -> SolvedLungs:
        """Solved lungs that span the draws: one set for rest and sleep, another for walking."""
        if (walking, depressed) not in self._solved:
            body, log_sd, shunt, pco2 = self._spans(walking, depressed)
            # Spans are rounded outwards, so that the solved tables stay the same while a digit is typed.
            self._solved[walking, depressed] = SolvedLungs(
                body,
                _outwards(*log_sd, LOG_SD_SNAP, HIGHEST_LOG_SD),
                _outwards(*shunt, SHUNT_SNAP),
                _outwards(*pco2, PCO2_SNAP_MMHG, HIGHEST_PCO2_MMHG),
            )
        return self._solved[walking, depressed]

    def _spans(self, walking: bool, depressed: bool) -> tuple[Body, Span, Span, Span]:
        """The body, and between what its draws lie: log SD, shunt, and the arterial PCO2 that may be asked for."""
        body, worse, rise = self.body, ventilation.SLEEP_LOG_SD_FACTOR, float(self.sleep_rise_mmhg.max())
        if walking:
            worse, rise = 1.0, 0.0
            body = replace(
                body,
                oxygen_uptake_l_min=body.oxygen_uptake_l_min * ventilation.WALKING_UPTAKE_FACTOR,
                cardiac_output_l_min=body.cardiac_output_l_min * ventilation.WALKING_OUTPUT_FACTOR,
            )
        lowest = max(LOWEST_PCO2_SHARE * float(self.paco2_mmhg.min()), LOWEST_PCO2_MMHG)
        highest = float(self.paco2_mmhg.max()) + PCO2_MARGIN_MMHG + rise
        if depressed:
            highest /= 1.0 - MOST_DEPRESSION
        log_sd = (float(self.log_sd.min()), min(worse * float(self.log_sd.max()), HIGHEST_LOG_SD))
        return body, log_sd, (0.0, float(self.shunt.max())), (lowest, min(highest, HIGHEST_PCO2_MMHG))

    def with_tables_of(self, other: FittedLung) -> FittedLung:
        """The same lung, reading from the solved lungs of another at rest where they span its draws, and not far more.

        What is read differs from its own tables by less than the error that both have (planner.lung.response).
        """
        solved, (body, log_sd, *rest) = other._solved_lungs(False, False), self._spans(False, False)
        low, high = _outwards(*log_sd, LOG_SD_SNAP, HIGHEST_LOG_SD)
        as_fine = solved.log_sd_nodes[-1] - solved.log_sd_nodes[0] <= WIDEST_SHARED * (high - low)
        shares = as_fine and solved.covers(body, log_sd, *rest)
        return replace(self, _solved={(False, False): solved} if shares else {})

    def _pco2_mmhg(self, inspired: Array, hours: Array, rows: slice) -> Array:
        """Arterial PCO2 awake, (draws, points): acute response, its spread, and what days have added."""
        rest = self.paco2_mmhg[rows, None]
        distance = ventilation.share_of_reference_fall(self.base_inspired_mmhg, inspired)
        spread = ventilation.FALL_SPREAD_MMHG * self.fall_z[rows, None] * distance
        if not self.person.can_hyperventilate:
            return rest + np.maximum(spread, -ventilation.BOUNDED_FALL_MMHG)
        acute = self._acute_curve_at(inspired, rows) + spread
        ratio = inspired / min(self.base_inspired_mmhg, ventilation.SEA_LEVEL_INSPIRED_MMHG)
        target = ventilation.acclimatised_pco2_mmhg(rest, ratio, self.acclimatised_exponent[rows, None])
        return acute + ventilation.acclimatised_share(hours) * np.minimum(target - acute, 0.0)

    @cached_property
    def _acute_curve(self) -> Array:
        """Acute PCO2 over inspired PO2 from 40 mmHg to that of the first reading, (draws, CURVE_POINTS)."""
        inspired = _unstretched(
            np.linspace(CURVE_START_MMHG, float(_stretched(self.base_inspired_mmhg)), CURVE_POINTS)
        )[None]
        dry = inspired[0] / np.maximum(AIR, inspired[0] / 760.0)
        response = self._response("rest")

        def saturation_at(pco2: Array) -> Array:
            everywhere = np.broadcast_to(pco2, (pco2.shape[0], CURVE_POINTS))
            po2 = response.arterial_po2_mmhg(inspired, dry, everywhere)
            return self.blood.saturation(np.maximum(po2, 0.0), pco2)

        rest = self.paco2_mmhg[:, None]
        return ventilation.acute_pco2_mmhg(
            saturation_at, rest, saturation_at(rest)[:, -1:], self.hypoxic_gain_l_min[:, None]
        )

    def _acute_curve_at(self, inspired: Array, rows: slice) -> Array:
        curve = self._acute_curve[rows]
        step = (float(_stretched(self.base_inspired_mmhg)) - CURVE_START_MMHG) / (CURVE_POINTS - 1)
        where = np.clip((_stretched(inspired) - CURVE_START_MMHG) / step, 0.0, CURVE_POINTS - 1.000001)
        index = where.astype(np.int64)
        share = where - index
        if inspired.shape[0] == 1:
            low, high = curve[:, index[0]], curve[:, index[0] + 1]
        else:
            low = np.take_along_axis(curve, index, axis=1)
            high = np.take_along_axis(curve, index + 1, axis=1)
        return low + share * (high - low)

    def _model_error_mmhg(self, inspired: Array, rows: slice) -> Array:
        """The model's own error of each draw: it grows with the distance from where the lung was measured."""
        error = STRUCTURAL_SD_MMHG * self.structural_z[rows, None] * model_distance(self.base_inspired_mmhg, inspired)
        if len(self.anchors_mmhg) > 1:
            nearest = np.min([np.abs(model_distance(anchor, inspired)) for anchor in self.anchors_mmhg], axis=0)
            error = error + ANCHORED_SHARE * STRUCTURAL_SD_MMHG * self.anchored_z[rows, None] * nearest
        return error


def _outwards(least: float, most: float, step: float, limit: float = math.inf) -> tuple[float, float]:
    """A span rounded outwards to whole steps, up to the limit."""
    return step * math.floor(least / step), min(step * math.ceil(most / step), limit)


def model_distance(base_inspired_mmhg: float, inspired_mmhg: FloatOrArray) -> FloatOrArray:
    """How far this air is from that of a reading, in falls of 41 mmHg of inspired PO2; negative where it is richer.

    Beyond air at sea level the distance grows with the logarithm: there blood changes little. Planning assumption.
    """
    return (_stretched(base_inspired_mmhg) - _stretched(inspired_mmhg)) / REFERENCE_FALL_MMHG


def _stretched(inspired_mmhg: FloatOrArray) -> FloatOrArray:
    """Inspired PO2, above that of air at sea level on a logarithmic scale that joins smoothly."""
    sea_level = ventilation.SEA_LEVEL_INSPIRED_MMHG
    return np.minimum(inspired_mmhg, sea_level) + sea_level * np.log(np.maximum(inspired_mmhg / sea_level, 1.0))


def _unstretched(stretched_mmhg: Array) -> Array:
    sea_level = ventilation.SEA_LEVEL_INSPIRED_MMHG
    return np.minimum(stretched_mmhg, sea_level) * np.exp(np.maximum(stretched_mmhg / sea_level - 1.0, 0.0))
