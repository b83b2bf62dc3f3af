"""The package data can be found, and the demo sheets are sheets."""

from __future__ import annotations

import pytest

from demo_log import EVIDENCE, LOG, TRUE
from demo_log import demo_log as made
from demo_step_log import demo_step_log as made_step
from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.identify import identify
from gainbench.evidence.reading import read_log
from gainbench.evidence.step_check import check_step
from gainbench.model import Experiment
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_log, demo_sheet, demo_sheet_names, recipe
from quantities import assert_quantity

STEP = "label-unwinder-step.csv"
STEP_EVIDENCE = f"""
[[evidence]]
log = "{STEP}"
experiment = "step-check"
[evidence.columns]
time = {{ column = "time [ms]", unit = "ms" }}
speed_reference = {{ column = "reference [rpm]", unit = "rpm" }}
speed = {{ column = "speed [rpm]", unit = "rpm" }}
current = {{ column = "current [A]", unit = "A" }}
voltage = {{ column = "voltage [V]", unit = "V" }}
"""


def test_the_sheet_that_opens_by_default_comes_first():
    names = demo_sheet_names()
    assert names[0] == "label-unwinder"
    assert len(set(names)) == len(names) >= 3


def test_demo_sheets_show_every_kind_of_machine_and_train():
    sheets = [parse_sheet(demo_sheet(name).read_text(encoding="utf-8"), name).sheet for name in demo_sheet_names()]
    assert {sheet.rig.machine.kind for sheet in sheets} == {"brushed-dc", "pm-sine", "pm-block"}
    assert {sheet.rig.train.kind for sheet in sheets} == {"rigid", "elastic"}
    assert len({sheet.title for sheet in sheets}) == len(sheets)


def test_there_is_no_other():
    with pytest.raises(KeyError, match="none"):
        demo_sheet("none")
    with pytest.raises(KeyError):
        demo_sheet("../sheets/label-unwinder")


def test_the_demo_log_is_what_its_script_makes():
    assert demo_log(LOG).read_text(encoding="utf-8") == made()


def test_the_demo_log_identifies_the_motor_it_was_made_with(tmp_path):
    (tmp_path / LOG).write_text(made(), encoding="utf-8")
    sheet = parse_sheet(demo_sheet("label-unwinder").read_text(encoding="utf-8") + EVIDENCE, "x.bench.toml").sheet
    found = identify(sheet, [read_log(tmp_path / one.log, one.columns) for one in sheet.evidence]).estimates
    for name, true in (
        (EstimateName.RESISTANCE, TRUE.resistance),
        (EstimateName.BACK_EMF_CONSTANT, TRUE.constant),
        (EstimateName.INERTIA, TRUE.inertia),
        (EstimateName.COULOMB_FRICTION, TRUE.coulomb),
    ):
        assert_quantity(found[name].value, true[0], rtol=0.02, unit=name.si, why="some noise over 5 s")


def test_every_experiment_has_its_recipe():
    for one in Experiment:
        text = recipe(one.value).read_text(encoding="utf-8")
        assert text.startswith("# ")
        assert "## What it cannot tell" in text
        assert "## How to run it" in text


def test_the_demo_step_is_what_its_script_makes_and_lies_near_the_prediction(tmp_path):
    text = demo_log(STEP).read_text(encoding="utf-8")
    assert text == made_step()
    (tmp_path / STEP).write_text(text, encoding="utf-8")
    sheet = parse_sheet(demo_sheet("label-unwinder").read_text(encoding="utf-8") + STEP_EVIDENCE, "x.bench.toml").sheet
    found = check_step(sheet, read_log(tmp_path / STEP, sheet.evidence[0].columns))
    assert found.outcome.fit_percent > 90.0
    assert found.measured_figures.rise_time_s > found.predicted_figures.rise_time_s
