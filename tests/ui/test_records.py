"""Versions, passphrase and lock in the real app: nothing is lost, and nothing is left open."""

import os
import subprocess
import sys
import time
from datetime import date
from pathlib import Path

import platformdirs
import pytest

from planner.case import Case
from planner.case.measurements import BloodGas
from planner.case.patient import Patient
from planner.records.reading import write_case
from planner.records.store import CaseStore
from ui import app as app_module
from ui.library import Library

ROOT = Path(__file__).resolve().parents[2]


def kept(folder, *ages):
    """A case with a version for each age."""
    store = Library(folder)
    for age in ages:
        store.save("a", Case(patient=Patient(initials="M. T.", age_years=age)))
    store.close()


@pytest.fixture
def two_versions(opened, tmp_path):
    kept(tmp_path / "data", 70, 71)
    driver = opened()
    driver.tap("Versions of a case")
    driver.tap([one for one in driver.widgets() if getattr(one, "text", "") == "M. T."][-1])
    driver.frames(6)
    return driver


def test_an_older_version_is_compared_and_restored_and_nothing_is_lost(two_versions):
    driver = two_versions
    driver.tap("Version 1")
    assert driver.reads("Patient, age (years)")
    assert driver.reads("70 → 71")
    driver.tap("Restore this version")
    assert driver.app.library.read("a").patient.age_years == 70
    assert [one.version for one in driver.app.library.history("a")] == [3, 2, 1]
    assert driver.reads("restored from version 1")


def test_a_copy_of_an_older_version_leaves_the_case_as_it_is(two_versions):
    driver = two_versions
    driver.tap("Version 1")
    driver.tap("Open a copy of it")
    assert driver.app.session.case.patient.age_years == 70
    driver.app.session.set("patient.age_years", 75)
    driver.app.session.save_now()
    assert driver.app.library.read("a").patient.age_years == 71
    assert len(driver.app.library.rows()) == 2


def test_escape_leaves_the_versions(two_versions):
    two_versions.key(27)
    two_versions.frames(4)
    assert two_versions.reads("New case")


@pytest.fixture
def sealed(opened, tmp_path):
    """A sealed case, open in the app."""
    kept(tmp_path / "data", 70)
    with CaseStore(tmp_path / "data" / "cases.db") as store:
        store.protect("ripe cherries")
    driver = opened()
    driver.fill(driver.field("Passphrase"), "ripe cherries")
    driver.tap("Unlock")
    driver.until(lambda: driver.reads("M. T."))
    return driver


def test_the_cases_are_locked_by_one_touch(sealed):
    sealed.tap("Passphrase")
    sealed.tap("Lock now")
    assert sealed.reads("The cases on this device are sealed.")
    assert not sealed.reads("M. T.")
    assert sealed.app.library.locked


def test_the_passphrase_is_changed_and_the_old_one_opens_nothing(sealed):
    sealed.tap("Passphrase")
    sealed.fill(sealed.field("Passphrase now"), "wrong cherries")
    sealed.fill(sealed.field("New passphrase"), "green apples")
    sealed.fill(sealed.field("The new one again"), "green apples")
    sealed.tap("Change the passphrase")
    sealed.until(lambda: sealed.reads("passphrase does not open"))
    sealed.fill(sealed.field("Passphrase now"), "ripe cherries")
    sealed.tap("Change the passphrase")
    sealed.until(lambda: not sealed.reads("Passphrase now"))
    sealed.tap("Passphrase")
    sealed.tap("Lock now")
    for typed, opens in (("ripe cherries", False), ("green apples", True)):
        sealed.fill(sealed.field("Passphrase"), typed)
        sealed.tap("Unlock")
        sealed.until(lambda opens=opens: sealed.reads("M. T.") == opens and (opens or sealed.reads("does not open")))


def test_an_idle_app_saves_what_is_open_and_locks_itself(sealed, monkeypatch):
    sealed.tap("M. T.")
    sealed.frames(6)
    sealed.app.session.set("patient.age_years", 72)
    now = time.monotonic()
    monkeypatch.setattr(app_module.time, "monotonic", lambda: now + 14 * 60)
    sealed.app.lock_if_idle()
    assert not sealed.app.library.locked
    monkeypatch.setattr(app_module.time, "monotonic", lambda: now + 16 * 60)
    sealed.app.lock_if_idle()
    sealed.frames(6)
    assert sealed.app.library.locked
    assert not sealed.reads("M. T.")
    sealed.app.library.unlock("ripe cherries")
    assert sealed.app.library.read("a").patient.age_years == 72


def test_a_touch_puts_the_lock_off_and_never_means_never(sealed, monkeypatch):
    now = time.monotonic()
    monkeypatch.setattr(app_module.time, "monotonic", lambda: now + 14 * 60)
    sealed.tap("Passphrase")
    sealed.tap("Never")
    assert sealed.app.library.lock_after_min is None
    monkeypatch.setattr(app_module.time, "monotonic", lambda: now + 600 * 60)
    sealed.app.lock_if_idle()
    assert not sealed.app.library.locked
    sealed.tap("15 min")
    monkeypatch.setattr(app_module.time, "monotonic", lambda: now + 614 * 60)
    sealed.app.lock_if_idle()
    assert not sealed.app.library.locked


