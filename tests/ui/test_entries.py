"""Entries: a number is never changed into another, what was typed stays, the range is said, the other unit is asked."""

from datetime import date, time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.ui.driver import BACKSPACE, ESCAPE
from ui import measures
from ui.widgets.typing import date_text, parse_date, parse_duration, parse_number, parse_time


def number(bench, value=None, **keywords):
    from ui.widgets.entries import NumberEntry

    got, faults = [], []
    keywords.setdefault("measure", measures.plain_measure("years", 0))
    entry = NumberEntry("Age", value, low=0.0, high=120.0, **keywords, on_value=got.append, on_fault=faults.append)
    return bench(entry), entry, got, faults


def test_a_comma_is_a_decimal_point(bench):
    driver, entry, got, _ = number(bench, measure=measures.plain_measure("kPa", 1))
    driver.fill(entry, "12,5")
    assert entry.input.text == "12.5"
    assert got[-1] == 12.5


def test_letters_are_refused_and_said(bench):
    driver, entry, got, _ = number(bench)
    driver.fill(entry, "6x")
    assert entry.input.text == "6"
    assert "x was not taken" in entry.fault_text.text
    assert got[-1] == 6.0


def test_a_paste_with_a_unit_is_refused_whole(bench):
    driver, entry, _, _ = number(bench)
    driver.tap(entry.input)
    entry.input.insert_text("1e3")
    entry.input.insert_text("12.5 L")
    assert entry.input.text == ""


def test_the_range_is_said_before_it_is_broken(bench):
    _, entry, _, _ = number(bench)
    assert entry.hint.text == "0 to 120 years"


def test_what_is_out_of_range_stays_and_is_said_and_not_taken(bench):
    driver, entry, got, faults = number(bench, 70.0)
    driver.fill(entry, "150")
    assert entry.input.text == "150"
    assert "0 to 120 years can be used here; 150 years was typed." in entry.fault_text.text
    assert faults[-1] == entry.fault
    assert got[-1] == 70.0  # neither 150 nor its beginning, 15
    driver.key(BACKSPACE)
    assert entry.fault == ""
    assert got[-1] == 15.0


def test_an_emptied_field_means_not_known(bench):
    driver, entry, got, _ = number(bench, 70.0)
    driver.tap(entry.input)
    driver.key(BACKSPACE, times=2)
    assert got[-1] is None


def test_the_beginning_of_a_right_number_is_not_called_wrong_until_the_field_is_left(bench):
    from ui.widgets.entries import NumberEntry

    got = []
    entry = NumberEntry("SpO2", None, measure=measures.plain_measure("%", 0), low=30.0, high=100.0, on_value=got.append)
    driver = bench(entry)
    driver.tap(entry.input)
    driver.type("9")
    assert (entry.fault, got) == ("", [])
    driver.key(ESCAPE)
    assert "30 to 100 % can be used here; 9 % was typed." in entry.fault
    driver.tap(entry.input)
    driver.type("3")
    assert (entry.fault, got[-1]) == ("", 93.0)


def test_half_a_date_is_called_wrong_only_when_the_field_is_left(bench):
    from ui.widgets.entries import DateEntry

    got = []
    entry = DateEntry("Taken on", None, on_value=got.append)
    driver = bench(entry)
    driver.tap(entry.input)
    driver.type("12 No")
    assert entry.fault == ""
    driver.key(ESCAPE)
    assert entry.fault == "Write day, month and year, for example 12 Nov 2026."
    assert entry.input.text == "12 No"
    driver.tap(entry.input)
    driver.type("v 2026")
    assert got[-1] == date(2026, 11, 12)


def test_a_comma_typed_as_a_thousands_mark_is_asked_about(bench):
    driver, entry, got, _ = number(bench)
    driver.fill(entry, "2,400")
    assert "could be 2.4 or 2400" in entry.fault
    assert got[-1] is None


def gas(bench, unit):
    from ui.widgets.entries import NumberEntry

    got = []
    entry = NumberEntry(
        "PaO2", None, measure=measures.pressure(unit), low=15.0, high=700.0, usual=(30.0, 130.0), on_value=got.append
    )
    return bench(entry), entry, got


def test_a_gas_of_9_mmhg_is_asked_about_and_taken_as_kpa(bench):
    driver, entry, got = gas(bench, "mmHg")
    driver.fill(entry, "9")
    assert driver.reads("Was 9 kPa meant?")
    assert set(got) <= {None}
    driver.tap("Yes, 9 kPa")
    assert got[-1] == pytest.approx(67.506, abs=0.001)  # 9000 Pa / 133.322387415 Pa
    assert entry.input.text == "68"
    assert not driver.reads("meant?")


