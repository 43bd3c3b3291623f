"""From any number of a result one touch leads to how it was worked out, and Back or Escape to where it stood."""

import pytest
from kivy.metrics import dp

from tests.ui.driver import ENTER, ESCAPE, TAB, Driver
from ui.app import PlannerApp, load_planner
from ui.widgets.why import Onward, Why, WhyRows


@pytest.fixture(scope="module")
def planner():
    """One planner with one memory: the demo case is worked out once."""
    loaded = load_planner()
    return lambda: loaded


@pytest.fixture
def demo_at(planner, tmp_path):
    """Opens the demo case at a step in a window of this size."""
    drivers = []

    def open_at(step, size=(390, 844)):
        driver = Driver(PlannerApp(data_folder=tmp_path / "data", load_planner=planner), size, 1.0)
        drivers.append(driver)
        driver.app.cases.open_demo()
        session = driver.app.session
        driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
        driver.app.shell.go(step)
        driver.frames(10)
        return driver

    yield open_at
    for driver in drivers:
        driver.close()


def shown(driver):
    return driver.app.shell.screen


def headings(driver):
    return [one for one in ("Formula", "Inputs", "Range", "Source") if driver.reads(f"[b]{one}[/b]")]


def touch_row(driver, index):
    (chart,) = driver.widgets(WhyRows)
    driver.tap(list(reversed(chart.children))[index])
    driver.frames(6)


def test_a_touch_on_each_method_shows_its_own_formula_and_escape_leads_back(demo_at):
    driver = demo_at("forecast")
    forecast = shown(driver)
    methods = forecast.part.forecast.activities[0].predictors
    for index in (0, len(methods) - 1):
        touch_row(driver, index)
        assert driver.app.shell.step == "why"
        assert headings(driver) == ["Formula", "Inputs", "Range", "Source"]
        assert driver.reads(methods[index].formula)
        assert driver.reads("By another method")
        driver.key(ESCAPE)
        assert shown(driver) is forecast


def test_back_finds_the_page_as_it_was_left(demo_at):
    driver = demo_at("forecast")
    driver.tap("Walking[/b], this lung")
    driver.frames(6)
    assert driver.reads("walking")
    assert driver.reads("twice the oxygen uptake of rest")
    before = driver.app.shell._asking[2].scroll_y
    assert before < 1.0
    driver.tap("Back")
    assert driver.app.shell.step == "forecast"
    assert driver.app.shell.page.scroll_y == pytest.approx(before)


def test_every_number_that_can_be_asked_about_bears_the_mark_and_is_large_enough(demo_at):
    for step, least in (("forecast", 4), ("oxygen", 3)):
        driver = demo_at(step)
        asked = driver.widgets(Why)
        assert len(asked) >= least
        rows = [row for chart in driver.widgets(WhyRows) for row in chart.children]
        assert bool(rows) == (step == "forecast")
        for one in [*asked, *rows]:
            assert min(one.size) >= dp(48)
            assert any(isinstance(child, Onward) for child in one.children)


def test_the_verdict_is_reached_by_tab_and_opened_by_enter(demo_at):
    driver = demo_at("forecast")
    for _ in range(40):
        driver.key(TAB)
        if isinstance(driver.focused(), Why):
            break
    driver.key(ENTER)
    driver.frames(6)
    assert driver.app.shell.step == "why"
    assert driver.reads("Verdict, ")


@pytest.mark.parametrize(("said", "result"), [("Model", "Flow of the model"), ("Decided", "Decided oxygen")])
def test_the_flow_of_the_model_and_the_decided_one_are_explained(demo_at, said, result):
    driver = demo_at("oxygen")
    driver.tap(said)
    driver.frames(6)
    assert driver.reads(result)
    assert driver.reads("Berg BW")
    driver.key(ESCAPE)
    assert driver.app.shell.step == "oxygen"


