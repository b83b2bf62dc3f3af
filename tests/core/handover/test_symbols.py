"""The macros: all that the contract lists, equal to the assessment rounded to single precision."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.errors import HandoverError
from gainbench.handover.symbols import groups

FLOATS = (
    "CURRENT_RATE_HZ", "SPEED_RATE_HZ", "CURRENT_KP", "CURRENT_KI_TS", "SPEED_KP", "SPEED_KI_TS", "CURRENT_LIMIT_A",
    "VOLTAGE_LIMIT_V", "SPEED_REFERENCE_WEIGHT", "SPEED_FILTER_GAIN", "BACK_EMF_V_S_PER_RAD", "UPDATE_DELAY_PERIODS",
)  # fmt: skip
COUNTS = ("SPEED_WINDOW", "ENCODER_COUNTS", "SPEED_DELAY_TICKS")


def values(assessment):
    return {symbol.name: symbol.literal for group in groups(assessment) for symbol in group.symbols}


def number(literal):
    return np.float32(literal[:-1])


@pytest.mark.parametrize("name", ["label-unwinder", "bottle-indexer", "sieve-drum"])
def test_every_symbol_of_the_contract_is_there(demos, name):
    found = values(demos[name])
    assert found.keys() >= {*FLOATS, *COUNTS}
    assert all(found[one].endswith("F") for one in FLOATS)
    assert all(found[one].endswith("U") for one in COUNTS)
    assert sum(one.startswith("INTEGRATOR_") for one in found) == 1
    assert sum(one.startswith(("WINDUP_",)) for one in found) == 1


@pytest.mark.parametrize("name", ["label-unwinder", "bottle-indexer", "sieve-drum"])
def test_values_are_those_that_were_assessed(demos, name):
    assessment = demos[name]
    stage, found = assessment.sheet.rig.stage, values(assessment)
    current, speed = assessment.current.gains, assessment.speed.gains
    expected = {
        "CURRENT_KP": current.kp,
        "CURRENT_KI_TS": current.ki / stage.current_rate,
        "SPEED_KP": speed.kp,
        "SPEED_KI_TS": speed.ki / stage.speed_rate,
        "CURRENT_LIMIT_A": assessment.plant.current_limit,
        "VOLTAGE_LIMIT_V": assessment.plant.voltage_limit,
        "BACK_EMF_V_S_PER_RAD": assessment.plant.back_emf,
        "CURRENT_RATE_HZ": stage.current_rate,
        "SPEED_RATE_HZ": stage.speed_rate,
        "SPEED_REFERENCE_WEIGHT": assessment.sheet.aims.speed.reference_weight,
        "UPDATE_DELAY_PERIODS": stage.update_delay,
    }
    for symbol, value in expected.items():
        assert number(found[symbol]) == np.float32(value), symbol


def test_every_symbol_has_unit_range_and_meaning(demos):
    for assessment in demos.values():
        for group in groups(assessment):
            for symbol in group.symbols:
                assert symbol.unit
                assert symbol.range
                assert symbol.meaning.endswith(".")
                assert symbol.meaning.isascii()


@pytest.mark.parametrize(
    ("rule", "name"), [("backward", "BACKWARD"), ("forward", "FORWARD"), ("trapezoid", "TRAPEZOID")]
)
def test_integrator_rule_is_named(unwinder, rule, name):
    assert values(unwinder({"aims.firmware.integrator": rule}))[f"INTEGRATOR_{name}"] == "1U"


def test_back_calculation_has_its_gain(unwinder):
    assessment = unwinder({"aims.firmware.windup": "back-calculation"})
    found = values(assessment)
    assert found["WINDUP_BACK_CALCULATION"] == "1U"
    assert "WINDUP_HOLD" not in found
    gains, stage = assessment.speed.gains, assessment.sheet.rig.stage
    assert number(found["SPEED_WINDUP_GAIN"]) == np.float32(gains.ki / gains.kp / stage.speed_rate)


def test_the_gain_of_back_calculation_is_at_most_one(unwinder):
    by_hand = {"method": "by-hand", "kp": "0.01 V/A", "ki": "4000 V/(A*s)"}
    values_ = {f"aims.current.{key}": value for key, value in by_hand.items()}
    assessment = unwinder({**values_, "aims.firmware.windup": "back-calculation"})
    assert values(assessment)["CURRENT_WINDUP_GAIN"] == "1.0F"


def test_speed_filter_gain_is_that_of_the_law(unwinder):
    # 1 - exp(-Tw/Tf) with Tw = 0.5 ms and Tf = 1 ms.
    found = values(unwinder({"stage.speed_filter": "1 ms"}))
    assert number(found["SPEED_FILTER_GAIN"]) == np.float32(1.0 - math.exp(-0.5))


def test_an_ideal_sensor_has_no_counts_and_no_window(unwinder):
    found = values(unwinder({"stage.speed_sensor": "ideal"}))
    assert not {"ENCODER_COUNTS", "SPEED_WINDOW"} & found.keys()


def test_pm_sine_says_what_its_voltage_limit_needs(demos):
    assessment = demos["bottle-indexer"]
    found = values(assessment)
    assert found["POLE_PAIRS"] == "4U"
    # 9.8 mH line to line is 4.9 mH per phase.
    assert number(found["INDUCTANCE_H"]) == np.float32(0.0049)
    # 12 A rms as peak, 95 % of 325 V over the root of 3.
    assert number(found["CURRENT_LIMIT_A"]) == np.float32(12.0 * math.sqrt(2.0))
    assert number(found["VOLTAGE_LIMIT_V"]) == np.float32(0.95 * 325.0 / math.sqrt(3.0))


def forms(assessment):
    return {name for name in values(assessment) if "_PER_" in name or "_TI_" in name or "_WI_" in name} - {
        "BACK_EMF_V_S_PER_RAD",
        "TORQUE_CONSTANT_N_M_PER_A",
    }


@pytest.mark.parametrize(
    ("firmware", "expected"),
    [
        ({}, {"CURRENT_KI_V_PER_A_S", "SPEED_KI_A_PER_RAD"}),
        ({"ki_includes_period": True}, set()),
        ({"gain_form": "kp-ti"}, {"CURRENT_TI_S", "SPEED_TI_S"}),
        ({"gain_form": "kp-wi"}, {"CURRENT_WI_RAD_PER_S", "SPEED_WI_RAD_PER_S"}),
        ({"speed_unit": "rpm"}, {"CURRENT_KI_V_PER_A_S", "SPEED_KP_A_PER_RPM", "SPEED_KI_A_PER_RPM_S"}),
        (
            {"speed_unit": "rpm", "ki_includes_period": True},
            {"SPEED_KP_A_PER_RPM", "SPEED_KI_TS_A_PER_RPM"},
        ),
        (
            {"speed_output": "N*m"},
            {"CURRENT_KI_V_PER_A_S", "SPEED_KP_N_M_S_PER_RAD", "SPEED_KI_N_M_PER_RAD"},
        ),
    ],
)
def test_other_forms_are_named_for_what_they_are(unwinder, firmware, expected):
    assert forms(unwinder({f"aims.firmware.{key}": value for key, value in firmware.items()})) == expected


def test_gains_in_rpm_are_smaller_by_pi_over_thirty(unwinder):
    assessment = unwinder({"aims.firmware.speed_unit": "rpm"})
    found = values(assessment)
    gains = assessment.speed.gains
    assert number(found["SPEED_KP_A_PER_RPM"]) == pytest.approx(gains.kp * math.pi / 30.0, rel=1e-7)
    assert number(found["SPEED_KI_A_PER_RPM_S"]) == pytest.approx(gains.ki * math.pi / 30.0, rel=1e-7)


def test_torque_output_brings_the_torque_constant(unwinder):
    found = values(unwinder({"aims.firmware.speed_output": "N*m"}))
    assert number(found["TORQUE_CONSTANT_N_M_PER_A"]) == np.float32(0.052)


def test_a_form_without_a_number_is_left_out(unwinder):
    by_hand = {"method": "by-hand", "kp": "2.66 V/A", "ki": "0 V/(A*s)"}
    values_ = {f"aims.current.{key}": value for key, value in by_hand.items()}
    assert "CURRENT_TI_S" not in values(unwinder({**values_, "aims.firmware.gain_form": "kp-ti"}))


def test_a_value_beyond_single_precision_is_refused(demos):
    assessment = demos["label-unwinder"]
    wild = replace(assessment, plant=replace(assessment.plant, current_limit=1e40))
    with pytest.raises(HandoverError, match=r"CURRENT_LIMIT_A: .*single precision"):
        groups(wild)


def test_without_gains_there_is_nothing(demos):
    assessment = demos["label-unwinder"]
    with pytest.raises(HandoverError, match="no gains"):
        groups(replace(assessment, speed=replace(assessment.speed, gains=None)))
