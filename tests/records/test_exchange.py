"""Cases out and in: the same again, no identity unasked, and a sentence for whatever is hostile."""

import json
import os
from datetime import date

import pytest

from planner.__main__ import main
from planner.case import Case
from planner.case.measurements import Haemoglobin
from planner.case.patient import Patient
from planner.catalogue import profile_text
from planner.errors import InputError
from planner.records.exchange import (
    export_cases,
    export_fhir,
    file_name,
    import_file,
    import_folder,
    import_path,
    save_cases,
)
from planner.records.reading import MAX_BYTES, CaseFileError, read_case, write_case

DEMOS = [read_case(profile_text(f"demo/{name}.json")) for name in ("copd_layover", "fibrosis_mountain_hotel")]
NAMED = Case(patient=Patient(reference="R-7", name="Zorro Zorrino", birth_date=date(1958, 1, 1), age_years=68))


def test_cases_come_back_as_they_went():
    content, said = export_cases(DEMOS)
    taken = import_file(content)
    assert taken.cases == tuple(DEMOS)
    assert (taken.said, said) == ((), ())


def test_name_and_birth_date_are_left_out_unless_chosen():
    content, said = export_cases([NAMED])
    assert b"Zorr" not in content
    assert b"1958" not in content
    assert said == ("Name and birth date are left out.",)
    assert import_file(content).cases[0].patient.age_years == 68
    whole, said = export_cases([NAMED], with_identity=True)
    assert import_file(whole).cases == (NAMED,)
    assert said == ()


def test_a_confirmation_that_rested_on_them_is_told_to_be_void():
    confirmed = NAMED.model_copy(
        update={
            "confirmation": {
                "name": "Dr Example", "role": "physician", "confirmed_at": "2026-11-25T10:00:00Z",
                "inputs_digest": NAMED.inputs_digest(),
            }
        }
    )  # fmt: skip
    case = Case.model_validate_json(json.dumps(json.loads(NAMED.model_dump_json()) | {
        "confirmation": confirmed.confirmation}))  # fmt: skip
    content, said = export_cases([case])
    assert any("void" in sentence for sentence in said)
    there = import_file(content).cases[0]
    assert there.confirmation.inputs_digest != there.inputs_digest()


def test_a_case_file_is_taken_as_it_is():
    assert import_file(write_case(DEMOS[0]).encode()).cases == (DEMOS[0],)


def test_a_faulty_case_among_several_is_told_and_the_others_are_taken():
    table = json.loads(export_cases(DEMOS)[0])
    table["cases"].insert(1, {"format": "oxygen-altitude-case", "version": 1, "patient": {"age_years": -4}})
    table["cases"].append("no case")
    taken = import_file(json.dumps(table).encode())
    assert taken.cases == tuple(DEMOS)
    assert len(taken.said) == 2
    assert "Case 2 is not taken: patient.age_years" in taken.said[0]


def envelope(**changes):
    return json.dumps({"format": "oxygen-altitude-exchange", "version": 1, "cases": []} | changes).encode()


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        (b"\xff\xfe\x00", "not UTF-8"),
        (b"[" * 100 + b"]" * 100, "levels deep"),
        (b'{"a": 1, "a": 2}', "stands twice"),
        (b'{"format": NaN}', "not a number that can be measured"),
        (b'{"format": 1e999}', "too large"),
        (b" " * 5_000_001, "at most 5,000,000"),
        (b"[]", "an object in braces"),
        (b'{"format": "other"}', "not a case file"),
        (envelope(version=2), "exchange files of version 1"),
        (envelope(cases=7), "a list of at most 5,000"),
        (envelope(cases=[{}] * 5001), "a list of at most 5,000"),
    ],
)
def test_a_hostile_file_is_refused_with_a_sentence(content, sentence):
    with pytest.raises(CaseFileError, match=sentence):
        import_file(content)


@pytest.mark.parametrize("words", ["../../etc/passwd", "C:\\Windows\\x", "a/b\0c", "", "…", "nul\n", "x" * 300])
def test_a_reference_is_never_a_path(words, tmp_path):
    name = file_name(words)
    assert "/" not in name
    assert "\\" not in name
    assert 0 < len(name) <= 40
    (written,) = save_cases([Case(patient=Patient(reference=words[:40]))], tmp_path)
    assert written.parent == tmp_path


def test_nothing_that_is_there_is_replaced(tmp_path):
    first = save_cases(DEMOS, tmp_path)
    again = save_cases(DEMOS, tmp_path)
    assert len({*first, *again}) == 4
    assert all(path.is_file() for path in first)