def test_the_mixture_and_the_reading_of_a_challenge_test_are_explained(demo_at):
    driver = demo_at("challenge")
    driver.tap("Record a test")
    path = f"measurements.{shown(driver).index}"
    driver.app.session.set_many({f"{path}.place.elevation_m": 0.0, f"{path}.challenge_fio2": 0.15})
    driver.frames(6)
    driver.tap("On the mixture")
    driver.tap("Write the row")
    driver.tap("In this laboratory.")
    driver.frames(6)
    assert driver.reads("Mixture for the challenge test")
    driver.key(ESCAPE)
    assert driver.app.shell.step == "challenge"
    driver.tap("The reading.")
    driver.frames(6)
    assert driver.reads("Reading of the challenge test")
    driver.tap("Back")
    assert driver.app.shell.step == "challenge"
    driver.key(ESCAPE)
    assert driver.app.shell.step == "forecast"


def test_a_wide_window_answers_beside_the_step_which_stays(demo_at):
    driver = demo_at("forecast", (1180, 820))
    forecast = shown(driver)
    assert driver.reads("Touch a number")
    assert driver.reads("Verdict, Flight 1")
    plot = forecast.ribbon.plot
    plot.to_part(0)
    driver.frames(6)
    assert driver.reads("Verdict, Road over the pass")
    touch_row(driver, 0)
    assert shown(driver) is forecast
    assert not driver.reads("Verdict, ")
    assert headings(driver) == ["Formula", "Inputs", "Range", "Source"]
    driver.key(ESCAPE)
    assert driver.app.shell.step == "forecast"
    assert driver.reads("Touch a number")
    touch_row(driver, 1)
    driver.tap("Back")
    assert shown(driver) is forecast
    assert driver.reads("Verdict, Road over the pass")


def test_the_explanation_follows_an_undone_entry(demo_at):
    driver = demo_at("forecast")
    session = driver.app.session
    gas = next(i for i, one in enumerate(session.case.measurements) if one.kind == "blood_gas")
    session.set(f"measurements.{gas}.pao2_mmhg", 61.0)
    driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
    touch_row(driver, 0)
    assert driver.reads("PaO₂ 8.1 kPa")
    session.undo()
    driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
    driver.frames(6)
    assert not driver.reads("PaO₂ 8.1 kPa")


def test_what_is_missing_leads_by_one_touch_to_where_it_is_entered_and_nothing_is_marked_without_an_answer(
    planner, tmp_path
):
    driver = Driver(PlannerApp(data_folder=tmp_path / "data", load_planner=planner), (390, 844), 1.0)
    session = driver.app.session
    driver.app.cases.new_case()
    driver.frames(8)
    driver.fill(driver.field("From gate to gate"), "3.5")
    driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
    go = driver.app.shell.go
    for question, step in (("What is SpO₂ or the blood gas at rest", "patient"), ("The elevation where", "trip")):
        go("forecast")
        driver.frames(8)
        driver.tap(shown(driver).verdict)
        assert driver.app.shell.step == "forecast"
        driver.tap(question)
        assert driver.app.shell.step == step
    go("oxygen")
    driver.frames(8)
    marks = [one.opacity for cell in shown(driver).answers.children for one in cell.children if isinstance(one, Onward)]
    assert marks == [0.0, 0.0]
    driver.close()


def test_tab_goes_from_the_verdict_down_the_methods_in_their_order(demo_at):
    driver = demo_at("forecast")
    methods = shown(driver).part.forecast.activities[0].predictors
    for _ in range(40):
        driver.key(TAB)
        if isinstance(driver.focused(), Why):
            break
    for index in range(len(methods)):
        driver.key(TAB)
        assert driver.focused() is driver.widgets(WhyRows)[0].children[len(methods) - 1 - index]
    driver.key(ENTER)
    driver.frames(6)
    assert driver.reads(methods[-1].formula)


def test_an_explanation_is_copied_as_plain_text_and_read_as_text(demo_at, monkeypatch):
    from ui.screens import why
    from ui.screens.as_text import text_of_step

    copied = []
    monkeypatch.setattr(why.Clipboard, "copy", copied.append)
    driver = demo_at("forecast")
    driver.tap(shown(driver).verdict)
    driver.frames(6)
    driver.tap("Copy this")
    (text,) = copied
    for words in ("Verdict, Flight 1", "Formula\n", "Inputs\n", "Source\n", "By another method\n"):
        assert words in text
    assert "[b]" not in text
    read = text_of_step("why", driver.app.session)
    assert "Verdict, Flight 1" in read
    assert read.endswith("Estimate only. Confirm with prescriber.")
