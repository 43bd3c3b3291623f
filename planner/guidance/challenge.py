"""The hypoxic challenge test: planned for this laboratory's pressure, read at the altitude it really simulated."""

from __future__ import annotations

from dataclasses import dataclass

from planner.air.atmosphere import isa_altitude_m, isa_pressure_mmhg, station_pressure_mmhg
from planner.air.inspired import AIR_OXYGEN, WATER_VAPOUR_MMHG, equivalent_fio2, inspired_po2_mmhg
from planner.case.measurements import Challenge, ChallengeGas
from planner.case.policy import Policy
from planner.errors import InputError
from planner.units import ft_from_m, kpa_from_mmhg

SOURCE = "BTS clinical statement on air travel, Thorax 2022;77:329"
USUAL_FIO2 = 0.15  # 15 or 15.1 % in common practice
DURATION_MIN = 20.0  # 20 min or until steady: BTS 2022; SEPAR 2007
STOP_SPO2_PERCENT = 80.0  # stopped at 80 %: Seccombe LM et al., Thorax 2004;59:966
ACT_SPO2_PERCENT = 85.0
ACIDOSIS_PH = 7.35
RISE_MMHG = 7.5  # 1 kPa
NEAR_ALTITUDE_M = 150.0  # a mixture this near the wanted altitude is taken as meant; planning assumption
HIGHEST_LABORATORY_FIO2 = 0.2093

TO_RECORD = (
    "Blood gas (arterial or capillary) before, and at the end on the mixture",
    "SpO₂ and heart rate before and every minute",
    "Symptoms, and why it ended if it ended early",
    "The laboratory's pressure and the oxygen fraction of the mixture",
    "On oxygen: the device, the flow, how it was titrated, and a further gas with pH and PCO₂",
)


@dataclass(frozen=True)
class ChallengePlan:
    """What to breathe in this laboratory to meet the air of an altitude, and how."""

    target_altitude_m: float
    laboratory_mmhg: float
    fio2: float
    usual_fio2_simulates_m: float
    duration_min: float
    stop_rule: str
    to_record: tuple[str, ...]
    source: str


@dataclass(frozen=True)
class ChallengeReading:
    """What a test showed. None: not measured, or its pressure is not known."""

    simulated_m: float | None
    pao2_mmhg: float | None
    lowest_spo2_percent: float | None
    below_threshold: bool | None
    headline: str
    band_text: str
    acidosis_on_oxygen: bool | None
    acidosis_text: str
    warnings: tuple[str, ...]
    asks: tuple[str, ...]


def plan_challenge(laboratory_barometric_mmhg: float, target_altitude_m: float) -> ChallengePlan:
    """The mixture for an altitude at this laboratory's pressure.

    Raises InputError where the laboratory already stands higher than the altitude asked for.
    """
    fio2 = equivalent_fio2(float(isa_pressure_mmhg(target_altitude_m)), laboratory_barometric_mmhg)
    if fio2 > HIGHEST_LABORATORY_FIO2:
        raise InputError(
            "target_altitude_m", "The laboratory already has less oxygen in its air than the altitude asked for."
        )
    return ChallengePlan(
        target_altitude_m=target_altitude_m,
        laboratory_mmhg=laboratory_barometric_mmhg,
        fio2=fio2,
        usual_fio2_simulates_m=simulated_altitude_m(USUAL_FIO2, laboratory_barometric_mmhg),
        duration_min=DURATION_MIN,
        stop_rule=f"Give oxygen or stop at SpO₂ below {ACT_SPO2_PERCENT:g} % with distress, and at "
        f"{STOP_SPO2_PERCENT:g} % in any case, or as your laboratory's own rule says.",
        to_record=TO_RECORD,
        source=SOURCE,
    )


def simulated_altitude_m(fio2: float, laboratory_barometric_mmhg: float) -> float:
    """Altitude in the standard atmosphere whose air has the inspired PO2 of this mixture in this laboratory."""
    inspired = inspired_po2_mmhg(laboratory_barometric_mmhg, fio2)
    return float(isa_altitude_m(inspired / AIR_OXYGEN + WATER_VAPOUR_MMHG))


def read_challenge(test: Challenge, policy: Policy) -> ChallengeReading:
    """A recorded test against the thresholds of the policy. A missing pressure is asked for, never guessed."""
    gas = _gas(test, "challenge")
    pao2 = None if gas is None else gas.pao2_mmhg
    lowest = min((one.spo2_percent for one in test.rows if one.phase == "challenge" and one.spo2_percent), default=None)
    asks, warnings = _asks(test, pao2, lowest), _warnings(test)
    simulated = _simulated(test)
    if simulated is not None and policy.planning_cabin_altitude_m - simulated > NEAR_ALTITUDE_M:
        warnings.append(
            f"It simulated {_height(simulated)}, less than the planned {_height(policy.planning_cabin_altitude_m)}. "
            "A result above the threshold does not hold for the plan."
        )
    below = _below(pao2, lowest, policy, ended_early=bool(test.ended_early))
    if simulated is None:
        headline = "The altitude it simulated is not known."
    else:
        headline = f"{100 * (test.challenge_fio2 or 0):.1f} % oxygen here simulated {_height(simulated)}."
    acidosis, acidosis_text = _acidosis(test)
    return ChallengeReading(
        simulated_m=simulated,
        pao2_mmhg=pao2,
        lowest_spo2_percent=lowest,
        below_threshold=below,
        headline=headline,
        band_text=_band_text(pao2, lowest, below, policy),
        acidosis_on_oxygen=acidosis,
        acidosis_text=acidosis_text,
        warnings=tuple(warnings),
        asks=tuple(asks),
    )


