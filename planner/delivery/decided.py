"""What a decided flow or setting would give, shown beside the rule and the model; the prescriber decides."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from planner.delivery.devices import Device, refusal, require_amount
from planner.delivery.dose import Answers, Condition, Query, amount_text, ask, offered
from planner.delivery.effect import DeliverySpread, usual_spread
from planner.delivery.target import (
    MOST_ADVISED_L_MIN,
    MOST_CHANCE_ABOVE,
    Target,
    below_range,
    ceiling_sentence,
    percent,
)
from planner.errors import InputError
from planner.lung.fitted import FittedLung


@dataclass(frozen=True)
class OnOxygen:
    """What one amount of one device would give: 5, 50 and 95 % of the spread, and what to watch."""

    part_id: str
    activity: str
    device_id: str | None
    amount: float
    amount_text: str
    spo2_low: float
    spo2_median: float
    spo2_high: float
    pao2_low_mmhg: float
    pao2_median_mmhg: float
    pao2_high_mmhg: float
    chance_reaching: float
    chance_above_ceiling: float | None
    warnings: tuple[str, ...]


@dataclass(frozen=True)
class Dose:
    """A decided amount in a condition: L/min, or the setting of a pulse device; device None: no added oxygen."""

    condition: Condition
    device: Device | None
    amount: float


def with_decision(
    fitted: FittedLung,
    condition: Condition,
    device: Device | None,
    amount: float,
    target: Target,
    *,
    spread: DeliverySpread | None = None,
    breathing_rate_min: float | None = None,
) -> OnOxygen:
    """What this amount of this device would give in this condition, with what to watch as sentences.

    device None with amount 0: no added oxygen. Raises InputError for an amount the device does not have. A device
    that should not be used here, a flow above 4 L/min and a likely passing of the ceiling are warnings: the prescriber
    decides.
    """
    dose = Dose(condition, device, amount)
    (found,) = with_decisions(fitted, [dose], target, spread=spread, breathing_rate_min=breathing_rate_min)
    if isinstance(found, InputError):
        raise found
    return found


def with_decisions(
    fitted: FittedLung,
    doses: Sequence[Dose],
    target: Target,
    *,
    spread: DeliverySpread | None = None,
    breathing_rate_min: float | None = None,
) -> tuple[OnOxygen | InputError, ...]:
    """with_decision for many doses, all asked of the lung together; the error of a dose that cannot be asked."""
    spread = spread or usual_spread(fitted.log_sd.size)
    found: dict[int, OnOxygen | InputError] = {}
    asked: dict[int, tuple[Query, list[str]]] = {}
    for place, dose in enumerate(doses):
        try:
            asked[place] = _query(dose)
        except InputError as error:
            found[place] = error
    try:
        queries = [query for query, _ in asked.values()]
        answers = ask(fitted, queries, spread, target.low_fraction, target.ceiling_fraction, breathing_rate_min)
    except InputError as error:
        if len(doses) == 1:
            return (error,)
        return tuple(
            with_decisions(fitted, [one], target, spread=spread, breathing_rate_min=breathing_rate_min)[0]
            for one in doses
        )
    for at, (place, (query, warnings)) in enumerate(asked.items()):
        found[place] = _on_oxygen(query, warnings, answers, at, target)
    return tuple(found[place] for place in range(len(doses)))


def _query(dose: Dose) -> tuple[Query, list[str]]:
    """What is asked of the lung, and why this device should not be used here."""
    if dose.device is None:
        if dose.amount != 0.0:
            raise InputError("device_id", "A flow or setting needs its device.")
        return Query(dose.condition, _NO_DEVICE, 0.0), []
    device = offered(dose.device, dose.condition)
    require_amount(device, dose.amount)
    reason = refusal(device, dose.condition.activity, dose.condition.part_kind, dose.condition.sources)
    return Query(dose.condition, device, dose.amount), [] if reason is None else [reason]


def _on_oxygen(query: Query, warnings: list[str], answers: Answers, at: int, target: Target) -> OnOxygen:
    condition, device, amount = query.condition, query.device, query.amount
    reaching, above = float(answers.chance_reaching[at]), float(answers.chance_above_ceiling[at])
    if reaching < target.confidence:
        warnings.append(
            f"SpO2 is at or above {percent(target.low_fraction)} in {percent(reaching)} of the spread, "
            f"not in the {percent(target.confidence)} wanted."
        )
    if target.holds_back and target.ceiling_fraction is not None and above > MOST_CHANCE_ABOVE and amount > 0.0:
        warnings.append(ceiling_sentence(above, target))
    if device.unit == "L/min" and amount > MOST_ADVISED_L_MIN:
        warnings.append(f"This is above {MOST_ADVISED_L_MIN:g} L/min, the most the model ever proposes.")
    warnings += below_range(float(answers.share_below_range[at]))
    (spo2_low, spo2_median, spo2_high), (pao2_low, pao2_median, pao2_high) = (
        (float(one) for one in values[:, at]) for values in (answers.spo2, answers.pao2_mmhg)
    )
    return OnOxygen(
        part_id=condition.part_id,
        activity=condition.activity,
        device_id=None if device is _NO_DEVICE else device.id,
        amount=amount,
        amount_text=amount_text(device, amount),
        spo2_low=spo2_low,
        spo2_median=spo2_median,
        spo2_high=spo2_high,
        pao2_low_mmhg=pao2_low,
        pao2_median_mmhg=pao2_median,
        pao2_high_mmhg=pao2_high,
        chance_reaching=reaching,
        chance_above_ceiling=above if target.ceiling_fraction is not None else None,
        warnings=tuple(warnings),
    )


_NO_DEVICE = Device(
    id="none",
    name="No device",
    kind="cannula",
    unit="L/min",
    steps=(),
    supply="any",
    meter="mass",
    activities=("rest", "walking", "asleep"),
    part_kinds=(),
    fraction=None,
    mask_fractions=(),
    pulse_kind=None,
    pulse_rows=(),
    source="",
    note="",
)
