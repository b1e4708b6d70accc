"""Loads as a person writes them: read from a table, written back, told in words, refused with one message."""

import pytest
from pydantic import TypeAdapter

from tegdesign.document import to_toml, validate
from tegdesign.document.toml import parse_toml
from tegdesign.system.load import AnyLoad, Battery, Converter, Motor
from tegdesign.system.model import Part


class Sheet(Part):
    load: AnyLoad


TABLE = {"voltage": ["1 V", "3 V"], "power": ["1 W", "5 W"], "efficiency": [0.6, 0.8, 0.7, 0.9]}
DUTY = {"burst_power": "2 W", "burst_time": "6 s", "period": "60 s", "storage_efficiency": 0.8, "bridge_time": "14 h"}
GOOD = {
    "battery": {"kind": "battery", "voltage": "12.8 V", "blocking_drop": "0.4 V", "series_resistance": "50 mohm"},
    "converter": {
        "kind": "converter",
        "running_voltage": ["1 V", "3 V"],
        "start_voltage": "1.5 V",
        "input_voltage_limit": "8 V",
        "efficiency": 0.9,
        "standby_power": "5 mW",
    },
    "motor": {"kind": "motor", "resistance": "8 ohm", "stalled_resistance": "2 ohm", "start_voltage": "1 V"},
}


def read(kind, **more):
    data = {key: value for key, value in {**GOOD[kind], **more}.items() if value is not None}
    text = to_toml({"load": data})
    return validate(parse_toml(text, "x"), text, Sheet)


@pytest.mark.parametrize(
    ("kind", "more"),
    [
        ("battery", {}),
        ("battery", {"current_limit": "5 A", "duty": DUTY}),
        ("converter", {}),
        ("converter", {"efficiency": None, "efficiency_table": TABLE, "duty": DUTY}),
        ("motor", {"start_current": "0.6 A"}),
    ],
)
def test_read_and_written_back(kind, more):
    sheet, findings = read(kind, **more)
    assert findings == []
    again = to_toml(sheet.model_dump(exclude_defaults=True) | {"load": sheet.load.model_dump(exclude_none=True)})
    assert validate(parse_toml(again, "x"), again, Sheet)[0] == sheet
    assert hash(sheet.load) == hash(read(kind, **more)[0].load)


def test_words_carry_every_number():
    assert Battery(**GOOD["battery"]).words() == "battery or bus of 12.8 V behind a drop of 0.4 V and 0.05 ohm"
    assert Converter(**GOOD["converter"]).words() == (
        "converter tracking most power from 1 V to 3 V, start at 1.5 V, at most 8 V, efficiency 0.9, standby 0.005 W"
    )
    table = Converter(**{**GOOD["converter"], "efficiency": None, "efficiency_table": TABLE}).words()
    assert "efficiency from a table" in table
    assert Motor(**GOOD["motor"], start_current="0.6 A").words() == (
        "motor of 8 ohm running, 2 ohm stalled, starts at 1 V and 0.6 A"
    )


def table(**more):
    return {"efficiency": None, "efficiency_table": {**TABLE, **more}}


BAD = {
    "voltage without unit": ("battery", {"voltage": 12.8}, ["load.voltage", "no unit"]),
    "voltage of the wrong kind": ("battery", {"voltage": "12 A"}, ["load.voltage", "dimension"]),
    "drop below zero": ("battery", {"blocking_drop": "-0.1 V"}, ["load.blocking_drop", "at least 0 V"]),
    "mistyped key": ("battery", {"blocking_drip": "0.4 V"}, ["unknown key", "blocking_drop"]),
    "window upside down": ("converter", {"running_voltage": ["3 V", "1 V"]}, ["3 V", "1 V", "upside down", "exchange"]),
    "start below running": ("converter", {"start_voltage": "0.5 V"}, ["start_voltage 0.5 V", "1 V", "raise it"]),
    "limit below running": ("converter", {"input_voltage_limit": "2 V"}, ["limit 2 V", "3 V", "open circuit"]),
    "limit below start": ("converter", {"start_voltage": "9 V"}, ["limit 8 V", "9 V"]),
    "no limit": ("converter", {"input_voltage_limit": None}, ["missing key", "input_voltage_limit"]),
    "efficiency above 1": ("converter", {"efficiency": 1.2}, ["load.efficiency: 1.2", "at most 1"]),
    "no efficiency": ("converter", {"efficiency": None}, ["either efficiency", "efficiency_table"]),
    "two efficiencies": ("converter", {"efficiency_table": TABLE}, ["either efficiency", "efficiency_table"]),
    "standby below zero": ("converter", {"standby_power": "-1 W"}, ["standby_power", "at least 0 W"]),
    "table falls": ("converter", table(power=["5 W", "1 W"]), ["power must rise", "1 W follows 5 W", "sort"]),
    "table stands": ("converter", table(voltage=["1 V", "1 V"]), ["voltage must rise", "1 V follows 1 V"]),
    "table with a gap": ("converter", table(efficiency=[0.6, 0.8, 0.7]), ["3 values", "2 x 2"]),
    "table of one point": ("converter", table(power=["1 W"]), ["power needs two points", "got 1"]),
    "table of nothing": ("converter", table(power=None, voltage=None), ["voltage, power or both", "one number"]),
    "table above 1": ("converter", table(efficiency=[0.6, 0.8, 0.7, 1.9]), ["table.efficiency", "at most 1"]),
    "table too short": ("converter", table(voltage=["1 V", "2.5 V"]), ["1 V to 2.5 V", "1 V to 3 V", "add points"]),
    "stalled above running": ("motor", {"stalled_resistance": "9 ohm"}, ["9 ohm", "8 ohm", "exchange"]),
    "nothing to start": ("motor", {"start_voltage": None}, ["start_voltage, start_current or both"]),
    "burst too long": ("battery", {"duty": {**DUTY, "burst_time": "2 min"}}, ["load.duty", "120 s", "60 s"]),
}


@pytest.mark.parametrize("case", BAD)
def test_one_clear_message(case):
    kind, more, words = BAD[case]
    if "efficiency_table" in more:
        more["efficiency_table"] = {k: v for k, v in more["efficiency_table"].items() if v is not None}
    sheet, findings = read(kind, **more)
    assert sheet is None
    assert len(findings) == 1, findings
    for word in words:
        assert word in findings[0].text, findings[0].text


def test_schema_for_editors_names_all_kinds():
    kinds = TypeAdapter(AnyLoad).json_schema()["discriminator"]["mapping"]
    assert set(kinds) == {"matched", "efficiency", "resistance", "current", "battery", "converter", "motor"}
