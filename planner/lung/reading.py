"""One dated measurement in numbers, how far it can be trusted, and the sentences that say why not further."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from planner.errors import InputError

Activity = Literal["rest", "walking", "asleep"]

# Blood gas: analyser, sampling and the change from minute to minute in a stable patient together, SD (from memory).
PAO2_SD_MMHG = 3.0
PACO2_SD_MMHG = 1.5
# Arterialised earlobe sample beside an arterial one, residual SD (Zavorsky GS et al., Respir Physiol Neurobiol
# 2007;155:268, from memory).
CAPILLARY_PO2_SD_MMHG = 6.0
CAPILLARY_PCO2_SD_MMHG = 1.5
# Pulse oximeter: A_rms at most 4 points between 70 and 100 % by ISO 80601-2-61; SD 2 as most reach (from memory).
SPO2_SD = 0.02
# Reading above the truth, and its spread, by skin (sized on Sjoding MW et al., N Engl J Med 2020;383:2477, and Jubran
# A, Tobin MJ, Chest 1990;97:1420, from memory). None: not known.
SKIN_BIAS = {"light": (0.0, 0.0), "medium": (0.005, 0.005), "dark": (0.015, 0.015), None: (0.003, 0.007)}
# An oximeter counts nine tenths of carboxyhaemoglobin as oxygenated (Barker SJ, Tremper KK, Anesthesiology
# 1987;66:677, from memory).
COUNTED_CARBOXY = 0.9
COUNTED_CARBOXY_SPREAD = 0.1  # planning assumption
NOTABLE_CARBOXY = 0.03
# An old gas did not predict altitude, one taken within 2 h did (Schwartz JS et al., Ann Intern Med 1984;100:473).
# Added SD: planning assumptions.
STALE_DAYS = 42.0
STALE_SD_MMHG, STALE_SD_SATURATION = 4.0, 0.015
STALE_PCO2_SD_MMHG, UNSTABLE_PCO2_SD_MMHG, CHALLENGE_PCO2_SD_MMHG = 2.0, 3.0, 1.0
UNSTABLE_SD_MMHG, UNSTABLE_SD_SATURATION = 6.0, 0.02
# A short test by mask: the quotient runs high and masks leak; 0.90 instead of 0.82 is +2.8 mmHg. Planning assumption.
CHALLENGE_SD_MMHG, CHALLENGE_SD_SATURATION = 2.0, 0.01
MMHG_PER_SATURATION = 350.0  # at a PaO2 near 65 mmHg, to compare readings of either kind

LOWEST_PAO2_MMHG = 25.0
LOWEST_SPO2 = 0.50


@dataclass(frozen=True)
class LungReading:
    """One dated measurement at rest. None: not measured. fio2 is the fraction of the dry gas breathed."""

    barometric_mmhg: float
    fio2: float
    pao2_mmhg: float | None = None
    paco2_mmhg: float | None = None
    ph: float | None = None
    spo2_fraction: float | None = None
    sample: Literal["arterial", "capillary"] | None = None
    fio2_spread: float = 0.0
    age_days: float | None = None
    stable: bool = True
    challenge: bool = False

    @property
    def inspired_po2_mmhg(self) -> float:
        """Oxygen pressure of the moist gas breathed."""
        return self.fio2 * (self.barometric_mmhg - 47.0)


@dataclass(frozen=True)
class Person:
    """What of the person bears on the lung, in numbers. None: not known."""

    diagnosis: str | None = None
    age_years: float | None = None
    haemoglobin_g_dl: float | None = None
    carboxyhaemoglobin_fraction: float | None = None
    skin: Literal["light", "medium", "dark"] | None = None
    can_hyperventilate: bool = True


def usable(readings: Sequence[LungReading]) -> tuple[LungReading, ...]:
    """The readings that say something of oxygen, each checked; the one that says most first.

    Raises InputError when there is none, or when one lies outside what the model covers.
    """
    kept = [one for one in readings if one.pao2_mmhg is not None or one.spo2_fraction is not None]
    if not kept:
        raise InputError("readings", "Neither a PaO2 nor an SpO2 was measured, so no lung can be fitted.")
    for one in kept:
        _require_covered(one)
    return tuple(sorted(kept, key=lambda one: (one.challenge, trust_sd_mmhg(one), one.age_days or 0.0)))


def trust_sd_mmhg(reading: LungReading) -> float:
    """How far the reading may lie from this person's usual PaO2, as one SD."""
    if reading.pao2_mmhg is not None:
        return pao2_sd_mmhg(reading)
    return MMHG_PER_SATURATION * spo2_sd(reading, None)


def pao2_sd_mmhg(reading: LungReading) -> float:
    """SD of a measured PaO2 around what it stands for."""
    parts = [PAO2_SD_MMHG]
    if reading.sample == "capillary":
        parts.append(CAPILLARY_PO2_SD_MMHG)
    parts += _state_parts(reading, STALE_SD_MMHG, UNSTABLE_SD_MMHG, CHALLENGE_SD_MMHG)
    return _together(parts)


