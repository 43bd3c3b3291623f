"""UI tests run without a display: SDL's offscreen driver, no user configuration, a fixed density."""

import os
import subprocess
import tempfile

os.environ["KIVY_NO_ARGS"] = "1"
os.environ["KIVY_NO_CONSOLELOG"] = "1"
os.environ["KIVY_NO_FILELOG"] = "1"
os.environ["KIVY_NO_CONFIG"] = "1"
os.environ["KIVY_METRICS_DENSITY"] = "1"
os.environ["KIVY_METRICS_FONTSCALE"] = "1"
os.environ["KIVY_HOME"] = tempfile.mkdtemp(prefix="kivy-")
os.environ["SDL_VIDEODRIVER"] = "offscreen"
for provider in ("CLIPBOARD", "IMAGE", "TEXT", "WINDOW"):
    os.environ.setdefault(f"KIVY_{provider}", "sdl2")

from kivy.config import Config  # noqa: E402

Config.set("graphics", "multisamples", "0")  # as the app sets it
# Made once, larger than every size a test asks for: SDL's offscreen surface cannot grow later.
Config.set("graphics", "width", "1280")
Config.set("graphics", "height", "1280")
Config.set("graphics", "maxfps", "0")  # no sleeping between frames

import pytest  # noqa: E402


@pytest.fixture
def opened(tmp_path):
    """Opens the app: opened(size, font_scale, planner=...) gives its driver; closed afterwards."""
    from tests.ui.driver import Driver
    from ui.app import PlannerApp

    drivers = []

    def open_app(size=(390, 844), font_scale=1.0, **keywords):
        planner = keywords.pop("planner", None)
        keywords["load_planner"] = None if planner is None else lambda: (planner, None)
        driver = Driver(PlannerApp(data_folder=tmp_path / "data", **keywords), size, font_scale)
        drivers.append(driver)
        return driver

    yield open_app
    for driver in drivers:
        driver.close()


@pytest.fixture
def demo(opened):
    """The demo case open on its first step."""
    driver = opened()
    driver.app.cases.open_demo()
    driver.frames(6)
    return driver


@pytest.fixture
def new_case(opened):
    """An empty case open on its first step."""
    driver = opened()
    driver.tap("New case")
    return driver


@pytest.fixture
def bench():
    """Shows one widget alone: bench(widget) gives a driver."""
    from kivy.app import App
    from kivy.uix.boxlayout import BoxLayout

    from tests.ui.driver import Driver
    from ui.theme import theme
    from ui.widgets.notices import paint_ground

    drivers = []

    def show(widget, size=(390, 844), font_scale=1.0):
        class Bench(App):
            def build(self):
                root = BoxLayout(orientation="vertical", padding=20)
                paint_ground(root, theme.ground)
                root.add_widget(widget)
                return root

        drivers.append(Driver(Bench(), size, font_scale))
        return drivers[-1]

    yield show
    for driver in drivers:
        driver.close()


@pytest.fixture
def display():
    """A display of its own for one real window, as large as a phone's."""
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
