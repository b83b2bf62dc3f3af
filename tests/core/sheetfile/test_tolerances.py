"""Plus or minus of quantities by their path."""

from __future__ import annotations

import pytest

from gainbench.model import Tolerance
from gainbench.sheetfile import parse_sheet, quantity_paths


@pytest.mark.parametrize(
    ("path", "toml", "relative", "absolute"),
    [
        ("machine.inductance", '"20 %"', 0.2, None),
        ("machine.inductance", '"20%"', 0.2, None),
        ("machine.inductance", '"20 uH"', None, 20e-6),
        ("machine.inductance", '"0 %"', 0.0, None),
        ("machine.winding_temperature", '"40 K"', None, 40.0),
        ("train.ratio", "0.1", None, 0.1),
        ("train.ratio", '"1 %"', 0.01, None),
        ("train.efficiency", '"5 %"', 0.05, None),
        ("train.load_torque", '"100 %"', 1.0, None),
        ("train.load_torque", '"5 N*m"', None, 5.0),
        ("aims.current.kp", '"0.1 V/A"', None, 0.1),
        ("aims.speed.kp", '"5 mN*m*s/rad"', None, 5e-3),
        ("duty.load_step", '"10 mN*m"', None, 10e-3),
        ("stage.current_filter", '"1 us"', None, 1e-6),
    ],
)
def test_taken(demo, altered, path, toml, relative, absolute):
    sheet = parse_sheet(altered(demo, f'tolerance."{path}"', toml), "bench").sheet
    assert Tolerance(path=path, relative=relative, absolute=absolute) in sheet.tolerances


@pytest.mark.parametrize(
    ("path", "toml", "reason"),
    [
        ("machine.resistance", '"-10 %"', "at least 0"),
        ("machine.resistance", '"100 %"', "reaches down to 0"),
        ("machine.resistance", '"101 %"', "at most 100 %"),
        ("machine.resistance", '"0.6 ohm"', "reaches down to 0"),
        ("machine.resistance", '"10 V"', "a resistance is meant"),
        ("machine.resistance", "0.1", "a plain number has no unit"),
        ("machine.resistance", "true", "in percent or in the quantity's unit"),
        ("machine.resistance", '"nan %"', "must be finite"),
        ("machine.resistance", "[1]", "in percent or in the quantity's unit"),
        ("machine.winding_temperature", '"40 degC"', "a difference is in K"),
        ("machine.winding_temperature", '"10 %"', "write it in K"),
        ("machine.pole_pairs", '"10 %"', "only a quantity has a tolerance"),
        ("machine.kind", '"10 %"', "only a quantity has a tolerance"),
        ("machine.zzz", '"10 %"', "there is no quantity of this path"),
        ("machine", '"10 %"', "there is no quantity of this path"),
        ("train.ratio", "nan", "must be finite"),
        ("train.ratio", "inf", "must be finite"),
        ("train.ratio", "1" + "0" * 400, "at most"),
        ("train.ratio", "-0.1", "at least 0"),
        ("train.ratio", "3.0", "reaches down to 0"),
        ("train.ratio", '"0.1"', "in percent or in the quantity's unit"),
        ("kept[0].speed.kp", '"10 %"', "there is no quantity of this path"),
    ],
)
def test_refused(demo, altered, one_problem, path, toml, reason):
    problem = one_problem(altered(demo, f'tolerance."{path}"', toml))
    assert problem.path == f'tolerance."{path}"'
    assert reason in problem.reason


def test_path_without_quotes_is_the_same(demo):
    quoted = parse_sheet(demo, "bench").sheet
    plain = parse_sheet(demo.replace('"machine.resistance" =', "machine.resistance ="), "bench").sheet
    assert plain.tolerances == quoted.tolerances


def test_a_path_is_given_once(demo, one_problem):
    text = demo.replace('"machine.resistance" = "10 %"', '"machine.resistance" = "10 %"\nmachine.resistance = "5 %"')
    assert "given twice" in one_problem(text).reason


def test_every_quantity_may_have_one(demo):
    lines = [
        f'"{path}" = {chr(34)}1 K{chr(34)}' if path == "machine.winding_temperature" else f'"{path}" = "1 %"'
        for path in quantity_paths()
    ]
    text = demo.replace('"machine.resistance" = "10 %"', "\n".join(lines))
    assert [one.path for one in parse_sheet(text, "bench").sheet.tolerances] == list(quantity_paths())
