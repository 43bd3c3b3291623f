from planner.case.measurements import BloodGas, Challenge, ChallengeGas, ChallengeRow, Oximetry, Place
from planner.charts.layout import Band, Marker, Text
from planner.papers import lay_paper, make_papers
from planner.papers.painter import pdf_bytes
from planner.papers.record import lay_record, make_record
from planner.papers.record_guidance import write_pathways
from tests.papers.conftest import demo_case
from tests.papers.geometry import beyond_margins, overlaps, read

ENDS = ("median", "low", "high")


def shown(desk):
    _, pages = read(pdf_bytes(lay_record(desk)))
    return " ".join(pages)


def in_chosen_unit(mmhg, unit):
    """A pressure as printed: kPa to one decimal, mmHg whole; no trailing zero."""
    return f"{mmhg * 0.1333223874:.1f}".removesuffix(".0") if unit == "kPa" else f"{mmhg:.0f}"


def test_every_forecast_number_is_the_plans(demo):
    text = shown(demo)
    unit = demo.case.display.pressure
    for part in demo.plan.parts:
        for activity in part.forecast.activities if part.forecast else ():
            spo2 = activity.spo2
            if spo2 is not None and not activity.below_model_range:
                assert f"{spo2.median:.0%} ({spo2.low * 100:.0f} to {spo2.high * 100:.0f})".replace("%", " %") in text
                value, low, high = (in_chosen_unit(getattr(activity.pao2_mmhg, end), unit) for end in ENDS)
                assert f"{value} {unit} ({low} to {high})" in text


def test_every_method_is_there_with_source_formula_and_people(demo):
    text = shown(demo)
    for part in demo.plan.parts:
        for activity in part.forecast.activities if part.forecast else ():
            for predictor in activity.predictors:
                for words in (predictor.label, predictor.source, predictor.formula, predictor.population):
                    assert " ".join(words.split()[:3]) in text


def test_every_measurement_is_there_with_its_date(first):
    text = shown(first)
    gas = next(m for m in first.case.measurements if isinstance(m, BloodGas))
    pao2 = f"PaO₂ {gas.pao2_mmhg * 0.1333224:.1f} kPa ({gas.pao2_mmhg:.0f} mmHg)"
    for words in (pao2, "12 November 2026", "Arterial blood gas", "pH 7.41", "SpO₂ 93 %", "FEV₁ 0.94 L", "13.9 g/dL",
                  "310 m"):  # fmt: skip
        assert words in text


def test_every_decision_is_there_with_who_and_when(first):
    text = shown(first)
    assert "Dr A. Example, respiratory physician" in text
    assert "24 November 2026" in text
    assert text.count("3 L/min by nasal cannula") >= sum(d.flow_l_min == 3.0 for d in first.case.decisions)


def test_the_pathway_story_has_each_step_and_its_end(demo):
    flow = demo.upright(9.5)
    write_pathways(flow, demo)
    text = " ".join(i.text for _, items in flow.panels for i in items if isinstance(i, Text)).replace("\u00a0", " ")
    assert demo.plan.pathways
    for pathway in demo.plan.pathways:
        assert pathway.title in text
        for step in pathway.steps:
            assert " ".join(step.question.split()[:3]) in text
            assert step.answer in text
        if pathway.advice:
            assert " ".join(pathway.advice.text.split()[:5]) in text


def test_both_ribbons_and_the_method_marks_are_drawn(first):
    items = [item for page in lay_record(first).pages for item in page.items]
    bands = [item.role for item in items if isinstance(item, Band)]
    assert bands.count("silhouette") >= 2
    assert "data_soft" in bands
    shapes = {item.shape for item in items if isinstance(item, Marker)}
    assert {"dot", "ring"} <= shapes


def test_a_challenge_is_drawn_and_read_with_its_own_mixture_and_pressure(plans):
    case = demo_case()
    rows = tuple(
        ChallengeRow(at_min=float(t), phase="before" if t < 5 else "challenge", spo2_percent=94.0 - min(t, 9.0),
                     heart_rate_min=80.0 + t)
        for t in range(25)
    )  # fmt: skip
    test = Challenge(
        taken_on=case.measurements[0].taken_on,
        state="stable",
        place=Place(elevation_m=580.0),
        challenge_fio2=0.163,  # at 580 m the air of a cabin at 8,000 ft
        method="mask",
        duration_min=20.0,
        rows=rows,
        gases=(ChallengeGas(phase="challenge", pao2_mmhg=47.0, paco2_mmhg=38.0, ph=7.44),),
    )
    case, result = plans(case.model_copy(update={"measurements": (*case.measurements, test)}))
    paper = lay_paper("record", case, result)
    _, pages = read(pdf_bytes(paper))
    text = " ".join(pages)
    assert "16.3 % oxygen" in text
    assert "Heart rate, beats a minute" in text
    assert "PaO₂ 6.3 kPa (47 mmHg)" in text
    assert any(isinstance(i, Marker) and i.shape == "diamond" for page in paper.pages for i in page.items)
    assert all(beyond_margins(page, 36.0) == [] and overlaps(page) == [] for page in paper.pages)


def test_oximetry_alone_gives_a_record_with_a_forecast(plans):
    case = demo_case()
    only = tuple(m for m in case.measurements if isinstance(m, Oximetry))
    assert not any(isinstance(m, BloodGas) for m in only)
    case, result = plans(case.model_copy(update={"measurements": only}))
    _, pages = read(make_record(result, case))
    text = " ".join(pages)
    assert result.lung is not None
    assert "At a glance" in text
    assert "narrow the spread of PaO₂" in text


def test_the_record_holds_assumptions_and_sources(first):
    text = shown(first)
    sources = {pathway.source for pathway in first.plan.pathways} | {
        line.source for line in first.plan.trace if line.source
    }
    assert len(sources) > 3
    for words in ("Assumptions", "8,000 ft", "West 1996", "Sources", *sources):
        assert " ".join(words.split()[:4]) in text


def test_decisions_whose_inputs_have_changed_are_named(plans):
    case = demo_case()
    fresh = case.decision_digest()
    for stale in (1, len(case.decisions)):
        decisions = tuple(
            d.model_copy(update={"resting_on": "0" * 64 if number < stale else fresh})
            for number, d in enumerate(case.decisions)
        )
        planned = plans(case.model_copy(update={"decisions": decisions}))
        _, pages = read(make_record(planned[1], planned[0]))
        text = " ".join(pages)
        if stale == 1:
            assert "decided again: Road over the pass, at rest." in text
        else:
            assert "since these flows were decided. They need to be decided again." in text


def test_a_missing_decision_is_said_and_nothing_is_sized(plans):
    case, result = plans(demo_case().model_copy(update={"decisions": ()}))
    _, pages = read(make_papers(case, result)["record"])
    assert "No flow has been decided. Nothing is sized" in " ".join(pages)
