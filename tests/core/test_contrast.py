"""Tunings side by side: each is the assessment it would be by itself, and differences are differences."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.contrast import FIGURES, Figure, contrast, sheet_tunings
from gainbench.kept import with_kept
from gainbench.model import HandGains, KeptTuning
from gainbench.results import Level, LoopFigures, ResponseFigures
from quantities import assert_quantity
from rigs import fixed_sheet

SOFT = KeptTuning(name="soft", current=HandGains(kp=2.0, ki=900.0), speed=HandGains(kp=0.05, ki=1.0))
WILD = KeptTuning(name="wild", current=HandGains(kp=2.0, ki=900.0), speed=HandGains(kp=9.0, ki=1.0))


@pytest.fixture(scope="module")
def sheet():
    return replace(fixed_sheet("plain"), kept=(SOFT, WILD))


@pytest.fixture(scope="module")
def found(sheet):
    return contrast(sheet_tunings(sheet, "plain.bench.toml"))


def column(subject, name):
    return FIGURES.index(Figure(subject=subject, name=name))


def test_the_design_comes_first_and_the_shelf_after_it(found, sheet):
    assert [(one.sheet_name, one.kept) for one in found.tunings] == [
        ("plain.bench.toml", None),
        ("plain.bench.toml", "soft"),
        ("plain.bench.toml", "wild"),
    ]
    assert found.tunings[0].assessment.speed.figures == assess(sheet).speed.figures
    assert found.tunings[1].assessment.speed.figures == assess(with_kept(sheet, SOFT)).speed.figures
    assert [one.level for one in found.tunings] == [one.assessment.findings[0].level for one in found.tunings]
    assert (found.tunings[0].level, found.tunings[2].level) == (Level.THIN, Level.BREAKS)
    assert found.breaks
    assert not contrast(found.tunings[:1]).breaks


def test_every_figure_of_loops_and_response_is_there():
    loop = {"kp", "ki"} | {one.name for one in fields(LoopFigures)} - {"stable"}
    names = {subject: {one.name for one in FIGURES if one.subject == subject} for subject in ("current", "speed")}
    assert names == {"current": loop | {"step_rise_s", "step_overshoot_percent"}, "speed": loop}
    assert {one.name for one in FIGURES if one.subject == "response"} == {one.name for one in fields(ResponseFigures)}
    assert len(set(FIGURES)) == len(FIGURES)


def test_values_are_those_of_the_assessments(found):
    for row, tuning in enumerate(found.tunings):
        held = tuning.assessment
        assert found.values[row, column("current", "kp")] == held.current.gains.kp
        assert found.values[row, column("speed", "ki")] == held.speed.gains.ki
        assert found.values[row, column("current", "bandwidth_hz")] == held.current.figures.bandwidth_hz
        assert found.values[row, column("current", "step_rise_s")] == held.locked_step.rise_s
    first = found.tunings[0].assessment
    assert found.values[0, column("speed", "phase_margin_deg")] == first.speed.figures.phase_margin_deg
    assert found.values[0, column("response", "peak_current_a")] == first.response.figures.peak_current_a
    assert found.values.shape == (3, len(FIGURES))
    assert not found.values.flags.writeable


def test_what_an_unstable_loop_has_not_is_not_a_number(found):
    wild = found.values[2]
    assert wild[column("speed", "kp")] == 9.0
    for subject, name in (("speed", "crossover_hz"), ("response", "overshoot_percent")):
        assert np.isnan(wild[column(subject, name)])
        assert np.isnan(found.differences[2, column(subject, name)])
        assert found.tunings[2].value(Figure(subject=subject, name=name)) is None


def test_differences_are_to_the_reference(found):
    again = contrast(found.tunings, reference=1)
    assert again.reference == 1
    there = column("speed", "crossover_hz")
    wanted = found.values[0, there] - found.values[1, there]
    assert_quantity(again.differences[0, there], wanted, unit="Hz", why="the same numbers")
    assert_quantity(found.differences[1, there], -wanted, unit="Hz", why="the same numbers")
    known = ~np.isnan(again.values[1])
    assert_quantity(again.differences[1, known], 0.0, unit="1", why="a number less itself")


def test_refused_targets_have_no_gains():
    sheet = fixed_sheet("plain")
    greedy = replace(sheet, aims=replace(sheet.aims, speed=replace(sheet.aims.speed, crossover=5e3)))
    (tuning,) = sheet_tunings(greedy, "greedy.bench.toml")
    assert tuning.value(Figure(subject="speed", name="kp")) is None
    assert tuning.level is Level.BREAKS
    assert all(one.level is Level.BREAKS for one in tuning.worst)
    assert tuning.worst


def test_there_must_be_a_reference(found):
    for tunings, reference in (((), 0), (found.tunings, 3), (found.tunings, -1)):
        with pytest.raises(ValueError, match="no tuning"):
            contrast(tunings, reference=reference)
