"""Published equations from a measurement on the ground to PaO2 at altitude, read from profiles/regressions.toml.

Each is for rest on air, for people like those it was made from. Outside its ranges the number is still given, marked
as not applying, with the reasons; it is never clipped. Where an input is missing there is no number.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any

from planner.air.atmosphere import isa_pressure_mmhg
from planner.catalogue import read_entries
from planner.errors import InputError, ProfileError
from planner.evidence.ceiling import ceiling_po2_mmhg
from planner.units import ft_from_m

PROFILE = "regressions.toml"
LEAST_SPREAD_MMHG = 7.5  # 1 kPa: no published equation is shown narrower for a new person
SEA_LEVEL_WITHIN_M = 300.0  # a ground value taken higher is not a sea-level value; planning assumption

INPUT_WORDS = {
    "pao2_mmhg": "PaO₂ on the ground",
    "fev1_l": "FEV₁ in litres",
    "fev1_percent": "FEV₁ per cent of predicted",
    "tlco_percent": "TLCO per cent of predicted",
}
INPUT_UNITS = {
    "pao2_mmhg": "mmHg",
    "fev1_l": "L",
    "fev1_percent": "%",
    "tlco_percent": "%",
    "altitude_kft": "thousand ft",
}
DIAGNOSIS_WORDS = {
    "copd": "COPD",
    "interstitial": "interstitial lung disease",
    "cystic_fibrosis": "cystic fibrosis",
    "bronchiectasis": "bronchiectasis",
    "asthma": "asthma",
    "pulmonary_vascular": "pulmonary vascular disease",
    "chest_wall": "chest wall disease",
    "neuromuscular": "neuromuscular disease",
    "obesity_hypoventilation": "obesity hypoventilation",
    "other": "another diagnosis",
}
_KEYS = {
    "id", "name", "detail", "constant_mmhg", "coefficients", "inputs", "altitude_m", "diagnoses", "spread_mmhg",
    "population", "source", "note", "seen",
}  # fmt: skip


@dataclass(frozen=True)
class Regression:
    """One published equation with the people it was made from. Ranges are (least, most)."""

    id: str
    name: str
    detail: str
    constant_mmhg: float
    coefficients: Mapping[str, float]
    inputs: Mapping[str, tuple[float, float]]
    altitude_m: tuple[float, float]
    diagnoses: tuple[str, ...]
    spread_mmhg: float
    population: str
    source: str
    note: str
    seen: bool

    def formula(self) -> str:
        """The equation in words, with its numbers."""
        terms = [f"{self.constant_mmhg:g}"]
        for name, coefficient in self.coefficients.items():
            sign = "+" if coefficient >= 0 else "−"
            words = INPUT_WORDS.get(name, "altitude")
            terms.append(f"{sign} {abs(coefficient):g} × {words} ({INPUT_UNITS[name]})")
        return "PaO₂ at altitude (mmHg) = " + " ".join(terms)


@dataclass(frozen=True)
class Prediction:
    """PaO2 at altitude with its spread (90 % of new people); None where an input is missing."""

    pao2_mmhg: float | None
    low_mmhg: float | None
    high_mmhg: float | None
    applies: bool
    reasons: list[str]


def all_regressions() -> tuple[Regression, ...]:
    """Every equation: the packaged ones, then the service's own. Raises ProfileError for a faulty entry."""
    return tuple(_regressions().values())


def predict(
    name: str,
    *,
    altitude_m: float,
    diagnosis: str | None = None,
    baseline_elevation_m: float | None = None,
    lowest_paco2_mmhg: float | None = None,
    **measurements: float | None,
) -> Prediction:
    """PaO2 at altitude_m by one published equation, and whether this person is like those it was made from.

    measurements: pao2_mmhg, fev1_l, fev1_percent, tlco_percent, None where not known. baseline_elevation_m: where the
    ground value was taken; None counts as not known and is said. Raises InputError for an unknown name.
    """
    regression = _regressions().get(name)
    if regression is None:
        raise InputError("name", f"There is no equation {name!r}; known are {', '.join(_regressions())}.")
    reasons = [f"{INPUT_WORDS[key]} is not known." for key in regression.inputs if measurements.get(key) is None]
    if reasons:
        return Prediction(None, None, None, False, reasons)
    known = {key: float(value) for key, value in measurements.items() if value is not None}
    known["altitude_kft"] = ft_from_m(altitude_m) / 1000.0
    pao2 = regression.constant_mmhg + sum(c * known[key] for key, c in regression.coefficients.items())
    spread = max(regression.spread_mmhg, LEAST_SPREAD_MMHG)
    reasons = _outside(regression, known, altitude_m, diagnosis, baseline_elevation_m)
    ceiling = ceiling_po2_mmhg(float(isa_pressure_mmhg(altitude_m)), lowest_paco2_mmhg)
    if pao2 > ceiling:
        reasons.append(
            f"It gives {pao2:.0f} mmHg, more than the {ceiling:.0f} mmHg the air in the lung can have there."
        )
    return Prediction(pao2, pao2 - spread, pao2 + spread, not reasons, reasons)


