"""The checks that run on every screen find what they are for: each is shown a screen with that fault."""

import pytest
from kivy.uix.floatlayout import FloatLayout
from kivy.uix.label import Label

from tests.ui import checks
from ui.theme import FONT, theme


@pytest.fixture
def faults(bench):
    """Faults of a screen that holds one widget at a place."""

    def show(*widgets):
        holder = FloatLayout()
        for widget in widgets:
            holder.add_widget(widget)
        return checks.all_faults(bench(holder))

    return show


def label(text="Whole", **keywords):
    keywords = {"size_hint": (None, None), "size": (200, 60), "pos": (60, 400), "color": theme.ink} | keywords
    return Label(text=text, font_name=FONT, **keywords)


def test_a_good_text_has_no_fault_but_the_missing_caution(faults):
    assert set(faults(label())) == {"caution"}


def test_a_clipped_text_is_found(faults):
    assert "clipped" in faults(label("Much too long for its box", size=(60, 60)))


def test_a_text_without_height_is_found(faults):
    assert "clipped" in faults(label(size=(200, 2)))


def test_a_small_target_is_found(faults):
    from ui.widgets.reach import Tappable

    assert "small" in faults(Tappable(size_hint=(None, None), size=(100, 40)))


def test_a_widget_outside_its_parent_is_found(faults):
    assert "outside" in faults(label(pos=(300, 400)))


def test_overlapping_texts_are_found(faults):
    assert "overlapping" in faults(label("One"), label("Other", pos=(100, 420)))


def test_a_character_without_glyph_is_found(faults):
    assert "glyphs" in faults(label("Half ◐"))


def test_a_weak_text_is_found(faults):
    assert "weak" in faults(label(color=theme.line))


def test_a_screen_with_the_caution_strip_has_it(faults):
    from ui.widgets.notices import CautionStrip

    assert "caution" not in faults(CautionStrip(pos=(20, 20), size_hint_x=None, width=350))
