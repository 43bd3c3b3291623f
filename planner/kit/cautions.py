"""Fire, smoking, heat, carriage: what is said wherever oxygen is carried, and what this set adds."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import Selection
from planner.kit.sizes import AIR_GROSS_LIMIT_KG, CONSENT_WH, NO_CONSENT_WH

NEAR_LIMIT_KG = 0.4
WORKS_FROM_C, WORKS_TO_C = 5.0, 40.0  # of portable concentrators (from memory)
WORKS_SOURCE = (
    "Usual operating range 5 to 40 °C (from memory); cold storage lowered purity: Blakeman TC et al., US Air Force "
    "report ADA622148"
)


@dataclass(frozen=True)
class KitCaution:
    """A caution with its source; lead is the few words that stand bold."""

    lead: str
    text: str
    source: str


FIRE = KitCaution(
    "No smoking or flames within 3 m.",
    "No e-cigarettes, no heaters nearby, no oil or petroleum cream. Turn oxygen off when it is not worn: fabric and "
    "hair soak it up and burn fast.",
    "BTS home oxygen guideline 2015; the 3 m from memory",
)
CAR = KitCaution(
    "In the car.",
    "Secure cylinders so that they cannot roll, open a window, and do not leave them in a parked car: they must not "
    "get hotter than 52 °C.",
    "Gas industry leaflets on carriage by private persons; 29 CFR 1910.101 with CGA P-1 (52 °C)",
)
AIRCRAFT = KitCaution(
    "On aircraft.",
    "No liquid oxygen. Own cylinders only with the carrier's written consent, at most 5 kg each with gas; some "
    "carriers allow none. Ask each carrier, on both ways.",
    "IATA/ICAO dangerous goods rules, table 2.3.A; 14 CFR 121.574",
)
PRESSURE_LOSS = KitCaution(
    "If the cabin loses pressure.",
    "The mask that drops comes first, before one's own oxygen, and then what the crew says. Nothing here plans for it.",
    "Common practice",
)
LIQUID = KitCaution(
    "Liquid oxygen.",
    "Keep the vessel upright and the room aired; never touch a frosted part. It boils away whether used or not, so it "
    "is no store for later. Never on aircraft.",
    "IATA/ICAO dangerous goods rules, table 2.3.A; common practice",
)
CHECK = KitCaution(
    "Before leaving.",
    "Read every gauge, try the regulator and the alarm, pack a spare cannula and the plug adapter.",
    "Common practice",
)


def kit_cautions(
    legs: Sequence[Leg],
    found: Selection | None,
    cylinders: Sequence[Choice],
    power: Power | None,
    batteries: int,
    pulses_asleep: Sequence[str] = (),
) -> tuple[KitCaution, ...]:
    """The cautions for this trip and this set. pulses_asleep: parts in which a pulse device is decided for sleep."""
    cautions = [FIRE]
    if pulses_asleep:
        cautions.append(
            KitCaution(
                "Pulses asleep.",
                f"In {', '.join(dict.fromkeys(pulses_asleep))} a pulse device is decided for sleep. Shallow or mouth "
                "breathing may not trigger it: two of 20 people with COPD were markedly worse on it at night.",
                "Cuvelier A et al., Chest 1999;116:22",
            )
        )
    if any(not leg.flight for leg in legs):
        cautions.append(CAR)
    if any(leg.flight for leg in legs):
        cautions += [AIRCRAFT, PRESSURE_LOSS]
    if any(leg.liquid_l_per_h is not None for leg in legs):
        cautions.append(LIQUID)
    if power is not None:
        cautions += _temperatures(legs)
    for size in cylinders:
        if abs(size.gross_kg - AIR_GROSS_LIMIT_KG) < NEAR_LIMIT_KG and any(leg.flight for leg in legs):
            cautions.append(
                KitCaution(
                    f"{size.name} is near 5 kg.",
                    f"With gas, valve and regulator it is about {size.gross_kg:.1f} kg by remembered masses. Weigh it "
                    "before asking the carrier.",
                    "IATA/ICAO dangerous goods rules, table 2.3.A",
                )
            )
    if found is not None and found.concentrator and power is not None:
        cautions.append(_batteries(power, batteries))
        sources: dict[tuple[str, str], set[str]] = {}
        for leg, use in zip(legs, found.uses, strict=True):
            sources.setdefault((leg.part_id, leg.name), set()).update(use.hours_by)
        alone = dict.fromkeys(name for (_, name), used in sources.items() if used == {"battery"})
        if alone:
            cautions.append(
                KitCaution(
                    "No second source.",
                    f"In {', '.join(alone)} everything hangs on the concentrator and its batteries. Ask whether the "
                    "carrier has oxygen in an emergency, and who can help.",
                    "Planning rule of this program",
                )
            )
    cautions.append(CHECK)
    return tuple(cautions)


def _temperatures(legs: Sequence[Leg]) -> list[KitCaution]:
    cold = dict.fromkeys(leg.name for leg in legs if leg.equipment_c is not None and leg.equipment_c < WORKS_FROM_C)
    hot = dict.fromkeys(leg.name for leg in legs if leg.equipment_c is not None and leg.equipment_c > WORKS_TO_C)
    said = []
    if cold:
        text = (
            f"In {', '.join(cold)} it is below {WORKS_FROM_C:g} °C: batteries give less and the concentrator may stop. "
        )
        said.append(KitCaution("Cold.", f"{text}Keep both warm, and let them warm up before use.", WORKS_SOURCE))
    if hot:
        text = f"In {', '.join(hot)} it is above {WORKS_TO_C:g} °C: a concentrator may stop and packs do not charge."
        said.append(KitCaution("Heat.", text, WORKS_SOURCE))
    return said


def _batteries(power: Power, count: int) -> KitCaution:
    packs = "1 pack" if count == 1 else f"{count} packs"
    source = "IATA/ICAO rules and 49 CFR 175.10(a)(18) (from memory); 14 CFR 382.133 for 150 %"
    if power.rated_wh > CONSENT_WH:
        return KitCaution(
            "Batteries too large for aircraft.",
            f"A pack of {power.rated_wh:.0f} Wh is above 160 Wh and is not carried at all.",
            source,
        )
    if power.rated_wh > NO_CONSENT_WH:
        spare = max(count - power.inside, 0)
        return KitCaution(
            "Batteries need consent.",
            f"Packs of {power.rated_wh:.0f} Wh are above 100 Wh: at most two spares, with the carrier's consent; "
            f"{spare} spares are planned. Spares go in the cabin with their terminals covered.",
            source,
        )
    return KitCaution(
        "Batteries in the cabin.",
        f"{packs} of {power.rated_wh:.0f} Wh, each up to 100 Wh: spares in the cabin only, terminals covered. "
        "US rules ask for charged packs for 150 % of the longest flight.",
        source,
    )
