"""Barometric pressure: the standard atmosphere for cabins, the model atmosphere of West for the ground.

The two are never mixed. A cabin's altitude is defined by the standard atmosphere; a mountain at low or middle
latitude in summer has a higher pressure than the standard atmosphere says (1.3 % at 2438 m, 7 % on Everest).
"""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array, Numbers, require_within
from planner.errors import InputError
from planner.units import MMHG_PER_HPA

# ICAO Doc 7488/3 (1993) and ISO 2533:1975: the standard atmosphere.
SEA_LEVEL_HPA = 1013.25
SEA_LEVEL_K = 288.15
LAPSE_K_PER_M = 0.0065
GRAVITY_M_PER_S2 = 9.80665
GAS_CONSTANT_J_PER_KG_K = 287.05287
TROPOPAUSE_M = 11_000.0
TROPOPAUSE_K = SEA_LEVEL_K - LAPSE_K_PER_M * TROPOPAUSE_M
HIGHEST_ISA_M = 20_000.0
LOWEST_M = -500.0  # the shore of the Dead Sea is at -430 m
EXPONENT = GRAVITY_M_PER_S2 / (GAS_CONSTANT_J_PER_KG_K * LAPSE_K_PER_M)

# West JB, J Appl Physiol 1996;81:1850: ln P(torr) = 6.63268 - 0.1112 h - 0.00149 h^2, h in km.
WEST_LOG_SEA_LEVEL = 6.63268
WEST_PER_KM = 0.1112
WEST_PER_KM2 = 0.00149
HIGHEST_GROUND_M = 8850.0
M_PER_KM = 1000.0

# United States Standard Atmosphere 1976.
EARTH_RADIUS_M = 6_356_766.0

# Station pressures that weather and the altitudes above can give.
LOWEST_STATION_MMHG = 230.0
HIGHEST_STATION_MMHG = 830.0


def isa_pressure_mmhg(altitude_m: Numbers) -> Numbers:
    """Pressure of the standard atmosphere at a pressure altitude, as in an aircraft cabin.

    Constant lapse of 6.5 K per km to 11 km, isothermal above. altitude_m: geopotential or pressure altitude (m),
    -500 to 20 000. Raises InputError outside. Source: ICAO Doc 7488/3 (1993); ISO 2533:1975.
    """
    metres = require_within("altitude_m", "Altitude", altitude_m, LOWEST_M, HIGHEST_ISA_M, "m")
    lower = np.minimum(metres, TROPOPAUSE_M)
    hpa = SEA_LEVEL_HPA * (1.0 - LAPSE_K_PER_M * lower / SEA_LEVEL_K) ** EXPONENT
    above = np.maximum(metres - TROPOPAUSE_M, 0.0)
    hpa = hpa * np.exp(-GRAVITY_M_PER_S2 * above / (GAS_CONSTANT_J_PER_KG_K * TROPOPAUSE_K))
    return _same_shape(hpa * MMHG_PER_HPA, altitude_m)


def isa_altitude_m(pressure_mmhg: Numbers) -> Numbers:
    """Pressure altitude at which the standard atmosphere has this pressure.

    The inverse of isa_pressure_mmhg. pressure_mmhg: 41.1 to 806 (20 000 to -500 m). Raises InputError outside.
    Source: ICAO Doc 7488/3 (1993); ISO 2533:1975.
    """
    least, most = isa_pressure_mmhg(HIGHEST_ISA_M), isa_pressure_mmhg(LOWEST_M)
    mmhg = require_within("pressure_mmhg", "Pressure", pressure_mmhg, least, most, "mmHg")
    tropopause_mmhg = isa_pressure_mmhg(TROPOPAUSE_M)
    ratio = np.maximum(mmhg, tropopause_mmhg) / (SEA_LEVEL_HPA * MMHG_PER_HPA)
    metres = SEA_LEVEL_K / LAPSE_K_PER_M * (1.0 - ratio ** (1.0 / EXPONENT))
    scale_m = GAS_CONSTANT_J_PER_KG_K * TROPOPAUSE_K / GRAVITY_M_PER_S2
    metres = metres + scale_m * np.log(tropopause_mmhg / np.minimum(mmhg, tropopause_mmhg))
    return _same_shape(metres, pressure_mmhg)


def mountain_pressure_mmhg(elevation_m: Numbers) -> Numbers:
    """Pressure expected on the ground at an elevation, where no measured station pressure is given.

    ln P = 6.63268 - 0.1112 h - 0.00149 h^2, h in km. elevation_m: -500 to 8850. Made for low and middle latitudes
    and warm seasons; at 40 to 60 degrees in winter the true pressure is lower. Raises InputError outside.
    Source: West JB, J Appl Physiol 1996;81:1850.
    """
    metres = require_within("elevation_m", "Elevation", elevation_m, LOWEST_M, HIGHEST_GROUND_M, "m")
    km = metres / M_PER_KM
    return _same_shape(np.exp(WEST_LOG_SEA_LEVEL - WEST_PER_KM * km - WEST_PER_KM2 * km * km), elevation_m)


def mountain_elevation_m(pressure_mmhg: Numbers) -> Numbers:
    """Ground elevation at which this pressure is expected: the inverse of mountain_pressure_mmhg.

    pressure_mmhg: 252.6 to 803 (8850 to -500 m). Raises InputError outside.
    Source: West JB, J Appl Physiol 1996;81:1850, solved for h.
    """
    least, most = mountain_pressure_mmhg(HIGHEST_GROUND_M), mountain_pressure_mmhg(LOWEST_M)
    mmhg = require_within("pressure_mmhg", "Pressure", pressure_mmhg, least, most, "mmHg")
    depth = WEST_LOG_SEA_LEVEL - np.log(mmhg)
    km = 2.0 * depth / (WEST_PER_KM + np.sqrt(WEST_PER_KM**2 + 4.0 * WEST_PER_KM2 * depth))
    return _same_shape(km * M_PER_KM, pressure_mmhg)


def station_pressure_mmhg(elevation_m: float | None, barometric_mmhg: float | None = None) -> float:
    """Pressure at a place on the ground: as measured there where given, else expected from the elevation.

    barometric_mmhg: station pressure, not reduced to sea level, 230 to 830. Raises InputError when neither is known.
    """
    if barometric_mmhg is not None:
        lowest, highest = LOWEST_STATION_MMHG, HIGHEST_STATION_MMHG
        return float(require_within("barometric_mmhg", "Station pressure", barometric_mmhg, lowest, highest, "mmHg"))
    if elevation_m is None:
        raise InputError("elevation_m", "Neither the elevation nor the station pressure of this place is known.")
    return float(mountain_pressure_mmhg(elevation_m))


def geopotential_m(geometric_m: Numbers) -> Numbers:
    """Geopotential altitude of a geometric height, R z / (R + z).

    Source: United States Standard Atmosphere 1976 (Earth radius 6 356 766 m).
    """
    metres = require_within("geometric_m", "Height", geometric_m, LOWEST_M, HIGHEST_ISA_M, "m")
    return _same_shape(EARTH_RADIUS_M * metres / (EARTH_RADIUS_M + metres), geometric_m)


def _same_shape(result: Array, like: Numbers) -> Numbers:
    """A float for a float, an array for an array."""
    shaped: Numbers = result if np.ndim(like) else float(result)  # type: ignore[assignment]
    return shaped
