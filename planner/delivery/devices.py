"""The devices oxygen is breathed through, as unbranded classes read from the profile and checked.

A flow is never shown without its device, and the setting of a pulse device is never litres per minute.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from math import isfinite
from typing import Any, Literal, cast, get_args

from planner.catalogue import read_entries
from planner.errors import InputError, ProfileError

PROFILE = "delivery.toml"

Activity = Literal["rest", "walking", "asleep"]
Kind = Literal["cannula", "reservoir_cannula", "venturi", "simple_mask", "reservoir", "pulse"]
Unit = Literal["L/min", "setting"]
Supply = Literal["any", "cylinder", "concentrator", "airline"]
Meter = Literal["mass", "gauge_orifice", "open_tube", "ambient_volume"]

ACTIVITIES: tuple[Activity, ...] = get_args(Activity)
PART_KINDS = ("home", "wait", "road", "rail", "ship", "walk", "flight", "layover", "stay")
USUAL_IDS = ("cannula", "airline", "pulse_conserver", "pulse_concentrator")
LEAST_FLOW_L_MIN, MOST_FLOW_L_MIN = 0.1, 15.0
MOST_SETTING = 10.0
MOST_BOLUS_ML = 200.0
LEAST_BREATHS_MIN, MOST_BREATHS_MIN = 8.0, 50.0
_ACTIVITY_WORDS = {"rest": "at rest", "walking": "walking", "asleep": "asleep"}


@dataclass(frozen=True)
class PulseRow:
    """One row of a pulse device's published table: mL (15 degC, 1 atm) in one pulse."""

    setting: float
    breathing_rate_min: float
    bolus_ml: float


@dataclass(frozen=True)
class Device:
    """One class of device. steps: the flows (L/min) or settings that are tried, rising.

    fraction: what a Venturi mask gives. mask_fractions: oxygen fraction on the ground at each step of another mask.
    pulse_rows: mL by setting and breathing rate; pulse_kind says what holds between and beyond the rows.
    part_kinds: the kinds of part it may be used in. source says where its numbers are from.
    """

    id: str
    name: str
    kind: Kind
    unit: Unit
    steps: tuple[float, ...]
    supply: Supply
    meter: Meter
    activities: tuple[Activity, ...]
    part_kinds: tuple[str, ...]
    fraction: float | None
    mask_fractions: tuple[float, ...]
    pulse_kind: Literal["fixed_bolus", "fixed_minute_volume"] | None
    pulse_rows: tuple[PulseRow, ...]
    source: str
    note: str

    def amount_text(self, amount: float) -> str:
        """The amount in words that name the device, such as "2 L/min by nasal cannula"."""
        shown = f"{amount:g} L/min" if self.unit == "L/min" else f"setting {amount:g}"
        return f"{shown} by {self.name[0].lower()}{self.name[1:]}"


def load_devices() -> dict[str, Device]:
    """Every device by id: the packaged classes, then the service's own. Raises ProfileError for a faulty entry."""
    return {device_id: read_device(row) for device_id, row in read_entries(PROFILE).items()}


def shortlist(devices: Mapping[str, Device], used_ids: Iterable[str] = ()) -> tuple[Device, ...]:
    """Devices worth trying, in the order of preference: those used or decided already, then the usual ones."""
    wanted = dict.fromkeys((*used_ids, *USUAL_IDS))
    return tuple(devices[device_id] for device_id in wanted if device_id in devices)


def require_amount(device: Device, amount: float) -> None:
    """Raises InputError unless the device can give this flow or has this setting."""
    if device.unit == "setting":
        if amount not in device.steps:
            known = ", ".join(f"{step:g}" for step in device.steps)
            raise InputError(
                "setting", f"{device.name} has no setting {amount:g}; its settings are {known}, not litres per minute."
            )
        return
    if not LEAST_FLOW_L_MIN <= amount <= MOST_FLOW_L_MIN:
        raise InputError(
            "flow_l_min",
            f"A flow of {amount:g} L/min by {device.name} is outside the "
            f"{LEAST_FLOW_L_MIN:g} to {MOST_FLOW_L_MIN:g} L/min allowed.",
        )
    if device.kind in ("simple_mask", "reservoir") and not device.steps[0] <= amount <= device.steps[-1]:
        raise InputError(
            "flow_l_min",
            f"{device.name} needs {device.steps[0]:g} to {device.steps[-1]:g} L/min, "
            f"because less lets breathed-out carbon dioxide collect; {amount:g} L/min was given.",
        )
    if device.supply == "airline" and amount not in device.steps:
        offered = " or ".join(f"{step:g}" for step in device.steps)
        raise InputError("flow_l_min", f"{device.name} gives {offered} L/min only; {amount:g} L/min was given.")


