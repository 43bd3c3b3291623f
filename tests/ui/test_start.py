"""Starting the app: what it says when it cannot, and what it must not do."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]


def run(*arguments, **environment):
    kept = {
        name: value for name, value in os.environ.items() if not name.startswith(("KIVY", "SDL", "DISPLAY", "WAYLAND"))
    }
    return subprocess.run(
        [sys.executable, *arguments], cwd=ROOT, env=kept | environment, capture_output=True, text=True, timeout=120
    )


def test_without_a_display_it_says_so_and_ends_with_3(tmp_path):
    ended = run("-m", "ui", "--data", str(tmp_path))
    assert ended.returncode == 3
    assert "there is no display" in ended.stderr
    assert list(tmp_path.iterdir()) == []


def test_a_case_file_that_is_not_there_ends_with_2(tmp_path):
    ended = run("-m", "ui", str(tmp_path / "none.json"), DISPLAY=":1")
    assert ended.returncode == 2
    assert "is not a file" in ended.stderr


def test_a_data_folder_that_cannot_be_made_ends_with_2(tmp_path):
    (tmp_path / "file").write_text("")
    ended = run("-m", "ui", "--data", str(tmp_path / "file" / "in it"), DISPLAY=":1")
    assert ended.returncode == 2
    assert "cannot be made" in ended.stderr


@pytest.mark.parametrize("module", ["numpy", "pydantic", "reportlab", "planner.case"])
def test_the_first_frame_waits_for_no_heavy_import(module):
    code = f"import ui.app, sys; print({module!r} in sys.modules)"
    environment = {"KIVY_NO_ARGS": "1", "KIVY_NO_CONFIG": "1", "KIVY_NO_FILELOG": "1", "SDL_VIDEODRIVER": "offscreen"}
    assert run("-c", code, **environment).stdout.strip() == "False"


def test_the_core_never_imports_the_screens_library():
    assert (
        run("-c", "import planner.case, planner.trip.itinerary, sys; print('kivy' in sys.modules)").stdout.strip()
        == "False"
    )
