"""The command line: what it writes, what it says, and its exit status."""

import json
import subprocess
import sys
from pathlib import Path

import pytest

from planner.__main__ import main
from planner.catalogue import profile_text

ROOT = Path(__file__).parents[1]
PAPERS = {"record.pdf", "carrier.pdf", "supplier.pdf", "traveller.pdf"}


def run(*arguments):
    return subprocess.run(
        [sys.executable, "-m", "planner", *map(str, arguments)], cwd=ROOT, capture_output=True, text=True, timeout=120
    )


def test_the_demo_writes_plan_and_papers_and_says_where(tmp_path):
    done = run("demo", "--out", tmp_path / "out")
    assert done.returncode == 0
    assert {path.name for path in (tmp_path / "out").iterdir()} == PAPERS | {"case.json", "plan.json"}
    assert "Estimate only. Confirm with prescriber." in done.stdout
    assert "record.pdf" in done.stdout


def test_a_case_file_is_planned_to_the_same_plan_as_the_demo_it_is(tmp_path):
    case = tmp_path / "case.json"
    case.write_text(profile_text("demo/fibrosis_mountain_hotel.json"), encoding="utf-8")
    assert main(["plan", str(case), "--out", str(tmp_path / "a")]) == 0
    assert main(["demo", "--case", "fibrosis_mountain_hotel", "--out", str(tmp_path / "b")]) == 0
    for name in PAPERS | {"plan.json"}:
        assert (tmp_path / "a" / name).read_bytes() == (tmp_path / "b" / name).read_bytes()


def test_a_faulty_case_gives_one_sentence_a_fault_and_status_2(tmp_path, capsys):
    table = json.loads(profile_text("demo/copd_layover.json"))
    table["patient"]["age_years"] = 300
    table["trip"]["parts"][0]["kind"] = "teleport"
    case = tmp_path / "case.json"
    case.write_text(json.dumps(table), encoding="utf-8")
    assert main(["plan", str(case), "--out", str(tmp_path / "out")]) == 2
    said = capsys.readouterr().err
    assert "patient.age_years" in said
    assert "300" in said
    assert "trip.parts.1" in said
    assert not (tmp_path / "out").exists()


def test_a_batch_can_be_asked_for_the_forecast_alone(tmp_path):
    cases = tmp_path / "cases.jsonl"
    cases.write_text(json.dumps(json.loads(profile_text("demo/copd_layover.json"))), encoding="utf-8")
    assert main(["batch", str(cases), "--out", str(tmp_path / "out"), "--forecast-only"]) == 0
    (plan,) = (tmp_path / "out").glob("cases/*/plan.json")
    assert json.loads(plan.read_text(encoding="utf-8"))["through"] == "forecast"


def test_a_missing_case_file_is_named(tmp_path, capsys):
    assert main(["plan", str(tmp_path / "nowhere.json"), "--out", str(tmp_path)]) == 2
    assert "nowhere.json" in capsys.readouterr().err


def test_an_output_folder_that_is_a_file_is_refused_and_the_file_stays(tmp_path, capsys):
    target = tmp_path / "out"
    target.write_text("mine", encoding="utf-8")
    assert main(["demo", "--out", str(target)]) == 2
    assert target.read_text(encoding="utf-8") == "mine"
    assert "out" in capsys.readouterr().err


def test_profiles_are_listed_and_all_packaged_ones_are_sound(capsys):
    assert main(["profiles"]) == 0
    listed = capsys.readouterr().out.splitlines()
    assert "regressions.toml: ok" in listed
    assert "pathways/bts_2022_adult.toml: ok" in listed
    assert all(line.endswith(": ok") for line in listed)


def test_a_faulty_profile_of_the_service_is_named_and_gives_status_2(tmp_path, monkeypatch, capsys):
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))
    (tmp_path / "pathways").mkdir()
    (tmp_path / "pathways" / "ours.toml").write_text('format = "guideline-pathway"\nversion = 1\n', encoding="utf-8")
    assert main(["profiles"]) == 2
    assert "ours.toml, id" in capsys.readouterr().out


def test_the_core_never_imports_the_screen():
    code = (
        "import sys, planner, planner.planning, planner.papers, planner.records.store, planner.batch.runner; "
        "print([name for name in sys.modules if name.split('.')[0] in ('kivy', 'ui')])"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, timeout=60)
    assert done.stdout.strip() == "[]"


@pytest.mark.parametrize("arguments", [[], ["fly"], ["plan"], ["demo"]])
def test_a_wrong_command_gives_status_2(arguments):
    with pytest.raises(SystemExit) as stop:
        main(arguments)
    assert stop.value.code == 2
