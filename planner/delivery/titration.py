"""Which flow: the smallest step of each device that reaches the target, and what a decided flow would give.

The model proposes, the prescriber decides. It never proposes above 4 L/min, never passes the ceiling of someone whose
carbon dioxide risk is not excluded without saying so, and never turns a pulse setting into litres per minute.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from planner.delivery.decided import OnOxygen, with_decision
from planner.delivery.devices import Device, refusal
from planner.delivery.dose import Answers, Condition, DoseCurve, Query, ask, curve, offered
from planner.delivery.effect import DeliverySpread, source_fraction, usual_spread
from planner.delivery.target import (
    MOST_ADVISED_L_MIN,
    MOST_CHANCE_ABOVE,
    Target,
    below_range,
    ceiling_sentence,
    percent,
    rule_amount,
)
from planner.errors import InputError
from planner.lung.fitted import FittedLung

__all__ = [
    "Condition",
    "DoseCurve",
    "OnOxygen",
    "Refused",
    "Target",
    "Titration",
    "rule_amount",
    "titrate",
    "with_decision",
]


TIE = 1e-6
MUCH_BETTER = 0.25  # share of the spread; less is no reason to change the device, planning assumption


@dataclass(frozen=True)
class Refused:
    """A device that was not tried in this part, and why."""

    device_id: str
    reason: str


@dataclass(frozen=True)
class Titration:
    """What the model proposes for one activity in one part. Estimate only; the prescriber decides.

    model_amount 0: no added oxygen reaches the target already; None: nothing in the list can be proposed.
    reaches_target False with an amount: the most that stays within the ceiling, which reaches the target in
    model_chance of the spread only.
    """

    part_id: str
    activity: str
    curves: tuple[DoseCurve, ...]
    refused: tuple[Refused, ...]
    model_device_id: str | None
    model_amount: float | None
    model_amount_text: str
    model_chance: float | None
    reaches_target: bool
    specialist_advised: bool
    text: str
    warnings: tuple[str, ...]


def titrate(
    fitted: FittedLung,
    conditions: Sequence[Condition],
    devices: Sequence[Device] | Mapping[str, Device],
    target: Target,
    *,
    spread: DeliverySpread | None = None,
    breathing_rate_min: float | None = None,
) -> tuple[Titration, ...]:
    """For each condition the dose curves of the devices that may be used there, and the step the model proposes.

    devices: in the order of preference; the first that reaches the target is proposed. spread: None is the usual one;
    learn_gain gives this person's own. Raises InputError for numbers out of range.
    """
    listed = tuple(devices.values()) if isinstance(devices, Mapping) else tuple(devices)
    spread = spread or usual_spread(fitted.log_sd.size)
    queries: list[Query] = []
    plans: list[tuple[Condition, list[slice], tuple[Refused, ...]]] = []
    for condition in conditions:
        tried: list[slice] = []
        refused: list[Refused] = []
        for device in listed:
            reason = refusal(device, condition.activity, condition.part_kind, condition.sources)
            if reason is None:
                try:
                    device = offered(device, condition)
                    source_fraction(device, condition.barometric_mmhg)
                except InputError as error:
                    reason = error.message
            if reason is not None:
                refused.append(Refused(device.id, reason))
                continue
            start = len(queries)
            queries += [Query(condition, device, amount) for amount in (0.0, *device.steps)]
            tried.append(slice(start, len(queries)))
        plans.append((condition, tried, tuple(refused)))
    answers = ask(fitted, queries, spread, target.low_fraction, target.ceiling_fraction, breathing_rate_min)
    return tuple(_one_titration(plan, queries, answers, target, breathing_rate_min) for plan in plans)


@dataclass(frozen=True)
class _Proposal:
    """A place on a curve, or none, and why."""

    curve: DoseCurve | None
    place: int
    chance: float | None
    reaches: bool
    text: str


def _one_titration(
    plan: tuple[Condition, list[slice], tuple[Refused, ...]],
    queries: Sequence[Query],
    answers: Answers,
    target: Target,
    breathing_rate_min: float | None,
) -> Titration:
    condition, tried, refused = plan
    has_ceiling = target.ceiling_fraction is not None
    drawn = [curve(queries, answers, places, has_ceiling, breathing_rate_min) for places in tried]
    curves = tuple(replace(one, advised=_advised(one, target)) for one in drawn)
    proposal = _proposal(curves, target)
    chosen, place = proposal.curve, proposal.place
    warnings = below_range(float(curves[0].share_below_range[0])) if curves else []
    if chosen is not None and place > 0 and target.holds_back and chosen.chance_above_ceiling is not None:
        warnings.append(ceiling_sentence(float(chosen.chance_above_ceiling[place]), target))
    return Titration(
        part_id=condition.part_id,
        activity=condition.activity,
        curves=curves,
        refused=refused,
        model_device_id=chosen.device_id if chosen is not None and place > 0 else None,
        model_amount=float(chosen.amounts[place]) if chosen is not None else None,
        model_amount_text=chosen.amount_texts[place] if chosen is not None else "",
        model_chance=proposal.chance,
        reaches_target=proposal.reaches,
        specialist_advised=not proposal.reaches,
        text=proposal.text,
        warnings=tuple(warnings),
    )


def _within_rules(drawn: DoseCurve, target: Target) -> NDArray[np.bool_]:
    """Which amounts may be proposed: those low enough, and within the ceiling where it holds back; 0 always."""
    allowed = drawn.proposable.copy()
    if target.holds_back and drawn.chance_above_ceiling is not None:
        allowed &= drawn.chance_above_ceiling <= MOST_CHANCE_ABOVE
    allowed[0] = True
    return allowed


def _advised(drawn: DoseCurve, target: Target) -> float | None:
    good = _within_rules(drawn, target) & (drawn.chance_reaching >= target.confidence)
    return float(drawn.amounts[np.argmax(good)]) if good.any() else None


def _proposal(curves: Sequence[DoseCurve], target: Target) -> _Proposal:
    if not curves:
        return _Proposal(
            None, 0, None, False, "No device of the list may be used here. Specialist assessment is advised."
        )
    low, wanted = percent(target.low_fraction), percent(target.confidence)
    reaching = next((one for one in curves if one.advised is not None), None)
    if reaching is not None:
        place = list(reaching.amounts).index(reaching.advised)
        chance = float(reaching.chance_reaching[place])
        if place == 0:
            text = f"Without added oxygen SpO2 is at or above {low} in {percent(chance)} of the spread."
        else:
            text = (
                f"{_sentence_start(reaching.amount_texts[place])} is the smallest step with which SpO2 is at or above "
                f"{low} in at least {wanted} of the spread."
            )
        return _Proposal(reaching, place, chance, True, text)
    if any((one.proposable & (one.chance_reaching >= target.confidence)).any() for one in curves):
        best, place = _best_within_rules(curves, target, MUCH_BETTER)
        chance = float(best.chance_reaching[place])
        text = (
            f"{_sentence_start(best.amount_texts[place])} is the most with which SpO2 is not likely to pass "
            f"{percent(target.ceiling_fraction or 1.0)}. It reaches {low} in {percent(chance)} of the spread, not in "
            f"the {wanted} wanted. Carbon dioxide risk is not excluded, so a blood gas on oxygen and specialist "
            "assessment are advised before more is given."
        )
        return _Proposal(best, place, chance, False, text)
    best, place = _best_within_rules(curves, target, 0.0)
    chance = float(best.chance_reaching[place])
    text = (
        f"No device and step of the list, up to {MOST_ADVISED_L_MIN:g} L/min, reaches {low} in {wanted} of the spread. "
        f"The most is reached with {best.amount_texts[place]}, in {percent(chance)} of the spread. "
        "Specialist assessment is advised."
    )
    return _Proposal(None, 0, chance, False, text)


def _best_within_rules(curves: Sequence[DoseCurve], target: Target, margin: float) -> tuple[DoseCurve, int]:
    """The curve and place that reach the target in the largest share of the spread within the rules.

    A device earlier in the list is kept unless a later one is better by more than the margin. Of equal shares, such as
    none at all, the amount with the highest SpO2 is taken.
    """
    found: list[tuple[DoseCurve, int, float]] = []
    for drawn in curves:
        shares = np.where(_within_rules(drawn, target), drawn.chance_reaching + TIE * drawn.spo2_median, -1.0)
        at = int(np.argmax(shares))
        found.append((drawn, at, float(shares[at])))
    enough = max(chance for _, _, chance in found) - margin
    return next((drawn, at) for drawn, at, chance in found if chance >= enough)


def _sentence_start(text: str) -> str:
    return text[0].upper() + text[1:]
