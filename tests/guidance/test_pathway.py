"""Guideline pathways: every end is reached, what is missing is named, and being sicker never means less caution."""

import copy
import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.catalogue import profile_names, profile_text
from planner.errors import ProfileError
from planner.guidance.facts import FACTS, Fact
from planner.guidance.pathway import load_pathways, walk
from planner.guidance.pathway_file import FOLDER, read_pathway

PATHWAYS = load_pathways()
UNKNOWN = {name: Fact(None, f"{name} not known") for name in FACTS}
# From the least to the most caution an end asks for; ends of one rank are different kinds of the same care.
CAUTION = {
    "none_advised": 0,
    "individual": 1,
    "walk_test": 2,
    "oxygen": 3,
    "oxygen_usual_plus": 3,
    "challenge": 3,
    "challenge_on_oxygen": 4,
    "refer": 4,
    "against": 5,
}
ADULT = {
    "age_years": 68.0,
    "child": False,
    "diagnosis": "copd",
    "spo2_percent": 97.0,
    "pao2_mmhg": 80.0,
    "fev1_percent": 60.0,
    "tlco_percent": 70.0,
    "walk_lowest_percent": 92.0,
    "mmrc": 1.0,
    "uses_oxygen": False,
    "usual_flow_l_min": None,
    "hypercapnia_risk": False,
    "symptoms_on_past_flight": False,
    "risk_factor": False,
    "exercise_spo2_below_95": True,
    "challenge_done": False,
    "challenge_pao2_mmhg": None,
    "challenge_spo2_percent": None,
    "challenge_fails": None,
    "challenge_oxygen_acidosis": None,
}


def facts(**changes):
    values = ADULT | changes
    return {name: Fact(values[name], f"{name} {values[name]}") for name in FACTS}


def ended(pathway_id, **changes):
    return walk(PATHWAYS[pathway_id], facts(**changes))


def advice(pathway_id, **changes):
    found = ended(pathway_id, **changes)
    assert found.missing is None
    return found.advice.kind


