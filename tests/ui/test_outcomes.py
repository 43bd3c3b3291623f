"""After the trip: what is recorded is kept and compared with what was predicted; few cases prove little."""

import sqlite3

import pytest

from planner import plan
from planner.case import Case
from planner.case.confirmation import Outcome, PartOutcome
from planner.catalogue import profile_text
from planner.records.reading import read_case

DEMO = read_case(profile_text("demo/copd_layover.json").encode())
FLIGHT = next(part for part in DEMO.trip.parts if part.kind == "flight")


def kept(folder, **cases):
    """Keep these cases before the app starts."""
    from ui.library import Library

    library = Library(folder / "data")
    for case_id, case in cases.items():
        library.save(case_id, case)
    library.close()


def recorded(**what):
    """The demo case with this recorded of its first flight."""
    return DEMO.model_copy(update={"outcome": Outcome(parts=(PartOutcome(part_id=FLIGHT.part_id, **what),))})


def after_the_trip(driver):
    """Open the page and wait until it has compared."""
    driver.tap("After the trip")
    driver.until(lambda: not driver.reads("Planning the recorded cases again"))
    driver.frames(3)


def open_flight(driver):
    """Open the record of the demo, and in it the first flight."""
    after_the_trip(driver)
    driver.tap("M. T.")
    driver.tap(f"{DEMO.trip.parts.index(FLIGHT) + 1} · {FLIGHT.name}")
    driver.frames(3)


def test_nothing_recorded_is_said_and_the_cases_are_listed(opened, tmp_path):
    kept(tmp_path, demo=DEMO)
    driver = opened()
    after_the_trip(driver)
    assert driver.reads("Nothing is recorded yet.")
    assert driver.reads("M. T.")
    assert driver.reads("Estimate only. Confirm with prescriber.")


def test_an_empty_list_of_cases_offers_no_outcomes(opened):
    assert not opened().reads("After the trip")


def test_what_is_recorded_is_kept_and_found_by_a_new_start(opened, tmp_path):
    kept(tmp_path, demo=DEMO)
    driver = opened()
    open_flight(driver)
    driver.tap(next(chip for chip in driver.field("Oxygen was breathed").chips if chip.words == "Yes"))
    driver.fill(driver.field("Usual saturation, SpO₂"), "91")
    driver.fill(driver.field("Oxygen used"), "240")
    driver.fill(driver.field("Gauge at the end"), "80")
    driver.fill(driver.field("Late by"), "35")
    driver.fill(driver.field("Symptoms"), "breathless on the steps")
    driver.tap("Done")
    driver.close()
    again = opened()
    (part,) = (one for one in again.app.library.read("demo").outcome.parts if one.part_id == FLIGHT.part_id)
    assert part == PartOutcome(
        part_id=FLIGHT.part_id,
        on_oxygen=True,
        usual_spo2_percent=91.0,
        oxygen_used_l=240.0,
        gauge_at_end_bar=80.0,
        late_min=35.0,
        symptoms="breathless on the steps",
    )
    assert again.app.library.read("demo").inputs_digest() == DEMO.inputs_digest()


def test_only_looking_keeps_nothing(opened, tmp_path):
    kept(tmp_path, demo=DEMO)
    driver = opened()
    open_flight(driver)
    driver.tap("Done")
    driver.frames(3)
    assert driver.app.library.read("demo").outcome is None


def test_a_saturation_that_cannot_be_is_refused_and_not_kept(opened, tmp_path):
    kept(tmp_path, demo=DEMO)
    driver = opened()
    open_flight(driver)
    driver.fill(driver.field("Usual saturation, SpO₂"), "191")
    driver.tap("Done")
    assert driver.app.library.read("demo").outcome is None


def test_the_prediction_stands_beside_the_entry(opened, tmp_path):
    kept(tmp_path, demo=recorded(on_oxygen=False))
    driver = opened(planner=plan)
    open_flight(driver)
    driver.until(lambda: not driver.app.session.stale, frames=20_000)
    driver.frames(3)
    part = plan(DEMO).part(FLIGHT.part_id)
    spo2 = part.forecast.activity("rest").spo2
    assert driver.reads(
        f"Predicted on air: {100 * spo2.median:.0f} %, likely {100 * spo2.low:.0f} to {100 * spo2.high:.0f} %."
    )


