"""Many cases at once: nothing lost by a kill, one bad case beside good ones, the same bytes in any engine."""

import csv
import json
import multiprocessing
import os
import pickle
import signal
import subprocess
import sys
import time
from functools import partial
from pathlib import Path

import pytest

from planner.batch.lines import fingerprint, read_lines
from planner.batch.runner import run_batch
from planner.batch.worker import work_on
from planner.catalogue import profile_text
from planner.errors import InputError, StoreError

ROOT = Path(__file__).parents[2]
WHOLE = json.loads(profile_text("demo/copd_layover.json"))
FLIGHT = next(part for part in WHOLE["trip"]["parts"] if part["kind"] == "flight")
DEMO = WHOLE | {
    "trip": WHOLE["trip"] | {"parts": [FLIGHT]},
    "decisions": [one for one in WHOLE["decisions"] if one["part_id"] == FLIGHT["part_id"]],
}


class Told:
    """Keeps what the batch says."""

    def __init__(self, on_progress=None):
        self.sentences = []
        self.states = []
        self._on_progress = on_progress

    def progress(self, progress):
        self.states.append(progress)
        if self._on_progress is not None:
            self._on_progress(progress)

    def sentence(self, text):
        self.sentences.append(text)


def case_text(reference):
    return json.dumps(DEMO | {"patient": DEMO["patient"] | {"reference": reference}})


def write_cases(path, references):
    path.write_text("\n".join(case_text(reference) for reference in references) + "\n", encoding="utf-8")
    return path


def results(folder):
    """Every file of every finished case by its path, and the table."""
    found = {path.relative_to(folder).as_posix(): path.read_bytes() for path in folder.rglob("*") if path.is_file()}
    assert not any(".part" in name for name in found)
    return found


def whole_cases(folder):
    """Names of the cases that are there whole, while a batch may still run."""
    return {path.parent.name for path in folder.glob("cases/*/row.json") if not path.parent.name.endswith(".part")}