TABLE = [
    # BTS clinical statement 2022 (Thorax 2022;77:329), as read in a published summary
    ("bts_2022_adult", {}, "none_advised"),
    ("bts_2022_adult", {"child": True}, "not_for"),
    ("bts_2022_adult", {"spo2_percent": 94.0}, "oxygen"),
    ("bts_2022_adult", {"spo2_percent": 94.0, "hypercapnia_risk": True}, "challenge_on_oxygen"),
    ("bts_2022_adult", {"spo2_percent": 94.0, "hypercapnia_risk": None}, "challenge_on_oxygen"),
    ("bts_2022_adult", {"uses_oxygen": True}, "oxygen_usual_plus"),
    ("bts_2022_adult", {"uses_oxygen": True, "hypercapnia_risk": True}, "challenge_on_oxygen"),
    ("bts_2022_adult", {"mmrc": 3.0}, "none_advised"),
    ("bts_2022_adult", {"mmrc": 3.0, "walk_lowest_percent": None}, "walk_test"),
    ("bts_2022_adult", {"mmrc": 3.0, "walk_lowest_percent": 83.0}, "oxygen"),
    ("bts_2022_adult", {"mmrc": 3.0, "walk_lowest_percent": 83.0, "hypercapnia_risk": True}, "challenge_on_oxygen"),
    ("bts_2022_adult", {"symptoms_on_past_flight": True}, "oxygen"),
    ("bts_2022_adult", {"symptoms_on_past_flight": True, "hypercapnia_risk": True}, "challenge_on_oxygen"),
    ("bts_2022_adult", {"diagnosis": "neuromuscular"}, "challenge"),
    ("bts_2022_adult", {"diagnosis": "chest_wall"}, "challenge"),
    ("bts_2022_adult", {"diagnosis": "interstitial", "tlco_percent": 49.0}, "oxygen"),
    ("bts_2022_adult", {"diagnosis": "interstitial", "pao2_mmhg": 70.0}, "oxygen"),
    ("bts_2022_adult", {"diagnosis": "interstitial", "tlco_percent": 49.0, "uses_oxygen": True}, "oxygen_usual_plus"),
    ("bts_2022_adult", {"diagnosis": "interstitial"}, "challenge"),
    ("bts_2022_adult", {"diagnosis": "interstitial", "exercise_spo2_below_95": False}, "none_advised"),
    ("bts_2022_adult", {"challenge_done": True, "challenge_fails": True}, "challenge_on_oxygen"),
    ("bts_2022_adult", {"challenge_done": True, "challenge_fails": False}, "none_advised"),
    ("bts_2022_adult", {"challenge_done": True, "challenge_oxygen_acidosis": True}, "against"),
    # 2011 bands (Thorax 2011;66 suppl 1)
    ("bts_2011_bands", {}, "none_advised"),
    ("bts_2011_bands", {"child": True}, "not_for"),
    ("bts_2011_bands", {"uses_oxygen": True}, "individual"),
    ("bts_2011_bands", {"spo2_percent": 91.0}, "oxygen"),
    ("bts_2011_bands", {"spo2_percent": 92.0}, "none_advised"),
    ("bts_2011_bands", {"spo2_percent": 95.0, "risk_factor": True}, "challenge"),
    ("bts_2011_bands", {"spo2_percent": 95.0, "risk_factor": None}, "challenge"),
    ("bts_2011_bands", {"spo2_percent": 96.0, "risk_factor": True}, "none_advised"),
    # Edvardsen A et al., Thorax 2012;67:964
    ("edvardsen_2012_copd", {}, "none_advised"),
    ("edvardsen_2012_copd", {"diagnosis": "asthma"}, "not_for"),
    ("edvardsen_2012_copd", {"spo2_percent": 91.0}, "oxygen"),
    ("edvardsen_2012_copd", {"spo2_percent": 93.0, "walk_lowest_percent": 83.0}, "oxygen"),
    ("edvardsen_2012_copd", {"spo2_percent": 93.0, "walk_lowest_percent": 84.0}, "challenge"),
    ("edvardsen_2012_copd", {"spo2_percent": 93.0, "walk_lowest_percent": None}, "walk_test"),
    ("edvardsen_2012_copd", {"spo2_percent": 97.0, "walk_lowest_percent": 83.0}, "challenge"),
    # thresholds of Barratt SL et al.
    ("ild_thresholds", {}, "not_for"),
    ("ild_thresholds", {"diagnosis": "interstitial", "pao2_mmhg": 60.0}, "oxygen"),
    ("ild_thresholds", {"diagnosis": "interstitial", "pao2_mmhg": 70.0}, "challenge"),
    ("ild_thresholds", {"diagnosis": "interstitial", "tlco_percent": 50.0}, "challenge"),
    ("ild_thresholds", {"diagnosis": "interstitial"}, "none_advised"),
    # SEPAR 2007
    ("separ_2007_zone", {}, "challenge"),
    ("separ_2007_zone", {"child": True}, "not_for"),
    ("separ_2007_zone", {"challenge_done": True, "challenge_pao2_mmhg": 49.9}, "oxygen"),
    ("separ_2007_zone", {"challenge_done": True, "challenge_pao2_mmhg": 50.0}, "individual"),
    ("separ_2007_zone", {"challenge_done": True, "challenge_pao2_mmhg": 55.0}, "individual"),
    ("separ_2007_zone", {"challenge_done": True, "challenge_pao2_mmhg": 56.0}, "none_advised"),
    # children
    ("children", {}, "not_for"),
    ("children", {"child": True, "age_years": 0.5}, "refer"),
    ("children", {"child": True, "age_years": 9.0}, "refer"),
    ("children", {"child": True, "age_years": 9.0, "uses_oxygen": True}, "refer"),
]


@pytest.mark.parametrize(("pathway_id", "changes", "kind"), TABLE)
def test_a_person_is_led_to_the_advice_of_the_guideline(pathway_id, changes, kind):
    assert advice(pathway_id, **changes) == kind


def test_every_end_of_every_pathway_is_reached_by_the_table():
    reached = {(one, ended(one, **changes).advice.text) for one, changes, _ in TABLE}
    ends = {(one.id, node.advice) for one in PATHWAYS.values() for node in one.nodes.values() if node.advice}
    assert ends - reached == set()


@pytest.mark.parametrize("pathway_id", PATHWAYS)
def test_a_missing_fact_is_named_with_its_question(pathway_id):
    pathway = PATHWAYS[pathway_id]
    found = walk(pathway, UNKNOWN)
    first = pathway.nodes[pathway.start]
    assert found.status == "missing"
    assert found.missing.name == first.fact
    assert found.missing.question == FACTS[first.fact].question
    assert found.advice is None


