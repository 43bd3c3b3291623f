"""The two commands of the README: what they do where something is missing; doing them again changes nothing."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
STEPS = {"cases", "patient", "trip", "forecast", "oxygen", "kit", "papers"}

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="the scripts are for a POSIX shell")


def sourced(lines, **environment):
    """Run lines of shell after the scripts' shared part, as they do."""
    return subprocess.run(
        ["sh", "-c", f"set -eu; . .ci/environment.sh; {lines}"],
        cwd=ROOT,
        capture_output=True,
        text=True,
        timeout=60,
        env=os.environ | environment,
    )


def test_a_missing_library_that_may_not_be_installed_stops_with_the_exact_line():
    done = sourced("may_install() { return 1; }; has_library() { return 1; }; make_graphics_ready; echo went on")
    assert done.returncode == 1
    assert "sudo apt-get install --no-install-recommends libegl1 libgl1" in done.stderr
    assert "went on" not in done.stdout


def test_a_present_library_asks_for_nothing():
    done = sourced("has_library() { return 0; }; as_admin() { echo asked; }; make_graphics_ready; echo ready")
    assert done.stdout.strip() == "ready"


def test_an_installation_that_fails_is_said():
    done = sourced("may_install() { return 0; }; as_admin() { return 1; }; install_system 'the test' no-such-package")
    assert done.returncode == 1
    assert "the system did not install no-such-package" in done.stderr


def test_without_a_fitting_python_it_says_which_are_needed(tmp_path):
    done = sourced("cd /; find_python() { return 1; }; cd $HERE; make_environment ''", HERE=str(tmp_path))
    assert done.returncode == 1
    assert "Python 3.11, 3.12 or 3.13 is needed" in done.stderr


def test_a_python_of_another_version_is_not_taken(tmp_path):
    old = tmp_path / "python3"
    old.write_text("#!/bin/sh\nexit 1\n", encoding="utf-8")
    old.chmod(0o755)
    done = sourced("find_python", PLANNER_PYTHON=str(old), PATH=f"{tmp_path}:/usr/bin:/bin")
    assert str(old) not in done.stdout


def test_without_a_display_the_demo_runs_without_a_window_into_the_named_folder(tmp_path):
    environment = {key: value for key, value in os.environ.items() if key not in ("DISPLAY", "WAYLAND_DISPLAY")}
    done = subprocess.run(
        ["sh", "ui/start.sh"],
        cwd=ROOT,
        capture_output=True,
        text=True,
        timeout=500,
        env=environment | {"PLANNER_DEMO_DIR": str(tmp_path / "demo"), "PLANNER_DATA_DIR": str(tmp_path / "data")},
    )
    assert done.returncode == 0, done.stderr
    assert "there is no display here" in done.stdout
    assert str(tmp_path / "demo") in done.stdout
    names = {path.name for path in (tmp_path / "demo").iterdir()}
    assert {"plan.json", "record.pdf", "carrier.pdf", "supplier.pdf", "traveller.pdf"} <= names
    pictures = {path.stem for path in (tmp_path / "demo" / "screens").glob("*.png")}
    assert pictures >= STEPS


def test_the_second_run_installs_nothing_again():
    marks = [ROOT / ".venv" / "installed", ROOT / ".venv" / "installedtest"]
    before = {path: path.stat().st_mtime_ns for path in marks if path.exists()}
    assert before
    extras = "[test]" if marks[1].exists() else ""
    done = sourced(f"make_environment '{extras}'")
    assert done.returncode == 0
    assert "installing" not in done.stdout
    assert {path: path.stat().st_mtime_ns for path in before} == before
