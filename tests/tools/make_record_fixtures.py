"""Makes the kept files of cases that later versions of the program must still open. Run once for each format.

Run:  python tests/tools/make_record_fixtures.py     (writes nothing where the files of this format exist already)
"""

from __future__ import annotations

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from planner.case import Case
from planner.records.migrations import SCHEMA
from planner.records.store import CaseStore

FOLDER = Path(__file__).resolve().parents[1] / "records" / "fixtures"
PASSPHRASE = "kept for the tests"
VERSIONS = (
    {"patient": {"reference": "KEPT-1", "initials": "K. E.", "age_years": 70, "diagnosis": "copd"}},
    {
        "patient": {"reference": "KEPT-1", "initials": "K. E.", "age_years": 71, "diagnosis": "copd"},
        "trip": {"parts": [{"part_id": "f", "kind": "flight", "duration_min": 120, "sources": ["concentrator"]}]},
        "decisions": [{"part_id": "f", "activity": "rest", "device_id": "cannula", "flow_l_min": 2}],
    },
)


def main() -> None:
    """Write the plain and the sealed file of today's format."""
    FOLDER.mkdir(exist_ok=True)
    for name in ("plain", "sealed"):
        path = FOLDER / f"format_{SCHEMA}_{name}.db"
        if path.exists():
            continue
        with CaseStore(path) as store:
            for content in VERSIONS:
                store.save("kept", Case.model_validate(content, strict=False))
            if name == "sealed":
                store.protect(PASSPHRASE)
        path.with_suffix(".lock").unlink(missing_ok=True)


if __name__ == "__main__":
    main()