def test_own_cases_are_compared_and_few_are_said_to_prove_little(opened, tmp_path):
    from ui.screens.outcomes import Counted

    predicted = 100.0 * plan(DEMO).part(FLIGHT.part_id).forecast.activity("rest").spo2.median
    low = round(predicted - 3.0, 1)
    kept(
        tmp_path,
        one=recorded(on_oxygen=False, usual_spo2_percent=low, ran_out=True, symptoms="dizzy"),
        two=recorded(on_oxygen=False, usual_spo2_percent=low, ran_out=False, late_min=50.0),
        none=DEMO,
    )
    driver = opened()
    after_the_trip(driver)
    assert driver.reads("Cases compared: 2.")
    shown = {tuple(text.text for text in reversed(row.children)) for row in driver.widgets(Counted)}
    assert ("Bias (predicted less measured)", f"{predicted - low:+.1f} points") in shown
    assert ("Parts in which oxygen ran out", "1") in shown
    assert ("Parts with symptoms", "1") in shown
    assert ("Median delay", "50 min") in shown
    assert driver.reads("Few cases prove little: there are 2 comparisons, and 30 begin to tell.")
    assert sum("Recorded" in text for text in driver.texts()) >= 2


def test_a_case_that_cannot_be_read_is_said_and_the_others_are_compared(opened, tmp_path):
    kept(tmp_path, good=recorded(on_oxygen=False, usual_spo2_percent=88.0), bad=Case())
    with sqlite3.connect(tmp_path / "data" / "cases.db") as database:
        database.execute("update versions set body = ? where case_id = ?", (b"{}", "bad"))
    driver = opened()
    after_the_trip(driver)
    assert driver.reads("Cases that cannot be read and are left out: 1.")
    assert driver.reads("Cases compared: 1.")
    driver.tap("This case cannot be read")
    assert driver.reads("Not opened.")


def test_a_part_taken_out_of_the_trip_since_keeps_its_record(opened, tmp_path):
    parts = tuple(part for part in DEMO.trip.parts if part.part_id != FLIGHT.part_id)
    shorter = recorded(usual_spo2_percent=90.0).model_copy(
        update={"trip": DEMO.trip.model_copy(update={"parts": parts}), "decisions": ()}
    )
    kept(tmp_path, demo=shorter)
    driver = opened()
    after_the_trip(driver)
    driver.tap("M. T.")
    driver.fill(driver.field("Note"), "went well")
    driver.tap("Done")
    kept_now = driver.app.library.read("demo").outcome
    assert kept_now.note == "went well"
    assert PartOutcome(part_id=FLIGHT.part_id, usual_spo2_percent=90.0) in kept_now.parts


def test_escape_goes_back_page_by_page(opened, tmp_path):
    from tests.ui.driver import ESCAPE

    kept(tmp_path, demo=DEMO)
    driver = opened()
    after_the_trip(driver)
    driver.tap("M. T.")
    assert driver.reads("What happened?")
    driver.key(ESCAPE)
    assert driver.reads("Record what happened")
    driver.key(ESCAPE)
    assert driver.reads("New case")


def test_what_is_being_recorded_is_kept_when_the_cases_are_locked_and_hidden_then(opened, tmp_path):
    kept(tmp_path, demo=DEMO)
    driver = opened()
    driver.app.library.protect("a long passphrase")
    open_flight(driver)
    driver.fill(driver.field("Symptoms"), "dizzy")
    driver.app.lock()
    driver.frames(3)
    assert not driver.reads("dizzy")
    assert not driver.reads("M. T.")
    driver.app.library.unlock("a long passphrase")
    assert [one.symptoms for one in driver.app.library.read("demo").outcome.parts if one.symptoms] == ["dizzy"]


def test_a_case_without_a_trip_has_nothing_to_record(opened, tmp_path):
    kept(tmp_path, empty=Case())
    driver = opened()
    after_the_trip(driver)
    driver.tap("No initials yet")
    assert driver.reads("there is nothing to record")


@pytest.mark.parametrize(
    ("width", "height", "scale", "name"),
    [(390, 844, 1.0, "light"), (390, 844, 1.0, "dark"), (320, 568, 1.5, "light"), (1180, 820, 1.0, "light")],
)
def test_both_pages_are_whole_at_every_size(opened, tmp_path, width, height, scale, name):
    from tests.ui import checks
    from ui.theme import theme

    kept(tmp_path, one=recorded(on_oxygen=False, usual_spo2_percent=86.0, ran_out=True, late_min=40.0), demo=DEMO)
    theme.use(name)
    try:
        driver = opened((width, height), scale)
        after_the_trip(driver)
        assert checks.all_faults(driver) == {}
        driver.tap("Recorded")
        driver.tap(f"{DEMO.trip.parts.index(FLIGHT) + 1} · {FLIGHT.name}")
        driver.frames(6)
        assert checks.all_faults(driver) == {}
    finally:
        theme.use("light")
