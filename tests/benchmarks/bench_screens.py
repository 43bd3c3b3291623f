"""Speed of the screens against bare Kivy in the same run: python tests/benchmarks/bench_screens.py

Cold start: process start to the first drawn frame, and to a usable list of cases, as a ratio to a program that shows
one empty Kivy window. Typing: a key to the frame that echoes it, and an entry to the frame that draws its forecast,
which are not the same. Drag: one step along the ribbon, drawn. Software OpenGL, no display.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, print_table

ROOT = Path(__file__).parents[2]
FRAME_MS = 1000 / 60
ENVIRONMENT = {
    "KIVY_NO_ARGS": "1", "KIVY_NO_CONSOLELOG": "1", "KIVY_NO_FILELOG": "1", "KIVY_NO_CONFIG": "1",
    "KIVY_METRICS_DENSITY": "1", "KIVY_METRICS_FONTSCALE": "1", "SDL_VIDEODRIVER": "offscreen",
    "KIVY_CLIPBOARD": "sdl2", "KIVY_IMAGE": "sdl2", "KIVY_TEXT": "sdl2", "KIVY_WINDOW": "sdl2",
}  # fmt: skip
SIZE = "from kivy.config import Config; Config.set('graphics','width','390'); Config.set('graphics','height','844')\n"
END = """
import os, sys
from kivy.core.window import Window
def flip(*_):
    {condition}
    import resource
    sys.stdout.write(str(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)); sys.stdout.flush()
    os._exit(0)
Window.bind(on_flip=flip)
"""
BARE = SIZE + END.format(condition="") + "from kivy.app import App\nfrom kivy.uix.widget import Widget\n"
BARE += "A = type('A', (App,), {'build': lambda self: Widget()}); A().run()\n"
OURS = "from ui.__main__ import configure_window; configure_window()\n"
FIRST = OURS + END.format(condition="") + "import sys, pathlib\nfrom ui.app import PlannerApp\n"
FIRST += "PlannerApp(data_folder=pathlib.Path(sys.argv[1])).run()\n"
USABLE = OURS + END.format(condition="if not getattr(App.get_running_app(), 'cases', None): return").replace(
    "import os, sys", "import os, sys\nfrom kivy.app import App"
)
USABLE += (
    "import sys, pathlib\nfrom ui.app import PlannerApp\nPlannerApp(data_folder=pathlib.Path(sys.argv[1])).run()\n"
)

IDLE_S = 5.0
ENTRIES = 30
IDLE = (
    OURS
    + f"""
import os, sys, time, pathlib
from kivy.clock import Clock
from ui.app import PlannerApp
app = PlannerApp(data_folder=pathlib.Path(sys.argv[1]), demo=True)
begun = []
def look(_dt):
    session = app.session
    if not begun:
        if session is not None and session.shown_plan is not None and not session.working_on:
            app.shell.go("forecast")
            Clock.schedule_once(lambda _dt: begun.append((time.process_time(), time.perf_counter())), 1.0)
            return False
        return True
def end(_dt):
    if begun and time.perf_counter() - begun[0][1] >= {IDLE_S}:
        used, passed = time.process_time() - begun[0][0], time.perf_counter() - begun[0][1]
        print(used, 100 * used / passed, flush=True)
        os._exit(0)
Clock.schedule_interval(look, 0.2)
Clock.schedule_interval(end, 0.5)
app.run()
"""
)


def run(code: str) -> tuple[float, float]:
    """Seconds and MiB of one process until its frame."""
    with tempfile.TemporaryDirectory() as folder:
        program = Path(folder) / "program.py"
        program.write_text(code)
        environment = os.environ | ENVIRONMENT | {"KIVY_HOME": folder, "PYTHONPATH": str(ROOT)}
        begun = time.perf_counter()
        ended = subprocess.run(
            [sys.executable, program, folder],
            cwd=ROOT,
            env=environment,
            stdout=subprocess.PIPE,
            text=True,
            check=True,
        )
        return time.perf_counter() - begun, float(ended.stdout.split()[-1]) / 1024


def cold_start(times: int = 7) -> dict[str, tuple[float, float]]:
    """Median seconds and MiB of each, taken in turn so that the machine's drift hits all alike."""
    measured: dict[str, list[tuple[float, float]]] = {"bare": [], "first frame": [], "usable": []}
    for code in (BARE, FIRST, USABLE):
        run(code)
    for _ in range(times):
        for name, code in (("bare", BARE), ("first frame", FIRST), ("usable", USABLE)):
            measured[name].append(run(code))
    return {
        name: (statistics.median(s for s, _ in runs), statistics.median(m for _, m in runs))
        for name, runs in measured.items()
    }