def _gas(test: Challenge, phase: str) -> ChallengeGas | None:
    return next((one for one in reversed(test.gases) if one.phase == phase), None)


def _simulated(test: Challenge) -> float | None:
    if test.challenge_fio2 is None or (test.place.elevation_m is None and test.place.barometric_mmhg is None):
        return None
    return simulated_altitude_m(
        test.challenge_fio2, station_pressure_mmhg(test.place.elevation_m, test.place.barometric_mmhg)
    )


def _below(pao2: float | None, lowest: float | None, policy: Policy, *, ended_early: bool) -> bool | None:
    """Below a threshold by either measure. A test that ended early can show "below" but not "above"."""
    by_gas = None if pao2 is None else pao2 < policy.lower_threshold_mmhg
    by_oximeter = None if lowest is None else lowest < policy.spo2_threshold_percent
    if by_gas or by_oximeter:
        return True
    if ended_early or (by_gas is None and by_oximeter is None):
        return None
    return False


def _band_text(pao2: float | None, lowest: float | None, below: bool | None, policy: Policy) -> str:
    if below is None:
        return "What was recorded does not settle the reading."
    limit = f"{kpa_from_mmhg(policy.lower_threshold_mmhg):.1f} kPa or {policy.spo2_threshold_percent:g} %"
    seen = []
    if pao2 is not None:
        seen.append(f"PaO₂ {kpa_from_mmhg(pao2):.1f} kPa ({pao2:.0f} mmHg)")
    if lowest is not None:
        seen.append(f"lowest SpO₂ {lowest:g} %")
    side = "below" if below else "not below"
    found = " and ".join(seen)
    return f"{found[0].upper()}{found[1:]}: {side} {limit}."


def _asks(test: Challenge, pao2: float | None, lowest: float | None) -> list[str]:
    asks = []
    if test.place.elevation_m is None and test.place.barometric_mmhg is None:
        asks.append("What was the laboratory's pressure or elevation? Without it the altitude simulated is not known.")
    if test.challenge_fio2 is None:
        asks.append("Which oxygen fraction had the mixture?")
    if pao2 is None and lowest is None:
        asks.append("What were PaO₂ and the lowest SpO₂ on the mixture?")
    if test.ended_early is None and test.duration_min is not None and test.duration_min < DURATION_MIN:
        asks.append(f"It lasted {test.duration_min:g} min. Did it end early, and why?")
    return asks


def _warnings(test: Challenge) -> list[str]:
    warnings = []
    if test.ended_early:
        warnings.append("It ended early: a value not below the threshold does not settle the reading.")
    if test.oxygen_titrated_by == "cannula_under_mask":
        warnings.append(
            "Oxygen was titrated by cannula under the hypoxic mask, which overstates the effect: 2 L/min gave 12.5 kPa "
            "there and 8.6 kPa in a chamber (Akerø A et al., Aviat Space Environ Med 2011). Do not carry the flow over."
        )
    if test.oxygen_titrated_by is None and _gas(test, "on_oxygen") is not None:
        warnings.append("How the flow on oxygen was titrated is not recorded; under a mask it would be overstated.")
    return warnings


def _acidosis(test: Challenge) -> tuple[bool | None, str]:
    """BTS 2022: on oxygen, pH below 7.35 together with a PCO2 rise above 1 kPa."""
    on_oxygen, before = _gas(test, "on_oxygen"), _gas(test, "before")
    if on_oxygen is None:
        return None, "No gas on oxygen"
    if on_oxygen.ph is None or on_oxygen.paco2_mmhg is None or before is None or before.paco2_mmhg is None:
        return None, "pH and PCO₂ before and on oxygen are needed"
    rise = on_oxygen.paco2_mmhg - before.paco2_mmhg
    found = on_oxygen.ph < ACIDOSIS_PH and rise > RISE_MMHG
    return found, f"On oxygen pH {on_oxygen.ph:.2f}, PCO₂ {kpa_from_mmhg(rise):+.1f} kPa ({rise:+.0f} mmHg)"


def _height(metres: float) -> str:
    return f"{metres:,.0f} m ({ft_from_m(metres):,.0f} ft)"
