"""Files of every released format, kept as they were, open and read the same in this version."""

import json
import shutil
from pathlib import Path

import pytest

from planner.records.migrations import SCHEMA
from planner.records.store import CaseStore
from tests.tools.make_record_fixtures import FOLDER, PASSPHRASE, VERSIONS

KEPT = sorted(FOLDER.glob("format_*.db"))


def opened(kept, folder):
    """A copy, so that the kept file stays as it was."""
    copy = folder / kept.name
    shutil.copyfile(kept, copy)
    store = CaseStore(copy)
    if "sealed" in kept.name:
        store.unlock(PASSPHRASE)
    return store


def test_every_format_has_a_plain_and_a_sealed_file():
    expected = {f"format_{number}_{name}.db" for number in range(1, SCHEMA + 1) for name in ("plain", "sealed")}
    assert {path.name for path in KEPT} == expected


@pytest.mark.parametrize("kept", KEPT, ids=[path.stem for path in KEPT])
def test_a_file_of_a_released_format_opens_with_every_version(kept, tmp_path):
    with opened(kept, tmp_path) as store:
        assert [one.version for one in store.history("kept")] == [2, 1]
        for version, content in enumerate(VERSIONS, start=1):
            case = json.loads(store.load("kept", version).model_dump_json())
            assert case["patient"] == case["patient"] | content["patient"]
        latest = store.load("kept")
        assert latest.trip.parts[0].duration_min == 120.0
        assert latest.decisions[0].flow_l_min == 2.0


@pytest.mark.parametrize("kept", KEPT, ids=[path.stem for path in KEPT])
def test_a_file_of_a_released_format_takes_a_new_version(kept, tmp_path):
    with opened(kept, tmp_path) as store:
        older = store.load("kept")
        patient = older.patient.model_copy(update={"age_years": 72})
        assert store.save("kept", older.model_copy(update={"patient": patient})) == 3
        assert store.load("kept").patient.age_years == 72
        assert store.load("kept", 2).patient.age_years == 71


def test_the_kept_sealed_file_shows_nothing_of_its_case():
    content = Path(FOLDER / "format_1_sealed.db").read_bytes()
    assert b"KEPT-1" not in content
    assert b"copd" not in content
