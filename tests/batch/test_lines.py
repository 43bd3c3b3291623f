"""The lines of a batch file, and what their results are kept under."""

import pytest

from planner.batch.lines import MOST_LINE_BYTES, Line, fingerprint, read_lines
from planner.errors import InputError


def test_empty_lines_are_passed_over_and_numbers_stay_those_of_the_file(tmp_path):
    path = tmp_path / "cases.jsonl"
    path.write_bytes(b'\xef\xbb\xbf{"a": 1}\r\n\n   \n{"b": 2}')
    assert list(read_lines(path)) == [Line(1, b'{"a": 1}'), Line(4, b'{"b": 2}')]


def test_a_line_longer_than_a_case_may_be_is_marked_and_the_next_one_is_read(tmp_path):
    path = tmp_path / "cases.jsonl"
    path.write_bytes(b"{}\n" + b"x" * (3 * MOST_LINE_BYTES) + b"\n" + b"y" * MOST_LINE_BYTES + b"\n{}\n")
    assert [(line.number, line.text if line.text is None else line.text[:2]) for line in read_lines(path)] == [
        (1, b"{}"),
        (2, None),
        (3, None),
        (4, b"{}"),
    ]


def test_a_line_at_the_limit_is_read_whole(tmp_path):
    path = tmp_path / "cases.jsonl"
    path.write_bytes(b"x" * (MOST_LINE_BYTES - 1) + b"\n")
    (line,) = read_lines(path)
    assert line.text is not None
    assert len(line.text) == MOST_LINE_BYTES - 1


def test_a_file_that_cannot_be_read_is_said_with_its_name(tmp_path):
    with pytest.raises(InputError, match=r"nothing\.jsonl cannot be read"):
        list(read_lines(tmp_path / "nothing.jsonl"))


def test_a_result_is_kept_under_its_line_its_text_and_what_it_depends_on():
    line = Line(7, b"{}")
    assert line.name("one").startswith("000007-")
    assert len({line.name("one"), line.name("two"), Line(7, b"[]").name("one"), Line(8, b"{}").name("one")}) == 4
    assert line.name("one") == Line(7, b"{}").name("one")


def test_the_services_own_profiles_and_the_papers_change_what_a_result_depends_on(tmp_path, monkeypatch):
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))
    plain = fingerprint(papers=False)
    assert fingerprint(papers=True) != plain
    assert fingerprint(papers=False, through="forecast") != plain
    assert fingerprint(papers=False) == plain
    (tmp_path / "delivery.toml").write_text("format = 'x'\n")
    assert fingerprint(papers=False) != plain
