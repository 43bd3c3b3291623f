from planner.papers import fonts


def test_what_the_font_has_stays_and_accents_are_composed():
    assert fonts.printable("Zoë Łukasz, Ærø ₂ ± ≥") == "Zoë Łukasz, Ærø ₂ ± ≥"
    assert fonts.printable("e\u0301") == "é"


def test_a_run_of_missing_letters_gives_one_mark():
    assert fonts.printable("name 中文字 end") == "name [?] end"
    assert fonts.has_missing("中")
    assert not fonts.has_missing("typed [?] by hand")


def test_control_and_direction_marks_are_dropped_and_odd_spaces_are_spaces():
    assert fonts.printable("a\u202eb\u200bc\u0007d\u2003e") == "abcd e"


def test_widths_follow_the_weight():
    assert fonts.width("Oxygen", 10.0, bold=True) > fonts.width("Oxygen", 10.0) > 0
    assert fonts.measure("Oxygen", 20.0) == 2 * fonts.measure("Oxygen", 10.0)
