"""Every screen, at every size, font scale and theme: whole texts, large targets, contrast, glyphs, caution."""

from functools import cache

import pytest

from tests.ui import checks
from tests.ui.driver import Driver
from ui.app import PlannerApp, load_planner
from ui.screens import PAGES, STEPS
from ui.theme import theme

SIZES = [
    (390, 844, 1.0),
    (390, 844, 1.5),
    (320, 568, 1.5),  # what is whole here is whole at font scale 1.0
    (844, 390, 1.0),
    (1180, 820, 1.0),
]
NAMES = [step.name for step in (*STEPS, *PAGES)]


@cache
def planner():
    """The planner with one memory for all tests: the demo case is worked out once."""
    return load_planner()


@pytest.fixture
def answered(tmp_path):
    """Opens the demo (or a new) case at a size and waits for its whole plan."""
    drivers = []

    def open_case(width, height, scale=1.0, demo=True):
        driver = Driver(PlannerApp(data_folder=tmp_path, load_planner=planner), (width, height), scale)
        drivers.append(driver)
        if demo:
            driver.app.cases.open_demo()
        else:
            driver.app.cases.new_case()
        session = driver.app.session
        driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
        return driver

    yield open_case
    for driver in drivers:
        driver.close()


def open_folds(driver):
    from ui.widgets.rows import Fold

    for fold in driver.widgets(Fold):
        if not fold.open:
            fold.toggle()
    driver.frames(6)


def faults_of_all_screens(driver, scale):
    faults = {}
    session = driver.app.session
    for name in NAMES:
        if name == "why" and session.timeline.parts:
            session.place["why"] = ("verdict", session.timeline.parts[2].part_id, "")
        driver.app.shell.go(name)
        driver.frames(8)
        open_folds(driver)
        faults[name] = checks.all_faults(driver)
        for place in (0.5, 0.0) if scale == 1.0 else ():  # colours do not depend on the size of the text
            driver.app.shell.page.scroll_y = place
            driver.frames(2)
            faults[f"{name} at {place}"] = {"weak": checks.weak_texts(driver)}
    return {name: found for name, found in faults.items() if any(found.values())}


@pytest.mark.parametrize(("width", "height", "scale"), SIZES)
def test_every_screen_of_the_demo_case_is_whole(answered, width, height, scale):
    assert faults_of_all_screens(answered(width, height, scale), scale) == {}


def test_every_screen_of_an_empty_case_is_whole(answered):
    assert faults_of_all_screens(answered(390, 844, 1.5, demo=False), 1.5) == {}


@pytest.mark.parametrize("scale", [1.0, 1.5])
def test_a_step_with_faults_and_a_question_is_whole(opened, scale):
    driver = opened((320, 568), scale)
    driver.app.cases.open_demo()
    driver.frames(4)
    driver.fill(driver.field("Carbon dioxide, PaCO₂"), "99")
    driver.fill(driver.field("Taken on"), "31 Feb 2026")
    driver.fill(driver.field("Oxygen, PaO₂"), "66")
    driver.bring(driver.says("Yes, 66 mmHg"))
    found = checks.all_faults(driver)
    assert found == {}
    assert driver.reads("31 Feb 2026 is not a day of the calendar.")


@pytest.mark.parametrize(("width", "height", "scale"), [(390, 844, 1.0), (320, 568, 1.5), (1180, 820, 1.0)])
def test_the_list_of_cases_is_whole(opened, width, height, scale):
    driver = opened((width, height), scale)
    open_folds(driver)
    assert checks.all_faults(driver) == {}


def test_every_screen_can_be_read_in_the_dark_theme(answered):
    theme.use("dark")
    try:
        driver = answered(390, 844)
        for name in NAMES:
            driver.app.shell.go(name)
            driver.frames(8)
            assert checks.weak_texts(driver) == [], name
    finally:
        theme.use("light")


def test_every_step_can_be_read_as_plain_text(answered):
    from ui.screens.as_text import text_of_step

    driver = answered(390, 844)
    for step in STEPS:
        lines = text_of_step(step.name, driver.app.session).split("\n")
        assert lines[0].endswith("?")
        assert lines[-1] == "Estimate only. Confirm with prescriber."
        assert len(lines) > 8, step.name
