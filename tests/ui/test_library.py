"""The list of cases: what is typed is found again, faults are said, nothing kept is lost."""

import json
import sqlite3

import pytest

from planner.case import Case


def library(folder):
    from ui.library import Library

    return Library(folder)


def test_a_case_typed_in_is_found_again_by_a_new_start(opened, tmp_path):
    driver = opened()
    driver.tap("New case")
    driver.tap("Bronchiectasis")
    driver.tap("About this person")
    driver.fill(driver.field("Initials"), "A. B.")
    driver.app.show_cases()
    driver.frames(4)
    assert driver.reads("A. B.")
    assert driver.reads("Bronchiectasis")
    driver.close()
    again = opened()
    again.tap("A. B.")
    assert again.app.session.case.patient.diagnosis == "bronchiectasis"


def test_the_last_saved_case_stands_first(tmp_path):
    one = library(tmp_path)
    one.save("old", Case())
    one.save("new", Case())
    assert [row.case_id for row in one.rows()] == ["new", "old"]


def test_a_damaged_case_is_listed_and_says_why_when_opened(opened, tmp_path):
    one = library(tmp_path / "data")
    one.save("a", Case())
    one.close()
    with sqlite3.connect(tmp_path / "data" / "cases.db") as database:
        database.execute("update versions set body = ?", (b"{}",))
    driver = opened()
    driver.tap("This case cannot be read")
    assert driver.app.shell is None
    assert driver.reads("Not opened.")
    assert driver.reads("is damaged")


def test_a_store_that_cannot_be_opened_is_said_and_the_app_still_starts(opened, tmp_path):
    (tmp_path / "data").mkdir()
    (tmp_path / "data" / "cases.db").write_text("this is no file of cases" * 100)
    driver = opened()
    assert driver.reads("Cases are not kept.")
    driver.tap("New case")
    driver.tap("Asthma")
    driver.app.session.close()
    driver.frames(3)
    assert driver.reads("Not saved: ")


def test_a_second_window_reads_and_says_that_it_does_not_save(opened, tmp_path):
    first = library(tmp_path / "data")
    first.save("a", Case())
    second = opened()
    assert second.reads("The cases are open in another window.")
    assert second.reads("No initials yet")
    first.close()


def test_a_file_that_is_no_case_is_refused_beside_the_entry(opened, tmp_path):
    wrong = tmp_path / "wrong.json"
    wrong.write_text(json.dumps({"format": "shopping list"}))
    driver = opened()
    driver.tap("Import cases")
    driver.tap(driver.app.cases.path.input)
    driver.type(str(wrong))
    driver.tap("Import this")
    assert driver.reads("This is not a case file")
    assert driver.app.shell is None


def test_a_dropped_case_file_is_opened(opened, tmp_path):
    from kivy.core.window import Window

    from planner.catalogue import profile_text

    path = tmp_path / "case.json"
    path.write_text(profile_text("demo/copd_layover.json"))
    driver = opened()
    Window.dispatch("on_drop_file", str(path).encode(), 10, 10)
    driver.frames(4)
    assert driver.app.session.case.patient.reference == "DEMO-1"


def test_a_case_named_on_the_command_line_is_opened(opened, tmp_path):
    from planner.catalogue import profile_text

    path = tmp_path / "case.json"
    path.write_text(profile_text("demo/copd_layover.json"))
    driver = opened(case_file=path)
    driver.frames(4)
    assert driver.app.shell is not None


@pytest.mark.parametrize("number", range(3))
def test_every_demo_opens(opened, number):
    from ui.screens.cases import DEMOS

    driver = opened()
    driver.app.cases.open_demo(DEMOS[number][0])
    driver.app.shell.go("trip")
    driver.frames(4)
    assert driver.app.session.timeline.total_min > 0


def test_a_case_is_removed_only_after_a_second_tap(opened, tmp_path):
    kept = library(tmp_path / "data")
    kept.save("a", Case())
    kept.close()
    driver = opened()
    driver.tap("Remove a case")
    rows = [w for w in driver.widgets() if getattr(w, "text", "") == "No initials yet"]
    driver.tap(rows[-1])
    assert driver.reads("It cannot be brought back.")
    assert len(driver.app.library.rows()) == 1
    driver.tap("Remove it")
    assert driver.app.library.rows() == []
    assert driver.reads("A person with lung disease wants to travel.")


def test_a_passphrase_seals_the_cases_and_is_asked_at_the_next_start(opened, tmp_path):
    kept = library(tmp_path / "data")
    kept.save("a", Case())
    kept.close()
    driver = opened()
    driver.tap("Passphrase")
    driver.fill(driver.field("Passphrase"), "ripe cherries")
    driver.fill(driver.field("The same again"), "ripe cherry")
    driver.tap("Seal the cases")
    assert driver.reads("Both must be the same, and not empty.")
    driver.fill(driver.field("The same again"), "ripe cherries")
    driver.tap("Seal the cases")
    driver.until(lambda: driver.app.library.protected)
    driver.close()
    again = opened()
    assert again.reads("The cases on this device are sealed.")
    assert not again.reads("No initials yet")
    again.fill(again.field("Passphrase"), "ripe berries")
    again.tap("Unlock")
    again.until(lambda: again.reads("passphrase does not"))
    again.fill(again.field("Passphrase"), "ripe cherries")
    again.tap("Unlock")
    again.until(lambda: again.reads("No initials yet"))
