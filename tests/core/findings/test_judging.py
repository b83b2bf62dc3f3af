"""All findings on one case."""

from __future__ import annotations

import math
import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gainbench.findings import judge
from gainbench.model import SpeedSensor, TrainKind
from gainbench.results import Gains

LEVELS = ["breaks", "thin", "holds"]


def test_worst_first_and_in_a_stable_order(bench):
    changes = {
        "machine": {"max_speed": 100.0, "speed_constant": 300.0},
        "speed": {"phase_margin_deg": 30.0},
        "train": {"efficiency": 0.7},
    }
    found = judge(bench.case(**changes))
    assert [one.level for one in found] == sorted((one.level for one in found), key=LEVELS.index)
    assert {one.level for one in found} == set(LEVELS)
    thin = [one.code for one in found if one.level == "thin"]
    assert (
        thin.index("speed-constant-disagrees")
        < thin.index("speed-phase-margin-thin")
        < thin.index("train-efficiency-low")
    )
    assert judge(bench.case(**changes)) == found


def test_the_quiet_bench_only_holds(bench):
    assert [one.code for one in judge(bench.case())] == ["current-loop-holds", "speed-loop-holds"]


def test_subjects_are_the_parts_of_the_drive(bench):
    found = judge(
        bench.case(
            machine={"max_speed": 100.0, "speed_constant": 300.0, "rated_current": 0.1},
            train={"efficiency": 0.7, "load_torque": -0.4},
            stage={"encoder_counts": 100},
            speed={"phase_margin_deg": 3.0},
        )
    )
    assert {one.subject for one in found} == {"machine", "train", "stage", "current", "speed", "duty"}


positive = st.floats(min_value=1e-6, max_value=1e6)
figure = st.none() | positive
share = st.floats(min_value=0.01, max_value=1.0)
signed = st.floats(min_value=-1e5, max_value=1e5)


@settings(max_examples=100)
@given(
    data=st.data(),
    kind=st.sampled_from(["brushed", "pm_sine", "pm_block"]),
    elastic=st.booleans(),
    stable=st.booleans(),
)
def test_no_text_holds_a_number_that_is_none(bench, data, kind, elastic, stable):
    machine = {} if kind == "brushed" else dict(getattr(bench, kind))
    for field in ("resistance", "inductance", "torque_constant", "rotor_inertia"):
        machine[field] = data.draw(positive)
    for field in ("rated_current", "peak_current", "max_speed", "back_emf_constant"):
        machine[field] = data.draw(figure)
    machine["coulomb_friction"] = data.draw(st.just(0.0) | positive)
    machine["viscous_friction"] = data.draw(st.just(0.0) | positive)
    train = {"load_torque": data.draw(signed), "efficiency": data.draw(share), "ratio": data.draw(positive)}
    if elastic:
        train |= {"kind": TrainKind.ELASTIC, "shaft_stiffness": data.draw(positive), "shaft_damping": 0.0}
    stage = {
        "bus_voltage": data.draw(positive),
        "current_limit": data.draw(positive),
        "speed_filter": data.draw(st.just(0.0) | positive),
        "speed_sensor": data.draw(st.sampled_from(SpeedSensor)),
    }
    duty = {
        "reference_speed": data.draw(st.just(0.0) | signed),
        "reference_ramp": data.draw(st.just(0.0) | positive),
        "load_step": data.draw(st.just(0.0) | signed),
        "stop_at": data.draw(st.none() | st.floats(min_value=0.02, max_value=0.45)),
    }
    loop = {
        name: data.draw(figure) for name in ("crossover_hz", "phase_margin_deg", "delay_margin_s", "gain_margin_db")
    }
    loop |= {name: data.draw(figure) for name in ("peak_sensitivity", "bandwidth_hz")}
    gains = Gains(kp=data.draw(st.just(0.0) | positive), ki=data.draw(st.just(0.0) | positive))
    names = ("overshoot_percent", "settling_time_s", "load_dip_rad_s", "recovery_time_s")
    amounts = ("peak_current_a", "rms_current_a", "current_limited_s", "voltage_limited_s", "returned_energy_j")
    case = bench.case(
        machine=machine,
        train=train,
        stage=stage,
        duty=duty,
        current=loop,
        speed=loop if stable else None,
        speed_loop={"gains": gains} if stable else {"gains": gains, "figures": bench.unstable},
        current_loop={"gains": gains},
        response={name: data.draw(figure) for name in names} | {name: data.draw(positive) for name in amounts},
        locked={"overshoot_percent": data.draw(figure)},
    )
    found = judge(case)
    assert found
    assert len({one.code for one in found}) == len(found)
    for one in found:
        assert re.fullmatch(r"[a-z]+(-[a-z]+)*", one.code)
        assert not re.search(r"\b(nan|inf|None)\b", one.text)
        assert one.text.endswith(".")


@pytest.mark.parametrize("value", [math.nan, math.inf])
def test_a_number_that_is_none_is_not_shown_as_one(bench, value):
    for one in judge(bench.case(response={"peak_current_a": value, "rms_current_a": value})):
        assert not re.search(r"\b(nan|inf)\b", one.text)
