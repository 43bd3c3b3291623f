"""What a decided flow or setting would give, shown beside the rule and the model; the prescriber decides."""

from __future__ import annotations

from dataclasses import dataclass

from planner.delivery.devices import Device, refusal, require_amount
from planner.delivery.dose import Condition, Query, amount_text, ask, offered
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
    spread = spread or usual_spread(fitted.log_sd.size)
    if device is None and amount != 0.0:
        raise InputError("device_id", "A flow or setting needs its device.")
    warnings: list[str] = []
    if device is not None:
        device = offered(device, condition)
        require_amount(device, amount)
        reason = refusal(device, condition.activity, condition.part_kind, condition.sources)
        if reason is not None:
            warnings.append(reason)
    query = Query(condition, device or _NO_DEVICE, amount)
    answers = ask(fitted, [query], spread, target.low_fraction, target.ceiling_fraction, breathing_rate_min)
    reaching, above = float(answers.chance_reaching[0]), float(answers.chance_above_ceiling[0])
    if reaching < target.confidence:
        warnings.append(
            f"SpO2 is at or above {percent(target.low_fraction)} in {percent(reaching)} of the spread, "
            f"not in the {percent(target.confidence)} wanted."
        )
    if target.holds_back and target.ceiling_fraction is not None and above > MOST_CHANCE_ABOVE and amount > 0.0:
        warnings.append(ceiling_sentence(above, target))
    if device is not None and device.unit == "L/min" and amount > MOST_ADVISED_L_MIN:
        warnings.append(f"This is above {MOST_ADVISED_L_MIN:g} L/min, the most the model ever proposes.")
    warnings += below_range(float(answers.share_below_range[0]))
    return OnOxygen(
        part_id=condition.part_id,
        activity=condition.activity,
        device_id=device.id if device is not None else None,
        amount=amount,
        amount_text=amount_text(device or _NO_DEVICE, amount),
        spo2_low=float(answers.spo2[0, 0]),
        spo2_median=float(answers.spo2[1, 0]),
        spo2_high=float(answers.spo2[2, 0]),
        pao2_low_mmhg=float(answers.pao2_mmhg[0, 0]),
        pao2_median_mmhg=float(answers.pao2_mmhg[1, 0]),
        pao2_high_mmhg=float(answers.pao2_mmhg[2, 0]),
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