def paco2_sd_mmhg(reading: LungReading) -> float:
    """SD of a measured PaCO2 around what it stands for."""
    parts = [PACO2_SD_MMHG]
    if reading.sample == "capillary":
        parts.append(CAPILLARY_PCO2_SD_MMHG)
    return _together(parts + _state_parts(reading, STALE_PCO2_SD_MMHG, UNSTABLE_PCO2_SD_MMHG, CHALLENGE_PCO2_SD_MMHG))


def spo2_sd(reading: LungReading, person: Person | None) -> float:
    """SD of a pulse oximeter's reading around the saturation it stands for, after its mean error is taken off."""
    parts = [SPO2_SD]
    if person is not None:
        parts.append(SKIN_BIAS[person.skin][1])
        parts.append(COUNTED_CARBOXY_SPREAD * (person.carboxyhaemoglobin_fraction or 0.0))
    parts += _state_parts(reading, STALE_SD_SATURATION, UNSTABLE_SD_SATURATION, CHALLENGE_SD_SATURATION)
    return _together(parts)


def shown_spo2_scale(person: Person) -> tuple[float, float]:
    """(offset, factor): what an oximeter shows is offset + factor x functional saturation, on average."""
    carboxy = person.carboxyhaemoglobin_fraction or 0.0
    return SKIN_BIAS[person.skin][0] + COUNTED_CARBOXY * carboxy, 1.0 - carboxy


def widening(readings: Sequence[LungReading], person: Person) -> tuple[str, ...]:
    """Sentences: why the spread is wider than that of a fresh arterial blood gas in a stable state."""
    said: list[str] = []
    gases = [one for one in readings if one.pao2_mmhg is not None]
    if not gases:
        said.append("Only pulse oximetry was measured: its error of about 2 points is wide in oxygen pressure.")
    if readings and not any(one.paco2_mmhg is not None for one in readings):
        said.append("The arterial carbon dioxide was not measured; a usual range was assumed.")
    if gases and all(one.sample == "capillary" for one in gases):
        said.append("The blood gas is a capillary sample, which scatters around the arterial value.")
    if any(one.age_days is None for one in readings):
        said.append("The date of a measurement is not known, so it is treated as old.")
    if any(one.age_days is not None and one.age_days > STALE_DAYS for one in readings):
        said.append("A measurement is older than 6 weeks.")
    if any(not one.stable for one in readings):
        said.append("A measurement was not taken in a stable state.")
    if any(one.fio2_spread > 0.0 for one in readings):
        said.append("The oxygen fraction breathed at a measurement is itself an estimate.")
    if any(one.spo2_fraction is not None and one.pao2_mmhg is None for one in readings):
        if person.skin == "dark":
            said.append("Pulse oximeters read high in dark skin, by an amount that differs between persons.")
        elif person.skin is None:
            said.append("Skin pigmentation is not known; a pulse oximeter may read high in dark skin.")
        if (person.carboxyhaemoglobin_fraction or 0.0) >= NOTABLE_CARBOXY:
            said.append("The oximeter counts carboxyhaemoglobin as oxygenated; it was taken off, with a margin.")
    return tuple(said)


def _state_parts(reading: LungReading, stale: float, unstable: float, challenge: float) -> list[float]:
    parts = []
    if reading.age_days is None or reading.age_days > STALE_DAYS:
        parts.append(stale)
    if not reading.stable:
        parts.append(unstable)
    if reading.challenge:
        parts.append(challenge)
    return parts


def _together(parts: Sequence[float]) -> float:
    return float(sum(part * part for part in parts) ** 0.5)


def _require_covered(reading: LungReading) -> None:
    if not 360.0 <= reading.barometric_mmhg <= 830.0:
        raise InputError(
            "barometric_mmhg",
            f"The pressure at a measurement, {reading.barometric_mmhg:g} mmHg, is outside 360 to 830 mmHg.",
        )
    if not 0.10 <= reading.fio2 <= 1.0:
        raise InputError("fio2", f"The oxygen fraction at a measurement, {reading.fio2:g}, is outside 0.10 to 1.")
    if reading.pao2_mmhg is not None and not LOWEST_PAO2_MMHG <= reading.pao2_mmhg <= 700.0:
        raise InputError(
            "pao2_mmhg",
            f"Below model range: a PaO2 of {reading.pao2_mmhg:g} mmHg; {LOWEST_PAO2_MMHG:g} to 700 mmHg is covered.",
        )
    if reading.spo2_fraction is not None and not LOWEST_SPO2 <= reading.spo2_fraction <= 1.0:
        raise InputError(
            "spo2_fraction",
            f"Below model range: an SpO2 of {100 * reading.spo2_fraction:g} %; "
            f"{100 * LOWEST_SPO2:g} to 100 % is covered.",
        )
    if reading.paco2_mmhg is not None and not 12.0 <= reading.paco2_mmhg <= 110.0:
        raise InputError("paco2_mmhg", f"A PaCO2 of {reading.paco2_mmhg:g} mmHg is outside 12 to 110 mmHg.")