@pytest.mark.parametrize(
    ("pathway_id", "missing", "changes"),
    [
        ("bts_2022_adult", "spo2_percent", {"spo2_percent": None}),
        ("bts_2022_adult", "diagnosis", {"diagnosis": None}),
        ("bts_2022_adult", "mmrc", {"mmrc": None}),
        ("bts_2022_adult", "uses_oxygen", {"uses_oxygen": None}),
        ("bts_2022_adult", "pao2_mmhg", {"diagnosis": "interstitial", "pao2_mmhg": None}),
        ("edvardsen_2012_copd", "spo2_percent", {"spo2_percent": None}),
        ("ild_thresholds", "tlco_percent", {"diagnosis": "interstitial", "tlco_percent": None}),
        ("separ_2007_zone", "challenge_pao2_mmhg", {"challenge_done": True}),
        ("children", "age_years", {"child": True, "age_years": None}),
    ],
)
def test_a_walk_stops_at_the_fact_it_needs_and_nobody_entered(pathway_id, missing, changes):
    assert ended(pathway_id, **changes).missing.name == missing


def test_the_story_tells_each_turn_with_its_fact_and_source():
    found = ended("bts_2022_adult", spo2_percent=94.0)
    assert [step.answer for step in found.steps][-2:] == ["below 95 %", "no"]
    assert all(step.question and step.fact_text and step.source for step in found.steps)
    assert found.flow_rule.kind == "fixed"
    assert found.flow_rule.l_min == 2.0
    assert ended("bts_2022_adult", uses_oxygen=True).flow_rule.kind == "usual_plus"


number = st.floats(0.0, 120.0)
values = st.fixed_dictionaries(
    {
        name: st.none()
        | (st.booleans() if FACTS[name].kind == "yes_no" else st.sampled_from(["copd", "interstitial", "other"])
           if FACTS[name].kind == "choice" else number)
        for name in FACTS
    }
)  # fmt: skip


@settings(max_examples=200)
@given(values=values, pathway_id=st.sampled_from(sorted(PATHWAYS)))
def test_any_facts_end_in_advice_or_in_a_named_missing_fact(values, pathway_id):
    found = walk(PATHWAYS[pathway_id], {name: Fact(value, "") for name, value in values.items()})
    assert (found.advice is None) != (found.missing is None)
    assert found.status in ("advice", "missing", "not for this person")


@pytest.mark.parametrize(
    ("changes", "kind"),
    [
        ({"hypercapnia_risk": True}, "challenge_on_oxygen"),
        ({"hypercapnia_risk": None}, "challenge_on_oxygen"),
        ({"hypercapnia_risk": False}, "challenge"),
        ({"uses_oxygen": True, "hypercapnia_risk": True}, "challenge_on_oxygen"),
        ({"uses_oxygen": True, "hypercapnia_risk": False}, "oxygen_usual_plus"),
    ],
)
def test_a_fall_on_exertion_does_not_hide_a_carbon_dioxide_risk_or_home_oxygen(changes, kind):
    person = {"diagnosis": "interstitial", "spo2_percent": 93.0, "exercise_spo2_below_95": True} | changes
    assert ended("bts_2022_adult", **person).advice.kind == kind


LOWER_IS_SICKER = ("spo2_percent", "pao2_mmhg", "fev1_percent", "tlco_percent", "walk_lowest_percent")
YES_IS_SICKER = ("hypercapnia_risk", "symptoms_on_past_flight", "risk_factor", "exercise_spo2_below_95")
known = st.fixed_dictionaries(
    {
        "diagnosis": st.sampled_from(["copd", "interstitial", "asthma", "neuromuscular"]),
        "spo2_percent": st.floats(85.0, 100.0),
        "pao2_mmhg": st.floats(45.0, 100.0),
        "fev1_percent": st.floats(20.0, 110.0),
        "tlco_percent": st.floats(20.0, 110.0),
        "walk_lowest_percent": st.floats(70.0, 99.0),
        "mmrc": st.floats(0.0, 4.0),
        "uses_oxygen": st.booleans(),
        **{name: st.booleans() for name in YES_IS_SICKER},
    }
)


@settings(max_examples=300)
@given(
    person=known,
    worse=st.sampled_from([*LOWER_IS_SICKER, "mmrc", *YES_IS_SICKER]),
    by=st.floats(0.1, 20.0),
    pathway_id=st.sampled_from(["bts_2022_adult", "bts_2011_bands", "edvardsen_2012_copd", "ild_thresholds"]),
)
def test_being_sicker_never_yields_less_caution(person, worse, by, pathway_id):
    if worse in YES_IS_SICKER:
        sicker = person | {worse: True}
    else:
        sicker = person | {worse: person[worse] + by if worse == "mmrc" else max(person[worse] - by, 0.0)}
    before, after = (ended(pathway_id, **one) for one in (person, sicker))
    if before.status == after.status == "advice":
        assert CAUTION[after.advice.kind] >= CAUTION[before.advice.kind]


