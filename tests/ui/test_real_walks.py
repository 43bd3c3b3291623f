"""The nurse's, the supplier's and the physician's whole job in a real window: by mouse and wheel, and by keys alone."""

from importlib import resources

import pytest

from planner.records.store import CaseStore
from tests.ui.real_window import Walk


@pytest.fixture
def walk(display, tmp_path):
    begun = []

    def begin(name, *arguments):
        begun.append(Walk(display, tmp_path, *arguments, name=name))
        return begun[-1]

    yield begin
    for one in begun:
        one.close()


@pytest.fixture
def decided_case(tmp_path):
    """An invented case file with all flows decided."""
    path = tmp_path / "case.json"
    path.write_bytes(resources.files("profiles").joinpath("demo", "copd_layover.json").read_bytes())
    return path


def kept_case(walk):
    """The case as it was saved."""
    assert "Traceback" not in walk.close()
    with CaseStore(walk.kept / "cases.db") as store:
        (entry,) = store.entries()
        return store.load(entry.case_id)


def papers(walk):
    return sorted(one.name.rsplit(" ", 1)[-1] for one in walk.folder.rglob("*.pdf"))


def test_the_nurse_begins_a_case_reads_the_pathway_records_a_test_and_saves_the_papers(walk):
    nurse = walk("nurse")
    nurse.touch("New case")
    nurse.touch("COPD")
    nurse.write("Saturation, SpO₂", "93")
    nurse.write("Taken on", "today")
    nurse.write("Elevation where taken", "0")
    nurse.touch("No", after="3 · Oxygen at home")
    nurse.touch("No", after="4 · Could oxygen raise")
    nurse.write("From gate to gate", "3.5")
    nurse.keep("patient")
    nurse.touch("About this person")
    nurse.write("Age", "66")
    nurse.touch("Forecast")
    nurse.wait("settled")
    nurse.keep("forecast")
    nurse.touch("How the pathways came to it")
    nurse.find("Which pathways to follow")
    nurse.keep("pathway")
    nurse.touch("Hypoxic challenge test")
    nurse.touch("Record a test")
    nurse.touch("On the mixture")
    nurse.touch("−5 %")
    nurse.touch("−5 %")
    nurse.touch("Write the row")
    nurse.wait("says", text="Lowest SpO₂ 85 %")
    nurse.keep("challenge")
    nurse.touch("Papers")
    nurse.wait("settled")
    nurse.keep("papers")
    nurse.touch("For the carrier")
    nurse.keep("carrier")
    nurse.touch("Save the four papers")
    nurse.wait("says", text="Four papers saved")
    case = kept_case(nurse)
    assert case.patient.diagnosis == "copd"
    assert case.prescription.uses_oxygen is False
    assert case.trip.parts[0].duration_min == 210.0
    test = next(one for one in case.measurements if one.kind == "challenge")
    assert [row.spo2_percent for row in test.rows] == [85.0]
    assert len(papers(nurse)) == 4


def test_the_supplier_adds_an_own_cylinder_plays_three_hours_late_and_shows_the_paper(walk, decided_case):
    supplier = walk("supplier", decided_case)
    supplier.wait("settled")
    supplier.touch("Kit")
    supplier.keep("kit")
    supplier.touch("What the supplier has")
    supplier.touch("1 L, 200 bar", which=-1)
    supplier.touch("Add one of this size")
    supplier.wait("says", text="Gauge, empty for full")
    supplier.keep("own cylinder")
    supplier.touch("1 h late")
    supplier.wait("settled")
    supplier.touch("3 h late")
    supplier.wait("settled")
    supplier.keep("three hours late")
    supplier.touch("Papers")
    supplier.touch("For the supplier")
    supplier.find("Pages")
    supplier.keep("supplier paper")
    case = kept_case(supplier)
    assert len(case.kit.owned_cylinders) == 1
    assert case.policy.stress_late_min == 180.0


def test_the_physician_decides_confirms_and_saves_the_record_by_keys_alone(walk, decided_case):
    physician = walk("physician", decided_case)
    physician.wait("settled")
    physician.key("alt+3")
    physician.wait("step", "forecast")
    physician.tab_to("+")
    physician.key("Tab", "Tab")
    physician.keep("forecast")
    physician.key("Return")
    physician.wait("step", "why")
    physician.keep("how it was worked out")
    physician.key("Escape")
    physician.wait("step", "forecast")
    physician.key("alt+4")
    physician.wait("step", "oxygen")
    physician.tab_to("3")
    physician.key("Return")
    physician.tab_to("Decided by")
    physician.key("ctrl+a")
    physician.do("type", "--delay", 25, "Dr Example")
    physician.tab_to("Role")
    physician.do("type", "--delay", 25, "Physician")
    physician.tab_to("Write this decision")
    physician.key("Return")
    physician.wait("says", text="With 3 L/min by nasal cannula SpO₂ would be")
    physician.wait("settled")
    physician.keep("decided")
    physician.key("alt+6")
    physician.wait("step", "papers")
    physician.tab_to("Confirm this plan")
    physician.key("Return")
    physician.wait("says", text="Confirmed by Dr Example, Physician")
    physician.keep("confirmed")
    physician.tab_to("Save the four papers")
    physician.key("Return")
    physician.wait("says", text="Four papers saved")
    physician.keep("saved")
    case = kept_case(physician)
    assert case.confirmation.name == "Dr Example"
    assert any(one.flow_l_min == 3.0 and one.decided_by == "Dr Example" for one in case.decisions)
    assert "record.pdf" in papers(physician)
