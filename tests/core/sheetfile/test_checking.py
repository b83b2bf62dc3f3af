"""Sheets that are taken, and sheets that are refused: each refusal says where, what, why, and what would do."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from gainbench.model import Duty, MachineKind, TrainKind
from gainbench.sheetfile import parse_sheet
from gainbench.sheetfile.tables import ENTRIES


@pytest.mark.parametrize(
    ("path", "toml", "near"),
    [
        ("machine.resistnce", '"1 ohm"', "resistance is near"),
        ("machine.load_inertia", '"1 kg*m^2"', "it belongs in [train]"),
        ("stage.encoder_lines", "1024", "encoder_counts is near"),
        ("aims.current.spread", "2.0", "it belongs in [aims.speed]"),
        ("aims.firmware.zzz", "1", "known are integrator, windup"),
        ("duty.lenght", '"1 s"', "length is near"),
        ("machnie", "{}", "machine is near"),
        ("aims.curent", "", "current is near"),
        ("colour", '"red"', "known are format, title, machine"),
        ('machine."a b\\u0000"', "1", "not known"),
        ('kept[0]."current "', "1", "current is near"),
        ("tolerance.machine", "1", "there is no quantity of this path"),
        ('tolerance."machine.resistnce"', '"1 %"', "machine.resistance is near"),
    ],
)
def test_an_unknown_key_is_refused_with_the_nearest(one_problem, demo, altered, path, toml, near):
    problem = one_problem(altered(demo, path, toml) if toml else f"{demo}\n[{path}]\n")
    assert near in problem.reason
    assert "\x00" not in str(problem)


REQUIRED = [
    *("machine.kind", "machine.resistance", "machine.inductance", "machine.torque_constant", "machine.rotor_inertia"),
    *("train.kind", "train.load_inertia"),
    *("stage.bus_voltage", "stage.current_limit", "stage.pwm_frequency", "stage.current_rate", "stage.speed_rate"),
    *("stage.speed_sensor", "stage.encoder_counts"),
    *("aims.current.method", "aims.current.crossover", "aims.current.phase_margin"),
    *("aims.speed.method", "aims.speed.crossover", "aims.speed.phase_margin"),
    *("duty.reference_speed", "duty.length", "format"),
]


@pytest.mark.parametrize("path", REQUIRED)
def test_a_required_key_is_missed(one_problem, demo, altered, path):
    problem = one_problem(altered(demo, path))
    assert problem.path == path
    assert "is missing" in problem.reason
    assert problem.example.startswith(path.rpartition(".")[2])


def test_every_other_key_may_be_left_out(demo, altered):
    for path in ENTRIES:
        if path not in REQUIRED:
            parse_sheet(altered(demo, path), "bench")
    parse_sheet(altered(demo, "title"), "bench")


@pytest.mark.parametrize("table", ["machine", "train", "stage", "duty"])
def test_a_table_is_missed_or_is_none(one_problem, demo, table):
    lines = demo.split("\n")
    start = lines.index(next(line for line in lines if line.startswith(f"[{table}]")))
    end = next(i for i in range(start + 1, len(lines)) if lines[i].startswith("["))
    without = "\n".join(lines[:start] + lines[end:])
    assert one_problem(without).example == f"[{table}]"
    problem = one_problem(f"{table} = 3\n{without}")
    assert (problem.path, problem.value) == (table, "3")
    assert "must be a table" in problem.reason


@pytest.mark.parametrize("name", ["aims", "tolerance", "kept", "evidence"])
def test_what_must_be_tables_is_something_else(one_problem, elastic, altered, name):
    text = altered(elastic, name, '"x"')
    if name == "aims":
        text = text[: text.index("[aims.current]")] + text[text.index("[duty]") :]
    problem = one_problem(text)
    assert problem.path == name
    assert "must be" in problem.reason


def test_all_problems_are_told_at_once(refusal, demo, altered):
    text = altered(altered(demo, "machine.resistance", '"0 ohm"'), "stage.bus_voltage", '"48 A"')
    text = altered(text, "duty.load_at", '"9 s"')
    error = refusal(text)
    assert [one.path for one in error.problems] == ["machine.resistance", "stage.bus_voltage", "duty.load_at"]
    assert str(error).startswith("bench: 3 problems\n")


def test_a_sheet_of_nothing_but_faults_is_told_within_bounds(refusal, demo):
    faults = "\n".join(f"a{i} = 1" for i in range(20000))
    text = demo.replace("[train]\n", f"{faults}\n[train]\n") + "\n[[kept]]" * 20000
    error = refusal(text)
    assert len(error.problems) <= 210
    assert len(str(error)) < 10_000


def test_defaults_are_those_of_the_format(elastic):
    sheet = parse_sheet(elastic, "bench.bench.toml").sheet
    machine, train, stage = sheet.rig.machine, sheet.rig.train, sheet.rig.stage
    assert sheet.title == "bench"
    assert (machine.viscous_friction, machine.coulomb_friction, machine.winding_temperature) == (0.0, 0.0, 25.0)
    assert {machine.rated_voltage, machine.rated_current, machine.peak_current, machine.max_speed} == {None}
    assert (train.ratio, train.efficiency, train.coupling_inertia) == (1.0, 1.0, 0.0)
    assert (train.load_viscous_friction, train.load_coulomb_friction, train.load_torque) == (0.0, 0.0, 0.0)
    assert (stage.voltage_use, stage.update_delay, stage.current_filter) == (0.95, 1.0, 0.0)
    assert (stage.speed_delay, stage.speed_window, stage.speed_filter) == (0, 1, 0.0)
    firmware = sheet.aims.firmware
    assert (firmware.integrator, firmware.windup, firmware.gain_form) == ("backward", "hold", "kp-ki")
    assert (firmware.back_emf_feedforward, firmware.ki_includes_period) == (False, False)
    assert (firmware.speed_unit, firmware.speed_unit_size, firmware.speed_output) == ("rad/s", 1.0, "A")
    assert sheet.aims.speed.reference_weight == 1.0
    assert sheet.duty == Duty(reference_speed=-100.0 * math.pi / 30.0, length=1.0)
    assert (sheet.duty.load_time, sheet.duty.stop_at) == (0.5, None)
    assert sheet.tolerances == sheet.kept == ()


def test_the_example_of_the_format_is_read_in_si(demo):
    sheet = parse_sheet(demo, "bench").sheet
    machine, train, stage, duty = sheet.rig.machine, sheet.rig.train, sheet.rig.stage, sheet.duty
    assert sheet.title == "Label unwinder"
    assert machine.kind is MachineKind.BRUSHED_DC
    assert train.kind is TrainKind.RIGID
    assert (machine.resistance, machine.inductance, machine.torque_constant) == (0.60, 0.45e-3, 52e-3)
    assert (machine.rotor_inertia, machine.viscous_friction, machine.coulomb_friction) == (310e-7, 20e-6, 12e-3)
    assert (machine.rated_voltage, machine.rated_current, machine.peak_current) == (48.0, 6.5, 20.0)
    assert machine.max_speed == 200.0 * math.pi
    assert (train.load_inertia, train.ratio, train.efficiency) == (3.6e-4, 3.0, 1.0)
    assert (stage.bus_voltage, stage.current_limit, stage.pwm_frequency) == (48.0, 20.0, 20e3)
    assert (stage.current_rate, stage.speed_rate, stage.encoder_counts) == (20e3, 2e3, 4096)
    assert sheet.aims.current.crossover == 2000.0 * math.pi
    assert sheet.aims.speed.crossover == 120.0 * math.pi
    assert sheet.aims.speed.phase_margin == pytest.approx(math.pi / 3.0, rel=1e-15)
    assert duty == Duty(reference_speed=50.0 * math.pi, reference_at=0.02, load_step=0.06, load_at=0.25, length=0.45)
    assert [(one.path, one.relative) for one in sheet.tolerances] == [("machine.resistance", 0.1)]
    assert [one.name for one in sheet.kept] == ["first light"]


def test_every_demo_sheet_is_taken(demo_texts):
    assert len(demo_texts) >= 3
    for name, text in demo_texts.items():
        assert parse_sheet(text, name).sheet.title


def test_keys_of_another_kind_sensor_or_method_are_checked_and_not_used(one_problem, elastic, altered):
    base = parse_sheet(elastic, "bench").sheet
    text = elastic
    for path, toml in {
        "machine.pole_pairs": "4",
        "machine.current_values": '"rms"',
        "stage.encoder_counts": "1024",
        "aims.current.crossover": '"1 kHz"',
        "aims.current.kp": '"1 V/A"',
        "aims.current.ki": '"0 V/(A*s)"',
        "aims.current.ti": '"1 ms"',
    }.items():
        text = altered(text, path, toml)
    sheet = parse_sheet(text, "bench").sheet
    assert sheet.aims.current.method is base.aims.current.method
    assert sheet.rig.machine == replace(base.rig.machine, pole_pairs=4, current_values=sheet.rig.machine.current_values)
    assert "is too small" in one_problem(altered(elastic, "stage.encoder_counts", "0")).reason
    assert "a frequency is meant" in one_problem(altered(elastic, "aims.current.crossover", '"1 V"')).reason
    assert "at least 0" in one_problem(altered(elastic, "aims.current.kp", '"-1 V/A"')).reason
