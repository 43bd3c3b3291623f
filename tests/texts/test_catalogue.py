import re
import string
from datetime import date, datetime

import pytest

from planner.papers import fonts
from planner.texts.catalogue import available, own_keys, texts_for


def places(message):
    return {name for _, name, _, _ in string.Formatter().parse(message) if name is not None}


def test_american_and_british_are_there_and_another_locale_gets_the_complete_one():
    assert {"en_GB", "en_US"} <= set(available())
    assert texts_for("xx_XX").locale == "en_GB"


@pytest.mark.parametrize("locale", available())
def test_a_catalogue_has_no_key_and_no_place_that_the_complete_one_lacks(locale):
    complete = own_keys("en_GB")
    for key, message in own_keys(locale).items():
        assert key in complete
        assert places(message) <= places(complete[key]), key


@pytest.mark.parametrize("locale", available())
def test_every_shipped_text_has_its_glyphs(locale):
    for key, message in texts_for(locale).messages.items():
        assert not fonts.has_missing(message), key


def test_spelling_and_dates_follow_the_locale():
    british, american = texts_for("en_GB"), texts_for("en_US")
    day = date(2026, 11, 12)
    assert (british.day(day), american.day(day)) == ("12 November 2026", "November 12, 2026")
    assert british.say("measured.haemoglobin") == "Haemoglobin"
    assert american.say("measured.haemoglobin") == "Hemoglobin"
    assert american.say("measured.pao2", value="6.6 kPa") == "PaO₂ 6.6 kPa"
    assert british.moment(datetime(2026, 11, 12, 7, 5)) == "12 November 2026, 07:05"


def test_american_texts_have_no_british_spelling():
    british = re.compile(r"haem|litre|\bmetre|colour|centre\b|[ln]ised\b|isation|judgement")
    messages = {key: re.sub(r"{.*?}", "", message).lower() for key, message in texts_for("en_US").messages.items()}
    assert [key for key, message in messages.items() if british.search(message)] == []
    assert any(british.search(message.lower()) for message in texts_for("en_GB").messages.values())


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [(0.5, 1, "0.5"), (6.0, 1, "6"), (6.04, 1, "6"), (12345.0, 0, "12,345"), (-0.04, 1, "0"), (-1.5, 1, "−1.5"),
     (100.0, 0, "100"), (0.0, 2, "0")],
)  # fmt: skip
def test_numbers_have_a_leading_zero_no_trailing_one_and_separators(value, digits, text):
    assert texts_for("en_GB").number(value, digits) == text


def test_a_wrong_key_or_a_missing_value_is_not_hidden():
    with pytest.raises(KeyError):
        texts_for("en_GB").say("no.such")
    with pytest.raises(KeyError):
        texts_for("en_GB").say("numbers.percent")


def test_an_unknown_date_is_words():
    assert texts_for("en_GB").day(None) == "date not known"