def refusal(device: Device, activity: Activity, part_kind: str | None, sources: tuple[str, ...] = ()) -> str | None:
    """Why the device may not be used here, as a sentence, or None. part_kind None: not known, not asked.

    sources: the oxygen sources allowed in the part; empty where nobody has said.
    """
    if activity not in device.activities:
        return f"{device.name} is not for use {_ACTIVITY_WORDS[activity]}. {device.note}".strip()
    if part_kind is not None and part_kind not in device.part_kinds:
        return f"{device.name} is not available in a part of the kind {part_kind!r}."
    needed = _SOURCES_OF[device.supply]
    if sources and not needed & set(sources):
        return f"{device.name} needs {' or '.join(sorted(needed))} oxygen, which this part does not allow."
    return None


def require_allowed(device: Device, activity: Activity, part_kind: str | None, sources: tuple[str, ...] = ()) -> None:
    """Raises InputError with the reason when the device may not be used in this part."""
    reason = refusal(device, activity, part_kind, sources)
    if reason is not None:
        raise InputError("device_id", reason)


def read_device(row: Mapping[str, Any]) -> Device:
    """One entry of the profile as a Device. Raises ProfileError naming the key that is wrong."""
    device_id = str(row["id"])

    def wrong(key: str, message: str) -> ProfileError:
        return ProfileError(PROFILE, f"{device_id}.{key}", message)

    unknown = sorted(set(row) - _KEYS)
    if unknown:
        raise wrong(unknown[0], f"this key is not known; known keys are {', '.join(sorted(_KEYS))}")
    for key in ("name", "source"):
        if not isinstance(row.get(key), str) or not row[key].strip():
            raise wrong(key, "a text is needed")

    def choice(key: str, allowed: tuple[str, ...], default: str | None = None) -> str:
        given = row.get(key, default)
        if given not in allowed:
            raise wrong(key, f"one of {', '.join(allowed)} is allowed; {given!r} was given")
        return str(given)

    def several(key: str, allowed: tuple[str, ...]) -> tuple[str, ...]:
        given = row.get(key, list(allowed))
        if not isinstance(given, list) or not given or not set(map(str, given)) <= set(allowed):
            raise wrong(key, f"a list of {', '.join(allowed)} is needed; {given!r} was given")
        return tuple(given)

    kind = cast(Kind, choice("kind", get_args(Kind)))
    unit: Unit = "setting" if kind == "pulse" else "L/min"
    most = MOST_SETTING if unit == "setting" else MOST_FLOW_L_MIN
    steps = _numbers(row.get("settings" if kind == "pulse" else "flows_l_min"), LEAST_FLOW_L_MIN, most)
    if not steps or list(steps) != sorted(set(steps)):
        key = "settings" if kind == "pulse" else "flows_l_min"
        raise wrong(key, f"a rising list of numbers from {LEAST_FLOW_L_MIN:g} to {most:g} is needed")
    fraction = row.get("oxygen_fraction")
    if (kind == "venturi") != (fraction is not None):
        raise wrong("oxygen_fraction", "a Venturi mask has one, and no other device")
    if fraction is not None and not _numbers([fraction], 0.22, 0.6):
        raise wrong("oxygen_fraction", f"a fraction from 0.22 to 0.6 is needed; {fraction!r} was given")
    is_mask = kind in ("simple_mask", "reservoir")
    mask_fractions = _numbers(row.get("oxygen_fractions", []), 0.22, 0.95)
    if len(mask_fractions) != (len(steps) if is_mask else 0):
        raise wrong("oxygen_fractions", "a mask without a Venturi has one fraction, 0.22 to 0.95, for each flow")
    pulse_kind = choice("pulse_kind", ("fixed_bolus", "fixed_minute_volume")) if kind == "pulse" else None
    return Device(
        id=device_id,
        name=row["name"].strip(),
        kind=kind,
        unit=unit,
        steps=steps,
        supply=cast(Supply, choice("supply", get_args(Supply), "any")),
        meter=cast(Meter, choice("meter", get_args(Meter), "mass")),
        activities=cast(tuple[Activity, ...], several("activities", ACTIVITIES)),
        part_kinds=several("part_kinds", PART_KINDS),
        fraction=None if fraction is None else float(fraction),
        mask_fractions=mask_fractions,
        pulse_kind=cast(Literal["fixed_bolus", "fixed_minute_volume"] | None, pulse_kind),
        pulse_rows=_pulse_rows(row.get("pulse"), steps, wrong) if kind == "pulse" else (),
        source=row["source"].strip(),
        note=str(row.get("note", "")).strip(),
    )