def test_what_is_typed_is_saved_within_a_second_without_leaving_the_field(new_case):
    new_case.tap("About this person")
    new_case.fill(new_case.field("Initials"), "A. B.")
    begun = time.monotonic()
    new_case.until(lambda: new_case.app.library.rows() != [])
    assert time.monotonic() - begun < 1.5
    assert new_case.app.library.rows()[0].title == "A. B."


def test_undo_goes_back_over_steps(demo):
    session = demo.app.session
    age, minutes = session.case.patient.age_years, session.case.trip.parts[0].duration_min
    session.set("patient.age_years", 60)
    demo.app.shell.go("trip")
    session.set("trip.parts.0.duration_min", 30.0)
    demo.app.shell.go("kit")
    demo.frames(6)
    demo.tap(demo.app.shell.undo)
    demo.tap(demo.app.shell.undo)
    assert session.case.patient.age_years == age
    assert session.case.trip.parts[0].duration_min == minutes


@pytest.fixture
def named(opened, tmp_path, monkeypatch):
    """A case with a name, and exports that go to a folder of the test."""
    monkeypatch.setattr(platformdirs, "user_documents_dir", lambda: str(tmp_path / "documents"))
    store = Library(tmp_path / "data")
    gas = BloodGas(taken_on=date(2026, 11, 2), pao2_mmhg=70.0)
    store.save("a", Case(patient=Patient(initials="M. T.", name="Zorro Zorrino"), measurements=(gas,)))
    store.close()
    return opened()


def written(tmp_path):
    return sorted((tmp_path / "documents" / "oxygen-exports").glob("*.json"))


def test_an_export_leaves_the_name_out_unless_chosen_and_comes_in_again(named, tmp_path):
    named.tap("Export a case")
    row = [one for one in named.widgets() if getattr(one, "text", "") == "M. T."][-1]
    named.tap(row)
    assert named.reads("Name and birth date are left out.")
    assert b"Zorro" not in written(tmp_path)[0].read_bytes()
    named.tap("Kept")
    named.tap(row)
    assert b"Zorro" in written(tmp_path)[0].read_bytes()
    named.tap("Import cases")
    named.fill(named.field("File or folder"), str(written(tmp_path)[0]))
    named.tap("Import this")
    assert named.app.session.case.patient.name == "Zorro Zorrino"


def test_measurements_go_out_as_fhir_and_come_in_with_what_was_not_understood(named, tmp_path):
    named.tap("Export a case")
    named.tap("Measurements, FHIR")
    named.tap([one for one in named.widgets() if getattr(one, "text", "") == "M. T."][-1])
    assert named.reads("stay behind")
    (bundle,) = written(tmp_path)
    assert b"Zorro" not in bundle.read_bytes()
    named.tap("Import cases")
    named.fill(named.field("File or folder"), str(bundle.parent))
    named.tap("Import this")
    assert named.reads("Cases taken: 1.")
    assert named.reads("Measurements taken: 1.")
    assert len(named.app.library.rows()) == 2


def test_an_imported_case_is_kept_before_anything_is_changed(opened, tmp_path):
    path = tmp_path / "case.json"
    path.write_text(write_case(Case(patient=Patient(initials="I. M."))))
    driver = opened()
    driver.tap("Import cases")
    driver.fill(driver.field("File or folder"), str(path))
    driver.tap("Import this")
    assert driver.app.session.case.patient.initials == "I. M."
    assert [row.title for row in driver.app.library.rows()] == ["I. M."]


CRASH = """
import sys
from pathlib import Path
from kivy.clock import Clock
from ui.app import PlannerApp
app = PlannerApp(data_folder=Path(sys.argv[1]))
def open_and_fail(_dt):
    app.library.unlock("ripe cherries")
    app.open_case("a", app.library.read("a"))
    app.session.set("patient.reference", "ZORRO-2")
    app.session.save_now()
    Clock.schedule_once(fail, 0.3)
def fail(_dt):
    raise RuntimeError("a fault in the program")
Clock.schedule_once(open_and_fail, 1.0)
app.run()
"""


def test_a_crash_leaves_nothing_of_a_sealed_case_in_any_file_or_report(tmp_path):
    data, home, temporary = (tmp_path / name for name in ("data", "kivy", "temporary"))
    temporary.mkdir()
    with CaseStore(data / "cases.db") as store:
        store.save("a", Case(patient=Patient(initials="ZORRO", name="Zorro Zorrino")))
        store.protect("ripe cherries")
    environment = os.environ | {"KIVY_HOME": str(home), "TMPDIR": str(temporary), "PYTHONFAULTHANDLER": "1"}
    for name in ("KIVY_NO_FILELOG", "KIVY_NO_CONSOLELOG"):
        environment.pop(name, None)
    done = subprocess.run(
        [sys.executable, "-c", CRASH, str(data)],
        cwd=ROOT,
        env=environment,
        capture_output=True,
        timeout=60,
        check=False,
    )
    assert b"a fault in the program" in done.stderr
    with CaseStore(data / "cases.db") as store:
        store.unlock("ripe cherries")
        assert store.load("a").patient.reference == "ZORRO-2"
    left = [path for path in tmp_path.rglob("*") if path.is_file()]
    assert any("kivy" in path.parts for path in left)
    assert [path for path in left if b"zorr" in path.read_bytes().lower()] == []
    assert b"zorr" not in (done.stdout + done.stderr).lower()