def test_a_gas_of_66_kpa_is_asked_about_and_may_be_kept(bench):
    driver, _, got = gas(bench, "kPa")
    driver.fill(driver.field("PaO2"), "66")
    assert driver.reads("Was 66 mmHg meant?")
    assert got[-1] is None  # nothing is taken until the question is answered
    driver.tap("No, 66 kPa is right")
    assert not driver.reads("meant?")
    assert got[-1] == pytest.approx(495.04, abs=0.01)


def test_a_usual_gas_is_not_asked_about(bench):
    driver, entry, _ = gas(bench, "kPa")
    driver.fill(entry, "8.8")
    assert not driver.reads("meant?")


@pytest.mark.parametrize(
    ("typed", "day"),
    [
        ("12 Nov 2026", date(2026, 11, 12)),
        ("12.11.2026", date(2026, 11, 12)),
        ("3/4/2026", date(2026, 4, 3)),
        ("2026-11-12", date(2026, 11, 12)),
        ("today", date(2026, 12, 1)),
        ("", None),
    ],
)
def test_dates_are_read_day_before_month(typed, day):
    assert parse_date(typed, lambda: date(2026, 12, 1)) == day


@pytest.mark.parametrize("typed", ["31 Feb 2026", "12", "12 Nov", "yesterday"])
def test_what_is_no_date_is_refused_with_a_sentence(typed):
    with pytest.raises(ValueError, match=r"\.$"):
        parse_date(typed)


@given(st.dates(min_value=date(1900, 1, 1), max_value=date(2100, 1, 1)))
@settings(max_examples=50)
def test_a_date_reads_back_as_it_is_shown(day):
    assert parse_date(date_text(day)) == day


@pytest.mark.parametrize(
    ("typed", "minutes"),
    [
        ("3 h 20", 200),
        ("3h20", 200),
        ("3:20", 200),
        ("3,5", 210),
        ("45 min", 45),
        ("4 d", 5760),
        ("1 d 6 h", 1800),
        ("", None),
    ],
)
def test_durations_are_read_as_people_write_them(typed, minutes):
    assert parse_duration(typed) == minutes


@given(st.integers(min_value=1, max_value=60 * 24 * 60))
@settings(max_examples=80)
def test_a_duration_in_whole_minutes_up_to_a_day_reads_back_as_it_is_shown(minutes):
    shown = measures.hours_minutes(minutes)
    exact = minutes < 1440 or minutes % 60 == 0
    assert parse_duration(shown) == (minutes if exact else minutes - minutes % 60)


@pytest.mark.parametrize("typed", ["abc", "3 h 20 x", "-3"])
def test_what_is_no_duration_is_refused(typed):
    with pytest.raises(ValueError, match="Write hours and minutes"):
        parse_duration(typed)


def test_times_of_day_are_read():
    assert parse_time("7:30") == time(7, 30)
    assert parse_time("0730") == time(7, 30)
    assert parse_time("7") == time(7)
    with pytest.raises(ValueError, match="hours and minutes"):
        parse_time("24:00")


@given(st.floats(min_value=-400, max_value=9000, allow_nan=False))
@settings(max_examples=60)
def test_a_shown_number_has_a_leading_zero_no_trailing_zero_and_reads_back(value):
    shown = measures.number_text(value, 1)
    assert not shown.startswith((".", "−."))
    assert not ("." in shown and shown.endswith("0"))
    assert parse_number(shown.replace(measures.THIN_SPACE, "")) == pytest.approx(value, abs=0.0501)


def test_altitudes_and_pressures_convert_exactly():
    assert measures.altitude("ft").with_unit(2438.4) == "8\u202f000 ft"
    assert measures.altitude("ft").stored(8000.0) == pytest.approx(2438.4)
    assert measures.pressure("kPa").with_unit(49.5) == "6.6 kPa"
    assert measures.barometric("kPa").with_unit(760.0) == "1\u202f013 hPa"


def test_no_text_on_a_screen_breaks_a_line_between_a_number_and_its_unit(bench):
    from kivy.uix.boxlayout import BoxLayout

    from ui.widgets.text import Text

    column = BoxLayout(orientation="vertical")
    texts = [
        Text("PaO₂ 6.6 kPa at 738 mmHg, SpO₂ 86 % at 2438 m (8000 ft) for 3.5 h", size_hint_x=None, width=width)
        for width in range(110, 340, 7)
    ]
    for text in texts:
        column.add_widget(text)
    bench(column)
    starts = set()
    for text in texts:
        lines = ["".join(word.text for word in line.words).strip() for line in text._label._cached_lines]
        assert len(lines) > 1
        starts |= {line.split()[0] for line in lines}
        assert "\u00a0" not in text.text  # what is read and copied stays as it was given
    assert not starts & {"kPa", "mmHg,", "%", "m", "ft)", "h"}
