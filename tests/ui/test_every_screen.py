"""Every screen, at every size, font scale and theme: whole texts, large targets, contrast, glyphs, caution."""

import pytest

from tests.ui import checks
from tests.ui.driver import Driver
from ui.app import PlannerApp
from ui.screens import PAGES, STEPS
from ui.theme import theme

SIZES = [
    (390, 844, 1.0),
    (390, 844, 1.5),
    (320, 568, 1.0),
    (320, 568, 1.5),
    (844, 390, 1.0),
    (1180, 820, 1.0),
    (1180, 820, 1.5),
]
NAMES = [step.name for step in (*STEPS, *PAGES)]


def open_folds(driver):
    from ui.widgets.rows import Fold

    for fold in driver.widgets(Fold):
        if not fold.open:
            fold.toggle()
    driver.frames(6)


@pytest.mark.parametrize(("width", "height", "scale"), SIZES)
def test_every_screen_of_the_demo_case_is_whole(width, height, scale, tmp_path):
    driver = Driver(PlannerApp(data_folder=tmp_path, load_planner=None), (width, height), scale)
    try:
        faults = {"cases": checks.all_faults(driver)}
        driver.app.cases.open_demo()
        driver.frames(6)
        for name in NAMES:
            driver.app.shell.go(name)
            driver.frames(8)
            open_folds(driver)
            faults[name] = checks.all_faults(driver)
            for place in (0.5, 0.0):
                driver.app.shell.page.scroll_y = place
                driver.frames(2)
                faults[f"{name} at {place}"] = {"weak": checks.weak_texts(driver)}
        assert {name: found for name, found in faults.items() if any(found.values())} == {}
    finally:
        driver.close()


def test_every_screen_can_be_read_in_the_dark_theme(tmp_path):
    theme.use("dark")
    driver = Driver(PlannerApp(data_folder=tmp_path, load_planner=None))
    try:
        driver.app.cases.open_demo()
        for name in NAMES:
            driver.app.shell.go(name)
            driver.frames(8)
            assert checks.weak_texts(driver) == [], name
    finally:
        driver.close()
        theme.use("light")
