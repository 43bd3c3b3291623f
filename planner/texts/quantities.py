"""Numbers with their units, in the units and the locale a person chose to see. Never a number alone."""

from __future__ import annotations

import math
from dataclasses import dataclass

from planner import units
from planner.case.display import Display
from planner.texts.catalogue import Texts, texts_for

MINUTES_PER_HOUR = 60
LONG_HOURS = 48.0  # from here on days are easier to read than hours
PERCENT = 100.0


@dataclass(frozen=True)
class Quantities:
    """Writes quantities for one display setting."""

    display: Display
    texts: Texts

    @staticmethod
    def of(display: Display) -> Quantities:
        """For a case's display section."""
        return Quantities(display, texts_for(display.locale))

    def pressure_number(self, mmhg: float) -> str:
        """Pressure in the unit chosen, without it: for tables whose heading names the unit."""
        if self.display.pressure == "kPa":
            return self.texts.number(units.kpa_from_mmhg(mmhg), 1)
        return self.texts.number(mmhg, 0)

    def pressure_value(self, mmhg: float) -> float:
        """Pressure in the unit chosen, as a number: for axes."""
        return units.kpa_from_mmhg(mmhg) if self.display.pressure == "kPa" else mmhg

    def pressure(self, mmhg: float) -> str:
        """Such as "6.6 kPa"."""
        return f"{self.pressure_number(mmhg)} {self.display.pressure}"

    def pressure_both(self, mmhg: float) -> str:
        """Such as "6.6 kPa (50 mmHg)": the unit chosen first."""
        kpa = f"{self.texts.number(units.kpa_from_mmhg(mmhg), 1)} kPa"
        mm = f"{self.texts.number(mmhg, 0)} mmHg"
        return f"{kpa} ({mm})" if self.display.pressure == "kPa" else f"{mm} ({kpa})"

    def pressure_spread(self, value: float, low: float | None, high: float | None) -> str:
        """Such as "6.6 kPa (5.8 to 7.5)"."""
        if low is None or high is None:
            return self.pressure(value)
        ends = {"low": self.pressure_number(low), "high": self.pressure_number(high)}
        return self.texts.say("numbers.spread", value=self.pressure(value), **ends)

    def altitude(self, m: float) -> str:
        """Such as "8,000 ft"."""
        if self.display.altitude == "ft":
            return f"{self.texts.number(units.ft_from_m(m))} ft"
        return f"{self.texts.number(m)} m"

    def altitude_both(self, m: float) -> str:
        """Such as "8,000 ft (2,438 m)"."""
        ft = f"{self.texts.number(units.ft_from_m(m))} ft"
        metres = f"{self.texts.number(m)} m"
        return f"{ft} ({metres})" if self.display.altitude == "ft" else f"{metres} ({ft})"

    def gauge(self, bar: float) -> str:
        """Such as "190 bar" or "2,760 psi", rounded to what a gauge shows."""
        if self.display.gauge == "psi":
            return f"{self.texts.number(_rounded(units.psi_from_bar(bar), 10.0))} psi"
        return f"{self.texts.number(bar)} bar"

    def gauge_up(self, bar: float) -> str:
        """A gauge reading that must not be passed downwards: rounded up to 5 bar or 50 psi."""
        shown_in = self.display.gauge
        return f"{self.texts.number(units.gauge_to_read(bar, shown_in))} {shown_in}"

    def flow(self, l_min: float) -> str:
        """Such as "2 L/min"."""
        return f"{self.texts.number(l_min, 2)} L/min"

    def setting(self, setting: float) -> str:
        """Such as "pulse setting 2": never litres per minute."""
        return self.texts.say("numbers.setting", setting=self.texts.number(setting, 1))

    def percent(self, percent: float, digits: int = 0) -> str:
        """Such as "88 %"."""
        return self.texts.say("numbers.percent", number=self.texts.number(percent, digits))

    def saturation(self, fraction: float) -> str:
        """A saturation fraction as a percentage."""
        return self.percent(fraction * PERCENT)

    def saturation_spread(self, value: float, low: float | None, high: float | None) -> str:
        """Such as "85 % (79 to 90)", from fractions."""
        if low is None or high is None:
            return self.saturation(value)
        ends = {"low": self.texts.number(low * PERCENT), "high": self.texts.number(high * PERCENT)}
        return self.texts.say("numbers.spread", value=self.saturation(value), **ends)

    def chance(self, share: float) -> str:
        """A probability as "3 in 10", "1 in 70", or less or more than what can be told."""
        if share < 0.001:
            return self.texts.say("numbers.chance_tiny")
        if share > 0.95:
            return self.texts.say("numbers.chance_nearly_all")
        if share < 0.275:
            return self.texts.say("numbers.chance", count="1", of=self.texts.number(_two_digits(1.0 / share)))
        return self.texts.say("numbers.chance", count=self.texts.number(max(1, round(share * 10))), of="10")

    def duration(self, minutes: float) -> str:
        """Such as "45 min", "3 h 05 min" or "4 d"; days from 48 h on."""
        total = round(minutes)
        hours, rest = divmod(total, MINUTES_PER_HOUR)
        if hours >= LONG_HOURS:
            days, hours = divmod(round(total / MINUTES_PER_HOUR), 24)
            return self.texts.say("numbers.days_hours" if hours else "numbers.days", days=days, hours=hours)
        if not hours:
            return self.texts.say("numbers.minutes", minutes=rest)
        key = "numbers.hours_minutes" if rest else "numbers.hours"
        return self.texts.say(key, hours=hours, minutes=f"{rest:02d}")

    def litres(self, litres: float) -> str:
        """Such as "612 L" (15 degC, 1 atm)."""
        return f"{self.texts.number(litres)} L"

    def watt_hours(self, wh: float) -> str:
        """Such as "90 Wh"."""
        return f"{self.texts.number(wh)} Wh"

    def mass_up(self, kg: float) -> str:
        """A mass that must not be passed downwards: rounded up to 0.1 kg."""
        return self.mass(math.ceil(kg * 10.0 - 1e-9) / 10.0)

    def mass(self, kg: float) -> str:
        """Such as "7.4 kg"; with pounds first where gauges are in psi."""
        metric = f"{self.texts.number(kg, 1)} kg"
        if self.display.gauge == "psi":
            return f"{self.texts.number(units.lb_from_kg(kg), 1)} lb ({metric})"
        return metric

    def temperature(self, celsius: float) -> str:
        """Such as "15 °C"; Fahrenheit first where gauges are in psi."""
        metric = f"{self.texts.number(celsius)} °C"
        if self.display.gauge == "psi":
            return f"{self.texts.number(units.fahrenheit_from_celsius(celsius))} °F ({metric})"
        return metric

    @property
    def unknown(self) -> str:
        """The words for a value nobody knows."""
        return self.texts.say("numbers.unknown")

    def yes_no(self, answer: bool | None) -> str:
        """Yes, no or not known."""
        return self.texts.say({True: "words.yes", False: "words.no", None: "numbers.unknown"}[answer])


def _rounded(value: float, step: float) -> float:
    return round(value / step) * step


def _two_digits(value: float) -> float:
    return float(f"{value:.2g}")
