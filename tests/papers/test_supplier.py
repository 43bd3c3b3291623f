from planner.papers.supplier import lay_supplier


def shown(desk):
    return " ".join(t.text for page in lay_supplier(desk).pages for t in page.texts()).replace("\u00a0", " ")


def test_every_item_is_listed_with_count_place_and_who_brings_it(demo):
    text = shown(demo)
    for item in demo.plan.kit.items:
        for words in (item.what, item.where, item.brought_by[1:]):
            assert " ".join(words.split()[:2]) in text


def test_deliveries_and_returns_have_place_and_time(first):
    text = shown(first)
    assert "Deliver to Village house, 4 nights, by 16 January 2027, 18:40." in text
    assert "Fetch back what was delivered after Village house, 4 nights, 20 January 2027" in text
    assert "Stationary concentrator at Village house, 4 nights" in text


def test_reserve_and_late_case_are_stated(first):
    text = shown(first)
    assert "Reserve: 25 % more than the plan needs." in text
    assert "every flight 3 h late" in text


def test_regulators_connections_and_blank_contacts_are_there(demo):
    text = shown(demo)
    for words in ("regulator fits the cylinder valve", "Connections fit the country", "Supplier at the destination",
                  "Checked by, date"):  # fmt: skip
        assert words in text


def test_what_is_not_decided_is_not_sized(demo):
    kit = demo.plan.kit
    if kit.undecided:
        assert "Not decided, and so not sized" in shown(demo)
    else:
        assert "Not decided, and so not sized" not in shown(demo)
