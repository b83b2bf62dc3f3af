"""From tables to the model: what gains by hand keep of their units."""

from __future__ import annotations

import math

import pytest

from gainbench.model import HandGains
from gainbench.sheetfile import parse_sheet

RPM = math.pi / 30.0


def hand(demo, altered, loop, period, **keys) -> HandGains:
    text = altered(demo, f"aims.{loop}.method", '"by-hand"')
    text = altered(text, "aims.firmware.ki_includes_period", "true" if period else "false")
    for key, toml in keys.items():
        text = altered(text, f"aims.{loop}.{key}", toml)
    gains = getattr(parse_sheet(text, "bench").sheet.aims, loop).hand
    assert gains is not None
    return gains


@pytest.mark.parametrize(
    ("loop", "period", "keys", "expected"),
    [
        ("current", False, {"kp": "2", "ki": "300"}, HandGains(kp=2.0, ki=300.0)),
        ("current", True, {"kp": "2", "ki": "0.3"}, HandGains(kp=2.0, ki=0.3, ki_has_period=True)),
        ("current", True, {"kp": "2", "ki": '"0.3 V/A"'}, HandGains(kp=2.0, ki=0.3, ki_has_period=True)),
        ("current", True, {"kp": "2", "ki": '"300 V/(A*s)"'}, HandGains(kp=2.0, ki=300.0)),
        ("current", False, {"kp": '"2 kV/kA"', "ti": '"0.5 ms"'}, HandGains(kp=2.0, ti=0.5e-3)),
        ("current", True, {"kp": "2", "ti": '"0.5 ms"'}, HandGains(kp=2.0, ti=0.5e-3)),
        ("current", False, {"kp": "2", "wi": '"1 Hz"'}, HandGains(kp=2.0, wi=2.0 * math.pi)),
        ("current", False, {"kp": "2", "wi": '"0 rad/s"'}, HandGains(kp=2.0, wi=0.0)),
        ("current", False, {"kp": "0", "ki": "300"}, HandGains(kp=0.0, ki=300.0)),
        ("speed", False, {"kp": "2", "ki": "300"}, HandGains(kp=2.0, ki=300.0)),
        ("speed", False, {"kp": '"1 A/(rad/s)"', "ki": '"1 A/rad"'}, HandGains(kp=1.0, ki=1.0)),
        (
            "speed",
            False,
            {"kp": '"25 mN*m*s/rad"', "ki": '"3 N*m/rad"'},
            HandGains(kp=0.025, ki=3.0, kp_is_torque=True, ki_is_torque=True),
        ),
        ("speed", False, {"kp": '"25 mN*m*s/rad"', "ki": '"3 A/rad"'}, HandGains(kp=0.025, ki=3.0, kp_is_torque=True)),
        ("speed", True, {"kp": "2", "ki": '"0.3 A*s/rad"'}, HandGains(kp=2.0, ki=0.3, ki_has_period=True)),
        (
            "speed",
            True,
            {"kp": "2", "ki": '"0.3 N*m*s/rad"'},
            HandGains(kp=2.0, ki=0.3, ki_is_torque=True, ki_has_period=True),
        ),
        ("speed", True, {"kp": "2", "ki": '"3 A/rad"'}, HandGains(kp=2.0, ki=3.0)),
    ],
)
def test_gains_by_hand(demo, altered, loop, period, keys, expected):
    assert hand(demo, altered, loop, period, **keys) == expected


def test_gains_per_rpm(demo, altered):
    gains = hand(demo, altered, "speed", False, kp='"50 mA/rpm"', ki='"2 A/(rpm*s)"')
    assert gains.kp == pytest.approx(0.05 / RPM, rel=1e-15)
    assert gains.ki == pytest.approx(2.0 / RPM, rel=1e-15)


def test_kept_gains_are_read_as_gains_by_hand(demo, altered):
    text = altered(demo, "aims.firmware.ki_includes_period", "true")
    text = altered(text, "kept[0].speed", '{ kp = "25 mN*m*s/rad", ki = 0.3 }')
    (kept,) = parse_sheet(altered(text, "kept[0].note", '"a note"'), "bench").sheet.kept
    assert kept.speed == HandGains(kp=0.025, ki=0.3, kp_is_torque=True, ki_has_period=True)
    assert kept.current == HandGains(kp=2.66, ki=4681.0)
    assert (kept.name, kept.note) == ("first light", "a note")


def test_the_firmware_unit_of_speed_has_its_size(demo, altered):
    firmware = parse_sheet(altered(demo, "aims.firmware.speed_unit", '"rpm"'), "bench").sheet.aims.firmware
    assert firmware.speed_unit == "rpm"
    assert firmware.speed_unit_size == pytest.approx(RPM, rel=1e-15)