def test_a_folder_is_taken_with_a_sentence_for_what_cannot_be_read(tmp_path):
    (tmp_path / "a.json").write_bytes(export_cases(DEMOS)[0])
    (tmp_path / "b.json").write_text("Dear nurse")
    (tmp_path / "letter.txt").write_text("left alone")
    found = import_folder(tmp_path)
    assert [(one.name, len(one.cases)) for one in found] == [("a.json", 2), ("b.json", 0)]
    assert found[1].said[0].startswith("Not taken: The file is not JSON")


def test_one_bad_thing_in_a_folder_does_not_end_the_others(tmp_path):
    (tmp_path / "a.json").mkdir()
    os.mkfifo(tmp_path / "b.json")
    (tmp_path / "c.json").symlink_to("/dev/zero")
    (tmp_path / "d.json").symlink_to(tmp_path / "nowhere")
    (tmp_path / "e.json").write_bytes(b" " * (MAX_BYTES + 1))
    (tmp_path / "f.JSON").write_bytes(export_cases(DEMOS)[0])
    (tmp_path / "g\x1b[2J.json").write_text("{")
    found = import_folder(tmp_path)
    assert [len(one.cases) for one in found] == [0, 0, 0, 0, 0, 2, 0]
    sentences = [one.said[0] for one in found if one.said]
    assert all(sentence.startswith("Not taken: ") for sentence in sentences)
    assert [sentence.endswith("is not a file.") for sentence in sentences[:3]] == [True] * 3
    assert "No such file" in sentences[3]
    assert "at most 5,000,000" in sentences[4]
    assert all(one.name.isprintable() for one in found)


def test_a_pipe_or_a_device_is_refused_by_its_name(tmp_path):
    os.mkfifo(tmp_path / "b.json")
    with pytest.raises(CaseFileError, match=r"'b\.json' is not a file"):
        import_path(tmp_path / "b.json")


def test_a_file_that_could_not_be_read_back_is_not_written():
    size = len(export_cases([DEMOS[0]])[0])
    most = MAX_BYTES // size
    assert len(import_file(export_cases([DEMOS[0]] * most)[0]).cases) == most
    with pytest.raises(InputError, match=r"at most 5,000,000 can be read back\. Put them into several files"):
        export_cases([DEMOS[0]] * (most + 20))


def test_the_local_reference_goes_out_and_in_by_fhir():
    (there,) = import_file(export_fhir(DEMOS[0])[0]).cases
    assert there.patient == Patient(reference=DEMOS[0].patient.reference)


def test_more_measurements_than_a_case_holds_are_refused():
    case = Case(measurements=tuple(Haemoglobin(haemoglobin_g_dl=14.0) for _ in range(200)))
    table = json.loads(export_fhir(case)[0])
    table["entry"].append(table["entry"][-1])
    with pytest.raises(CaseFileError, match=r"more measurements than a case holds: .*200"):
        import_file(json.dumps(table).encode())


def test_the_command_line_says_why_nothing_came_or_goes(tmp_path, capsys):
    case, folder = tmp_path / "case.json", tmp_path / "in"
    case.write_text(write_case(DEMOS[0]))
    assert main(["export", str(case), "--out", str(folder), "--fhir", "--with-identity"]) == 2
    assert "never name and birth date" in capsys.readouterr().err
    assert not folder.exists()
    (tmp_path / "empty").mkdir()
    assert main(["import", str(tmp_path / "empty"), "--out", str(folder)]) == 2
    assert "No case was taken" in capsys.readouterr().err
    assert not folder.exists()
    assert main(["export", "/dev/zero", "--out", str(folder)]) == 2
    assert "is not a file" in capsys.readouterr().err


def test_the_command_line_exports_and_imports(tmp_path, capsys):
    case, out, fhir, folder = (tmp_path / name for name in ("case.json", "out.json", "bundle.json", "in"))
    case.write_text(write_case(DEMOS[0]))
    assert main(["export", str(case), "--out", str(out)]) == 0
    assert main(["export", str(case), "--out", str(fhir), "--fhir"]) == 0
    assert "stay behind" in capsys.readouterr().out
    assert main(["import", str(out), str(fhir), "--out", str(folder)]) == 0
    kept = sorted(folder.glob("*.json"))
    assert len(kept) == 2
    assert read_case(kept[0].read_bytes()) == DEMOS[0]
    assert main(["export", str(case), str(case), "--out", str(out), "--fhir"]) == 2
    (tmp_path / "bad.json").write_text("{")
    assert main(["import", str(tmp_path / "bad.json"), "--out", str(folder)]) == 2
    assert "not JSON" in capsys.readouterr().err
