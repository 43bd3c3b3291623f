"""The case store: versions, one writer, refusals in sentences, a plain model, and a passphrase."""

import os
import sqlite3
import stat
import subprocess
import sys
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, initialize, invariant, rule

from planner.case import Case
from planner.case.patient import Patient
from planner.errors import StoreError
from planner.records.secrecy import Seal, WrongPassphrase, new_seal, unwrapped
from planner.records.store import CaseStore, default_path, new_case_id

ROOT = Path(__file__).resolve().parents[2]

SECRET = "correct horse battery"


def named(initials, age=70.0):
    return Case(patient=Patient(initials=initials, reference="REF-" + initials, age_years=age))


@pytest.fixture
def store(tmp_path):
    with CaseStore(tmp_path / "cases.db") as opened:
        yield opened


def everything_in(folder):
    return b"".join(path.read_bytes() for path in folder.iterdir())


def test_each_save_is_a_new_version_and_the_latest_is_loaded(store):
    assert [store.save("a", named("A", age)) for age in (60.0, 61.0, 62.0)] == [1, 2, 3]
    assert store.load("a").patient.age_years == 62.0
    assert store.load("a", 1).patient.age_years == 60.0
    assert [one.version for one in store.history("a")] == [3, 2, 1]


def test_the_same_content_is_not_kept_twice(store):
    assert store.save("a", named("A")) == 1
    assert store.save("a", named("A")) == 1
    assert len(store.history("a")) == 1


def test_an_older_version_is_restored_as_a_new_one(store):
    store.save("a", named("A", 60.0))
    store.save("a", named("A", 61.0))
    assert store.restore("a", 1) == 3
    assert store.load("a").patient.age_years == 60.0
    assert store.history("a")[0].note == "restored from version 1"


def test_the_list_shows_the_latest_of_each_case_the_last_saved_first(store):
    store.save("a", named("A"))
    store.save("b", named("B"))
    store.save("a", named("A", 71.0))
    first, second = store.entries()
    assert (first.case_id, first.initials, first.versions) == ("a", "A", 2)
    assert (second.case_id, second.reference) == ("b", "REF-B")


def test_deleting_says_how_many_versions_and_leaves_nothing_of_it(store, tmp_path):
    store.save("a", named("Zorro"))
    store.save("a", named("Zorro", 71.0))
    assert store.delete("a") == 2
    assert store.entries() == ()
    store.close()
    assert b"Zorro" not in everything_in(tmp_path)


@pytest.mark.parametrize("call", [lambda s: s.load("nobody"), lambda s: s.delete("nobody"), lambda s: s.load("a", 9)])
def test_what_is_not_there_is_said(store, call):
    store.save("a", named("A"))
    with pytest.raises(StoreError, match=r"(There is no case|has no version)"):
        call(store)


def test_a_second_process_reads_and_is_told_it_cannot_write(store, tmp_path):
    store.save("a", named("A"))
    code = (
        "import sys; from pathlib import Path; from planner.errors import StoreError\n"
        "from planner.records.store import CaseStore\n"
        "s = CaseStore(Path(sys.argv[1])); print(s.read_only, s.load('a').patient.initials)\n"
        "try: s.save('b', s.load('a'))\n"
        "except StoreError as e: print(e)\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(tmp_path / "cases.db")],
        capture_output=True,
        text=True,
        timeout=60,
        cwd=Path(__file__).parents[2],
    )
    assert done.stdout.splitlines() == [
        "True A",
        "Another window of this program has the cases open; this one only reads.",
    ]


def test_after_closing_the_next_one_writes(tmp_path):
    CaseStore(tmp_path / "cases.db").close()
    with CaseStore(tmp_path / "cases.db") as again:
        assert not again.read_only
        again.save("a", named("A"))


def test_a_file_of_another_program_is_left_alone(tmp_path):
    path = tmp_path / "cases.db"
    other = sqlite3.connect(path)
    other.execute("create table notes(text)")
    other.execute("pragma user_version = 3")
    other.commit()
    other.close()
    with pytest.raises(StoreError, match="not a file of cases"):
        CaseStore(path)


def test_a_file_of_a_newer_version_is_refused(tmp_path):
    path = tmp_path / "cases.db"
    CaseStore(path).close()
    newer = sqlite3.connect(path)
    newer.execute("pragma user_version = 99")
    newer.close()
    with pytest.raises(StoreError, match="newer version"):
        CaseStore(path)