def table(folder):
    with (folder / "summary.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


@pytest.fixture(scope="module")
def finished(tmp_path_factory):
    """Three cases planned in one process: file, folder, what was said, status."""
    folder = tmp_path_factory.mktemp("finished")
    cases = write_cases(folder / "cases.jsonl", ["a1", "a2", "a3"])
    told = Told()
    status = run_batch(cases, folder / "out", progress=told)
    return cases, folder / "out", told, status


def test_each_case_gets_its_plan_and_its_row(finished):
    _, out, told, status = finished
    assert status == 0
    rows = table(out)
    assert [(row["line"], row["status"], row["reference"]) for row in rows] == [
        ("1", "planned", "a1"),
        ("2", "planned", "a2"),
        ("3", "planned", "a3"),
    ]
    plans = sorted(out.glob("cases/*/plan.json"))
    assert len(plans) == 3
    assert json.loads(plans[0].read_text(encoding="utf-8"))["caution"] == "Estimate only. Confirm with prescriber."
    assert float(rows[0]["highest_altitude_m"]) > 1500
    assert 40 < float(rows[0]["rest_spo2_median_percent"]) < 100
    assert told.states[-1].finished == told.states[-1].total == 3


def test_with_papers_each_case_gets_its_pages_and_a_run_without_them_does_not_count(tmp_path):
    cases = write_cases(tmp_path / "cases.jsonl", ["a1"])
    out = tmp_path / "out"
    assert run_batch(cases, out, progress=Told()) == 0
    told = Told()
    assert run_batch(cases, out, papers=True, progress=told) == 0
    assert told.states[0].kept == 0
    pages = {path.name: path.read_bytes()[:5] for path in out.glob("cases/*/*.pdf")}
    assert pages == dict.fromkeys(("record.pdf", "carrier.pdf", "supplier.pdf", "traveller.pdf"), b"%PDF-")


FORECAST_COLUMNS = {
    "highest_altitude_m", "lowest_inspired_po2_mmhg", "worst_part", "rest_pao2_median_mmhg", "rest_pao2_low_mmhg",
    "rest_pao2_high_mmhg", "rest_spo2_median_percent", "rest_spo2_low_percent", "rest_spo2_high_percent",
    "predictors_agree", "test_advised", "carbon_dioxide_risk", "stop_findings", "pathway_advice",
}  # fmt: skip


def test_the_forecast_alone_is_the_whole_plans_and_what_comes_after_it_is_empty(finished, tmp_path):
    cases, out, _, _ = finished
    assert run_batch(cases, tmp_path / "out", forecast_only=True, progress=Told()) == 0
    whole, alone = table(out), table(tmp_path / "out")
    assert [{key: row[key] for key in FORECAST_COLUMNS} for row in alone] == [
        {key: row[key] for key in FORECAST_COLUMNS} for row in whole
    ]
    assert all(float(row["rest_pao2_median_mmhg"]) > 25 for row in alone)
    later = set(whole[0]) - FORECAST_COLUMNS - {"line", "status", "reference", "message"}
    assert {row[key] for row in alone for key in later} == {""}
    plans = [json.loads(path.read_text(encoding="utf-8")) for path in tmp_path.glob("out/cases/*/plan.json")]
    assert [(one["through"], one["kit"]) for one in plans] == [("forecast", None)] * 3


def test_the_forecast_alone_does_not_count_as_the_plan(finished, tmp_path):
    cases, _, _, _ = finished
    assert run_batch(cases, tmp_path / "out", forecast_only=True, progress=Told()) == 0
    told = Told()
    assert run_batch(cases, tmp_path / "out", progress=told) == 0
    assert told.states[0].kept == 0
    assert [(row["state"], row["decisions"]) for row in table(tmp_path / "out")] == [
        ("Draft", str(len(DEMO["decisions"])))
    ] * 3


def test_papers_of_the_forecast_alone_are_refused(tmp_path):
    cases = write_cases(tmp_path / "cases.jsonl", ["a"])
    with pytest.raises(InputError, match="need the whole plan"):
        run_batch(cases, tmp_path / "out", papers=True, forecast_only=True, progress=Told())


def test_the_work_on_a_line_is_pure_and_can_be_sent_to_another_process():
    work = partial(work_on, 1, "000001-a", case_text("a").encode(), papers=False)
    first = work()
    assert first.failure is None
    assert pickle.loads(pickle.dumps(work))() == first
    assert pickle.loads(pickle.dumps(first)) == first


def test_a_second_run_keeps_what_is_done(finished):
    cases, out, _, _ = finished
    before = {path: path.stat().st_mtime_ns for path in out.glob("cases/*/*")}
    told = Told()
    assert run_batch(cases, out, progress=told) == 0
    assert {path: path.stat().st_mtime_ns for path in out.glob("cases/*/*")} == before
    assert told.states[-1].kept == 3
    assert told.states[-1].planned == 0


def test_two_processes_give_the_same_bytes_as_one(finished, tmp_path):
    cases, out, _, _ = finished
    assert run_batch(cases, tmp_path / "out", workers=2, progress=Told()) == 0
    assert results(tmp_path / "out") == results(out)


def test_a_cluster_gives_the_same_bytes_as_one_process(finished, tmp_path):
    from distributed import Client, LocalCluster

    cases, out, _, _ = finished
    with (
        LocalCluster(n_workers=2, threads_per_worker=1, dashboard_address=None) as cluster,
        Client(cluster) as client,
    ):
        executor = client.get_executor(pure=False)
        assert run_batch(cases, tmp_path / "out", workers=2, executor=executor, progress=Told()) == 0
    assert results(tmp_path / "out") == results(out)


def test_after_a_kill_only_whole_cases_count_and_the_rest_is_done(finished, tmp_path):
    cases, out, _, _ = finished
    call = f"run_batch(Path({str(cases)!r}), Path({str(tmp_path / 'out')!r}))"
    code = f"from pathlib import Path; from planner.batch.runner import run_batch; {call}"
    with subprocess.Popen([sys.executable, "-c", code], cwd=ROOT, stderr=subprocess.DEVNULL) as process:
        deadline = time.monotonic() + 30.0
        while not whole_cases(tmp_path / "out") and time.monotonic() < deadline:
            time.sleep(0.005)
        os.kill(process.pid, signal.SIGKILL)
    done = whole_cases(tmp_path / "out")
    assert 1 <= len(done) < 3
    half = tmp_path / "out" / "cases" / "000003-0123456789abcdef.part"
    half.mkdir()  # half-written when the power went
    (half / "plan.json").write_text("{")
    told = Told()
    assert run_batch(cases, tmp_path / "out", progress=told) == 0
    assert told.states[0].kept == len(done)
    assert results(tmp_path / "out") == results(out)


def test_a_killed_worker_loses_nothing(finished, tmp_path):
    cases, out, _, _ = finished
    killed = []

    def kill_one(progress):
        if progress.planned == 1 and not killed:
            child = multiprocessing.active_children()[0]
            killed.append(child.pid)
            os.kill(child.pid, signal.SIGKILL)

    told = Told(kill_one)
    assert run_batch(cases, tmp_path / "out", workers=2, progress=told) == 0
    assert killed
    assert told.sentences == ["A worker process ended unexpectedly; the cases it had are planned again."]
    assert results(tmp_path / "out") == results(out)


def test_a_bad_case_is_reported_with_its_line_and_the_rest_is_done(tmp_path):
    cases = tmp_path / "cases.jsonl"
    newer, older = (json.dumps(DEMO | {"version": version}) for version in (99, 0))
    lines = [case_text("good"), "{not json", newer, case_text("also good"), older]
    cases.write_text("\n".join(lines), encoding="utf-8")
    told = Told()
    assert run_batch(cases, tmp_path / "out", progress=told) == 1
    assert told.sentences[0].startswith("Line 2: ")
    assert told.sentences[1].startswith("Line 3: ")
    assert "version 99" in told.sentences[1]
    assert not any("The planner failed" in text for text in told.sentences)
    assert "version 0" in told.sentences[2]
    assert told.sentences[3].startswith("3 of 5 cases failed")
    rows = table(tmp_path / "out")
    assert [row["status"] for row in rows] == ["planned", "failed", "failed", "planned", "failed"]
    assert rows[1]["message"] in told.sentences[0]


def test_a_mended_line_is_planned_and_its_failure_forgotten(tmp_path):
    cases = tmp_path / "cases.jsonl"
    cases.write_text("{}\n", encoding="utf-8")
    assert run_batch(cases, tmp_path / "out", progress=Told()) == 1
    write_cases(cases, ["mended"])
    assert run_batch(cases, tmp_path / "out", progress=Told()) == 0
    assert [row["status"] for row in table(tmp_path / "out")] == ["planned"]


def test_a_line_that_failed_before_and_is_planned_now_counts_as_planned(tmp_path):
    cases = write_cases(tmp_path / "cases.jsonl", ["killed last time"])
    (line,) = read_lines(cases)
    (tmp_path / "out" / "cases").mkdir(parents=True)
    (tmp_path / "out" / "cases" / f"{line.name(fingerprint(papers=False))}.failed").write_text("The process ended.")
    assert run_batch(cases, tmp_path / "out", progress=Told()) == 0
    (row,) = table(tmp_path / "out")
    assert (row["status"], row["message"]) == ("planned", "")
    assert not list(tmp_path.rglob("*.failed"))


def test_a_reference_that_stands_twice_is_said_and_both_are_planned(tmp_path):
    cases = write_cases(tmp_path / "cases.jsonl", ["same", "same"])
    told = Told()
    assert run_batch(cases, tmp_path / "out", progress=told) == 0
    assert told.sentences == ["Line 2, reference 'same': The reference also stands in line 1; both are kept."]
    assert table(tmp_path / "out")[1]["message"].startswith("The reference also stands in line 1")


def test_a_reference_that_a_spreadsheet_would_run_is_written_as_text(tmp_path):
    cases = write_cases(tmp_path / "cases.jsonl", ["=1+1"])
    assert run_batch(cases, tmp_path / "out", progress=Told()) == 0
    assert table(tmp_path / "out")[0]["reference"] == "'=1+1"


PEAK = """
import sys, tracemalloc
from pathlib import Path
from planner.batch.runner import run_batch

class Forgets:
    progress = sentence = staticmethod(lambda _: None)

for count in (100, 1000):
    cases = Path(sys.argv[1]) / f"{count}.jsonl"
    cases.write_text("{}\\n" * count, encoding="utf-8")
    run_batch(cases, cases.with_suffix(".warm"), progress=Forgets())
    tracemalloc.start()
    assert run_batch(cases, cases.with_suffix(".out"), progress=Forgets()) == 1
    print(tracemalloc.get_traced_memory()[1])
    tracemalloc.stop()
"""


def test_memory_stays_the_same_for_ten_times_as_many_lines(tmp_path):
    done = subprocess.run(
        [sys.executable, "-c", PEAK, tmp_path], cwd=ROOT, stdout=subprocess.PIPE, text=True, check=True
    )
    few, many = map(int, done.stdout.split())
    assert many < few + 100_000  # 900 lines kept would be more


def test_an_empty_file_is_refused(tmp_path):
    empty = tmp_path / "empty.jsonl"
    empty.write_text("\n\n")
    with pytest.raises(InputError, match="has no cases"):
        run_batch(empty, tmp_path / "out", progress=Told())


def test_a_folder_that_cannot_be_written_is_refused_before_any_work(tmp_path):
    cases = write_cases(tmp_path / "cases.jsonl", ["a"])
    (tmp_path / "taken").write_text("a file")
    with pytest.raises(StoreError, match="taken cannot be written"):
        run_batch(cases, tmp_path / "taken", progress=Told())


def test_a_number_of_workers_out_of_range_is_refused(tmp_path):
    with pytest.raises(InputError, match="1 to 64 are allowed"):
        run_batch(tmp_path / "cases.jsonl", tmp_path / "out", workers=0, progress=Told())
