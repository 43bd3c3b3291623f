"""Cylinder sizes and concentrator classes, read from the profiles and checked."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from planner.catalogue import read_entries
from planner.errors import InputError, ProfileError
from planner.kit.cylinder import contents_l, oxygen_mass_kg, textbook_minutes

CYLINDERS, CONCENTRATORS = "cylinders.toml", "concentrators.toml"
REGULATOR_KG = 0.35  # a light regulator, 0.3 to 0.7 kg (from memory)
AIR_GROSS_LIMIT_KG = 5.0  # gross mass of a cylinder allowed with the operator's consent: IATA/ICAO rules, table 2.3.A
CONSENT_SPARES = 2  # packs between 100 and 160 Wh beside those in the device: same rules
NO_CONSENT_WH, CONSENT_WH = 100.0, 160.0  # lithium-ion packs: same rules; US 49 CFR 175.10(a)(18) (from memory)


@dataclass(frozen=True)
class CylinderSize:
    """A size of cylinder; pressures are gauge. seen: keys whose value was read in a text."""

    id: str
    name: str
    country: str
    water_capacity_l: float
    service_bar: float
    reference_c: float
    nominal_l: float
    tare_kg: float
    textbook_l_per_psi: float | None
    portable: bool
    seen: tuple[str, ...]
    source: str

    @property
    def full_l(self) -> float:
        """Real contents when full at its reference temperature (L at 15 degC, 1 atm)."""
        return contents_l(self.water_capacity_l, self.service_bar, self.reference_c)

    @property
    def gross_kg(self) -> float:
        """Mass full, with valve and regulator."""
        return self.tare_kg + oxygen_mass_kg(self.full_l) + REGULATOR_KG

    def usable_l(self, residual_bar: float, fill: float = 1.0) -> float:
        """Litres between this fill and the gauge pressure at which it is changed, at the reference temperature."""
        left = contents_l(self.water_capacity_l, residual_bar, self.reference_c)
        return max(self.full_l * fill - left, 0.0)

    def textbook_usable_l(self, residual_bar: float) -> float | None:
        """The same by the handbooks' duration factor, as a cross-check only; None where there is no factor."""
        if self.textbook_l_per_psi is None:
            return None
        return textbook_minutes(self.textbook_l_per_psi, self.service_bar, 1.0, residual_bar)


@dataclass(frozen=True)
class Concentrator:
    """A class of concentrator with its batteries; power by continuous flow and by pulse setting, each rising."""

    id: str
    name: str
    mass_kg: float
    continuous_l_min: tuple[float, ...]
    continuous_w: tuple[float, ...]
    settings: tuple[float, ...]
    setting_w: tuple[float, ...]
    battery_wh: float
    battery_mass_kg: float
    batteries_inside: int
    ceiling_m: float
    purity: float
    charge_w: float
    cabin_use: bool
    source: str
    seen: bool

    def power_w(self, *, flow_l_min: float | None = None, setting: float | None = None) -> float:
        """Electrical power at a continuous flow (that of the next step it has) or at a pulse setting.

        Raises InputError for a flow above its highest or a setting it does not have.
        """
        if setting is not None:
            if setting not in self.settings:
                known = ", ".join(f"{one:g}" for one in self.settings) or "none"
                raise InputError("setting", f"{self.name} has no pulse setting {setting:g}; it has {known}.")
            return self.setting_w[self.settings.index(setting)]
        if flow_l_min is None or flow_l_min <= 0.0:
            raise InputError("flow_l_min", "A flow above 0 L/min or a setting is needed.")
        for flow, watt in zip(self.continuous_l_min, self.continuous_w, strict=True):
            if flow_l_min <= flow + 1e-9:
                return watt
        most = f"at most {self.continuous_l_min[-1]:g} L/min" if self.continuous_l_min else "no continuous flow"
        raise InputError("flow_l_min", f"{self.name} gives {most}; {flow_l_min:g} L/min was asked for.")

    def can_give(self, *, flow_l_min: float | None = None, setting: float | None = None) -> bool:
        """Whether it has this flow or setting."""
        if setting is not None:
            return setting in self.settings
        return flow_l_min is not None and bool(self.continuous_l_min) and flow_l_min <= self.continuous_l_min[-1]


def load_cylinders() -> dict[str, CylinderSize]:
    """Every cylinder size by id. Raises ProfileError."""
    return {key: _cylinder(row) for key, row in read_entries(CYLINDERS).items()}


def load_concentrators() -> dict[str, Concentrator]:
    """Every concentrator class by id. Raises ProfileError."""
    return {key: _concentrator(row) for key, row in read_entries(CONCENTRATORS).items()}


def cylinder_size(size_id: str) -> CylinderSize:
    """The size with this id. Raises InputError naming the known ones."""
    sizes = load_cylinders()
    if size_id not in sizes:
        raise InputError("size_id", f"There is no cylinder size {size_id!r}; known are {', '.join(sizes)}.")
    return sizes[size_id]