def test_a_file_that_is_no_database_is_refused_and_kept(tmp_path):
    path = tmp_path / "cases.db"
    path.write_bytes(b"a letter to a friend" * 100)
    with pytest.raises(StoreError, match=r"cases\.db"):
        CaseStore(path)
    assert path.read_bytes() == b"a letter to a friend" * 100


def test_a_folder_that_cannot_be_made_is_said(tmp_path):
    (tmp_path / "file").write_text("x")
    with pytest.raises(StoreError, match="cannot be used for the cases"):
        CaseStore(tmp_path / "file" / "cases.db")


def test_the_files_are_readable_by_their_owner_alone(store, tmp_path):
    store.save("a", named("A"))
    for path in tmp_path.iterdir():
        assert stat.S_IMODE(path.stat().st_mode) & 0o077 == 0, path


def test_a_clock_that_goes_back_loses_nothing(store, monkeypatch):
    from datetime import UTC, datetime

    from planner.records import store as module

    class Backwards(datetime):
        moments = iter([datetime(2026, 5, 1, tzinfo=UTC), datetime(2020, 1, 1, tzinfo=UTC)])

        @classmethod
        def now(cls, tz=None):
            return next(cls.moments)

    monkeypatch.setattr(module, "datetime", Backwards)
    store.save("a", named("A", 60.0))
    store.save("a", named("A", 61.0))
    monkeypatch.undo()
    assert store.load("a").patient.age_years == 61.0
    assert [one.version for one in store.history("a")] == [2, 1]


def test_a_damaged_version_is_told_and_an_older_one_still_read(store, tmp_path):
    store.save("a", named("A", 60.0))
    store.save("a", named("A", 61.0))
    store.close()
    damaged = sqlite3.connect(tmp_path / "cases.db")
    damaged.execute("update versions set body = ? where version = 2", (b"{}",))
    damaged.commit()
    damaged.close()
    with CaseStore(tmp_path / "cases.db") as again:
        with pytest.raises(StoreError, match="Version 2 of case a is damaged"):
            again.load("a")
        assert again.load("a", 1).patient.age_years == 60.0
        assert "damaged" in again.entries()[0].fault


def test_the_default_place_can_be_moved(monkeypatch, tmp_path):
    monkeypatch.setenv("PLANNER_DATA_DIR", str(tmp_path))
    assert default_path() == tmp_path / "cases.db"
    monkeypatch.delenv("PLANNER_DATA_DIR")
    assert "home-oxygen-altitude-planner" in str(default_path())


def test_new_ids_differ():
    assert len({new_case_id() for _ in range(100)}) == 100


# -- secrecy


def test_with_a_passphrase_nothing_of_a_case_is_readable_in_any_file(store, tmp_path):
    store.save("a", named("Zorro"))
    store.protect(SECRET)
    store.save("a", named("Zorro", 71.0))
    store.save("b", named("Zorrina"))
    assert b"Zorr" not in everything_in(tmp_path)
    assert SECRET.encode() not in everything_in(tmp_path)
    assert store.load("a").patient.initials == "Zorro"
    assert store.load("a", 1).patient.age_years == 70.0
    store.close()
    assert b"Zorr" not in everything_in(tmp_path)


def test_a_locked_store_gives_nothing_and_takes_nothing(store):
    store.save("a", named("A"))
    store.protect(SECRET)
    store.lock()
    assert store.locked
    for call in (lambda: store.load("a"), lambda: store.save("b", named("B"))):
        with pytest.raises(StoreError, match="locked; enter the passphrase"):
            call()
    assert store.entries()[0].initials == ""
    store.unlock(SECRET)
    assert store.load("a").patient.initials == "A"


def test_a_wrong_passphrase_is_told_apart_from_damage(store):
    store.save("a", named("A"))
    store.protect(SECRET)
    store.lock()
    with pytest.raises(WrongPassphrase):
        store.unlock("wrong horse battery")
    with pytest.raises(StoreError, match="kept key is damaged") as damage:
        unwrapped(b"{}", SECRET)
    assert not isinstance(damage.value, WrongPassphrase)


def test_after_a_change_only_the_new_passphrase_opens(store, tmp_path):
    store.save("a", named("A"))
    store.protect(SECRET)
    store.change_passphrase(SECRET, "another long secret")
    store.close()
    with CaseStore(tmp_path / "cases.db") as again:
        with pytest.raises(WrongPassphrase):
            again.unlock(SECRET)
        again.unlock("another long secret")
        assert again.load("a").patient.initials == "A"


