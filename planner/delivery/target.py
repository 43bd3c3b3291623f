"""What oxygen is to reach and not to pass, the flow a pathway's rule comes to, and the sentences that say so."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from planner.air.ranges import require_within
from planner.errors import InputError

MOST_ADVISED_L_MIN = 4.0
# 88 to 92 % where hypercapnic failure is a risk (O'Driscoll BR et al., Thorax 2017;72 Suppl 1, for acute care).
USUAL_CEILING = 0.92
# A step counts as within the ceiling while at most this share of the spread passes it, so while the median does not.
MOST_CHANCE_ABOVE = 0.5
SHARE_BELOW_SAID = 0.05

CarbonDioxideRisk = Literal["yes", "no", "not known"]


@dataclass(frozen=True)
class Target:
    """What the oxygen is to reach, as SpO2 fractions, and in which share of the spread (confidence, 0.5 to 0.99).

    high_fraction None: 0.92 unless carbon dioxide risk is excluded, then none.
    """

    low_fraction: float
    high_fraction: float | None = None
    confidence: float = 0.9
    carbon_dioxide_risk: CarbonDioxideRisk = "not known"

    def __post_init__(self) -> None:
        require_within("low_fraction", "Bottom of the SpO2 target", self.low_fraction, 0.5, 0.99)
        require_within("confidence", "Confidence", self.confidence, 0.5, 0.99)
        if self.high_fraction is None:
            return
        require_within("high_fraction", "Top of the SpO2 target", self.high_fraction, 0.5, 1.0)
        if self.high_fraction <= self.low_fraction:
            raise InputError(
                "high_fraction",
                f"The top of the SpO2 target, {100 * self.high_fraction:g} %, must be above "
                f"its bottom, {100 * self.low_fraction:g} %.",
            )

    @property
    def ceiling_fraction(self) -> float | None:
        """The SpO2 not to pass: as chosen, else 92 % while carbon dioxide risk is not excluded."""
        if self.high_fraction is not None:
            return self.high_fraction
        return USUAL_CEILING if self.holds_back else None

    @property
    def holds_back(self) -> bool:
        """Whether the ceiling limits what is proposed: unless carbon dioxide risk is excluded."""
        return self.carbon_dioxide_risk != "no"


def rule_amount(kind: str, l_min: float, usual_l_min: float | None) -> tuple[float | None, str]:
    """Flow (L/min) of a pathway's rule and a sentence on it; None where it cannot be worked out or is above 4 L/min.

    kind "fixed": l_min. kind "usual_plus": the flow used at home plus l_min; 0 at home is none used.
    """
    require_within("l_min", "Flow of the rule", l_min, 0.1, 15.0, "L/min")
    if kind == "fixed":
        flow = l_min
    elif kind == "usual_plus":
        if usual_l_min is None:
            return None, f"The rule adds {l_min:g} L/min to the flow used at home, which is not known."
        flow = usual_l_min + l_min
    else:
        raise InputError("kind", f"The flow rule {kind!r} is not known; fixed and usual_plus are.")
    if flow > MOST_ADVISED_L_MIN:
        return None, (
            f"The rule comes to {flow:g} L/min, above the {MOST_ADVISED_L_MIN:g} L/min that are proposed at most; "
            "specialist assessment is advised."
        )
    return flow, f"The rule comes to {flow:g} L/min of continuous oxygen."


def ceiling_sentence(above: float, target: Target) -> str:
    risk = "is present" if target.carbon_dioxide_risk == "yes" else "is not excluded"
    return (
        f"Carbon dioxide risk {risk}: SpO2 passes the ceiling of {percent(target.ceiling_fraction or 1.0)} "
        f"in {percent(above)} of the spread."
    )


def below_range(share: float) -> list[str]:
    if share <= SHARE_BELOW_SAID:
        return []
    return [f"In {percent(share)} of the spread the PaO2 is below the 25 mmHg the model covers."]


def percent(fraction: float) -> str:
    return f"{100.0 * fraction:.0f} %"