@pytest.mark.parametrize("pathway_id", PATHWAYS)
def test_a_test_below_its_threshold_is_never_less_cautious_than_one_above(pathway_id):
    low = {"challenge_done": True, "challenge_fails": True, "challenge_pao2_mmhg": 45.0}
    high = {"challenge_done": True, "challenge_fails": False, "challenge_pao2_mmhg": 60.0}
    below, above = (ended(pathway_id, **one) for one in (low, high))
    if below.status == above.status == "advice":
        assert CAUTION[below.advice.kind] >= CAUTION[above.advice.kind]


@pytest.mark.parametrize("name", profile_names(FOLDER))
def test_no_text_of_a_pathway_gives_a_verdict_of_harmlessness(name):
    text = profile_text(name).lower()
    for words in ("safe", "fit to fly", "cleared"):
        assert words not in text


def table():
    return tomllib.loads(profile_text("pathways/edvardsen_2012_copd.toml"))


def broken(change):
    content = copy.deepcopy(table())
    change(content)
    with pytest.raises(ProfileError) as refusal:
        read_pathway("ours.toml", content)
    return str(refusal.value)


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lambda t: t.pop("source"), "source: a text is needed"),
        (lambda t: t.pop("node"), "tables [node.NAME] are needed"),
        (lambda t: t["node"]["resting_low"].update(fact="shoe_size"), "'shoe_size' is not a fact this program knows"),
        (lambda t: t["node"]["resting_low"].update(then="nowhere"), "leads to 'nowhere'"),
        (lambda t: t["node"]["resting_high"].update(then="resting_low"), "goes in a circle"),
        (lambda t: t["node"].update(lost=t["node"]["oxygen"]), "no path leads to this node"),
        (lambda t: t["node"]["oxygen"].pop("source"), "every node needs its source"),
        (lambda t: t["node"]["oxygen"].update(kind="hooray"), "one of none_advised"),
        (lambda t: t["node"]["nothing"].update(advice="It is safe to fly."), "a verdict this program does not give"),
        (lambda t: t["node"]["nothing"].update(advice="Fit to fly."), "a verdict this program does not give"),
        (lambda t: t["node"]["resting_low"].pop("below"), "needs `below`"),
        (lambda t: t["node"]["resting_low"].pop("otherwise"), "the name of a node is needed"),
        (lambda t: t["node"]["diagnosis"].pop("choices"), "choice = node is needed"),
        (lambda t: t["node"]["oxygen"].update(flow_l_min=6), "from 0.1 to 4 L/min"),
        (lambda t: t["node"]["oxygen"].update(colour="red"), "this key is not known"),
        (lambda t: t.update(start="nowhere"), "leads to 'nowhere'"),
    ],
)
def test_a_faulty_pathway_file_is_refused_with_where_and_why(change, said):
    message = broken(change)
    assert said in message
    assert "ours.toml" in message


def test_a_service_can_add_a_pathway_and_replace_one(tmp_path, monkeypatch):
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))
    (tmp_path / "pathways").mkdir()
    text = profile_text("pathways/edvardsen_2012_copd.toml")
    (tmp_path / "pathways" / "ours.toml").write_text(text.replace('id = "edvardsen_2012_copd"', 'id = "ours"'), "utf-8")
    (tmp_path / "pathways" / "edvardsen_2012_copd.toml").write_text(text.replace("version = 1", "version = 7"), "utf-8")
    loaded = load_pathways()
    assert "ours" in loaded
    assert loaded["edvardsen_2012_copd"].version == 7
    assert loaded["bts_2022_adult"].version == 1


def test_a_pathway_file_changed_meanwhile_is_read_anew(tmp_path, monkeypatch):
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))
    (tmp_path / "pathways").mkdir()
    own, text = tmp_path / "pathways" / "edvardsen_2012_copd.toml", profile_text("pathways/edvardsen_2012_copd.toml")
    for version in (7, 8):
        own.write_text(text.replace("version = 1", f"version = {version}"), "utf-8")
        assert load_pathways()["edvardsen_2012_copd"].version == version
        assert load_pathways()["edvardsen_2012_copd"] is load_pathways()["edvardsen_2012_copd"]