def on_screen() -> dict[str, tuple[float, float, float]]:
    """Of a typed digit and of a drag step, each to its drawn frame, ms: median, 95th percentile, processor time.

    Processor time is the mean of all threads, those of the plan at work and of software OpenGL with it: it says less of
    what is felt, and more on a machine that others use too.
    """
    os.environ |= ENVIRONMENT | {"KIVY_HOME": tempfile.mkdtemp()}
    sys.path.insert(0, str(ROOT))
    from kivy.config import Config

    from ui.__main__ import configure_window

    configure_window()
    Config.set("graphics", "maxfps", "0")
    from kivy.base import EventLoop
    from kivy.core.window import Window

    from tests.ui.driver import BACKSPACE, Driver, Touch, place
    from ui.app import PlannerApp

    driver = Driver(PlannerApp(data_folder=Path(tempfile.mkdtemp())))
    driver.app.cases.open_demo()
    driver.frames(10)
    driver.tap(driver.app.shell.screen.form._shown[1][0].form._shown[0][0].input)
    typed, worked = [], []
    for number in range(60):
        driver.key(BACKSPACE)
        begun, used = time.perf_counter(), time.process_time()
        Window.dispatch("on_textinput", str(number % 10))
        EventLoop.idle()
        typed.append(time.perf_counter() - begun)
        worked.append(time.process_time() - used)
    answered, answering = _to_forecast(driver, EventLoop)
    driver.app.shell.go("trip")
    driver.frames(10)
    plot = driver.app.shell.screen.ribbon.plot
    x, y = plot.to_window(plot.x, plot.center_y)
    touch = Touch(x + 20, y)
    EventLoop.post_dispatch_input("begin", touch)
    dragged, moved = [], []
    for step in range(120):
        begun, used = time.perf_counter(), time.process_time()
        touch.move(place(x + 20 + step * 2.5, y))
        EventLoop.post_dispatch_input("update", touch)
        EventLoop.idle()
        dragged.append(time.perf_counter() - begun)
        moved.append(time.process_time() - used)
    return {
        name: (
            1000 * statistics.median(times),
            1000 * statistics.quantiles(times, n=20)[-1],
            1000 * statistics.fmean(processor),
        )
        for name, times, processor in (
            ("typed digit, echoed,", typed, worked),
            ("typed entry, its forecast,", answered, answering),
            ("drag step", dragged, moved),
        )
    }


def _to_forecast(driver: Any, loop: Any) -> tuple[list[float], list[float]]:
    """From an entry of another body mass to the frame that draws its quick forecast: wall clock and processor, s."""
    session = driver.app.session
    driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
    driver.app.shell.go("forecast")
    driver.frames(10)
    answered, answering = [], []
    for number in range(ENTRIES):
        begun, used = time.perf_counter(), time.process_time()
        refused = session.set("patient.mass_kg", 60.0 + 0.1 * number)
        assert not refused, refused
        while session.preview is None and session.stale:
            loop.idle()
        loop.idle()
        answered.append(time.perf_counter() - begun)
        answering.append(time.process_time() - used)
        driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
    return answered, answering


def rows() -> Iterator[Row]:
    """Cold start and memory against bare Kivy, then the frames of typing and dragging."""
    starts = cold_start()
    bare_s, bare_mib = starts["bare"]
    for name, goal in (("first frame", 1.35), ("usable", 2.4)):
        seconds = starts[name][0]
        yield Row(
            f"Cold start: {name}", f"{seconds:.2f} s", f"a bare Kivy program, {bare_s:.2f} s",
            f"{seconds / bare_s:.2f} times as long", f"{goal:g}",
        )  # fmt: skip
    mib = starts["usable"][1]
    yield Row(
        "Peak memory", f"{mib:.0f} MiB", f"a bare Kivy program, {bare_mib:.0f} MiB",
        f"{mib / bare_mib:.2f} times as much", "1.35",
    )  # fmt: skip
    _, idle = run(IDLE)
    yield Row("Idle on the forecast, of one processor", f"{1024 * idle:.1f} %", goal="3 %")
    for name, (median, tail, processor) in on_screen().items():
        yield Row(
            f"{name.capitalize()} to the drawn frame",
            f"{median:.1f} ms, 95th percentile {tail:.1f} ms; processor {processor:.1f} ms",
            goal=f"{FRAME_MS:.1f} and {2 * FRAME_MS:.1f} ms",
        )


if __name__ == "__main__":
    print_table(rows())
