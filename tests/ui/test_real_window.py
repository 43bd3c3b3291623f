"""Through the real window system: X server, mouse, key codes, and the file that is left behind."""

import os
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

ROOT = Path(__file__).parents[2]
DATA_GREEN = (27, 91, 87)


@pytest.fixture
def display():
    read, write = os.pipe()
    server = subprocess.Popen(
        ["Xvfb", "-displayfd", str(write), "-screen", "0", "390x844x24", "-nolisten", "tcp", "-noreset"],
        pass_fds=[write],
        stderr=subprocess.DEVNULL,
    )
    os.close(write)
    with os.fdopen(read) as pipe:
        name = ":" + pipe.readline().strip()
    yield name
    server.terminate()
    server.wait(10)


class Window:
    def __init__(self, display, folder):
        self.display, self.folder = display, folder

    def do(self, *arguments):
        environment = os.environ | {"DISPLAY": self.display}
        subprocess.run(["xdotool", *map(str, arguments)], env=environment, check=True, capture_output=True)

    def click(self, x, y):
        self.do("mousemove", x, y, "mousedown", 1)
        time.sleep(0.12)
        self.do("mouseup", 1)
        time.sleep(0.4)

    def picture(self):
        path = self.folder / "window.png"
        subprocess.run(["import", "-display", self.display, "-window", "root", path], check=True)
        return np.asarray(Image.open(path).convert("RGB")).astype(int)

    def until(self, true, patience_s=20.0):
        begun = time.monotonic()
        while True:
            picture = self.picture()
            if true(picture):
                return picture
            assert time.monotonic() - begun < patience_s, "the window does not show it"
            time.sleep(0.1)


def coloured(picture, rgb, tolerance=12):
    return np.abs(picture - rgb).max(axis=2) <= tolerance


def middle_of_lowest_button(picture):
    rows = np.flatnonzero(coloured(picture, DATA_GREEN).sum(axis=1) > 250)
    return int(rows.max()) - 20


def test_a_new_case_is_begun_by_mouse_filled_by_keys_and_found_again(display, tmp_path):
    environment = dict(os.environ)
    for name in [name for name in environment if name.startswith(("KIVY", "WAYLAND"))]:
        del environment[name]
    environment |= {"DISPLAY": display, "SDL_VIDEODRIVER": "x11"}
    command = [sys.executable, "-m", "ui", "--data", str(tmp_path / "data")]
    window = Window(display, tmp_path)
    app = subprocess.Popen(command, cwd=ROOT, env=environment, stderr=subprocess.DEVNULL)
    try:
        first = window.until(lambda picture: (coloured(picture, DATA_GREEN).sum(axis=1) > 250).any())
        window.click(195, middle_of_lowest_button(first))
        # the first chip of the first question: to it by Tab, chosen by Enter
        before = window.until(lambda picture: not (coloured(picture, DATA_GREEN).sum(axis=1) > 250).any())
        for _ in range(4):
            window.do("key", "Tab")
            time.sleep(0.1)
        window.do("key", "Return")
        window.until(lambda picture: coloured(picture, DATA_GREEN).sum() > coloured(before, DATA_GREEN).sum() + 1500)
        time.sleep(1.2)  # saved at most a second behind
    finally:
        app.terminate()
        app.wait(10)
    assert not list((tmp_path / "data" / "kivy").rglob("*.txt")), "Kivy wrote logs"
    app = subprocess.Popen(command, cwd=ROOT, env=environment, stderr=subprocess.DEVNULL)
    try:
        window.until(lambda picture: (coloured(picture, DATA_GREEN).sum(axis=1) > 250).any())
        time.sleep(0.5)
        again = window.picture()
        assert middle_of_lowest_button(again) < middle_of_lowest_button(first) or not np.array_equal(again, first)
    finally:
        app.terminate()
        app.wait(10)
