"""Through the real window system: X server, mouse, key codes, and the file that is left behind."""

import subprocess
import sys
import time

import numpy as np

from planner.records.store import CaseStore
from tests.ui.driver import TAB
from tests.ui.real_window import ROOT, Window, without_settings

DATA_GREEN = (27, 91, 87)


def coloured(picture, rgb, tolerance=12):
    return np.abs(picture - rgb).max(axis=2) <= tolerance


def has_primary_button(picture):
    return (coloured(picture, DATA_GREEN).sum(axis=1) > 250).any()


def middle_of_lowest_button(picture):
    rows = np.flatnonzero(coloured(picture, DATA_GREEN).sum(axis=1) > 250)
    return int(rows.max()) - 20


def tabs_to(driver, text):
    """How many times Tab is pressed until the widget with this text has the focus."""
    for times in range(1, 60):
        driver.key(TAB)
        if getattr(driver.focused(), "text", "") == text:
            return times
    raise AssertionError(f"{text} is not reached")


def test_a_new_case_is_begun_by_mouse_filled_by_keys_and_found_again(display, tmp_path, new_case):
    times = tabs_to(new_case, "COPD")
    environment = without_settings(display)
    folder = tmp_path / "kept"
    command = [sys.executable, "-m", "ui", "--data", str(folder)]
    window = Window(display, tmp_path)
    said = open(tmp_path / "said", "w+")  # noqa: SIM115
    app = subprocess.Popen(command, cwd=ROOT, env=environment, stderr=said)
    try:
        first = window.until(has_primary_button)
        window.click(195, middle_of_lowest_button(first))
        window.until(lambda picture: not has_primary_button(picture))
        for _ in range(times):
            window.do("key", "Tab")
            time.sleep(0.08)
        before = coloured(window.picture(), DATA_GREEN).sum()
        window.do("key", "Return")
        window.until(lambda picture: coloured(picture, DATA_GREEN).sum() > before + 1500)
        time.sleep(1.2)  # saved at most a second behind
    finally:
        app.kill()  # as a battery that runs out
        app.wait(10)
    said.seek(0)
    assert "Traceback" not in said.read()
    said.close()
    with CaseStore(folder / "cases.db") as store:
        (entry,) = store.entries()
        assert entry.diagnosis == "copd"
    assert not list((folder / "kivy").rglob("*.txt")), "logs were written"
    app = subprocess.Popen(command, cwd=ROOT, env=environment, stderr=subprocess.DEVNULL)
    try:
        window.until(lambda picture: has_primary_button(picture) and not np.array_equal(picture, first))
    finally:
        app.terminate()
        app.wait(10)
