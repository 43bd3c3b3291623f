"""How stored numbers are shown and typed: a unit, a factor, decimals. Conversions are planner.units; nothing is rounded
on the way back that the person did not type."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

THIN_SPACE = "\u202f"  # narrow, not broken over lines


def _same(value: float) -> float:
    return value


@dataclass(frozen=True)
class Measure:
    """A unit to show a stored quantity in. `other` is the unit it is most easily mistaken for."""

    unit: str
    decimals: int = 0
    shown: Callable[[float], float] = _same
    stored: Callable[[float], float] = _same
    other: Measure | None = None

    def text(self, stored: float) -> str:
        """The number alone: a leading zero, no trailing zero, thousands with a thin space in what is read."""
        return number_text(self.shown(stored), self.decimals)

    def typed(self, stored: float) -> str:
        """The number as it would be typed: no thousands mark."""
        return number_text(self.shown(stored), self.decimals).replace(THIN_SPACE, "")

    def with_unit(self, stored: float) -> str:
        """Number and unit."""
        return f"{self.text(stored)} {self.unit}".strip()


def number_text(value: float, decimals: int) -> str:
    """A number to be read: 0.5, 12, 8 000 (thin space), −3."""
    text = f"{value:,.{decimals}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    text = text.replace(",", THIN_SPACE)
    if text in ("-0", "0"):
        return "0"
    return text.replace("-", "−")


def plain_measure(unit: str, decimals: int = 0) -> Measure:
    """A quantity shown in the unit it is stored in."""
    return Measure(unit, decimals)


def pressure(shown_in: str) -> Measure:
    """Gas pressures, stored in mmHg."""
    from planner.units import kpa_from_mmhg, mmhg_from_kpa

    kpa = Measure("kPa", 1, kpa_from_mmhg, mmhg_from_kpa)
    mmhg = Measure("mmHg", 0)
    if shown_in == "kPa":
        return Measure("kPa", 1, kpa_from_mmhg, mmhg_from_kpa, other=mmhg)
    return Measure("mmHg", 0, other=kpa)


def barometric(shown_in: str) -> Measure:
    """Air pressures, stored in mmHg; hospitals read them in hectopascals where gases are read in kilopascals."""
    from planner.units import MMHG_PER_HPA

    hectopascal = Measure("hPa", 0, lambda mmhg: mmhg / MMHG_PER_HPA, lambda hpa: hpa * MMHG_PER_HPA)
    mmhg = Measure("mmHg", 0)
    if shown_in == "kPa":
        return Measure("hPa", 0, hectopascal.shown, hectopascal.stored, other=mmhg)
    return Measure("mmHg", 0, other=hectopascal)


def altitude(shown_in: str) -> Measure:
    """Altitudes and elevations, stored in metres."""
    from planner.units import ft_from_m, m_from_ft

    feet = Measure("ft", 0, ft_from_m, m_from_ft)
    metres = Measure("m", 0)
    if shown_in == "ft":
        return Measure("ft", 0, ft_from_m, m_from_ft, other=metres)
    return Measure("m", 0, other=feet)


def gauge(shown_in: str) -> Measure:
    """Gauge pressures, stored in bar."""
    from planner.units import bar_from_psi, psi_from_bar

    bar = Measure("bar", 0)
    psi = Measure("psi", 0, psi_from_bar, bar_from_psi)
    if shown_in == "bar":
        return Measure("bar", 0, other=psi)
    return Measure("psi", 0, psi_from_bar, bar_from_psi, other=bar)


def hours_minutes(minutes: float) -> str:
    """A duration to be read: 45 min, 1 h 45, 3 h, 4 d, 4 d 6 h."""
    whole = round(minutes)
    days, rest = divmod(whole, 1440)
    hours, left = divmod(rest, 60)
    if days:
        return f"{days} d {hours} h" if hours else f"{days} d"
    if hours:
        return f"{hours} h {left:02d}" if left else f"{hours} h"
    return f"{left} min"