_SOURCES_OF: dict[str, set[str]] = {
    "any": {"cylinder", "concentrator", "liquid", "stationary"},
    "cylinder": {"cylinder", "liquid"},
    "concentrator": {"concentrator", "stationary"},
    "airline": {"airline"},
}
_KEYS = frozenset(
    {"id", "name", "kind", "supply", "meter", "activities", "part_kinds", "flows_l_min", "settings", "source", "seen"}
    | {"note", "oxygen_fraction", "oxygen_fractions", "pulse_kind", "pulse"}
)


def _numbers(given: object, least: float, most: float) -> tuple[float, ...]:
    """The list as numbers, or nothing if any is not a number in the range."""
    if not isinstance(given, list):
        return ()
    kept = [float(one) for one in given if isinstance(one, (int, float)) and not isinstance(one, bool)]
    inside = len(kept) == len(given) and all(isfinite(one) and least <= one <= most for one in kept)
    return tuple(kept) if inside else ()


def _pulse_rows(given: object, steps: tuple[float, ...], wrong: Any) -> tuple[PulseRow, ...]:
    needed = ("setting", "breathing_rate_min", "bolus_ml")
    if not isinstance(given, list) or not given:
        raise wrong("pulse", f"a list of tables with {', '.join(needed)} is needed")
    rows = []
    for number, row in enumerate(given, start=1):
        if not isinstance(row, dict) or set(row) != set(needed):
            raise wrong(f"pulse {number}", f"exactly {', '.join(needed)} are needed")
        setting, rate, bolus = (_numbers([row[key]], 0.0, 1e6) for key in needed)
        if not setting or setting[0] not in steps:
            raise wrong(f"pulse {number}", f"setting {row['setting']!r} is not among the settings")
        if not rate or not LEAST_BREATHS_MIN <= rate[0] <= MOST_BREATHS_MIN:
            raise wrong(
                f"pulse {number}",
                f"a breathing rate from {LEAST_BREATHS_MIN:g} to {MOST_BREATHS_MIN:g} per minute is needed; "
                f"{row['breathing_rate_min']!r} was given",
            )
        if not bolus or not 0.5 <= bolus[0] <= MOST_BOLUS_ML:
            raise wrong(
                f"pulse {number}", f"a bolus from 0.5 to {MOST_BOLUS_ML:g} mL is needed; {row['bolus_ml']!r} was given"
            )
        rows.append(PulseRow(setting[0], rate[0], bolus[0]))
    places = [(row.setting, row.breathing_rate_min) for row in rows]
    if len(set(places)) != len(places):
        raise wrong("pulse", "two rows stand for the same setting and breathing rate")
    missing = [step for step in steps if step not in {row.setting for row in rows}]
    if missing:
        raise wrong("pulse", f"setting {missing[0]:g} has no row")
    return tuple(sorted(rows, key=lambda row: (row.setting, row.breathing_rate_min)))
