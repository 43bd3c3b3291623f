"""The store when the machine fails: killed at any instant, a full disk, damaged bytes."""

import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from planner.case import Case
from planner.case.patient import Patient
from planner.errors import StoreError
from planner.records.store import CaseStore

ROOT = Path(__file__).parents[2]
WRITER = """
import os, sys
from pathlib import Path
from planner.case import Case
from planner.case.patient import Patient
from planner.records.store import CaseStore

store = CaseStore(Path(sys.argv[1]))
number = len(store.history("a"))
os.write(1, b"ready\\n")
while True:
    number += 1
    store.save("a", Case(patient=Patient(reference=str(number))))
    os.write(1, b"%d\\n" % number)
"""


def test_a_kill_at_any_instant_loses_no_acknowledged_save(tmp_path):
    path, rng = tmp_path / "cases.db", random.Random(11)
    kills = 0
    for _ in range(25):
        writer = subprocess.Popen([sys.executable, "-c", WRITER, str(path)], stdout=subprocess.PIPE, cwd=ROOT)
        assert writer.stdout.readline() == b"ready\n"
        time.sleep(rng.uniform(0.0, 0.05))
        writer.send_signal(signal.SIGKILL)
        acknowledged = [int(line) for line in writer.stdout.read().split()]
        writer.wait()
        kills += 1
        with CaseStore(path) as store:
            versions = [one.version for one in store.history("a")]
            last = max(acknowledged, default=0)
            assert versions == list(range(len(versions), 0, -1))
            assert not acknowledged or len(versions) in (last, last + 1)
            for version in versions[:3]:
                assert store.load("a", version).patient.reference == str(version)
    assert kills == 25


def test_many_kills_within_one_process_tree_lose_nothing(tmp_path):
    """175 more kills, of forks that share the imports and so cost little."""
    path, rng = tmp_path / "cases.db", random.Random(12)
    CaseStore(path).close()
    for _ in range(175):
        read, write = os.pipe()
        child = os.fork()
        if child == 0:
            try:
                store = CaseStore(path)
                number = len(store.history("a"))
                while True:
                    number += 1
                    store.save("a", Case(patient=Patient(reference=str(number))))
                    os.write(write, b"%d\n" % number)
            finally:
                os._exit(1)
        os.close(write)
        time.sleep(rng.uniform(0.001, 0.02))
        os.kill(child, signal.SIGKILL)
        os.waitpid(child, 0)
        with os.fdopen(read, "rb") as acknowledged:
            told = [int(line) for line in acknowledged.read().split()]
        with CaseStore(path) as store:
            count = len(store.history("a"))
            assert not told or count in (max(told), max(told) + 1)
            if count:
                assert store.load("a").patient.reference == str(count)


def in_a_child(work):
    """Run work() in a fork; its return value is the exit status."""
    child = os.fork()
    if child == 0:
        status = 99
        try:
            status = work()
        finally:
            os._exit(status)
    return os.waitstatus_to_exitcode(os.waitpid(child, 0)[1])


def test_a_full_disk_is_said_and_leaves_what_was_there(tmp_path):
    import resource

    path = tmp_path / "cases.db"

    def work():
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        store = CaseStore(path)
        store.save("a", Case(patient=Patient(reference="old")))
        resource.setrlimit(resource.RLIMIT_FSIZE, (150_000, 150_000))
        try:
            for number in range(400):
                store.save(f"b{number}", Case(patient=Patient(reference="new", name="x" * 100)))
        except StoreError as error:
            return 0 if "Not saved" in str(error) and store.load("a").patient.reference == "old" else 2
        return 1

    assert in_a_child(work) == 0
    with CaseStore(path) as store:
        assert store.load("a").patient.reference == "old"
        for entry in store.entries():
            assert store.load(entry.case_id).patient.reference in ("old", "new")
        assert store.save("c", Case(patient=Patient(reference="after"))) == 1


@pytest.mark.parametrize("seed", range(5))
def test_damaged_bytes_give_an_error_or_true_data_and_never_wrong_data(tmp_path, seed):
    whole = tmp_path / "whole.db"
    with CaseStore(whole) as store:
        truth = {f"k{number}": f"{number:04d}" for number in range(40)}
        for case_id, reference in truth.items():
            store.save(case_id, Case(patient=Patient(reference=reference, name="n" * (number_of(case_id) % 100))))
    original, rng = whole.read_bytes(), random.Random(seed)
    wrong = 0
    for trial in range(100):
        raw = bytearray(original)
        for _ in range(rng.randint(1, 6)):
            at = rng.randrange(len(raw))
            junk = rng.randbytes(rng.randint(1, 16))
            raw[at : at + len(junk)] = junk
        if rng.random() < 0.25:
            del raw[int(len(raw) * rng.random()) :]
        path = tmp_path / f"damaged{trial}.db"
        path.write_bytes(bytes(raw))
        try:
            with CaseStore(path) as store:
                for entry in store.entries():
                    try:
                        reference = store.load(entry.case_id).patient.reference
                    except StoreError:
                        continue
                    wrong += reference != truth.get(entry.case_id)
        except StoreError:
            pass
        path.unlink()
    assert wrong == 0


def number_of(case_id):
    return int(case_id.removeprefix("k"))


def test_nothing_is_sent_anywhere(tmp_path):
    """A save, a plan and the papers with every socket refused."""
    code = (
        "import socket, sys\n"
        "def refuse(*_, **__): raise AssertionError('a socket was opened')\n"
        "socket.socket.connect = refuse; socket.create_connection = refuse; socket.getaddrinfo = refuse\n"
        "from pathlib import Path\n"
        "from planner.__main__ import main\n"
        "from planner.records.store import CaseStore\n"
        "from planner.records.reading import read_case\n"
        "assert main(['demo', '--out', sys.argv[1]]) == 0\n"
        "with CaseStore(Path(sys.argv[1]) / 'cases.db') as store:\n"
        "    store.save('a', read_case((Path(sys.argv[1]) / 'case.json').read_bytes()))\n"
        "print('done')\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(tmp_path)], cwd=ROOT, capture_output=True, text=True, timeout=120
    )
    assert done.stdout.strip().endswith("done"), done.stderr