def require_gauge(size: CylinderSize, gauge_bar: float) -> float:
    """The gauge pressure, when it is not above a hot full cylinder's. Raises InputError."""
    most = 1.25 * size.service_bar  # a full one at about 50 degC reads 19 % more
    if not 0.0 <= gauge_bar <= most:
        raise InputError(
            "gauge_bar",
            f"A gauge of {gauge_bar:g} bar is outside the 0 to {most:.0f} bar a {size.name} cylinder can have "
            f"(service pressure {size.service_bar:g} bar).",
        )
    return gauge_bar


class _Row:
    """One raw entry with checks that name the key."""

    def __init__(self, file: str, row: Mapping[str, Any], known: set[str]) -> None:
        self._file, self._row = file, row
        unknown = sorted(set(row) - known)
        if unknown:
            raise self.wrong(unknown[0], f"this key is not known; known keys are {', '.join(sorted(known))}")

    def wrong(self, key: str, message: str) -> ProfileError:
        return ProfileError(self._file, f"{self._row['id']}.{key}", message)

    def text(self, key: str) -> str:
        value = self._row.get(key)
        if not isinstance(value, str) or not value:
            raise self.wrong(key, "a text is needed")
        return value

    def number(self, key: str, least: float, most: float) -> float:
        value = self._row.get(key)
        if isinstance(value, bool) or not isinstance(value, (int, float)) or not least <= value <= most:
            raise self.wrong(key, f"a number from {least:g} to {most:g} is needed; {value!r} was given")
        return float(value)

    def numbers(self, key: str) -> tuple[float, ...]:
        value = self._row.get(key)
        if not isinstance(value, list) or any(not isinstance(one, (int, float)) for one in value):
            raise self.wrong(key, "a list of numbers is needed")
        if value != sorted(value):
            raise self.wrong(key, "the numbers have to rise")
        return tuple(float(one) for one in value)


def _cylinder(raw: Mapping[str, Any]) -> CylinderSize:
    known = {
        "id", "name", "country", "water_capacity_l", "service_bar", "reference_c", "nominal_l", "tare_kg",
        "textbook_l_per_psi", "portable", "seen", "source",
    }  # fmt: skip
    row = _Row(CYLINDERS, raw, known)
    if raw.get("country") not in ("US", "UK", "EU"):
        raise row.wrong("country", "US, UK or EU is needed")
    return CylinderSize(
        id=str(raw["id"]),
        name=row.text("name"),
        country=str(raw["country"]),
        water_capacity_l=row.number("water_capacity_l", 0.1, 60.0),
        service_bar=row.number("service_bar", 50.0, 310.0),
        reference_c=row.number("reference_c", 0.0, 30.0),
        nominal_l=row.number("nominal_l", 10.0, 20_000.0),
        tare_kg=row.number("tare_kg", 0.1, 120.0),
        textbook_l_per_psi=row.number("textbook_l_per_psi", 0.01, 5.0) if "textbook_l_per_psi" in raw else None,
        portable=bool(raw.get("portable", False)),
        seen=tuple(raw.get("seen", ())),
        source=row.text("source"),
    )


def _concentrator(raw: Mapping[str, Any]) -> Concentrator:
    known = {
        "id", "name", "mass_kg", "continuous_l_min", "continuous_w", "settings", "setting_w", "battery_wh",
        "battery_mass_kg", "batteries_inside", "ceiling_m", "purity", "charge_w", "cabin_use", "source", "seen",
    }  # fmt: skip
    row = _Row(CONCENTRATORS, raw, known)
    for steps, power in (("continuous_l_min", "continuous_w"), ("settings", "setting_w")):
        if len(row.numbers(steps)) != len(row.numbers(power)):
            raise row.wrong(power, f"one power is needed for each of {steps}")
    return Concentrator(
        id=str(raw["id"]),
        name=row.text("name"),
        mass_kg=row.number("mass_kg", 0.5, 60.0),
        continuous_l_min=row.numbers("continuous_l_min"),
        continuous_w=row.numbers("continuous_w"),
        settings=row.numbers("settings"),
        setting_w=row.numbers("setting_w"),
        battery_wh=row.number("battery_wh", 0.0, 500.0),
        battery_mass_kg=row.number("battery_mass_kg", 0.0, 10.0),
        batteries_inside=int(row.number("batteries_inside", 0, 4)),
        ceiling_m=row.number("ceiling_m", 0.0, 8850.0),
        purity=row.number("purity", 0.8, 1.0),
        charge_w=row.number("charge_w", 0.0, 500.0),
        cabin_use=bool(raw.get("cabin_use", False)),
        source=row.text("source"),
        seen=bool(raw.get("seen", False)),
    )
