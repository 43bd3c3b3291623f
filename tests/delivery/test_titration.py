"""Which flow the model proposes, where it stops, and what a decided flow would give."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.air.atmosphere import isa_pressure_mmhg
from planner.delivery.decided import Dose, with_decisions
from planner.delivery.devices import load_devices
from planner.delivery.effect import usual_spread
from planner.delivery.titration import Condition, Target, rule_amount, titrate, with_decision
from planner.errors import InputError
from planner.lung.fitting import LungReading, Person, fit_lung

DEVICES = load_devices()
CABIN_MMHG = float(isa_pressure_mmhg(2438.4))


def fitted(pao2_mmhg, paco2_mmhg=40.0, hyperventilates=True):
    reading = LungReading(760.0, 0.2093, pao2_mmhg=pao2_mmhg, paco2_mmhg=paco2_mmhg, sample="arterial", age_days=1.0)
    return fit_lung([reading], Person(diagnosis="copd", age_years=66.0, can_hyperventilate=hyperventilates), draws=300)


MODERATE = fitted(68.0)
SEVERE = fitted(48.0, 50.0, hyperventilates=False)
WELL = fitted(95.0, 38.0)


def at(altitude_m, activity="rest", **rest):
    pressure = float(isa_pressure_mmhg(altitude_m))
    return Condition("part", activity, pressure, 0.2093 * (pressure - 47.0), **rest)


def one(lung, condition, names, target):
    (found,) = titrate(lung, [condition], [DEVICES[name] for name in names], target)
    return found


NO_RISK = Target(0.88, None, 0.9, "no")
RISK = Target(0.88, None, 0.9, "yes")


def test_the_smallest_step_that_reaches_the_target_with_the_confidence_is_proposed():
    found = one(MODERATE, at(2438.4), ["cannula"], NO_RISK)
    (curve,) = found.curves
    place = list(curve.amounts).index(found.model_amount)
    assert found.reaches_target
    assert found.model_device_id == "cannula"
    assert place > 0
    assert curve.chance_reaching[place] >= 0.9 > curve.chance_reaching[place - 1]
    assert found.model_chance == curve.chance_reaching[place]
    assert f"{found.model_amount:g} L/min by nasal cannula" in found.text
    assert found.model_amount_text == f"{found.model_amount:g} L/min by nasal cannula"
    assert found.warnings == ()


def test_the_chance_counts_the_draws_of_the_lung_itself():
    """Counted here from the lung and the gains, by hand, for 2 L/min."""
    spread = usual_spread(300)
    found = titrate(MODERATE, [at(2438.4)], [DEVICES["cannula"]], NO_RISK, spread=spread)[0].curves[0]
    place = list(found.amounts).index(2.0)
    inspired = 0.2093 * (CABIN_MMHG - 47.0) + 2.0 * spread.gain_mmhg_per_l_min[:, None]
    blood = MODERATE.arterial(inspired, CABIN_MMHG)
    assert found.chance_reaching[place] == pytest.approx((blood.saturation >= 0.88).mean())
    np.testing.assert_allclose(
        [found.spo2_low[place], found.spo2_median[place], found.spo2_high[place]],
        np.quantile(blood.saturation, [0.05, 0.5, 0.95]),
    )
    assert found.pao2_median_mmhg[place] == pytest.approx(np.median(blood.po2_mmhg))


def test_more_confidence_never_asks_for_less():
    amounts = [
        one(MODERATE, at(2438.4), ["cannula"], Target(0.88, None, share, "no")).model_amount
        for share in (0.5, 0.7, 0.9, 0.95)
    ]
    assert amounts == sorted(amounts)
    assert amounts[-1] > amounts[0]


@settings(max_examples=15, deadline=None)
@given(st.floats(0.0, 3500.0), st.sampled_from(["cannula", "pulse_conserver", "reservoir_cannula"]))
def test_more_oxygen_never_lowers_the_saturation(altitude, name):
    (curve,) = one(MODERATE, at(altitude), [name], NO_RISK).curves
    for line in (curve.spo2_low, curve.spo2_median, curve.spo2_high, curve.pao2_median_mmhg, curve.chance_reaching):
        assert (np.diff(line) >= -1e-9).all()


def test_no_oxygen_is_proposed_where_none_is_needed():
    found = one(WELL, at(0.0), ["cannula"], RISK)
    assert found.model_amount == 0.0
    assert found.model_device_id is None
    assert found.reaches_target
    assert found.model_amount_text == "no added oxygen"
    assert "Without added oxygen" in found.text


def test_above_four_litres_is_never_proposed_and_a_specialist_is_advised_instead():
    found = one(SEVERE, at(2438.4, "walking"), ["cannula", "venturi_40", "reservoir_mask"], NO_RISK)
    mask = found.curves[2]
    assert mask.chance_reaching[-1] >= 0.9  # more than 4 L/min would reach it
    assert all(one.advised is None for one in found.curves)
    assert found.model_amount is None
    assert not found.reaches_target
    assert found.specialist_advised
    assert "up to 4 L/min" in found.text
    assert "Specialist assessment is advised." in found.text


@settings(max_examples=25, deadline=None)
@given(
    st.sampled_from([MODERATE, SEVERE, WELL]),
    st.sampled_from(["rest", "walking", "asleep"]),
    st.floats(0.0, 4000.0),
    st.floats(0.82, 0.95),
    st.sampled_from(["yes", "no"]),
)
def test_whatever_is_asked_no_proposal_is_above_four_litres_or_likely_above_the_ceiling(
    lung, activity, altitude, low, risk
):
    target = Target(low, 0.97, 0.9, risk)
    found = titrate(lung, [at(altitude, activity)], DEVICES, target)[0]
    if found.model_amount:
        curve = next(one for one in found.curves if one.device_id == found.model_device_id)
        place = list(curve.amounts).index(found.model_amount)
        assert curve.unit == "setting" or found.model_amount <= 4.0
        if risk == "yes":
            assert curve.chance_above_ceiling[place] <= 0.5


def test_with_carbon_dioxide_risk_the_ceiling_holds_back_and_says_so():
    target = Target(0.90, 0.92, 0.95, "yes")
    free = one(MODERATE, at(1500.0), ["cannula"], Target(0.90, 0.92, 0.95, "no"))
    held = one(MODERATE, at(1500.0), ["cannula"], target)
    assert free.reaches_target
    assert not held.reaches_target
    assert held.model_amount < free.model_amount
    assert "not likely to pass 92 %" in held.text
    assert "blood gas on oxygen" in held.text
    assert held.specialist_advised


def test_a_target_above_the_ceiling_of_a_person_at_risk_is_held_back_and_not_an_error():
    found = one(MODERATE, at(2438.4), ["cannula"], Target(0.94, None, 0.9, "not known"))
    assert not found.reaches_target
    assert found.model_amount is not None
    assert "not likely to pass 92 %" in found.text


def test_with_carbon_dioxide_risk_a_proposed_flow_never_comes_without_the_chance_of_passing_the_ceiling():
    found = one(MODERATE, at(2438.4), ["cannula"], Target(0.86, None, 0.9, "not known"))
    (curve,) = found.curves
    above = curve.chance_above_ceiling[list(curve.amounts).index(found.model_amount)]
    assert found.model_amount > 0
    assert found.warnings == (
        f"Carbon dioxide risk is not excluded: SpO2 passes the ceiling of 92 % in {100 * above:.0f} % of the spread.",
    )


def test_without_carbon_dioxide_risk_there_is_no_ceiling_unless_one_is_chosen():
    assert one(MODERATE, at(2438.4), ["cannula"], NO_RISK).curves[0].chance_above_ceiling is None
    assert with_decision(MODERATE, at(2438.4), DEVICES["cannula"], 2.0, NO_RISK).chance_above_ceiling is None
    chosen = one(MODERATE, at(2438.4), ["cannula"], Target(0.88, 0.98, 0.9, "no"))
    assert (np.diff(chosen.curves[0].chance_above_ceiling) >= 0.0).all()
    assert chosen.curves[0].chance_above_ceiling[-1] > 0.0


def test_a_pulse_device_is_proposed_by_its_setting():
    found = one(MODERATE, at(2438.4), ["pulse_concentrator"], NO_RISK)
    (curve,) = found.curves
    assert curve.unit == "setting"
    assert found.model_amount_text.startswith(f"setting {found.model_amount:g} by ")
    assert not any("L/min" in text for text in (*curve.amount_texts, found.model_amount_text, found.text))


def test_pulses_of_more_oxygen_than_four_litres_are_not_proposed():
    found = one(SEVERE, at(3000.0), ["pulse_conserver"], NO_RISK)
    (curve,) = found.curves
    assert list(curve.amounts[curve.proposable]) == [0.0, 1.0, 2.0, 3.0, 4.0]


def test_a_mask_that_needs_more_than_four_litres_is_shown_but_not_proposed():
    (curve,) = one(SEVERE, at(3000.0), ["simple_mask"], NO_RISK).curves
    assert list(curve.amounts[curve.proposable]) == [0.0]
    assert curve.amounts[1] == 5.0


def test_a_decided_flow_that_this_carrier_offers_is_accepted():
    flight = at(2438.4, part_kind="flight", airline_flows_l_min=(3.0,))
    assert with_decision(MODERATE, flight, DEVICES["airline"], 3.0, NO_RISK).amount == 3.0


def test_asleep_a_pulse_device_is_not_tried_and_the_reason_is_kept():
    found = one(MODERATE, at(2438.4, "asleep"), ["pulse_conserver", "cannula"], NO_RISK)
    assert [one.device_id for one in found.refused] == ["pulse_conserver"]
    assert "not for use asleep" in found.refused[0].reason
    assert found.model_device_id == "cannula"


def test_a_device_that_cannot_work_there_is_refused_and_the_others_are_tried():
    high = at(5200.0)
    found = one(MODERATE, high, ["cannula_concentrator", "cannula"], NO_RISK)
    assert [(one.device_id, "5200 m is outside" in one.reason) for one in found.refused] == [
        ("cannula_concentrator", True)
    ]
    assert [curve.device_id for curve in found.curves] == ["cannula"]
    strange = one(MODERATE, at(2438.4, part_kind="flight", airline_flows_l_min=(40.0,)), ["airline"], NO_RISK)
    assert "40 L/min is outside" in strange.refused[0].reason


def test_where_no_device_may_be_used_it_says_so():
    found = one(MODERATE, at(2438.4, "asleep"), ["pulse_conserver"], NO_RISK)
    assert found.curves == ()
    assert found.model_amount is None
    assert found.specialist_advised
    assert "No device of the list may be used here." in found.text


def test_what_two_and_four_litres_of_airline_oxygen_give_is_shown():
    found = one(MODERATE, at(2438.4, part_kind="flight"), ["airline"], NO_RISK)
    assert list(found.curves[0].amounts) == [0.0, 2.0, 4.0]
    assert found.model_amount in (2.0, 4.0)
    other = one(MODERATE, at(2438.4, part_kind="flight", airline_flows_l_min=(3.0,)), ["airline"], NO_RISK)
    assert list(other.curves[0].amounts) == [0.0, 3.0]
    ground = one(MODERATE, at(2438.4, part_kind="road"), ["airline"], NO_RISK)
    assert [one.device_id for one in ground.refused] == ["airline"]


def test_the_first_device_of_the_list_that_reaches_is_proposed():
    names = ["venturi_28", "cannula"]
    assert one(MODERATE, at(2438.4), names, NO_RISK).model_device_id == "venturi_28"
    assert one(MODERATE, at(2438.4), names[::-1], NO_RISK).model_device_id == "cannula"


def test_where_none_reaches_a_later_device_is_named_only_when_it_is_much_better():
    condition, target = at(2000.0), Target(0.90, 0.92, 0.95, "yes")
    for names in (["cannula", "pulse_conserver"], ["pulse_conserver", "cannula"]):
        assert one(MODERATE, condition, names, target).model_device_id == names[0]
    weak_first = one(SEVERE, at(2438.4, "walking"), ["venturi_24", "cannula"], NO_RISK)
    assert "4 L/min by nasal cannula" in weak_first.text


def test_all_conditions_together_give_what_each_gives_alone():
    conditions = [
        at(altitude, activity, hours_at_altitude=hours)
        for altitude, hours in ((0.0, 0.0), (2438.4, 0.0), (2438.4, 60.0), (2000.0, 0.0), (2438.4, 0.0))
        for activity in ("rest", "walking")
    ]
    devices = [DEVICES["cannula"], DEVICES["pulse_conserver"]]
    together = titrate(MODERATE, conditions, devices, NO_RISK)
    for condition, found in zip(conditions, together, strict=True):
        (alone,) = titrate(MODERATE, [condition], devices, NO_RISK)
        assert found.activity == condition.activity
        assert found.model_amount == alone.model_amount
        for joint, single in zip(found.curves, alone.curves, strict=True):
            np.testing.assert_allclose(joint.spo2_median, single.spo2_median, atol=1e-12)


def test_a_person_who_gains_less_from_oxygen_needs_more():
    spread = usual_spread(300)
    poor = spread.with_gain(0.5 * spread.gain_mmhg_per_l_min)
    amounts = [
        titrate(MODERATE, [at(2438.4)], [DEVICES["cannula"]], NO_RISK, spread=gains)[0].model_amount
        for gains in (spread, poor)
    ]
    assert amounts[1] > amounts[0]


def test_a_decided_flow_shows_what_it_gives_and_what_to_watch():
    enough = with_decision(MODERATE, at(2438.4), DEVICES["cannula"], 4.0, NO_RISK)
    assert enough.warnings == ()
    assert enough.amount_text == "4 L/min by nasal cannula"
    assert enough.spo2_low < enough.spo2_median < enough.spo2_high
    curve = one(MODERATE, at(2438.4), ["cannula"], NO_RISK).curves[0]
    assert enough.spo2_median == pytest.approx(curve.spo2_median[-1])
    little = with_decision(SEVERE, at(2438.4), DEVICES["cannula"], 0.5, NO_RISK)
    assert any("not in the 90 % wanted" in text for text in little.warnings)
    much = with_decision(MODERATE, at(2438.4), DEVICES["cannula"], 5.0, RISK)
    assert any("above 4 L/min" in text for text in much.warnings)
    assert any("Carbon dioxide risk is present" in text for text in much.warnings)


def test_a_decided_pulse_asleep_is_not_blocked_but_warned_of():
    found = with_decision(MODERATE, at(1000.0, "asleep"), DEVICES["pulse_conserver"], 3.0, NO_RISK)
    assert any("not for use asleep" in text for text in found.warnings)


def test_a_decision_for_no_oxygen_is_shown_without_a_device():
    found = with_decision(WELL, at(0.0), None, 0.0, NO_RISK)
    assert (found.device_id, found.amount_text, found.warnings) == (None, "no added oxygen", ())


def test_a_spread_below_the_models_range_is_said():
    found = one(fitted(38.0, 55.0, hyperventilates=False), at(3800.0, "walking"), ["cannula"], NO_RISK)
    assert any("below the 25 mmHg" in text for text in found.warnings)


@pytest.mark.parametrize(
    ("device", "amount", "field"),
    [("cannula", 20.0, "flow_l_min"), ("pulse_conserver", 2.5, "setting"), ("airline", 3.0, "flow_l_min")],
)
def test_a_decided_amount_the_device_does_not_have_is_refused(device, amount, field):
    with pytest.raises(InputError) as caught:
        with_decision(MODERATE, at(2438.4, part_kind="flight"), DEVICES[device], amount, NO_RISK)
    assert caught.value.field == field


def test_many_decisions_asked_together_answer_as_one_by_one_and_a_refused_one_stops_no_other():
    doses = [
        Dose(at(2438.4), DEVICES["cannula"], 2.0),
        Dose(at(2438.4), DEVICES["cannula"], 20.0),
        Dose(at(1000.0, "walking"), DEVICES["pulse_conserver"], 3.0),
        Dose(at(2438.4), None, 0.0),
    ]
    first, refused, pulses, none = with_decisions(MODERATE, doses, NO_RISK)
    assert isinstance(refused, InputError)
    assert [first, pulses, none] == [
        with_decision(MODERATE, one.condition, one.device, one.amount, NO_RISK)
        for one in (doses[0], doses[2], doses[3])
    ]
    assert none.device_id is None


def test_one_decision_the_lung_cannot_be_asked_stops_no_other():
    too_high = Condition("peak", "rest", 200.0, 32.0)
    first, fault = with_decisions(
        MODERATE, [Dose(at(2438.4), DEVICES["cannula"], 2.0), Dose(too_high, DEVICES["cannula"], 2.0)], NO_RISK
    )
    assert first == with_decision(MODERATE, at(2438.4), DEVICES["cannula"], 2.0, NO_RISK)
    assert "200 mmHg is outside the range" in fault.message


def test_a_flow_without_its_device_is_refused():
    with pytest.raises(InputError, match="needs its device"):
        with_decision(MODERATE, at(2438.4), None, 2.0, NO_RISK)


@pytest.mark.parametrize(
    ("values", "field"),
    [
        ((0.3, None, 0.9, "no"), "low_fraction"),
        ((0.88, None, 1.0, "no"), "confidence"),
        ((0.95, 0.9, 0.9, "no"), "high_fraction"),
        ((0.88, 1.2, 0.9, "no"), "high_fraction"),
    ],
)
def test_a_target_that_makes_no_sense_is_refused(values, field):
    with pytest.raises(InputError) as caught:
        Target(*values)
    assert caught.value.field == field


def test_the_rule_of_a_pathway_comes_to_its_flow_but_never_above_four_litres():
    assert rule_amount("fixed", 2.0, None)[0] == 2.0
    assert rule_amount("usual_plus", 2.0, 1.0)[0] == 3.0
    flow, text = rule_amount("usual_plus", 2.0, 3.0)
    assert flow is None
    assert "5 L/min" in text
    assert "specialist" in text
    assert "not known" in rule_amount("usual_plus", 2.0, None)[1]
    with pytest.raises(InputError, match="is not known"):
        rule_amount("other", 2.0, 1.0)
