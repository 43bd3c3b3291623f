"""The card's words against a published reading formula."""

import re

import pytest

from planner.texts.catalogue import available, texts_for

CARD = ("call_emergency", "setting_note", "stay_flow", "stay_on", "nothing_decided", "readings_how", "readings_none",
        "full_first", "late", "breathless", "alarm", "lost", "drowsy", "fire_smoke", "fire_flame", "fire_cream",
        "fire_car", "fire_off")  # fmt: skip


def syllables(word):
    groups = len(re.findall(r"[aeiouy]+", word))
    silent = word.endswith("e") and not word.endswith(("le", "ee")) and groups > 1
    return max(1, groups - silent)


def grade(text):
    """Flesch-Kincaid grade: 0.39 words a sentence + 11.8 syllables a word - 15.59 (Kincaid 1975)."""
    sentences = [s for s in re.split(r"[.!?:]+", text) if s.strip()]
    words = re.findall(r"[a-z']+", text.lower())
    return 0.39 * len(words) / len(sentences) + 11.8 * sum(map(syllables, words)) / len(words) - 15.59


def test_the_formula_tells_plain_from_hard():
    assert grade("The cat sat on the mat. The dog ran.") < 1
    assert grade("Supplementary oxygen administration necessitates individualised titration by physicians.") > 15


@pytest.mark.parametrize("locale", available())
def test_the_card_reads_at_the_age_of_twelve_or_younger(locale):
    texts = texts_for(locale)
    messages = [texts.messages[f"traveller.{key}"].replace("{distance}", "3 metres") for key in CARD]
    assert grade(" ".join(messages)) <= 5.0  # school year 5 to 6 begins at the age of ten to eleven
    for key, message in zip(CARD, messages, strict=True):
        assert grade(message) <= 7.0, key


@pytest.mark.parametrize("locale", available())
def test_no_sentence_of_the_card_is_longer_than_twenty_words(locale):
    for key in CARD:
        for sentence in re.split(r"[.!?]", texts_for(locale).messages[f"traveller.{key}"]):
            assert len(sentence.split()) <= 20
