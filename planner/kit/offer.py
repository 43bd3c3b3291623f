"""What there is to choose from: own cylinders as they stand, the supplier's sizes, liquid vessels, the concentrator."""

from __future__ import annotations

from collections.abc import Sequence

from planner.case.kit import Kit, KitAssumptions, LiquidVessel, OwnedCylinder
from planner.case.policy import Policy
from planner.errors import InputError
from planner.kit.cylinder import contents_l
from planner.kit.endurance import Assumptions
from planner.kit.legs import Choice, Leg, Power
from planner.kit.liquid import EVAPORATION_KG_DAY, HOURS_A_DAY, gas_l_of_mass
from planner.kit.oxygen_gas import LITRE_TEMPERATURE_C
from planner.kit.power import USABLE_SHARE, aged_share
from planner.kit.sizes import (
    AIR_GROSS_LIMIT_KG,
    CONSENT_SPARES,
    CONSENT_WH,
    NO_CONSENT_WH,
    Concentrator,
    CylinderSize,
    cylinder_size,
    load_cylinders,
    require_gauge,
)

MOST_SIZES, MOST_OWN = 4, 4
MOST_BATTERIES = 12


def assumptions_of(own: KitAssumptions) -> Assumptions:
    """The planning assumptions, with the service's own values where it entered some."""
    return Assumptions(**{name: value for name, value in own.model_dump().items() if value is not None})


def own_choices(kit: Kit, policy: Policy, fill: float) -> tuple[list[Choice], list[str]]:
    """Own cylinders, those of one size and reading together, and liquid vessels; with what is to be said of them.

    Raises InputError for a size the profiles do not have.
    """
    groups: dict[tuple[str, float | None, float], list[OwnedCylinder]] = {}
    for one in kit.owned_cylinders:
        celsius = LITRE_TEMPERATURE_C if one.temperature_c is None else one.temperature_c
        groups.setdefault((one.size_id, one.gauge_bar, celsius), []).append(one)
    choices, said = list[Choice](), list[str]()
    for (size_id, gauge_bar, celsius), members in groups.items():
        size, count = cylinder_size(size_id), sum(one.count for one in members)
        name, usable = f"{size.name}, own", size.usable_l(policy.residual_bar, fill)
        if gauge_bar is None:
            said.append(f"Own {size.name}: no gauge reading is entered, so it is taken as full. Read the gauge.")
        else:
            name = f"{size.name}, own at {gauge_bar:.0f} bar"
            try:
                usable = _left_in(size, require_gauge(size, gauge_bar), celsius, policy.residual_bar)
            except InputError as error:
                said.append(f"{error.message} It counts as empty.")
                usable = 0.0
        if usable > 0.0:
            choices.append(_cylinder(size, name, usable, count, own=True, number=len(choices)))
    if len(choices) > MOST_OWN:
        choices.sort(key=lambda choice: -choice.usable_l)
        names = ", ".join(choice.name for choice in choices[MOST_OWN:])
        said.append(f"At most {MOST_OWN} kinds of own cylinders are compared, the fullest; left out: {names}.")
    return choices[:MOST_OWN] + [_vessel(one, number) for number, one in enumerate(kit.liquid_vessels)], said


def offered_choices(kit: Kit, policy: Policy, fill: float) -> tuple[list[Choice], list[str]]:
    """Sizes the supplier offers, else the country's portable ones, full; with what is to be said of them.

    Raises InputError for a size the profiles do not have.
    """
    wanted = [cylinder_size(size_id) for size_id in dict.fromkeys(kit.offered_size_ids)]
    if not wanted:
        wanted = [size for size in load_cylinders().values() if size.country == kit.country and size.portable]
    said = []
    if len(wanted) > MOST_SIZES:
        names = ", ".join(size.name for size in wanted[MOST_SIZES:])
        said.append(f"At most {MOST_SIZES} sizes are compared; left out: {names}.")
    sizes = wanted[:MOST_SIZES]
    return [_cylinder(size, size.name, size.usable_l(policy.residual_bar, fill), None) for size in sizes], said


def power_of(concentrator: Concentrator, kit: Kit, legs: Sequence[Leg]) -> Power:
    """The concentrator with packs of their age; the energy printed on a pack is the profile's."""
    flies = any(leg.flight for leg in legs)
    held = concentrator.battery_wh * aged_share(kit.battery_age_years)
    return Power(
        concentrator_id=concentrator.id,
        name=concentrator.name,
        mass_kg=concentrator.mass_kg - concentrator.batteries_inside * concentrator.battery_mass_kg,
        battery_wh=held * USABLE_SHARE,
        nominal_wh=held,
        battery_mass_kg=concentrator.battery_mass_kg,
        rated_wh=concentrator.battery_wh,
        inside=concentrator.batteries_inside,
        charge_w=concentrator.charge_w,
        most_batteries=_most_packs(concentrator, flies),
    )


def own_packs(kit: Kit, power: Power | None) -> tuple[int | None, list[str]]:
    """How many packs there are, where that was entered, and what is said when the rules of flight allow fewer."""
    if power is None:
        return None, []
    if power.rated_wh > CONSENT_WH and power.most_batteries == 0:
        return None, [
            f"A pack of {power.rated_wh:.0f} Wh is above the {CONSENT_WH:.0f} Wh that may be carried on aircraft; the "
            "trip is planned without packs."
        ]
    if kit.batteries is None or kit.batteries <= power.most_batteries:
        return kit.batteries, []
    return power.most_batteries, [
        f"{kit.batteries} batteries of {power.rated_wh:.0f} Wh were entered; {power.most_batteries} are planned, the "
        "most that may be carried on this trip or that this plan counts."
    ]


def _left_in(size: CylinderSize, gauge_bar: float, celsius: float, residual_bar: float) -> float:
    held = contents_l(size.water_capacity_l, gauge_bar, celsius)
    return max(held - contents_l(size.water_capacity_l, residual_bar, size.reference_c), 0.0)


def _cylinder(
    size: CylinderSize, name: str, usable_l: float, most: int | None, *, own: bool = False, number: int = 0
) -> Choice:
    return Choice(
        key=f"own {number} {size.id}" if own else size.id,
        name=name,
        usable_l=usable_l,
        full_l=size.full_l,
        gross_kg=size.gross_kg,
        most=most,
        air_allowed=size.gross_kg <= AIR_GROSS_LIMIT_KG,
        own=own,
        size=size,
    )


def _vessel(vessel: LiquidVessel, number: int) -> Choice:
    litres = gas_l_of_mass(vessel.liquid_kg)
    daily = EVAPORATION_KG_DAY if vessel.evaporation_kg_day is None else vessel.evaporation_kg_day
    return Choice(
        key=f"liquid {number}",
        name=f"Liquid oxygen, {vessel.name or f'vessel of {vessel.liquid_kg:g} kg'}",
        usable_l=litres,
        full_l=litres,
        gross_kg=vessel.empty_kg + vessel.liquid_kg,
        most=vessel.count,
        air_allowed=False,
        own=True,
        liquid=True,
        loss_l_per_h=gas_l_of_mass(daily) / HOURS_A_DAY,
    )


def _most_packs(concentrator: Concentrator, flies: bool) -> int:
    """Packs that may be carried: on a trip with a flight none above 160 Wh, and two spares above 100 Wh."""
    if concentrator.battery_wh <= 0.0 or (flies and concentrator.battery_wh > CONSENT_WH):
        return 0
    if flies and concentrator.battery_wh > NO_CONSENT_WH:
        return concentrator.batteries_inside + CONSENT_SPARES
    return MOST_BATTERIES