def test_a_short_passphrase_is_refused_and_nothing_is_sealed(store):
    store.save("a", named("A"))
    with pytest.raises(StoreError, match="8 or more"):
        store.protect("short")
    assert not store.protected
    assert store.load("a").patient.initials == "A"


def test_a_sealed_version_moved_to_another_case_is_refused(store, tmp_path):
    store.save("a", named("A"))
    store.save("b", named("B"))
    store.protect(SECRET)
    store.close()
    raw = sqlite3.connect(tmp_path / "cases.db")
    body = raw.execute("select body from versions where case_id = 'a'").fetchone()[0]
    from planner.records.store import _digest

    raw.execute("update versions set body = ?, digest = ? where case_id = 'b'", (body, _digest("b", 1, body)))
    raw.commit()
    raw.close()
    with CaseStore(tmp_path / "cases.db") as again:
        again.unlock(SECRET)
        with pytest.raises(StoreError, match="does not belong here"):
            again.load("b")
        assert again.load("a").patient.initials == "A"


def test_a_changed_seal_is_refused():
    seal = new_seal()
    closed = bytearray(seal.close(b"content", b"identity"))
    closed[-1] ^= 1
    with pytest.raises(StoreError, match="changed after it was saved"):
        seal.open(bytes(closed), b"identity")
    assert isinstance(seal, Seal)


# -- against a plain model


class Machine(RuleBasedStateMachine):
    """The store beside a dictionary of lists, closed and opened at any moment."""

    @initialize(folder=st.just(None))
    def begin(self, folder):
        import tempfile

        self.folder = tempfile.TemporaryDirectory()
        self.path = Path(self.folder.name) / "cases.db"
        self.store, self.model = CaseStore(self.path), {}

    @rule(case_id=st.sampled_from("abc"), age=st.integers(40, 44))
    def save(self, case_id, age):
        version = self.store.save(case_id, named(case_id, float(age)))
        versions = self.model.setdefault(case_id, [])
        if not versions or versions[-1] != age:
            versions.append(age)
        assert version == len(versions)

    @rule(case_id=st.sampled_from("abc"))
    def delete(self, case_id):
        if case_id in self.model:
            assert self.store.delete(case_id) == len(self.model.pop(case_id))

    @rule(case_id=st.sampled_from("abc"), place=st.floats(0, 0.99))
    def restore(self, case_id, place):
        if case_id in self.model:
            versions = self.model[case_id]
            index = int(place * len(versions))
            self.store.restore(case_id, index + 1)
            if versions[-1] != versions[index]:
                versions.append(versions[index])

    @rule()
    def reopen(self):
        self.store.close()
        self.store = CaseStore(self.path)

    @invariant()
    def both_say_the_same(self):
        if not hasattr(self, "model"):
            return
        kept = {
            entry.case_id: [
                int(self.store.load(entry.case_id, one.version).patient.age_years)
                for one in reversed(self.store.history(entry.case_id))
            ]
            for entry in self.store.entries()
        }
        assert kept == self.model

    def teardown(self):
        if hasattr(self, "store"):
            self.store.close()
            self.folder.cleanup()


TestAgainstAModel = Machine.TestCase
TestAgainstAModel.settings = settings(
    max_examples=15, stateful_step_count=20, deadline=None, suppress_health_check=list(HealthCheck)
)


def test_the_store_is_owned_by_the_user_who_made_it(store, tmp_path):
    assert (tmp_path / "cases.db").stat().st_uid == os.getuid()


def test_closing_while_another_thread_reads_refuses_and_never_ends_the_process(tmp_path):
    # A connection closed under a reading thread ends the interpreter; this runs in one of its own.
    code = """
import sys, threading
from pathlib import Path
from planner.case import Case
from planner.errors import StoreError
from planner.records.store import CaseStore
for number in range(40):
    store = CaseStore(Path(sys.argv[1]) / f"{number}.db")
    store.save("a", Case())
    refused, started = [], threading.Event()
    def read():
        try:
            while True:
                store.load("a")
                started.set()
        except StoreError as error:
            refused.append(str(error))
    threads = [threading.Thread(target=read) for _ in range(3)]
    for thread in threads:
        thread.start()
    started.wait()
    store.close()
    for thread in threads:
        thread.join()
    assert refused == [f"{number}.db is closed."] * 3, refused
print("whole")
"""
    done = subprocess.run([sys.executable, "-c", code, tmp_path], cwd=ROOT, capture_output=True, text=True)
    assert done.stdout == "whole\n", done.stderr
