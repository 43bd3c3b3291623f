"""How near the planner comes to what was published: groups, every predictor, oxygen, blood; three tables in Markdown.

Run:  python tests/benchmarks/accuracy_groups.py
Each method sees the ground mean alone. No constant of the model was set on these groups.
"""

import json
import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT))

from planner.air.atmosphere import isa_altitude_m  # noqa: E402
from planner.lung.alveolar import alveolar_po2_mmhg  # noqa: E402
from planner.lung.fitting import LungReading, Person, fit_lung  # noqa: E402

UNREPORTED_PACO2_MMHG = 39.0
EXPECTED_PACO2_FALL_MMHG = 2.0


def rows() -> list[dict]:
    """Every group with the prediction of each method in mmHg; None where a method has nothing to say."""
    published = json.loads((ROOT / "tests/published/groups.json").read_text("utf-8"))
    return [_row(group, False) for group in published["groups"]] + [
        _row(group, True) for group in published["on_oxygen"]
    ]


def errors(found: list[dict], method: str) -> tuple[int, float, float]:
    """(groups, mean error, root mean square error) of one method in mmHg."""
    misses = np.array([row[method] - row["measured"] for row in found if row[method] is not None])
    return misses.size, float(misses.mean()), float(np.sqrt((misses**2).mean()))


def _row(group: dict, on_oxygen: bool) -> dict:
    ground, exposure = group["ground"], group["exposure"]
    reading = LungReading(
        ground["barometric_mmhg"],
        ground["fio2"],
        pao2_mmhg=ground["pao2_mmhg"],
        paco2_mmhg=ground["paco2_mmhg"] or UNREPORTED_PACO2_MMHG,
        sample="arterial",
        age_days=0.0,
    )
    fitted = fit_lung((reading,), Person(diagnosis=group["diagnosis"]))
    inspired = exposure["fio2"] * (exposure["barometric_mmhg"] - 47.0)
    lung = fitted.arterial(inspired, exposure["barometric_mmhg"])
    altitude_kft = isa_altitude_m(inspired / 0.2093 + 47.0) / 304.8
    ground_ideal = alveolar_po2_mmhg(ground["barometric_mmhg"], ground["fio2"], reading.paco2_mmhg)
    there_ideal = alveolar_po2_mmhg(
        exposure["barometric_mmhg"], exposure["fio2"], reading.paco2_mmhg - EXPECTED_PACO2_FALL_MMHG
    )
    return {
        "group": group["id"],
        "what": exposure["what"],
        "source": group["source"],
        "on_oxygen": on_oxygen,
        "measured": group["measured_pao2_mmhg"],
        "lung": float(np.median(lung.po2_mmhg)),
        "low": float(np.quantile(lung.po2_mmhg, 0.05)),
        "high": float(np.quantile(lung.po2_mmhg, 0.95)),
        # Gong H et al., Am Rev Respir Dis 1984;130:980 (coefficients from memory); altitude in thousands of feet.
        "gong": None if on_oxygen else 22.8 - 2.74 * altitude_kft + 0.68 * ground["pao2_mmhg"],
        # Dillard TA et al., Ann Intern Med 1989;111:362 (coefficients from memory); for 8000 ft.
        "dillard": None if on_oxygen else 0.410 * ground["pao2_mmhg"] + 17.652,
        "ratio": ground["pao2_mmhg"] / ground_ideal * there_ideal,
        "difference": there_ideal - (ground_ideal - ground["pao2_mmhg"]),
    }


def table(found: list[dict]) -> str:
    """The comparison as Markdown, with the errors of each method over the groups on air or a hypoxic mixture."""
    names = {
        "lung": "This lung",
        "gong": "Gong 1984",
        "dillard": "Dillard 1989",
        "ratio": "a/A ratio",
        "difference": "A-a difference",
    }
    lines = [
        "| Group and exposure | Measured PaO2, mmHg | " + " | ".join(names.values()) + " |",
        "| --- | --- |" + " --- |" * len(names),
    ]
    for row in found:
        cells = ["-" if row[name] is None else f"{row[name]:.1f}" for name in names]
        cells[0] += f" ({row['low']:.0f} to {row['high']:.0f})"
        lines.append(f"| {row['source']}: {row['what']} | {row['measured']:.1f} | " + " | ".join(cells) + " |")
    air = [row for row in found if not row["on_oxygen"]]
    for index, label in ((1, "Mean error"), (2, "Root mean square error")):
        cells = [
            f"{errors(air, name)[index]:+.1f}" if index == 1 else f"{errors(air, name)[index]:.1f}" for name in names
        ]
        lines.append(f"| **{label}, {len(air)} groups without added oxygen** | | " + " | ".join(cells) + " |")
    return "\n".join(lines)


def report() -> list[str]:
    """All tables: the groups, every predictor over them, and what else was measured."""
    from accuracy_predictors import measured_table, predictor_table

    found = rows()
    return [table(found), predictor_table(found), measured_table()]


if __name__ == "__main__":
    print("\n\n".join(report()))