def _outside(
    regression: Regression,
    known: Mapping[str, float],
    altitude_m: float,
    diagnosis: str | None,
    baseline_elevation_m: float | None,
) -> list[str]:
    reasons = []
    if diagnosis is None:
        reasons.append("The diagnosis group is not known.")
    elif diagnosis not in regression.diagnoses:
        made_for = " or ".join(DIAGNOSIS_WORDS[one] for one in regression.diagnoses)
        reasons.append(f"It was made from people with {made_for}, not {DIAGNOSIS_WORDS.get(diagnosis, diagnosis)}.")
    for key, (least, most) in regression.inputs.items():
        if not least <= known[key] <= most:
            unit = INPUT_UNITS[key]
            reasons.append(f"{INPUT_WORDS[key]} of {known[key]:g} {unit} is outside its {least:g} to {most:g} {unit}.")
    low, high = regression.altitude_m
    if not low <= altitude_m <= high:
        reasons.append(f"An altitude of {altitude_m:.0f} m is outside its {low:.0f} to {high:.0f} m.")
    if baseline_elevation_m is None:
        reasons.append("Where the ground value was taken is not known.")
    elif baseline_elevation_m > SEA_LEVEL_WITHIN_M:
        reasons.append(
            f"The ground value was taken at {baseline_elevation_m:.0f} m; it was made from values near sea level."
        )
    return reasons


@cache
def _regressions() -> dict[str, Regression]:
    return {key: _read(row) for key, row in read_entries(PROFILE).items()}


def _read(row: Mapping[str, Any]) -> Regression:
    def wrong(key: str, message: str) -> ProfileError:
        return ProfileError(PROFILE, f"{row['id']}.{key}", message)

    unknown = sorted(set(row) - _KEYS)
    if unknown:
        raise wrong(unknown[0], f"this key is not known; known keys are {', '.join(sorted(_KEYS))}")
    for key in ("name", "detail", "population", "source"):
        if not isinstance(row.get(key), str) or not row[key]:
            raise wrong(key, "a text is needed")
    for key in ("constant_mmhg", "spread_mmhg"):
        if not isinstance(row.get(key), (int, float)):
            raise wrong(key, "a number is needed")
    coefficients = row.get("coefficients", {})
    allowed = set(INPUT_UNITS)
    for key, value in coefficients.items():
        if key not in allowed or not isinstance(value, (int, float)):
            raise wrong(f"coefficients.{key}", f"a number for one of {', '.join(sorted(allowed))} is needed")
    ranges = {key: _range(wrong, f"inputs.{key}", value) for key, value in row.get("inputs", {}).items()}
    if set(ranges) != set(coefficients) - {"altitude_kft"}:
        raise wrong("inputs", "a range is needed for each coefficient's input, and for no other")
    diagnoses = row.get("diagnoses", [])
    if not diagnoses or not set(diagnoses) <= set(DIAGNOSIS_WORDS):
        raise wrong("diagnoses", f"a list of {', '.join(DIAGNOSIS_WORDS)} is needed")
    return Regression(
        id=row["id"],
        name=row["name"],
        detail=row["detail"],
        constant_mmhg=float(row["constant_mmhg"]),
        coefficients={key: float(value) for key, value in coefficients.items()},
        inputs=ranges,
        altitude_m=_range(wrong, "altitude_m", row.get("altitude_m")),
        diagnoses=tuple(diagnoses),
        spread_mmhg=float(row["spread_mmhg"]),
        population=row["population"],
        source=row["source"],
        note=row.get("note", ""),
        seen=bool(row.get("seen", False)),
    )


def _range(wrong: Any, key: str, value: Any) -> tuple[float, float]:
    if not isinstance(value, list) or len(value) != 2 or not value[0] < value[1]:
        raise wrong(key, "a range [least, most] is needed")
    return float(value[0]), float(value[1])
