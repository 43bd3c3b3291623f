"""Liquid oxygen: how much gas a mass or a volume of it gives, and what boils away. Never carried on aircraft.

Litres follow the mass, which does not depend on the vessel's pressure; a volume of liquid does. A litre of gas is at
15 degC and 1 atm.
"""

from __future__ import annotations

from planner.air.ranges import require_within
from planner.kit.oxygen_gas import G_PER_L

# Density of the liquid (g/L) where it boils at 1 atm, and in a vessel that works at 2.4 bar. Source: Schmidt R, Wagner
# W, Fluid Phase Equilibria 1985;19:175, as evaluated by CoolProp 8.0.
BOILING_G_PER_L, VESSEL_G_PER_L = 1141.2, 1094.4
EVAPORATION_KG_DAY = 0.6  # of a reservoir, 0.5 to 0.8 kg a day (from memory)
HOURS_A_DAY = 24.0
AIR_RULE = "Liquid oxygen is never carried on aircraft: IATA/ICAO dangerous goods rules, table 2.3.A."


def gas_l_of_mass(liquid_kg: float) -> float:
    """Litres of gas from a mass of liquid, 0 to 200 kg. Raises InputError outside."""
    require_within("liquid_kg", "Mass of liquid oxygen", liquid_kg, 0.0, 200.0, "kg")
    return 1000.0 * liquid_kg / G_PER_L


def gas_l_of_volume(liquid_l: float, *, at_1_atm: bool = False) -> float:
    """Litres of gas from a volume of liquid, 0 to 200 L, in a working vessel or boiling at 1 atm. Raises InputError."""
    require_within("liquid_l", "Volume of liquid oxygen", liquid_l, 0.0, 200.0, "L")
    return liquid_l * (BOILING_G_PER_L if at_1_atm else VESSEL_G_PER_L) / G_PER_L


def liquid_needed_kg(gas_l: float, hours: float, evaporation_kg_day: float = EVAPORATION_KG_DAY) -> float:
    """Mass of liquid to fill for a use spread over some hours: what is breathed, or what boils away if that is more.

    A slow draw costs nothing extra: it takes what would have boiled. Raises InputError for negative numbers.
    """
    require_within("gas_l", "Oxygen used", gas_l, 0.0, 1e6, "L")
    require_within("hours", "Time", hours, 0.0, 1e4, "h")
    require_within("evaporation_kg_day", "Evaporation", evaporation_kg_day, 0.0, 10.0, "kg/day")
    return max(gas_l * G_PER_L / 1000.0, evaporation_kg_day * hours / HOURS_A_DAY)
