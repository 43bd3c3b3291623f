"""The app in a real window: mouse, wheel and keys come from the X server, pictures are of what it shows."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import numpy as np
from PIL import Image

ROOT = Path(__file__).parents[2]
WHEEL_PX = 20  # one notch scrolls so far in Kivy
EDGE_PX = 40
BAR = ("Patient", "Trip", "Forecast", "Oxygen", "Kit", "Papers")  # always in view
PICTURES = "REVIEW_PICTURES"  # a folder in which the pictures of a walk are kept


def without_settings(display: str) -> dict[str, str]:
    """The environment of a person's desktop: no setting of Kivy, this display."""
    kept = {name: value for name, value in os.environ.items() if not name.startswith(("KIVY", "WAYLAND"))}
    return kept | {"DISPLAY": display, "SDL_VIDEODRIVER": "x11"}


class Window:
    """What a person does with the one window of a display."""

    def __init__(self, display: str, folder: Path) -> None:
        self.display, self.folder = display, folder

    def do(self, *arguments: Any) -> None:
        environment = os.environ | {"DISPLAY": self.display}
        subprocess.run(["xdotool", *map(str, arguments)], env=environment, check=True, capture_output=True)

    def click(self, x: float, y: float) -> None:
        self.do("mousemove", round(x), round(y), "mousedown", 1)
        time.sleep(0.06)
        self.do("mouseup", 1)
        time.sleep(0.1)

    def save(self, path: Path) -> None:
        subprocess.run(["import", "-display", self.display, "-window", "root", path], check=True)

    def picture(self) -> Any:
        path = self.folder / "window.png"
        self.save(path)
        return np.asarray(Image.open(path).convert("RGB")).astype(int)

    def until(self, true: Any, patience_s: float = 20.0) -> Any:
        begun = time.monotonic()
        while True:
            picture = self.picture()
            if true(picture):
                return picture
            assert time.monotonic() - begun < patience_s, "the window does not show it"
            time.sleep(0.1)


class Walk(Window):
    """The app, started; it is asked where things are and touched there. `close` it."""

    def __init__(self, display: str, folder: Path, *arguments: Any, name: str) -> None:
        super().__init__(display, folder)
        self.kept, self.name, self.pictures = folder / "kept", name, 0
        self.documents = folder / "documents"
        home = folder / "home"
        (home / ".config").mkdir(parents=True)
        (home / ".config" / "user-dirs.dirs").write_text(f'XDG_DOCUMENTS_DIR="{self.documents}"\n')
        environment = without_settings(display) | {"HOME": str(home), "XDG_CONFIG_HOME": str(home / ".config")}
        environment["XDG_DOCUMENTS_DIR"] = str(self.documents)
        with open(folder / "said", "w") as said:
            self.app = subprocess.Popen(
            [sys.executable, Path(__file__).with_name("pointed.py"), "--data", self.kept, *arguments],
            cwd=ROOT, env=environment, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=said, text=True,
        )  # fmt: skip

    def ask(self, about: str, **question: Any) -> Any:
        assert self.app.stdin is not None
        assert self.app.stdout is not None
        self.app.stdin.write(json.dumps({"ask": about, **question}) + "\n")
        self.app.stdin.flush()
        return json.loads(self.app.stdout.readline())

    def wait(self, about: str, wanted: Any = True, patience_s: float = 60.0, **question: Any) -> None:
        begun = time.monotonic()
        while self.ask(about, **question) != wanted:
            assert time.monotonic() - begun < patience_s, f"{about} {question} is not {wanted!r}"
            time.sleep(0.05)

    def find(self, text: str, **which: Any) -> Any:
        """Where it stands, once it stands still in view; the wheel is turned until it does."""
        begun, before = time.monotonic(), None
        while True:
            place = self.ask("where", text=text, **which)
            if place is not None and place == before:
                over, under = place["top"] + EDGE_PX - place["y"], place["y"] - place["bottom"] + EDGE_PX
                if text in BAR or (over <= 0 and under <= 0):
                    return place
                notches = max(1, min(25, round(max(over, under) / WHEEL_PX + 2)))
                self.do("mousemove", 195, 600, "click", "--repeat", notches, "--delay", 4, 4 if over > 0 else 5)
            before = place
            assert time.monotonic() - begun < 30, f"{text!r} is not to be seen"
            time.sleep(0.05)

    def touch(self, text: str, **which: Any) -> None:
        """Click on what says this."""
        place = self.find(text, **which)
        self.click(place["x"], place["y"])
        if text in BAR:
            self.wait("step", text.lower())

    def write(self, label: str, text: str) -> None:
        """Click into a field and type."""
        self.touch(label)
        self.do("type", "--delay", 25, text)

    def key(self, *names: str) -> None:
        for name in names:
            self.do("key", name)
            time.sleep(0.05)

    def tab_to(self, text: str, most: int = 80) -> None:
        """Press Tab until this has the focus."""
        for _ in range(most):
            self.key("Tab")
            if self.ask("focused") == text:
                return
        raise AssertionError(f"{text!r} is not reached by Tab")

    def keep(self, what: str) -> None:
        """Keep a picture for whoever reviews the screens."""
        self.pictures += 1
        folder = Path(os.environ[PICTURES]) if os.environ.get(PICTURES) else self.folder
        folder.mkdir(parents=True, exist_ok=True)
        time.sleep(0.35)  # drawn by then
        self.save(folder / f"{self.name} {self.pictures:02d} {what}.png")

    def close(self) -> str:
        """End the app as by closing its window; what it said on stderr."""
        if self.app.poll() is None:
            self.app.terminate()
        self.app.wait(20)
        return (self.folder / "said").read_text()
