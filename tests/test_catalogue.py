"""Profiles are read from the package and from the service's own folder, and refused with a sentence."""

import pytest

from planner import catalogue
from planner.errors import ProfileError


@pytest.fixture
def own_folder(tmp_path, monkeypatch):
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))
    return tmp_path


def write(folder, name, text):
    path = folder / name
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(text, encoding="utf-8")


HEADER = 'format = "made-for-this-test"\nversion = 1\n'


def test_a_service_profile_without_a_packaged_one_is_read(own_folder):
    write(own_folder, "ours.toml", HEADER + '[[entry]]\nid = "a"\nname = "First"\n')
    assert catalogue.read_entries("ours.toml") == {"a": {"id": "a", "name": "First"}}


def test_a_service_entry_replaces_the_packaged_one_with_its_id_and_keeps_the_others(own_folder):
    packaged = catalogue.read_entries("cylinders.toml")
    first, second = list(packaged)[:2]
    write(own_folder, "cylinders.toml", HEADER + f'[[entry]]\nid = "{first}"\nname = "Our own"\n')
    merged = catalogue.read_entries("cylinders.toml")
    assert merged[first] == {"id": first, "name": "Our own"}
    assert merged[second] == packaged[second]
    assert len(merged) == len(packaged)


@pytest.mark.parametrize(
    ("text", "key", "words"),
    [
        ("version = 1\n", "format", "format is missing"),
        ('format = "x"\n', "version", "version, a whole number, is missing"),
        ('format = "x"\nversion = "one"\n', "version", "whole number"),
        ("format = \n", "", "cannot be parsed"),
        (HEADER, "entry", "list of [[entry]] tables"),
        (HEADER + "[[entry]]\nname = 'no id'\n", "entry 1", "has no id"),
        (HEADER + '[[entry]]\nid = "a"\n[[entry]]\nid = "a"\n', "a", "stands twice"),
    ],
)
def test_a_faulty_profile_is_refused_with_where_and_why(own_folder, text, key, words):
    write(own_folder, "ours.toml", text)
    with pytest.raises(ProfileError) as refusal:
        catalogue.read_entries("ours.toml")
    assert refusal.value.key == key
    assert words in str(refusal.value)
    assert "ours.toml" in str(refusal.value)


def test_a_profile_that_is_not_utf8_is_refused_with_the_byte(own_folder):
    (own_folder / "ours.toml").write_bytes(b'format = "\xff"')
    with pytest.raises(ProfileError, match="not UTF-8 text \\(byte 10\\)"):
        catalogue.read_entries("ours.toml")


def test_a_profile_above_the_size_limit_is_refused(own_folder, monkeypatch):
    monkeypatch.setattr(catalogue, "MAX_PROFILE_BYTES", 10)
    write(own_folder, "ours.toml", HEADER)
    with pytest.raises(ProfileError, match="larger than"):
        catalogue.read_entries("ours.toml")


def test_an_unknown_packaged_profile_is_named(own_folder):
    with pytest.raises(ProfileError, match="no packaged profile"):
        catalogue.read_profile("nowhere.toml")


def test_names_list_packaged_and_own_profiles_once(own_folder):
    write(own_folder, "pathways/ours.toml", HEADER)
    names = catalogue.profile_names("pathways")
    assert "pathways/ours.toml" in names
    assert "pathways/bts_2022_adult.toml" in names
    assert len(names) == len(set(names))
