"""The delivery devices: the packaged classes, a service's own table, and what each may be asked for."""

import pytest

from planner.delivery.devices import load_devices, read_device, refusal, require_allowed, require_amount, shortlist
from planner.errors import InputError, ProfileError

PULSE = {
    "id": "own",
    "name": "Own pulse device",
    "kind": "pulse",
    "supply": "concentrator",
    "settings": [1, 2],
    "pulse_kind": "fixed_bolus",
    "source": "maker's table",
    "pulse": [
        {"setting": 1, "breathing_rate_min": 15, "bolus_ml": 9.0},
        {"setting": 2, "breathing_rate_min": 15, "bolus_ml": 18.5},
        {"setting": 2, "breathing_rate_min": 30, "bolus_ml": 12.0},
    ],
}


def test_every_kind_of_device_is_packaged_with_a_source_and_without_a_setting_in_litres():
    devices = load_devices()
    kinds = {device.kind for device in devices.values()}
    assert kinds == {"cannula", "reservoir_cannula", "venturi", "simple_mask", "reservoir", "pulse"}
    assert {devices[f"venturi_{mark}"].fraction for mark in (24, 28, 31, 35, 40)} == {0.24, 0.28, 0.31, 0.35, 0.40}
    for device in devices.values():
        assert device.source
        assert (device.unit == "setting") == (device.kind == "pulse") == bool(device.pulse_rows)
        assert ("L/min" in device.amount_text(2.0)) == (device.kind != "pulse")


def test_a_device_names_its_amount_with_the_device():
    devices = load_devices()
    assert devices["cannula"].amount_text(2.0) == "2 L/min by nasal cannula"
    assert devices["pulse_conserver"].amount_text(3.0) == "setting 3 by pulse device on a cylinder, fixed bolus"


def test_the_shortlist_starts_with_what_is_used_at_home_and_names_each_device_once():
    devices = load_devices()
    ids = [device.id for device in shortlist(devices, ["venturi_24", "cannula", "gone"])]
    assert ids == ["venturi_24", "cannula", "airline", "pulse_conserver", "pulse_concentrator"]
    assert shortlist(devices)[0].id == "cannula"


def test_a_pulse_device_is_not_used_asleep_and_the_reason_is_said():
    device = load_devices()["pulse_conserver"]
    reason = refusal(device, "asleep", "stay")
    assert reason is not None
    assert "asleep" in reason
    assert "mouth breathing" in reason
    assert refusal(device, "walking", "stay") is None


def test_airline_oxygen_is_for_flights_whose_carrier_allows_it():
    device = load_devices()["airline"]
    assert refusal(device, "rest", "flight", ("airline",)) is None
    assert "road" in str(refusal(device, "rest", "road"))
    assert "airline" in str(refusal(device, "rest", "flight", ("concentrator",)))


def test_a_cylinder_device_is_refused_where_only_a_concentrator_is_allowed():
    devices = load_devices()
    with pytest.raises(InputError, match="cylinder or liquid oxygen, which this part does not allow") as caught:
        require_allowed(devices["pulse_conserver"], "rest", "flight", ("concentrator",))
    assert caught.value.field == "device_id"
    require_allowed(devices["pulse_concentrator"], "rest", "flight", ("concentrator",))


@pytest.mark.parametrize(
    ("device_id", "amount", "said"),
    [
        ("cannula", 0.05, "0.1 to 15 L/min"),
        ("cannula", 15.5, "0.1 to 15 L/min"),
        ("cannula", float("nan"), "0.1 to 15 L/min"),
        ("simple_mask", 3.0, "carbon dioxide"),
        ("airline", 3.0, "gives 2 or 4 L/min only"),
        ("pulse_conserver", 2.5, "settings are 1, 2, 3, 4, 5, 6, not litres per minute"),
        ("pulse_conserver", 9.0, "has no setting 9"),
    ],
)
def test_an_amount_the_device_does_not_have_is_refused_with_what_is_allowed(device_id, amount, said):
    with pytest.raises(InputError, match=said):
        require_amount(load_devices()[device_id], amount)


def test_an_amount_the_device_has_is_accepted():
    devices = load_devices()
    for device_id, amount in (("cannula", 0.1), ("cannula", 15.0), ("airline", 4.0), ("pulse_conserver", 6.0)):
        require_amount(devices[device_id], amount)


def test_a_service_enters_the_published_table_of_its_own_device(tmp_path, monkeypatch):
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))
    (tmp_path / "delivery.toml").write_text(
        'format = "oxygen-delivery-devices"\nversion = 1\n'
        '[[entry]]\nid = "ours"\nname = "Ours"\nkind = "pulse"\nsettings = [1, 2]\npulse_kind = "fixed_minute_volume"\n'
        'source = "label"\npulse = [{ setting = 1, breathing_rate_min = 15, bolus_ml = 10.5 },\n'
        "{ setting = 2, breathing_rate_min = 15, bolus_ml = 21 }]\n"
    )
    devices = load_devices()
    assert [row.bolus_ml for row in devices["ours"].pulse_rows] == [10.5, 21.0]
    assert "cannula" in devices


@pytest.mark.parametrize(
    ("change", "key"),
    [
        ({"kind": "hose"}, "own.kind"),
        ({"name": " "}, "own.name"),
        ({"source": None}, "own.source"),
        ({"settings": [2, 1]}, "own.settings"),
        ({"settings": [1, 2, 3]}, "own.pulse"),
        ({"pulse_kind": "other"}, "own.pulse_kind"),
        ({"pulse": []}, "own.pulse"),
        ({"pulse": [{"setting": 1, "breathing_rate_min": 15, "bolus_ml": 0.0}]}, "own.pulse 1"),
        ({"pulse": [{"setting": 1, "breathing_rate_min": 5, "bolus_ml": 9.0}]}, "own.pulse 1"),
        ({"pulse": [{"setting": 4, "breathing_rate_min": 15, "bolus_ml": 9.0}]}, "own.pulse 1"),
        ({"pulse": [{"setting": 1, "breathing_rate_min": 15}]}, "own.pulse 1"),
        ({"pulse": [*PULSE["pulse"], PULSE["pulse"][0]]}, "own.pulse"),
        ({"activities": ["running"]}, "own.activities"),
        ({"supply": "wall"}, "own.supply"),
        ({"oxygen_fraction": 0.28}, "own.oxygen_fraction"),
        ({"colour": "blue"}, "own.colour"),
    ],
)
def test_a_faulty_entry_is_refused_naming_the_key(change, key):
    read_device(PULSE)
    with pytest.raises(ProfileError) as caught:
        read_device(PULSE | change)
    assert caught.value.key == key
